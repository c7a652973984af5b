"""Why a text is not the quantity that is wanted, and what to write instead."""

from __future__ import annotations

import re
from difflib import get_close_matches

from soacheck.errors import QuantityError, plain
from soacheck.quantity.units import DIMENSIONS, UNITS, ZERO_CELSIUS, canonical
from soacheck.quantity.writing import write

_NAMES = {"ratio": "percentage", "voltage tempco": "temperature coefficient of a voltage"}
# 4k7, 2R2, 3V3: the prefix as decimal point
_MARKED = re.compile(r"([pnumkKMGRVvAWF]|ohm)([0-9]{1,3})(?: ?(.*))?")
_CONDUCTIVITY = frozenset(("W/mK", "W/m K", "W/m*K", "W/m degC", "W/mdegC", "W/m*degC", "W/Km", "W/K m", "W/K*m"))
_RESISTOR = {
    "R": "ohm", "r": "ohm", "E": "ohm", "m": "mohm", "k": "kohm", "K": "kohm", "M": "Mohm", "meg": "Mohm",
    "Meg": "Mohm", "MEG": "Mohm",
}  # fmt: skip
_NUMBER_ONLY = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?", re.ASCII)
_COMMA = re.compile(r"([+-]?[0-9]+),([0-9]+) *(.*)", re.ASCII)
_GROUPED = re.compile(r"([+-]?[0-9]{1,3}(?:[ _'][0-9]{3})+(?:\.[0-9]*)?) *([^0-9]*)", re.ASCII)
_RANGE = re.compile(r"[0-9. ]+[^0-9]*(?:\.\.|\bto\b|\u2013|\u2026|(?<=[0-9A-Za-z]) ?- ?)(?=[0-9])", re.ASCII)


def a(dimension: str) -> str:
    """The dimension with its article: "a power", "an energy"."""
    name = _NAMES.get(dimension, dimension)
    return f"{'an' if name[0] in 'aeiou' else 'a'} {name}"


def output_unit(dimension: str) -> str:
    """The unit in which a value of this dimension is asked for."""
    return "%" if dimension == "ratio" else DIMENSIONS[dimension]


def _instead(problem: str, text: str, remedy: str = "") -> QuantityError:
    return QuantityError(problem, remedy or f'write "{text}"', text)


def not_text(value: object, dimension: str) -> QuantityError:
    """For a value that is not a text at all."""
    if isinstance(value, bool):
        return _example("true and false are not quantities", dimension)
    if isinstance(value, int | float):
        return _bare(f"{value:.12g}" if abs(value) < 1e300 else "1", dimension)
    kind = f"a {type(value).__name__}"
    if isinstance(value, list | tuple):
        kind = "a list"
    elif isinstance(value, dict):
        kind = "a table"
    elif type(value).__module__ == "datetime":
        kind = "a date or time"
    return _example(f"{kind} stands where {a(dimension)} is wanted", dimension)


def _bare(number: str, dimension: str) -> QuantityError:
    if dimension == "ratio":
        value = float(number)  # above 1 it was per cent already, but for its sign
        return _instead("a ratio is written in per cent", f"{value if abs(value) > 1 else 100 * value:.12g} %")
    return _instead(f"a number without a unit; {a(dimension)} is wanted here", f"{number} {DIMENSIONS[dimension]}")


def _example(problem: str, dimension: str) -> QuantityError:
    return QuantityError(problem, f'write a number and a unit in quotes, such as "10 {output_unit(dimension)}"')


def not_a_quantity(text: str, dimension: str) -> QuantityError:  # noqa: PLR0911 one return per mistake known
    """For a text that is not a number followed by a unit. `text` has its signs made plain and is stripped."""
    lowered = text.lower().lstrip("+-")
    unit = output_unit(dimension)
    if not text:
        return _example("the text is empty", dimension)
    if _NUMBER_ONLY.fullmatch(text):
        if sum(ch.isdigit() for ch in text) > 24:
            return _example("the number has too many digits", dimension)
        return _bare(text, dimension)
    if lowered.startswith(("nan", "inf")):
        return _example("a quantity is a finite number", dimension)
    if match := _COMMA.fullmatch(text):
        rest = match[3] or unit
        if len(match[2]) == 3 and "," not in rest:
            return QuantityError(
                f"{plain(text)} can be read in two ways, because of its comma",
                f'write "{match[1]}.{match[2]} {plain(rest)}" or "{match[1]}{match[2]} {plain(rest)}"',
            )
        return _instead("a decimal comma", f"{match[1]}.{match[2]} {plain(rest)}", "use a decimal point")
    if "," in text:
        return _example("a comma stands in the text", dimension)
    if match := _GROUPED.fullmatch(text):
        digits = re.sub("[ _']", "", match[1])
        return _instead("the digits of a number are written together", f"{digits} {plain(match[2].strip()) or unit}")
    if not any(ch.isdigit() for ch in text):
        return _example(f"no number in {plain(text)!r}", dimension)
    if _RANGE.match(text):
        return _example("two numbers; a range is a list of two quantities, or min and max in a table", dimension)
    if any(sign in text for sign in "*^/()") and text[0] in "0123456789.+-(":
        return _example("nothing is evaluated: no arithmetic, one number and its unit", dimension)
    if re.match(r"[+-]?[0-9.]+[eE](?![+-]?[0-9])", text):
        return _example("an exponent without digits", dimension)
    return _example(f"{plain(text)!r} is not one number followed by a unit", dimension)


def trap(number: str, spelling: str, written: str, dimension: str) -> None:
    """Refuse what looks like a unit and means another; returns when pint alone may know the unit."""
    resistor = _RESISTOR.get(spelling)
    if resistor and dimension == "resistance":
        raise _instead(f"{plain(written)} alone is not a unit of resistance", f"{number} {resistor}")
    if match := _MARKED.fullmatch(spelling):
        raise _marked(number, match, dimension)
    if spelling in _CONDUCTIVITY:
        raise _instead(f"{plain(written)} can be read in two ways", f"{number} W/(m K)")
    if dimension == "thermal resistance":
        if spelling in ("W/K", "W/degC", "W/C", "mW/K", "mW/degC", "mW/C"):
            reciprocal = float(number) * (1e-3 if spelling.startswith("m") else 1)
            text = f"{1 / reciprocal:.6g} K/W" if reciprocal > 0 else ""
            raise QuantityError(
                f"{plain(written)} measures a thermal conductance, a thermal resistance is wanted here",
                "write its reciprocal in K/W", text,
            )  # fmt: skip
        if spelling in ("C/W", "c/w", "deg/W", "k/w", "k/W", "degK/W"):
            raise _instead(f"{plain(written)} is not a thermal resistance", f"{number} K/W")
    if dimension == "voltage tempco" and (match := re.fullmatch(r"([mu]?V)/(?:C|c|k|deg|degK)", spelling)):
        raise _instead(f"{plain(written)} is not a voltage per kelvin", f"{number} {match[1]}/K")
    if spelling in ("c", "degc", "degK", "\u0394K", "\u0394degC", "dK", "F", "k") and "temperature" in dimension:
        unit = "degC" if dimension == "temperature" else "K"
        raise _instead(f"{plain(written)} is not how {a(dimension)} is written", f"{number} {unit}")
    if _folded(spelling):
        raise unknown_unit(number, spelling, written, dimension)


def _marked(number: str, match: re.Match[str], dimension: str) -> QuantityError:
    prefix, decimals = match[1], match[2]
    unit = output_unit(dimension)
    if dimension == "resistance":
        unit = _RESISTOR.get(prefix, "ohm")
    elif prefix in "pnumkMG" and prefix + unit in UNITS:
        unit = prefix + unit
    if "." in number or "e" in number.lower():
        return _example(f"{plain(number + match[0])!r} is not one number followed by a unit", dimension)
    return _instead("a prefix stands where the decimal point belongs", f"{number}.{decimals} {unit}")


def _folded(spelling: str) -> tuple[str, ...]:
    """Units of the table that differ from this spelling in upper and lower case alone."""
    low = spelling.casefold()
    return tuple(name for name in UNITS if name != spelling and name.casefold() == low)


def unknown_unit(number: str, spelling: str, written: str, dimension: str) -> QuantityError:
    """For a unit that neither the table nor pint may read."""
    problem = f"{plain(written)!r} is not a unit that is known here"
    if re.search(r"[0-9]", re.sub(r"\^[1-4]", "", spelling)) or any(sign in spelling for sign in ";,#\u00b1"):
        return _example(f"{plain(number + ' ' + written)!r} is more than one number and a unit", dimension)
    same_case = tuple(name for name in _folded(spelling) if UNITS[name].dimension == dimension)
    if same_case:
        offers = " or ".join(f'"{number} {name}"' for name in same_case[:2])
        return QuantityError(
            f"{problem}; upper and lower case differ", f"was {offers} meant?", f"{number} {same_case[0]}"
        )
    fitting = [name for name, unit in UNITS.items() if unit.dimension == dimension]
    near = get_close_matches(spelling[:40], fitting, n=1, cutoff=0.6)
    if near:
        return QuantityError(problem, f'was "{number} {near[0]}" meant?', f"{number} {near[0]}")
    unit = output_unit(dimension)
    return QuantityError(f"{problem}; {a(dimension)} is wanted here", f'write it in {unit}: "{number} {unit}"')


def temperature_kinds(number: str, unit: str, offset: bool, dimension: str) -> None:
    """Refuse a kelvin for a temperature and a degC for a difference of temperatures."""
    if dimension == "temperature" and not offset:
        size = float(number)
        text = f"{number} degC" if size < 200 else f"{size - ZERO_CELSIUS:.6g} degC"
        raise QuantityError(f"a temperature is wanted here, {unit} measures a difference", f"was {text} meant?", text)
    if dimension == "temperature difference" and offset:
        raise QuantityError(
            f"a difference of temperatures is wanted here, {unit} states a temperature",
            f"was {number} K meant?", f"{number} K",
        )  # fmt: skip


def wrong_dimension(number: str, spelling: str, written: str, found: str, dimension: str) -> QuantityError:
    """For a unit of the table that measures something else."""
    if dimension in ("temperature", "temperature difference"):
        try:
            if found in ("temperature", "temperature difference"):
                temperature_kinds(number, plain(written), found == "temperature", dimension)
        except QuantityError as error:
            return error
        if spelling in ("C", "deg"):
            unit = "degC" if dimension == "temperature" else "K"
            meaning = "coulomb" if spelling == "C" else "an angle"
            return _instead(f"{a(dimension)} is wanted here, {plain(written)} alone is {meaning}", f"{number} {unit}")
    if spelling in ("K", "m") and dimension == "resistance":
        return _instead(f"{plain(written)} alone is not a unit of resistance", f"{number} {_RESISTOR[spelling]}")
    offers = [name for name in _folded(spelling) if UNITS[name].dimension == dimension]
    unit = offers[0] if offers else output_unit(dimension)
    return _instead(f"{a(dimension)} is wanted here, {plain(written)} measures {a(found)}", f"{number} {unit}")


def implausible(
    si: float, text: str, number: str, spelling: str, *, dimension: str, band: tuple[float, float]
) -> QuantityError:
    """For a value outside the plausible range of its key."""
    low, high = (write(edge, dimension) for edge in band)
    problem = f"{plain(text.strip())} is not plausible here: {low} to {high} is"
    if number:
        for name in _folded(canonical(spelling)):
            unit = UNITS[name]
            other = float(number) * unit.multiplier / unit.divisor + unit.offset
            if unit.dimension == dimension and band[0] <= other <= band[1]:
                return QuantityError(problem, f'was "{number} {name}" meant?', f"{number} {name}")
    return QuantityError(problem, f"check the number and the unit; {write(si, dimension)} was read")
