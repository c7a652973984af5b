"""Superposition: what a locus of any shape does to the hot spot, from the curves alone.

With x(t) = i/I_dc(v) and g the hot spot's step response, the response of g to x, one shot from rest or in its periodic
steady state, may not go above 1. It covers bursts, humps of any shape and a mean under the pulses, where residence
alone errs. g is taken at the voltage of greatest x. No response goes above the greatest x: a locus inside the dc curve
is inside. Without a dc curve the longest pulse stands in its place, for shots no longer than it.

Points that neither test judges (a current rating is the allowance, the device is on or turned off by a reverse drive)
still heat. They warm the hot spot with i over what second breakdown or dissipation would allow there, at most 1; the
response is read only where judged points are, so that they cannot touch themselves. On, that share is small, because
what dissipation allows at the voltage of an on device is far above its current. Where such a point is above 1 it counts
as 1 whatever the currents are divided by: `current` or `peak-current` exceeds there, at a utilisation of its own.
Where a pulse curve says nothing at the voltage of greatest x, g there is only known to lie between that of the printed
pulses about it: the greater counts, the lesser proves.
Source: our own derivation.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.heat.modes import Modes, one_shot, periodic, segment_weights
from soacheck.limit.allowance import Lines, allowed
from soacheck.limit.hot_spot import HotSpot, fit
from soacheck.limit.path import Path
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

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


def printed(
    lines: Lines, v: FloatArray, members: IntArray, *, least: bool = False, duty_factor: FloatArray | None = None
) -> tuple[FloatArray, BoolArray]:
    """g (case, member, n) of the printed curves at `times_of` and one voltage (case, member) of each member, and where
    it is not printed, because a pulse curve says nothing at that voltage.

    There g is what the next longer pulse has, the most it can be; or, `least`, no less than the next shorter pulse has,
    and below the shortest that is known in proportion to time. duty_factor (case, member): what repeats more densely
    than a curve is drawn for has nothing proven by it; absent: every curve counts.
    """
    widths = lines.widths
    measure = lines.longest
    if measure is None or not widths:
        raise ValueError("a hot spot's response needs pulse curves")
    norm = allowed(measure, v[..., None], members).current[..., 0]
    made = []
    for width in widths:
        each = [allowed(line, v[..., None], members).current[..., 0] for line in lines.pulses if line.pulse == width]
        if duty_factor is not None:
            bounds = (line.duty_factor for line in lines.pulses if line.pulse == width)
            each = [np.where(duty_factor > most, np.nan, one) for one, most in zip(each, bounds, strict=True)]
        with np.errstate(divide="ignore", invalid="ignore"):
            # Lower of two curves of one width.
            made.append(np.clip(norm / np.minimum.reduce(each), 1e-9, 1.0))
    if lines.dc is not None:
        made.append(np.ones_like(norm))
    else:
        made[-1] = np.ones_like(norm)
    g = np.stack(made, axis=-1)
    unknown = np.isnan(g)
    if bool(np.any(unknown)):
        g = _filled(times_of(lines), g, least)
    return np.maximum.accumulate(g, axis=-1), unknown


def _filled(times: FloatArray, g: FloatArray, least: bool) -> FloatArray:
    g = g.copy()
    known = ~np.isnan(g)
    for k in range(g.shape[-1] - 2, -1, -1):
        slower = times[k] / times[k + 1] if least else 1.0
        g[..., k] = np.where(known[..., k], g[..., k], g[..., k + 1] * slower)
    if least:
        for k in range(1, g.shape[-1]):
            shorter = known[..., :k].any(axis=-1) & ~known[..., k]
            g[..., k] = np.where(shorter, g[..., k - 1], g[..., k])
    return g


def superpose(
    path: Path, x: FloatArray, spot: HotSpot, *, warm: FloatArray | None = None, least: HotSpot | None = None
) -> Superposition:
    """Greatest response of the hot spot to x (case, member, time) on the finer path.

    warm: share of the points that are not judged, which heat and cannot touch. least: the slowest that the hot spot can
    be where `spot` is not known; absent: as spot.
    """
    whole = x if warm is None else x + warm
    response, slow = _responses(path, whole, spot)
    if least is not None:
        _, slow = _responses(path, whole, least)
    if warm is not None:
        touches = _touches(path, x, warm)
        response, slow = (np.where(touches, a, 0.0) for a in (response, slow))
    at = response.argmax(axis=2)
    value = np.minimum(response.max(axis=2), whole.max(axis=2))
    return Superposition(value=value, proven=np.minimum(slow.max(axis=2), value), at=2 * at)


def _responses(path: Path, x: FloatArray, spot: HotSpot) -> tuple[FloatArray, FloatArray]:
    """Response at the samples of the locus, (case, member, time), and the same where the part that answers at once
    comes as if in proportion to time."""
    tau = np.append(spot.tau, spot.shortest)[None]
    modes = Modes(
        nodes=(), tau=tau, gain=np.zeros((1, 0, tau.size)), direct=np.zeros((1, 0)), uniform=np.zeros_like(tau)
    )
    t, grid, middle = path.t[..., ::2], x[..., ::2], x[..., 1::2]
    if path.use is Use.REPEATED:
        state = periodic(modes, t, grid, middle).state
    else:
        state = one_shot(modes, t, grid, middle, np.zeros((*x.shape[:2], tau.size))).state
    later = np.zeros(grid.shape)
    for delay, gain in zip(spot.times, np.moveaxis(spot.delayed, 2, 0), strict=True):
        used = np.flatnonzero(np.any(gain != 0, axis=(0, 1)))
        if used.size == 0 or (path.use is Use.ONCE and delay >= np.max(t[..., -1] - t[..., 0])):
            continue
        before = _before(t, grid, middle, state[:, :, used], spot.tau[used], float(delay), path.use)
        later += np.einsum("cmk,cmkt->cmt", gain[..., used], before)
    later *= spot.short[..., None]
    at_once = (spot.offset * spot.short)[..., None]
    return later + at_once * grid, later + at_once * state[:, :, -1]


def _before(
    t: FloatArray, x: FloatArray, middle: FloatArray, state: FloatArray, tau: FloatArray, delay: float, use: Use
) -> FloatArray:
    """States (case, member, mode, time) of modes a delay before each sample, exact: x is a parabola in each segment."""
    first, period = t[..., :1], t[..., -1:] - t[..., :1]
    since = t - first - delay
    if use is Use.REPEATED:
        since = np.mod(since, period)
    began, s = since >= 0, first + np.maximum(since, 0.0)
    rows = [np.searchsorted(a, b, side="right") for a, b in zip(_flat(t), _flat(s), strict=True)]
    n = np.clip(np.stack(rows).reshape(t.shape) - 1, 0, t.shape[2] - 2)
    start, length = np.take_along_axis(t, n, axis=2), np.take_along_axis(np.diff(t, axis=2), n, axis=2)
    part = np.clip((s - start) / np.where(length > 0, length, 1.0), 0.0, 1.0)
    weights = segment_weights((part * length)[:, :, None] / tau[:, None])
    decay = np.exp(-(part * length)[:, :, None] / tau[:, None])
    at = np.broadcast_to(n, x.shape)
    p_0, p_1, p_2 = (np.take_along_axis(a, k, axis=2) for a, k in ((x, at), (middle, at), (x, at + 1)))

    def there(f: FloatArray) -> FloatArray:
        return np.asarray(p_0 * (1 - f) * (1 - 2 * f) + p_1 * 4 * f * (1 - f) + p_2 * f * (2 * f - 1))

    answer = decay * np.take_along_axis(state, np.broadcast_to(at[:, :, None], state.shape), axis=3)
    for weight, power in zip(weights, (p_0, there(part / 2), there(part)), strict=True):
        answer += weight * power[:, :, None]
    return np.asarray(answer * began[:, :, None], dtype=np.float64)


def _flat(a: FloatArray) -> FloatArray:
    return a.reshape(-1, a.shape[2])


def _touches(path: Path, x: FloatArray, warm: FloatArray) -> BoolArray:
    """Samples where the response counts: at a judged point, or at the end of a piece that has some."""
    judged, long = x > 0, np.diff(path.t[..., ::2], axis=2) > 0
    some = (judged[..., :-1:2] | judged[..., 1::2] | judged[..., 2::2]) & long
    near = judged[..., ::2].copy()
    near[..., :-1] |= some
    near[..., 1:] |= some
    return np.asarray(near & ~(warm[..., ::2] > 0), dtype=np.bool_)


def spots_of(
    lines: Lines, g: FloatArray, unknown: BoolArray, v: FloatArray, members: IntArray, duty_factor: FloatArray
) -> tuple[HotSpot, HotSpot | None]:
    """Modes of the hot spot from what `printed` gave at voltages v of members, and the slowest it can be where that is
    not known, or rests on a curve for repeated pulses of a smaller duty factor."""
    times = times_of(lines)
    spot = fit(times, g)
    dense = any(bool(np.any(duty_factor > line.duty_factor)) for line in lines.pulses)
    if not dense and not bool(np.any(unknown)):
        return spot, None
    return spot, fit(times, printed(lines, v, members, least=True, duty_factor=duty_factor)[0])


def times_of(lines: Lines) -> FloatArray:
    """Printed pulse widths and the time that stands for dc, rising, (n,). [s]"""
    widths = lines.widths
    return np.asarray(widths if lines.dc is None else (*widths, DC_ABOVE * widths[-1]))


def mean_of(path: Path, x: FloatArray) -> FloatArray:
    """Time mean of x over a period, (case, member)."""
    dt = np.diff(path.t[..., ::2], axis=2)
    a, m, b = x[..., :-1:2], x[..., 1::2], x[..., 2::2]
    return np.asarray(np.sum(dt * (a + 4 * m + b), axis=2) / 6 / np.sum(dt, axis=2), dtype=np.float64)
