"""Settling a duty: steady duties in closed form, shots from the state that the last duty left."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.balance.operating import Before, Operating, same_network, unknown
from soacheck.balance.place import Place, ratio_of
from soacheck.duty import Duty
from soacheck.heat.ladder import network
from soacheck.heat.modes import Modes, Response, one_shot, periodic
from soacheck.locus import Locus, Use
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray

ELEMENTS = 250_000  # of the largest array of one piece of work: what stays in the processor's cache
SAMPLES = 256  # a locus with fewer times is cut finer before its temperatures are looked for
# A period or a shot up to this long leaves what has an unknown heat capacity as it was (common practice): a heat sink's
# time constant is minutes; the case of a device without one holds about 1 J/K, and 10 ms of 100 W are 1 J.
HELD_SINK = 1.0  # [s]
HELD_CASE = 0.01  # [s]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Heat:
    """Power of a locus on its place: P, P_peak (case, member) [W], ratio (case, 1)."""

    locus: Locus
    P: FloatArray
    P_peak: FloatArray
    ratio: FloatArray

    @property
    def shape(self) -> tuple[int, int, int]:
        """(case, member, time)."""
        return self.P.shape[0], self.P.shape[1], self.locus.shape[2]


def settle(
    duty: Duty, place: Place, cases: int, *, before: Before | None = None, sink_follows: bool = False
) -> Operating:
    """Temperatures of a duty.

    before: for a one-shot duty, the operating point it starts from. sink_follows: where a sink of unknown heat capacity
    cannot be taken as held (`needs_sink_bound`), let it follow the heat at once: the upper bound of all temperatures.
    """
    place = place.beside(duty)
    if duty.locus is None:
        return unknown(duty, place, cases)
    locus = duty.locus(None)
    if locus.use is not Use.HELD and locus.shape[2] < SAMPLES:
        locus = locus.refined(-(-SAMPLES // max(locus.shape[2] - 1, 1)))
    shape = (cases, locus.shape[1])
    heat = _Heat(
        locus=locus,
        P=np.broadcast_to(locus.p_mean, shape),
        P_peak=np.broadcast_to(locus.p_peak, shape),
        ratio=np.broadcast_to(ratio_of(duty), (cases, 1)),
    )
    empty = replace(unknown(duty, place, cases), locus=locus, P_mean=heat.P, P_peak=heat.P_peak)
    if locus.use is Use.ONCE:
        return _once(empty, place, heat, before, sink_follows)
    held = _steady(empty, place, heat, sink_follows=False)
    if not sink_follows:
        return held
    return _merged(held, _steady(empty, place, heat, sink_follows=True), _open(place, heat))


def needs_sink_bound(duty: Duty, place: Place) -> bool:
    """Whether a period or a shot lasts so long that a sink of unknown heat capacity cannot be taken as held."""
    if duty.locus is None:
        return False
    locus = duty.locus(None)
    shape = locus.shape[:2]
    P, P_peak = (np.broadcast_to(a, shape) for a in (locus.p_mean, locus.p_peak))
    return bool(np.any(_open(place, _Heat(locus=locus, P=P, P_peak=P_peak, ratio=np.ones((1, 1))))))


def _open(place: Place, heat: _Heat) -> BoolArray:
    """Members whose sink, or case without one, is neither held nor of known heat capacity. (case, member)"""
    path = place.path
    longest = {"none": HELD_CASE, "resistance": HELD_SINK}.get(path.sink, np.inf)
    if path.sink == "resistance" and path.C_th_sink is not None:
        longest = np.inf
    if place.boxed:  # the air of a box has a heat capacity that nothing states
        longest = min(longest, HELD_SINK)
    if heat.locus.use is Use.HELD:
        longest = np.inf
    long = np.broadcast_to(heat.locus.duration, heat.P.shape) > longest
    even = (heat.locus.use is Use.REPEATED) & (heat.P_peak <= heat.P * (1 + 1e-9))  # a constant has no ripple
    return np.asarray(long & ~even, dtype=np.bool_)


def _merged(held: Operating, follows: Operating, open_: BoolArray) -> Operating:
    """The upper bound for the members that need one, the held values for the others."""

    def choose(a: FloatArray, b: FloatArray) -> FloatArray:
        return np.where(open_ if a.ndim == 2 else open_[..., None], b, a)

    return replace(
        held,
        T_air=choose(held.T_air, follows.T_air),
        T_heatsink=choose(held.T_heatsink, follows.T_heatsink),
        T_case=choose(held.T_case, follows.T_case),
        T_case_peak=choose(held.T_case_peak, follows.T_case_peak),
        T_j_mean=choose(held.T_j_mean, follows.T_j_mean),
        T_j_peak=choose(held.T_j_peak, follows.T_j_peak),
        T_j_bound=choose(held.T_j_bound, follows.T_j_bound),
        T_j=choose(held.T_j, follows.T_j),
        T_case_t=choose(held.T_case_t, follows.T_case_t),
        T_heatsink_t=choose(held.T_heatsink_t, follows.T_heatsink_t),
    )


def _steady(empty: Operating, place: Place, heat: _Heat, *, sink_follows: bool) -> Operating:
    """Held points and periodic loci."""
    locus, P, P_peak, ratio = heat.locus, heat.P, heat.P_peak, heat.ratio
    R_jc = place.R_jc
    T_air, T_sink, T_case = (at(P, ratio) for at in (place.air, place.sink, place.case))
    T_j_mean = T_case + R_jc * P
    steady = replace(empty, T_air=T_air, T_heatsink=T_sink, T_case=T_case, T_j_mean=T_j_mean)
    if locus.use is Use.HELD:
        return replace(
            steady,
            T_case_peak=T_case,
            T_j_peak=T_j_mean,
            T_j_bound=T_j_mean,
            T_j=T_j_mean[..., None],
            T_case_t=T_case[..., None],
            T_heatsink_t=T_sink[..., None],
        )
    if place.ladder is None:
        T_case_peak = place.case(P_peak, ratio) if sink_follows else T_case
        still = P_peak <= P * (1 + 1e-12)
        T_j_peak = np.where(still, T_j_mean, np.nan)
        return replace(
            steady,
            T_case_peak=T_case_peak,
            T_j_peak=T_j_peak,
            T_j_bound=np.where(still, T_j_mean, T_case_peak + R_jc * P_peak),
            T_j=np.full(heat.shape, np.nan),
            T_case_t=np.broadcast_to(T_case_peak[..., None], heat.shape),
            T_heatsink_t=np.broadcast_to(T_sink[..., None], heat.shape),
        )
    air = place.air(P_peak, ratio) if sink_follows else T_air
    modes, base = _modes(place, ratio, air, T_sink, T_case, sink_follows=sink_follows)
    T_j, T_case_t, T_sink_t = np.empty(heat.shape), np.empty(heat.shape), np.empty(heat.shape)
    state = np.empty((*P.shape, modes.tau.shape[1]))
    width = max(1, ELEMENTS // (P.shape[0] * heat.shape[2] * max(modes.tau.shape[1], 1)))
    drive = (locus.t, locus.p, locus.p_mid)
    for start in range(0, P.shape[1], width):
        part = slice(start, start + width)
        t, p, p_mid = (_members(a, part) for a in drive)
        response = periodic(modes, t, p, p_mid)
        T_j[:, part], T_case_t[:, part], T_sink_t[:, part] = _nodes(modes, response, _members(base, part), place)
        state[:, part] = _at_peak(response.state, T_j[:, part])
    T_j_peak = _peak(T_j, locus.t)
    return replace(
        steady,
        T_case_peak=T_case_t.max(axis=2),
        T_j_peak=T_j_peak,
        T_j_bound=np.where(np.isfinite(T_j_peak), T_j_peak, T_case + R_jc * P_peak),
        T_j=T_j,
        T_case_t=T_case_t,
        T_heatsink_t=T_sink_t,
        modes=modes,
        state=state,
    )


def _once(empty: Operating, place: Place, heat: _Heat, before: Before | None, sink_follows: bool) -> Operating:
    """One shot from a warm state."""
    duty, locus, P, P_peak, ratio = empty.duty, heat.locus, heat.P, heat.P_peak, heat.ratio
    cases = P.shape[0]
    missing = place.missing
    if duty.T_start is not None:
        # the junction starts as stated; the sink no colder than the air it stands in
        T_before = np.broadcast_to(duty.T_start.value[:, None], (cases, 1))
        T_air = np.broadcast_to(place.air(np.zeros((cases, 1)), ratio), (cases, 1))
        T_sink0, T_case0, drop = np.fmax(T_before, T_air), T_before, np.zeros((cases, 1))
    elif before is not None:
        T_air, T_sink0, T_case0, T_before = before.T_air, before.T_heatsink, before.T_case, before.T_j
        drop = before.P_mean
    else:
        T_air = T_sink0 = T_case0 = T_before = drop = np.full((cases, 1), np.nan)
        missing = (*missing, Missing(key="load.T_start", where="the junction temperature just before the shot"))
    if sink_follows:
        T_air = np.fmax(T_air, place.air(P_peak, ratio))
    shot = replace(
        empty,
        T_air=np.broadcast_to(T_air, P.shape),
        T_before=np.broadcast_to(T_before, P.shape),
        missing=missing,
    )
    if place.ladder is None:
        above = place.R_after_case(ratio) * P_peak if sink_follows else 0.0
        T_case = np.broadcast_to(T_case0 + above, P.shape)
        return replace(
            shot,
            T_heatsink=np.broadcast_to(T_sink0, P.shape),
            T_case=T_case,
            T_case_peak=T_case,
            T_j_bound=np.maximum(shot.T_before, T_case + place.R_jc * P_peak),
            T_j=np.full(heat.shape, np.nan),
            T_case_t=np.broadcast_to(T_case[..., None], heat.shape),
            T_heatsink_t=np.broadcast_to(T_sink0[..., None], heat.shape),
        )
    edge = T_case0 if duty.T_start is None else T_sink0  # of a path that ends at the case
    modes, base = _modes(place, ratio, T_air, T_sink0, edge, sink_follows=sink_follows)
    # the state in which the last duty left the ladder: its steady drops on top of the node the boundary stands for,
    # and a common shift so that the case starts where that duty left it
    steady = drop[..., None] * np.ones(modes.tau[:, None, :].shape)
    case = modes.nodes.index("case")
    shift = T_case0 - base - (modes.direct[:, case] + modes.gain[:, case].sum(axis=-1))[:, None] * drop
    begin = steady + shift[..., None] * modes.uniform[:, None, :]
    if duty.T_start is None and before is not None and same_network(modes, before.modes) and before.state is not None:
        begin = before.state
    T_j, T_case_t, T_sink_t = _nodes(modes, one_shot(modes, locus.t, locus.p, locus.p_mid, begin), base, place)
    T_j_peak = np.maximum(_peak(T_j, locus.t), T_before)
    at = np.argmax(np.nan_to_num(T_j, nan=-np.inf), axis=2)[..., None]
    return replace(
        shot,
        T_heatsink=np.take_along_axis(np.broadcast_to(T_sink_t, T_j.shape), at, axis=2)[..., 0],
        T_case=np.take_along_axis(T_case_t, at, axis=2)[..., 0],
        T_case_peak=T_case_t.max(axis=2),
        T_j_mean=_time_mean(T_j, locus.t),
        T_j_peak=T_j_peak,
        T_j_bound=T_j_peak,
        T_j=T_j,
        T_case_t=T_case_t,
        T_heatsink_t=T_sink_t,
        modes=modes,
    )


def _modes(
    place: Place,
    ratio: FloatArray,
    T_air: FloatArray,
    T_sink: FloatArray,
    T_case: FloatArray,
    *,
    sink_follows: bool,
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
    if path.sink == "none" or (path.sink == "ideal" and sink_follows):
        return network(place.ladder, R_jc, R_cs, None, None), np.fmax(T_air, T_sink)
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
    """Greatest value over time, with a parabola through the three samples about it (never below the sample).

    Where power turns a corner the temperature does, too, and the sample at the corner is the peak: the slopes that
    the two sides have there must agree in sign before anything is put between the samples.
    """
    at = np.argmax(np.nan_to_num(T, nan=-np.inf), axis=2)[..., None]
    inner = np.clip(at, 2, T.shape[2] - 3)
    t = np.broadcast_to(t, T.shape)
    (z, a, b, c, d), (tz, ta, tb, tc, td) = (
        [np.take_along_axis(x, inner + k, axis=2)[..., 0] for k in (-2, -1, 0, 1, 2)] for x in (T, t)
    )
    top: FloatArray = T.max(axis=2)
    with np.errstate(divide="ignore", invalid="ignore"):
        s0, s1, s2, s3 = (a - z) / (ta - tz), (b - a) / (tb - ta), (c - b) / (tc - tb), (d - c) / (td - tc)
        left = s1 + (s1 - s0) / (tb - tz) * (tb - ta)
        right = s2 - (s3 - s2) / (td - tb) * (tc - tb)
        curve = (s2 - s1) / (tc - ta)
        s = 0.5 * (ta + tb) - s1 / (2 * curve)
        value = a + s1 * (s - ta) + curve * (s - ta) * (s - tb)
    good = (
        (left * right > 0)
        & (curve < 0)
        & (s > ta)
        & (s < tc)
        & (value > top)
        & (value - top < np.maximum(b - a, b - c))
    )
    return np.where(good & (at[..., 0] == inner[..., 0]), value, top)


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
