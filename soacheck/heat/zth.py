"""Positive first-order modes from a step response that is known at points.

A body with one heat source answers a step with a sum of saturating exponentials, all positive. The unknown
time constants are put on a dense logarithmic grid, so that only the gains are sought, by non-negative least
squares on the relative deviation. Time constants found this way describe the curve; they are no property of
any part of the body.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from soacheck.heat.nnls import nnls
from soacheck.trace import FloatArray

PER_DECADE = 6.0  # grid of time constants: curves without noise are met to about 1e-4
COARSER = (1.25, 1.5, 2.0)  # grids tried for fewer modes; a root of time is met to 1 %, 0.4 %, 0.05 %
MODES_WANTED = 8  # more than these are thinned
GUIDE_WEIGHT = 0.05  # of a point between the readings against a reading
GUIDE_WORST = 0.2  # the same when modes are left out
GUIDE_RAISED = 0.2  # and when readings are held by weight
MERGE_WITHIN = 10 ** (1.6 / PER_DECADE)  # neighbouring columns that stand for one time constant between them
THINNING_COST = 0.006  # relative deviation that may be given up for fewer modes
SETTLED = 7.0  # exp(-7) = 9e-4: time constants after which a mode counts as arrived
READ_TO = 1e-3  # a reading this close below the total has arrived: no chart is read finer


class PositiveModes(NamedTuple):
    """offset + sum(gain * (1 - exp(-t/tau))); error: greatest relative deviation of the unraised fit at the
    points."""

    tau: FloatArray  # (mode,) [s]
    gain: FloatArray  # (mode,) unit of z
    error: float


def positive_modes(
    t: FloatArray,
    z: FloatArray,
    *,
    offset: float = 0.0,
    total: float,
    raise_above: float = 0.02,
    guide: tuple[FloatArray, FloatArray] | None = None,
) -> PositiveModes:
    """Modes that fit offset + sum(gain * (1 - exp(-t/tau))) to z, and end in `total` exactly.

    Use for a transient thermal curve (offset 0, total R_th) or any other step response of a body that
    conducts heat. Where the fit deviates by more than `raise_above` it is replaced by the closest one that
    lies on or above every point; the error stays that of the fit before.

    Parameters
    ----------
    t : ndarray, shape (n,)
        Times, rising. [s]
    z : ndarray, shape (n,)
        Step response, not falling, from above 0 to `total` at most. [any]
    offset : float
        Part that answers at once, not above any z. [unit of z]
    total : float
        Value at the end of all time, the offset included. [unit of z]
    raise_above : float
        Relative deviation above which the fit is raised; below 0: always. [-]
    guide : pair of ndarray, shape (k,)
        More points t, z that steer the fit weakly and count neither in the error nor in the raising. [s],
        [unit of z]

    Returns
    -------
    PositiveModes
        tau (mode,) [s], gain (mode,) [unit of z], error [-].

    Range: n at least 1, 0 < t, 0 <= offset <= z <= total, z > 0, offset < total; else ValueError.
    Source: C. L. Lawson, R. J. Hanson, Solving Least Squares Problems (1974), chapter 23, for the solver.
    """
    t, z = np.asarray(t, dtype=np.float64), np.asarray(z, dtype=np.float64)
    wide = 1e-12 * total
    if t.ndim != 1 or t.shape != z.shape or t.size == 0 or not bool(np.all(np.isfinite(t) & (t > 0))):
        raise ValueError("a step response is as many values as positive times")
    if not (0 <= offset < total and bool(np.all((z > 0) & (z >= offset - wide) & (z <= total + wide)))):
        raise ValueError("a step response lies between its offset and its total")
    all_t, all_z = t, z
    if guide is not None:
        all_t, all_z = np.concatenate([t, guide[0]]), np.concatenate([z, guide[1]])
    weight = np.where(np.arange(all_t.size) < t.size, 1.0, GUIDE_WEIGHT)
    fit = _Fit(t=all_t, z=all_z, weight=weight, offset=offset, total=total, readings=t.size)
    tau, gain = fit.thinned(fit.solve(fit.grid(PER_DECADE), all_z, weight), raise_above)
    error = float(np.max(np.abs(fit.deviation(tau, gain))))
    if error > raise_above:
        tau, gain = _raised(fit)
    return PositiveModes(tau, gain, error)


class _Fit(NamedTuple):
    """The points and what is asked of the modes."""

    t: FloatArray
    z: FloatArray
    weight: FloatArray
    offset: float
    total: float
    readings: int  # the first ones are readings, the rest is guide

    def grid(self, per_decade: float) -> FloatArray:
        """Time constants from well below the first time to where the last reading may still be far from the
        total."""
        last, span = int(np.argmax(self.t)), self.total - self.offset
        beyond = 3.0 * span / max(float(self.z[last]) - self.offset, 1e-3 * span)
        low, high = np.log10(self.t.min()) - 1.0, np.log10(self.t[last] * beyond)
        return np.asarray(10 ** np.linspace(low, high, round((high - low) * per_decade) + 1), dtype=np.float64)

    def solve(self, grid: FloatArray, target: FloatArray, weight: FloatArray) -> tuple[FloatArray, FloatArray]:
        """tau and gain of the modes among `grid` that meet a target best and end in the total exactly."""
        span = self.total - self.offset
        rows = -np.expm1(-self.t[:, None] / grid) * (weight / self.z)[:, None]
        heavy = 1e3 * float(weight.max())
        matrix = np.concatenate([np.full((1, grid.size), heavy / span), rows])
        gain = nnls(matrix, np.concatenate([[heavy], (target - self.offset) * weight / self.z]))
        used = gain > 1e-9 * span
        return grid[used], gain[used] * (span / gain[used].sum())

    def deviation(self, tau: FloatArray, gain: FloatArray) -> FloatArray:
        """Relative deviation at the readings."""
        t, z = self.t[: self.readings], self.z[: self.readings]
        return np.asarray((self.offset - np.expm1(-t[:, None] / tau) @ gain) / z - 1.0, dtype=np.float64)

    def worst(self, tau: FloatArray, gain: FloatArray) -> float:
        """Greatest relative deviation, at the guide weighted."""
        off = (self.offset - np.expm1(-self.t[:, None] / tau) @ gain) / self.z - 1.0
        return float(np.max(np.abs(off * np.maximum(self.weight, GUIDE_WORST))))

    def thinned(self, first: tuple[FloatArray, FloatArray], raise_above: float) -> tuple[FloatArray, FloatArray]:
        """The fewest modes that do next to as well: neighbours merged, or a coarser grid."""
        best, deviation = first, self.worst(*first)
        allowed = min(deviation + THINNING_COST, max(deviation, raise_above))
        if first[0].size <= MODES_WANTED:
            return first
        for grid in (_merged(*first), *(self.grid(coarse) for coarse in COARSER)):
            other = self.solve(grid, self.z, self.weight)
            if other[0].size < best[0].size and self.worst(*other) <= allowed:
                best = other
        return best


def _merged(tau: FloatArray, gain: FloatArray) -> FloatArray:
    """Neighbouring pairs of time constants replaced by their mean, weighted by gain on the logarithm."""
    result: list[float] = []
    k = 0
    while k < tau.size:
        pair = k + 1 < tau.size and tau[k + 1] <= tau[k] * MERGE_WITHIN
        part = slice(k, k + 2 if pair else k + 1)
        result.append(float(np.exp(np.average(np.log(tau[part]), weights=gain[part]))))
        k = part.stop
    return np.array(result)


def _raised(fit: _Fit) -> tuple[FloatArray, FloatArray]:
    """The closest fit that lies on or above every reading.

    Readings below which the fit falls are weighted up and aimed at from above until none is left; what is
    then left over is moved into the fastest mode. Only a reading within READ_TO of the total, which no sum of
    modes reaches at a finite time, may lie that much above the fit.
    """
    t, z = fit.t[: fit.readings], fit.z[: fit.readings]
    wanted = np.minimum(z, fit.total * (1 - READ_TO))
    grid = fit.grid(COARSER[-1])
    arrived = t[z >= fit.total * (1 - READ_TO)]
    if arrived.size:
        grid = np.append(grid[grid < arrived[0] / SETTLED], arrived[0] / SETTLED)
    target, weight = fit.z.copy(), np.maximum(fit.weight, GUIDE_RAISED)
    for _ in range(30):
        tau, gain = fit.solve(grid, target, weight)
        short = wanted - (1 + fit.deviation(tau, gain)) * z
        below = np.flatnonzero(short > 0)
        if not below.size:
            return tau, gain
        weight[below] = np.minimum(weight[below] * 3.0, 30.0)
        target[below] = np.minimum(target[below] + 1.2 * short[below] + 1e-4 * z[below], fit.total)
    span = fit.total - fit.offset
    reached = (1 + fit.deviation(tau, gain)) * z
    fast = fit.offset - span * np.expm1(-t / grid[0])
    move = float(np.max(np.clip((wanted - reached) / np.maximum(fast - reached, 1e-300), 0.0, 1.0)))
    return np.append(grid[0], tau), np.append(move * span, (1 - move) * gain)
