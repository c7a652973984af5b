"""Duties of a push-pull stage: idle, the levels asked for, a shorted output."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from soacheck.duty import Duty, Fitted, Level, Limiter, Members, picked
from soacheck.load.parts import push_pull_facts as facts
from soacheck.load.parts.levels import Driven, every_level, first_best, frequencies
from soacheck.load.parts.push_pull_stage import PushPull, column, driven_by, law_of
from soacheck.load.parts.swing import OVERDRIVE, HeldOutput, clipped, held
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray, IntArray, Traced, distinct, found, frozen, given

_ROUNDS, _POINTS = 5, 9
_HELD = 257  # output voltages from rail to rail, 0 among them


def every_duty(load: PushPull, fitted: Fitted) -> tuple[Duty, ...]:
    """All duties, for the worst of the parallel devices of one half."""
    driven = driven_by(load, fitted)
    if load.f is None:
        levels = _held_levels(load, fitted, driven)
    elif load.level == "any":
        levels = _any_level(load, fitted, driven)
    else:
        levels = _at_level(load, fitted, driven)
    return (_idle(load, fitted, driven), *levels, *_shorted(load, fitted))


def _always(locus: Locus) -> Callable[[FloatArray | None], Locus]:
    def at(T_j: FloatArray | None) -> Locus:
        return locus  # the currents follow the load, not the temperature

    return at


def _heat(load: PushPull, fitted: Fitted, halves: float | FloatArray) -> FloatArray:
    """Dissipation of all devices over the worst one's, (case, 1): a half is 1/share of its worst device."""
    return np.asarray(load.amplifiers * halves / column(fitted.share), dtype=np.float64)


def _idle(load: PushPull, fitted: Fitted, driven: Driven) -> Duty:
    zero = np.zeros((1, 1))
    point = held(driven.output, zero, np.ones((1, 1)))
    return Duty(
        name="idle",
        half=fitted.half,
        locus=_always(point.locus),
        heat_ratio=_heat(load, fitted, 2.0),
        facts=facts.idle_facts(load, fitted),
    )


def _limiter(load: PushPull, fitted: Fitted, locus: Locus) -> Limiter | None:
    """The limiter beside what the levels of a locus ask of one half.

    Levels are not cut to I_limit: it is the current into a short, and a limiter that follows the output voltage lets
    more pass at a level. Cut to it, a level that the circuit does reach would be left out.
    """
    if load.I_limit is None:
        return None
    most = np.max(locus.i_peak / column(fitted.share), axis=1)
    how = "greatest current of one half over the levels looked at, the limiter left out"
    return Limiter(I_limit=load.I_limit, I_peak=found("I_half_peak", most, "A", how))


def _grid_of(load: PushPull, driven: Driven) -> FloatArray:
    """Frequencies looked at, (case, n): one; both ends for a resistance; else chosen by the load's course."""
    if load.f is None:
        raise ValueError("a held output has no frequency")
    low, high = column(load.f[0]), column(load.f[1])
    if load.one_frequency:
        return low
    low, high = np.broadcast_arrays(low, high)
    if load.resistive:
        return np.concatenate([low, high], axis=1)
    return frequencies(driven, low, high, load.table_rows())


def _f_fact(load: PushPull, f: FloatArray, what: str) -> Traced:
    """The frequency of a duty, (case,)."""
    if load.f is None:
        raise ValueError("a held output has no frequency")
    if load.one_frequency:
        return load.f[0].named("f")
    ends = (load.f[0].named("f_low"), load.f[1].named("f_high"))
    return found("f", f[:, 0], "Hz", f"frequency of the stated range with the {what}", *ends)


def _any_level(load: PushPull, fitted: Fitted, driven: Driven) -> tuple[Duty, ...]:
    levels = every_level(driven, _grid_of(load, driven), class_b_only=load.class_b, resistance=load.resistive)
    heat = _heat(load, fitted, 2.0)
    worst_sheet = facts.sheet_of(load, fitted, _f_fact(load, levels.worst_f, "greatest mean dissipation"))
    if load.class_b:
        V = facts.worst_swing(worst_sheet)
    else:
        V = found(
            "V",
            levels.worst_V[:, 0],
            "V",
            f"level of greatest mean dissipation, searched; {law_of(fitted.device.kind)}",
            worst_sheet.named["V_rail"],
            worst_sheet.named["V_max"],
            worst_sheet.named["Z_mod"],
            worst_sheet.named["phi"],
            load.I_Q.named("I_Q"),
        )
    full_sheet = facts.sheet_of(load, fitted, _f_fact(load, levels.full_f, "greatest mean dissipation at full level"))
    full_V = full_sheet.of("V", "V_max", "V")
    worst = Duty(
        name="worst-level",
        half=fitted.half,
        locus=_always(levels.worst),
        heat_ratio=heat,
        facts=facts.sine_facts(worst_sheet, V, levels.worst.p_mean[:, 0], fitted),
        level="worst",
        load_angle=worst_sheet.named["phi"],
    )
    full = Duty(
        name="full-level",
        half=fitted.half,
        locus=_always(levels.full),
        heat_ratio=heat,
        facts=facts.sine_facts(full_sheet, full_V, levels.full.p_mean[:, 0], fitted),
        level="full",
        load_angle=full_sheet.named["phi"],
    )

    def at_member(member: IntArray) -> tuple[Traced, ...]:
        here = _f_fact(load, picked(levels.f, member)[:, None], "level that governs")
        sheet = facts.sheet_of(load, fitted, here)
        swing = facts.looked_at(sheet, picked(levels.V, member))
        return (*facts.sine_facts(sheet, swing, picked(levels.locus.p_mean, member), fitted), here)

    every = Duty(
        name="any-level",
        half=fitted.half,
        locus=_always(levels.locus),
        heat_ratio=heat,
        listed=False,
        members=Members(name="level", unit="V", value=frozen(load.amplifiers * levels.V)),
        facts=worst.facts,
        facts_at=at_member,
        limiter=_limiter(load, fitted, levels.locus),
    )
    return worst, full, every


def _at_level(load: PushPull, fitted: Fitted, driven: Driven) -> tuple[Duty, ...]:
    """A stated or clipped level, at each frequency of the range."""
    f = _grid_of(load, driven)
    V = np.stack([_stated(load, fitted, f[:, n]).value for n in range(f.shape[1])], axis=1)
    if load.level == "clipped":
        R = load.resistance() if load.resistive else None
        locus = clipped(driven.output, V, f, R, load.Z_at)
    else:
        V_max = driven.swing(load.Z_at(f))
        locus = driven.at(V / V_max, f)[1]
    P = locus.p_mean
    hottest = first_best(P)
    at = np.broadcast_to(f, P.shape)
    one = f.shape[1] == 1

    def sheet_at(member: IntArray, what: str) -> tuple[facts.Sheet, Traced]:
        here = _f_fact(load, picked(at, member)[:, None], what)
        return facts.sheet_of(load, fitted, here), here

    def made(member: IntArray, sheet: facts.Sheet, here: Traced) -> tuple[Traced, ...]:
        swing, mean = facts.stated_swing(sheet), picked(P, member)
        if load.level == "clipped":
            return (*facts.clipped_facts(sheet, swing, mean, OVERDRIVE), here)
        return (*facts.sine_facts(sheet, swing, mean, fitted), here)

    worst_sheet, worst_f = sheet_at(hottest[:, 0], "greatest mean dissipation")
    return (
        Duty(
            name="at-level",
            half=fitted.half,
            locus=_always(locus),
            heat_ratio=_heat(load, fitted, 2.0),
            facts=made(hottest[:, 0], worst_sheet, worst_f),
            facts_at=None if one else lambda member: made(member, *sheet_at(member, "point that governs")),
            members=Members() if one else Members(name="f", unit="Hz", value=frozen(at)),
            level="stated",
            load_angle=worst_sheet.named["phi"],
            limiter=_limiter(load, fitted, locus),
        ),
    )


def _stated(load: PushPull, fitted: Fitted, f: FloatArray) -> Traced:
    return facts.stated_swing(facts.sheet_of(load, fitted, given("f", f, "Hz", "load.f")))


def _held_levels(load: PushPull, fitted: Fitted, driven: Driven) -> tuple[Duty, ...]:
    """Each output voltage of either sign held for ever, positive towards the rail of the half looked at.

    Above 0 this half carries the load; below 0 the other one does, and this half stands at more than its rail.
    """
    sheet = facts.sheet_of(load, fitted, None)
    if load.level != "any":
        V = facts.stated_swing(sheet)
        return (_held_duty("at-level", "stated", fitted, driven, (V, facts.other_way(V)), sheet),)
    if load.class_b:
        V = facts.worst_held(sheet)
    else:
        V = found(
            "V",
            _worst_held(driven, column(sheet.named["V_max"]), load.resistance())[:, 0],
            "V",
            f"searched, both signs; {law_of(fitted.device.kind)}",
            *sheet.named.values(),
            load.I_Q.named("I_Q"),
        )
    V_max = sheet.of("V", "V_max", "V")
    worst = _held_duty("worst-level", "worst", fitted, driven, (V,), sheet)
    full = _held_duty("full-level", "full", fitted, driven, (V_max, facts.other_way(V_max)), sheet)
    return worst, full, _held_any(fitted, driven, V, sheet, worst.facts)


def _held_any(fitted: Fitted, driven: Driven, worst: Traced, sheet: facts.Sheet, said: tuple[Traced, ...]) -> Duty:
    """Every output voltage from rail to rail, rising, and the one of greatest dissipation as last member."""
    load = sheet.load
    V_max = column(sheet.named["V_max"])
    tried = _held_voltages(fitted, driven, V_max, load.resistance())
    rows = max(tried.shape[0], worst.value.size)
    both = [np.broadcast_to(x, (rows, x.shape[1])) for x in (tried, column(worst))]
    levels = np.concatenate(both, axis=1)
    point = held(driven.output, levels, load.resistance())
    P = point.locus.p_mean

    def at_member(member: IntArray) -> tuple[Traced, ...]:
        swing = facts.looked_at(sheet, picked(levels, member))
        return facts.held_facts(sheet, swing, picked(P, member), fitted)

    return Duty(
        name="any-level",
        half=fitted.half,
        locus=_always(point.locus),
        heat_ratio=_held_ratio(load, fitted, point),
        others=_others(load, fitted, point),
        listed=False,
        members=Members(name="level", unit="V", value=frozen(load.amplifiers * levels)),
        facts=said,
        facts_at=at_member,
        limiter=_limiter(load, fitted, point.locus),
    )


def _held_voltages(fitted: Fitted, driven: Driven, V_max: FloatArray, R: FloatArray) -> FloatArray:
    """Output voltages looked at, (case, n), rising: evenly from rail to rail, and the corners of the safe area.

    The corners are met as ideal class B would have them; an idle current moves them by its drop over a resistor.
    """
    corners = distinct(np.concatenate([curve.points[:, 0] for curve in fitted.device.soa] or [np.zeros(0)]))
    above = driven.output.V_rail - corners  # what is left for the output, and the resistor where this half conducts
    own = np.clip(np.where(above > 0, above * R / (R + driven.r), above), -V_max, V_max)
    even = V_max * np.linspace(-1, 1, _HELD)
    rows = max(own.shape[0], even.shape[0])
    return np.sort(np.concatenate([np.broadcast_to(x, (rows, x.shape[1])) for x in (even, own)], axis=1), axis=1)


def _held_duty(
    name: str, level: Level, fitted: Fitted, driven: Driven, V: tuple[Traced, ...], sheet: facts.Sheet
) -> Duty:
    """One or several output voltages, each held for ever; the facts are those of the one of greatest dissipation."""
    load = sheet.load
    levels = np.concatenate([column(one) for one in V], axis=1)
    point = held(driven.output, levels, load.resistance())
    P = point.locus.p_mean

    def at_member(member: IntArray) -> tuple[Traced, ...]:
        same = bool(np.all(member == member[0]))
        swing = V[int(member[0])] if same else facts.looked_at(sheet, picked(levels, member))
        return facts.held_facts(sheet, swing, picked(P, member), fitted)

    one = len(V) == 1
    return Duty(
        name=name,
        half=fitted.half,
        locus=_always(point.locus),
        heat_ratio=_held_ratio(load, fitted, point),
        others=_others(load, fitted, point),
        facts=at_member(first_best(P)[:, 0]),
        facts_at=None if one else at_member,
        members=Members() if one else Members(name="level", unit="V", value=frozen(load.amplifiers * levels)),
        level=level,
        load_angle=sheet.named["phi"],
        limiter=_limiter(load, fitted, point.locus) if level == "stated" else None,
    )


def _others(load: PushPull, fitted: Fitted, point: HeldOutput) -> FloatArray:
    """Dissipation of all other devices of the stage, (case, member). [W]

    A half dissipates 1/share of its worst device; the amplifiers of a bridge are mirror images of each other.
    """
    P = point.locus.p_mean
    return frozen(load.amplifiers * (P + point.P_other) / column(fitted.share) - P)


def _held_ratio(load: PushPull, fitted: Fitted, point: HeldOutput) -> FloatArray:
    """Dissipation of all devices over the worst one's, (case, 1), where that one dissipates most."""
    P = point.locus.p_mean
    top = first_best(P)
    own, other = (np.take_along_axis(x, top, 1) for x in (P, point.P_other))
    some = own > 0
    return _heat(load, fitted, np.where(some, 1.0 + other / np.where(some, own, 1.0), 2.0))


def _worst_held(driven: Driven, V_max: FloatArray, R: FloatArray) -> FloatArray:
    """Held output voltage of greatest dissipation, (case, 1), by a grid that narrows around its best."""
    low, high = -V_max, V_max
    for n in range(_ROUNDS + 1):
        tried = low + (high - low) * np.linspace(0, 1, _HELD if n == 0 else _POINTS)
        P = held(driven.output, tried, R).locus.p_mean
        tried = np.broadcast_to(tried, P.shape)
        best = np.argmax(P, axis=1)[:, None]
        low = np.take_along_axis(tried, np.maximum(best - 1, 0), 1)
        high = np.take_along_axis(tried, np.minimum(best + 1, tried.shape[1] - 1), 1)
    return np.asarray(np.take_along_axis(tried, best, 1), dtype=np.float64)


def _shorted(load: PushPull, fitted: Fitted) -> tuple[Duty, ...]:
    """The output at 0 V, the half at its current limit: for ever, half of each period, or once."""
    if load.I_limit is None:
        return ()
    total = load.I_limit.value
    v = np.maximum(load.V_rail.value - load.R_E.value / load.pairs * total, 0.0)[:, None, None]
    i = (total * fitted.share.value)[:, None, None]
    half_time = load.f is not None and load.fault_time is None
    if load.fault_time is not None:
        t = load.fault_time.value[:, None, None] * np.array([0.0, 1.0])
        locus = Locus(t=t, v=v, i=i, use=Use.ONCE)
    elif load.f is not None:
        # The lowest frequency of the range: the longest half periods at the same mean.
        t = np.array([0.0, 0.5, 0.5, 1.0]) / load.f[0].value[:, None, None]
        locus = Locus(t=t, v=v, i=i * np.array([1.0, 1.0, 0.0, 0.0]), use=Use.REPEATED)
    else:
        locus = Locus(t=np.zeros((1, 1, 1)), v=v, i=i, use=Use.HELD)
    return (
        Duty(
            name="shorted-output",
            half=fitted.half,
            locus=_always(locus),
            heat_ratio=_heat(load, fitted, 2.0 if half_time else 1.0),
            facts=facts.shorted_facts(load, fitted, half_time=half_time),
        ),
    )
