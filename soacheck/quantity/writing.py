"""SI floats to text with an engineering prefix, so that `read` gives the value back."""

from __future__ import annotations

import math

from soacheck.quantity.units import DIMENSIONS, UNITS, canonical

# dimension -> units used in output, rising; a dimension that is not here is written in its base unit
_LADDERS: dict[str, tuple[str, ...]] = {
    "voltage": ("uV", "mV", "V", "kV"),
    "current": ("nA", "uA", "mA", "A", "kA"),
    "power": ("uW", "mW", "W", "kW"),
    "resistance": ("uohm", "mohm", "ohm", "kohm", "Mohm"),
    "time": ("ns", "us", "ms", "s"),
    "frequency": ("Hz", "kHz", "MHz", "GHz"),
    "energy": ("nJ", "uJ", "mJ", "J", "kJ"),
    "heat capacity": ("uJ/K", "mJ/K", "J/K", "kJ/K"),
    "inductance": ("nH", "uH", "mH", "H"),
    "capacitance": ("pF", "nF", "uF", "mF", "F"),
    "charge": ("pC", "nC", "uC", "mC", "C"),
    "conductance": ("uS", "mS", "S"),
    "ratio": ("%",),
    "voltage tempco": ("uV/K", "mV/K", "V/K"),
    "length": ("um", "mm", "m"),
    "area": ("mm^2", "cm^2", "m^2"),
    "pressure": ("Pa", "kPa"),
    "flow": ("m^3/h",),
    "mass": ("g", "kg"),
}


def write(si: float, dimension: str, digits: int = 6) -> str:
    """SI value to a text that `read` gives back, with an engineering prefix: 0.0022 ohm is "2.2 mohm".

    ValueError for a value that is not finite: what is unknown is not written as a quantity.
    """
    if not math.isfinite(si):
        raise ValueError(f"{si} is not written as a quantity")
    base = DIMENSIONS[dimension]
    ladder = _LADDERS.get(dimension, (base,))
    name = ladder[0] if len(ladder) == 1 else base if base in ladder else ladder[0]
    if si != 0 and len(ladder) > 1:
        size = float(f"{abs(si):.{digits}g}")  # 999.9999 mV to three digits is 1 V
        name = ladder[0]
        for candidate in ladder[1:]:
            unit = UNITS[candidate]
            if size * unit.divisor / unit.multiplier >= 1 - 1e-12:
                name = candidate
    unit = UNITS[canonical(name)]
    return f"{(si - unit.offset) * unit.divisor / unit.multiplier + 0.0:.{digits}g} {name}"
