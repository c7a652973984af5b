"""What a document's readers find out as they go: problems, spreads, assumptions, cautions. Each is noted
once."""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass, field

from soacheck.errors import InputError, Problem, QuantityError
from soacheck.table.declare import Spread
from soacheck.table.positions import place_of
from soacheck.table.toml_text import Source

_PLAIN_NAME = re.compile(r"[A-Za-z0-9_-]+")
_LONGEST_VALUE = 60
MOST_PROBLEMS = 100  # a file with more is not a rating or stage file; looking for near names would take seconds


def joined(path: str, name: str) -> str:
    """The dotted path of a key; a name that is not a bare TOML key is quoted."""
    if not _PLAIN_NAME.fullmatch(name):
        name = '"' + name.replace("\\", "\\\\").replace('"', '\\"') + '"'
    return f"{path}.{name}" if path else name


def as_written(text: str) -> str:
    """A value's text in the file for a message: a string in single quotes, anything else as it stands, cut
    short."""
    if text[:1] in ("'", '"'):
        text = f"'{tomllib.loads('x = ' + text)['x']}'"
    text = " ".join(text.split()) if "\n" in text else text
    return text if len(text) <= _LONGEST_VALUE else text[: _LONGEST_VALUE - 3] + "..."


@dataclass(slots=True)
class Ledger:
    """Shared by a document and all its copies over other cases."""

    source: Source
    spreads: dict[str, Spread] = field(default_factory=dict)
    assumptions: dict[str, None] = field(default_factory=dict)  # an ordered set
    cautions: dict[tuple[str, str], None] = field(default_factory=dict)
    asked: set[str] = field(default_factory=set)  # paths, as declared, of the keys whose values a reader took
    _problems: dict[tuple[str, str], str] = field(default_factory=dict)  # (dotted key, problem) -> remedy

    @property
    def full(self) -> bool:
        """Whether so much is wrong that nothing more is looked for."""
        return len(self._problems) >= MOST_PROBLEMS

    def refuse(self, dotted: str, problem: str, remedy: str) -> None:
        """Note an input error about a key."""
        if not self.full:
            self._problems.setdefault((dotted, problem), remedy)

    def refuse_quantity(self, dotted: str, name: str, error: QuantityError) -> None:
        """Note a text that is not the quantity wanted, with the line that would be right."""
        remedy = error.remedy
        if error.instead:
            line = f'{name} = "{error.instead}"' if name else f'"{error.instead}"'
            colon = "" if remedy.endswith("?") else ":"
            remedy = line if remedy.startswith(f'write "{error.instead}"') else f"{remedy}{colon} {line}"
        self.refuse(dotted, error.problem, remedy)

    def caution(self, identity: str, text: str) -> None:
        self.cautions.setdefault((identity, text))

    def problems(self) -> tuple[Problem, ...]:
        """Everything that was refused, in the order of the file."""
        found = []
        for (dotted, problem), remedy in self._problems.items():
            place = place_of(self.source.text, dotted)
            found.append(
                Problem(
                    file=self.source.file, line=place.line if place else None, key=dotted,
                    value=as_written(place.value) if place and place.value else "",
                    problem=problem, remedy=remedy,
                )
            )  # fmt: skip
        found.sort(key=lambda item: len(self.source.text) if item.line is None else item.line)
        if self.full:
            remedy = "put these right first"
            found.append(Problem(file=self.source.file, problem="there is more, not listed here", remedy=remedy))
        return tuple(found)

    def finish(self) -> None:
        """Raise InputError when anything was refused."""
        if self._problems:
            raise InputError(*self.problems())
