"""current: what flows for long against the continuous rating.

Rule: the rms current over the period, or the level held without a break for longer than the width the peak rating is
stated for (I_CM_pulse), whichever is larger, <= k_I * I_C. Without a peak rating every level counts. A MOSFET's I_D
falls with the case temperature as sqrt((T_j_max - T_case)/(T_j_max - T_ref)) and never rises above the rating. Body
diode conduction counts against I_S in the same way. One shot has no period: over no window of it may the integral of
i^2 be more than the continuous rating passes and one peak pulse comes to on top (see `pulses`); a train of pulses above
the continuous rating that would exceed it if it came again at once is unproven.
Source: limiting values of IEC 60747-7 and 60747-8; the windows of one shot are our own rule; square-root law from
"Understanding power MOSFET data sheet parameters", application note AN11158 rev. 4 (2014).
Range: steady and one-shot duties; a MOSFET needs its case temperature.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.limit.body_diode import body_diode, without_backwards
from soacheck.limit.duration import HAIR, bisect, exact_where_it_matters, longest_run
from soacheck.limit.found import (
    Note,
    Verdict,
    finding,
    nothing_allowed,
    point_at,
    ratio,
    sharing,
    temperature_unknown,
    typical,
    verdict,
    without_locus,
)
from soacheck.limit.judged import Judged
from soacheck.limit.pulses import is_train, pulses, squared
from soacheck.locus import Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, derived, found

NAME = "current"
PULSES = (
    "allowance times the root of the integral of i^2 over (allowance^2 * L + (peak allowance^2 - allowance^2) * pulse "
    "of the peak rating), the greatest over all windows of length L"
)


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding: forward conduction, or the body diode where that uses more of its own rating."""
    rating = judged.device.max.I_max
    basis = f"rms, or the level held longer than the peak rating's pulse, <= k_I * {rating.symbol}"
    if judged.device.mosfet:
        basis += " * sqrt((T_j_max - T_case)/(T_j_max - T_ref)), at most 1"
    locus = judged.operating.locus
    if locus is None:
        return (without_locus(judged, limit=NAME, basis=basis, unit="A"),)
    i = np.broadcast_to(locus.i, (judged.cases, *locus.shape[1:]))
    diode = lasting_current(judged, np.maximum(-i, 0.0), locus.use) if not judged.device.bipolar else None
    return (_found(judged, i, diode, basis),)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Lasting:
    """What flows for long [A], and the sample nearest to it, (case, member): the larger of level and rms.

    level: held longer than the peak rating's pulse. rms: over the period; of one shot what `pulses` says, or 0.
    """

    value: FloatArray
    at: IntArray
    level: FloatArray
    rms: FloatArray

    def where(self, this: BoolArray, other: Lasting) -> Lasting:
        """The other one where `this` does not hold."""
        pick = {name: np.where(this, getattr(self, name), getattr(other, name)) for name in ("value", "level", "rms")}
        return Lasting(at=np.where(this, self.at, other.at), **pick)


def lasting_current(judged: Judged, i: FloatArray, use: Use, shot: FloatArray | None = None) -> Lasting:
    """The larger of the rms current and the level held longer than the peak rating's pulse.

    i: (case, member, time), not negative. use: how the locus is read. shot: what counts for rms in one shot.
    """
    locus = judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no current")
    cases, members = i.shape[:2]
    peak = i.max(axis=2)
    if use is Use.HELD:
        zero = np.zeros((cases, members), dtype=np.int64)
        return Lasting(value=peak, at=zero, level=peak, rms=peak)
    t, ratings = locus.t, judged.device.max
    if use is Use.REPEATED:
        dt = np.diff(t, axis=2)
        with np.errstate(divide="ignore", invalid="ignore"):
            rms = np.sqrt(np.sum(squared(dt, i[..., :-1], i[..., 1:]), axis=2) / np.sum(dt, axis=2))
    else:
        rms = np.zeros_like(peak) if shot is None else shot
    if ratings.I_peak is None:
        level = peak
    elif ratings.I_peak_pulse is None:
        level = np.zeros_like(peak)  # peak-current says what is missing
    else:
        width = ratings.I_peak_pulse.value[:, None] * (1 + HAIR)
        floor = rms if use is Use.REPEATED else np.zeros_like(rms)

        def exact(pick: IntArray) -> FloatArray:
            some = np.take_along_axis(i, pick[..., None], axis=1)
            when = t if t.shape[1] == 1 else np.take_along_axis(np.broadcast_to(t, i.shape), pick[..., None], axis=1)

            def fails(level: FloatArray) -> BoolArray:
                return longest_run(when, some, level, use).duration > width

            low = np.take_along_axis(floor, pick, axis=1)
            return bisect(fails, low, np.take_along_axis(peak, pick, axis=1))

        level, _ = exact_where_it_matters(floor, peak, exact, below=np.inf)
    value = np.maximum(rms, level)
    at = np.argmin(np.abs(i - value[..., None]), axis=2)
    return Lasting(value=value, at=at, level=level, rms=rms)


def continuous_rating(judged: Judged) -> tuple[Traced, FloatArray]:
    """The factor (1 or case,) as traced and the allowed current (case, 1 or member) at the case temperature."""
    ratings, k = judged.device.max, judged.rules.current.named("k_I")
    plain = derived("I_allowed", f"k_I * {ratings.I_max.symbol}", "A", k, ratings.I_max)
    if not judged.device.mosfet:
        return plain, plain.value[:, None]
    T_j, T_ref, T = ratings.T_j.value[:, None], ratings.T_case.value[:, None], judged.operating.T_case
    share = np.sqrt(np.clip((T_j - T) / (T_j - T_ref), 0.0, 1.0))
    return plain, plain.value[:, None] * share


def _forward(judged: Judged, i: FloatArray, allowed: FloatArray) -> tuple[Lasting, tuple[Note, ...]]:
    """Forward conduction; one shot counts by its pulses, and a train that could not come again at once is unproven."""
    ratings, locus = judged.device.max, judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no current")
    peak, width = ratings.I_peak, ratings.I_peak_pulse
    if locus.use is not Use.ONCE or peak is None or width is None:
        return lasting_current(judged, i, locus.use), ()
    allowed = np.broadcast_to(allowed, i.shape[:2])
    most = np.maximum(judged.rules.current.value * peak.value, 0.0)[:, None]
    shot = pulses(locus.t, i, allowed, most, width.value[:, None])
    again = lasting_current(judged, i, Use.REPEATED).value > allowed
    text = (
        f"A train of pulses above {ratings.I_max.symbol} that would exceed it if it came again at once; what "
        f"{peak.symbol} allows of several pulses is not stated."
    )
    pause = Missing(key="load.points", where="the pause after the last pulse, to where the train can come again")
    open_ = again & ~(shot > allowed) & is_train(i, allowed)
    note = Note(text=text, holds=open_, best=Status.UNPROVEN, missing=(pause,))
    return lasting_current(judged, i, Use.ONCE, shot), (note,)


def _found(judged: Judged, i: FloatArray, diode: Lasting | None, basis: str) -> Finding:
    ratings = judged.device.max
    plain, allowed = continuous_rating(judged)
    lasting, train = _forward(judged, np.maximum(i, 0.0), np.where(np.isnan(allowed), plain.value[:, None], allowed))
    use = without_backwards(judged, i, ratio(lasting.value, allowed))
    notes: list[Note] = [*sharing(judged), *train]
    if judged.device.mosfet:
        notes += temperature_unknown(judged, judged.operating.T_case)
        notes += nothing_allowed(allowed, "The case is at the junction's limit or above it: no current is allowed.")
        cold = np.isnan(allowed) & (lasting.value > plain.value[:, None])
        text = "The current is above the rating at any case temperature."
        notes.append(Note(text=text, holds=cold, best=Status.EXCEEDS))
    notes += _pulse_missing(judged)
    third = body_diode(judged, diode.value, use, allowed) if diode is not None else None
    if diode is not None and third is not None:
        use, notes = third.use, [*notes, *third.notes]
        lasting = diode.where(third.governs, lasting)
        basis += "; body diode: the same against k_I * I_S"
    notes += typical(plain, ratings.T_j if judged.device.mosfet else None)
    locus = judged.operating.locus
    if locus is not None and locus.use is not Use.HELD:  # how long the current may be above the rating decides
        above = i.max(axis=2) > allowed
        notes += typical(ratings.I_peak_pulse, ratings.I_peak if locus.use is Use.ONCE else None, holds=above)
    decided = verdict(judged, use, notes)
    limit = plain if not judged.device.mosfet else _derated(judged, decided, plain)
    if third is not None:
        limit = third.limit(judged, decided, limit)
    return finding(
        judged,
        decided,
        limit=NAME,
        basis=basis,
        unit="A",
        allowed=limit,
        point=point_at(judged, decided, lasting.at),
        applied=_applied(judged, decided, lasting),
    )


def _derated(judged: Judged, decided: Verdict, plain: Traced) -> Traced:
    T = found("T_case", decided.of(judged.operating.T_case), "degC", "heat path of the duty")
    ratings = judged.device.max
    k, rating = plain.inputs
    return derived(
        "I_allowed",
        f"k_I * {rating.symbol} * sqrt(max(0, min(1, (T_j_max - T_case) / (T_j_max - T_ref))))",
        "A",
        k,
        rating,
        ratings.T_j.named("T_j_max"),
        T,
        ratings.T_case.named("T_ref"),
    )


def _applied(judged: Judged, decided: Verdict, lasting: Lasting) -> Traced:
    rms, level = decided.of(lasting.rms), decided.of(lasting.level)
    value = decided.of(lasting.value)
    locus = judged.operating.locus
    if locus is not None and locus.use is Use.HELD:
        return found("I_lasting", value, "A", "current of the held point")
    once = locus is not None and locus.use is Use.ONCE
    name, how = ("I_pulses", PULSES) if once else ("I_rms", "exact mean of i^2 over straight segments")
    parts = (
        found(name, rms, "A", how),
        found("I_level", level, "A", "level held without a break for longer than the peak rating's pulse"),
    )
    return derived("I_lasting", f"max({name}, I_level)", "A", *parts)


def _pulse_missing(judged: Judged) -> tuple[Note, ...]:
    ratings, locus = judged.device.max, judged.operating.locus
    if ratings.I_peak is None or ratings.I_peak_pulse is not None or locus is None or locus.use is Use.HELD:
        return ()
    over = locus.i_peak > judged.rules.current.value[:, None] * ratings.I_max.value[:, None]
    missing = Missing(key=f"max.{ratings.I_peak.symbol}_pulse", where="pulse width stated with the peak current rating")
    text = (
        f"{ratings.I_peak.symbol} is stated without the pulse width it holds for, and the current goes above "
        f"{ratings.I_max.symbol}."
    )
    return (Note(text=text, holds=over, best=Status.UNPROVEN, missing=(missing,)),)
