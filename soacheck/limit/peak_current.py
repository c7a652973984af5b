"""peak-current: the greatest current against the peak rating.

Rule: excursions above k_I times the continuous rating may reach k_I * I_CM when each is no longer than the width that
I_CM is stated for (I_CM_pulse); longer ones, held points, and devices without a stated I_CM have the continuous rating.
Source: definition of the peak collector (drain) current of IEC 60747-7 and 60747-8, valid for its pulse width.
Range: forward conduction; conduction of the body diode is judged by its continuous rating I_S at every instant.
"""

from __future__ import annotations

import numpy as np

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
    """One finding; a second one where a body diode conducts."""
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
    findings = [_forward(judged, np.maximum(i, 0.0), basis)]
    if not judged.device.bipolar and bool(np.any(i < 0)):
        findings.append(_body_diode(judged, np.maximum(-i, 0.0)))
    return tuple(findings)


def _forward(judged: Judged, i: FloatArray, basis: str) -> Finding:
    ratings, locus = judged.device.max, judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no current")
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
            text = f"The current goes above {ratings.I_max.symbol}, and {ratings.I_peak.symbol} is stated without the " \
                   "pulse width it holds for."  # fmt: skip
            missing = (Missing(key=key, where="pulse width stated with the peak current rating"),)
            notes.append(Note(text=text, holds=over, best=Status.UNPROVEN, missing=missing))
            holds = np.ones_like(over)
        else:
            holds = run <= ratings.I_peak_pulse.value[:, None] * (1 + HAIR)
            text = f"The current stays above k_I * {ratings.I_max.symbol} longer than {ratings.I_peak.symbol}_pulse, so " \
                   "the continuous rating counts."  # fmt: skip
            notes.append(Note(text=text, holds=~holds))
        allowed = np.where(holds, np.maximum(short.value[:, None], lasting.value[:, None]), allowed)
        lasting = short
    decided = verdict(judged, ratio(peak, allowed), (*notes, *typical(lasting, ratings.I_max)))
    point = point_at(judged, decided, at)
    limit = decided.of(allowed)
    return finding(
        judged, decided, limit=NAME, basis=basis, unit="A", point=point,
        applied=found("I_peak", decided.of(peak), "A", "greatest current of the locus"),
        allowed=_limit(judged, lasting, limit), trace=() if run is None else (_longest(decided.of(run)),),
    )  # fmt: skip


def _limit(judged: Judged, formula: Traced, value: FloatArray) -> Traced:
    """The formula where it gives the allowance of every case, else the value with both ratings beneath it."""
    if bool(np.all(np.isclose(formula.value, value, rtol=1e-12))):
        return formula
    ratings = judged.device.max
    inputs = [judged.rules.current.named("k_I"), ratings.I_max]
    if ratings.I_peak is not None:
        inputs.append(ratings.I_peak)
    return found("I_allowed", value, "A", "k_I times the peak rating, or the continuous rating for excursions that last "
                 "longer than it is stated for", *inputs)  # fmt: skip


def _longest(run: FloatArray) -> Traced:
    value = np.where(np.isinf(run), np.nan, run)
    return found("t_above", value, "s", "longest unbroken time above k_I times the continuous rating")


def _body_diode(judged: Judged, i: FloatArray) -> Finding:
    rating = judged.device.max.I_S
    notes: list[Note] = [*sharing(judged)]
    peak = i.max(axis=2)
    allowed: Traced | None = None
    if rating is None:
        missing = Missing(key="max.I_S", where="source-drain (body) diode: continuous current")
        notes.append(Note(text="Current flows through the body diode and its rating I_S is not stated.", holds=peak > 0,
                          best=Status.UNPROVEN, missing=(missing,)))  # fmt: skip
        use = np.where(peak > 0, np.nan, 0.0)
    else:
        allowed = derived("I_allowed", f"k_I * {rating.symbol}", "A", judged.rules.current.named("k_I"), rating)
        use = ratio(peak, allowed.value[:, None])
        notes += typical(allowed)
    decided = verdict(judged, use, notes)
    return finding(
        judged, decided, limit=NAME, basis="body diode: i <= k_I * I_S at every instant", unit="A", allowed=allowed,
        applied=found("I_diode_peak", decided.of(peak), "A", "greatest current through the body diode"),
        point=point_at(judged, decided, i.argmax(axis=2)),
    )  # fmt: skip
