"""voltage: the greatest voltage against the voltage rating.

Rule: v <= k_V * V_CEO (V_DSS, V_CES) at every instant. Where the duty states what the base sees while only leakage
flows, V_CER counts then (the resistance no larger than the one V_CER is stated with), or V_CEV with a reverse voltage;
V_CBO never stands for V_CEO.
Source: definitions of the limiting values of IEC 60747-7 and 60747-8.
Range: v >= 0; a bipolar transistor, or an IGBT without a stated diode, with collector and emitter exchanged has no
rating here and is unproven. A negative voltage counts by its magnitude, so that a wrong sign hides no excess.
"""

from __future__ import annotations

import numpy as np

from soacheck.device.laws import leakage_level
from soacheck.limit.found import Note, finding, nothing_allowed, point_at, ratio, typical, verdict, without_locus
from soacheck.limit.judged import Judged
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, Traced, derived, found

NAME = "voltage"
REVERSED = "The collector goes negative of the emitter; the ratings of a bipolar transistor do not cover that."
REVERSED_IGBT = (
    "The collector goes negative of the emitter; without a stated I_S the ratings of an IGBT do not cover that."
)
SIGN = Missing(key="load.points", where="the measurement or the drawing: the signs of v and i")


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding: the instant with the greatest share of the rating that counts then."""
    rating = judged.device.max.V_max
    locus = judged.operating.locus
    basis = f"v <= k_V * {rating.symbol} at every instant"
    if locus is None:
        return (without_locus(judged, limit=NAME, basis=basis, unit="V"),)
    k = judged.rules.voltage.named("k_V")
    plain = derived("V_allowed", f"k_V * {rating.symbol}", "V", k, rating)
    v = np.broadcast_to(locus.v, (judged.cases, *locus.shape[1:]))
    allowed = plain.value[:, None, None]
    other = _while_off(judged)
    if other is not None:
        basis += f"; while only leakage flows k_V * {other.symbol} ({judged.duty.termination} at the base)"
        off = (locus.i <= leakage_level(judged.device)) & (v >= 0)
        more = derived("V_allowed", f"k_V * {other.symbol}", "V", k, other)
        allowed = np.where(off & _opened(judged), np.maximum(more.value[:, None, None], allowed), allowed)
    share = ratio(np.abs(v), np.broadcast_to(allowed, v.shape))
    at = np.argmax(np.where(np.isnan(share), np.inf, share), axis=2)
    use = np.take_along_axis(share, at[..., None], axis=2)[..., 0]
    decided = verdict(
        judged,
        use,
        (
            *_reversed(judged, v < -1e-9 * rating.value[:, None, None]),
            *nothing_allowed(plain.value[:, None], "The voltage rating leaves nothing."),
            *typical(plain, None if other is None else other),
        ),
    )
    point = point_at(judged, decided, at)
    how = "voltage at the instant nearest to its rating"
    if bool(np.any(point.v < 0)):
        how += ", without its sign"
    applied = found("V_peak", np.abs(point.v), "V", how)
    if other is not None:
        limit = decided.of(np.take_along_axis(np.broadcast_to(allowed, v.shape), at[..., None], axis=2)[..., 0])
        plain = found(
            "V_allowed",
            limit,
            "V",
            f"k_V * {rating.symbol}, or k_V * {other.symbol} while only leakage flows",
            k,
            rating,
            other,
        )
    return (finding(judged, decided, limit=NAME, basis=basis, unit="V", applied=applied, allowed=plain, point=point),)


def _while_off(judged: Judged) -> Traced | None:
    """The rating that the stated base termination opens, if any."""
    ratings, duty = judged.device.max, judged.duty
    if duty.termination == "reverse":
        return ratings.V_CEV
    if duty.termination == "resistor" and duty.R_BE is not None and ratings.R_BE is not None:
        return ratings.V_CER
    return None


def _opened(judged: Judged) -> BoolArray:
    """Whether the termination is as good as the one the rating is stated with, (case, 1, 1)."""
    stated, rated = judged.duty.R_BE, judged.device.max.R_BE
    if judged.duty.termination != "resistor" or stated is None or rated is None:
        return np.ones((1, 1, 1), dtype=np.bool_)
    return np.asarray(stated.value <= rated.value * (1 + 1e-9), dtype=np.bool_)[:, None, None]


def _reversed(judged: Judged, negative: BoolArray) -> tuple[Note, ...]:
    device = judged.device
    if not device.bipolar and not (device.igbt and device.max.I_S is None):
        return ()
    text = REVERSED if device.bipolar else REVERSED_IGBT
    holds = np.asarray(np.any(negative, axis=2), dtype=np.bool_)
    return (Note(text=text, holds=holds, best=Status.UNPROVEN, missing=(SIGN,)),)
