"""voltage, current, peak-current, dissipation, junction-temperature: rules, published values, reasons."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.device.ratings import Device, ThermalData
from soacheck.evaluate import _signed
from soacheck.limit import current, dissipation, junction_temperature, peak_current, voltage
from soacheck.limit.judged import Judged
from soacheck.limit.pulses import pulses
from soacheck.locus import Locus
from soacheck.result import Finding, Status, status_of
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
    how: dict[str, Any] = {"termination": "resistor", "R_BE": value("R_BE", 47, "ohm")}
    assert only(voltage.find(judged(off, part, **how))).utilisation[0] == pytest.approx(190 / 200)
    assert only(voltage.find(judged(on, part, **how))).utilisation[0] == pytest.approx(190 / 160)
    loose: dict[str, Any] = {"termination": "resistor", "R_BE": value("R_BE", 220, "ohm")}
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


def train(amps: float, on: float, period: float, count: int) -> tuple[list[float], list[float], list[float]]:
    """t, v, i of a train of rectangular pulses, each followed by its pause."""
    t = [*(k * period + at for k in range(count) for at in (0, 0, on, on)), count * period]
    return t, [0.5] * len(t), [*[0, amps, amps, 0] * count, 0]


def test_one_pulse_at_the_peak_rating_for_its_whole_width_just_meets_the_continuous_rating() -> None:
    finding = only(current.find(judged(once(*pulse(20, 25, 1e-3)))))
    assert finding.utilisation[0] == pytest.approx(1.0, rel=1e-9)
    # By hand: sqrt(18^2 * 0.9 / (15^2 * 0.9 + (25^2 - 15^2) * 1)).
    shorter = only(current.find(judged(once(*pulse(20, 18, 0.9e-3)))))
    assert shorter.utilisation[0] == pytest.approx((18**2 * 0.9 / (15**2 * 0.9 + 400)) ** 0.5, rel=1e-9)
    assert shorter.utilisation[0] < 18 / 25  # what peak-current makes of it
    long = only(current.find(judged(once(*pulse(20, 18, 5e-3)))))
    assert long.utilisation[0] == pytest.approx(18 / 15)


def test_a_train_of_pulses_in_one_shot_counts_by_its_rms() -> None:
    # 200 pulses of 19 A, 0.9 ms in every ms: 18.02 A rms, 1.20 of 15 A when repeated.
    t, v, i = train(19, 0.9e-3, 1e-3, 200)
    one, again = (only(current.find(judged(locus))) for locus in (once(t, v, i), repeated(t, v, i)))
    assert again.utilisation[0] == pytest.approx(19 * 0.9**0.5 / 15)
    assert status(one) is Status.EXCEEDS
    assert one.utilisation[0] == pytest.approx(again.utilisation[0], rel=0.01)
    padded = only(current.find(judged(once([*t, 10.0], [*v, 0.5], [*i, 0.0]))))  # a pause after it changes nothing
    assert padded.utilisation[0] == pytest.approx(one.utilisation[0], rel=1e-12)


def test_a_train_too_short_to_exceed_that_would_exceed_repeated_is_unproven() -> None:
    t, v, i = train(19, 0.9e-3, 1e-3, 2)
    finding = only(current.find(judged(once(t, v, i))))
    assert status(finding) is Status.UNPROVEN
    assert finding.utilisation[0] == pytest.approx((19**2 * 1.8 / (15**2 * 1.9 + 400)) ** 0.5, rel=1e-9)
    assert finding.missing(0) == ("load.points",)
    both_ends = once([0, 0.9e-3, 0.9e-3, 0.1, 0.1, 0.1009], [0.5] * 6, [19, 19, 0, 0, 19, 19])
    assert status(only(current.find(judged(both_ends)))) is Status.UNPROVEN  # 1.8 ms without a break if it came again


@given(st.floats(15.5, 25), st.floats(0.05, 1), st.floats(1.02, 8), st.integers(2, 12), st.floats(0, 3))
def test_no_train_is_within_that_exceeds_when_repeated(
    amps: float, on: float, space: float, count: int, lead: float
) -> None:
    t, v, i = train(amps, on * 1e-3, on * space * 1e-3, count)
    t, v, i = [0.0, *(lead * 1e-3 + x for x in t)], [0.5, *v], [0.0, *i]
    one, again = (only(current.find(judged(locus))) for locus in (once(t, v, i), repeated(t, v, i)))
    if status(again) is Status.EXCEEDS:
        assert status(one) in (Status.UNPROVEN, Status.EXCEEDS)
    if lead == 0 and again.utilisation[0] <= 1:  # a train that may go on for ever may stop as well
        assert one.utilisation[0] <= 1 + 1e-9


@given(st.lists(st.tuples(st.floats(1e-4, 2e-3), st.floats(0, 25)), min_size=1, max_size=8))
def test_the_worst_window_is_that_of_trying_them_all(steps: list[tuple[float, float]]) -> None:
    # Second way: every window between 400 times, the integral summed over as many short steps.
    ends = np.cumsum([0.0, *(width for width, _ in steps)])
    t = np.repeat(ends, 2)[1:-1]
    i = np.repeat([amps for _, amps in steps], 2)
    fine = np.sort(np.concatenate([np.linspace(0, ends[-1], 400), ends]))
    each = np.asarray([amps for _, amps in steps])[
        np.clip(np.searchsorted(ends, (fine[1:] + fine[:-1]) / 2) - 1, 0, len(steps) - 1)
    ]
    total = np.concatenate([[0.0], np.cumsum(each**2 * np.diff(fine))])
    length = np.maximum(fine[None] - fine[:, None], 0.0)
    share = (total[None] - total[:, None]) / (225 * length + 400e-3)
    got = pulses(t[None, None], i[None, None], np.asarray([[15.0]]), np.asarray([[25.0]]), np.asarray([[1e-3]]))
    assert got[0, 0] == pytest.approx(15 * max(share.max(), 0.0) ** 0.5, rel=1e-9)


def test_equal_ratings_leave_one_shot_its_greatest_current() -> None:
    part = device(I_peak=value("I_CM", 15, "A"))
    assert only(current.find(judged(once(*pulse(20, 12, 0.2e-3)), part))).utilisation[0] == pytest.approx(12 / 15)


def test_a_level_held_in_one_shot_counts_beside_its_pulses() -> None:
    staircase = only(current.find(judged(once([0, 0, 50e-3, 50e-3, 50.1e-3], [20] * 5, [0, 12, 12, 16, 16]))))
    assert staircase.applied is not None
    level = next(node for node in staircase.applied.walk() if node.symbol == "I_level")
    assert level.at(0) == pytest.approx(12.0, rel=1e-6)
    assert staircase.applied.formula == "max(I_pulses, I_level)"


@pytest.mark.parametrize("name", ["I_peak", "I_peak_pulse"])
def test_a_typical_peak_rating_or_pulse_width_leaves_excursions_at_best_marginal(name: str) -> None:
    typical = value("I_CM", 25, "A", "typical") if name == "I_peak" else value("I_CM_pulse", 1e-3, "s", "typical")
    more: dict[str, Any] = {name: typical}
    part = device(**more)
    above, below = repeated(*pulse(20, 18, 0.5e-3, total=1.0)), repeated(*pulse(20, 9, 0.5e-3, total=1.0))
    assert status(only(peak_current.find(judged(above, part)))) is Status.MARGINAL
    for limit in (current, peak_current):
        shot = only(limit.find(judged(once(*pulse(20, 18, 0.5e-3)), part)))
        assert status(shot) is Status.MARGINAL
        assert typical.symbol in said(shot)
    assert status(only(current.find(judged(below, part)))) is Status.WITHIN
    if name == "I_peak_pulse":
        assert status(only(current.find(judged(above, part)))) is Status.MARGINAL
        assert status(only(peak_current.find(judged(below, part)))) is Status.WITHIN


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


# signs

ALL = (voltage, current, peak_current, dissipation, junction_temperature)
PMOS = device("p-mosfet", I_S=value("I_S", 10, "A"))
IGBT, IGBT_WITH_DIODE = device("n-igbt"), device("n-igbt", I_S=value("I_S", 20, "A"))


def signed(locus: Locus, part: Device) -> dict[str, Finding]:
    """What a stage's findings say of a locus, its signs looked at."""
    asked: Judged = judged(locus, part)
    made = _signed([only(limit.find(asked)) for limit in ALL], part, locus, 1)
    return {finding.limit: finding for finding in made}


@pytest.mark.parametrize("part", [PMOS, SWITCH, IGBT, IGBT_WITH_DIODE, device("pnp")], ids=lambda part: part.kind)
@pytest.mark.parametrize("amps", [0.0, -0.6])
def test_a_voltage_that_no_diode_stands_leaves_everything_unproven(part: Device, amps: float) -> None:
    for name, finding in signed(held(-60, amps), part).items():
        assert status(finding) is Status.UNPROVEN, name
        assert "load.points" in finding.missing(0), name
        assert not finding.utilisation[0] < 0, name
        assert len({r.text for r in finding.reasons}) == len(finding.reasons), name


def test_a_negative_voltage_counts_by_its_magnitude() -> None:
    finding = only(voltage.find(judged(held(-60, -0.6), PMOS)))
    assert finding.utilisation[0] == pytest.approx(60 / 160)
    assert finding.applied is not None
    assert finding.applied.at(0) == 60
    assert status(signed(held(-500, 0), SWITCH)["voltage"]) is Status.EXCEEDS
    assert only(dissipation.find(judged(held(60, -0.5), SWITCH))).utilisation[0] > 0


def test_the_rating_for_an_open_or_reverse_driven_base_covers_forward_voltage_only() -> None:
    part = device(V_CEV=value("V_CEV", 250, "V"))
    finding = only(voltage.find(judged(held(-200, 0), part, termination="reverse")))
    assert finding.utilisation[0] == pytest.approx(200 / 160)


def test_a_body_diode_conducts_within_3_V() -> None:
    for part in (PMOS, SWITCH, IGBT_WITH_DIODE):
        for name, finding in signed(held(-1.1, -4.0), part).items():
            assert status(finding) is Status.WITHIN, name


@pytest.mark.parametrize("volts", [0.0, -0.8])
def test_collector_current_that_flows_backwards_is_unproven(volts: float) -> None:
    for part in (device(), device("pnp-darlington"), IGBT):
        for name, finding in signed(held(volts, -20), part).items():
            assert status(finding) is Status.UNPROVEN, (part.kind, name)
            assert "load.points" in finding.missing(0), (part.kind, name)
    for limit in (current, peak_current):
        assert np.isnan(only(limit.find(judged(held(volts, -20)))).utilisation[0])
    assert "max.I_S" in signed(held(volts, -20), IGBT)["dissipation"].missing(0)


def test_current_of_the_size_of_leakage_may_point_either_way() -> None:
    for part in (device(), IGBT, SWITCH):
        for name, finding in signed(held(0, -0.014), part).items():
            assert status(finding) is Status.WITHIN, (part.kind, name)


def test_an_igbt_without_a_stated_diode_does_not_stand_negative_voltage() -> None:
    assert status(only(voltage.find(judged(held(-1, 0), IGBT)))) is Status.UNPROVEN
    assert status(only(voltage.find(judged(held(-1, 0), IGBT_WITH_DIODE)))) is Status.WITHIN


def test_delivered_power_is_unproven_beside_a_point_that_is_not_a_number() -> None:
    locus = repeated([0, 1, 2], [20, 20, 20], [-1, 1, np.nan])
    assert all(status(finding) is Status.UNPROVEN for finding in signed(locus, SWITCH).values())


def test_a_diode_within_its_rating_does_not_hide_that_forward_conduction_is_not_known() -> None:
    both = repeated([0, 1, 1, 2], [-1, -1, 10, 10], [-9, -9, 2, 2])
    finding = only(current.find(judged(both, SWITCH, T_case=np.nan)))
    assert np.isnan(finding.utilisation[0])
    assert status(finding) is Status.UNPROVEN
    over = repeated([0, 1, 1, 2], [-1, -1, 10, 10], [-12, -12, 2, 2])
    assert status(only(current.find(judged(over, SWITCH, T_case=np.nan)))) is Status.EXCEEDS


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
    def ask(peak: float, share: float) -> Finding:
        locus = repeated([0, share, share, 1], [20, 20, 20, 20], [peak / 20, peak / 20, 0, 0])
        return only(junction_temperature.find(judged(locus, T_case=80)))

    inside, between, outside = ask(60, 0.5), ask(120, 0.2), ask(120, 0.95)
    assert status(inside) is Status.MARGINAL
    assert inside.applied is not None
    assert inside.applied.formula == "T_case + R_th_jc * P_peak"
    assert status(between) is Status.UNPROVEN
    assert between.missing(0) == ("thermal.Z_th_jc",)
    assert status(outside) is Status.EXCEEDS
    assert outside.utilisation[0] == pytest.approx((80 + 120 * 0.95 * 125 / 150 - 25) / 125)


def test_an_ambient_at_the_limit_exceeds_without_a_number() -> None:
    finding = only(junction_temperature.find(judged(held(10, 0.1), T_j=151, T_ambient=150)))
    assert status(finding) is Status.EXCEEDS
    assert np.isnan(finding.utilisation[0])


# all


def test_the_marginal_share_itself_is_within_and_the_whole_allowance_marginal() -> None:
    assert [Status(s) for s in status_of(np.asarray([0.8, 0.8 + 1e-12, 1.0, 1.0 + 1e-12]), np.asarray([0.8]))] == [
        Status.WITHIN, Status.MARGINAL, Status.MARGINAL, Status.EXCEEDS]  # fmt: skip
    assert status(only(voltage.find(judged(held(128, 0.1))))) is Status.WITHIN


@pytest.mark.parametrize(("keys", "words"), [(("a.x",), "a.x is not stated"), (("a.x", "b.y"), "a.x, b.y are not")])
def test_what_the_temperatures_lack_is_named_in_a_sentence(keys: tuple[str, ...], words: str) -> None:
    gone = tuple(Missing(key=key, where="the drawing") for key in keys)
    assert words in said(only(dissipation.find(judged(held(10, 1), T_case=np.nan, missing=gone))))


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
