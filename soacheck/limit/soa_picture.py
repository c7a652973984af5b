"""What the safe-area picture of one duty shows: printed and scaled curves, and the ratings about them."""

from __future__ import annotations

import numpy as np

from soacheck.limit.allowance import Line, allowed, lines_of
from soacheck.limit.judged import Judged
from soacheck.result import SafeAreaPicture
from soacheck.trace import FloatArray, Traced

POINTS = 160  # of a scaled curve, evenly on the logarithm


def picture(judged: Judged, case: int, member: int | None = None) -> SafeAreaPicture:
    """Printed and scaled curves of one duty at one member, absent: its hottest, for one case."""
    lines = lines_of(judged)
    shown = [*lines.pulses, *([] if lines.dc is None else [lines.dc])]
    T = np.broadcast_to(judged.operating.T_case_peak, (judged.cases, judged.operating.T_case_peak.shape[1]))
    measure = lines.longest
    if measure is not None:
        T = np.broadcast_to(measure.T, (judged.cases, measure.T.shape[1]))
    hottest = int(np.argmax(np.where(np.isnan(T[case]), -np.inf, T[case])))
    hot = hottest if member is None else member
    ratings, locus = judged.device.max, judged.operating.locus
    v = i = np.empty(0)
    if locus is not None and not judged.duty.listed:
        full = (max(judged.cases, locus.shape[0]), *locus.shape[1:])
        v, i = (np.array(np.broadcast_to(a, full)[case, hot]) for a in (locus.v, locus.i))
    others = [
        (c.label, np.array(c.points), np.empty((0, 2)))
        for c in judged.device.soa
        if c.bias == "forward" and all(c is not line.curve for line in shown)
    ]
    return SafeAreaPicture(
        half=judged.duty.half,
        duty=judged.duty.name,
        v=v,
        i=i,
        T=float(T[case, hot]),
        T_ref=measure.curve.T_ref if measure is not None else float("nan"),
        curves=(
            *((line.label, np.array(line.curve.points), _scaled(judged, line, case, hot)) for line in shown),
            *others,
        ),
        V_max=_at(ratings.V_max, case),
        I_max=_at(ratings.I_max, case),
        I_peak=_at(ratings.I_peak, case),
        factor=_at(judged.rules.safe_area, case),
    )


def _scaled(judged: Judged, line: Line, case: int, member: int) -> FloatArray:
    points = line.curve.points
    corners = points[:, 0]
    v = np.unique(np.concatenate([np.geomspace(max(corners[0], 1e-3), corners[-1], POINTS), corners]))
    members = np.full((judged.cases, 1), member)
    full = np.broadcast_to(v, (judged.cases, 1, len(v)))
    may = allowed(line, full, members).current * line.factor[:, None, None]
    i = may[case, 0]
    good = i > 0
    return np.column_stack([v[good], i[good]])


def _at(value: Traced | None, case: int) -> float:
    return float("nan") if value is None else value.at(case)
