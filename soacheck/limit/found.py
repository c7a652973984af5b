"""From arrays over (case, member) to a finding: the worst member of each case, its point, its reasons.

A limit works out a utilisation per case and member and says in notes what else is true of it. A note can hold a
status down to "at best marginal" or "at best unproven", or make it exceed; nothing can lift one.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import TypeVar

import numpy as np

from soacheck.device.laws import regions
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Finding, Reason, Status, Where, status_of
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced

A = TypeVar("A", FloatArray, IntArray, BoolArray)

ALWAYS = np.ones((1, 1), dtype=np.bool_)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Note:
    """A sentence about some cases and members, (1 or case, 1 or member), and the best status that it leaves."""

    text: str
    holds: BoolArray
    best: Status = Status.WITHIN
    missing: tuple[Missing, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Verdict:
    """Status and utilisation per (case, member), and the worst member of each case, (case,)."""

    status: IntArray
    utilisation: FloatArray
    member: IntArray
    notes: tuple[Note, ...]

    def of(self, array: A) -> A:
        """(case,) values of the worst member; `array` broadcasts to (case, member)."""
        full = np.broadcast_to(array, self.status.shape)
        return np.take_along_axis(full, self.member[:, None], axis=1)[:, 0]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Point:
    """The point that touches the limit, each (case,)."""

    t: FloatArray
    v: FloatArray
    i: FloatArray
    region: IntArray


def ratio(applied: FloatArray, allowed: FloatArray) -> FloatArray:
    """applied/allowed; NaN where the allowance is 0 or less, or where either is unknown."""
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        return np.where(np.asarray(allowed) > 0, np.asarray(applied) / allowed, np.nan)


def verdict(
    judged: Judged, utilisation: FloatArray, notes: Iterable[Note], *, marginal_from: FloatArray | None = None
) -> Verdict:
    """Decide every case and member, and pick the worst member of each case."""
    margin = judged.rules.marginal_from.value if marginal_from is None else marginal_from
    kept = tuple(note for note in notes if bool(np.any(note.holds)))
    shape = np.broadcast_shapes((judged.cases, 1), utilisation.shape, *(note.holds.shape for note in kept))
    used = np.broadcast_to(utilisation, shape)
    status = status_of(used, margin[:, None])
    for note in kept:
        status = np.where(note.holds, np.maximum(status, int(note.best)), status)
    worst = status.max(axis=1, keepdims=True)
    # what has no number comes first; among those the member that heats the device most
    heat = np.nan_to_num(judged.operating.P_mean, nan=0.0)
    heat = np.broadcast_to(heat if heat.shape[1] == shape[1] else np.zeros((1, 1)), shape)
    last = np.where(status == worst, np.where(np.isnan(used), np.inf, used), -np.inf)
    member = np.argmax(np.where(last == last.max(axis=1, keepdims=True), heat, -np.inf), axis=1)
    return Verdict(status=status, utilisation=used, member=np.asarray(member, dtype=np.int64), notes=kept)


def nowhere(cases: int) -> Point:
    """A finding that belongs to no point of the locus."""
    nothing = np.full(cases, np.nan)
    return Point(t=nothing, v=nothing, i=nothing, region=np.full(cases, -1, dtype=np.int64))


def point_at(judged: Judged, decided: Verdict, time: IntArray) -> Point:
    """The point of the worst member at a time index, (case, member) or (case,)."""
    locus = judged.operating.locus
    if locus is None:
        return nowhere(judged.cases)
    index = time if time.ndim == 1 else decided.of(time)

    times = locus.shape[2]

    def pick(array: A) -> A:
        full = np.broadcast_to(array, (*decided.status.shape, times))
        return full[np.arange(judged.cases), decided.member, index]

    v, i = pick(locus.v), pick(locus.i)
    region = regions(judged.device, v, i) if locus.region is None else pick(locus.region)
    t = np.full(judged.cases, np.nan) if locus.use is Use.HELD else pick(locus.t)  # a held point has no time
    return Point(t=t, v=v, i=i, region=region)


def finding(
    judged: Judged,
    decided: Verdict,
    *,
    limit: str,
    basis: str,
    unit: str,
    applied: Traced | None,
    allowed: Traced | None,
    point: Point | None = None,
    trace: tuple[Traced, ...] = (),
    more: tuple[Reason, ...] = (),
) -> Finding:
    """The finding of the worst member of each case. more: reasons that are known of the worst members alone."""
    members = judged.duty.members
    point = nowhere(judged.cases) if point is None else point
    value = _member_value(judged, decided) if members.name else np.full(judged.cases, np.nan)
    reasons = []
    for note in decided.notes:
        applies = decided.of(note.holds)
        if bool(np.any(applies)):
            reasons.append(Reason(text=note.text, applies=applies, missing=note.missing))
    return Finding(
        limit=limit,
        duty=judged.duty.name,
        half=judged.duty.half,
        applied=applied,
        allowed=allowed,
        unit=unit,
        utilisation=decided.of(decided.utilisation),
        status=decided.of(decided.status),
        where=Where(t=point.t, v=point.v, i=point.i, region=point.region, member=value),
        member_name=members.name,
        basis=basis,
        reasons=(*reasons, *more),
        trace=trace,
    )


def _member_value(judged: Judged, decided: Verdict) -> FloatArray:
    value = judged.duty.members.value
    if value.shape[1] == decided.status.shape[1] or value.shape[1] == 1:
        return decided.of(value)
    return np.full(judged.cases, np.nan)


def without_locus(judged: Judged, *, limit: str, basis: str, unit: str) -> Finding:
    """What is left to say while the load kind could not work out the duty."""
    keys = ", ".join(missing.key for missing in judged.duty.unknown)
    text = f"The duty could not be worked out{': ' + keys + ' is missing' if keys else ''}."
    note = Note(text=text, holds=ALWAYS, best=Status.UNPROVEN, missing=judged.duty.unknown)
    decided = verdict(judged, np.full((judged.cases, 1), np.nan), (note,))
    return finding(judged, decided, limit=limit, basis=basis, unit=unit, applied=None, allowed=None)


def sharing(judged: Judged) -> tuple[Note, ...]:
    """Current-dependent findings are unproven while nothing says how evenly parallel devices share."""
    missing = judged.fitted.share_missing
    if missing is None:
        return ()
    text = (
        f"{judged.fitted.count} devices share the current and nothing states how evenly; the figures shown stand for "
        f"a worst device with {100 * judged.fitted.share.at(0):.3g} % of the total."
    )
    return (Note(text=text, holds=ALWAYS, best=Status.UNPROVEN, missing=(missing,)),)


def temperature_unknown(judged: Judged, T: FloatArray) -> tuple[Note, ...]:
    """The finding needs a temperature that is not known."""
    unknown = np.isnan(T)
    keys = [missing.key for missing in judged.operating.missing]
    because = f": {', '.join(keys)} {'is' if len(keys) == 1 else 'are'} not stated" if keys else ""
    return (
        Note(
            text=f"The temperatures are not known{because}.",
            holds=unknown,
            best=Status.UNPROVEN,
            missing=judged.operating.missing,
        ),
    )


def typical(*values: Traced | None, holds: BoolArray = ALWAYS) -> tuple[Note, ...]:
    """What rests on a typical value is at best marginal."""
    names = dict.fromkeys(name for value in values if value is not None for name in value.typical_below)
    return typical_named(tuple(names), holds=holds)


def typical_named(names: tuple[str, ...], *, holds: BoolArray = ALWAYS) -> tuple[Note, ...]:
    """The same, for what is not a traced value: a curve, a transient curve."""
    if not names:
        return ()
    text = f"Rests on typical data ({', '.join(names)}), which the maker does not guarantee: at best marginal."
    return (Note(text=text, holds=holds, best=Status.MARGINAL),)


def nothing_allowed(allowed: FloatArray, text: str) -> tuple[Note, ...]:
    """An allowance of 0 or less is exceeded by anything, and has no utilisation."""
    return (Note(text=text, holds=np.asarray(allowed <= 0, dtype=np.bool_), best=Status.EXCEEDS),)
