"""junction-temperature: the greatest junction temperature against the rating or the stage's own limit.

Rule: T_j_peak <= the least of the rating, the stage's T_j_max and the rating less T_j_below_max. Utilisation counts
both from T_ambient. Without Z_th_jc the ripple is not known: the bound T_case + R_th_jc * P_peak decides what is
allowed, the mean junction temperature what exceeds, and between the two nothing is proven.
Source: definition of the virtual junction temperature of IEC 60747-1; superposition of the thermal network's modes.
Range: every duty; an ambient at or above the limit exceeds whatever the power.
"""

from __future__ import annotations

import numpy as np

from soacheck.limit.found import (
    Note,
    Verdict,
    finding,
    point_at,
    sharing,
    temperature_unknown,
    typical,
    typical_named,
    verdict,
    without_locus,
)
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, Traced, derived, found

NAME = "junction-temperature"
Z_MISSING = Missing(key="thermal.Z_th_jc", where="transient thermal impedance, single pulse, junction to case")


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding."""
    operating = judged.operating
    basis = "(T_j_peak - T_ambient) <= (T_j_limit - T_ambient)"
    locus = operating.locus
    if locus is None:
        return (without_locus(judged, limit=NAME, basis=basis, unit="degC"),)
    limit = limit_of(judged)
    shape = (judged.cases, operating.T_j_bound.shape[1])
    ambient = operating.T_ambient
    T_a = np.full((1, 1), np.nan) if ambient is None else ambient.value[:, None]
    span = limit.value[:, None] - T_a

    def use_of(T: FloatArray) -> FloatArray:
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.broadcast_to(np.where(span > 0, (T - T_a) / span, np.nan), shape)

    known = ~np.isnan(operating.T_j_peak)
    bound, mean = use_of(operating.T_j_bound), use_of(operating.T_j_mean)
    by_mean = ~known & (mean > 1)
    open_ = ~known & ~(bound <= 1) & ~(mean > 1) & ~np.isnan(bound)
    use = np.where(known, use_of(operating.T_j_peak), np.where(by_mean, mean, np.where(bound <= 1, bound, np.nan)))
    use = np.where((span > 0) & (use < 0), 0.0, use)
    ripple = ~known & (bound <= 1)
    decided = verdict(
        judged,
        use,
        (
            *sharing(judged),
            *temperature_unknown(judged, np.broadcast_to(operating.T_j_bound, shape)),
            Note(text="The ambient is at the junction's limit or above it.", holds=span <= 0, best=Status.EXCEEDS),
            Note(
                text="Without Z_th_jc the ripple of the junction is not known; the bound T_case + R_th_jc * P_peak is "
                "above the limit and the mean is below it.",
                holds=open_,
                best=Status.UNPROVEN,
                missing=(Z_MISSING,),
            ),
            Note(text="Z_th_jc is not stated: the bound T_case + R_th_jc * P_peak is judged.", holds=ripple),
            Note(text="Z_th_jc is not stated: the mean junction temperature alone is above the limit.", holds=by_mean),
            *typical(operating.R_th_jc, limit),
            *typical_named(_transient(judged)),
        ),
    )
    value = np.where(known, operating.T_j_peak, np.where(by_mean, operating.T_j_mean, operating.T_j_bound))
    at = np.argmax(np.where(np.isnan(operating.T_j), -np.inf, operating.T_j), axis=2)
    p_at = np.argmax(np.broadcast_to(locus.p, locus.shape), axis=2)
    at = np.where(known, np.broadcast_to(at, shape), np.broadcast_to(p_at, shape))
    return (
        finding(
            judged,
            decided,
            limit=NAME,
            basis=basis,
            unit="degC",
            point=point_at(judged, decided, at),
            applied=_applied(judged, decided, value, known, by_mean),
            allowed=limit,
            trace=() if ambient is None else (ambient,),
        ),
    )


def limit_of(judged: Judged) -> Traced:
    """The junction temperature that counts: rating, own limit, or own distance from the rating, the lowest."""
    rules, rating = judged.rules, judged.device.max.T_j.named("T_j_max")
    own = rules.T_j_max.named("T_j_own") if rules.T_j_max is not None else None
    below = rules.T_j_below_max.named("T_j_below") if rules.T_j_below_max is not None else None
    if own is not None and below is not None:
        return derived("T_j_limit", "min(T_j_own, T_j_max - T_j_below)", "degC", own, rating, below)
    if own is not None:
        return derived("T_j_limit", "min(T_j_own, T_j_max)", "degC", own, rating)
    if below is not None:
        return derived("T_j_limit", "T_j_max - T_j_below", "degC", rating, below)
    return rating.named("T_j_limit")


def _transient(judged: Judged) -> tuple[str, ...]:
    """Name of a typical transient curve, when the ripple rests on it."""
    locus = judged.operating.locus
    used = judged.operating.ladder is not None and locus is not None and locus.use is not Use.HELD
    return ("Z_th_jc",) if used and judged.device.thermal.grade == "typical" else ()


def _applied(judged: Judged, decided: Verdict, value: FloatArray, known: BoolArray, by_mean: BoolArray) -> Traced:
    """T_j as a formula where it is one in every case: held points, the bound, the mean."""
    operating = judged.operating
    locus, R = operating.locus, operating.R_th_jc
    T = decided.of(value)
    held = locus is not None and locus.use is Use.HELD
    how = "thermal network driven by the power of the locus" if held or bool(np.all(decided.of(known))) else "bound"
    if R is not None and locus is not None and locus.use is not Use.ONCE:
        case = found("T_case", decided.of(operating.T_case), "degC", "heat path of the duty")
        mean = held or bool(np.all(decided.of(by_mean)))
        power = found(
            "P_mean" if mean else "P_peak",
            decided.of(operating.P_mean if mean else operating.P_peak),
            "W",
            "exact mean of v * i" if mean else "greatest v * i",
        )
        formula = derived("T_j_peak", f"T_case + R_th_jc * {power.symbol}", "degC", case, R.named("R_th_jc"), power)
        if bool(np.all(np.isclose(formula.value, T, rtol=1e-9, equal_nan=True))):
            return formula
    return found("T_j_peak", T, "degC", how)
