"""Cells: the checked values of one table of a file, as its reader takes them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from soacheck.table.declare import CasePlan, Key, Missing
from soacheck.table.declared import Declared
from soacheck.table.ledger import Ledger, joined
from soacheck.table.values import Stated, Value, Word, default_value, spread_of, value_of
from soacheck.trace import FloatArray, Traced, given


@dataclass(frozen=True, slots=True, eq=False)
class Sheet:
    """What all cells of one document share."""

    declared: Declared
    ledger: Ledger
    values: dict[str, Value]  # dotted key -> checked value; grows by the quantities of trees as they are read
    plan: CasePlan


def is_inline_quantity(key: Key, raw: object, declared: Declared) -> bool:
    """Whether a table written for a quantity is { value, min, ... } and not a table of the key's own."""
    if not isinstance(raw, dict):
        return False
    return not key.inside or ("value" in raw and "value" not in declared.own(key.path))


def traced(sheet: Sheet, dotted: str, symbol: str, stated: Stated) -> Traced:
    """A stated value over the cases of the plan."""
    value = sheet.plan.values.get(dotted)
    source = f"{sheet.ledger.source.base_name}: {dotted}"
    if stated.source:
        source += f"; {stated.source}"
    return given(symbol, stated.nominal if value is None else value, stated.unit, source, stated.grade)


@dataclass(frozen=True, slots=True, eq=False)
class Cells:
    """The values of one table of a file, read and checked. Travels no further than a reader.

    Every accessor raises KeyError for a name that is not declared (a bug) and returns None when the key is
    absent from the file and has no default, or does not exist for this kind of device. Bad values were
    already reported; then accessors also return None, and `Document.finish()` raises InputError with all
    problems.
    """

    path: str  # dotted, as in the file: "soa[2]", counted from 1
    table: str  # dotted, as declared: "soa"
    data: Mapping[str, Any]
    sheet: Sheet

    def has(self, name: str) -> bool:
        """Whether the file states the key."""
        self.sheet.declared.key(self.table, name)
        return name in self.data

    def _ask(self, name: str) -> Key | None:
        """The declaration of a key whose value a reader takes now, and a note that it did."""
        key = self.sheet.declared.key(self.table, name)
        if key is not None:
            self.sheet.ledger.asked.add(key.path)
        return key

    def _value(self, name: str) -> tuple[Key | None, Value | None]:
        """Declaration and checked value; the default's, which is then listed as an assumption."""
        key = self._ask(name)
        if key is None or name in self.data:
            return key, self.sheet.values.get(joined(self.path, name))
        if key.default is None:
            return key, None
        dotted = joined(self.path, name)
        trial = Ledger(self.sheet.ledger.source)
        value = value_of(key, dotted, default_value(key), trial)
        if value is None:
            raise ValueError(f"{key.path}: the default {key.default!r} is wrong: {trial.problems()}")
        if key.assumption:
            self.sheet.ledger.assumptions.setdefault(key.assumption)
        return key, value

    def _traced(self, key: Key, stated: Stated, value: float | None = None, part: str = "") -> Traced:
        """A value over the cases; `value` and `part` for an end of a list or of an uncertainty."""
        if key.name not in self.data:
            source = key.assumption or f"{joined(self.path, key.name)} is absent: {key.default}"
            return given(key.name, stated.nominal, stated.unit, source, "assumed" if key.grade else "")
        whole = traced(self.sheet, joined(self.path, key.name), key.name, stated)
        if value is None:
            return whole
        return given(key.name, value, whole.unit, f"{whole.source} ({part})", whole.grade)

    def quantity(self, name: str) -> Traced | None:
        """One value over the cases, shape (case,); also for form "number". Grade set from the file or the
        key. The typ of a [min, typ, max]; an operating range is read with `span`."""
        key, value = self._value(name)
        if key is None or not isinstance(value, Stated):
            return None
        if len(value.ends) == 2:
            raise ValueError(f"{key.path} may be an operating range: read it with span()")
        return self._traced(key, value)

    def three(self, name: str) -> tuple[Traced | None, Traced | None, Traced | None] | None:
        """(min, typ, max) of a key with lists=3; a single value is (None, value, None), an inline table
        gives its value as typ and its min and max. All three have the key's name as symbol. The ends of a
        list are what the data sheet vouches for: "guaranteed" where the key has grades at all."""
        key, value = self._value(name)
        if key is None or not isinstance(value, Stated):
            return None
        if len(value.ends) == 2:
            raise ValueError(f"{key.path} may be an operating range: read it with span()")
        typ = self._traced(key, value)
        if joined(self.path, name) in self.sheet.plan.values:
            return None, typ, None
        low, high = (value.ends[0], value.ends[2]) if value.ends else (value.low, value.high)
        if low is None or high is None:
            return None, typ, None
        ends = replace(value, grade="guaranteed" if value.ends and key.grade else value.grade)
        return self._traced(key, ends, low, "min"), typ, self._traced(key, ends, high, "max")

    def span(self, name: str) -> tuple[Traced, Traced] | None:
        """Both ends of an operating range (lists=2); equal for a single value. Both have the key's name as
        symbol."""
        key, value = self._value(name)
        if key is None or not isinstance(value, Stated):
            return None
        if not value.ends:
            single = self._traced(key, value)
            return single, single
        return self._traced(key, value, value.ends[0], "from"), self._traced(key, value, value.ends[-1], "to")

    def text(self, name: str) -> str | None:
        """A text, a choice, or the word written in place of a quantity (`choices`)."""
        _, value = self._value(name)
        if isinstance(value, Word):
            return value.text
        return value if isinstance(value, str) else None

    def flag(self, name: str) -> bool | None:
        """true or false."""
        _, value = self._value(name)
        return value if isinstance(value, bool) else None

    def count(self, name: str) -> int | None:
        """A whole number of at least 1."""
        _, value = self._value(name)
        return value if isinstance(value, int) and not isinstance(value, bool) else None

    def points(self, name: str) -> FloatArray | None:
        """(n, columns) in SI, temperatures in kelvin."""
        _, value = self._value(name)
        return None if value is None or isinstance(value, Stated | Word | str | int) else value

    def inside(self, name: str) -> Cells | None:
        """The inline table of a key, or a sub-table; None when absent or not a table."""
        path = f"{self.table}.{name}" if self.table else name
        declared = self.sheet.declared
        key = self._ask(name) if path not in declared.tables or name in declared.own(self.table) else None
        if key is None and path not in declared.tables:
            return None
        raw = self.data.get(name)
        if not isinstance(raw, dict) or (key is not None and key.not_built):
            return None
        if key is not None and key.form == "quantity" and is_inline_quantity(key, raw, declared):
            return None
        return Cells(joined(self.path, name), path, raw, self.sheet)

    def listed(self, name: str) -> tuple[Cells, ...]:
        """The elements of an array of tables."""
        key = self._ask(name)
        raw = self.data.get(name)
        if key is None or not isinstance(raw, list):
            return ()
        path = joined(self.path, name)
        return tuple(
            Cells(f"{path}[{number}]", key.path, element, self.sheet)
            for number, element in enumerate(raw, 1)
            if isinstance(element, dict)
        )

    def raw(self, name: str) -> object:
        """The TOML value as it stands (tree, or a quantity's text), or the default's; None when absent or
        refused."""
        key = self._ask(name)
        if key is None or key.not_built:
            return None
        if name in self.data:
            return self.data[name]
        return None if key.default is None else default_value(key)

    def tree_quantity(self, path: str, value: object, dimension: str, band: tuple[float, float]) -> Traced | None:
        """A quantity inside a tree; `path` is the dotted path from the file's root, elements counted from 1:
        "load.load.series[1].R". The symbol is the last name of the path. The band decides on the sign."""
        name = path.rpartition(".")[2].partition("[")[0]
        key = Key(table="", name=name, dimension=dimension, band=band, sign="any", grade="")
        found = self.sheet.values.get(path)
        if not isinstance(found, Stated):
            read = value_of(key, path, value, self.sheet.ledger)
            if not isinstance(read, Stated):
                return None
            found = self.sheet.values[path] = read
            spread = spread_of(path, found)
            if spread is not None:
                self.sheet.ledger.spreads[path] = spread
        return traced(self.sheet, path, name, found)

    def refuse(self, name: str, problem: str, remedy: str) -> None:
        """Report an input error about this key (name may be a path inside it: "load.series[1]"; "" is the
        table)."""
        dotted = f"{self.path}.{name}" if self.path and name else self.path or name
        self.sheet.ledger.refuse(dotted, problem, remedy)

    def missing(self, name: str) -> Missing:
        """What to say when this key is absent: its dotted path and where a data sheet states it."""
        key = self.sheet.declared.key(self.table, name)
        dotted = joined(self.path, name)
        fallback = f"state {dotted} in {self.sheet.ledger.source.base_name}"
        return Missing(key=dotted, where=(key.where if key else "") or fallback)
