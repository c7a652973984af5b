"""The narrow gate to pint, and the only importer of it.

A text reaches pint only as a unit of at most four factors of letters, never with its number: pint reads
expressions, skips what it does not understand ("1,5 V" is 15 V to it) and takes constants for units. Values
of other programs that hold pint quantities pass here too. pint is loaded on first need.
"""

from __future__ import annotations

import math
import re
import sys
from functools import lru_cache
from typing import Any

from soacheck.errors import QuantityError, plain
from soacheck.quantity import refusal
from soacheck.quantity.units import DIMENSIONS, ZERO_CELSIUS, canonical

_FACTOR = r"[A-Za-z\u00b5\u03a9\u00b0%]{1,12}(?:\^[1-4])?"
_GATE = re.compile(rf"{_FACTOR}(?:[*/]{_FACTOR}){{0,3}}")
# Constants of nature and of mathematics that pint takes for units, and names that it reads otherwise than
# the trade.
_NOT_UNITS = frozenset(["e", "c", "k", "pi", "M", "lambda", "tau", "Nm", "a", "u"])

_PINT_UNITS = {
    "ratio": "dimensionless", "temperature": "kelvin", "temperature difference": "kelvin",
    "thermal conductivity": "W/m/K", "angle": "degree",
}  # fmt: skip


@lru_cache(maxsize=1)
def _registry() -> Any:
    """A registry of our own: that of the user's program may have been set to convert offset units
    silently."""
    import pint

    return pint.UnitRegistry()


def is_pint(value: object) -> bool:
    """Whether the value is a pint quantity, without loading pint for the question."""
    pint = sys.modules.get("pint")
    return pint is not None and isinstance(value, pint.Quantity)


def from_text(value: float, spelling: str, written: str, number: str, dimension: str) -> tuple[float, str]:
    """A number with a unit that is not in our table: SI value and the caution that says how it was read."""
    names = re.findall(r"[A-Za-z%]+", spelling)
    if not _GATE.fullmatch(spelling) or _NOT_UNITS.intersection(names):
        raise refusal.unknown_unit(number, spelling, written, dimension)
    registry = _registry()
    try:
        unit = registry.parse_units(spelling)
        si, base = _converted(registry.Quantity(value, unit), dimension)
        double, _ = _converted(registry.Quantity(2 * value, unit), dimension)
    except QuantityError:
        raise
    except Exception as error:  # pint's failures have no common base: AttributeError, AssertionError, ...
        raise refusal.unknown_unit(number, spelling, written, dimension) from error
    if dimension != "temperature" and not math.isclose(double, 2 * si):  # decibels and their like
        raise refusal.unknown_unit(number, spelling, written, dimension)
    shown = si - ZERO_CELSIUS if dimension == "temperature" else si
    return si, f'"{plain(number)} {plain(written)}" was read as {shown:.6g} {base} ({unit})'


def from_pint(value: Any, dimension: str) -> tuple[float, str]:
    """A pint quantity of any registry: SI value and the quantity as text."""
    text = plain(f"{value}")
    magnitude = value.magnitude
    try:
        number = float(magnitude)
    except (TypeError, ValueError) as error:
        raise QuantityError(f"{text} is not one real number", "hand over a scalar") from error
    if isinstance(magnitude, str | bool | complex) or not math.isfinite(number):
        raise QuantityError(f"{text} is not one finite number", "hand over a finite scalar")
    try:
        return _converted(type(value)(number, value.units), dimension)[0], text
    except QuantityError:
        raise
    except Exception as error:  # DimensionalityError, OffsetUnitCalculusError, ...: no common base in pint
        raise QuantityError(
            f"{refusal.a(dimension)} is wanted here, not {text}",
            f"convert it to {DIMENSIONS[dimension]} first",
        ) from error


def _converted(quantity: Any, dimension: str) -> tuple[float, str]:
    """SI value of a pint quantity, and the unit it is in."""
    base = DIMENSIONS[dimension]
    offset = {name for name, _ in quantity.unit_items()} <= {"degree_Celsius", "degree_Fahrenheit"}
    if quantity.check("[temperature]"):
        refusal.temperature_kinds(f"{quantity.magnitude:.6g}", f"{quantity.units}", offset, dimension)
    elif dimension != "angle" and any(name == "radian" for name, _ in quantity.to_root_units().unit_items()):
        raise QuantityError(
            f"{quantity.units} counts angles, {refusal.a(dimension)} is wanted here", f"write it in {base}"
        )
    target = _PINT_UNITS.get(dimension, base)
    return float(quantity.to(target).magnitude), base


def as_pint(si: float, dimension: str) -> Any:
    """An SI value as a quantity of pint's application registry; a temperature comes out in degC."""
    import pint

    registry: Any = pint.get_application_registry()  # type: ignore[no-untyped-call]  # pint leaves it untyped
    if dimension == "temperature":
        return registry.Quantity(si - ZERO_CELSIUS, "degC")
    return registry.Quantity(si, _PINT_UNITS.get(dimension, canonical(DIMENSIONS[dimension])))
