"""Text for people: numbers with their units, lines of at most 80 columns, nothing that a terminal would obey.

Units are written in ASCII (`degC`, `ohm`, `us`): the output is the same on every terminal, and what is
printed can be copied back into a file.
"""

from __future__ import annotations

import math
import os
import re
import unicodedata
from collections.abc import Iterable

WIDTH = 80
NARROWEST = 40
ZERO_CELSIUS = 273.15  # [K]

_PREFIXES = (
    (1e-12, "p"),
    (1e-9, "n"),
    (1e-6, "u"),
    (1e-3, "m"),
    (1.0, ""),
    (1e3, "k"),
    (1e6, "M"),
    (1e9, "G"),
)
# unit -> (smallest, largest magnitude that is printed without a prefix)
_PLAIN_FROM_TO = {
    "V": (0.1, 1e4), "A": (0.1, 1e4), "W": (0.1, 1e4), "ohm": (0.1, 1e3), "J": (0.1, 1e4), "J/K": (0.1, 1e5),
    "S": (0.1, 1e4), "s": (1.0, math.inf), "H": (1.0, 1e3), "F": (1.0, 1e3), "C": (1.0, 1e3),
    "Hz": (0.1, 1e3),
}  # fmt: skip
_TEMPERATURE_DECIMALS = 1
# Smaller is the rounding of a calculation, not a value: what a junction passes when it passes nothing.
_NOTHING = {"V": 1e-15, "A": 1e-15, "W": 1e-15}
_BESIDE = 1e-12  # of the allowance beside it: the same
_MOST_DIGITS = 12
# what stands for a sign that the output's encoding lacks; the rest is written as an escape by the stream
_FALLBACK = {
    "°": "deg", "\u2126": "ohm", "\u03a9": "ohm", "\u00b5": "u", "\u03bc": "u",
    "·": "*", "×": "x", "–": "-", "—": "-",
    "−": "-", "²": "^2", "³": "^3", "±": "+-", "≤": "<=", "≥": ">=", "‘": "'", "’": "'",
    "“": '"', "”": '"', "…": "...",
}  # fmt: skip
_UNIT = re.compile(r"(%|[pnumkMG]?(V|A|W|ohm|J|J/K|S|s|H|F|C|Hz)|K|K/W|degC)[.,;:)]*")
GLUE = "\u00a0"  # a space at which a line may not end; printed as a space


def clean(text: str) -> str:
    """The text on one line, without control, bidirectional and other invisible characters."""
    kept = []
    for sign in text:
        category = unicodedata.category(sign)
        if sign in "\t\n\r\v\f" or category in ("Zl", "Zp"):
            kept.append(" ")
        elif category not in ("Cc", "Cf"):
            kept.append(sign)
    return "".join(kept)


def cells(text: str) -> int:
    """How many columns of a terminal the text takes."""
    if text.isascii():
        return len(text)
    wide = sum(unicodedata.east_asian_width(sign) in "WF" for sign in text)
    return len(text) + wide - sum(unicodedata.combining(sign) > 0 for sign in text)


def pad(text: str, width: int, right: bool = False) -> str:
    """The text filled with spaces to a number of columns."""
    fill = " " * (width - cells(text))
    return fill + text if right else text + fill


def wrapped(text: str, first: str = "", rest: str | None = None, width: int = WIDTH) -> list[str]:
    """Lines of at most `width` columns; `first` and `rest` start the first line and the ones after it."""
    rest = " " * cells(first) if rest is None else rest
    lines: list[str] = []
    line, empty = first, True
    for whole in _words(clean(text)):
        for word in _pieces(whole, width - max(cells(first), cells(rest))):
            if not empty and cells(line) + 1 + cells(word) > width:
                lines.append(line.rstrip())
                line, empty = rest, True
            line += word if empty else " " + word
            empty = False
    lines.append(line.rstrip())
    return [line.replace(GLUE, " ") for line in lines]


def _words(text: str) -> list[str]:
    """The text cut at its spaces, a unit kept with its number."""
    words: list[str] = []
    for word in filter(None, text.split(" ")):
        if words and words[-1][-1].isdigit() and _UNIT.fullmatch(word):
            words[-1] += GLUE + word
        else:
            words.append(word)
    return words


def _pieces(word: str, width: int) -> Iterable[str]:
    """A word that no line can hold, cut."""
    piece = ""
    for sign in word:
        if cells(piece + sign) > width:
            yield piece
            piece = ""
        piece += sign
    yield piece


def number(value: float, digits: int = 4, strip: bool = True) -> str:
    """A number to so many significant digits, without an exponent where that stays readable."""
    if not math.isfinite(value):
        return "unknown" if math.isnan(value) else ("unlimited" if value > 0 else "-unlimited")
    if value == 0:
        return "0"
    magnitude = int(f"{value:.{digits - 1}e}".split("e")[1])
    if not -5 <= magnitude < max(7, digits):
        return f"{value:.{digits - 1}e}"
    if magnitude >= digits:
        return str(round(value))
    text = f"{value:.{digits - 1 - magnitude}f}"
    return text.rstrip("0").rstrip(".") if strip and "." in text else text


def shown(value: float, unit: str) -> float:
    """The value in the unit that is printed: kelvin becomes degC."""
    return value - ZERO_CELSIUS if unit == "degC" else value


def _scaled(value: float, unit: str) -> tuple[float, str]:
    """Factor to divide by and the unit with its prefix, for a number of this size."""
    low, high = _PLAIN_FROM_TO.get(unit, (0.0, math.inf))
    size = abs(value)
    if not math.isfinite(size) or size == 0 or low <= size < high:
        return 1.0, unit
    # rounding must not leave "1000 m": compare what four digits make of it
    fitting = [entry for entry in _PREFIXES if entry[0] <= size * 1.00005]
    factor, prefix = fitting[-1] if fitting else _PREFIXES[0]
    return factor, prefix + unit


def settled(value: float, unit: str) -> float:
    """The value, or 0 where it is too small to be more than a rounding."""
    return 0.0 if abs(value) < _NOTHING.get(unit, 0.0) else value


def _celsius(value: float, decimals: int = _TEMPERATURE_DECIMALS) -> str:
    if not math.isfinite(value):
        return number(value)
    text = f"{value - ZERO_CELSIUS:.{decimals}f}"
    return text[1:] if text.startswith("-") and float(text) == 0 else text


def quantity(value: float, unit: str, digits: int = 4) -> str:
    """A value with its unit: "22.3 W", "850 mA", "108.3 degC"; "unknown" when it is not a number."""
    if math.isnan(value):
        return "unknown"
    if unit == "degC":
        return f"{_celsius(value)} degC"
    value = settled(value, unit)
    factor, scaled_unit = _scaled(value, unit)
    text = number(value / factor, digits)
    return text if unit == "1" else f"{text} {scaled_unit}"


def plain(value: float, unit: str, digits: int = 5) -> str:
    """A value in its base unit, as it is put into a formula: "0.00042 s", "89.13 degC"."""
    if math.isnan(value):
        return "unknown"
    if unit == "degC":
        return f"{number(value - ZERO_CELSIUS, max(digits, 5))} degC"
    text = number(settled(value, unit), digits)
    return text if unit == "1" else f"{text} {unit}"


def pair(applied: float, allowed: float, unit: str) -> str:
    """Applied of allowed in one unit, with as many digits as it takes to tell the two apart."""
    if math.isnan(applied) or math.isnan(allowed):
        known = applied if math.isnan(allowed) else allowed
        if math.isnan(known):
            return "unknown"
        text = quantity(known, unit)
        return f"{text} of unknown" if math.isnan(allowed) else f"unknown of {text}"
    if unit != "degC" and abs(applied) < _BESIDE * abs(allowed):
        applied = 0.0
    factor, scaled_unit = _scaled(max(abs(applied), abs(allowed)) if allowed == 0 else allowed, unit)
    for extra in range(_MOST_DIGITS - 4):
        if unit == "degC":
            texts = [_celsius(value, _TEMPERATURE_DECIMALS + extra) for value in (applied, allowed)]
        else:
            texts = [number(value / factor, 4 + extra) for value in (applied, allowed)]
        if applied == allowed or texts[0] != texts[1]:
            break
    return f"{texts[0]} of {texts[1]}" + ("" if unit == "1" else f" {scaled_unit}")


def percent(utilisation: float) -> str:
    """A utilisation as a percentage; one that is not exactly 1 is never printed as 100 %.

    A negative one is no share of an allowance: it has no figure.
    """
    if not math.isfinite(utilisation) or utilisation < 0:
        return "-"
    value = 100 * utilisation
    decimals = 0 if abs(value) >= 10 else 1
    while decimals < _MOST_DIGITS and utilisation != 1 and float(f"{value:.{decimals}f}") == 100:
        decimals += 1
    return f"{value:.{decimals}f} %" if abs(value) < 1e6 else f"{value:.2g} %"


def page_width(stream: object) -> int:
    """Columns for a stream: a narrow terminal's or those that COLUMNS asks for, from 40 to our 80.

    A file or a pipe gets 80 unless COLUMNS is set, so that what is kept does not depend on a window.
    """
    asked = os.environ.get("COLUMNS", "")
    columns = int(asked) if asked.isascii() and asked.isdigit() else 0
    if columns == 0:
        fileno = getattr(stream, "fileno", None)
        try:
            columns = os.get_terminal_size(fileno()).columns if fileno is not None else 0
        except (OSError, ValueError):  # no terminal; a stream that was closed or has no file
            columns = 0
    return min(max(columns, NARROWEST), WIDTH) if columns > 0 else WIDTH


def wants_colour(stream: object) -> bool:
    """Whether a stream is a terminal that nobody asked to keep plain."""
    isatty = getattr(stream, "isatty", None)
    plain_wanted = bool(os.environ.get("NO_COLOR")) or os.environ.get("TERM") == "dumb"
    return not plain_wanted and isatty is not None and bool(isatty())


def encodable(text: str, encoding: str | None) -> str:
    """The text in signs that the encoding has: `25 °C` becomes `25 degC` in ASCII, others an escape."""
    codec = encoding or "ascii"
    try:
        text.encode(codec)
    except UnicodeEncodeError:
        pass
    else:
        return text
    known = "".join(sign if _has(sign, codec) else _FALLBACK.get(sign, sign) for sign in text)
    return known.encode(codec, "backslashreplace").decode(codec)


def _has(sign: str, codec: str) -> bool:
    try:
        sign.encode(codec)
    except UnicodeEncodeError:
        return False
    return True
