"""Text "number unit" to an SI float. Nothing is evaluated; all but a number and a known unit is refused."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from soacheck.errors import QuantityError
from soacheck.quantity import pint_gate, refusal
from soacheck.quantity.units import DIMENSIONS, UNITS, canonical, plain_signs

LONGEST = 64  # characters; a rating needs about ten

_NUMBER = r"[+-]?(?:[0-9]{1,24}(?:\.[0-9]{0,24})?|\.[0-9]{1,24})(?:[eE][+-]?[0-9]{1,3})?"
_QUANTITY = re.compile(rf"({_NUMBER})(?: *([^0-9+\-., eE_'\n\r][^\n\r]*)| +([eE][^\n\r]*))", re.ASCII)


@dataclass(frozen=True, slots=True)
class Reading:
    """A text read as a quantity: SI value (kelvin for temperatures), and what a report must say about it."""

    si: float
    caution: str = ""  # set when the unit went through pint


def read(value: object, dimension: str, band: tuple[float, float] | None = None) -> Reading:
    """Text "number unit" (or a pint quantity) to SI. Raises QuantityError(problem, remedy).

    `dimension` is a name in DIMENSIONS; `band` the plausible range in SI (kelvin), both ends allowed.
    """
    try:
        return _read(value, dimension, band)
    except QuantityError as error:
        raise _offering_what_is_right(error, dimension) from error.__cause__


def _offering_what_is_right(error: QuantityError, dimension: str) -> QuantityError:
    """The same refusal, its offer taken back when that would be refused too: "-274" is not -274 degC."""
    try:
        if error.instead:
            _read(error.instead, dimension, None)
    except QuantityError as worse:
        return QuantityError(error.problem, worse.problem)
    return error


def _read(value: object, dimension: str, band: tuple[float, float] | None) -> Reading:
    if type(value) is str and len(value) <= LONGEST:
        match = _QUANTITY.fullmatch(value)
        unit = UNITS.get(match[2]) if match else None
        if match and unit and unit.dimension == dimension:  # the usual case, in about a microsecond
            si = float(match[1]) * unit.multiplier / unit.divisor + unit.offset
            return Reading(_checked(si, value, match[1], match[2], dimension=dimension, band=band))
        return _read_text(value, dimension, band)
    if isinstance(value, str):
        return _read_text(str(value), dimension, band)
    if pint_gate.is_pint(value):
        si, text = pint_gate.from_pint(value, dimension)
        return Reading(_checked(si, text, "", "", dimension=dimension, band=band))
    raise refusal.not_text(value, dimension)


def _read_text(value: str, dimension: str, band: tuple[float, float] | None) -> Reading:
    """The same with every spelling of the unit, and with the reasons for a refusal."""
    if dimension not in DIMENSIONS:
        raise KeyError(dimension)  # a bug in a declaration, not in the input
    if len(value) > LONGEST:
        raise QuantityError(
            f"{len(value)} characters are too long for a quantity", 'write a number and a unit: "0.83 K/W"'
        )
    text = plain_signs(value).strip(" ")
    match = _QUANTITY.fullmatch(text)
    if match is None:
        raise refusal.not_a_quantity(text, dimension)
    number, written = match[1], match[2] or match[3]
    spelling = canonical(written)
    unit = UNITS.get(spelling)
    if unit is None:
        refusal.trap(number, spelling, written, dimension)
        si, caution = pint_gate.from_text(float(number), spelling, written, number, dimension)
        return Reading(_checked(si, value, number, spelling, dimension=dimension, band=band), caution)
    if unit.dimension != dimension:
        raise refusal.wrong_dimension(number, spelling, written, unit.dimension, dimension)
    si = float(number) * unit.multiplier / unit.divisor + unit.offset
    return Reading(_checked(si, value, number, spelling, dimension=dimension, band=band))


def _checked(
    si: float,
    text: str,
    number: str,
    spelling: str,
    *,
    dimension: str,
    band: tuple[float, float] | None,
) -> float:
    """The value, if it is finite, possible and plausible."""
    if not math.isfinite(si):
        raise QuantityError("the number is too large to be held", "check the exponent and the unit")
    if dimension == "temperature" and si < 0:
        raise QuantityError(f"{text.strip()} is below absolute zero", "check the sign and the unit")
    if band is not None and not band[0] <= si <= band[1]:
        raise refusal.implausible(si, text, number, spelling, dimension=dimension, band=band)
    return si + 0.0  # a minus zero is a zero
