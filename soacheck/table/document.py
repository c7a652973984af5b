"""A TOML file checked against its declarations, whole: all its errors come in one report."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from soacheck.table.cells import Cells, Sheet, traced
from soacheck.table.checking import check_table
from soacheck.table.declare import CasePlan, Key, Spread
from soacheck.table.declared import Declared
from soacheck.table.ledger import Ledger, joined
from soacheck.table.positions import parts_of
from soacheck.table.toml_text import Source, read_source
from soacheck.table.values import Stated
from soacheck.trace import Traced, given


@dataclass(frozen=True, slots=True, eq=False)
class Document:
    """One TOML file, parsed and its keys checked against the declarations."""

    source: Source
    sheet: Sheet

    @property
    def file(self) -> str:
        """The path as the user gave it."""
        return self.source.file

    @property
    def sha256(self) -> str:
        """Of the bytes of the file."""
        return self.source.sha256

    @property
    def assumptions(self) -> tuple[str, ...]:
        """What was taken because the file is silent, in the order it was first asked for."""
        return tuple(self.sheet.ledger.assumptions)

    @property
    def cautions(self) -> tuple[tuple[str, str], ...]:
        """(id, text): units that were read through pint, characteristics of another kind of device."""
        return tuple(self.sheet.ledger.cautions)

    @property
    def spreads(self) -> tuple[Spread, ...]:
        """Every min / max / tol of the file; those inside trees once their owner has read them."""
        return tuple(self.sheet.ledger.spreads.values())

    def table(self, path: str) -> Cells:
        """The cells of a table; empty cells when the file does not have it. "" is the root."""
        if path not in self.sheet.declared.tables:
            raise KeyError(f"[{path}] is not declared")
        data: Any = self.source.data
        for part in path.split(".") if path else ():
            data = data.get(part) if isinstance(data, dict) else None
        return Cells(path, path, data if isinstance(data, dict) else {}, self.sheet)

    def listed(self, name: str) -> tuple[Cells, ...]:
        """The elements of a top-level array of tables."""
        return self.table("").listed(name)

    def over(self, plan: CasePlan) -> Document:
        """The same document with other numbers; problems, spreads and assumptions go to the same ledger."""
        sheet = self.sheet
        return Document(self.source, Sheet(sheet.declared, sheet.ledger, sheet.values, plan))

    def finish(self) -> None:
        """Raise InputError when any problem was reported."""
        self.sheet.ledger.finish()

    def keys_stated(self) -> tuple[str, ...]:
        """The dotted path of every value in the file, in its order; elements of lists and arrays count from
        1."""
        return tuple(_leaves("", self.source.data, self.sheet))

    def stated(self) -> tuple[Traced, ...]:
        """Every stated quantity and number in the order of the file; the ends of lists one after the
        other."""
        found: list[Traced] = []
        for path in self.keys_stated():
            value = self.sheet.values.get(path)
            if not isinstance(value, Stated):
                continue
            names = [part for part in parts_of(path) if isinstance(part, str)]
            whole = traced(self.sheet, path, names[-1], value)
            if not value.ends:
                found.append(whole)
            for end, part in zip(value.ends, _END_NAMES[len(value.ends)], strict=True):
                found.append(given(whole.symbol, end, whole.unit, f"{whole.source} ({part})", whole.grade))
        return tuple(found)


_END_NAMES: dict[int, tuple[str, ...]] = {0: (), 2: ("from", "to"), 3: ("min", "typ", "max")}


def _leaves(path: str, raw: object, sheet: Sheet) -> Iterator[str]:
    if path in sheet.values or not isinstance(raw, dict | list):
        yield path
    elif isinstance(raw, dict):
        for name, inner in raw.items():
            yield from _leaves(joined(path, name), inner, sheet)
    else:
        for number, inner in enumerate(raw, 1):
            yield from _leaves(f"{path}[{number}]", inner, sheet)


def read_document(path: Path, keys: Sequence[Key], *, shown_as: str, device_kind: str | None = None) -> Document:
    """Read a TOML file against the declarations. Raises InputError at once only when it cannot be parsed;
    what is wrong with its keys and values waits for `Document.finish()`, so that the readers can add
    theirs."""
    return check_source(read_source(path, shown_as=shown_as), keys, device_kind=device_kind)


def check_source(source: Source, keys: Sequence[Key], *, device_kind: str | None = None) -> Document:
    """A parsed file against the declarations: for a reader that must peek at a kind before it knows the
    keys."""
    sheet = Sheet(Declared(keys, device_kind), Ledger(source), {}, CasePlan())
    check_table(sheet, "", "", source.data)
    return Document(source, sheet)
