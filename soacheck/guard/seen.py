"""What a guard sees and what it raises."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.balance.place import Place
from soacheck.limit.judged import Judged
from soacheck.result import Finding
from soacheck.table import Missing


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Seen:
    """One half of a stage, decided for one case: its device on its heat path, its duties, their findings."""

    place: Place
    judged: tuple[Judged, ...]
    findings: tuple[Finding, ...]


def duty_name(judged: Judged) -> str:
    """A duty as findings name it: with its half, where there are two."""
    return judged.duty.name + (f" ({judged.duty.half})" if judged.duty.half else "")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Raised:
    """A guard that went off.

    lowers: limits whose findings can be no better than unproven; missing says what they lack.
    """

    id: str
    text: str
    lowers: frozenset[str] = frozenset()
    missing: tuple[Missing, ...] = ()
