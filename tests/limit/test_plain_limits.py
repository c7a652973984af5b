"""voltage, current, peak-current, dissipation, junction-temperature: rules, published values, reasons."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.device.ratings import ThermalData
from soacheck.limit import current, dissipation, junction_temperature, peak_current, voltage
from soacheck.result import Status
from soacheck.table import Missing
from tests.limit.build import ZERO_C, device, held, judged, once, only, pulse, repeated, rules, said, status, value

SWITCH = device("n-mosfet", I_max=value("I_D", 61.8, "A"), T_j=value("T_j", 175 + ZERO_C, "degC"),
                P_tot=value("P_tot", 105, "W"), I_S=value("I_S", 10, "A"),
                thermal=ThermalData(R_th_jc=value("R_th_jc", 150 / 105, "K/W")))  # fmt: skip


# voltage


def test_the_open_base_rating_counts() -> None:
    part = device(V_CBO=value("V_CBO", 300, "V"), V_CER=value("V_CER", 200, "V"), R_BE=value("R_BE", 100, "ohm"))
    finding = only(voltage.find(judged(repeated([0, 1], [170, 20], [0, 1]), part)))
    assert status(finding) is Status.EXCEEDS
    assert finding.utilisation[0] == pytest.approx(170 / 160)
    assert finding.where.v[0] == 170


def test_a_stated_base_resistance_opens_its_rating_while_only_leakage_flows() -> None:
    part = device(V_CER=value("V_CER", 200, "V"), R_BE=value("R_BE", 100, "ohm"))
    off = repeated([0, 1, 1, 2], [190, 190, 20, 20], [0, 0, 1, 1])
    on = repeated([0, 1, 1, 2], [190, 190, 20, 20], [1, 1, 1, 1])
    how = {"termination": "resistor", "R_BE": value("R_BE", 47, "ohm")}
    assert only(voltage.find(judged(off, part, **how))).utilisation[0] == pytest.approx(190 / 200)
    assert only(voltage.find(judged(on, part, **how))).utilisation[0] == pytest.approx(190 / 160)
    loose = {"termination": "resistor", "R_BE": value("R_BE", 220, "ohm")}
    assert only(voltage.find(judged(off, part, **loose))).utilisation[0] == pytest.approx(190 / 160)


def test_a_reverse_driven_base_opens_V_CEV() -> None:
    part = device(V_CEV=value("V_CEV", 250, "V"))
    off = repeated([0, 1, 1, 2], [240, 240, 20, 20], [0, 0, 1, 1])
    assert only(voltage.find(judged(off, part, termination="reverse"))).utilisation[0] == pytest.approx(240 / 250)
    assert status(only(voltage.find(judged(off, part)))) is Status.EXCEEDS


def test_a_bipolar_transistor_run_backwards_is_unproven() -> None:
    finding = only(voltage.find(judged(repeated([0, 1], [-2, 20], [0, 1]))))
    assert status(finding) is Status.UNPROVEN
    assert "negative of the emitter" in said(finding)
    assert status(only(voltage.find(judged(repeated([0, 1], [-2, 20], [-1, 1]), SWITCH)))) is Status.WITHIN


def test_own_voltage_factor_and_margin_count() -> None:
    tight = rules(voltage=value("voltage", 0.8), marginal_from=value("marginal_from", 1.0))
    finding = only(voltage.find(judged(held(120, 0.1), rule=tight)))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(128)
    assert finding.allowed.formula == "k_V * V_CEO"
    assert status(finding) is Status.WITHIN
    assert status(only(voltage.find(judged(held(130, 0.1))))) is Status.MARGINAL


# current


@pytest.mark.parametrize(("T_case", "allowed"), [(75, 50.4595), (100, 43.6992), (125, 35.6803), (25, 61.8), (0, 61.8)])
def test_a_mosfet_current_falls_with_the_root_of_the_temperature_left(T_case: float, allowed: float) -> None:
    # Published: AN11158 rev. 4 (2014): I_D 61.8 A at 25 degC, T_j 175 degC, 50 A at 75 degC; six digits by arithmetic.
    finding = only(current.find(judged(held(1.0, 10.0), SWITCH, T_case=T_case)))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(allowed, rel=2e-6)
    assert finding.utilisation[0] == pytest.approx(10 / allowed, rel=2e-6)


def test_the_rms_value_of_a_period_is_exact() -> None:
    # Analytic: a triangle from 0 to 12 A has 12/sqrt(3) rms.
    finding = only(current.find(judged(repeated([0, 0.5e-3, 1e-3], [20, 20, 20], [0, 12, 0]))))
    assert finding.applied is not None
    assert finding.applied.at(0) == pytest.approx(12 / 3**0.5, rel=1e-12)
    assert finding.utilisation[0] == pytest.approx(12 / 3**0.5 / 15)


def test_a_level_held_longer_than_the_peak_pulse_counts_as_continuous() -> None:
    long = only(current.find(judged(repeated(*pulse(20, 18, 5e-3, total=1.0)))))
    short = only(current.find(judged(repeated(*pulse(20, 18, 0.9e-3, total=1.0)))))
    assert status(long) is Status.EXCEEDS
    assert long.utilisation[0] == pytest.approx(18 / 15)
    assert status(short) is Status.WITHIN


def test_one_shot_has_no_rms() -> None:
    finding = only(current.find(judged(once(*pulse(20, 18, 0.9e-3)))))
    assert finding.utilisation[0] < 1e-3
    staircase = only(current.find(judged(once([0, 0, 5e-3, 5e-3, 5.5e-3], [20] * 5, [0, 4, 4, 18, 18]))))
    assert staircase.applied is not None
    assert staircase.applied.at(0) == pytest.approx(4.0, rel=1e-6)


def test_without_a_peak_rating_every_level_counts() -> None:
    part = device(I_peak=None, I_peak_pulse=None)
    locus = repeated(*pulse(20, 18, 0.01e-3, total=1.0))
    assert status(only(current.find(judged(locus, part)))) is Status.EXCEEDS
    assert status(only(peak_current.find(judged(locus, part)))) is Status.EXCEEDS


def test_a_peak_rating_without_its_pulse_width_proves_nothing_above_the_continuous_one() -> None:
    part = device(I_peak_pulse=None)
    for limit in (current, peak_current):
        finding = only(limit.find(judged(repeated(*pulse(20, 18, 0.01e-3, total=1.0)), part)))
        assert status(finding) is Status.UNPROVEN
        assert finding.missing(0) == ("max.I_CM_pulse",)
        assert status(only(limit.find(judged(repeated(*pulse(20, 9, 0.01e-3, total=1.0)), part)))) is Status.WITHIN


def test_an_excursion_may_reach_the_peak_rating_for_its_pulse_width_only() -> None:
    short = only(peak_current.find(judged(once(*pulse(20, 24, 1e-3)))))
    long = only(peak_current.find(judged(once(*pulse(20, 24, 1.1e-3)))))
    assert short.utilisation[0] == pytest.approx(24 / 25)
    assert long.utilisation[0] == pytest.approx(24 / 15)
    assert "continuous rating counts" in said(long)
    held_point = only(peak_current.find(judged(held(10, 14))))
    assert held_point.utilisation[0] == pytest.approx(14 / 15)


def test_the_body_diode_has_its_own_rating() -> None:
    both = repeated([0, 1, 1, 2], [-1, -1, 10, 10], [-9, -9, 2, 2])
    finding = only(current.find(judged(both, SWITCH)))
    assert "body diode governs" in said(finding)
    assert finding.utilisation[0] == pytest.approx(9 / 10, rel=1e-6)
    assert finding.where.i[0] == -9
    bare = device("n-mosfet")
    for limit in (current, peak_current):
        unknown = only(limit.find(judged(both, bare)))
        assert status(unknown) is Status.UNPROVEN
        assert unknown.missing(0) == ("max.I_S",)


def test_a_case_without_diode_current_keeps_its_forward_figures() -> None:
    i = np.array([[[2.0, 2.0]], [[-9.0, -9.0]]])
    locus = repeated([0, 1], np.array([[[10.0, 10.0]], [[-1.0, -1.0]]]), i)
    finding = only(current.find(judged(locus, SWITCH, cases=2)))
    alone = only(current.find(judged(repeated([0, 1], [10, 10], [2, 2]), SWITCH)))
    assert finding.utilisation[0] == alone.utilisation[0]
    assert finding.utilisation[1] == pytest.approx(0.9)
    assert finding.allowed is not None
    assert finding.allowed.value == pytest.approx([61.8, 10.0])


# dissipation


@pytest.mark.parametrize(("T_case", "allowed"), [(25, 105), (75, 70), (100, 52.5), (125, 35), (-10, 105)])
def test_dissipation_falls_straight_to_the_junction_limit(T_case: float, allowed: float) -> None:
    # Published: AN11158 rev. 4 (2014): 105 W, T_j 175 degC: 70 W at 75 degC.
    finding = only(dissipation.find(judged(held(10, 2), SWITCH, T_case=T_case)))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(allowed, rel=1e-9)
    assert finding.utilisation[0] == pytest.approx(20 / allowed)


def test_military_derating_lines_are_met() -> None:
    # Published: MIL-PRF-19500/393D: 15 W at a case of 100 degC, T_j 200 degC, 150 mW/K: 7.5 W at 150 degC.
    part = device(P_tot=value("P_tot", 15, "W"), T_case=value("T_case", 100 + ZERO_C, "degC"),
                  T_j=value("T_j", 200 + ZERO_C, "degC"),
                  thermal=ThermalData(R_th_jc=value("R_th_jc", 1 / 0.15, "K/W")))  # fmt: skip
    finding = only(dissipation.find(judged(held(10, 0.5), part, T_case=150)))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(7.5, rel=1e-9)


def test_one_shots_have_no_mean_dissipation() -> None:
    assert dissipation.find(judged(once(*pulse(20, 2, 1e-3)))) == ()


def test_a_case_at_the_limit_allows_no_dissipation() -> None:
    finding = only(dissipation.find(judged(held(10, 1), T_case=150)))
    assert status(finding) is Status.EXCEEDS
    assert np.isnan(finding.utilisation[0])


def test_more_than_P_tot_exceeds_whatever_the_temperature() -> None:
    gone = (Missing(key="heat_path.heatsink", where="the drawing"),)
    some = only(dissipation.find(judged(held(10, 1), T_case=np.nan, missing=gone)))
    much = only(dissipation.find(judged(held(20, 10), T_case=np.nan, missing=gone)))
    assert status(some) is Status.UNPROVEN
    assert some.missing(0) == ("heat_path.heatsink",)
    assert status(much) is Status.EXCEEDS


# junction-temperature


def test_junction_temperature_counts_from_the_ambient() -> None:
    finding = only(junction_temperature.find(judged(held(10, 2), T_case=80, T_j=120, T_ambient=40)))
    assert finding.utilisation[0] == pytest.approx(80 / 110)
    assert status(finding) is Status.WITHIN


@pytest.mark.parametrize(
    ("more", "limit"), [({"T_j_max": 125.0}, 125), ({"T_j_below_max": 40.0}, 110),
                        ({"T_j_max": 125.0, "T_j_below_max": 40.0}, 110), ({"T_j_max": 170.0}, 150), ({}, 150)]
)  # fmt: skip
def test_the_lowest_junction_limit_counts(more: dict[str, float], limit: float) -> None:
    own = {
        "T_j_max": value("T_j_max", more["T_j_max"] + ZERO_C, "degC") if "T_j_max" in more else None,
        "T_j_below_max": value("T_j_below_max", more["T_j_below_max"], "K") if "T_j_below_max" in more else None,
    }
    finding = only(junction_temperature.find(judged(held(10, 2), T_j=90, rule=rules(**own))))
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(limit + ZERO_C)


def test_without_a_transient_curve_the_bound_allows_and_the_mean_forbids() -> None:
    def ask(peak: float, share: float) -> object:
        locus = repeated([0, share, share, 1], [20, 20, 20, 20], [peak / 20, peak / 20, 0, 0])
        return only(junction_temperature.find(judged(locus, T_case=80)))

    inside, between, outside = ask(60, 0.5), ask(120, 0.2), ask(120, 0.95)
    assert status(inside) is Status.MARGINAL  # type: ignore[arg-type]  # a finding
    assert inside.applied.formula == "T_case + R_th_jc * P_peak"  # type: ignore[attr-defined]  # a finding
    assert status(between) is Status.UNPROVEN  # type: ignore[arg-type]  # a finding
    assert between.missing(0) == ("thermal.Z_th_jc",)  # type: ignore[attr-defined]  # a finding
    assert status(outside) is Status.EXCEEDS  # type: ignore[arg-type]  # a finding
    assert outside.utilisation[0] == pytest.approx((80 + 120 * 0.95 * 125 / 150 - 25) / 125)  # type: ignore[attr-defined]  # a finding


def test_an_ambient_at_the_limit_exceeds_without_a_number() -> None:
    finding = only(junction_temperature.find(judged(held(10, 0.1), T_j=151, T_ambient=150)))
    assert status(finding) is Status.EXCEEDS
    assert np.isnan(finding.utilisation[0])


# all


@given(st.floats(1.0, 5.0), st.floats(0.1, 12.0), st.floats(1e-4, 0.5))
def test_more_of_anything_is_never_better(factor: float, amps: float, width: float) -> None:
    less = judged(repeated(*pulse(30, amps, width, total=1.0)), SWITCH, T_case=60, T_j=90)
    more = judged(repeated(*pulse(30 * factor, amps * factor, width, total=1.0)), SWITCH, T_case=60, T_j=90)
    for limit in (voltage, current, peak_current, dissipation):
        low, high = only(limit.find(less)), only(limit.find(more))
        assert high.utilisation[0] >= low.utilisation[0] * (1 - 1e-9)
        assert status(high) >= status(low)


def test_typical_ratings_are_at_best_marginal() -> None:
    part = device(V_max=value("V_CEO", 160, "V", "typical"), I_max=value("I_C", 15, "A", "typical"),
                  P_tot=value("P_tot", 150, "W", "typical"))  # fmt: skip
    for limit in (voltage, current, peak_current, dissipation):
        finding = only(limit.find(judged(held(10, 1), part)))
        assert status(finding) is Status.MARGINAL
        assert "typical" in said(finding)
