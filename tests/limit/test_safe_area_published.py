"""safe-area: published values and analytic limits."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaDerating, ThermalData
from soacheck.limit import safe_area
from soacheck.result import Status
from tests.limit.build import (
    PULSES,
    ZERO_C,
    curve,
    device,
    held,
    judged,
    once,
    only,
    pulse,
    repeated,
    rules,
    said,
    status,
    value,
)

# A hypothetical part: I_C 20 A, R_th_jc 0.7 K/W, T_j 200 degC, V_CEO 140 V, second breakdown 5 A at 50 V and 1 A at
# 100 V (slope -2.32193), second-breakdown derating 0.4 %/K. Two derating lines, the lower counts: application notes on
# power transistor safe areas of the 1970s; the figures are our own arithmetic.
BREAKDOWN = curve("dc", np.inf, (1, 20), (12.5, 20), (50, 5), (100, 1), (140, 1.4**-2.321928))
PART = device(
    soa=(BREAKDOWN,),
    V_max=value("V_CEO", 140, "V"),
    I_max=value("I_C", 20, "A"),
    T_j=value("T_j", 200 + ZERO_C, "degC"),
    P_tot=value("P_tot", 250, "W"),
    thermal=ThermalData(R_th_jc=value("R_th_jc", 0.7, "K/W")),
    soa_derating=SafeAreaDerating(
        convention="own-curve", stated=True, points=np.array([[25 + ZERO_C, 1.0], [200 + ZERO_C, 0.3]])
    ),
)


@pytest.mark.parametrize(
    ("v", "T_case", "allowed"),
    [(60, 25, 3.27429), (60, 100, 2.29200), (80, 100, 1.17521), (40, 100, 3.57143)],
)
def test_second_breakdown_and_dissipation_derate_on_their_own_lines(v: float, T_case: float, allowed: float) -> None:
    finding = only(safe_area.find(judged(held(v, 1.0), PART, T_case=T_case)))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(allowed, rel=2e-6)
    assert finding.utilisation[0] == pytest.approx(1.0 / allowed, rel=2e-6)


def test_a_flat_at_the_current_rating_is_left_to_the_current_limits() -> None:
    finding = only(safe_area.find(judged(held(10, 19.0), PART)))
    assert finding.utilisation[0] == 0.0
    assert "current limits judge" in said(finding)
    # In words and figures: none of the current is judged here, of the rating that the chart allows.
    assert finding.applied is not None
    assert finding.allowed is not None
    assert (finding.applied.at(0), finding.allowed.at(0)) == (0.0, 20.0)


@pytest.mark.parametrize("T_case", [25, 50, 75, 100, 125])
def test_like_dissipation_takes_the_thermal_factor_off_the_whole_curve(T_case: float) -> None:
    # Factor (T_j_max - T)/(T_j_max - T_ref): 0.8, 0.6, 0.4 at 50, 75, 100 degC of 150 (application notes; arithmetic).
    finding = only(safe_area.find(judged(held(60, 0.5), device(soa=(curve("dc", np.inf, (50, 3), (160, 0.2)),)),
                                         T_case=T_case)))  # fmt: skip
    slope = np.log(3 / 0.2) / np.log(160 / 50)
    printed = 3 * (60 / 50) ** -slope
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(printed * (150 - T_case) / 125, rel=1e-9)


def test_a_mosfet_keeps_the_current_and_gives_up_voltage() -> None:
    # Published: "Understanding power MOSFET data sheet parameters", AN11158 rev. 4 (2014), 3.1.2.2: 30 A for 1 ms is
    # allowed at 20 V and 25 degC; at a mounting base of 100 degC (T_j 175 degC) 10 V is allowed and 15 V is not.
    part = device(
        "n-mosfet",
        soa=(curve("1 ms", 1e-3, (1, 200), (3, 200), (20, 30), (40, 15)),),
        I_max=value("I_D", 61.8, "A"),
        I_peak=value("I_DM", 247, "A"),
        T_j=value("T_j", 175 + ZERO_C, "degC"),
        V_max=value("V_DSS", 55, "V"),
        P_tot=value("P_tot", 105, "W"),
        thermal=ThermalData(R_th_jc=value("R_th_jc", 150 / 105, "K/W")),
    )
    at_10 = only(safe_area.find(judged(once(*pulse(10, 30, 1e-3)), part, T_case=100, T_j=120)))
    at_15 = only(safe_area.find(judged(once(*pulse(15, 30, 1e-3)), part, T_case=100, T_j=120)))
    assert at_10.utilisation[0] == pytest.approx(1.0, rel=1e-6)
    assert status(at_15) is Status.EXCEEDS


def test_interpolation_is_straight_on_log_log_paper() -> None:
    # Arithmetic: 40 ms between 3 A at 10 ms and 1.2 A at 100 ms is 1.73 A (three digits).
    flat = (
        curve("10 ms", 1e-2, (1, 3.0), (100, 3.0)),
        curve("100 ms", 1e-1, (1, 1.2), (100, 1.2)),
        curve("dc", np.inf, (1, 0.4), (100, 0.4)),
    )
    part = device(soa=flat, soa_derating=SafeAreaDerating(convention="held"))
    shot = once(*pulse(30, 1.5, 40e-3))
    between = only(safe_area.find(judged(shot, part, rule=rules(pulse_between="log-log"))))
    longer = only(safe_area.find(judged(shot, part)))
    residence = {node.symbol: node for node in between.allowed.walk()}["u_residence"]  # type: ignore[union-attr]  # stated
    assert 1.5 / residence.at(0) == pytest.approx(1.73, abs=0.005)
    assert longer.allowed is not None
    assert longer.allowed.at(0) == pytest.approx(1.2, rel=1e-6)


def test_a_pulse_of_a_printed_width_may_use_its_own_curve_and_a_longer_one_may_not() -> None:
    # By hand: at 50 V the 10 ms curve allows 10 A, the 100 ms curve 6 A.
    for width, allowed in ((9e-3, 10.0), (10e-3, 10.0), (10.1e-3, 6.0), (100e-3, 6.0), (101e-3, 3.0)):
        finding = only(safe_area.find(judged(once(*pulse(50, 2.0, width)))))
        assert finding.allowed is not None
        assert finding.allowed.at(0) == pytest.approx(allowed, rel=0.02), width


def test_a_curve_ends_where_it_ends() -> None:
    short = device(soa=(curve("dc", np.inf, (1, 15), (10, 15), (100, 1.5)),))
    finding = only(safe_area.find(judged(held([50, 120], [1.0, 0.1]), short)))
    assert status(finding) is Status.UNPROVEN
    assert "100 V" in said(finding)
    assert finding.missing(0) == ("soa[dc]",)
    leaking = only(safe_area.find(judged(held([50, 120], [1.0, 0.01]), short)))
    assert status(leaking) is Status.WITHIN


def test_the_lower_reading_is_used() -> None:
    plain = only(safe_area.find(judged(held(80, 1.0), device(soa=(curve("dc", np.inf, (10, 15), (160, 0.9)),)))))
    less = only(safe_area.find(judged(held(80, 1.0), device(soa=(curve("dc", np.inf, (10, 15), (160, 0.9),
                                                                       reading=0.1),)))))  # fmt: skip
    assert less.utilisation[0] == pytest.approx(plain.utilisation[0] / 0.9, rel=1e-9)


def test_a_flat_that_is_read_lower_is_a_curve_and_no_rating() -> None:
    # By hand: a flat of 15 A = I_C read 10 % lower is 13.5 A.
    lowered = device(soa=(curve("dc", np.inf, (5, 15), (10, 15), (50, 3), (160, 0.2), reading=0.1),))
    finding = only(safe_area.find(judged(repeated([0, 1], [6, 6], [14.5, 14.5]), lowered)))
    assert finding.utilisation[0] == pytest.approx(14.5 / 13.5, rel=1e-9)
    assert status(finding) is Status.EXCEEDS


def test_own_safe_area_factor_takes_its_share() -> None:
    half = rules(safe_area=value("safe_area", 0.5))
    whole = only(safe_area.find(judged(held(80, 0.5))))
    derated = only(safe_area.find(judged(held(80, 0.5), rule=half)))
    assert derated.utilisation[0] == pytest.approx(2 * whole.utilisation[0], rel=1e-9)
    assert derated.allowed is not None
    assert whole.allowed is not None
    assert derated.allowed.at(0) == pytest.approx(whole.allowed.at(0) / 2, rel=1e-9)


def test_the_sheet_redoes_a_held_point_by_formula() -> None:
    finding = only(safe_area.find(judged(held(60, 0.5), PART, T_case=100)))
    last = finding.trace[-1]
    assert last.formula.startswith("k_SOA * min(")
    assert finding.allowed is not None
    assert last.at(0) == pytest.approx(finding.allowed.at(0), rel=1e-9)


def test_a_locus_under_the_dc_curve_needs_no_pulse_curve() -> None:
    finding = only(safe_area.find(judged(repeated(*pulse(50, 2.9, 2e-3, total=3e-3)))))
    assert status(finding) in (Status.WITHIN, Status.MARGINAL)
    assert finding.utilisation[0] <= 2.9 / 3.0


def test_pulse_curves_hold_for_small_duty_factors() -> None:
    # 2 ms at 50 V, 8 A: x = 8/3 above dc. In 20 ms the duty factor is 10 %, in 16 ms more.
    sparse = only(safe_area.find(judged(repeated(*pulse(50, 7, 2e-3, total=20e-3)))))
    dense = only(safe_area.find(judged(repeated(*pulse(50, 7, 2e-3, total=16e-3)))))
    assert "duty factor" not in said(sparse)
    assert status(dense) is Status.MARGINAL
    assert "duty factor of more than 10 %" in said(dense)
    under = only(safe_area.find(judged(repeated(*pulse(50, 2, 2e-3, total=3e-3)))))
    assert "duty factor" not in said(under)


def test_curves_for_repeated_pulses_count_up_to_their_own_duty_factor() -> None:
    # A repeated 10 ms curve of duty factor 0.3 beside the dc curve; one shot may use it, too.
    dense_curve = curve("10 ms", 1e-2, (1, 25), (20, 25), (160, 3.125), single=False, duty_factor=0.3)
    part = device(soa=(dense_curve, PULSES[2], curve("dc", np.inf, (1, 15), (10, 15), (160, 0.9375))))
    below = only(safe_area.find(judged(repeated(*pulse(50, 4, 1e-3, total=5e-3)), part)))
    above = only(safe_area.find(judged(repeated(*pulse(50, 4, 1e-3, total=2.5e-3)), part)))
    assert below.utilisation[0] < above.utilisation[0]
