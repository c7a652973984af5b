"""The sentences that terminal and sheet share: the verdict, where a limit is touched, the last line."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from pathlib import PurePath

from soacheck.device.laws import region_word
from soacheck.result import DeviceFacts, Finding, Result, Status
from soacheck.show.text import GLUE, pair, percent, quantity

REMINDER = (
    "Arithmetic on the values supplied; it replaces no test. The maker's ratings, the local "
    "electrical-safety rules and a competent, licensed person decide."
)
FROM_AMBIENT = "Share of a temperature: (applied - T_ambient) / (allowed - T_ambient)."
NOMINAL_ONLY = "nominal values only"
_MEMBER_UNITS = {"V": "V", "I": "A", "T": "degC", "R": "ohm", "f": "Hz", "t": "s", "P": "W"}


def status_of(finding: Finding) -> Status:
    return Status(int(finding.status[0]))


def duty_words(name: str, half: str | None) -> str:
    return name if half is None else f"{name} ({half})"


def kind_of(result: Result, finding: Finding) -> str:
    """The kind of the device that a finding is about."""
    if finding.half == "lower" and result.complement is not None:
        return result.complement.kind
    return result.device.kind


def region_of(finding: Finding, kind: str) -> str | None:
    """The region of the point that touches the limit, in the words of the device's kind."""
    code = int(finding.where.region[0])
    return None if code < 0 else region_word(code, kind)


def where_words(result: Result, finding: Finding) -> str:
    """The point that touches the limit: "at 42.1 V, 1.2 A, level 12.3 V, active"; empty without one."""
    where = finding.where
    v, i, t, member = (float(values[0]) for values in (where.v, where.i, where.t, where.member))
    words = [quantity(value, unit) for value, unit in ((v, "V"), (i, "A")) if math.isfinite(value)]
    if finding.member_name and math.isfinite(member) and member != v:
        words.append(f"{finding.member_name} {quantity(member, member_unit(finding.member_name))}")
    if math.isfinite(t):
        words.append(f"t{GLUE}={GLUE}{quantity(t, 's')}")
    region = region_of(finding, kind_of(result, finding))
    if words and region is not None:
        words.append(region)
    return "at " + ", ".join(words) if words else ""


def member_unit(name: str) -> str:
    """The unit that goes with a member's letter symbol; a level is a peak voltage."""
    return "V" if name == "level" else _MEMBER_UNITS.get(name.partition("_")[0], "1")


def amounts(finding: Finding) -> str:
    """Applied of allowed, with the unit."""
    applied = math.nan if finding.applied is None else finding.applied.at(0)
    allowed = math.nan if finding.allowed is None else finding.allowed.at(0)
    return pair(applied, allowed, finding.unit)


def verdict_sentence(result: Result) -> str:
    """All of the verdict line after its word: what governs, by how much, where, and what it rests on."""
    basis = "worst corner of the stated spreads" if result.spread else NOMINAL_ONLY
    if not result.findings:
        return f"no limit could be checked ({basis})"
    finding = result.findings[0]
    subject = f"{finding.limit} in {duty_words(finding.duty, finding.half)}"
    where = where_words(result, finding)
    tail = (f", {where}" if where else "") + f" ({basis})"
    used = float(finding.utilisation[0])
    status = status_of(finding)
    if status is Status.EXCEEDS:
        none = finding.allowed is not None and finding.allowed.at(0) <= 0
        without = "nothing is allowed" if none else "by an amount that has no number"
        size = f"{percent(used)} of the allowance" if math.isfinite(used) else without
        return f"{subject}, {size}, {amounts(finding)}{tail}"
    if status is Status.UNPROVEN:
        missing = finding.missing(0)
        lack = f"; missing: {', '.join(missing)}" if missing else ""
        return f"{subject} cannot be decided{lack}{tail}"
    return f"closest is {subject}, {percent(used)} of the allowance, {amounts(finding)}{tail}"


def counts(findings: Sequence[Finding]) -> str:
    """How many findings stand how: "12 findings: 1 exceeds, 2 unproven, 9 within"."""
    number = Counter(status_of(finding) for finding in findings)
    parts = ", ".join(f"{number[status]} {status.word}" for status in sorted(number, reverse=True))
    return f"{len(findings)} finding{'' if len(findings) == 1 else 's'}" + (f": {parts}" if parts else "")


def device_words(facts: DeviceFacts) -> str:
    """The device on one line: name, file, where the ratings are from."""
    source = f"ratings: {facts.ratings_from or 'their source is not stated'}"
    file = f" ({PurePath(facts.file).name})" if facts.file else ""
    return f"{facts.name}{file}, {source}"


def stage_words(result: Result) -> str:
    """The stage on one line: title, file, revision."""
    stage = result.stage
    names = [name for name in (stage.title, PurePath(stage.file).name) if name]
    details = [*names[1:], *([f"revision {stage.revision}"] if stage.revision else [])]
    details += [f"{name} {text}" for name, text in stage.papers]
    return (names[0] if names else "without a title") + (f" ({', '.join(details)})" if details else "")
