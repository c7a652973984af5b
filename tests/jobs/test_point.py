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
