"""One raw TOML value to what its key's declaration wants; whatever is wrong goes to the ledger."""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Callable
from dataclasses import dataclass, replace

from soacheck.errors import QuantityError, plain
from soacheck.quantity import DIMENSIONS, a, read
from soacheck.table.declare import GRADES, Key, Spread
from soacheck.table.ledger import Ledger, joined
from soacheck.table.nearest import nearest
from soacheck.trace import FloatArray, frozen

_UNKNOWN = frozenset(
    ("", "unknown", "notknown", "notyetknown", "unspecified", "notspecified", "notstated", "notgiven", "na", "tbd",
     "tba", "todo")
)  # fmt: skip
INLINE = ("value", "min", "max", "tol", "source", "grade")  # keys of a quantity written as an inline table


@dataclass(frozen=True, slots=True, kw_only=True)
class Stated:
    """A quantity or number of the file, SI. `ends` holds the elements of a list of two or three."""

    nominal: float
    unit: str
    low: float | None = None  # uncertainty: min / max / tol
    high: float | None = None
    ends: tuple[float, ...] = ()
    source: str = ""
    grade: str = ""


@dataclass(frozen=True, slots=True)
class Word:
    """A word written in place of a quantity."""

    text: str


Value = Stated | Word | str | bool | int | FloatArray


def unit_of(key: Key) -> str:
    """The unit that a value of this key is traced in."""
    return DIMENSIONS[key.dimension] if key.dimension else "1"


def default_value(key: Key) -> object:
    """The raw value of a key's default, as the file would give it."""
    text = key.default or ""
    if text[:1] in ('"', "'", "[", "{") or key.form in ("number", "count", "flag"):
        return tomllib.loads(f"x = {text}")["x"]
    return text


def unfilled(raw: object) -> bool:
    """Whether a value, or one inside it, still has the dots of a template: "...", "... V"."""
    if isinstance(raw, dict):
        return any(unfilled(inner) for inner in raw.values())
    if isinstance(raw, list):
        return any(unfilled(inner) for inner in raw)
    return isinstance(raw, str) and raw.lstrip().startswith(("...", "\u2026"))


def value_of(key: Key, dotted: str, raw: object, ledger: Ledger) -> Value | None:
    """The value of a key of any form but table, tables and tree; None when it is wrong, and noted."""
    if unfilled(raw):
        ledger.refuse(dotted, "not filled in", "fill it in" if key.required else "fill it in, or delete the line")
        return None
    return _READERS[key.form](key, dotted, raw, ledger)


def _count(key: Key, dotted: str, raw: object, ledger: Ledger) -> int | None:
    if isinstance(raw, int) and not isinstance(raw, bool) and 1 <= raw <= 10**9:
        return raw
    ledger.refuse(dotted, "a whole number of at least 1 is wanted here", f"{key.name} = 1")
    return None


def _plain_text(key: Key, dotted: str, raw: object, ledger: Ledger) -> str | None:
    if isinstance(raw, str):
        return raw
    ledger.refuse(dotted, "a text is wanted here", f'{key.name} = "..."')
    return None


def _flag(key: Key, dotted: str, raw: object, ledger: Ledger) -> bool | None:
    if isinstance(raw, bool):
        return raw
    ledger.refuse(dotted, "true or false is wanted here, without quotes", f"{key.name} = true")
    return None


def _choice(key: Key, dotted: str, raw: object, ledger: Ledger) -> str | None:
    if isinstance(raw, str) and raw in key.choices:
        return raw
    _refuse_word(key, dotted, raw, ledger)
    return None


def _quantity(key: Key, dotted: str, raw: object, ledger: Ledger) -> Stated | Word | None:
    if isinstance(raw, str) and raw in key.choices:
        return Word(raw)
    if isinstance(raw, dict):
        return _inline(key, dotted, raw, ledger)
    if isinstance(raw, list):
        return _list(key, dotted, raw, ledger)
    if isinstance(raw, str) and not any(ch.isdigit() for ch in raw) and (key.choices or _says_unknown(raw)):
        _refuse_word(key, dotted, raw, ledger)
        return None
    si = single(key, dotted, key.name, raw, ledger)
    return None if si is None else Stated(nominal=si, unit=unit_of(key), grade=key.grade)


def _refuse_word(key: Key, dotted: str, raw: object, ledger: Ledger) -> None:
    known = ", ".join(f'"{word}"' for word in key.choices)
    near = nearest(raw, key.choices) if isinstance(raw, str) and not _says_unknown(raw) else None
    alone = a(key.dimension or "bare number")
    wanted = "one of" if key.form == "choice" else "a quantity or one of" if known else alone
    remedy = f'{key.name} = "{near or key.choices[0]}"' if near or key.form == "choice" else key.when_unknown
    if key.required and not key.choices:
        remedy = key.where or "look it up: no decision is made without it"
    ledger.refuse(dotted, f"{wanted} {known}".strip() + " is wanted here", remedy)


def _says_unknown(text: str) -> bool:
    """Whether a word says that nobody knows: it is neither a slip of another word nor a quantity gone wrong."""
    return re.sub("[^a-z]", "", text.casefold()) in _UNKNOWN and text.strip() != ""


def single(key: Key, dotted: str, name: str, raw: object, ledger: Ledger) -> float | None:
    """One quantity or bare number, its sign and band checked. `name` is what the remedy's line calls it."""
    if key.form == "number" or not key.dimension:
        si = _number(key, dotted, name, raw, ledger)
    else:
        si = _text(key, dotted, name, raw, ledger)
    if si is None or key.dimension == "temperature" or key.sign == "any":
        return si
    if si < 0:
        shown = raw.strip() if isinstance(raw, str) else str(raw)
        positive = shown.lstrip("-\u2212")
        line = f'{name} = "{positive}"' if isinstance(raw, str) else f"{name} = {positive}"
        ledger.refuse(dotted, "it must not be negative; PNP and P-channel values are magnitudes", plain(line))
        return None
    if si == 0 and key.sign == "positive":
        ledger.refuse(dotted, "it must be above zero", f"leave {name} out when it is not known")
        return None
    return si


def _text(key: Key, dotted: str, name: str, raw: object, ledger: Ledger) -> float | None:
    try:
        reading = read(raw, key.dimension, key.band)
    except QuantityError as error:
        ledger.refuse_quantity(dotted, name, error)
        return None
    if reading.caution:
        ledger.caution("unit-read", f"{ledger.source.base_name}: {dotted}: {reading.caution}")
    return reading.si


def _number(key: Key, dotted: str, name: str, raw: object, ledger: Ledger) -> float | None:
    if isinstance(raw, bool) or not isinstance(raw, int | float):
        kind = "in quotes" if isinstance(raw, str) else "of another kind"
        number = raw.split()[0] if isinstance(raw, str) and raw.strip() else "1"
        line = f"{name} = {plain(number)}" if number.replace(".", "", 1).isdecimal() else f"{name} = 1.0"
        ledger.refuse(dotted, f"a bare number is wanted here, not a value {kind}", line)
        return None
    if isinstance(raw, int) and raw.bit_length() > 1000:
        raw = math.inf  # as good as, and float() would not hold it
    if not math.isfinite(raw):
        ledger.refuse(dotted, "the number is not finite", f"{name} = 1.0")
        return None
    if key.band is not None and not key.band[0] <= raw <= key.band[1]:
        low, high = key.band
        ledger.refuse(dotted, f"{raw:g} is not plausible here: {low:g} to {high:g} is", "check the number")
        return None
    return float(raw)


def _list(key: Key, dotted: str, raw: list[object], ledger: Ledger) -> Stated | None:
    if key.lists == 0:
        ledger.refuse(dotted, "one value is wanted here, not a list", f'{key.name} = "{_example(key)}"')
        return None
    words = "an operating range is a list of two, [from, to]" if key.lists == 2 else "a list is [min, typ, max]"
    if len(raw) != key.lists:
        ledger.refuse(dotted, f"{words}; {len(raw)} values stand here", f"give {key.lists} values, or one alone")
        return None
    ends = []
    for number, element in enumerate(raw, 1):
        si = single(key, f"{dotted}[{number}]", "", element, ledger)
        if si is None:
            return None
        ends.append(si)
    if ends != sorted(ends):
        ledger.refuse(dotted, f"{words}; the values do not rise", "put the smallest value first")
        return None
    nominal = ends[1] if key.lists == 3 else ends[0]
    return Stated(nominal=nominal, unit=unit_of(key), ends=tuple(ends), grade=key.grade)


def _example(key: Key) -> str:
    return f"1 {unit_of(key)}" if key.dimension else "1"


def _inline(key: Key, dotted: str, raw: dict[str, object], ledger: Ledger) -> Stated | None:
    """{ value, min, max, tol, source, grade }."""
    good = True
    for name in raw:
        if name not in INLINE:
            near = nearest(name, INLINE)
            remedy = f"was {near} meant?" if near else "a quantity's table has " + ", ".join(INLINE)
            ledger.refuse(joined(dotted, name), f"{plain(name)} is not a key of a quantity", remedy)
            good = False
    source, grade = raw.get("source", ""), raw.get("grade", key.grade)
    if not isinstance(source, str):
        ledger.refuse(f"{dotted}.source", "a text is wanted here", 'source = "drawing 3, rev B"')
        good = False
    if "grade" in raw and grade not in GRADES:
        near = nearest(grade, GRADES) if isinstance(grade, str) else None
        ledger.refuse(f"{dotted}.grade", "a grade is one of " + ", ".join(GRADES), f'grade = "{near or GRADES[0]}"')
        good = False
    if "value" not in raw:
        ledger.refuse(dotted, "the value is missing", f'{key.name} = {{ value = "{_example(key)}", ... }}')
        return None
    nominal = single(key, f"{dotted}.value", "value", raw["value"], ledger)
    if nominal is None or not good:
        return None
    ends = _uncertainty(key, dotted, raw, nominal, ledger)
    if ends is None:
        return None
    low, high = ends if ends != (nominal, nominal) else (None, None)
    return Stated(nominal=nominal, unit=unit_of(key), low=low, high=high, source=str(source), grade=str(grade))


def _uncertainty(
    key: Key, dotted: str, raw: dict[str, object], nominal: float, ledger: Ledger
) -> tuple[float, float] | None:
    """Low and high of min / max / tol, the nominal value twice when none is stated."""
    if "tol" in raw:
        if "min" in raw or "max" in raw:
            ledger.refuse(dotted, "tol stands beside min or max", "state either tol, or min and max")
            return None
        return _tolerance(key, f"{dotted}.tol", raw["tol"], nominal, ledger)
    low = high = nominal
    if "min" in raw:
        read_low = single(key, f"{dotted}.min", "min", raw["min"], ledger)
        if read_low is None:
            return None
        low = read_low
    if "max" in raw:
        read_high = single(key, f"{dotted}.max", "max", raw["max"], ledger)
        if read_high is None:
            return None
        high = read_high
    if not low <= nominal <= high:
        ledger.refuse(dotted, "min <= value <= max does not hold", "check the three figures")
        return None
    return low, high


def _tolerance(key: Key, dotted: str, raw: object, nominal: float, ledger: Ledger) -> tuple[float, float] | None:
    if key.dimension == "temperature":  # a percentage of a temperature means nothing
        wanted = Key(table="", name="tol", dimension="temperature difference", sign="non-negative", band=(0.0, 500.0))
        margin = single(wanted, dotted, "tol", raw, ledger)
    else:
        wanted = Key(table="", name="tol", dimension="ratio", sign="non-negative", band=(0.0, 0.99))
        share = single(wanted, dotted, "tol", raw, ledger)
        margin = None if share is None else share * abs(nominal)
    if margin is None:
        return None
    low, high = nominal - margin, nominal + margin
    if key.band is not None and not (key.band[0] <= low and high <= key.band[1]):
        ledger.refuse(dotted, "the value with this tolerance leaves what is plausible here", "check the tolerance")
        return None
    return low, high


def _points(key: Key, dotted: str, raw: object, ledger: Ledger) -> FloatArray | None:
    """(n, columns) in SI; one column may be a flat list."""
    width = len(key.columns)
    row = "[" + ", ".join(f'"1 {DIMENSIONS[column]}"' if column else "1" for column in key.columns) + "]"
    remedy = f"{key.name} = [{row}, ...]" if width > 1 else f"{key.name} = {row[:-1]}, ...]"
    if not isinstance(raw, list) or not raw:
        ledger.refuse(dotted, "a list of points is wanted here" if width > 1 else "a list is wanted here", remedy)
        return None
    columns = [Key(table="", name="", dimension=column, sign="any") for column in key.columns]
    if width == 1:
        columns = [replace(columns[0], band=key.band, sign=key.sign)]
    good = True
    rows: list[list[float]] = []
    for number, element in enumerate(raw, 1):
        if ledger.full:
            return None
        cells = element if isinstance(element, list) else [element]
        if len(cells) != width or (width > 1 and not isinstance(element, list)):
            ledger.refuse(f"{dotted}[{number}]", f"a point has {width} values here", remedy)
            good = False
            continue
        values = []
        for place, (cell, column) in enumerate(zip(cells, columns, strict=True), 1):
            inner = f"{dotted}[{number}][{place}]" if isinstance(element, list) else f"{dotted}[{number}]"
            si = single(column, inner, "", cell, ledger)
            good = good and si is not None
            values.append(math.nan if si is None else si)
        rows.append(values)
    return frozen(rows) if good else None


def spread_of(dotted: str, stated: Stated) -> Spread | None:
    """The uncertainty of a stated value, None when none is stated."""
    if stated.low is None or stated.high is None:
        return None
    return Spread(key=dotted, nominal=stated.nominal, low=stated.low, high=stated.high)


_READERS: dict[str, Callable[[Key, str, object, Ledger], Value | None]] = {
    "quantity": _quantity,
    "number": _quantity,
    "count": _count,
    "text": _plain_text,
    "flag": _flag,
    "choice": _choice,
    "points": _points,
}
