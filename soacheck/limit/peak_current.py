"""peak-current: the greatest current against the peak rating.

Rule: excursions above k_I times the continuous rating may reach k_I * I_CM when each is no longer than the width that
I_CM is stated for (I_CM_pulse); longer ones, held points, and devices without a stated I_CM have the continuous rating.
Source: definition of the peak collector (drain) current of IEC 60747-7 and 60747-8, valid for its pulse width.
Range: forward conduction; conduction of the body diode is judged by its continuous rating I_S at every instant.
"""

from __future__ import annotations

import numpy as np

from soacheck.limit.body_diode import body_diode, without_backwards
from soacheck.limit.duration import HAIR, longest_run
from soacheck.limit.found import (
    Note,
    finding,
    point_at,
    ratio,
    sharing,
    typical,
    verdict,
    without_locus,
)
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, derived, found

NAME = "peak-current"


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding: forward conduction, or the body diode where that uses more of its own rating."""
    ratings, locus = judged.device.max, judged.operating.locus
    peak_rating = ratings.I_peak
    symbol = ratings.I_max.symbol if peak_rating is None else peak_rating.symbol
    basis = f"i <= k_I * {symbol}"
    if peak_rating is not None:
        basis += f" for excursions no longer than {symbol}_pulse, else k_I * {ratings.I_max.symbol}"
    else:
        basis += " (no peak rating is stated)"
    if locus is None:
        return (without_locus(judged, limit=NAME, basis=basis, unit="A"),)
    i = np.broadcast_to(locus.i, (judged.cases, *locus.shape[1:]))
    return (_found(judged, i, basis),)


def _found(judged: Judged, signed: FloatArray, basis: str) -> Finding:
    ratings, locus = judged.device.max, judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no current")
    i = np.maximum(signed, 0.0)
    diode = np.maximum(-signed, 0.0) if not judged.device.bipolar else None
    k = judged.rules.current.named("k_I")
    lasting = derived("I_allowed", f"k_I * {ratings.I_max.symbol}", "A", k, ratings.I_max)
    allowed, notes = np.broadcast_to(lasting.value[:, None], i.shape[:2]), [*sharing(judged)]
    peak, at = i.max(axis=2), i.argmax(axis=2)
    run: FloatArray | None = None
    if ratings.I_peak is not None and locus.use is not Use.HELD:
        short = derived("I_allowed", f"k_I * {ratings.I_peak.symbol}", "A", k, ratings.I_peak)
        run = longest_run(locus.t, i, allowed, locus.use).duration
        over = run > 0
        if ratings.I_peak_pulse is None:
            key = f"max.{ratings.I_peak.symbol}_pulse"
            text = (
                f"The current goes above {ratings.I_max.symbol}, and {ratings.I_peak.symbol} is stated without the "
                "pulse width it holds for."
            )
            missing = (Missing(key=key, where="pulse width stated with the peak current rating"),)
            notes.append(Note(text=text, holds=over, best=Status.UNPROVEN, missing=missing))
            holds = np.ones_like(over)
        else:
            holds = run <= ratings.I_peak_pulse.value[:, None] * (1 + HAIR)
            text = (
                f"The current stays above k_I * {ratings.I_max.symbol} longer than {ratings.I_peak.symbol}_pulse, so "
                "the continuous rating counts."
            )
            notes.append(Note(text=text, holds=~holds))
        allowed = np.where(holds, np.maximum(short.value[:, None], lasting.value[:, None]), allowed)
        notes += typical(ratings.I_peak_pulse, holds=over)
        lasting = short
    use = without_backwards(judged, signed, ratio(peak, allowed))
    third = None if diode is None else body_diode(judged, diode.max(axis=2), use, allowed)
    if diode is not None and third is not None:
        use, notes = third.use, [*notes, *third.notes]
        peak = np.where(third.governs, diode.max(axis=2), peak)
        at = np.where(third.governs, diode.argmax(axis=2), at)
        basis += "; body diode: i <= k_I * I_S at every instant"
    decided = verdict(judged, use, (*notes, *typical(lasting, ratings.I_max)))
    limit = _limit(judged, lasting, decided.of(allowed))
    return finding(
        judged,
        decided,
        limit=NAME,
        basis=basis,
        unit="A",
        point=point_at(judged, decided, at),
        applied=found("I_peak", decided.of(peak), "A", "greatest current of the locus"),
        allowed=limit if third is None else third.limit(judged, decided, limit),
        trace=() if run is None else (_longest(decided.of(run)),),
    )


def _limit(judged: Judged, formula: Traced, value: FloatArray) -> Traced:
    """The formula where it gives the allowance of every case, else the value with both ratings beneath it."""
    if bool(np.all(np.isclose(formula.value, value, rtol=1e-12))):
        return formula
    ratings = judged.device.max
    inputs = [judged.rules.current.named("k_I"), ratings.I_max]
    if ratings.I_peak is not None:
        inputs.append(ratings.I_peak)
    return found(
        "I_allowed",
        value,
        "A",
        "k_I times the peak rating, or the continuous rating for excursions that last longer than it is stated for",
        *inputs,
    )


def _longest(run: FloatArray) -> Traced:
    value = np.where(np.isinf(run), np.nan, run)
    return found("t_above", value, "s", "longest unbroken time above k_I times the continuous rating")
