"""Guards about reading a safe-area chart."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from soacheck.device.ratings import SafeAreaCurve
from soacheck.guard.seen import Raised, Seen, duty_name
from soacheck.limit import safe_area
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.quantity import write
from soacheck.quantity.units import ZERO_CELSIUS
from soacheck.result import Finding, Status


def _forward(seen: Seen) -> list[SafeAreaCurve]:
    return [curve for curve in seen.place.device.soa if curve.bias == "forward"]


def _safe_area(seen: Seen, judged: Judged) -> Finding | None:
    return next(
        (finding for finding in seen.findings if finding.limit == "safe-area" and finding.duty == judged.duty.name),
        None,
    )


def chart_cold(seen: Seen) -> tuple[Raised, ...]:
    """chart-cold: inside the chart as printed, outside the chart at the temperature reached."""
    for judged in seen.judged:
        finding = _safe_area(seen, judged)
        if finding is None or finding.status[0] != Status.EXCEEDS or judged.operating.locus is None:
            continue
        T_ref = min((curve.T_ref for curve in _forward(seen)), default=float("nan"))
        op = judged.operating
        cold = np.full_like(op.T_case_peak, T_ref)
        printed = replace(
            judged,
            operating=replace(op, T_case_peak=cold, T_before=np.where(np.isnan(op.T_before), np.nan, T_ref)),
        )
        if all(again.status[0] not in (Status.WITHIN, Status.MARGINAL) for again in safe_area.find(printed)):
            continue
        T = float(np.nanmax(op.T_before if op.locus is not None and op.locus.use is Use.ONCE else op.T_case_peak))
        return (
            Raised(
                id="chart-cold",
                text=(
                    f"{duty_name(judged)}: inside the safe-area chart as printed for "
                    f"{T_ref - ZERO_CELSIUS:.0f} degC, outside it at {T - ZERO_CELSIUS:.0f} degC. The scaled "
                    "curve counts; the picture shows both."
                ),
            ),
        )
    return ()


def chart_node(seen: Seen) -> tuple[Raised, ...]:
    """chart-node: a chart drawn for the ambient does not start at the case."""
    if all(curve.node == "case" for curve in _forward(seen)):
        return ()
    return (
        Raised(
            id="chart-node",
            text=(
                f"{seen.place.device.name}: a safe-area curve is drawn for the ambient. Lines up to 10 ms count as "
                "case curves, longer ones and dc only without a heat sink."
            ),
        ),
    )


def pulse_between(seen: Seen) -> tuple[Raised, ...]:
    """pulse-between: a pulse time that stands between two printed curves."""
    pulses = sorted(curve.pulse for curve in _forward(seen))
    if len(pulses) < 2:
        return ()
    for judged in seen.judged:
        locus = judged.operating.locus
        if locus is None or locus.use is Use.HELD or not judged.duty.listed:
            continue
        above = safe_area.longest_above_dc(judged)
        between = (above > 0) & (above < pulses[-1]) & ~np.isclose(above[..., None], pulses).any(axis=-1)
        if not bool(np.any(between)):
            continue
        rule = (
            "the next longer printed curve counts"
            if judged.rules.pulse_between == "next-longer"
            else "the curves are interpolated log-log between printed pulses, as the stage asks"
        )
        time = write(float(np.max(above[between])), "time", 3)
        return (
            Raised(
                id="pulse-between",
                text=f"{duty_name(judged)}: {time} above the dc curve stands between printed pulses; {rule}.",
            ),
        )
    return ()


def no_dc_curve(seen: Seen) -> tuple[Raised, ...]:
    """no-dc-curve: lasting linear conduction judged without a dc curve."""
    if any(np.isinf(curve.pulse) for curve in _forward(seen)):
        return ()
    needs = [f for f in seen.findings if f.limit == "safe-area" and any(key.startswith("soa") for key in f.missing(0))]
    if not needs:
        return ()
    return (
        Raised(
            id="no-dc-curve",
            text=(
                f"{seen.place.device.name} has no dc safe-area curve. A pulse curve or the dissipation line does not "
                "show where lasting conduction in the active or linear region turns into hot spots: hot cells of a "
                "MOSFET below its zero-temperature-coefficient current, and of a bipolar transistor, draw the "
                "current to themselves."
            ),
        ),
    )
