"""Every half, duty and limit of a stage worked out, for all cases of its plan at once; nothing is decided here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from soacheck.balance.operating import Before, Operating, before_of
from soacheck.balance.place import Place, place_of
from soacheck.balance.settle import needs_sink_bound, settle
from soacheck.device.ratings import Device
from soacheck.duty import Duty, Fitted
from soacheck.guard.heat import TEMPERATURE_LIMITS
from soacheck.limit import LIMITS
from soacheck.limit.judged import Judged
from soacheck.limit.signs import wrong_signs
from soacheck.locus import Locus, Use
from soacheck.result import Finding, Reason, Status
from soacheck.stage import Stage
from soacheck.table import Missing

SINK_CAPACITY = Missing(
    key="heat_path.heatsink.C_th", where="mass of the sink times its specific heat; a long shot warms it"
)
BOX_AIR = Missing(key="surroundings.T_ambient", where="air at the sink in the hottest stretch, without R_th_enclosure")
BARE_CASE = Missing(
    key="heat_path.heatsink",
    where="a bare case has no heat capacity to state: a heat sink with its C_th, or a shorter pulse",
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sitting:
    """One half of a stage worked out for some cases."""

    fitted: Fitted
    place: Place
    judged: tuple[Judged, ...]
    findings: tuple[Finding, ...]


def evaluate(stage: Stage) -> tuple[Sitting, ...]:
    """Every half, duty and limit of a stage, for all cases of its plan at once."""
    return tuple(
        _sit(stage, half.fitted, place_of(half.fitted.device, half.ladder, stage.heat_path, stage.devices))
        for half in stage.halves
    )


def _sit(stage: Stage, fitted: Fitted, place: Place) -> Sitting:
    cases = stage.plan.count
    duties = stage.kind.duties(stage.load, fitted)
    settled = _settle_all(duties, place, cases)
    judged, findings = [], []
    for duty, (operating, lower) in zip(duties, settled, strict=True):
        asked = Judged(
            device=fitted.device,
            fitted=fitted,
            duty=duty,
            operating=operating,
            rules=stage.rules,
            cases=cases,
        )
        judged.append(asked)
        of_duty = [f for limit in LIMITS for f in limit(asked)]
        if lower is not None:
            again = [f for limit in LIMITS for f in limit(replace(asked, operating=lower))]
            of_duty = [_either(upper, low, place) for upper, low in zip(of_duty, again, strict=True)]
        findings += _signed(_typical(of_duty, place), fitted.device, operating.locus, cases)
    return Sitting(fitted=fitted, place=place, judged=tuple(judged), findings=tuple(findings))


def _settle_all(duties: Sequence[Duty], place: Place, cases: int) -> list[tuple[Operating, Operating | None]]:
    """Each duty at its temperatures; steady duties first, then the shots that start from them.

    What outlasts a sink of unknown heat capacity comes with its upper and its lower bound.
    """

    def bounds(duty: Duty, before: Before | None) -> tuple[Operating, Operating | None]:
        held = settle(duty, place, cases, before=before)
        if not needs_sink_bound(duty, place):
            return held, None
        return settle(duty, place, cases, before=before, sink_follows=True), held

    shot = [duty.locus is not None and duty.locus(None).use is Use.ONCE for duty in duties]
    settled = {k: bounds(duty, None) for k, duty in enumerate(duties) if not shot[k]}
    steady = [operating for operating, _ in settled.values()]
    for k, duty in enumerate(duties):
        if shot[k]:
            wanted = [op for op in steady if duty.after is None or op.duty.name == duty.after]
            settled[k] = bounds(duty, before_of(wanted))
    return [settled[k] for k in range(len(duties))]


def _typical(findings: list[Finding], place: Place) -> list[Finding]:
    """Findings that rest on typical-grade values of the heat path: at best marginal."""
    path = place.path
    values = [path.interface, path.R_th_sink, path.C_th_sink, path.R_th_enclosure]
    if path.sink == "none":
        values = [place.device.thermal.R_th_ja, path.R_th_enclosure]
    names = [value.source for value in values if value is not None and value.typical_below]
    if not names:
        return findings
    text = f"Rests on typical data ({', '.join(names)}): at best marginal."
    reason = Reason(text=text, applies=np.asarray([True]))
    return [
        replace(f, status=np.maximum(f.status, int(Status.MARGINAL)), reasons=(*f.reasons, reason))
        if f.limit in TEMPERATURE_LIMITS
        else f
        for f in findings
    ]


def _signed(findings: list[Finding], device: Device, locus: Locus | None, cases: int) -> list[Finding]:
    """Findings of a locus whose signs no transistor can show: none of them is better than unproven."""
    if locus is None:
        return findings
    for reason in wrong_signs(device, locus):
        wrong = np.broadcast_to(reason.applies, (cases,))
        findings = [
            replace(
                f,
                status=np.where(wrong, np.maximum(f.status, int(Status.UNPROVEN)), f.status),
                reasons=_said_once(f.reasons, replace(reason, applies=wrong)),
            )
            for f in findings
        ]
    return findings


def _said_once(reasons: tuple[Reason, ...], more: Reason) -> tuple[Reason, ...]:
    """Reasons with one more, which takes the place of one of the same words."""
    for own in reasons:
        if own.text == more.text:
            more = replace(more, applies=own.applies | more.applies)
    return (*(own for own in reasons if own.text != more.text), more)


def _lacks(place: Place) -> Missing:
    """What would decide between the two bounds."""
    if place.path.sink == "resistance" and place.path.C_th_sink is None:
        return SINK_CAPACITY
    return BARE_CASE if place.path.sink == "none" else BOX_AIR


def _either(upper: Finding, lower: Finding, place: Place) -> Finding:
    """A finding between two bounds: the upper one decides `within`, `exceeds` needs the lower one too."""
    same = np.array_equal(upper.utilisation, lower.utilisation, equal_nan=True)
    if same and np.array_equal(upper.status, lower.status):
        return upper  # a limit that no temperature touches
    if bool(np.all(lower.status == Status.EXCEEDS)):
        text = "Exceeded even by the lower bound, with sink and air held at their means; the duties show the upper one."
        return replace(lower, reasons=(*lower.reasons, Reason(text=text, applies=np.asarray([True]))))
    open_ = (upper.status == Status.EXCEEDS) & (lower.status != Status.EXCEEDS)
    if not bool(np.any(open_)):
        return upper
    reason = Reason(
        text="This lasts long enough to warm a sink, a case or the air of a box whose heat capacity is not stated: "
        "held at its mean it would do, following at once it would not.",
        applies=open_,
        missing=(_lacks(place),),
    )
    return replace(upper, status=np.where(open_, int(Status.UNPROVEN), upper.status), reasons=(*upper.reasons, reason))
