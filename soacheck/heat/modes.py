"""A thermal network as its modes, and what the modes answer.

A network seen from the junction is a sum of first-order modes. With the mode states y_m in watts,

    tau_m * dy_m/dt = p(t) - y_m,      T_obs(t) - T_boundary = direct_obs * p(t) + sum_m gain_obs,m * y_m(t)

so a step of 1 W gives direct + sum gain * (1 - exp(-t/tau)), the steady state is y_m = P, and every node that
is observed (junction, case, heat sink) shares the same states.

Power is a parabola in each segment of time, so the state at the end of a segment is an exact linear form in
the state at its start and three powers. Stringing the segments together is a first-order recursion; it is
done by lanes, in about twice the square root of the number of segments numpy operations, and never by
marching through periods.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import factorial, isqrt

import numpy as np

from soacheck.trace import FloatArray, IntArray, frozen


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Modes:
    """tau (case, mode) [s]; gain (case, node, mode) [K/W]; direct (case, node) [K/W]; uniform (case, mode)
    [W/K].

    nodes: names of the observed nodes, "junction", "case", "heatsink".
    uniform: mode states when every heat capacity is 1 K above the boundary, per kelvin of it.
    A network without heat capacities has no modes (mode axis of length 0) and only `direct`.
    """

    nodes: tuple[str, ...]
    tau: FloatArray
    gain: FloatArray
    direct: FloatArray
    uniform: FloatArray

    def __post_init__(self) -> None:
        for name in ("tau", "gain", "direct", "uniform"):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        if self.gain.shape != (*self.direct.shape, self.tau.shape[-1]) or self.direct.shape[1] != len(self.nodes):
            raise ValueError("modes: gain is (case, node, mode), direct (case, node), tau (case, mode)")

    def step(self, t: FloatArray) -> FloatArray:
        """Rise of each node at times t (time,) after a step of 1 W: (case, node, time). [K/W]"""
        grown = -np.expm1(-np.asarray(t, dtype=np.float64) / self.tau[:, :, None])
        return np.asarray(self.direct[:, :, None] + self.gain @ grown, dtype=np.float64)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Response:
    """rise (case, member, node, time) over the boundary [K] at the times asked; state (case, member, mode,
    time) [W]."""

    rise: FloatArray
    state: FloatArray


def periodic(modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray) -> Response:
    """Periodic steady state, closed form.

    t (1|case, 1|member, time) one period, p the power at those times, p_mid (…, time-1) in the middle of each
    segment: the power is the parabola through the three (exact when v and i are straight lines). The state
    that a period started from rest ends in, over 1 - exp(-period/tau), is the state it starts in for ever.
    """
    length = (t[..., -1] - t[..., 0])[:, :, None]
    if not bool(np.all(length > 0)):
        raise ValueError("a period needs a length")
    return _respond(modes, t, p, p_mid, None)


def one_shot(modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray, start: FloatArray) -> Response:
    """Response from the mode states `start` (case, member, mode) [W] at t[0]."""
    return _respond(modes, t, p, p_mid, np.asarray(start, dtype=np.float64))


def _respond(modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray, start: FloatArray | None) -> Response:
    """One period (start None) or one shot. Inside, the axes are (time, case, mode, member): time first, so
    that each numpy operation of the recursion runs over contiguous memory."""
    cases, members, times = _shape(modes, t, p, p_mid, start)
    t, p, p_mid = (_time_first(a) for a in (t, p, p_mid))
    tau = modes.tau[None, :, :, None]
    steps, which = _alike(np.diff(t, axis=0))
    x = steps / tau
    before, middle, after = (np.empty(x.shape) for _ in range(3))
    for mode in range(x.shape[2]):  # a slow mode needs few terms of the series
        before[:, :, mode], middle[:, :, mode], after[:, :, mode] = segment_weights(x[:, :, mode])
    decay = np.exp(-x)
    if which is not None:
        before, middle, after, decay = (a[..., which] for a in (before, middle, after, decay))
    feed = np.empty((times - 1, cases, tau.shape[2], members))
    np.multiply(before, p[:-1], out=feed)
    feed += middle * p_mid
    feed += after * p[1:]
    whole = -np.expm1(-(t[-1] - t[0]) / tau[0])
    begin = None if start is None else np.swapaxes(start, 1, 2)
    state = _recursion(decay, feed, whole, begin)
    rise = np.matmul(modes.gain, state)
    if modes.direct.any():
        rise += modes.direct[:, :, None] * p
    return Response(rise=rise.transpose(1, 3, 2, 0), state=state.transpose(1, 3, 2, 0))


def _alike(steps: FloatArray) -> tuple[FloatArray, IntArray | None]:
    """Time steps (time, 1, 1, member) with members that share them counted once, and which one each member has.

    Levels of one frequency have the same times; the weights of a segment are the dearest part of a response.
    """
    members = steps.shape[3]
    if steps.shape[1] > 1 or members == 1:
        return steps, None
    columns = steps[:, 0, 0]
    length = columns.sum(axis=0)
    order = np.argsort(length, kind="stable")
    first = order[np.concatenate([[True], np.diff(length[order]) != 0])]
    which = np.searchsorted(length[first], length)
    if len(first) == members or not np.array_equal(columns[:, first][:, which], columns):
        return steps, None
    return steps[..., first], which


def _shape(
    modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray, start: FloatArray | None
) -> tuple[int, int, int]:
    times = t.shape[2]
    if times < 2 or p.shape[2] != times or p_mid.shape[2] != times - 1:
        raise ValueError("power is wanted at every time and in the middle of every segment, two times at least")
    leading = [a.shape[:2] for a in (t, p, p_mid)] + [(modes.tau.shape[0], 1)]
    cases, members = np.broadcast_shapes(*leading, *([] if start is None else [start.shape[:2]]))
    return cases, members, times


def _time_first(a: FloatArray) -> FloatArray:
    """(case, member, time) to (time, case, mode 1, member)."""
    return np.ascontiguousarray(a.transpose(2, 0, 1))[:, :, None, :]


SERIES_BELOW = 1.0  # the recursion for phi loses digits below, the series needs few terms there
_SERIES = tuple((-1.0) ** j / factorial(j + 3) for j in range(17))  # phi_3(-x), first neglected term 3e-19 at x = 1


def _terms(x: float) -> int:
    """Terms of the series that are needed up to x, for a neglected one of 3e-19 of the sum."""
    neglected = (6 * x**j * abs(term) for j, term in enumerate(_SERIES))
    return next((j for j, size in enumerate(neglected) if size < 3e-19 and j > 0), len(_SERIES))


def segment_weights(x: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Weights of the powers before, in the middle of and after a segment in the mode state at its end.

    The state is y = exp(-x) * y_before + the integral over s in 0..1 of x * exp(-x (1 - s)) * p(s), p the
    parabola through the three powers. With phi_1(-x) = (1 - exp(-x))/x and phi_(k+1)(-x) = (1/k! -
    phi_k(-x))/x that is x (phi_1 - 3 phi_2 + 4 phi_3), x (4 phi_2 - 8 phi_3), x (4 phi_3 - phi_2).

    Parameters
    ----------
    x : ndarray, shape (...)
        Length of the segment over the time constant. [-]

    Returns
    -------
    tuple of three ndarray, shape (...)
        Weights. [-]

    Range: x >= 0, accurate from 0 to the largest float.
    Source: M. Hochbruck, A. Ostermann, Exponential integrators, Acta Numerica 19 (2010) 209-286, for the phi
    functions; the weights by integration.
    """
    small = np.minimum(x, SERIES_BELOW)
    terms = _terms(float(small.max(initial=0.0)))
    phi_3 = np.full_like(small, _SERIES[terms - 1])
    for term in _SERIES[: terms - 1][::-1]:
        phi_3 *= small
        phi_3 += term
    phi_2 = 0.5 - small * phi_3
    phi_1 = 1.0 - small * phi_2
    before, middle, after = (
        small * (phi_1 - 3.0 * phi_2 + 4.0 * phi_3),
        small * (4.0 * phi_2 - 8.0 * phi_3),
        small * (4.0 * phi_3 - phi_2),
    )
    large = x > SERIES_BELOW
    if large.any():
        z = x[large]
        decay = np.exp(-z)
        phi_1 = -np.expm1(-z) / z
        phi_2 = (1.0 - phi_1) / z
        before[large] = 3.0 * phi_1 - 4.0 * phi_2 - decay
        middle[large] = 8.0 * phi_2 - 4.0 * phi_1
        after[large] = 1.0 + phi_1 - 4.0 * phi_2
    return before, middle, after


def _recursion(decay: FloatArray, feed: FloatArray, whole: FloatArray, begin: FloatArray | None) -> FloatArray:
    """y[0] = begin, y[k+1] = decay[k] * y[k] + feed[k] along the first axis; the periodic start when begin is
    None.

    Time is cut into lanes of equal length that are run side by side from rest; then each lane's start is
    carried from the lane before it. `whole` is 1 - the product of all decays, computed without cancellation.
    `feed` is used up.
    """
    count = feed.shape[0]
    length = max(isqrt(count), 1)
    lanes = -(-count // length)
    state = np.zeros((1 + lanes * length, *feed.shape[1:]))
    state[1 : count + 1] = feed
    kept = np.ones((lanes * length, *decay.shape[1:]))
    kept[:count] = decay
    lane_state = state[1:].reshape(lanes, length, *feed.shape[1:])
    lane_kept = kept.reshape(lanes, length, *decay.shape[1:])
    for i in range(1, length):
        lane_state[:, i] += lane_kept[:, i] * lane_state[:, i - 1]
        lane_kept[:, i] *= lane_kept[:, i - 1]
    if begin is None:
        end = np.zeros(feed.shape[1:])
        for j in range(lanes):
            end = end * lane_kept[j, -1] + lane_state[j, -1]
        begin = end / whole
    carry = np.empty((lanes, *feed.shape[1:]))
    carry[0] = state[0] = begin
    for j in range(lanes - 1):
        carry[j + 1] = carry[j] * lane_kept[j, -1] + lane_state[j, -1]
    lane_state += lane_kept * carry[:, None]
    return state[: count + 1]
