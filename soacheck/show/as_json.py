"""JSON: one document, the same bytes for the same input, null for what is not known."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import PurePath

from soacheck import __version__
from soacheck.result import DeviceFacts, DutyResult, Finding, Result
from soacheck.show.document import FORMAT, Json, document
from soacheck.show.text import shown
from soacheck.show.words import kind_of, region_of, status_of
from soacheck.trace import FloatArray, Traced

_FIGURES = (
    "P_mean", "P_peak", "V_peak", "I_peak", "I_mean", "I_rms", "I_B_peak",
    "T_j_peak", "T_j_mean", "T_case", "T_heatsink", "R_th_total",
)  # fmt: skip


def as_json(results: Sequence[Result]) -> str:
    """One result as an object, several as a list."""
    objects = [result_object(result) for result in results]
    return document(objects[0] if len(objects) == 1 else objects)


def result_object(result: Result) -> Json:
    """The result in the form of the documented format, built of dicts, lists, text, floats and None."""
    complement = None if result.complement is None else _device(result.complement)
    return {
        "format": FORMAT,
        "soacheck": __version__,
        "verdict": result.verdict.word,
        "spread": result.spread,
        "stage": {
            "title": result.stage.title or None,
            "file": PurePath(result.stage.file).name or None,
            "sha256": result.stage.sha256 or None,
            "revision": result.stage.revision or None,
            **dict(result.stage.papers),
        },
        "device": _device(result.device),
        "complement": complement,
        "duties": [_duty(duty) for duty in result.duties],
        "findings": [
            _finding(finding, nominal, kind_of(result, finding))
            for finding, nominal in zip(result.findings, result.nominal, strict=True)
        ],
        "runaway": {},
        "not_analysed": list(result.not_analysed),
        "assumptions": list(result.assumptions),
        "cautions": [{"id": caution.id, "text": caution.text} for caution in result.cautions],
    }


def _number(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None


def _first(values: FloatArray) -> float | None:
    return _number(float(values[0]))


def _traced(traced: Traced | None) -> float | None:
    return None if traced is None else _number(shown(traced.at(0), traced.unit))


def _device(facts: DeviceFacts) -> Json:
    return {
        "name": facts.name,
        "kind": facts.kind or None,
        "file": PurePath(facts.file).name or None,
        "sha256": facts.sha256 or None,
        "ratings_from": facts.ratings_from or None,
    }


def _duty(duty: DutyResult) -> Json:
    figures = {name: _traced(getattr(duty, name)) for name in _FIGURES}
    return {"name": duty.name, "half": duty.half, **figures}


def _finding(finding: Finding, nominal: float, kind: str) -> Json:
    where: Json = {
        "t": _first(finding.where.t),
        "v": _first(finding.where.v),
        "i": _first(finding.where.i),
        "region": region_of(finding, kind),
    }
    if finding.member_name:
        where[finding.member_name] = _first(finding.where.member)
    return {
        "limit": finding.limit,
        "duty": finding.duty,
        "half": finding.half,
        "status": status_of(finding).word,
        "applied": _traced(finding.applied),
        "allowed": _traced(finding.allowed),
        "unit": finding.unit,
        "utilisation": _first(finding.utilisation),
        "nominal_utilisation": _number(nominal),
        "where": where,
        "basis": finding.basis,
        "missing": list(finding.missing(0)),
        "reasons": [reason.text for reason in finding.reasons if bool(reason.applies[0])],
    }
