"""dissipation: mean power against P_tot at the case temperature reached.

Rule: P_mean <= k_P * min(P_tot, (T_j_max - T_case)/R_th_jc). T_j_max is the rating; never above P_tot however cold;
where P_tot is not stated, never above the line's value at the temperature ratings are stated for.
Source: definition of the total power dissipation of IEC 60747-1 and its derating line.
Range: steady duties (held points and periodic ones); one-shot duties are judged by junction temperature and safe area.
"""

from __future__ import annotations

import numpy as np

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
from soacheck.trace import FloatArray, Traced, derived, found

NAME = "dissipation"


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding for a steady duty, none for a one-shot duty."""
    basis = "P_mean <= k_P * min(P_tot, (T_j_max - T_case) / R_th_jc)"
    operating = judged.operating
    locus = operating.locus
    if locus is None:
        return (without_locus(judged, limit=NAME, basis=basis, unit="W"),)
    if locus.use is Use.ONCE:
        return ()
    allowed = allowed_power(judged)
    applied = np.broadcast_to(np.abs(operating.P_mean), allowed.shape)
    rated = judged.device.max.P_tot
    notes: list[Note] = [
        *sharing(judged),
        *temperature_unknown(judged, allowed),
        *nothing_allowed(allowed, "The case is at the junction's limit or above it: no dissipation is allowed."),
        *typical(operating.R_th_jc, rated, judged.device.max.T_j),
    ]
    if rated is not None:
        cap = judged.rules.power.value[:, None] * rated.value[:, None]
        notes.append(
            Note(
                text="The dissipation is above P_tot at any case temperature.",
                holds=np.isnan(allowed) & (applied > cap),
                best=Status.EXCEEDS,
            )
        )
    decided = verdict(judged, ratio(applied, allowed), notes)
    how = "exact mean of v * i over the locus"
    if bool(np.any(decided.of(operating.P_mean) < 0)):
        how += ", without its sign"
    at = np.zeros(allowed.shape, dtype=np.int64)
    point = point_at(judged, decided, at) if locus.use is Use.HELD else None
    return (
        finding(
            judged,
            decided,
            limit=NAME,
            basis=basis,
            unit="W",
            point=point,
            applied=found("P_mean", decided.of(applied), "W", how),
            allowed=_traced(judged, decided),
        ),
    )


def allowed_power(judged: Judged) -> FloatArray:
    """Mean dissipation that the rules allow at the case temperature reached, (case, member). [W] NaN where unknown."""
    ratings, operating = judged.device.max, judged.operating
    shape = (judged.cases, operating.T_case.shape[1])
    R = operating.R_th_jc
    if R is None:
        return np.full(shape, np.nan)
    T_j, R_jc = ratings.T_j.value[:, None], R.value[:, None]
    cap = (T_j - ratings.T_case.value[:, None]) / R_jc if ratings.P_tot is None else ratings.P_tot.value[:, None]
    line = np.maximum(T_j - operating.T_case, 0.0) / R_jc
    return np.broadcast_to(judged.rules.power.value[:, None] * np.minimum(line, cap), shape)


def _traced(judged: Judged, decided: Verdict) -> Traced | None:
    ratings, R = judged.device.max, judged.operating.R_th_jc
    if R is None:
        return None
    T = found("T_case", decided.of(judged.operating.T_case), "degC", "heat path of the duty")
    k, T_j = judged.rules.power.named("k_P"), ratings.T_j.named("T_j_max")
    if ratings.P_tot is None:
        T_ref = ratings.T_case.named("T_ref")
        return derived(
            "P_allowed",
            "k_P * max(T_j_max - max(T_case, T_ref), 0) / R_th_jc",
            "W",
            k,
            T_j,
            T,
            T_ref,
            R.named("R_th_jc"),
        )
    return derived(
        "P_allowed",
        "k_P * min(P_tot, max(T_j_max - T_case, 0) / R_th_jc)",
        "W",
        k,
        ratings.P_tot.named("P_tot"),
        T_j,
        T,
        R.named("R_th_jc"),
    )
