"""current: what flows for long against the continuous rating.

Rule: the rms current over the period, or the level held without a break for longer than the width the peak rating is
stated for (I_CM_pulse), whichever is larger, <= k_I * I_C. Without a peak rating every level counts. A MOSFET's I_D
falls with the case temperature as sqrt((T_j_max - T_case)/(T_j_max - T_ref)) and never rises above the rating. Body
diode conduction counts against I_S in the same way.
Source: limiting values of IEC 60747-7 and 60747-8; square-root law from "Understanding power MOSFET data sheet
parameters", application note AN11158 rev. 4 (2014).
Range: steady and one-shot duties; a MOSFET needs its case temperature.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.limit.body_diode import body_diode
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
from soacheck.locus import Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, derived, found

NAME = "current"


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
    lasting = lasting_current(judged, np.maximum(i, 0.0))
    diode = lasting_current(judged, np.maximum(-i, 0.0)) if not judged.device.bipolar else None
    return (_found(judged, lasting, diode, basis),)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Lasting:
    """What flows for long [A], and the sample nearest to it, (case, member); level: held, and not rms, decides."""

    value: FloatArray
    at: IntArray
    level: FloatArray
    rms: FloatArray


def lasting_current(judged: Judged, i: FloatArray) -> Lasting:
    """The larger of the rms current and the level held longer than the peak rating's pulse."""
    locus = judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no current")
    cases, members = i.shape[:2]
    peak = i.max(axis=2)
    if locus.use is Use.HELD:
        zero = np.zeros((cases, members), dtype=np.int64)
        return Lasting(value=peak, at=zero, level=peak, rms=peak)
    t, use = locus.t, locus.use
    dt = np.diff(t, axis=2)
    a, b = i[..., :-1], i[..., 1:]
    with np.errstate(divide="ignore", invalid="ignore"):
        rms = np.sqrt(np.sum(dt * (a * a + a * b + b * b), axis=2) / 3 / np.sum(dt, axis=2))
    ratings = judged.device.max
    if ratings.I_peak is None:
        level = peak
    elif ratings.I_peak_pulse is None:
        level = np.zeros_like(peak)  # peak-current says what is missing
    else:
        width = ratings.I_peak_pulse.value[:, None] * (1 + HAIR)
        floor = rms if locus.use is Use.REPEATED else np.zeros_like(rms)

        def exact(pick: IntArray) -> FloatArray:
            some = np.take_along_axis(i, pick[..., None], axis=1)
            when = t if t.shape[1] == 1 else np.take_along_axis(np.broadcast_to(t, i.shape), pick[..., None], axis=1)

            def fails(level: FloatArray) -> BoolArray:
                return longest_run(when, some, level, use).duration > width

            low = np.take_along_axis(floor, pick, axis=1)
            return bisect(fails, low, np.take_along_axis(peak, pick, axis=1))

        level, _ = exact_where_it_matters(floor, peak, exact, below=np.inf)
    if locus.use is Use.ONCE and ratings.I_peak is not None and ratings.I_peak_pulse is not None:
        value = level  # an rms value needs a period
    else:
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


def _found(judged: Judged, lasting: Lasting, diode: Lasting | None, basis: str) -> Finding:
    ratings = judged.device.max
    plain, allowed = continuous_rating(judged)
    use = ratio(lasting.value, allowed)
    notes: list[Note] = [*sharing(judged)]
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
        lasting = Lasting(
            value=np.where(third.governs, diode.value, lasting.value),
            at=np.where(third.governs, diode.at, lasting.at),
            level=np.where(third.governs, diode.level, lasting.level),
            rms=np.where(third.governs, diode.rms, lasting.rms),
        )
        basis += "; body diode: the same against k_I * I_S"
    notes += typical(plain, ratings.T_j if judged.device.mosfet else None)
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
    parts = (
        found("I_rms", rms, "A", "exact mean of i^2 over straight segments"),
        found("I_level", level, "A", "level held without a break for longer than the peak rating's pulse"),
    )
    if bool(np.all(value == np.maximum(rms, level))):
        return derived("I_lasting", "max(I_rms, I_level)", "A", *parts)
    return found("I_lasting", value, "A", "level held longer than the peak rating's pulse; one shot has no rms", *parts)


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
