"""safe-area: the locus against the printed safe-area curves, scaled to the temperature reached.

Rule: a locus wholly inside the dc curve is inside. Otherwise two tests, and the larger utilisation counts. Residence:
the longest unbroken time above each printed curve may not exceed the next shorter printed pulse (or, log-log, no
interpolated curve's own width). Superposition: the hot spot's response to x = i/I_dc(v), with g = I_dc/I(t_p) as its
step response, may not go above 1. Curves are scaled to the case temperature (its peak; for one shot the junction
temperature just before), with T_j_max the rating. Where a current rating is the allowance, or the device is on,
`current` and `peak-current` judge. Utilisation is the factor by which all currents must be divided to touch.
Source: makers' charts; residence as read by hand; superposition is our own derivation. Pulse curves are published for
duty factors to 10 %.
Range: no dc curve: lasting or repeated conduction in the active region is unproven. Nothing is known right of a curve's
last point, nor below the shortest printed pulse.
"""

from __future__ import annotations

import numpy as np

from soacheck.limit.allowance import Lines, lines_of, share
from soacheck.limit.duration import longest_run
from soacheck.limit.found import ALWAYS, Note, finding, sharing, verdict, without_locus
from soacheck.limit.governing import governing
from soacheck.limit.judged import Judged
from soacheck.limit.path import path_of
from soacheck.limit.screen import screen
from soacheck.limit.soa_notes import DC_MISSING, notes_of
from soacheck.limit.soa_picture import picture
from soacheck.limit.two_tests import work
from soacheck.result import Finding, Status
from soacheck.trace import FloatArray

NAME = "safe-area"
BASIS = (
    "residence above each printed curve and superposition on the hot spot's response, both scaled to the temperature "
    "reached; the larger counts"
)

__all__ = ["BASIS", "NAME", "find", "longest_above_dc", "picture"]


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding."""
    if judged.operating.locus is None:
        return (without_locus(judged, limit=NAME, basis=BASIS, unit="A"),)
    lines = lines_of(judged)
    measure = lines.longest
    if measure is None:
        return (_no_curves(judged, lines),)
    seen = screen(judged, lines)
    worked = work(judged, lines, seen)
    decided = verdict(judged, worked.use, notes_of(judged, lines, measure, seen, worked))
    made = governing(judged, lines, measure, seen, worked, decided)
    return (
        finding(
            judged,
            decided,
            limit=NAME,
            basis=BASIS,
            unit="A",
            applied=made.applied,
            allowed=made.allowed,
            point=made.point,
            trace=made.trace,
            more=made.reasons,
        ),
    )


def longest_above_dc(judged: Judged) -> FloatArray:
    """Longest unbroken time above the scaled dc curve, (case, member); infinite while held, 0 without a curve. [s]"""
    lines, locus = lines_of(judged), judged.operating.locus
    if locus is None or lines.dc is None:
        return np.zeros((judged.cases, 1))
    path = path_of(judged, np.arange(locus.shape[1])[None])
    r = share(lines.dc, path).r
    return longest_run(path.t, r, np.ones(r.shape[:2]), locus.use).duration


def _no_curves(judged: Judged, lines: Lines) -> Finding:
    text = "No safe-area curve is stated; the dissipation line never stands in for one."
    notes = [Note(text=text, holds=ALWAYS, best=Status.UNPROVEN, missing=(DC_MISSING,)), *sharing(judged)]
    notes += [Note(text=left, holds=ALWAYS) for left in lines.left_out]
    decided = verdict(judged, np.full(judged.operating.P_mean.shape, np.nan), notes)
    return finding(judged, decided, limit=NAME, basis=BASIS, unit="A", applied=None, allowed=None)
