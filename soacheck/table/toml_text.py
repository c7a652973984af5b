"""A TOML file read through a guard: it answers at once, whatever the path points at and whatever stands in
it."""

from __future__ import annotations

import hashlib
import os
import re
import stat
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from soacheck.errors import InputError, Problem, plain

MOST_BYTES = 1_000_000  # a rating file has some thirty thousand
MOST_LINES = 10_000
MOST_PARTS = 16  # of a dotted key: the parser's time grows with their square
MOST_DEPTH = 16  # nested tables and lists

_PLACE = re.compile(r" \(at line (\d+), column (\d+)\)$")
_STRINGS = re.compile(r'"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'')
_LONG_KEY = re.compile(rf"(?<![\w-])(?:[\w-]+[ \t]*\.[ \t]*){{{MOST_PARTS}}}")
_NUMBER_WITH_UNIT = re.compile(r"=[ \t]*([+-]?\.?[0-9][0-9.eE+_-]*[ \t]*[^\s#,\]}\"'][^#\"'\n]*)")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Source:
    """A file as text and as parsed data. `file` is the path as the user gave it."""

    file: str
    text: str
    sha256: str
    data: Mapping[str, Any]

    @property
    def base_name(self) -> str:
        return Path(self.file).name

    def peek(self, table: str, name: str) -> object:
        """The raw value of a key, None when it or its table is absent: to learn a kind before the keys are
        known."""
        part: Any = self.data
        for step in [*filter(None, table.split(".")), name]:
            part = part.get(step) if isinstance(part, dict) else None
        return part


def read_source(path: Path, *, shown_as: str) -> Source:
    """Read and parse a TOML file. InputError with line and column for whatever is wrong with it as TOML."""
    content = _content(path, shown_as)
    return parse_source(_decoded(content, shown_as), shown_as=shown_as, sha256=hashlib.sha256(content).hexdigest())


def parse_source(text: str, *, shown_as: str, sha256: str = "") -> Source:
    """Parse TOML text that is already in memory."""
    if not sha256:
        sha256 = hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()
    if not text.strip():
        remedy = "`soacheck device new` starts a rating file, `soacheck demo` writes stages to start from"
        raise InputError(Problem(file=shown_as, problem="the file is empty", remedy=remedy))
    _guard(text, shown_as)
    try:
        data = tomllib.loads(text)
    except RecursionError as error:
        raise _too_deep(shown_as) from error
    except ValueError as error:  # TOMLDecodeError is one, and so is a number of more than 4300 digits
        raise InputError(_syntax(error, text, shown_as)) from error
    if not _shallow(data):
        raise _too_deep(shown_as)
    return Source(file=shown_as, text=text, sha256=sha256, data=data)


def _content(path: Path, shown_as: str) -> bytes:
    def refused(problem: str, remedy: str = "check the path") -> InputError:
        return InputError(Problem(file=shown_as, problem=problem, remedy=remedy))

    try:
        descriptor = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
    except FileNotFoundError as error:
        raise refused("there is no such file") from error
    except (OSError, ValueError) as error:  # ValueError: a NUL in the path
        reason = getattr(error, "strerror", None) or str(error)
        raise refused(f"the file cannot be read: {reason}") from error
    try:
        mode = os.fstat(descriptor).st_mode
        if stat.S_ISDIR(mode):
            raise refused("this is a folder, not a file", "name the file itself")
        if not stat.S_ISREG(mode):
            raise refused("this is not a regular file", "name a file on disk")
        with os.fdopen(descriptor, "rb", closefd=False) as file:
            content = file.read(MOST_BYTES + 1)
    except OSError as error:
        raise refused(f"the file cannot be read: {error.strerror}") from error
    finally:
        os.close(descriptor)
    if len(content) > MOST_BYTES:
        raise refused(f"the file is larger than {MOST_BYTES // 1_000_000} MB", "a rating or stage file has a few kB")
    return content


def _decoded(content: bytes, shown_as: str) -> str:
    try:
        return content.decode("utf-8-sig").replace("\r\n", "\n")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        problem = "the file is not UTF-8"
        if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
            problem, line = "the file is UTF-16", 1
        raise InputError(
            Problem(file=shown_as, line=line, problem=problem, remedy="save it as UTF-8 in the editor")
        ) from error


def _guard(text: str, shown_as: str) -> None:
    """Refuse what would keep the parser busy for seconds."""
    if text.count("\n") > MOST_LINES:
        raise InputError(
            Problem(
                file=shown_as,
                problem=f"more than {MOST_LINES} lines",
                remedy="a rating or stage file is shorter",
            )
        )
    for number, line in enumerate(text.split("\n"), 1):
        if line.count(".") >= MOST_PARTS and _LONG_KEY.search(_STRINGS.sub("q", line)):
            raise InputError(
                Problem(
                    file=shown_as, line=number, problem=f"a dotted key of more than {MOST_PARTS} parts",
                    remedy="keys are at most three deep: load.bias.R_1",
                )
            )  # fmt: skip
    lone = re.search("\r(?!\n)", text)
    if lone is not None:
        at = text.count("\n", 0, lone.start()) + 1
        raise InputError(
            Problem(
                file=shown_as, line=at, problem="lines end in a lone carriage return",
                remedy="save the file with line feeds, as editors do",
            )
        )  # fmt: skip


def _too_deep(shown_as: str) -> InputError:
    return InputError(
        Problem(
            file=shown_as,
            problem="tables or lists are nested too deeply",
            remedy=f"{MOST_DEPTH} deep at most",
        )
    )


def _shallow(data: dict[str, Any]) -> bool:
    level: list[Any] = [data]
    for _ in range(MOST_DEPTH + 1):
        inner: list[Any] = []
        for item in level:
            children = item.values() if isinstance(item, dict) else item
            inner.extend(child for child in children if isinstance(child, dict | list))
        if not inner:
            return True
        level = inner
    return False


def _syntax(error: ValueError, text: str, shown_as: str) -> Problem:
    """One syntax error with its place, the line itself with a mark under the place, and what to write."""
    message = str(error)
    match = _PLACE.search(message)
    line = getattr(error, "lineno", None) or (int(match[1]) if match else None)
    column = getattr(error, "colno", None) or (int(match[2]) if match else None)
    message = re.sub(r" \(at .*\)$", "", getattr(error, "msg", None) or message)
    lines = text.split("\n")
    if line is None:
        if "integer string conversion" in message:
            return Problem(file=shown_as, problem="a number with thousands of digits", remedy="write it as 1e3")
        line = len(text.rstrip().split("\n"))
        message += "" if message.startswith("Cannot") else ", and the file ends"
    here = lines[line - 1][:500] if line <= len(lines) else ""
    excerpt: tuple[str, ...] = ()
    if column is not None and here.isprintable() and len(here) <= 200:
        excerpt = (here, " " * (min(column, len(here) + 1) - 1) + "^")
    return Problem(
        file=shown_as,
        line=line,
        column=column,
        problem=f"not valid TOML: {plain(message, 120)}",
        remedy=_syntax_remedy(message, here),
        excerpt=excerpt,
    )


# What a line looks like, and what to write instead. The first that fits is offered; texts are blanked out
# before.
_SLIPS: tuple[tuple[re.Pattern[str], str], ...] = (
    (
        re.compile(r"=[ \t]*(?:True|TRUE|False|FALSE|[Yy]es|[Nn]o|on|off)\b"),
        "write true or false, in lower case",
    ),
    (re.compile(r"=[ \t]*[+-]?\.[0-9]"), "write a digit before the decimal point: 0.5"),
    (re.compile(r"^[ \t]*[\w.-]+[ \t]*:"), "a key and its value are joined by =, not by a colon"),
)
_MESSAGES: tuple[tuple[re.Pattern[str], str], ...] = (
    (re.compile("Illegal character"), "remove the control character"),
    (re.compile("after a key"), "keys are letters, digits, _ and -, then = and the value"),
    (re.compile("escape|[Hh]ex value"), "write text with backslashes in single quotes: 'C:\\sheets'"),
    (re.compile("end|[Cc]losed|Unterminated"), "close every quote and every bracket"),
)
_TWICE = re.compile("Cannot (?:overwrite|declare|mutate|redefine)|Duplicate")


def _syntax_remedy(message: str, here: str) -> str:
    if any(quote in here for quote in "\u201c\u201d\u201e\u2018\u2019\u00ab\u00bb"):
        return 'use plain quotes: "'
    if any(ch.isspace() and ch not in " \t" for ch in here):
        return "a blank of another kind (no-break space) stands in the line: type a plain one"
    return _of_the_value(message, here) or next(
        (remedy for pattern, remedy in _MESSAGES if pattern.search(message)),
        'a line is `name = "value"`, a [table] or a # comment',
    )


def _of_the_value(message: str, here: str) -> str:
    """The remedy that the line itself suggests, "" for none."""
    bare = _STRINGS.sub('""', here)
    key, equals, rest = (part.strip() for part in here.partition("="))
    if _TWICE.match(message):
        name = plain(key if equals else here.strip())
        return f"{name} stands twice in the file: state each key and each table once"
    if match := re.search(r"=[ \t]*([+-]?[0-9]+),([0-9]+)", bare):
        number = f"{match[1]}.{match[2]}"
        return f"use a decimal point, and quotes when there is a unit: {plain(key)} = {number}"
    if match := _NUMBER_WITH_UNIT.search(here):
        return f'values with units need quotes: {plain(key)} = "{plain(match[1].strip())}"'
    slip = next((remedy for pattern, remedy in _SLIPS if pattern.search(bare)), "")
    if not slip and re.search(r"=[ \t]*[A-Za-z]", bare):
        return f'text needs quotes: {plain(key)} = "{plain(rest)}"'
    return slip
