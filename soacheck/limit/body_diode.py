"""The third quadrant: what the body diode carries, against its own rating I_S."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.device.laws import leakage_level
from soacheck.limit.found import Note, Verdict, ratio, typical
from soacheck.limit.judged import Judged
from soacheck.result import Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, Traced, derived, found

MISSING = Missing(key="max.I_S", where="source-drain (body) diode: continuous current")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class BodyDiode:
    """Utilisation (case, member) of whichever uses more of its rating; governs: where that is the diode."""

    use: FloatArray
    allowed: FloatArray
    governs: BoolArray
    notes: tuple[Note, ...]
    rated: Traced | None

    def limit(self, judged: Judged, decided: Verdict, forward: Traced) -> Traced:
        """The allowance that governs, with its formula where one rating governs every case."""
        diode = decided.of(self.governs)
        if self.rated is None or not bool(np.any(diode)):
            return forward
        rated = derived("I_allowed", f"k_I * {self.rated.symbol}", "A", judged.rules.current.named("k_I"), self.rated)
        if bool(np.all(diode)):
            return rated
        how = "allowance of forward conduction, or k_I * I_S where the body diode governs"
        return found("I_allowed", decided.of(self.allowed), "A", how, *rated.inputs, *forward.inputs[1:])


def without_backwards(judged: Judged, i: FloatArray, use: FloatArray) -> FloatArray:
    """Utilisation (case, member) of forward conduction, not a number where a device that has no body diode conducts
    backwards: nothing rates that. An excess stays one."""
    if not judged.device.bipolar:
        return use
    backwards = np.any(i < -leakage_level(judged.device), axis=2) & ~(use > 1)
    return np.where(backwards, np.nan, use)


def body_diode(judged: Judged, diode: FloatArray, use: FloatArray, allowed: FloatArray) -> BodyDiode | None:
    """Body-diode current (case, member) beside the utilisation of forward conduction; None where no diode conducts
    (more than the leakage).

    The answer depends on each case alone: a case without diode current keeps its forward figures.
    """
    conducts = diode > leakage_level(judged.device)
    if not bool(np.any(conducts)):
        return None
    rated = judged.device.max.I_S
    k = judged.rules.current.value[:, None]
    limit = np.full((1, 1), np.nan) if rated is None else k * rated.value[:, None]
    third = np.where(conducts, ratio(diode, limit), -np.inf)
    # What is not known of the diode counts; what is not known of forward conduction gives way to an excess alone.
    governs = conducts & (np.isnan(third) | (third >= use) | (third > 1))
    notes = [Note(text="The body diode governs.", holds=governs)]
    if rated is None:
        text = "Current flows through the body diode and its rating I_S is not stated."
        notes.append(Note(text=text, holds=conducts, best=Status.UNPROVEN, missing=(MISSING,)))
    notes += typical(rated, holds=conducts)
    over = conducts & (use > 1)
    return BodyDiode(
        use=np.where(governs & ~(over & np.isnan(third)), third, use),
        allowed=np.where(governs, limit, allowed),
        governs=governs & ~np.isnan(third),
        notes=tuple(notes),
        rated=rated,
    )
