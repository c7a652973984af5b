"""Nothing that is missing is taken for good news: each key is removed in turn."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from soacheck.check import check
from soacheck.errors import InputError
from soacheck.result import Finding, Status
from soacheck.stage import read_stage
from tests.whole import DEVICE, HELD, PROFILE, PUSH_PULL, put, result_of, stage_of, without

STAGES = {"held": HELD, "profile": PROFILE, "push-pull": PUSH_PULL}

# Keys that the file format lets be absent, with what then stands in their place. Everything else that a finding
# rests on must keep it from being `within`.
STANDS_IN = {
    "name": "required",
    "kind": "required",
    "device": "required",
    "title": "text only",
    "ratings_from": "text only, its absence is a caution",
    "R_th_jc": "(T_j - T_case)/P_tot, said on the sheet",
    "P_tot": "(T_j,max - T_case)/R_th_jc alone bounds the dissipation",
    "I_CM": "the continuous rating",
    "I_CM_pulse": "the continuous rating",
    "I_Q": "a natural zero, listed",
    "R_E": "a natural zero, listed",
    "I_CQ": "no idle duty, listed under not analysed",
    "I_CBO": "0.1 % of the continuous rating ends the curves",
    "V_CE_sat": "the longest line there can be",
    "I_B": "no base current is stated, none is judged",
    "V_EBO": "no reverse drive is stated, none is judged",
}


def keys(text: str) -> list[str]:
    return list(dict.fromkeys(re.findall(r"(?m)^(\w+) = ", text)))


def rests_on(finding: Finding, key: str) -> bool:
    values = [v for v in (finding.applied, finding.allowed, *finding.trace) if v is not None]
    return any(re.search(rf"\b{key}\b", node.source) or node.symbol == key for v in values for node in v.walk())


@pytest.mark.parametrize("kind", sorted(STAGES))
def test_no_finding_is_within_with_one_of_its_inputs_missing(kind: str, tmp_path: Path) -> None:
    stage = STAGES[kind]
    whole = result_of(tmp_path, stage)
    assert any(f.status[0] == Status.WITHIN for f in whole.findings)
    refused, seen = [], 0
    for which, text in (("device", DEVICE), ("stage", stage)):
        for key in keys(text):
            if key in STANDS_IN or key in ("pulse", "points"):
                continue
            texts = (stage, without(text, key)) if which == "device" else (without(text, key), DEVICE)
            try:
                less = result_of(tmp_path, *texts)
            except InputError:
                refused.append(key)
                continue
            before = {(f.limit, f.duty): f for f in whole.findings}
            for finding in less.findings:
                was = before.get((finding.limit, finding.duty))
                if was is not None and rests_on(was, key):
                    seen += 1
                    assert finding.status[0] != Status.WITHIN, (key, finding.limit, finding.duty)
    assert seen >= 3
    assert "T_j" in refused
    assert "V_CEO" in refused


@pytest.mark.parametrize("key", ["T_ambient", "heatsink", "interface"])
@pytest.mark.parametrize("kind", sorted(STAGES))
def test_temperatures_dissipation_and_safe_area_are_unproven_without_the_heat_path(
    kind: str, key: str, tmp_path: Path
) -> None:
    result = result_of(tmp_path, without(STAGES[kind], key))
    assert result.verdict is Status.UNPROVEN
    for finding in result.findings:
        if finding.limit in ("safe-area", "dissipation", "junction-temperature"):
            assert finding.status[0] == Status.UNPROVEN, (finding.limit, finding.duty)
            assert any(key in path for path in finding.missing(0)), (finding.limit, finding.missing(0))


def test_a_device_without_safe_area_curves_is_unproven(tmp_path: Path) -> None:
    bare = DEVICE[: DEVICE.index("[[soa]]")] + DEVICE[DEVICE.index("[typical]") :]
    result = result_of(tmp_path, HELD, bare)
    assert result.verdict is Status.UNPROVEN
    assert all(f.status[0] == Status.UNPROVEN for f in result.findings if f.limit == "safe-area")


def test_a_device_without_a_dc_curve_is_unproven_where_it_conducts_for_ever(tmp_path: Path) -> None:
    start = DEVICE.index("[[soa]]")
    pulses_only = DEVICE[:start] + DEVICE[DEVICE.index("[[soa]]", start + 5) :]
    for kind in ("held", "push-pull"):
        result = result_of(tmp_path, STAGES[kind], pulses_only)
        assert result.verdict is Status.UNPROVEN
        assert "no-dc-curve" in {caution.id for caution in result.cautions}


def test_parallel_devices_without_a_stated_share_are_unproven(tmp_path: Path) -> None:
    stage = put(HELD, device='"TEST-NPN"\nparallel = 2', R_C='"16 ohm"')
    result = result_of(tmp_path, stage)
    assert result.verdict is Status.UNPROVEN
    assert all("stage.worst_share" in f.missing(0) for f in result.findings if f.limit == "current")
    shared = result_of(tmp_path, put(stage, device='"TEST-NPN"\nworst_share = "55 %"'))
    assert shared.verdict is Status.WITHIN


def test_worst_corner_decides_and_nominal_stands_beside_it(tmp_path: Path) -> None:
    stage = put(HELD, T_ambient='{ value = "40 degC", max = "120 degC", min = "0 degC" }')
    result = result_of(tmp_path, stage)
    assert result.spread
    hot = next(k for k, f in enumerate(result.findings) if f.limit == "junction-temperature")
    assert result.findings[hot].status[0] == Status.EXCEEDS
    assert result.nominal[hot] < 0.8
    assert not check(stage_of(tmp_path, HELD)).spread


def test_ten_spreads_are_worked_out_and_eleven_are_refused(tmp_path: Path) -> None:
    ten = put(
        HELD,
        V_CC='{ value = "24 V", tol = "1 %" }',
        R_C='{ value = "8 ohm", tol = "1 %" }',
        R_E='{ value = "0.5 ohm", tol = "1 %" }',
        I_CQ='{ value = "1.4 A", tol = "1 %" }',
        interface='{ value = "0.4 K/W", tol = "1 %" }',
        heatsink='{ R_th = { value = "1.2 K/W", tol = "1 %" } }\nextra_heat = { value = "1 W", tol = "1 %" }',
        T_ambient='{ value = "40 degC", max = "41 degC", min = "39 degC" }\n'
        'R_th_enclosure = { value = "0.05 K/W", tol = "1 %" }\nextra_box_heat = { value = "1 W", tol = "1 %" }',
    )
    stage = stage_of(tmp_path, ten)
    assert len(stage.spreads) == 10
    assert check(stage).verdict is Status.WITHIN
    (tmp_path / "stage.toml").write_text(ten + '[derating]\nvoltage = { value = "80 %", tol = "1 %" }\n'
                                         'current = { value = "80 %", tol = "1 %" }\n')  # fmt: skip
    with pytest.raises(InputError, match="uncertainties"):
        check(read_stage(tmp_path / "stage.toml"))


def test_a_typical_interface_leaves_temperatures_at_best_marginal(tmp_path: Path) -> None:
    result = result_of(tmp_path, put(HELD, interface='{ value = "0.4 K/W", grade = "typical" }'))
    assert result.verdict is Status.MARGINAL
    for f in result.findings:
        hot = f.limit in ("safe-area", "dissipation", "junction-temperature")
        assert f.status[0] == (Status.MARGINAL if hot else Status.WITHIN), f.limit


def test_a_corner_without_a_number_still_shows_the_corner_that_is_worst(tmp_path: Path) -> None:
    stage = put(HELD, V_CC='{ value = "100 V", min = "90 V", max = "110 V" }', heatsink='"40 K/W"')
    result = result_of(tmp_path, stage)
    assert result.duties[-1].V_peak is not None
    assert result.duties[-1].V_peak.at(0) == 110.0


REVERSED = {
    "all the time": '[["0 s", "40 V", "-1 A"], ["1 s", "40 V", "-1 A"]]',
    "half of the time": '[["0 s", "40 V", "1 A"], ["1 s", "40 V", "1 A"], ["1 s", "40 V", "-1 A"], '
    '["2 s", "40 V", "-1 A"]]',
    "the other way": '[["0 s", "-40 V", "1 A"], ["1 s", "-40 V", "1 A"]]',
}


@pytest.mark.parametrize("points", REVERSED.values(), ids=REVERSED.keys())
def test_a_device_that_would_deliver_power_is_unproven(points: str, tmp_path: Path) -> None:
    result = result_of(tmp_path, put(PROFILE, points=points))
    assert result.verdict is Status.UNPROVEN
    assert all(f.status[0] != Status.WITHIN for f in result.findings)


def test_a_spread_in_the_device_file_is_not_passed_over_in_silence(tmp_path: Path) -> None:
    result = result_of(tmp_path, HELD, put(DEVICE, V_CEO='{ value = "160 V", min = "140 V" }'))
    assert any(c.id == "device-spread" and "max.V_CEO" in c.text for c in result.cautions)


def test_what_is_stated_for_the_papers_is_printed(tmp_path: Path) -> None:
    result = result_of(tmp_path, put(HELD, title='"test"\ndrawing = "GV-014"\nauthor = "A. N. Other"'))
    assert result.stage.papers == (("author", "A. N. Other"), ("drawing", "GV-014"))
