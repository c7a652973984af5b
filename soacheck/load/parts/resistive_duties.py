"""The duties of a `resistive` stage: its parameters and its device become loci."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from soacheck.device import laws
from soacheck.device.ratings import Device
from soacheck.duty import Drive, Duty, Fitted, Members, picked
from soacheck.load.parts import load_line, on_state
from soacheck.load.parts.quiescent import Bias, Circuit, Point, Quiescent, quiescent
from soacheck.load.parts.resistive_stage import Resistive
from soacheck.load.parts.switching import resistive_switching
from soacheck.locus import Locus, Use
from soacheck.table import Missing
from soacheck.trace import FloatArray, IntArray, Traced, derived, found, frozen, given

COLD_BIAS = "bias worked out at 25 degC; its drift with temperature belongs to runaway"
GOVERNS = "voltage of the point that governs, of those looked at along the line"
OWN_POINT = "quiescent point that governs, of those over the stated spread of the characteristics"
SLOW = "greatest v * i along the swing: no frequency is stated, so that each of its points may be held"


def duties(load: Resistive, fitted: Fitted) -> tuple[Duty, ...]:
    """The duties of the stated use, for the worst of the parallel devices."""
    lacks = load.lacks(load.family.supply, load.family.upper)
    if load.supply is None or load.upper is None or load.lower is None:
        name = {"held": "held-worst-point", "swing": "full-swing", "switched": "switched"}[load.use]
        idle = ("idle",) if load.bias is not None or load.use != "held" else ()
        return tuple(_unknown(one, fitted, lacks) for one in (*idle, name))
    share = None if fitted.count == 1 else fitted.share.named("share")
    circuit = Circuit(
        family=load.family,
        supply=load.supply,
        upper=load.upper,
        lower=load.lower,
        share=share,
        device=fitted.device,
    )
    if load.use == "switched":
        return _idle_off(circuit, fitted), _switched(load, circuit, fitted)
    if load.use == "held":
        held = _held(circuit, fitted)
        return (held,) if load.bias is None else (_idle(load.bias, circuit, fitted), held)
    if load.bias is None:
        nothing = load.lacks(load.family.quiescent)
        return _unknown("idle", fitted, nothing), _unknown("full-swing", fitted, nothing)
    return _idle(load.bias, circuit, fitted), _full_swing(load, load.bias, circuit, fitted)


def _unknown(name: str, fitted: Fitted, missing: tuple[Missing, ...]) -> Duty:
    return Duty(name=name, half=fitted.half, locus=None, heat_ratio=_heat_ratio(fitted), unknown=missing)


def _heat_ratio(fitted: Fitted) -> FloatArray:
    """All devices together over the worst one, (case, 1)."""
    return frozen(1.0 / fitted.share.value[:, None])


def _duty(
    name: str,
    fitted: Fitted,
    locus: Locus,
    facts: tuple[Traced, ...],
    *,
    facts_at: Callable[[IntArray], tuple[Traced, ...]] | None = None,
    members: Members | None = None,
    drive: Drive | None = None,
    reverse: bool = False,
    I_B_peak: Traced | None = None,
) -> Duty:
    return Duty(
        name=name,
        half=fitted.half,
        members=members or Members(),
        locus=lambda _: locus,
        heat_ratio=_heat_ratio(fitted),
        facts=facts,
        facts_at=facts_at,
        drive=drive,
        termination="reverse" if reverse else "open",
        I_B_peak=I_B_peak,
    )


def _power(symbol: str, formula: str, circuit: Circuit, *inputs: Traced, how: str = "") -> Traced:
    """A power of the worst device: the formula for the whole current, times its share of it. [W]"""
    if circuit.share is not None:
        formula, inputs = f"share * {formula}", (circuit.share, *inputs)
    return replace(derived(symbol, formula, "W", *inputs), how=how)


def _quiescent(bias: Bias, circuit: Circuit) -> Quiescent | tuple[Missing, ...]:
    return quiescent(bias, circuit, on_state.most_heat_or_usual(circuit.device, circuit.share))


def _idle(bias: Bias, circuit: Circuit, fitted: Fitted) -> Duty:
    Q = _quiescent(bias, circuit)
    if isinstance(Q, tuple):
        return _unknown("idle", fitted, Q)
    facts = [_idle_power("P_idle", Q.middle, circuit), Q.middle.v, Q.middle.i]
    for end, point in (("low", Q.low), ("high", Q.high)):
        if point is not None:
            facts.append(_idle_power(f"P_idle_{end}", point, circuit))

    def idle_at(member: IntArray) -> tuple[Traced, ...]:
        point = _point_at(Q, member)
        return _idle_power("P_idle", point, circuit), point.v, point.i

    several = Q.i.shape[1] > 1
    members = Members(name=circuit.family.quiescent, unit="A", value=frozen(Q.i)) if several else None
    at_member = idle_at if several else None
    I_B = (Q.low or Q.middle).I_B
    if I_B is not None and circuit.share is not None:
        I_B = derived("I_B_each", "share * I_B", "A", circuit.share, I_B)
    locus = load_line.held_points(Q.v, Q.i * fitted.share.value[:, None])
    return _duty("idle", fitted, locus, tuple(facts), facts_at=at_member, members=members, I_B_peak=I_B)


def _idle_power(symbol: str, point: Point, circuit: Circuit) -> Traced:
    how = "" if point.I_B is None and not circuit.family.gate else COLD_BIAS
    return _power(symbol, f"{point.v.symbol} * {point.i.symbol}", circuit, point.v, point.i, how=how)


def _held(circuit: Circuit, fitted: Fitted) -> Duty:
    """The whole line from cut-off to the on-state, each point of which may be held for ever."""
    device, family, supply = fitted.device, circuit.family, circuit.supply
    upper, lower = circuit.upper, circuit.lower_seen
    on = on_state.longest_line(device, circuit.share)
    end = on_state.end_of_line("I_end", supply, (upper, lower), on)
    ohms = upper.value + lower.value
    v_on = on.volts + on.ohms * end.value
    v = load_line.held_voltages(supply.value, v_on, device)
    i = (supply.value[:, None] - v) / ohms[:, None] * fitted.share.value[:, None]
    in_reach = v_on <= supply.value / 2
    facts: list[Traced] = []
    if np.all(in_reach):
        formula = f"{supply.symbol} ** 2 / (4 * ({upper.symbol} + {lower.symbol}))"
        how = f"where {family.across} is half of {supply.symbol}"
        facts.append(_power("P_max", formula, circuit, supply, upper, lower, how=how))
    facts.append(end)

    def at_member(member: IntArray) -> tuple[Traced, ...]:
        V = found(family.across, picked(v, member), "V", GOVERNS)
        formula = f"({supply.symbol} - {V.symbol}) / ({upper.symbol} + {lower.symbol})"
        return _held_point(V, formula, (supply, V, upper, lower), circuit)

    members = Members(name=family.across, unit="V", value=frozen(v))
    locus = load_line.held_points(v, i)
    return _duty("held-worst-point", fitted, locus, tuple(facts), facts_at=at_member, members=members)


def _held_point(V: Traced, formula: str, inputs: tuple[Traced, ...], circuit: Circuit) -> tuple[Traced, ...]:
    """A held point of the worst device: its power first; `formula` gives the whole current at V."""
    if circuit.share is not None:
        formula, inputs = f"share * {formula}", (circuit.share, *inputs)
    current = derived("I", formula, "A", *inputs)
    return derived("P", f"{V.symbol} * I", "W", V, current), V, current


def _full_swing(load: Resistive, bias: Bias, circuit: Circuit, fitted: Fitted) -> Duty:
    """A sine about the quiescent point, as far as the nearer of cut-off and the on-state."""
    device = fitted.device
    Q = _quiescent(bias, circuit)
    if isinstance(Q, tuple):
        return _unknown("full-swing", fitted, Q)
    upper, lower = circuit.upper, circuit.lower_seen
    line = load.R_ac or derived("R_line", f"{upper.symbol} + {lower.symbol}", "ohm", upper, lower)
    on = on_state.longest_line(device, circuit.share)
    amplitude = load_line.clipping_amplitude(Q.i, Q.v, line.value[:, None], on.volts[:, None], on.ohms[:, None])
    facts = _swing_facts(Q.middle, line, on, circuit)
    share = fitted.share.value
    several = Q.i.shape[1] > 1
    if load.f is None:
        i_Q, v_Q = load_line.closer(Q.i), load_line.closer(Q.v)
        reach = load_line.clipping_amplitude(i_Q, v_Q, line.value[:, None], on.volts[:, None], on.ohms[:, None])
        locus = load_line.slow_swing(i_Q, v_Q, line.value, reach, share=share, one_line=load.R_ac is None)
        members = Members(name=circuit.family.across, unit="V", value=frozen(locus.v[:, :, 0]))
        greatest = found("P_max", locus.p_mean.max(axis=1), "W", SLOW, *facts[1:])

        def held_at(member: IntArray) -> tuple[Traced, ...]:
            V = found(circuit.family.across, picked(locus.v[:, :, 0], member), "V", GOVERNS)
            if several:
                how = "current of this point, on the swing about its own quiescent point"
                current = found("I", picked(locus.i[:, :, 0], member), "A", how)
                return derived("P", f"{V.symbol} * I", "W", V, current), V, current
            v_Q, i_Q = Q.middle.v, Q.middle.i
            formula = f"max({i_Q.symbol} + ({v_Q.symbol} - {V.symbol}) / {line.symbol}, 0)"
            return _held_point(V, formula, (i_Q, v_Q, V, line), circuit)

        return _duty("full-swing", fitted, locus, (greatest, *facts[1:]), facts_at=held_at, members=members)
    locus = load_line.sine_swing(Q.i, Q.v, line.value, amplitude, f=load.f.value, share=share)
    members = Members(name=circuit.family.quiescent, unit="A", value=frozen(Q.i)) if several else Members()

    def swung_at(member: IntArray) -> tuple[Traced, ...]:
        return _swing_facts(_point_at(Q, member), line, on, circuit)

    return _duty("full-swing", fitted, locus, (*facts, load.f), facts_at=swung_at if several else None, members=members)


def _point_at(Q: Quiescent, member: IntArray) -> Point:
    """One of the quiescent points over the stated spread."""
    i = found(Q.middle.i.symbol, picked(Q.i, member), "A", OWN_POINT)
    return Point(i=i, v=found(Q.middle.v.symbol, picked(Q.v, member), "V", OWN_POINT), I_B=Q.middle.I_B)


def _swing_facts(point: Point, line: Traced, on: on_state.OnState, circuit: Circuit) -> tuple[Traced, ...]:
    drop, drops = on.drop(point.i)
    ohms = line.symbol if on.R_on is None else f"({line.symbol} + {on.R_on.symbol})"
    room = point.v.symbol if drop == "0" else f"({point.v.symbol} - {drop})"
    if on.V_0 is not None and on.R_on is not None:
        room = f"({point.v.symbol} - ({drop}))"
    swing = derived(
        "I_swing",
        f"max(min({point.i.symbol}, {room} / {ohms}), 0)",
        "A",
        point.i,
        point.v,
        line,
        *drops,
    )
    formula = f"({point.v.symbol} * {point.i.symbol} - {line.symbol} * I_swing ** 2 / 2)"
    return (
        _power("P_swing", formula, circuit, point.v, point.i, line, swing, how=COLD_BIAS),
        swing,
        point.v,
        point.i,
    )


def _off_leakage(device: Device) -> Traced:
    """Leakage of one device while off, as its sheet states it. [A]"""
    stated = device.typical.leakage
    leak = None if stated is None else stated.high
    return given("I_leak", 0.0, "A", "no leakage stated: taken as 0") if leak is None else leak.named("I_leak")


def _idle_off(circuit: Circuit, fitted: Fitted) -> Duty:
    """A switched stage at rest: off, at the whole supply."""
    leak = _off_leakage(fitted.device)
    P = derived("P_idle", f"{circuit.supply.symbol} * I_leak", "W", circuit.supply, leak)
    v, i, _ = np.broadcast_arrays(circuit.supply.value, leak.value, fitted.share.value)
    locus = Locus(
        t=np.zeros((1, 1, 1)),
        v=v[:, None, None],
        i=i[:, None, None],
        use=Use.HELD,
        region=np.array([laws.CUTOFF], dtype=np.int64),
    )
    return _duty("idle", fitted, locus, (P,))


def _edge(name: str, stated: Traced | None, device: Traced | None) -> Traced | None:
    """A switching time: the stage's, else the device's."""
    return stated if stated is not None else device.named(name) if device is not None else None


def _switched(load: Resistive, circuit: Circuit, fitted: Fitted) -> Duty:
    """One period from fully off to fully on and back."""
    device, supply = fitted.device, circuit.supply
    f, D = load.f, load.duty_factor
    t_r, t_f = _edge("t_r", load.t_r, device.typical.t_r), _edge("t_f", load.t_f, device.typical.t_f)
    on = on_state.most_heat(device, circuit.share)
    needed = (("f", f), ("duty_factor", D), ("t_r", t_r), ("t_f", t_f))
    wanted = [name for name, value in needed if value is None]
    if f is None or D is None or t_r is None or t_f is None or on.missing:
        return _unknown("switched", fitted, (*load.lacks(*wanted), *on.missing))
    if np.any(t_r.value * f.value > D.value) or np.any(t_f.value * f.value > 1 - D.value):
        where = "the device's own t_r and t_f do not fit into the on and off time of a period"
        slow = Missing(key="load.t_r", where=where)
        return _unknown("switched", fitted, (slow,))
    I_on = on_state.end_of_line("I_on", supply, (circuit.upper, circuit.lower_seen), on)
    drop, drops = on.drop(I_on)
    V_on = derived("V_on", drop, "V", *((I_on,) if on.R_on is not None else ()), *drops)
    leak, D = _off_leakage(device), D.named("D")
    locus = resistive_switching(
        supply=supply.value,
        v_on=V_on.value,
        i_on=I_on.value * fitted.share.value,
        i_off=leak.value,
        on_time=D.value / f.value,
        period=1 / f.value,
        t_r=t_r.value,
        t_f=t_f.value,
        reverse=load.turn_off.reverse,
    )
    formula = f"I_on * ({supply.symbol} + 2 * V_on) * (t_r + t_f) * f / 6"
    edges = _power("P_edges", formula, circuit, I_on, supply, V_on, t_r, t_f, f)
    conduction = _power("P_on", "V_on * I_on * (D - t_r * f)", circuit, V_on, I_on, D, t_r, f)
    off = derived("P_off", f"{supply.symbol} * I_leak * (1 - D - t_f * f)", "W", supply, leak, D, t_f, f)
    total = derived("P_mean", "P_edges + P_on + P_off", "W", edges, conduction, off)
    I_on_max = _on_current(circuit, device)
    drive = Drive(
        V_off=load.turn_off.V_off,
        V_on=load.V_GS,
        I_B=load.I_B,
        I_B2=load.turn_off.I_B2,
        R_G=load.turn_off.R_G,
        I_on=I_on_max,
        saturates=True,
    )
    facts, reverse = (total, edges, conduction, off), locus.turn_off is not None
    return _duty("switched", fitted, locus, facts, drive=drive, reverse=reverse, I_B_peak=load.I_B)


def _on_current(circuit: Circuit, device: Device) -> Traced:
    """What the drive must carry: the current of the worst device at the lowest drop. [A]"""
    on = on_state.longest_line(device, circuit.share)
    end = on_state.end_of_line("I_on_max", circuit.supply, (circuit.upper, circuit.lower_seen), on)
    return end if circuit.share is None else derived("I_on_each", "share * I_on_max", "A", circuit.share, end)
