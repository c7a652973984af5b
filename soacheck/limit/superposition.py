"""Superposition: what a locus of any shape does to the hot spot, from the curves alone.

With x(t) = i/I_dc(v) and g the hot spot's step response, the response of g to x, one shot from rest or in its periodic
steady state, may not go above 1. It covers bursts, humps of any shape and a mean under the pulses, where residence
alone errs. g is taken at the voltage of greatest x. No response goes above the greatest x: a locus inside the dc curve
is inside. Without a dc curve the longest pulse stands in its place, for shots no longer than it.
Source: our own derivation.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.heat.modes import Modes, one_shot, periodic
from soacheck.limit.allowance import Lines, allowed
from soacheck.limit.hot_spot import HotSpot, fit
from soacheck.limit.path import Path
from soacheck.locus import Use
from soacheck.trace import FloatArray, IntArray

DC_ABOVE = 10.0  # dc stands this far above the longest printed pulse


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Superposition:
    """Greatest response over time (case, member), the sample it stands at, and what is proven of it.

    proven: the greatest response when the hot spot answers to pulses below the shortest printed one no faster than in
    proportion to time, so that a response above 1 does not rest on where the chart ends.
    """

    value: FloatArray
    proven: FloatArray
    at: IntArray


def printed(lines: Lines, v: FloatArray, members: IntArray) -> tuple[FloatArray, FloatArray]:
    """Times (n,) and g (case, member, n) of the printed curves at one voltage (case, member) of each member."""
    widths = lines.widths
    measure = lines.longest
    if measure is None or not widths:
        raise ValueError("a hot spot's response needs pulse curves")
    norm = allowed(measure, v[..., None], members).current[..., 0]
    g = []
    for width in widths:
        each = [allowed(line, v[..., None], members).current[..., 0] for line in lines.pulses if line.pulse == width]
        with np.errstate(divide="ignore", invalid="ignore"):
            # Lower of two curves of one width; where a pulse curve says nothing, dc is all that is known.
            g.append(np.clip(np.nan_to_num(norm / np.minimum.reduce(each), nan=1.0), 1e-9, 1.0))
    times = list(widths)
    if lines.dc is not None:
        times.append(DC_ABOVE * widths[-1])
        g.append(np.ones_like(g[0]))
    else:
        g[-1] = np.ones_like(g[0])
    return np.asarray(times), np.maximum.accumulate(np.stack(g, axis=-1), axis=-1)


def superpose(path: Path, x: FloatArray, spot: HotSpot) -> Superposition:
    """Greatest response of the hot spot to x (case, member, time) on the finer path."""
    # One more mode: the part that g answers at once, as if it came in proportion to time.
    tau = np.append(spot.tau, spot.shortest)[None]
    modes = Modes(
        nodes=(), tau=tau, gain=np.zeros((1, 0, tau.size)), direct=np.zeros((1, 0)), uniform=np.zeros_like(tau)
    )
    t, grid, middle = path.t[..., ::2], x[..., ::2], x[..., 1::2]
    if path.use is Use.REPEATED:
        state = periodic(modes, t, grid, middle).state
    else:
        state = one_shot(modes, t, grid, middle, np.zeros((*x.shape[:2], tau.size))).state
    later = np.einsum("cmk,cmkt->cmt", spot.gain, state[:, :, :-1])
    response = later + spot.offset[..., None] * grid
    slow = later + spot.offset[..., None] * state[:, :, -1]
    at = response.argmax(axis=2)
    top = x.max(axis=2)
    value = np.minimum(response.max(axis=2) * spot.short, top)
    return Superposition(value=value, proven=np.minimum(slow.max(axis=2), value), at=2 * at)


def spot_of(lines: Lines, v: FloatArray, members: IntArray) -> HotSpot:
    """Modes of the hot spot at one voltage of each member."""
    times, g = printed(lines, v, members)
    return fit(times, g)


def mean_of(path: Path, x: FloatArray) -> FloatArray:
    """Time mean of x over a period, (case, member)."""
    dt = np.diff(path.t[..., ::2], axis=2)
    a, m, b = x[..., :-1:2], x[..., 1::2], x[..., 2::2]
    return np.asarray(np.sum(dt * (a + 4 * m + b), axis=2) / 6 / np.sum(dt, axis=2), dtype=np.float64)
