"""The unit table: what each dimension may be written in, and how spellings are brought to the table's own.

A unit is held as multiplier and divisor, not as one factor: 10 us is 10 / 1e6, which is exactly the float
1e-5, while 10 * 1e-6 is not.
"""

from __future__ import annotations

import re
from types import MappingProxyType
from typing import NamedTuple

# dimension -> base unit text used in output; SI floats are in it, but temperatures are held in kelvin
DIMENSIONS: dict[str, str] = {
    "voltage": "V", "current": "A", "power": "W", "resistance": "ohm", "thermal resistance": "K/W",
    "temperature": "degC",  # held in kelvin
    "temperature difference": "K", "time": "s", "frequency": "Hz", "energy": "J", "heat capacity": "J/K",
    "inductance": "H", "capacitance": "F", "charge": "C", "conductance": "S", "ratio": "1",
    "voltage tempco": "V/K", "length": "m", "area": "m^2", "thermal conductivity": "W/(m K)",
    "pressure": "Pa", "flow": "m^3/s", "velocity": "m/s", "angle": "deg", "mass": "kg",
}  # fmt: skip

ZERO_CELSIUS = 273.15  # [K]
CUBIC_FOOT = 0.028316846592  # [m^3], exact: 0.3048 m cubed
DEGREES_PER_RADIAN = 57.29577951308232


class Unit(NamedTuple):
    """si = number * multiplier / divisor + offset."""

    dimension: str
    multiplier: float = 1.0
    divisor: float = 1.0
    offset: float = 0.0


_PREFIXES = {
    "p": (1.0, 1e12), "n": (1.0, 1e9), "u": (1.0, 1e6), "m": (1.0, 1e3), "c": (1.0, 1e2), "": (1.0, 1.0),
    "h": (1e2, 1.0), "k": (1e3, 1.0), "M": (1e6, 1.0), "G": (1e9, 1.0),
}  # fmt: skip

# dimension: spellings, and the prefixes that the trade puts before each of them ("." is none)
_PREFIXED: tuple[tuple[str, str, str], ...] = (
    ("voltage", "V", "n u m . k"),
    ("current", "A", "p n u m . k"),
    ("power", "W", "n u m . k M"),
    ("resistance", "ohm Ohm", "u m . k M G"),
    ("thermal resistance", "K/W degC/W", "m ."),
    ("temperature difference", "K", "m ."),
    ("time", "s sec", "p n u m ."),
    ("frequency", "Hz", "m . k M G"),
    ("energy", "J Ws", "p n u m . k"),
    ("heat capacity", "J/K J/degC Ws/K Ws/degC", "n u m . k"),
    ("inductance", "H", "n u m ."),
    ("capacitance", "F", "p n u m ."),
    ("charge", "C", "p n u m ."),
    ("conductance", "S A/V", "n u m . k"),
    ("voltage tempco", "V/K V/degC", "u m ."),
    ("length", "m", "n u m c . k"),
    ("thermal conductivity", "W/(m*K) W/(K*m) W/(m*degC) W/m/K W/K/m W/m/degC", "m . k"),
    ("pressure", "Pa", "m . h k"),
    ("pressure", "bar", "m ."),
    ("velocity", "m/s", "m c ."),
    ("mass", "g", "m . k"),
)
_WORDS: tuple[tuple[str, str, str], ...] = (  # dimension, spellings, the table's own name for it
    ("voltage", "volt volts", "V"),
    ("current", "ampere amperes amp amps", "A"),
    ("power", "watt watts", "W"),
    ("resistance", "ohms Ohms", "ohm"),
    ("temperature difference", "kelvin", "K"),
    ("time", "second seconds", "s"),
    ("frequency", "hertz", "Hz"),
    ("energy", "joule joules", "J"),
    ("inductance", "henry", "H"),
    ("capacitance", "farad", "F"),
    ("charge", "coulomb coulombs", "C"),
    ("conductance", "siemens", "S"),
    ("length", "metre metres meter meters", "m"),
    ("pressure", "pascal", "Pa"),
)


def _table() -> dict[str, Unit]:
    table: dict[str, Unit] = {}
    for dimension, spellings, prefixes in _PREFIXED:
        for spelling in spellings.split():
            for prefix in prefixes.split():
                multiplier, divisor = _PREFIXES[prefix.strip(".")]
                if dimension == "mass":  # the kilogram is the base, not the gram
                    divisor *= 1e3
                if spelling == "bar":
                    multiplier *= 1e5
                table[prefix.strip(".") + spelling] = Unit(dimension, multiplier, divisor)
    table["kg"] = Unit("mass")
    for dimension, spellings, name in _WORDS:
        for spelling in spellings.split():
            table[spelling] = table[name]._replace(dimension=dimension)
    table.update(_units_of_their_own())
    return table


def _units_of_their_own() -> dict[str, Unit]:
    """Units that take no prefix, or powers and quotients of units that do."""
    table: dict[str, Unit] = {}
    table["degC"] = Unit("temperature", offset=ZERO_CELSIUS)
    table["%"] = table["percent"] = Unit("ratio", 1.0, 100.0)
    for name in ("K", "degC"):
        table[f"{name}/kW"] = Unit("thermal resistance", 1.0, 1e3)
        table[f"{name}/mW"] = Unit("thermal resistance", 1e3)
    for spelling in ("min", "minute", "minutes"):
        table[spelling] = Unit("time", 60.0)
    for spelling in ("h", "hr", "hour", "hours"):
        table[spelling] = Unit("time", 3600.0)
    for prefix, side in (("", 1.0), ("c", 1e2), ("m", 1e3), ("u", 1e6)):
        for power in ("^2", "2"):
            table[f"{prefix}m{power}"] = Unit("area", 1.0, side**2)
    for per, seconds in (("s", 1.0), ("min", 60.0), ("h", 3600.0)):
        for volume, litres in (("m^3", 1.0), ("m3", 1.0), ("l", 1e3), ("L", 1e3)):
            table[f"{volume}/{per}"] = Unit("flow", 1.0, seconds * litres)
    table["cfm"] = table["CFM"] = table["ft^3/min"] = Unit("flow", CUBIC_FOOT, 60.0)
    table["km/h"] = Unit("velocity", 1e3, 3600.0)
    for spelling in ("deg", "degree", "degrees"):
        table[spelling] = Unit("angle")
    table["rad"] = Unit("angle", DEGREES_PER_RADIAN)
    return table


UNITS: MappingProxyType[str, Unit] = MappingProxyType(_table())

# Signs that mean the same, to the one the table uses. No blanket compatibility normalisation: that would
# turn the ordinal sign into the letter o and a superscript two into the digit 2.
_SIGNS = str.maketrans({
    "\u00b5": "u", "\u03bc": "u",  # micro sign, Greek mu
    "\u2126": "ohm", "\u03a9": "ohm",  # ohm sign, Greek omega
    "\u212a": "K",  # kelvin sign
    "\u2103": "degC",  # degree Celsius in one sign
    "\u00b0": "deg", "\u00ba": "deg", "\u02da": "deg",  # degree, masculine ordinal, ring above
    "\u00b2": "^2", "\u00b3": "^3",
    "\u00b7": "*", "\u22c5": "*", "\u00d7": "*", "\u2219": "*",  # dots and the multiplication sign
    "\u2215": "/", "\u2044": "/",  # division and fraction slash
    "\u2212": "-",  # minus sign
    "\u00a0": " ", "\u2009": " ", "\u202f": " ", "\u2007": " ", "\t": " ",
})  # fmt: skip
_AROUND_OPERATORS = re.compile(r" *([*/^()]) *")
_IN_PARENTHESES = re.compile(r"\(([A-Za-z]+) +([A-Za-z]+)\)")
_CELSIUS = re.compile(r"\b[Dd]eg(?:ree)?s?[ .]*(?:C|[Cc]elsius)\b|\b[Cc]elsius\b")


def plain_signs(text: str) -> str:
    """The text with every sign that has several code points brought to one, and special blanks to a blank."""
    return text.translate(_SIGNS)


def canonical(unit: str) -> str:
    """A unit's spelling as the table has it: "m°C / W" is "mdegC/W", "W/(m K)" is "W/(m*K)"."""
    text = _CELSIUS.sub("degC", plain_signs(unit).strip(" "))
    text = _IN_PARENTHESES.sub(r"(\1*\2)", text.replace("**", "^"))
    return _AROUND_OPERATORS.sub(r"\1", text)
