"""SEAM ONLY, to be implemented (room table; may become a package `table/` re-exporting these names).

Strict TOML tables: each key declared once, as data; reader, messages, `device new`, schema, `--change` and
`worst-case` all read that declaration.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal


from soacheck.trace import FloatArray, Traced

Form = Literal["quantity", "number", "count", "text", "flag", "choice", "points", "table", "tables", "tree"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """One key of a file.

    table: dotted table path as in the file: "max", "load", "load.bias", "thermal.Z_th_jc", "soa" (array of tables).
    form:  quantity (text "number unit", or inline table value/min/max/tol/source/grade), number (bare, no unit;
           same inline table allowed), count (whole number >= 1), text, flag (true/false), choice (one of `choices`),
           points (list of lists, one dimension per column), table (inline or [table] with keys declared under
           table + "." + name), tables (array of tables), tree (nested inline tables and lists, read by the owner
           with Cells.tree_quantity).
    A `quantity` may also allow words (`choices`, e.g. "ideal", "none") or an inline table of its own keys
    (`inside=True`): heatsink = "1.6 K/W" | "ideal" | { R_th = ... }.
    """

    table: str
    name: str
    form: Form = "quantity"
    dimension: str = ""  # of a quantity; "" for numbers
    columns: tuple[str, ...] = ()  # dimensions of the columns of `points` ("" = bare number)
    band: tuple[float, float] | None = None  # plausible range in SI (kelvin), both ends allowed
    sign: Literal["positive", "non-negative", "any"] = "positive"
    lists: Literal[0, 2, 3] = 0  # 2: operating range [from, to] allowed; 3: [min, typ, max] allowed
    choices: tuple[str, ...] = ()
    inside: bool = False
    belongs_to: frozenset[str] | None = None  # device kinds; None = all
    required: bool = False
    default: str | None = None  # text as it would be written in the file
    assumption: str = ""  # sentence listed as an assumption when the default is taken
    grade: str = "guaranteed"  # grade of a stated value that states none; "" where grades mean nothing
    meaning: str = ""  # one sentence
    where: str = ""  # where a data sheet or drawing states it
    not_built: str = ""  # refuse the key by name: "not built yet: ..."


@dataclass(frozen=True, slots=True, kw_only=True)
class Missing:
    """Something that a file does not state and that a decision needs."""

    key: str  # dotted path as in the file: "thermal.R_th_jc", "soa[dc]", "load.V_sat"
    where: str  # where a data sheet or drawing states it, or what to do


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """An uncertainty stated in a file (min / max / tol)."""

    key: str  # dotted path
    nominal: float
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class CasePlan:
    """Which numbers each case uses: case 0 is nominal."""

    count: int = 1
    values: Mapping[str, FloatArray] = field(default_factory=dict)  # dotted key -> (count,)

    @classmethod
    def corners(cls, spreads: Sequence[Spread]) -> CasePlan:
        """Nominal first, then all 2**n corners."""
        raise NotImplementedError

    def block(self, start: int, stop: int) -> CasePlan:
        raise NotImplementedError


class Cells:
    """The values of one table of a file, read and checked. Travels no further than a reader.

    Every accessor raises KeyError for a name that is not declared (a bug) and returns None when the key is absent
    from the file and has no default. Bad values were already reported; then accessors also return None, and
    `Document.finish()` raises InputError with all problems.
    """

    path: str  # dotted

    def has(self, name: str) -> bool:
        """Whether the file states the key."""
        raise NotImplementedError

    def quantity(self, name: str) -> Traced | None:
        """One value over the cases, shape (case,); also for form "number". Grade set from the file or the key."""
        raise NotImplementedError

    def three(self, name: str) -> tuple[Traced | None, Traced | None, Traced | None] | None:
        """(min, typ, max) of a key with lists=3; a single value is (None, value, None), an inline table gives its
        value as typ and its min and max."""
        raise NotImplementedError

    def span(self, name: str) -> tuple[Traced, Traced] | None:
        """Both ends of an operating range (lists=2); equal for a single value."""
        raise NotImplementedError

    def text(self, name: str) -> str | None:
        """A text, a choice, or the word written in place of a quantity (`choices`)."""
        raise NotImplementedError

    def flag(self, name: str) -> bool | None:
        raise NotImplementedError

    def count(self, name: str) -> int | None:
        raise NotImplementedError

    def points(self, name: str) -> FloatArray | None:
        """(n, columns) in SI."""
        raise NotImplementedError

    def inside(self, name: str) -> Cells | None:
        """The inline table of a key, or a sub-table; None when absent or not a table."""
        raise NotImplementedError

    def listed(self, name: str) -> tuple[Cells, ...]:
        """The elements of an array of tables."""
        raise NotImplementedError

    def raw(self, name: str) -> object:
        """The TOML value as it stands (tree, or a quantity's text)."""
        raise NotImplementedError

    def tree_quantity(self, path: str, value: object, dimension: str, band: tuple[float, float]) -> Traced | None:
        """A quantity inside a tree; `path` is the dotted path from the file's root: "load.load.series[1].R"."""
        raise NotImplementedError

    def refuse(self, name: str, problem: str, remedy: str) -> None:
        """Report an input error about this key (name may be a path inside it: "load.series[1]")."""
        raise NotImplementedError

    def missing(self, name: str) -> Missing:
        """What to say when this key is absent: its dotted path and where a data sheet states it."""
        raise NotImplementedError


class Document:
    """One TOML file, parsed and its keys checked against the declarations."""

    file: str
    sha256: str
    assumptions: tuple[str, ...]
    cautions: tuple[tuple[str, str], ...]
    spreads: tuple[Spread, ...]

    def table(self, path: str) -> Cells:
        """The cells of a table; empty cells when the file does not have it."""
        raise NotImplementedError

    def over(self, plan: CasePlan) -> Document:
        """The same document with other numbers."""
        raise NotImplementedError

    def finish(self) -> None:
        """Raise InputError when any problem was reported."""
        raise NotImplementedError


def read_document(path: Path, keys: Sequence[Key], *, shown_as: str, device_kind: str | None = None) -> Document:
    """Read a TOML file against the declarations."""
    raise NotImplementedError
