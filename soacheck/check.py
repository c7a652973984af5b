"""The main job: every duty of a stage against every limit."""

from __future__ import annotations

import math
import re
from dataclasses import replace

import numpy as np

from soacheck import drawn
from soacheck.balance.chain import chain
from soacheck.balance.settle import HELD_CASE, HELD_SINK
from soacheck.device.ratings import Device
from soacheck.evaluate import Sitting, evaluate
from soacheck.guard import GUARDS, Raised, Seen
from soacheck.limit.judged import Judged
from soacheck.quantity import write
from soacheck.result import (
    Caution,
    DeviceFacts,
    DutyResult,
    Finding,
    Reason,
    Result,
    StageFacts,
    Status,
)
from soacheck.stage import Stage, keys_of
from soacheck.table import CasePlan
from soacheck.trace import Traced, derived

BLOCK = 9  # cases worked out together; fixed, so that the answer does not depend on anything else

# Limits of the file format's list that this version does not decide.
NOT_DECIDED = (
    "runaway (dissipation that grows with temperature; figures are at the stated characteristics)",
    "avalanche",
    "touch-temperature",
)


def check(stage: Stage, *, pictures: bool = True) -> Result:
    """The answer to one stage, decided on the worst corner of the uncertainties that the stage file states.

    pictures: whether the result also holds what pictures draw (loci, curves, sweeps).
    """
    plan = CasePlan.corners(stage.spreads) if stage.spreads else CasePlan()
    worst: list[Finding] = []
    cases: list[int] = []
    nominal: list[float] = []
    sittings: tuple[Sitting, ...] = ()
    for start in range(0, plan.count, BLOCK):
        part = plan.block(start, min(start + BLOCK, plan.count))
        sittings = evaluate(stage.over(part))
        findings = [f for sitting in sittings for f in sitting.findings]
        if start == 0:
            nominal = [float(f.utilisation[0]) for f in findings]
        if start and [_name(f) for f in findings] != [_name(f) for f in worst]:
            raise RuntimeError("two blocks of cases of one stage gave different findings")
        for k, finding in enumerate(findings):
            case = worst_case(finding, part.count)
            one = finding.at(case)
            if start == 0:
                worst.append(one)
                cases.append(case)
            elif _badness(one) > _badness(worst[k]):
                worst[k], cases[k] = one, start + case
    first = max(range(len(worst)), key=lambda k: (*_rank(worst[k]), -k)) if worst else None
    governing = cases[first] if first is not None else 0
    if plan.count > 1:
        sittings = evaluate(stage.over(plan.block(governing, governing + 1)))
    result = _decide(stage, plan, governing, sittings, worst, nominal)
    return _with_pictures(result, sittings) if pictures else result


def _name(finding: Finding) -> tuple[str, str, str | None]:
    return finding.limit, finding.duty, finding.half


def _badness(finding: Finding) -> tuple[int, float, float]:
    """Order of findings: by status, then utilisation, an excess without a number first; then by what is applied."""
    status, u = int(finding.status[0]), float(finding.utilisation[0])
    applied = -math.inf if finding.applied is None else float(np.nan_to_num(finding.applied.at(0), nan=-math.inf))
    if math.isnan(u):
        u = math.inf if status == Status.EXCEEDS else -math.inf
    return status, u, applied


def _rank(finding: Finding) -> tuple[int, float]:
    """The same without what is applied, and with what differs by rounding alone taken as equal."""
    status, u, _ = _badness(finding)
    return status, float(f"{u:.9g}")


def worst_case(finding: Finding, cases: int) -> int:
    """The case that decides a finding; the first of equal ones."""
    u, status = np.broadcast_to(finding.utilisation, (cases,)), np.broadcast_to(finding.status, (cases,))
    applied = np.full(cases, -np.inf) if finding.applied is None else np.broadcast_to(finding.applied.value, (cases,))
    empty = np.where(status == int(Status.EXCEEDS), np.inf, -np.inf)
    keys = (status, np.where(np.isnan(u), empty, u), np.where(np.isnan(applied), -np.inf, applied))
    best = np.ones(cases, dtype=np.bool_)
    for key in keys:
        best &= key == np.max(np.where(best, key, -np.inf))
    return int(np.argmax(best))


def _decide(
    stage: Stage,
    plan: CasePlan,
    governing: int,
    sittings: tuple[Sitting, ...],
    worst: list[Finding],
    nominal: list[float],
) -> Result:
    """Guards, order, verdict; duties and pictures come from `sittings`, at the case that governs."""
    cautions: list[Caution] = [
        Caution(id=i, text=t) for half in stage.halves for i, t in half.fitted.device.cautions
    ] + [Caution(id=i, text=t) for i, t in stage.document.cautions]
    cautions += [
        Caution(id="z-th-raised", text=f"{half.fitted.device.name}: {half.ladder.how}.")
        for half in stage.halves
        if half.ladder is not None and half.ladder.raised
    ]
    decided: list[Finding] = []
    position = 0
    for sitting in sittings:
        own = worst[position : position + len(sitting.findings)]
        position += len(sitting.findings)
        seen = Seen(place=sitting.place, judged=sitting.judged, findings=tuple(own))
        raised = [r for guard in GUARDS for r in guard(seen)]
        cautions += [Caution(id=r.id, text=r.text) for r in raised]
        decided += [_lowered(finding, raised) for finding in own]
    order = sorted(range(len(decided)), key=lambda k: _rank(decided[k]), reverse=True)  # equal ones stay in order
    if order:
        decided[order[0]] = _worked_out(decided[order[0]], sittings)
    findings = tuple(decided[k] for k in order)
    verdict = Status(max((int(f.status[0]) for f in decided), default=int(Status.UNPROVEN)))
    return Result(
        stage=StageFacts(
            title=stage.title, file=stage.file, sha256=stage.sha256, revision=stage.revision, papers=stage.papers
        ),
        device=_facts(stage.halves[0].fitted.device),
        complement=_facts(stage.halves[1].fitted.device) if len(stage.halves) > 1 else None,
        verdict=verdict,
        duties=tuple(_duty_result(s, j) for s in sittings for j in s.judged if j.duty.listed),
        findings=findings,
        nominal=tuple(nominal[k] for k in order),
        spread=bool(stage.spreads),
        not_analysed=_not_analysed(stage),
        assumptions=_assumptions(stage, plan, governing),
        cautions=tuple(dict.fromkeys(cautions)),
        inputs=(*stage.document.stated(),),
    )


def _with_pictures(result: Result, sittings: tuple[Sitting, ...]) -> Result:
    """The result with the loci, curves and sweeps that its pictures draw."""
    listed = [judged for sitting in sittings for judged in sitting.judged if judged.duty.listed]
    return replace(
        result,
        duties=tuple(replace(d, series=drawn.series(j)) for d, j in zip(result.duties, listed, strict=True)),
        safe_area=tuple(p for s in sittings for p in drawn.safe_areas(s.judged, result.findings)),
        characteristics=tuple(drawn.characteristics(s.judged) for s in sittings),
        sweeps=tuple(sweep for s in sittings for sweep in drawn.sweeps(s.judged)),
        lines=tuple(
            DutyResult(name=j.duty.name, half=j.duty.half, series=drawn.series(j))
            for s in sittings
            for j in s.judged
            if drawn.is_held_line(j)
        ),
    )


def _lowered(finding: Finding, raised: list[Raised]) -> Finding:
    for guard in raised:
        if finding.limit in guard.lowers and finding.status[0] < Status.UNPROVEN:
            reason = Reason(text=guard.text, applies=np.asarray([True]), missing=guard.missing)
            finding = replace(finding, status=np.asarray([int(Status.UNPROVEN)]), reasons=(*finding.reasons, reason))
    return finding


def _worked_out(finding: Finding, sittings: tuple[Sitting, ...]) -> Finding:
    """The governing finding with the heat-flow chain of its duty, at the member that governs."""
    for sitting in sittings:
        for judged in sitting.judged:
            if (judged.duty.name, judged.duty.half) != (finding.duty, finding.half) or judged.operating.locus is None:
                continue
            members = np.broadcast_to(judged.duty.members.value, judged.operating.P_mean.shape)
            wanted = finding.where.member[:, None]
            member = None if bool(np.isnan(wanted).any()) else np.argmin(np.abs(members - wanted), axis=1)
            steps = chain(judged.operating, sitting.place, member)
            facts = judged.duty.facts
            if judged.duty.facts_at is not None and member is not None:
                facts = judged.duty.facts_at(member)
            own = {value.symbol for value in finding.trace}
            more = (
                *facts,
                *(steps.P_mean, steps.P_peak, steps.T_heatsink, steps.T_case, steps.T_j_mean, steps.T_j_peak),
            )
            chosen = tuple(value for value in more if value is not None and value.symbol not in own)
            return replace(finding, trace=(*chosen, *finding.trace))
    return finding


def _facts(device: Device) -> DeviceFacts:
    return DeviceFacts(
        name=device.name,
        file=device.file,
        sha256=device.sha256,
        ratings_from=device.ratings_from,
        kind=device.kind,
    )


def _duty_result(sitting: Sitting, judged: Judged) -> DutyResult:
    figures = chain(judged.operating, sitting.place)
    duty = judged.duty
    return DutyResult(
        name=duty.name,
        half=duty.half,
        P_mean=figures.P_mean,
        P_peak=figures.P_peak,
        V_peak=figures.V_peak,
        I_peak=figures.I_peak,
        I_mean=figures.I_mean,
        I_rms=figures.I_rms,
        I_B_peak=_base_current(judged, figures.I_peak),
        T_j_peak=figures.T_j_peak,
        T_j_mean=figures.T_j_mean,
        T_case=figures.T_case,
        T_heatsink=figures.T_heatsink,
        R_th_total=figures.R_th_total,
        facts=duty.facts,
    )


def _base_current(judged: Judged, I_peak: Traced | None) -> Traced | None:
    """Base current at the current peak, from the least gain that the sheet vouches for."""
    if judged.duty.I_B_peak is not None or not judged.device.bipolar or I_peak is None:
        return judged.duty.I_B_peak
    h_FE = judged.device.typical.h_FE
    if h_FE is None or h_FE.low is None:
        return None
    return derived("I_B_peak", "I_peak / h_FE", "A", I_peak, h_FE.low.named("h_FE"))


def _not_analysed(stage: Stage) -> tuple[str, ...]:
    other = ("the other half of the stage (stage.complement not stated)",) if stage.half_open else ()
    voltage = stage.heat_path.working_voltage
    insulation = (
        "insulation"
        if voltage is None
        else f"insulation (heat_path.working_voltage = {write(voltage.at(0), 'voltage')})"
    )
    return (*stage.kind.not_analysed(stage.load), *other, *NOT_DECIDED, insulation)


def _corner(stage: Stage, plan: CasePlan, case: int) -> str:
    """The values of one corner as the file would write them."""
    dimensions = {key.path: key.dimension for key in keys_of(stage.kind)}
    parts = []
    for key, values in plan.values.items():
        dimension = dimensions.get(re.sub(r"\[\d+\]", "", key), "")
        parts.append(
            f"{key} = {write(values[case], dimension) if dimension else format(values[case], '.6g') + ' (SI)'}"
        )
    return ", ".join(parts)


def _assumptions(stage: Stage, plan: CasePlan, governing: int) -> tuple[str, ...]:
    said = list(stage.assumptions)
    for half in stage.halves:
        said += [f"{half.fitted.device.name}: {text}" for text in half.fitted.device.assumptions]
        if half.ladder is not None and half.ladder.how:
            said.append(f"{half.fitted.device.name}: {half.ladder.how}")
    path = stage.heat_path
    if path.shared_by is None and path.sink == "resistance" and stage.devices > 1:
        said.append(
            f"the sink is shared by every device of the stage, {stage.devices} (heat_path.shared_by not stated)"
        )
    held = {"resistance": ("sink", HELD_SINK), "none": ("case, without a sink,", HELD_CASE)}
    if path.sink in held and path.C_th_sink is None:
        what, longest = held[path.sink]
        said.append(
            f"the {what} stays at its mean temperature over a period, and at its start over a shot, of up to "
            f"{write(longest, 'time', 3)} (common practice); beyond that both bounds are judged"
        )
    if stage.spreads and governing > 0:
        said.append(f"duties are shown at the corner that governs: {_corner(stage, plan, governing)}")
    return tuple(dict.fromkeys(said))
