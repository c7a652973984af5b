"""What can go wrong that is not a fault in soacheck itself.

Every exception that the program raises on purpose is a `SoacheckError`; anything else is a bug and keeps its
traceback.
"""

from __future__ import annotations

from dataclasses import dataclass


def plain(text: str, most: int = 60) -> str:
    """User text for a message: invisible signs and control characters escaped, cut to `most` characters."""
    cut = text if len(text) <= most else text[: most - 3] + "..."
    return "".join(ch if ch.isprintable() else ch.encode("unicode_escape").decode("ascii") for ch in cut)


class SoacheckError(Exception):
    """Base of all errors that soacheck raises on purpose."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """One thing wrong with an input: where it stands, as it was written, and what would be right."""

    problem: str  # what is wrong, one sentence without a full stop
    remedy: str  # a line that would be right, or what to do
    file: str = ""  # path as the user gave it; empty when the value came from the command line or the library
    line: int | None = None  # 1-based
    key: str = ""  # dotted path as in the file, `max.P_tot`
    value: str = ""  # the value as written
    column: int | None = None  # 1-based, of a syntax error
    excerpt: tuple[str, ...] = ()  # the line of a syntax error and a mark under its place

    def __str__(self) -> str:
        place = plain(self.file, 4096)
        for number in (self.line, self.column):
            place += f":{number}" if number is not None else ""
        what = plain(self.key, 200) + (f" = {plain(self.value, 200)}" if self.value else "")
        head = ": ".join(part for part in (place, what) if part)
        body = "\n".join(
            [
                f"  problem: {plain(self.problem, 2000)}",
                *(f"           {plain(line, 200)}" for line in self.excerpt),
                f"  remedy:  {plain(self.remedy, 2000)}",
            ]
        )
        return f"{head}\n{body}" if head else body


class InputError(SoacheckError):
    """The input cannot be used. Holds every problem that was found, in the order of the file."""

    def __init__(self, *problems: Problem) -> None:
        super().__init__("\n".join(str(problem) for problem in problems))
        self.problems = problems


class QuantityError(SoacheckError, ValueError):
    """A text or object is not a physical quantity of the kind that is wanted."""

    def __init__(self, problem: str, remedy: str, instead: str = "") -> None:
        super().__init__(f"{problem}; {remedy}")
        self.problem = problem
        self.remedy = remedy
        self.instead = instead  # a text that would be read, "150 W"; empty when none can be offered


class OutputError(SoacheckError):
    """A result could not be written."""
