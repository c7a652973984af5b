"""What a stage file calls the parts of a circuit, by family of device: V_CC R_C R_E, or V_DD R_D R_S."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.device.ratings import BIPOLAR, IGBT, MOSFET

BASE_DRIVEN = BIPOLAR  # a base current drives the device
NAMED_AS_BIPOLAR = BIPOLAR | IGBT  # supply, resistors and currents are named after collector and emitter


@dataclass(frozen=True, slots=True, kw_only=True)
class Family:
    """Letter symbols of a stage with one family of devices."""

    supply: str  # key and symbol of the supply voltage
    upper: str  # resistor at collector or drain
    lower: str  # resistor at emitter or source
    quiescent: str  # current without signal
    bias: str  # voltage of a separate bias source
    across: str  # voltage across the device
    reverse: str  # reverse voltage at base or gate while off
    on: str  # what drives the device fully on
    gate: bool

    @property
    def names(self) -> tuple[str, ...]:
        return (self.supply, self.upper, self.lower, self.quiescent, self.bias, self.reverse, self.on)


_BASE = Family(
    supply="V_CC",
    upper="R_C",
    lower="R_E",
    quiescent="I_CQ",
    bias="V_BB",
    across="V_CE",
    reverse="V_BE_off",
    on="I_B",
    gate=False,
)
_MOSFET = Family(
    supply="V_DD",
    upper="R_D",
    lower="R_S",
    quiescent="I_DQ",
    bias="V_GG",
    across="V_DS",
    reverse="V_GS_off",
    on="V_GS",
    gate=True,
)
_IGBT = Family(
    supply="V_CC",
    upper="R_C",
    lower="R_E",
    quiescent="I_CQ",
    bias="V_GG",
    across="V_CE",
    reverse="V_GS_off",
    on="V_GS",
    gate=True,
)
FAMILIES = (_BASE, _MOSFET, _IGBT)


def family_of(device_kind: str) -> Family:
    """The words of the family that a kind of device belongs to."""
    if device_kind in MOSFET:
        return _MOSFET
    return _IGBT if device_kind in IGBT else _BASE
