"""One point without a stage file."""

from __future__ import annotations

import pint
import pytest

from soacheck.errors import InputError
from soacheck.jobs.point import point
from soacheck.quantity import as_pint
from soacheck.result import Status

NPN = "EXAMPLE-NPN-160"


def test_a_pulse_on_a_held_case_rises_by_power_times_the_transient_resistance() -> None:
    # 80 W for 10 ms at Z_th(10 ms) = 0.25 K/W of the rating file: 20 K above 80 degC; 6.25 A is the least of the
    # dissipation line (150 - 80)/(0.25 * 40) = 7 A and the scaled 10 ms curve.
    result = point(NPN, "40 V", "2 A", pulse="10 ms", case="80 degC")
    T_j = result.duties[0].T_j_peak
    assert T_j is not None
    assert T_j.at(0) - 273.15 == pytest.approx(100, abs=0.3)
    assert result.verdict is Status.WITHIN


def test_a_held_point_is_judged_by_the_dc_curve_and_the_whole_heat_path() -> None:
    # 20 W over 1 + 0.3 + 0.83 K/W above 30 degC.
    result = point(NPN, "40 V", "0.5 A", heatsink="1 K/W", interface="0.3 K/W", ambient="30 degC")
    T_j = result.duties[0].T_j_mean
    assert T_j is not None
    assert T_j.at(0) - 273.15 == pytest.approx(30 + 20 * 2.13, abs=1e-6)


def test_without_a_heat_path_nothing_is_within() -> None:
    assert point(NPN, "40 V", "0.5 A").verdict is Status.UNPROVEN


def test_pint_quantities_go_in_and_come_out() -> None:
    unit = pint.UnitRegistry()
    asked = point(NPN, unit.Quantity(40, "V"), unit.Quantity(500, "mA"), case=unit.Quantity(80, "degC"))
    same = point(NPN, "40 V", "0.5 A", case="80 degC")
    assert [f.utilisation[0] for f in asked.findings] == [f.utilisation[0] for f in same.findings]
    P = asked.duties[0].P_mean
    assert P is not None
    assert as_pint(P.at(0), "power").to("W").magnitude == pytest.approx(20)


def test_every_wrong_option_is_named_at_once() -> None:
    with pytest.raises(InputError) as caught:
        point(NPN, "40", "2 mm", case="80 C", heatsink="1 K/W")
    assert [problem.key for problem in caught.value.problems] == ["V", "I", "--case", "--heatsink"]


def test_what_a_point_lacks_is_named_as_the_option_that_states_it() -> None:
    result = point(NPN, "40 V", "0.5 A", ambient="40 degC", heatsink="1 K/W")
    missing = {key for found in result.findings for key in found.missing(0)}
    assert missing == {"--interface"}
    assert not any("heat_path" in reason.text for found in result.findings for reason in found.reasons)


@pytest.mark.parametrize(
    ("device", "more", "key"),
    [
        ("NO-SUCH-DEVICE", {}, "DEVICE"),
        (NPN, {"heatsink": "1e9 K/W"}, "--heatsink"),
        (NPN, {"interface": "1e9 K/W"}, "--interface"),
        (NPN, {"ambient": "500 degC"}, "--ambient"),
    ],
)
def test_a_value_that_cannot_be_is_named_as_it_was_given(device: str, more: dict[str, str], key: str) -> None:
    with pytest.raises(InputError) as caught:
        point(device, "40 V", "0.5 A", **more)
    assert [(one.key, one.file, one.line) for one in caught.value.problems] == [(key, "", None)]
