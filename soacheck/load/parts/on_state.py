"""The lower end of a load line: what stands across the device when it is fully on.

A bipolar transistor keeps a saturation voltage, a MOSFET an on-resistance, an IGBT a knee and a slope; all
three are V_0 + R_on * i. Which of the stated values counts depends on the question: the line is longest with
the lowest drop, conduction costs most with the highest one.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.device import laws
from soacheck.device.ratings import Device, Triple
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, derived, given

_ON_DROP = 1.0  # [V] on-state drop of a MOSFET or IGBT whose sheet states none, common practice


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OnState:
    """Drop across the device when fully on, V_0 + R_on * i, either part None where it is zero.

    R_on counts for the stage's whole current. missing: what the device file lacks to say it.
    """

    V_0: Traced | None = None  # [V]
    R_on: Traced | None = None  # [ohm]
    missing: tuple[Missing, ...] = ()

    def drop(self, current: Traced) -> tuple[str, tuple[Traced, ...]]:
        """Formula text of the drop at a current and the values it needs besides the current."""
        parts = ([self.V_0.symbol] if self.V_0 else []) + (
            [f"{self.R_on.symbol} * {current.symbol}"] if self.R_on else []
        )
        return " + ".join(parts) or "0", tuple(node for node in (self.V_0, self.R_on) if node is not None)

    @property
    def volts(self) -> FloatArray:
        """V_0 as numbers, (case,). [V]"""
        return np.zeros(1) if self.V_0 is None else self.V_0.value

    @property
    def ohms(self) -> FloatArray:
        """R_on as numbers, (case,). [ohm]"""
        return np.zeros(1) if self.R_on is None else self.R_on.value


def for_all(node: Traced, share: Traced | None) -> Traced:
    """A resistance in each device's own path, as the stage's whole current sees it through the worst device.

    That device carries share * i, so its resistor drops (share * R) * i. share None: one device carries all.
    """
    if share is None:
        return node
    return derived(f"{node.symbol}_seen", f"share * {node.symbol}", node.unit, share, node)


def longest_line(device: Device, share: Traced | None) -> OnState:
    """The lowest drop that the file vouches for, 0 where it states none: the load line is then longest."""
    typical = device.typical
    if device.mosfet:
        cold = _low(typical.R_DS_on)
        return OnState(R_on=None if cold is None else for_all(cold.named("R_DS_on"), share))
    if device.igbt:
        slope, knee = _low(typical.r_CE), _low(typical.V_CE_TO)
        return OnState(V_0=_named(knee, "V_CE_TO"), R_on=None if slope is None else for_all(slope.named("r_CE"), share))
    volts = _low(typical.V_CE_sat)
    if volts is None:
        return OnState(V_0=given("V_CE_sat_min", 0.0, "V", "V_CE_sat is not stated: 0 V, the greatest current"))
    return OnState(V_0=volts.named("V_CE_sat"))


def most_heat(device: Device, share: Traced | None) -> OnState:
    """The highest drop at the hot end: what conduction costs. `missing`: what the file does not state."""
    typical = device.typical
    if device.mosfet:
        hot = laws.R_DS_on_hot(device)
        if hot is None:
            return OnState(
                missing=(_lack("R_DS_on", "data sheet, characteristics: on-resistance at its gate-source voltage"),)
            )
        return OnState(R_on=for_all(hot.named("R_DS_on_hot"), share))
    if device.igbt:
        knee = typical.V_CE_TO_hot or _high(typical.V_CE_TO)
        slope = typical.r_CE_hot or _high(typical.r_CE)
        missing = tuple(
            _lack(name, "data sheet: straight line through the hot output characteristic at full gate voltage")
            for name, node in (("V_CE_TO", knee), ("r_CE", slope))
            if node is None
        )
        if knee is None or slope is None:
            return OnState(missing=missing)
        return OnState(V_0=knee.named("V_CE_TO"), R_on=for_all(slope.named("r_CE"), share))
    volts = _high(typical.V_CE_sat)
    if volts is None:
        return OnState(missing=(_lack("V_CE_sat", "data sheet, characteristics: saturation voltage"),))
    return OnState(V_0=volts.named("V_CE_sat"))


def most_heat_or_usual(device: Device, share: Traced | None) -> OnState:
    """As `most_heat`; where the file states nothing, the usual drop of such a device (common practice)."""
    stated = most_heat(device, share)
    if not stated.missing:
        return stated
    if device.mosfet or device.igbt:
        symbol = "V_DS_on" if device.mosfet else "V_CE_on"
        return OnState(V_0=given(symbol, _ON_DROP, "V", laws.COMMON_PRACTICE))
    return OnState(V_0=laws.V_CE_sat(device).named("V_CE_sat"))


def end_of_line(symbol: str, supply: Traced, resistances: tuple[Traced, ...], on: OnState) -> Traced:
    """Current at the lower end of the line: supply less V_0 over all resistance in the loop. [A]"""
    in_loop = (*resistances, *((on.R_on,) if on.R_on is not None else ()))
    ohms = " + ".join(node.symbol for node in in_loop)
    if on.V_0 is None:
        return derived(symbol, f"{supply.symbol} / ({ohms})", "A", supply, *in_loop)
    return derived(symbol, f"max({supply.symbol} - {on.V_0.symbol}, 0) / ({ohms})", "A", supply, on.V_0, *in_loop)


def _lack(name: str, where: str) -> Missing:
    return Missing(key=f"typical.{name}", where=where)


def _low(triple: Triple | None) -> Traced | None:
    return None if triple is None else triple.low


def _high(triple: Triple | None) -> Traced | None:
    return None if triple is None else triple.high


def _named(node: Traced | None, symbol: str) -> Traced | None:
    return None if node is None else node.named(symbol)
