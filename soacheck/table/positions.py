"""Where each key stands in a TOML text that the parser has already accepted. Built only when needed."""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from dataclasses import dataclass
from functools import lru_cache

Path = tuple[str | int, ...]

_STRING = re.compile(
    r'"""(?:[^\\]|\\.)*?"""(?:"{0,2})|\'\'\'.*?\'\'\'(?:\'{0,2})|"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'', re.DOTALL
)
_KEY = re.compile(r'[ \t]*("(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'|[A-Za-z0-9_-]+)[ \t]*')
_SKIP = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_ATOM = re.compile(r"[^,\]}#\n]*")


@dataclass(frozen=True, slots=True)
class Place:
    """1-based line of a key and the text of its value ("" for a table header)."""

    line: int
    value: str


class _Index:
    """One pass over the text. Array elements have integer parts in their path, counted from 0."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.starts = [0, *(match.end() for match in re.finditer("\n", text))]
        self.places: dict[Path, Place] = {}
        self._counts: dict[Path, int] = {}

    def line(self, at: int) -> int:
        return bisect_right(self.starts, at)

    def note(self, path: Path, at: int, value: str = "", *, again: bool = False) -> None:
        if again or path not in self.places:
            self.places[path] = Place(self.line(at), value)

    def skip(self, at: int) -> int:
        match = _SKIP.match(self.text, at)
        return match.end() if match else at

    def key(self, at: int) -> tuple[Path, int, int]:
        """The parts of a dotted key, where it begins, where it ends."""
        parts: list[str] = []
        begin = -1
        while True:
            match = _KEY.match(self.text, at)
            if match is None:
                raise ValueError(f"no key at {at}")
            begin = match.start(1) if begin < 0 else begin
            quoted = match[1][0] in "\"'"
            parts.append(next(iter(tomllib.loads(match[1] + " = 0"))) if quoted else match[1])
            at = match.end()
            if self.text[at] != ".":
                return tuple(parts), begin, at
            at += 1

    def value(self, at: int, path: Path) -> int:
        """Index what stands inside the value; returns its end."""
        first = self.text[at]
        if first in "\"'":
            match = _STRING.match(self.text, at)
            return match.end() if match else len(self.text)
        if first not in "[{":
            match = _ATOM.match(self.text, at)
            return match.end() if match else len(self.text)
        at, number = at + 1, 0
        while True:
            at = self.skip(at)
            if self.text[at] in "]}":
                return at + 1
            if self.text[at] == ",":
                at += 1
            elif first == "{":
                at = self.pair(at, path)
            else:
                end = self.value(at, (*path, number))
                self.note((*path, number), at, self.text[at:end].strip(), again=True)
                at, number = end, number + 1

    def pair(self, at: int, base: Path) -> int:
        parts, begin, at = self.key(at)
        at = self.skip(at + 1)
        full = base + parts
        for count in range(1, len(parts)):
            self.note(base + parts[:count], begin)
        end = self.value(at, full)
        self.note(full, begin, self.text[at:end].strip(), again=True)
        return end

    def latest(self, parts: Path) -> Path:
        """The path with the number of the latest element of each array of tables put in."""
        path: Path = ()
        for part in parts:
            path = (*path, part)
            if path in self._counts:
                path = (*path, self._counts[path] - 1)
        return path

    def run(self) -> dict[Path, Place]:
        at = 0
        base: Path = ()
        while True:
            at = self.skip(at)
            if at >= len(self.text):
                return self.places
            if self.text[at] != "[":
                at = self.pair(at, base)
                continue
            array = self.text.startswith("[[", at)
            parts, begin, at = self.key(at + 1 + array)
            at += 1 + array
            if array:
                path = (*self.latest(parts[:-1]), parts[-1])
                self._counts[path] = self._counts.get(path, 0) + 1
                base = (*path, self._counts[path] - 1)
            else:
                base = self.latest(parts)
            for count in range(1, len(base) + 1):
                self.note(base[:count], begin)


@lru_cache(maxsize=4)
def places(text: str) -> dict[Path, Place]:
    """Every path of the text with its line and the text of its value."""
    return _Index(text.replace("\r\n", "\n") + "\n").run()


_PART = re.compile(r'"((?:[^"\\]|\\.)*)"|([^.\[\]"]+)|\[(\d+)\]|\.', re.DOTALL)


def parts_of(dotted: str) -> Path:
    """ "soa[2].points[1]" to ("soa", 1, "points", 0): elements count from 1 in words, from 0 in the index."""
    parts: list[str | int] = []
    for match in _PART.finditer(dotted):
        if match[1] is not None:
            parts.append(re.sub(r"\\(.)", r"\1", match[1], flags=re.DOTALL))
        elif match[2] is not None:
            parts.append(match[2])
        elif match[3] is not None:
            parts.append(int(match[3]) - 1)
    return tuple(parts)


def place_of(text: str, dotted: str) -> Place | None:
    """The place of a dotted key; of the nearest thing around it when the key itself is absent, then without
    value."""
    index = places(text)
    parts = parts_of(dotted)
    if parts in index:
        return index[parts]
    for count in range(len(parts) - 1, 0, -1):
        if parts[:count] in index:
            return Place(index[parts[:count]].line, "")
    return None
