"""A rating file to fill in, made from the declarations of its keys."""

from __future__ import annotations

import textwrap
from collections import Counter
from collections.abc import Iterable, Iterator

from soacheck.device.keys import KEYS
from soacheck.device.ratings import MOSFET, Kind
from soacheck.table import Key

_WIDTH = 98
_COLUMN = 34  # where the remark beside a key starts
_BLANK = "..."

_INTRO = """\
Rating file for one transistor ({kind}). Copy the figures from the data sheet: replace every
"...", and take the leading # away from a line to state it. Leave out what the sheet does not
say: nothing is guessed, and what a decision lacks is named. A value may carry its grade:
{{value = "0.83 K/W", grade = "typical"}}. A list of three is [min, typ, max]; one typical
value may stand alone."""

_TABLES = {
    "device": "identity",
    "max": "greatest permitted values; P-type values as magnitudes",
    "thermal": "thermal data",
    "soa": "safe area: one [[soa]] table per printed curve, points read off the log-log chart",
    "soa_derating": "how second breakdown falls with temperature",
    "typical": "characteristics",
    "mechanical": "mounting",
}

# A text that would be right for a key of each dimension.
_UNITS = {
    "voltage": "V",
    "current": "A",
    "power": "W",
    "resistance": "ohm",
    "thermal resistance": "K/W",
    "heat capacity": "J/K",
    "temperature": "degC",
    "temperature difference": "K",
    "time": "us",
    "frequency": "MHz",
    "energy": "mJ",
    "capacitance": "pF",
    "charge": "nC",
    "conductance": "S",
    "ratio": "%",
    "voltage tempco": "mV/K",
    "length": "mm",
}
_SHAPES = {
    "thermal.Z_th_jc": '{ pulse = ["... ms", "... ms"], value = ["... K/W", "... K/W"] }',
    "soa.points": '[["... V", "... A"], ["... V", "... A"]]',
    "soa_derating.points": '[["25 degC", "100 %"], ["... degC", "... %"]]',
    "typical.h_FE_points": '[["... A", "25 degC", 0], ["... A", "25 degC", 0]]',
}
_SMALL = {
    "I_CBO": "uA",
    "I_DSS": "uA",
    "I_CES": "uA",
    "R_DS_on": "mohm",
    "R_DS_on_hot": "mohm",
    "r_CE": "mohm",
}
_WANTED = frozenset({"device.ratings_from", "thermal.R_th_jc", "max.P_tot"})  # not required, but stated by any sheet
_FIRST_CURVE = ("pulse", "T_ref", "points")


def template(kind: Kind) -> str:
    """A commented rating file for a kind of device: each key, its meaning, and where a data sheet states it.

    Keys that a device cannot do without stand open, with "..." to be replaced; the others are commented out.
    """
    intro = textwrap.wrap(_INTRO.format(kind=kind), _WIDTH - 2, break_on_hyphens=False)
    lines = [f"# {line}" for line in intro]
    mine = [key for key in KEYS if key.belongs(kind)]
    for table, title in _TABLES.items():
        keys = [key for key in mine if key.table == table]
        # Said once in the heading, where most keys of a table stand in one place of the sheet.
        usual = Counter(key.where for key in keys).most_common(1)[0][0]
        lines += ["", *(f"# {line}" for line in textwrap.wrap(f"{title} ({usual})", _WIDTH - 2))]
        if table == "soa":
            lines += _curve(keys, kind, usual)
            continue
        if table == "thermal":
            keys = [key for key in keys if key.name != "Z_th_jc"] + [key for key in keys if key.name == "Z_th_jc"]
        lines.append(f"[{table}]")
        lines += _written(keys, kind, usual)
        if table == "thermal":
            lines += _other_forms()
    return "\n".join(lines) + "\n"


def _curve(keys: list[Key], kind: Kind, usual: str) -> Iterator[str]:
    """One curve, commented out as a whole: its table exists only once its points are read."""
    first = sorted((key for key in keys if key.name in _FIRST_CURVE), key=lambda key: _FIRST_CURVE.index(key.name))
    yield "# Without a dc curve whatever lasts or is held stays unproven: start with that one."
    yield "# [[soa]]"
    for line in _written([*first, *(key for key in keys if key.name not in _FIRST_CURVE)], kind, usual):
        yield line if line.startswith("#") else f"# {line}"


def _other_forms() -> Iterator[str]:
    yield '#   or: Z_th_jc = { foster = [["... K/W", "... ms"], ["... K/W", "... ms"]] }'
    yield '#   or: Z_th_jc = { cauer = [["... K/W", "... mJ/K"], ["... K/W", "... mJ/K"]] }'


def _written(keys: Iterable[Key], kind: Kind, usual: str) -> Iterator[str]:
    for key in keys:
        stated = key.required or key.path in _WANTED
        line = f"{'' if stated else '# '}{key.name} = {_example(key, kind)}"
        remark = key.meaning.rstrip(".") + (f" ({key.where})" if key.where != usual else "")
        if key.default is not None:
            remark += f"; {key.default} when absent"
        if key.form == "choice" and key.name != "kind":
            remark += f"; one of: {', '.join(key.choices)}"
        yield from _beside(line, remark)


def _beside(line: str, remark: str) -> Iterator[str]:
    """A key with its remark to the right, going on below; or above the key where the key is long."""
    if len(line) >= _COLUMN:
        yield from (f"# {part}" for part in textwrap.wrap(remark, _WIDTH - 2))
        yield line
        return
    first, *rest = textwrap.wrap(remark, _WIDTH - _COLUMN - 2)
    yield f"{line:<{_COLUMN}}# {first}"
    yield from (f"#{'':<{_COLUMN - 1}}# {part}" for part in rest)


def _example(key: Key, kind: Kind) -> str:
    bare = {"flag": "true", "text": f'"{_BLANK}"', "number": "[0, 0, 0]"}
    if key.path in _SHAPES or key.form in bare:
        return _SHAPES.get(key.path) or bare[key.form]
    if key.form == "choice" or key.default is not None or key.choices:
        words = {"kind": kind, "tab": "drain" if kind in MOSFET else "collector"}
        return f'"{words.get(key.name) or key.default or key.choices[0]}"'
    unit = _SMALL.get(key.name, _UNITS[key.dimension])
    one = f'"{_BLANK} {unit}"'
    return f"[{one}, {one}, {one}]" if key.lists == 3 and key.name not in _SMALL else one
