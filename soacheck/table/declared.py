"""The declarations of one file, arranged for look-up; and what to say about a key that is none of them."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from soacheck.errors import plain
from soacheck.table.declare import Key
from soacheck.table.nearest import folded, likeness, nearest

_RATINGS, _CHARACTERISTICS = "max", "typical"
_NEAR = 0.6


class Declared:
    """Keys by table and name, for a device of one kind (None: of any)."""

    def __init__(self, keys: Sequence[Key], device_kind: str | None) -> None:
        self.device_kind = device_kind
        self.tables: set[str] = {""}
        self._own: dict[str, dict[str, Key]] = {"": {}}
        self._foreign: dict[tuple[str, str], Key] = {}
        for key in keys:
            parts = key.table.split(".") if key.table else []
            self.tables.update(".".join(parts[:count]) for count in range(1, len(parts) + 1))
            if key.form in ("table", "tables"):
                self.tables.add(key.path)
            if not key.belongs(device_kind):
                self._foreign[key.table, key.name] = key
                continue
            own = self._own.setdefault(key.table, {})
            if device_kind is not None and own.get(key.name, key) != key:
                raise ValueError(f"{key.path} is declared twice")
            own[key.name] = key

    def own(self, table: str) -> dict[str, Key]:
        """The keys of a table that this kind of device has."""
        return self._own.get(table, {})

    def is_foreign(self, table: str, name: str) -> bool:
        """Whether only other kinds of device have this key."""
        return (table, name) in self._foreign and name not in self.own(table)

    def _twin(self, foreign: Key) -> str:
        """What this kind of device calls the same thing, "" for nothing."""
        own = self.own(foreign.table).values()
        return next((key.name for key in own if foreign.role and key.role == foreign.role), "")

    def top_tables(self) -> set[str]:
        """Tables at the top of the file, arrays of tables and keys of the root left out."""
        return {path for path in self.tables if path and "." not in path} - self.own("").keys()

    def key(self, table: str, name: str) -> Key | None:
        """The declaration; None for a key of another kind of device. KeyError when there is none at all: a
        bug."""
        key = self.own(table).get(name)
        if key is None and (table, name) not in self._foreign:
            raise KeyError(f"{table}.{name} is not declared")
        return key

    def unknown(self, table: str, name: str, stated: Iterable[str]) -> tuple[str, str, str]:
        """Problem, remedy and the name that was offered, for a name of the file that is not declared."""
        foreign = self._foreign.get((table, name))
        if foreign is not None:
            return self._of_another_kind(foreign, set(stated))
        shown, where = plain(name), f"[{table}]" if table else "the top of the file"
        problem = f"{where} has no key {shown}" if table else f"{shown} is not a table that is known here"
        homes = sorted(other for other in self._own if other != table and self._same(name, other))
        own = list(self.own(table))
        if not table:
            own += [path for path in self.tables if path and "." not in path]
        best = max((likeness(name, key) for key in own), default=0.0)
        if best < 1.0 and homes:
            right = self._same(name, homes[0])
            if not homes[0]:
                return problem, f"{right} stands at the top of the file", ""
            misplaced = f"{shown} does not belong under {where}" if table else f"{shown} stands outside its table"
            return misplaced, f"put {right} under [{homes[0]}]", ""
        near = nearest(name, own, _NEAR)
        opposite = {_RATINGS: _CHARACTERISTICS, _CHARACTERISTICS: _RATINGS}.get(table)
        if near and opposite and max((likeness(name, k) for k in self.own(opposite)), default=0.0) > best:
            near = None  # a rating must not be offered for a characteristic, nor the reverse
        if near and near in set(stated):
            return problem, f"{near} is stated too: keep one of the two", near
        if near:
            line = f"[{near}]" if not table and near in self.tables else near
            return problem, f"was {line} meant?", near
        built = {key for key in own if key not in self.own(table) or not self.own(table)[key].not_built}
        known = ", ".join(f"[{key}]" if not table and key in self.tables else key for key in sorted(built))
        return problem, f"known here: {known}" if known else "leave it out", ""

    def _same(self, name: str, table: str) -> str:
        """The key of a table whose name differs from this one in case and punctuation at most."""
        plain_name = folded(name)
        return next((key for key in self.own(table) if plain_name and folded(key) == plain_name), "")

    def _of_another_kind(self, foreign: Key, stated: set[str]) -> tuple[str, str, str]:
        kinds = " ".join(sorted(foreign.belongs_to or ()))
        problem = f"{foreign.name} belongs to {kinds}; the device here is {self.device_kind}"
        twin = self._twin(foreign)
        if twin in stated:
            return problem, f"leave it out: {twin} stands here already", ""
        return problem, f"here it is {twin}:" if twin else "leave it out", twin
