"""The operating temperatures of one duty.

Heat runs junction - case - interface - sink - air. The device's own power waveform enters at the junction; the other
devices on the sink are taken to heat it in step with this one (exact for equal parallel devices, cautious for the
other half of a push-pull pair). A sink whose heat capacity is not stated is held at the mean of what flows into it:
its time constant is minutes, a period is not (common practice).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from soacheck.balance.place import Place, ratio_of
from soacheck.device.ratings import Device
from soacheck.duty import Duty
from soacheck.heat.ladder import Ladder, network
from soacheck.heat.modes import Modes, Response, one_shot, periodic
from soacheck.locus import Locus, Use
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced

ELEMENTS = 250_000  # of the largest array of one piece of work: what stays in the processor's cache
SAMPLES = 256  # a locus with fewer times is cut finer before its temperatures are looked for
HELD_SINK_LONGEST = 1.0  # [s] a one-shot up to this long leaves a sink of unknown heat capacity as it was


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Operating:
    """A duty at its operating temperatures. Arrays (case, member) unless said; kelvin; NaN where unknown.

    T_case: mean over the period, for one shot at the moment of T_j_peak; T_case_peak: greatest over the locus.
    T_j_peak: NaN when the device states no Z_th_jc and power varies; T_j_bound is then T_case + P_peak * R_th_jc
    (equal to T_j_peak otherwise).
    T_before: one shot only: junction temperature just before it; NaN otherwise.
    T_j, T_case_t, T_heatsink_t: (case, member, time), NaN where unknown.
    locus is None (and all figures NaN) when the load kind lacked something: see duty.unknown.
    missing: what the temperatures lack. state: mode states at the moment of T_j_peak (case, member, mode) [W].
    """

    duty: Duty
    device: Device
    ladder: Ladder | None
    locus: Locus | None
    P_mean: FloatArray
    P_peak: FloatArray
    T_air: FloatArray
    T_heatsink: FloatArray
    T_case: FloatArray
    T_case_peak: FloatArray
    T_j_mean: FloatArray
    T_j_peak: FloatArray
    T_j_bound: FloatArray
    T_before: FloatArray
    T_j: FloatArray
    T_case_t: FloatArray
    T_heatsink_t: FloatArray
    R_th_jc: Traced | None  # as used: the cautious one where ratings disagree
    T_ambient: Traced | None
    sink: str  # resistance, ideal, none, absent
    missing: tuple[Missing, ...] = ()
    modes: Modes | None = None
    state: FloatArray | None = None


def _nan(cases: int, members: int, times: int = 1) -> FloatArray:
    return np.full((cases, members, times), np.nan)


def unknown(duty: Duty, place: Place, cases: int) -> Operating:
    """A duty whose locus could not be worked out: every figure is NaN."""
    flat, full = _nan(cases, 1)[:, :, 0], _nan(cases, 1)
    return Operating(
        duty=duty,
        device=place.device,
        ladder=place.ladder,
        locus=None,
        P_mean=flat,
        P_peak=flat,
        T_air=flat,
        T_heatsink=flat,
        T_case=flat,
        T_case_peak=flat,
        T_j_mean=flat,
        T_j_peak=flat,
        T_j_bound=flat,
        T_before=flat,
        T_j=full,
        T_case_t=full,
        T_heatsink_t=full,
        R_th_jc=place.R_th_jc,
        T_ambient=place.path.T_ambient,
        sink=place.path.sink,
        missing=place.missing,
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Before:
    """What a one-shot duty starts from: the hottest member of the hottest preceding duty of each case.

    T_air, T_heatsink, T_case, T_j, P_mean: (case, 1). state (case, 1, mode) of `modes` at the junction's peak, where
    all candidates share one network; else None and the steady state at the mean power stands in.
    """

    name: str
    T_air: FloatArray
    T_heatsink: FloatArray
    T_case: FloatArray
    T_j: FloatArray
    P_mean: FloatArray
    modes: Modes | None = None
    state: FloatArray | None = None


def before_of(candidates: Sequence[Operating]) -> Before | None:
    """The hottest of some steady duties, case by case; None when there is none with a locus."""
    candidates = [operating for operating in candidates if operating.locus is not None]
    if not candidates:
        return None
    picked = [_hottest_member(operating) for operating in candidates]
    T_j = np.stack([np.nan_to_num(one.T_j, nan=np.inf) for one in picked])  # not known stays not known
    winner = np.argmax(T_j, axis=0)[None]

    def choose(arrays: list[FloatArray]) -> FloatArray:
        wide = winner.reshape(winner.shape + (1,) * (arrays[0].ndim - 2))
        return np.asarray(np.take_along_axis(np.stack(arrays), wide, axis=0)[0], dtype=np.float64)

    first = picked[0]
    shared = first.state is not None and all(
        one.state is not None and first.modes is not None and _same(first.modes, one.modes) for one in picked
    )
    names = {picked[k].name for k in winner.ravel().tolist()}
    return Before(
        name=" / ".join(sorted(names)),
        T_air=choose([one.T_air for one in picked]),
        T_heatsink=choose([one.T_heatsink for one in picked]),
        T_case=choose([one.T_case for one in picked]),
        T_j=choose([one.T_j for one in picked]),
        P_mean=choose([one.P_mean for one in picked]),
        modes=first.modes if shared else None,
        state=choose([one.state for one in picked if one.state is not None]) if shared else None,
    )


def _hottest_member(operating: Operating) -> Before:
    at = np.argmax(np.nan_to_num(operating.T_j_bound, nan=-np.inf), axis=1)[:, None]

    def pick(a: FloatArray) -> FloatArray:
        return np.take_along_axis(np.broadcast_to(a, operating.P_mean.shape), at, axis=1)

    state = operating.state
    return Before(
        name=operating.duty.name,
        T_air=pick(operating.T_air),
        T_heatsink=pick(operating.T_heatsink),
        T_case=pick(operating.T_case),
        T_j=pick(operating.T_j_bound),
        P_mean=pick(operating.P_mean),
        modes=operating.modes,
        state=None if state is None else np.take_along_axis(state, at[..., None], axis=1),
    )


def settle(
    duty: Duty, place: Place, cases: int, *, before: Before | None = None, sink_follows: bool = False
) -> Operating:
    """Temperatures of a duty.

    before: for a one-shot duty, the operating point it starts from. sink_follows: for a one-shot duty on a sink of
    unknown heat capacity, let the sink follow the heat at once (the upper bound) instead of holding it.
    """
    if duty.locus is None:
        return unknown(duty, place, cases)
    locus = duty.locus(None)
    if locus.use is not Use.HELD and locus.shape[2] < SAMPLES:
        locus = locus.refined(-(-SAMPLES // max(locus.shape[2] - 1, 1)))
    if locus.use is Use.ONCE:
        return _once(duty, place, locus, cases, before, sink_follows)
    return _steady(duty, place, locus, cases)


def _steady(duty: Duty, place: Place, locus: Locus, cases: int) -> Operating:
    """Held points and periodic loci."""
    _, members, times = locus.shape
    P = np.broadcast_to(locus.p_mean, (cases, members))
    P_peak = np.broadcast_to(locus.p_peak, (cases, members))
    ratio = np.broadcast_to(ratio_of(duty), (cases, 1))
    T_air, T_sink = place.air(P, ratio), place.sink(P, ratio)
    T_case = place.case(P, ratio)
    R_jc = place.R_jc
    T_j_mean = T_case + R_jc * P
    state = modes = None
    if locus.use is Use.HELD:
        T_j, T_case_t, T_sink_t = T_j_mean[..., None], T_case[..., None], T_sink[..., None]
        T_case_peak, T_j_peak = T_case, T_j_mean
    elif place.ladder is None:
        T_j, T_sink_t = (
            _nan(cases, members, times),
            np.broadcast_to(T_sink[..., None], (cases, members, times)),
        )
        T_case_t = np.broadcast_to(T_case[..., None], (cases, members, times))
        T_case_peak = T_case
        still = P_peak <= P * (1 + 1e-12)
        T_j_peak = np.where(still, T_j_mean, np.nan)
    else:
        modes, base = _modes(place, ratio, T_air, T_sink, T_case)
        shape = (cases, members, times)
        T_j, T_case_t, T_sink_t = np.empty(shape), np.empty(shape), np.empty(shape)
        state = np.empty((cases, members, modes.tau.shape[1]))
        width = max(1, ELEMENTS // (cases * times * modes.tau.shape[1]))
        drive = (locus.t, locus.p, locus.p_mid)
        for start in range(0, members, width):
            part = slice(start, start + width)
            t, p, p_mid = (_members(a, part) for a in drive)
            response = periodic(modes, t, p, p_mid)
            T_j[:, part], T_case_t[:, part], T_sink_t[:, part] = _nodes(modes, response, _members(base, part), place)
            state[:, part] = _at_peak(response.state, T_j[:, part])
        T_case_peak, T_j_peak = T_case_t.max(axis=2), _peak(T_j, locus.t)
    bound = np.where(np.isfinite(T_j_peak), T_j_peak, T_case + R_jc * P_peak)
    return Operating(
        duty=duty,
        device=place.device,
        ladder=place.ladder,
        locus=locus,
        P_mean=P,
        P_peak=P_peak,
        T_air=T_air,
        T_heatsink=T_sink,
        T_case=T_case,
        T_case_peak=T_case_peak,
        T_j_mean=T_j_mean,
        T_j_peak=T_j_peak,
        T_j_bound=bound,
        T_before=np.full((cases, members), np.nan),
        T_j=T_j,
        T_case_t=T_case_t,
        T_heatsink_t=T_sink_t,
        R_th_jc=place.R_th_jc,
        T_ambient=place.path.T_ambient,
        sink=place.path.sink,
        missing=place.missing,
        modes=modes,
        state=state,
    )


def _once(duty: Duty, place: Place, locus: Locus, cases: int, before: Before | None, sink_follows: bool) -> Operating:
    """One shot from a warm state."""
    _, members, times = locus.shape
    P = np.broadcast_to(locus.p_mean, (cases, members))
    P_peak = np.broadcast_to(locus.p_peak, (cases, members))
    ratio = np.broadcast_to(ratio_of(duty), (cases, 1))
    missing = place.missing
    R_jc = place.R_jc
    if duty.T_start is not None:
        start = np.broadcast_to(duty.T_start.value[:, None], (cases, 1))
        T_air, T_sink0, T_case0, T_before = place.air(P * 0, ratio), start, start, start
        drop = np.zeros((cases, 1))
    elif before is not None:
        T_air, T_sink0, T_case0, T_before = before.T_air, before.T_heatsink, before.T_case, before.T_j
        drop = before.P_mean
    else:
        T_air = T_sink0 = T_case0 = T_before = drop = np.full((cases, 1), np.nan)
        missing = (
            *missing,
            Missing(key="load.T_start", where="the junction temperature just before the shot"),
        )
    if place.ladder is None:
        T_case = T_case0 + (place.R_after_case(ratio) * P_peak if sink_follows else 0.0)
        T_case = np.broadcast_to(T_case, (cases, members))
        T_j = _nan(cases, members, times)
        T_case_t = np.broadcast_to(T_case[..., None], (cases, members, times))
        T_sink_t = np.broadcast_to(T_sink0[..., None], (cases, members, times))
        T_j_peak, T_case_peak = np.full((cases, members), np.nan), T_case
        T_sink = np.broadcast_to(T_sink0, (cases, members))
        bound = np.maximum(np.broadcast_to(T_before, (cases, members)), T_case + R_jc * P_peak)
        modes = state = None
    else:
        modes, base = _modes(place, ratio, T_air, T_sink0, T_case0, sink_follows=sink_follows)
        # the state in which the last duty left the ladder: its steady drops on top of the node the boundary stands for,
        # and a common shift so that the case starts where that duty left it
        steady = drop[..., None] * np.ones(modes.tau[:, None, :].shape)
        case = modes.nodes.index("case")
        shift = T_case0 - base - (modes.direct[:, case] + modes.gain[:, case].sum(axis=-1))[:, None] * drop
        begin = steady + shift[..., None] * modes.uniform[:, None, :]
        if duty.T_start is None and before is not None and _same(modes, before.modes) and before.state is not None:
            begin = before.state
        response = one_shot(modes, locus.t, locus.p, locus.p_mid, begin)
        T_j, T_case_t, T_sink_t = _nodes(modes, response, base, place)
        T_j_peak, T_case_peak = np.maximum(_peak(T_j, locus.t), T_before), T_case_t.max(axis=2)
        at = np.argmax(np.nan_to_num(T_j, nan=-np.inf), axis=2)[..., None]
        T_case = np.take_along_axis(T_case_t, at, axis=2)[..., 0]
        T_sink = np.take_along_axis(np.broadcast_to(T_sink_t, T_j.shape), at, axis=2)[..., 0]
        bound, state = T_j_peak, None
    with np.errstate(invalid="ignore"):
        T_j_mean = _time_mean(T_j, locus.t)
    return Operating(
        duty=duty,
        device=place.device,
        ladder=place.ladder,
        locus=locus,
        P_mean=P,
        P_peak=P_peak,
        T_air=np.broadcast_to(T_air, (cases, members)),
        T_heatsink=T_sink,
        T_case=T_case,
        T_case_peak=T_case_peak,
        T_j_mean=T_j_mean,
        T_j_peak=T_j_peak,
        T_j_bound=bound,
        T_before=np.broadcast_to(T_before, (cases, members)),
        T_j=T_j,
        T_case_t=T_case_t,
        T_heatsink_t=T_sink_t,
        R_th_jc=place.R_th_jc,
        T_ambient=place.path.T_ambient,
        sink=place.path.sink,
        missing=missing,
        modes=modes,
        state=state,
    )


def needs_sink_bound(duty: Duty, place: Place) -> bool:
    """Whether a one-shot lasts so long that a sink of unknown heat capacity cannot be taken as held."""
    if duty.locus is None:
        return False
    locus = duty.locus(None)
    open_sink = place.path.sink == "none" or (place.path.sink == "resistance" and place.path.C_th_sink is None)
    return locus.use is Use.ONCE and open_sink and bool(np.any(locus.duration > HELD_SINK_LONGEST))


def _modes(
    place: Place,
    ratio: FloatArray,
    T_air: FloatArray,
    T_sink: FloatArray,
    T_case: FloatArray,
    *,
    sink_follows: bool = False,
) -> tuple[Modes, FloatArray]:
    """The network that carries the ripple, and the temperature of its boundary (case, member)."""
    path = place.path
    R_jc = place.R_jc[:, 0]
    if path.sink == "case" or (path.sink == "none" and not sink_follows):  # the case is the boundary
        return network(place.ladder, R_jc, np.full_like(R_jc, 1e-9), None, None), T_case
    R_cs = np.maximum(place.R_cs[:, 0], 1e-9)
    if path.sink == "resistance" and (path.C_th_sink is not None or sink_follows):
        others = place.sink_ratio(ratio)[:, 0]
        seen = place.R_sink[:, 0] * others
        C = path.C_th_sink.value / others if path.C_th_sink is not None else None
        return network(place.ladder, R_jc, R_cs, seen, C), T_air + place.R_sink * place.extra
    if path.sink == "none":
        return network(place.ladder, R_jc, R_cs, None, None), T_air
    return network(place.ladder, R_jc, R_cs, None, None), T_sink


def _nodes(
    modes: Modes, response: Response, base: FloatArray, place: Place
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """T_j, T_case, T_heatsink over time; the sink is the boundary where the network does not hold it."""
    rise = response.rise
    named = dict(zip(modes.nodes, range(len(modes.nodes)), strict=True))
    T_j = base[..., None] + rise[:, :, named["junction"]]
    T_case = base[..., None] + rise[:, :, named["case"]]
    if place.path.sink in ("none", "case"):
        return T_j, T_case, np.full(T_j.shape, np.nan)
    sink = rise[:, :, named["heatsink"]] if "heatsink" in named else 0.0
    return T_j, T_case, np.broadcast_to(base[..., None] + sink, T_j.shape)


def _peak(T: FloatArray, t: FloatArray) -> FloatArray:
    """Greatest value over time, with a parabola through the three samples about it (never below the sample)."""
    at = np.argmax(np.nan_to_num(T, nan=-np.inf), axis=2)[..., None]
    inner = np.clip(at, 1, T.shape[2] - 2)
    t = np.broadcast_to(t, T.shape)
    (a, b, c), (ta, tb, tc) = ([np.take_along_axis(x, inner + k, axis=2)[..., 0] for k in (-1, 0, 1)] for x in (T, t))
    top = T.max(axis=2)
    with np.errstate(divide="ignore", invalid="ignore"):
        s1, s2 = (b - a) / (tb - ta), (c - b) / (tc - tb)
        curve = (s2 - s1) / (tc - ta)
        s = 0.5 * (ta + tb) - s1 / (2 * curve)
        value = a + s1 * (s - ta) + curve * (s - ta) * (s - tb)
    good = (curve < 0) & (s > ta) & (s < tc) & (value > top) & (value - top < np.maximum(b - a, b - c))
    return np.where(good, value, top)


def _members(a: FloatArray, part: slice) -> FloatArray:
    """Some members of an array whose member axis may have the length 1."""
    return a if a.shape[1] == 1 else a[:, part]


def _at_peak(state: FloatArray, T_j: FloatArray) -> FloatArray:
    at = np.argmax(np.nan_to_num(T_j, nan=-np.inf), axis=2)[:, :, None, None]
    full = np.broadcast_to(state, (*T_j.shape[:2], *state.shape[2:]))
    return np.take_along_axis(full, at, axis=3)[..., 0]


def _time_mean(T: FloatArray, t: FloatArray) -> FloatArray:
    dt = np.broadcast_to(np.diff(t, axis=2), (*T.shape[:2], T.shape[2] - 1))
    return np.asarray(((T[..., 1:] + T[..., :-1]) / 2 * dt).sum(axis=2) / dt.sum(axis=2), dtype=np.float64)


def _same(a: Modes, b: Modes | None) -> bool:
    return (
        b is not None
        and a.nodes == b.nodes
        and a.tau.shape == b.tau.shape
        and bool(np.allclose(a.tau, b.tau, rtol=1e-9))
    )
