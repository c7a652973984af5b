"""safe-area: turn-off with a reverse-driven base or gate."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaCurve
from soacheck.duty import Drive
from soacheck.limit import safe_area
from soacheck.locus import Locus
from soacheck.result import Finding, Status
from tests.limit.build import DC, PULSES, ZERO_C, curve, device, judged, only, repeated, said, status, value


def area(**more: Any) -> SafeAreaCurve:
    more.setdefault("V_BE_off", value("V_BE_off", 5, "V"))
    more.setdefault("T_j_valid", value("T_j_valid", 125 + ZERO_C, "degC"))
    return curve("reverse", np.inf, (100, 15), (160, 4), bias="reverse", **more)


def locus(i_off: float = 6.0, v_off: float = 120.0, marked: bool = True) -> Locus:
    """On at 0.5 V and 10 A; in 1 us over (v_off, i_off) to off."""
    t = [0, 1e-3, 1e-3 + 0.5e-6, 1e-3 + 1e-6, 2e-3]
    mark = np.array([False, True, True, True, False]) if marked else None
    return repeated(t, [0.5, 0.5, v_off, v_off, v_off], [10, 10, i_off, 0, 0], turn_off=mark)


DRIVE = Drive(V_off=value("V_BE_off", 4, "V"))


def ask(one: Locus, *areas: SafeAreaCurve, drive: Drive | None = DRIVE, T_j: float = 100.0) -> Finding:
    return only(safe_area.find(judged(one, device(soa=(*PULSES, DC, *areas)), drive=drive, T_j=T_j)))


def test_marked_instants_are_judged_by_the_reverse_bias_area() -> None:
    finding = ask(locus(), area())
    slope = np.log(15 / 4) / np.log(160 / 100)
    allowed = 15 * (120 / 100) ** -slope
    assert finding.utilisation[0] == pytest.approx(6 / allowed, rel=1e-6)
    assert "reverse-bias area at turn-off governs" in said(finding)
    assert status(ask(locus(i_off=12.0), area())) is Status.EXCEEDS


def test_the_same_instants_unmarked_are_judged_forward() -> None:
    forward = ask(locus(marked=False), area())
    assert "turn-off" not in said(forward)
    assert forward.utilisation[0] != pytest.approx(ask(locus(), area()).utilisation[0])


def test_without_a_reverse_bias_area_turn_off_is_unproven() -> None:
    finding = ask(locus())
    assert status(finding) is Status.UNPROVEN
    assert finding.missing(0) == ("soa[reverse]",)
    assert 1e-3 <= finding.where.t[0] <= 1e-3 + 1e-6
    assert finding.where.v[0] > 100


def test_points_of_the_marked_turn_off_are_not_said_to_be_off_or_on() -> None:
    text = said(ask(locus(), area()))
    assert "Every point is off" not in text
    assert "Outside the marked turn-off every point is off, on" in text
    silent = locus()
    silent = Locus(t=silent.t, v=silent.v, i=silent.i, use=silent.use, turn_off=np.zeros(5, dtype=np.bool_))
    assert "Outside the marked turn-off" not in said(ask(silent, area()))


@pytest.mark.parametrize(
    ("more", "drive", "T_j", "words"),
    [
        ({"V_BE_off": None}, DRIVE, 100, "without its drive conditions"),
        ({}, None, 100, "does not state its own"),
        ({}, Drive(V_off=value("V_BE_off", 6, "V")), 100, "V_BE_off is larger"),
        ({}, DRIVE, 130, "temperature that the reverse-bias area holds for"),
        ({"T_j_valid": None}, DRIVE, 100, "not stated"),
        (
            {"V_BE_off": None, "R_G": value("R_G", 10, "ohm")},
            Drive(R_G=value("R_G", 4.7, "ohm")),
            100,
            "R_G is smaller",
        ),
        ({"V_BE_off": None, "I_B2": value("I_B2", 1, "A")}, Drive(I_B2=value("I_B2", 2, "A")), 100, "I_B2 is larger"),
    ],
)
def test_conditions_that_do_not_hold_leave_it_unproven(
    more: dict[str, Any], drive: Drive | None, T_j: float, words: str
) -> None:
    finding = ask(locus(), area(**more), drive=drive, T_j=T_j)
    assert status(finding) is Status.UNPROVEN
    assert words in said(finding)


def test_a_gate_driven_device_is_asked_for_its_own_keys() -> None:
    stated, silent = area(), area(V_BE_off=None)
    for curve_of, key in ((stated, "load.V_GS_off"), (silent, "soa[reverse].R_G")):
        part = device("n-igbt", soa=(*PULSES, DC, curve_of))
        finding = only(safe_area.find(judged(locus(), part, drive=Drive(), T_j=100)))
        assert status(finding) is Status.UNPROVEN
        assert finding.missing(0) == (key,)
        assert "V_BE_off" not in said(finding)


def test_the_curve_whose_conditions_hold_counts() -> None:
    strict = area(V_BE_off=value("V_BE_off", 2, "V"))
    assert status(ask(locus(), strict)) is Status.UNPROVEN
    assert ask(locus(), strict, area()).utilisation[0] == ask(locus(), area()).utilisation[0]


def test_current_beyond_the_end_of_the_area_is_unproven() -> None:
    finding = ask(locus(v_off=165.0), area())
    assert status(finding) is Status.UNPROVEN
    assert "160 V" in said(finding)


def test_the_area_is_not_scaled_with_temperature() -> None:
    assert ask(locus(), area(), T_j=120).utilisation[0] == ask(locus(), area(), T_j=60).utilisation[0]
