"""Declarations: each key of a file stated once, as data; and what a file's numbers become over the cases."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import product
from typing import Literal

import numpy as np

from soacheck.errors import InputError, Problem
from soacheck.trace import FloatArray, frozen

Form = Literal["quantity", "number", "count", "text", "flag", "choice", "points", "table", "tables", "tree"]
GRADES = ("guaranteed", "typical", "measured", "assumed")
MOST_SPREADS = 10  # 2**10 corners


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """One key of a file.

    table: dotted table path as in the file: "max", "load", "load.bias", "thermal.Z_th_jc", "soa" (array of
           tables). A table exists when a key is declared under it; "" is the root of the file. An array of
           tables is declared by a key of form "tables": Key(table="", name="soa", form="tables"), its own
           keys under table "soa".
    form:  quantity (text "number unit", or inline table value/min/max/tol/source/grade), number (bare, no
           unit; same inline table allowed), count (whole number >= 1), text, flag (true/false), choice (one
           of `choices`), points (list of lists, one dimension per column; with a single column a flat list),
           table (inline or [table] with keys declared under table + "." + name), tables (array of tables),
           tree (nested inline tables and lists, read by the owner with Cells.tree_quantity).
    A `quantity` may also allow words (`choices`, e.g. "ideal", "none") or an inline table of its own keys
    (`inside=True`): heatsink = "1.6 K/W" | "ideal" | { R_th = ... }.
    `band` and `sign` hold for every single value, list element and one-column point; points of several
    columns are checked by their owner.
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
    role: str = ""  # shared by keys of one table that mean the same on other kinds: V_CEO, V_DSS, V_CES
    required: bool = False
    default: str | None = None  # text as it would be written in the file; quotes may be left off
    assumption: str = ""  # sentence listed as an assumption when the default is taken
    grade: str = "guaranteed"  # grade of a stated value that states none; "" where grades mean nothing
    meaning: str = ""  # one sentence
    where: str = ""  # where a data sheet or drawing states it
    when_unknown: str = "leave the line out: nothing is guessed in its place"  # remedy for "unknown", "?", "tbd"
    not_built: str = ""  # refuse the key by name: "not built yet: ..."

    @property
    def path(self) -> str:
        """The dotted path in the declarations, without numbers of array elements."""
        return f"{self.table}.{self.name}" if self.table else self.name

    def belongs(self, device_kind: str | None) -> bool:
        """Whether a device of this kind has the key; an unknown kind has every key."""
        return self.belongs_to is None or device_kind is None or device_kind in self.belongs_to


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

    def __post_init__(self) -> None:
        values = {key: frozen(value) for key, value in self.values.items()}
        for key, value in values.items():
            if value.shape != (self.count,):
                raise ValueError(f"{key}: {value.shape} values for {self.count} cases")
        object.__setattr__(self, "values", values)

    @classmethod
    def corners(cls, spreads: Sequence[Spread]) -> CasePlan:
        """Nominal first, then all 2**n corners; InputError for more than 2**10."""
        if len(spreads) > MOST_SPREADS:
            names = ", ".join(spread.key for spread in spreads)
            raise InputError(
                Problem(
                    problem=f"{len(spreads)} uncertainties are stated ({names}); "
                    f"every corner of {MOST_SPREADS} at most is checked",
                    remedy="state the ones that matter, and the others at their unfavourable value",
                )
            )
        ends = [(spread.low, spread.high) for spread in spreads]
        table = np.array(list(product(*ends)), dtype=np.float64) if spreads else np.empty((0, 0))
        values = {spread.key: np.concatenate(([spread.nominal], table[:, n])) for n, spread in enumerate(spreads)}
        return cls(count=1 + len(table), values=values)

    def block(self, start: int, stop: int) -> CasePlan:
        """The cases from `start` to before `stop`, as a plan of their own."""
        values = {key: value[start:stop] for key, value in self.values.items()}
        return CasePlan(count=len(range(self.count)[start:stop]), values=values)
