"""No finding is within while one of its inputs is missing; what is missing is named."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields, replace
from typing import Any

import numpy as np
import pytest

from soacheck.device.ratings import ThermalData
from soacheck.limit import LIMITS, NAMES, safe_area
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from tests.limit.build import (
    DC,
    PULSES,
    curve,
    device,
    held,
    judged,
    once,
    only,
    pulse,
    repeated,
    said,
    status,
    value,
)

HELD, PERIODIC, SHOT = held(20, 1), repeated(*pulse(20, 2, 1e-3, total=5e-3)), once(*pulse(20, 2, 1e-3))
CASES = {"held": HELD, "periodic": PERIODIC, "shot": SHOT}
GONE = (Missing(key="heat_path.heatsink", where="the drawing of the sink"),)


def findings(asked: Judged) -> list[Finding]:
    return [finding for limit in LIMITS for finding in limit(asked)]


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("kind", ["npn", "n-mosfet"])
def test_everything_stated_is_within(name: str, kind: str) -> None:
    for finding in findings(judged(CASES[name], device(kind), T_j=60)):  # type: ignore[arg-type]  # a kind
        assert status(finding) is Status.WITHIN, finding.limit
        assert 0 <= finding.utilisation[0] <= 0.8


NEEDS = {
    "dissipation": {"T_case", "P_mean"},
    "safe-area": {"T_case_peak"},
    "junction-temperature": {"T_j_peak", "T_j_mean", "T_j_bound"},
}


@pytest.mark.parametrize("name", ["held", "periodic"])
@pytest.mark.parametrize("limit", NEEDS)
def test_a_figure_that_is_not_a_number_leaves_its_finding_unproven(name: str, limit: str) -> None:
    asked = judged(CASES[name], T_j=60, missing=GONE)
    blank: dict[str, Any] = {field: np.full_like(getattr(asked.operating, field), np.nan) for field in NEEDS[limit]}
    holed = replace(asked, operating=replace(asked.operating, **blank))
    (finding,) = [f for f in findings(holed) if f.limit == limit]
    assert status(finding) is Status.UNPROVEN
    assert np.isnan(finding.utilisation[0])


def test_a_shot_without_its_starting_temperature_is_unproven() -> None:
    asked = judged(SHOT, T_j=60, missing=GONE)
    holed = replace(asked, operating=replace(asked.operating, T_before=np.full((1, 1), np.nan)))
    finding = only(safe_area.find(holed))
    assert status(finding) is Status.UNPROVEN
    assert finding.missing(0) == ("heat_path.heatsink",)


@pytest.mark.parametrize("name", CASES)
def test_no_figure_of_the_operating_point_can_be_lost_and_improve_anything(name: str) -> None:
    asked = judged(CASES[name], device("n-mosfet"), T_j=60, missing=GONE)
    whole = {f.limit: status(f) for f in findings(asked)}
    for field in fields(asked.operating):
        array = getattr(asked.operating, field.name)
        if not isinstance(array, np.ndarray):
            continue
        blank: dict[str, Any] = {field.name: np.full_like(array, np.nan)}
        holed = replace(asked, operating=replace(asked.operating, **blank))
        for finding in findings(holed):
            assert status(finding) >= whole[finding.limit], (field.name, finding.limit)


@pytest.mark.parametrize("name", CASES)
def test_a_locus_with_a_hole_is_never_within(name: str) -> None:
    locus = CASES[name]
    for what in ("v", "i"):
        holed = np.array(getattr(locus, what))
        holed[..., -1 if locus.use is Use.HELD else 2] = np.nan
        path: dict[str, Any] = {what: holed}
        asked = judged(replace(locus, **path), T_j=60)
        for finding in findings(asked):
            needs = what == "v" or finding.limit != "voltage"
            needs &= what == "i" or finding.limit not in {"current", "peak-current"}
            if needs and finding.limit not in {"junction-temperature"}:
                assert status(finding) is not Status.WITHIN, (what, finding.limit)


def test_an_unknown_locus_leaves_everything_unproven_and_names_the_key() -> None:
    lacking = (Missing(key="load.V_CC", where="the supply's drawing"),)
    for finding in findings(judged(None, unknown=lacking)):
        assert status(finding) is Status.UNPROVEN
        assert finding.missing(0) == ("load.V_CC",)
        assert "load.V_CC" in said(finding)


def test_a_sharing_that_is_not_stated_leaves_currents_unproven_but_exceeds_stays() -> None:
    lacking = Missing(key="stage.worst_share", where="matching and ballast of the set")
    for finding in findings(judged(HELD, T_j=60, share_missing=lacking)):
        expected = Status.WITHIN if finding.limit == "voltage" else Status.UNPROVEN
        assert status(finding) is expected, finding.limit
    for finding in findings(judged(held(100, 20), T_j=190, share_missing=lacking)):
        if finding.limit != "voltage":
            assert status(finding) is Status.EXCEEDS, finding.limit


def test_no_curve_no_verdict() -> None:
    finding = only(safe_area.find(judged(HELD, device(soa=()))))
    assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("soa[dc]",))


@pytest.mark.parametrize("kind", ["npn", "n-mosfet", "n-igbt"])
def test_lasting_conduction_without_a_dc_curve_is_unproven_for_every_kind(kind: str) -> None:
    part = device(kind, soa=PULSES)  # type: ignore[arg-type]  # a kind
    for locus in (HELD, PERIODIC, once(*pulse(20, 2, 0.2))):
        finding = only(safe_area.find(judged(locus, part, T_j=60)))
        assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("soa[dc]",))
    above = only(safe_area.find(judged(held(100, 5), part)))
    assert status(above) is Status.EXCEEDS


AMBIENT = tuple(replace(line, node="ambient") for line in (*PULSES, DC))


def test_a_chart_drawn_for_the_ambient_counts_to_10_ms_on_a_sink() -> None:
    part = device(soa=AMBIENT)
    finding = only(safe_area.find(judged(HELD, part)))
    assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("soa[dc]",))
    assert "drawn for the ambient" in said(finding)
    short = only(safe_area.find(judged(once(*pulse(20, 2, 9e-3)), part, T_j=60)))
    assert status(short) is Status.WITHIN


def test_a_chart_drawn_for_the_ambient_counts_whole_without_a_sink() -> None:
    thermal = ThermalData(R_th_jc=value("R_th_jc", 125 / 150, "K/W"), R_th_ja=value("R_th_ja", 40, "K/W"))
    small = curve("dc", np.inf, (1, 3.0), (160, 0.018), node="ambient")
    part = device(soa=(small,), thermal=thermal)
    air = 50.0
    finding = only(safe_area.find(judged(held(20, 0.05), part, T_case=90, T_ambient=air, sink="none")))
    # By hand: dissipation (150 - 50)/(40 * 20 V) = 0.125 A; the curve at 20 V times 100/125 is more.
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(min(0.125, 3 * 20 ** (np.log(0.018 / 3) / np.log(160)) * 0.8))
    no_value = device(soa=(small,))
    assert status(only(safe_area.find(judged(held(20, 0.05), no_value, sink="none")))) is Status.UNPROVEN


def test_typical_curves_are_at_best_marginal() -> None:
    typical = device(soa=(*PULSES, replace(DC, grade="typical")))
    assert status(only(safe_area.find(judged(HELD, typical)))) is Status.MARGINAL
    pulses = device(soa=(*(replace(line, grade="typical") for line in PULSES), DC))
    assert status(only(safe_area.find(judged(HELD, pulses)))) is Status.WITHIN
    above_dc = once(*pulse(50, 4, 5e-3))
    assert status(only(safe_area.find(judged(above_dc, device(), T_j=60)))) is Status.WITHIN
    assert status(only(safe_area.find(judged(above_dc, pulses, T_j=60)))) is Status.MARGINAL


def test_every_limit_says_its_rule_source_and_range() -> None:
    from soacheck.limit import _MODULES

    assert tuple(module.NAME for module in _MODULES) == NAMES
    for module in _MODULES:
        text = module.__doc__ or ""
        assert text.startswith(f"{module.NAME}: ")
        for word in ("Rule", "Source: ", "Range: "):
            assert word in text, (module.NAME, word)


def test_reasons_are_sentences() -> None:
    asked: list[Callable[[], Judged]] = [
        lambda: judged(None),
        lambda: judged(HELD, device(soa=())),
        lambda: judged(once(*pulse(50, 21, 0.3e-3)), T_j=100),
        lambda: judged(repeated([0, 1], [-2, 170], [0, 20]), T_case=160),
    ]
    for make in asked:
        for finding in findings(make()):
            for reason in finding.reasons:
                assert reason.text[0].isupper(), reason.text
                assert reason.text.endswith("."), reason.text
