"""What the pictures ask of a result: the halves, the duties of one half, the finding that governs."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from soacheck.result import DutyResult, Finding, Result, Series, Status
from soacheck.show.figures import words
from soacheck.show.words import member_unit, status_of
from soacheck.trace import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drawn:
    """A duty that has something to draw."""

    duty: DutyResult
    series: Series

    @property
    def name(self) -> str:
        return self.duty.name

    @property
    def points(self) -> int:
        return int(self.series.v.size)

    @property
    def held(self) -> bool:
        return self.series.use == "held"

    @property
    def still(self) -> bool:
        """Whether the locus is a single point, however long it is held there."""
        return stands_still(self.series.v, self.series.i)


def stands_still(v: FloatArray, i: FloatArray) -> bool:
    """Whether a locus is a single point."""
    return all(bool(np.ptp(a) <= 1e-9 * np.abs(a).max()) for a in (v, i))


def halves(result: Result) -> tuple[str | None, ...]:
    """The halves of the stage in the order of the result; (None,) where there is but one device."""
    found = dict.fromkeys(duty.half for duty in result.duties) or {None: None}
    return tuple(found)


def drawn(result: Result, half: str | None) -> tuple[Drawn, ...]:
    """The duties of one half that have a locus."""
    return tuple(
        Drawn(duty=duty, series=duty.series)
        for duty in result.duties
        if duty.half == half and duty.series is not None and np.any(np.isfinite(duty.series.v * duty.series.i))
    )


def held_lines(result: Result, half: str | None) -> tuple[Drawn, ...]:
    """Lines of one half along which every level may be held, of duties that have no row."""
    return tuple(
        Drawn(duty=duty, series=duty.series)
        for duty in result.lines
        if duty.half == half and duty.series is not None and np.any(np.isfinite(duty.series.v * duty.series.i))
    )


def findings(result: Result, limit: str, half: str | None) -> tuple[Finding, ...]:
    """Findings of one limit for one half, worst first."""
    return tuple(found for found in result.findings if found.limit == limit and found.half == half)


def of_duty(result: Result, limit: str, duty: str, half: str | None) -> Finding | None:
    """The finding of one limit for one duty."""
    return next((found for found in findings(result, limit, half) if found.duty == duty), None)


def status_word(finding: Finding) -> str:
    """The finding's status."""
    return status_of(finding).word


def hot_spot(result: Result, limit: str, half: str | None) -> Finding | None:
    """The worst finding that has a place in the picture."""
    for finding in findings(result, limit, half):
        if math.isfinite(finding.where.v[0]) and math.isfinite(finding.where.i[0]):
            return finding
    return None


def device_kind(result: Result, half: str | None) -> str:
    if half == "lower" and result.complement is not None:
        return result.complement.kind
    return result.device.kind


def place_words(finding: Finding) -> str:
    """ "21 V, 0.9 A, worst-level"."""
    v, i = float(finding.where.v[0]), float(finding.where.i[0])
    return f"{words.amount(v, 'V')}, {words.amount(i, 'A')}, {duty_words(finding)}"


def duty_words(finding: Finding) -> str:
    """The duty, with the level or other member that the limit took from it: "any-level (level 38 V)"."""
    member = float(finding.where.member[0])
    if not finding.member_name or not math.isfinite(member) or member == finding.where.v[0]:
        return finding.duty
    return f"{finding.duty} ({finding.member_name} {words.amount(member, member_unit(finding.member_name))})"


def why(finding: Finding) -> str:
    """The reasons of a finding, or what it lacks, in words for the notes."""
    reasons = [reason.text for reason in finding.reasons if reason.applies[0]]
    return " ".join(reasons) or "missing: " + (", ".join(finding.missing(0)) or "see the findings")


def unproven_notes(result: Result, limit: str, half: str | None) -> tuple[str, ...]:
    """One sentence for each duty for which a limit is unproven."""
    return tuple(
        f"{limit}, {finding.duty}: unproven; {why(finding).rstrip('.')}."
        for finding in findings(result, limit, half)
        if int(finding.status[0]) == Status.UNPROVEN
    )
