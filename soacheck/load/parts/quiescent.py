"""The quiescent point of a single-ended stage from its bias network.

A bipolar transistor draws base current from a source V_th through R_th (Thevenin's equivalent of the
network); a gate draws none, and the transfer characteristic is a straight line of slope g_fs from the
threshold. The point then stands on the load line: not above its upper end, where the device is fully on, and
not below leakage.
Everything is at 25 degC: how the point moves with the junction is the matter of thermal runaway.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Literal

import numpy as np

from soacheck.device import laws
from soacheck.device.ratings import Device, Triple
from soacheck.load.parts.family import Family
from soacheck.load.parts.on_state import OnState, end_of_line, for_all
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, derived, found

Way = Literal["current", "divider", "resistor", "supply"]
STEPS = 65  # points between the extremes: the top of the dissipation parabola is met within (1/128)^2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Bias:
    """One way of setting the quiescent point: a stated current, a divider from the supply, a base resistor
    from the supply, or a separate supply with or without a base resistor."""

    way: Way
    I_Q: Traced | None = None  # [A] whole stage
    R_1: Traced | None = None  # [ohm] from the supply to base or gate
    R_2: Traced | None = None  # [ohm] from base or gate to the common rail
    R_B: Traced | None = None  # [ohm]
    V_BB: Traced | None = None  # [V]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Circuit:
    """The loop through the devices. share is None when one device carries all of the current."""

    family: Family
    supply: Traced  # [V]
    upper: Traced  # [ohm] carries the whole current
    lower: Traced  # [ohm] each device's own
    share: Traced | None
    device: Device

    @property
    def lower_seen(self) -> Traced:
        """The lower resistor as the whole current sees it through the worst device."""
        return for_all(self.lower, self.share)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Point:
    """A quiescent point, (case,) each: current of the stage [A], voltage across it [V], base current [A]."""

    i: Traced
    v: Traced
    I_B: Traced | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Quiescent:
    """The point at middle characteristics, and all points over their stated spread.

    v, i: (case, member), one member where nothing varies. low, high: the points of least and greatest
    current, None where nothing varies.
    """

    middle: Point
    low: Point | None
    high: Point | None
    v: FloatArray
    i: FloatArray


def quiescent(bias: Bias, circuit: Circuit, on: OnState) -> Quiescent | tuple[Missing, ...]:
    """The quiescent point, or what the files lack to work it out."""
    if bias.way == "current":
        return _by_current(bias, circuit, on)
    return (_by_gate if circuit.family.gate else _by_base)(bias, circuit, on)


def _by_current(bias: Bias, circuit: Circuit, on: OnState) -> Quiescent | tuple[Missing, ...]:
    if bias.I_Q is None:
        return (Missing(key=f"load.{circuit.family.quiescent}", where="the circuit diagram or a measurement"),)
    point = _on_line(bias.I_Q.named("I_bias"), circuit, on, None)
    return _single(point)


def _single(point: Point) -> Quiescent:
    v, i = point.v.value[:, None], point.i.value[:, None]
    return Quiescent(middle=point, low=None, high=None, v=v, i=i)


def _by_base(bias: Bias, circuit: Circuit, on: OnState) -> Quiescent | tuple[Missing, ...]:
    typical = circuit.device.typical
    missing = []
    if typical.h_FE is None and typical.h_FE_points is None:
        missing.append(Missing(key="typical.h_FE", where="data sheet, characteristics: direct current gain"))
    if typical.V_BE is None:
        missing.append(Missing(key="typical.V_BE", where="data sheet, characteristics: base-emitter voltage"))
    if bias.way == "supply" and bias.R_B is None and not np.all(circuit.lower.value > 0):
        missing.append(
            Missing(
                key="load.bias.R_B",
                where="the circuit diagram: without it and without R_E nothing limits the base",
            )
        )
    if typical.V_BE is None or missing:
        return tuple(missing)
    source = _source(bias, circuit)

    def point(h_FE: Traced, V_BE: Traced) -> Point:
        return _base_point(source, h_FE.named("h_FE"), V_BE.named("V_BE"), circuit, on)

    V_BE = _stated(typical.V_BE.middle)
    h_FE = typical.h_FE or _read_gain(circuit, partial(point, V_BE=V_BE))
    return _over_spread(point, h_FE, typical.V_BE)


def _read_gain(circuit: Circuit, point: Callable[[Traced], Point]) -> Triple:
    """The gain that the curve h_FE_points gives at the very current that the bias then sets.

    The gain moves less than in proportion to the current, so that putting each into the other settles.
    """
    share = 1.0 if circuit.share is None else circuit.share.value
    current = np.full(1, circuit.device.max.I_max.at(0) / 10)
    how = "read from h_FE_points at the quiescent current, by repetition"
    for _ in range(60):
        gain = laws.current_gain(circuit.device, current)
        if gain is None:
            raise ValueError("a gain without a curve")
        h_FE = found("h_FE", gain, "1", how)
        current = np.sqrt(current * point(h_FE).i.value * share)
    return Triple(typ=h_FE)


def _by_gate(bias: Bias, circuit: Circuit, on: OnState) -> Quiescent | tuple[Missing, ...]:
    typical = circuit.device.typical
    missing = tuple(
        Missing(key=f"typical.{name}", where=where)
        for name, value, where in (
            ("V_GS_th", typical.V_GS_th, "data sheet, characteristics: gate threshold voltage"),
            ("g_fs", typical.g_fs, "data sheet, characteristics: forward transconductance"),
        )
        if value is None
    )
    if typical.V_GS_th is None or typical.g_fs is None:
        return missing
    source = _source(bias, circuit)

    def point(g_fs: Traced, V_GS_th: Traced) -> Point:
        return _gate_point(source, g_fs.named("g_fs"), V_GS_th.named("V_GS_th"), circuit, on)

    return _over_spread(point, typical.g_fs, typical.V_GS_th)


def _source(bias: Bias, circuit: Circuit) -> tuple[Traced, Traced | None]:
    """Thevenin's equivalent of the bias network: open-circuit voltage and source resistance (None: none)."""
    if bias.way == "divider" and bias.R_1 is not None and bias.R_2 is not None:
        R_1, R_2 = bias.R_1.named("R_1"), bias.R_2.named("R_2")
        V_th = derived("V_th", f"{circuit.supply.symbol} * R_2 / (R_1 + R_2)", "V", circuit.supply, R_1, R_2)
        return V_th, derived("R_th", "R_1 * R_2 / (R_1 + R_2)", "ohm", R_1, R_2)
    if bias.way == "resistor":
        return circuit.supply, bias.R_B
    if bias.V_BB is None:
        raise ValueError(f"a bias by {bias.way} without its values")
    return bias.V_BB.named(circuit.family.bias), bias.R_B


def _base_point(
    source: tuple[Traced, Traced | None],
    h_FE: Traced,
    V_BE: Traced,
    circuit: Circuit,
    on: OnState,
) -> Point:
    """Base loop V_th - I_B R_th - V_BE - (1 + h_FE) I_B R_E = 0 solved for I_B; active: I_C = h_FE I_B."""
    V_th, R_th = source
    R_E = circuit.lower_seen
    own = () if R_th is None else (R_th,)
    ohms = " + ".join([*(node.symbol for node in own), f"(1 + h_FE) * {R_E.symbol}"])
    I_B = derived("I_B", f"max({V_th.symbol} - V_BE, 0) / ({ohms})", "A", V_th, V_BE, *own, h_FE, R_E)
    active = derived("I_active", "h_FE * I_B", "A", h_FE, I_B)
    point = _on_line(active, circuit, on, h_FE)
    return Point(i=point.i, v=point.v, I_B=I_B)


def _gate_point(
    source: tuple[Traced, Traced | None],
    g_fs: Traced,
    V_GS_th: Traced,
    circuit: Circuit,
    on: OnState,
) -> Point:
    """V_G = V_GS_th + I/g_fs + I R_S, a straight transfer line, solved for I; g_fs, R_S are each device's."""
    V_G, R_S = source[0], circuit.lower_seen
    if circuit.share is None:
        active = derived(
            "I_active",
            f"max({V_G.symbol} - V_GS_th, 0) / (1 / g_fs + {R_S.symbol})",
            "A",
            V_G,
            V_GS_th,
            g_fs,
            R_S,
        )
    else:
        active = derived(
            "I_active",
            f"max({V_G.symbol} - V_GS_th, 0) / (share / g_fs + {R_S.symbol})",
            "A",
            V_G,
            V_GS_th,
            circuit.share,
            g_fs,
            R_S,
        )
    return _on_line(active, circuit, on, None)


def _on_line(active: Traced, circuit: Circuit, on: OnState, h_FE: Traced | None) -> Point:
    """The current that the bias asks for, held on the load line between leakage and the upper end."""
    family, upper, lower = circuit.family, circuit.upper, circuit.lower_seen
    end = end_of_line("I_end", circuit.supply, (upper, lower), on)
    leakage = _leakage(circuit)
    i = (
        derived(family.quiescent, f"min({active.symbol}, I_end)", "A", active, end)
        if leakage is None
        else derived(family.quiescent, f"min(max({active.symbol}, {leakage.symbol}), I_end)", "A", active, leakage, end)
    )
    drop, drops = on.drop(i)
    # the emitter resistor carries the base current as well
    through = f"{i.symbol} * {lower.symbol}" if h_FE is None else f"(1 + 1 / h_FE) * {i.symbol} * {lower.symbol}"
    v = derived(
        f"{family.across}Q",
        f"max({circuit.supply.symbol} - {i.symbol} * {upper.symbol} - {through}, {drop})",
        "V",
        circuit.supply,
        i,
        upper,
        lower,
        *(() if h_FE is None else (h_FE,)),
        *drops,
    )
    return Point(i=i, v=v, I_B=None)


def _leakage(circuit: Circuit) -> Traced | None:
    """Leakage of the stage as the sheet states it, None where it states none. [A]"""
    stated, share = circuit.device.typical.leakage, circuit.share
    leak = None if stated is None else stated.high
    if leak is None:
        return None
    leak = leak.named("I_leak")
    return leak if share is None else derived("I_leak_all", "I_leak / share", "A", leak, share)


def _over_spread(point: Callable[[Traced, Traced], Point], gain: Triple, volts: Triple) -> Quiescent:
    """Points over the stated spread of gain and of V_BE or V_GS_th together.

    The current rises with the gain and falls with the voltage, so that the pairs (low, high) and (high, low)
    hold the extremes. What lies between stands on the load line: members run along it, so that the greatest
    dissipation is met where it lies between the extremes.
    """
    g_low, g_mid, g_high = (_stated(node) for node in (gain.low, gain.middle, gain.high))
    d_low, d_mid, d_high = (_stated(node) for node in (volts.high, volts.middle, volts.low))
    middle = point(g_mid, d_mid)
    if np.all(g_low.value == g_high.value) and np.all(d_low.value == d_high.value):
        return _single(middle)
    low, high = point(g_low, d_low), point(g_high, d_high)
    s = np.linspace(0.0, 1.0, STEPS)

    def between(a: Traced, b: Traced, c: Traced) -> FloatArray:
        """From a to b in STEPS members, and c after them, (case, member)."""
        a_, b_, c_ = (x[:, None] for x in np.broadcast_arrays(a.value, b.value, c.value))
        return np.concatenate([a_ + (b_ - a_) * s, c_], axis=1)

    v, i = between(low.v, high.v, middle.v), between(low.i, high.i, middle.i)
    order = np.argsort(i, axis=1)
    v, i = np.take_along_axis(v, order, axis=1), np.take_along_axis(i, order, axis=1)
    return Quiescent(middle=middle, low=low, high=high, v=v, i=i)


def _stated(node: Traced | None) -> Traced:
    """A value of a characteristic that holds at least one: the readers leave an absent one out as a whole."""
    if node is None:
        raise ValueError("a characteristic without a value")
    return node
