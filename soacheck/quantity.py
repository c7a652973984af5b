"""SEAM ONLY, to be implemented (room quantity): text to SI float and back; the unit table; the only importer of pint.

Dimensions are named by words; the base unit of each is what SI floats are in:
"""

from __future__ import annotations

from dataclasses import dataclass

# dimension -> base unit text used in output
DIMENSIONS: dict[str, str] = {
    "voltage": "V", "current": "A", "power": "W", "resistance": "ohm", "thermal resistance": "K/W",
    "temperature": "degC",  # held in kelvin
    "temperature difference": "K", "time": "s", "frequency": "Hz", "energy": "J", "heat capacity": "J/K",
    "inductance": "H", "capacitance": "F", "charge": "C", "conductance": "S", "ratio": "1", "voltage tempco": "V/K",
    "length": "m", "area": "m^2", "thermal conductivity": "W/(m K)", "pressure": "Pa", "flow": "m^3/s",
    "velocity": "m/s", "angle": "deg", "mass": "kg",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Reading:
    """A text read as a quantity: SI value (kelvin for temperatures), and what a reader of the report must be told."""

    si: float
    caution: str = ""  # set when the unit went through pint


def read(value: object, dimension: str, band: tuple[float, float] | None = None) -> Reading:
    """Text "number unit" (or a pint quantity) to SI. Raises QuantityError(problem, remedy)."""
    raise NotImplementedError


def write(si: float, dimension: str, digits: int = 6) -> str:
    """SI value to a text that `read` gives back, with an engineering prefix: 0.0022, "resistance" -> "2.2 mohm"."""
    raise NotImplementedError
