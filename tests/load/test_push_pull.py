"""Push-pull stages: published examples, the load angle, limits and properties of the duties."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from soacheck.load import push_pull
from soacheck.load.parts import class_b
from soacheck.load.parts.impedance import Group
from soacheck.load.parts.push_pull_stage import driven_by
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray

from .pushpull import at_angle, by_name, fact, fitted, locus_of, mean, part, peak, stage

# Published: closed forms of class B with a load angle, worked to six digits as multiples of the resistive case
# V^2/(pi^2 Z) (mean) and V^2/(4 Z) (peak); own derivation, the peak checked by a scan.
# angle, greatest mean, its level over V_rail, mean at full drive, peak, v_CE at the peak over V_rail
MULTIPLES = [
    (0, 1.00000, 0.636620, 0.674192, 1.00000, 0.500000),
    (15, 1.03528, 0.659077, 0.758266, 1.50961, 0.657980),
    (30, 1.15470, 0.735105, 1.00476, 2.12467, 0.826352),
    (45, 1.41421, 0.900316, 1.39688, 2.82843, 1.00000),
    (60, 1.90789, 1.0, 1.90789, 3.59627, 1.17365),
    (75, 2.50298, 1.0, 2.50298, 4.39727, 1.34202),
    (90, 3.14159, 1.0, 3.14159, 5.19615, 1.50000),
]


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize(("angle", "worst", "level", "full", "most", "v_at_most"), MULTIPLES)
def test_load_angle_multiplies_mean_and_peak_as_tabled(
    angle: float, worst: float, level: float, full: float, most: float, v_at_most: float, sign: int
) -> None:
    found = by_name(stage(10.0, at_angle(4.0, sign * angle)))
    unit = 100 / (math.pi**2 * 4)
    assert mean(found["worst-level"]) / unit == pytest.approx(worst, rel=1e-4)
    assert fact(found["worst-level"], "P_B") / unit == pytest.approx(worst, rel=5e-6)
    assert fact(found["worst-level"], "V") / 10 == pytest.approx(level, rel=1e-6)
    assert mean(found["full-level"]) / unit == pytest.approx(full, rel=1e-4)
    assert peak(found["full-level"]) / 6.25 == pytest.approx(most, rel=5e-6)
    assert fact(found["full-level"], "P_peak_B") / 6.25 == pytest.approx(most, rel=5e-6)
    locus = locus_of(found["full-level"])
    at = int(np.argmax(locus.p[0, 0]))
    assert locus.v[0, 0, at] / 10 == pytest.approx(v_at_most, abs=2e-5)
    assert abs(fact(found["full-level"], "phi")) == pytest.approx(angle, abs=1e-9)


@pytest.mark.parametrize(
    ("angle", "mean_max", "peak_max", "v", "i"),
    [
        (0, 15.5148, 38.2812, 17.5, 2.1875),
        (45, 21.9412, 108.276, 35.0, 3.09359),
        (60, 29.6006, 137.670, 41.0777, 3.35144),
    ],
)
def test_watts_of_35_volts_into_8_ohm(angle: float, mean_max: float, peak_max: float, v: float, i: float) -> None:
    # Published: the same closed forms in absolute values, six digits.
    found = by_name(stage(35.0, at_angle(8.0, angle)))
    assert mean(found["worst-level"]) == pytest.approx(mean_max, rel=1e-4)
    locus = locus_of(found["full-level"])
    at = int(np.argmax(locus.p[0, 0]))
    assert peak(found["full-level"]) == pytest.approx(peak_max, rel=5e-6)
    if angle:  # the resistive peak occurs twice, on either side of the crest
        assert locus.v[0, 0, at] == pytest.approx(v, rel=1e-5)
        assert locus.i[0, 0, at] == pytest.approx(i, rel=1e-5)


def test_sedra_and_smith_class_b_example() -> None:
    # Published: Sedra & Smith, Microelectronic Circuits, 5th ed., Example 14.1: 20 W into 8 ohm from 23 V rails,
    # peak 17.9 V and 2.24 A; at most 6.7 W in each transistor.
    found = by_name(stage(23.0, 8.0))
    assert mean(found["worst-level"]) == pytest.approx(6.7, abs=0.05)
    stated = by_name(stage(23.0, 8.0, level="voltage", level_value=17.9))["at-level"]
    assert locus_of(stated).i_peak[0, 0] == pytest.approx(2.24, abs=0.005)
    supply = 2 * 23 * float(locus_of(stated).i_mean[0, 0])
    assert supply == pytest.approx(32.7, abs=0.1)


def test_boylestad_greatest_dissipation_of_30_volts_into_16_ohm() -> None:
    # Published: Boylestad & Nashelsky, Example 12.8: supply 35.81 W and output 28.125 W at most, 5.7 W a transistor.
    found = by_name(stage(30.0, 16.0))
    full = locus_of(found["full-level"])
    assert mean(found["worst-level"]) == pytest.approx(5.7, abs=0.005)
    assert 2 * 30 * float(full.i_mean[0, 0]) == pytest.approx(35.81, abs=0.01)
    assert 2 * 30 * float(full.i_mean[0, 0]) - 2 * mean(found["full-level"]) == pytest.approx(28.125, abs=0.01)


def test_boylestad_12_volts_rms_from_25_volt_rails_into_4_ohm() -> None:
    # Published: Boylestad & Nashelsky, Example 12.10: supply 67.5 W, output 36 W, 15.8 W a transistor.
    duty = by_name(stage(25.0, 4.0, level="voltage", level_value=12 * math.sqrt(2)))["at-level"]
    assert 2 * 25 * float(locus_of(duty).i_mean[0, 0]) == pytest.approx(67.5, abs=0.05)
    assert mean(duty) == pytest.approx(15.8, abs=0.05)


def test_boylestad_greatest_dissipation_of_25_volts_into_4_ohm() -> None:
    # Published: Boylestad & Nashelsky, Example 12.12: 31.65 W in both, at 15.9 V (pi rounded there).
    worst = by_name(stage(25.0, 4.0))["worst-level"]
    assert 2 * mean(worst) == pytest.approx(31.65, abs=0.02)
    assert fact(worst, "V") == pytest.approx(15.9, abs=0.05)


def test_malvino_single_supply_is_half_the_supply_on_each_rail() -> None:
    # Published: Malvino & Bates, Example 12-8: 20 V single supply, 8 ohm: 1.25 W with the rounded MPP^2/(40 R).
    # Own: the exact pi^2 form, 10^2/(pi^2 8) = 1.26651 W.
    worst = by_name(stage(10.0, 8.0))["worst-level"]
    assert mean(worst) == pytest.approx(1.26651, abs=1e-5)
    assert mean(worst) == pytest.approx(1.25, rel=0.015)


def test_jacob_shorted_output_alternates_at_the_limit() -> None:
    # Published: Jacob, Power Electronics, Example 5.12: 6 A limit, 28 V, each device half of the time: 84 W.
    duty = by_name(stage(28.0, 8.0, I_limit=6.0))["shorted-output"]
    assert mean(duty) == pytest.approx(84.0, rel=1e-12)
    assert peak(duty) == pytest.approx(168.0, rel=1e-12)
    assert fact(duty, "P_short_mean") == pytest.approx(84.0, rel=1e-12)
    assert duty.heat_ratio == pytest.approx(2.0)


def test_hall_amplifier_of_two_pairs() -> None:
    # +-42 V, 4 ohm, two pairs: 44.7 W a side, 22.3 W a device; at 60 degrees 85 W a side, 396 W instant a side.
    on = fitted(share=0.5)
    flat = by_name(stage(42.0, 4.0, pairs=2), on)
    assert mean(flat["worst-level"]) == pytest.approx(22.3, abs=0.05)
    assert 2 * mean(flat["worst-level"]) == pytest.approx(44.7, abs=0.05)
    assert flat["worst-level"].heat_ratio == pytest.approx(4.0)
    turned = by_name(stage(42.0, at_angle(4.0, 60), pairs=2), on)
    assert 2 * mean(turned["worst-level"]) == pytest.approx(85, abs=0.5)
    assert 2 * peak(turned["full-level"]) == pytest.approx(396, abs=0.6)


def test_duties_of_each_kind_of_level() -> None:
    assert list(by_name(stage())) == ["idle", "worst-level", "full-level", "any-level"]
    assert list(by_name(stage(level="clipped"))) == ["idle", "at-level"]
    assert list(by_name(stage(level="ratio", level_value=0.6, I_limit=6.0))) == ["idle", "at-level", "shorted-output"]
    assert list(by_name(stage(f=None))) == ["idle", "worst-level", "full-level", "any-level"]
    assert not by_name(stage())["any-level"].listed
    assert {duty.half for duty in by_name(stage(), fitted(half="lower")).values()} == {"lower"}


def test_a_percentage_is_of_the_largest_swing() -> None:
    ratio = by_name(stage(level="ratio", level_value=0.6, R_E=0.22, V_sat=3.0))["at-level"]
    V_max = (35 - 3) * 8 / 8.22
    assert fact(ratio, "V_max") == pytest.approx(V_max, rel=1e-12)
    assert fact(ratio, "V") == pytest.approx(0.6 * V_max, rel=1e-12)
    assert locus_of(ratio).i_peak[0, 0] == pytest.approx(0.6 * V_max / 8, rel=1e-12)


@given(
    angle=st.floats(-89.0, 89.0),
    R_E=st.floats(0.0, 2.0),
    V_sat=st.floats(0.0, 10.0),
    pairs=st.integers(1, 4),
)
@settings(max_examples=30, deadline=None)
def test_the_largest_swing_just_leaves_v_sat_across_the_half(
    angle: float, R_E: float, V_sat: float, pairs: int
) -> None:
    load = stage(35.0, at_angle(8.0, angle), R_E=R_E, V_sat=V_sat, pairs=pairs)
    V = fact(by_name(load, fitted(share=1 / pairs))["full-level"], "V")
    a = np.linspace(0, 2 * np.pi, 200001)
    v_out, i = V * np.sin(a), V / 8 * np.sin(a - np.radians(angle))
    assert np.min(35.0 - v_out - R_E / pairs * i) == pytest.approx(V_sat, abs=1e-6)


@given(
    angle=st.floats(-90.0, 90.0),
    R_E=st.floats(0.0, 1.0),
    V_sat=st.floats(0.0, 5.0),
)
@settings(max_examples=25, deadline=None)
def test_closed_forms_of_class_b_agree_with_integration(angle: float, R_E: float, V_sat: float) -> None:
    # Second way: the closed forms against the mean and peak of the locus, and against every other level.
    load = stage(35.0, at_angle(8.0, angle), R_E=R_E, V_sat=V_sat)
    found = by_name(load)
    for name in ("worst-level", "full-level"):
        assert mean(found[name]) == pytest.approx(fact(found[name], "P_B"), rel=1e-4)
    every = locus_of(found["any-level"])
    assert float(every.p_mean.max()) <= mean(found["worst-level"]) * (1 + 1e-4)
    assert peak(found["full-level"]) <= fact(found["full-level"], "P_peak_B") * (1 + 1e-9)


@given(
    angle=st.floats(-80.0, 80.0),
    I_Q=st.floats(1e-3, 0.5),
    R_E=st.floats(0.0, 0.5),
)
@example(angle=54.0, I_Q=0.5, R_E=0.0)  # the worst level is the full one
@settings(max_examples=25, deadline=None)
def test_no_level_heats_a_class_ab_device_more_than_the_worst_level(angle: float, I_Q: float, R_E: float) -> None:
    load = stage(35.0, at_angle(8.0, angle), I_Q=I_Q, R_E=R_E)
    found = by_name(load)
    P = mean(found["worst-level"])
    assert float(locus_of(found["any-level"]).p_mean.max()) <= P * (1 + 1e-9)
    V_max = fact(found["worst-level"], "V_max")
    for V in np.linspace(0.01, 0.999, 40) * V_max:
        at = by_name(stage(35.0, at_angle(8.0, angle), I_Q=I_Q, R_E=R_E, level="voltage", level_value=float(V)))
        assert mean(at["at-level"]) <= P * (1 + 1e-7)


def test_the_search_finds_the_closed_form_as_the_idle_current_vanishes() -> None:
    # Analytic limit: I_Q -> 0 is class B, for which the worst level is known.
    ideal, near = by_name(stage(R_E=0.3)), by_name(stage(R_E=0.3, I_Q=1e-6))
    assert fact(near["worst-level"], "V") == pytest.approx(fact(ideal["worst-level"], "V"), rel=1e-3)
    assert mean(near["worst-level"]) == pytest.approx(mean(ideal["worst-level"]), rel=1e-6)


def test_idle_pair_burns_the_rail_times_the_idle_current() -> None:
    on = fitted(share=0.25)
    idle = by_name(stage(35.0, I_Q=0.1, pairs=4, R_E=0.5), on)["idle"]
    assert mean(idle) == pytest.approx((35 - 0.05) * 0.1, rel=1e-12)
    assert fact(idle, "P_idle") == pytest.approx(mean(idle), rel=1e-12)
    assert mean(idle) * float(idle.heat_ratio[0, 0]) == pytest.approx(8 * (35 - 0.05) * 0.1, rel=1e-12)


def test_silence_is_among_the_levels_and_idles() -> None:
    duty = by_name(stage(35.0, I_Q=0.1))["any-level"]
    silent = int(np.argmin(duty.members.value[0]))
    assert duty.members.value[0, silent] == 0
    assert mean(duty, silent) == pytest.approx(3.5, rel=1e-12)


def test_a_class_a_stage_idles_at_its_worst() -> None:
    # Analytic: with an idle current above half the peak load current dissipation falls as the level rises.
    found = by_name(stage(20.0, 8.0, I_Q=2.0, R_E=5.0))
    assert fact(found["worst-level"], "V") == pytest.approx(0.0, abs=0.2)
    assert mean(found["worst-level"]) == pytest.approx(mean(found["idle"]), rel=1e-4)


def test_energy_balances_over_a_class_ab_period() -> None:
    # Rails give what load, resistors and devices take: both halves, two ways.
    load = stage(35.0, at_angle(8.0, 35), I_Q=0.1, R_E=0.22, level="ratio", level_value=0.7)
    duty = by_name(load)["at-level"]
    locus = locus_of(duty)
    V = fact(duty, "V")
    rails = 2 * 35 * float(locus.i_mean[0, 0])
    in_load = V**2 / 16 * math.cos(math.radians(35))
    in_resistors = 2 * 0.22 * float(locus.i_rms[0, 0]) ** 2
    assert rails - in_load - in_resistors == pytest.approx(2 * mean(duty), rel=2e-4)


@given(
    V_rail=st.floats(5.0, 80.0),
    more=st.floats(1.001, 2.0),
    angle=st.floats(-90.0, 90.0),
    I_Q=st.sampled_from([0.0, 0.05, 0.4]),
    f=st.sampled_from([1000.0, None]),
)
@settings(max_examples=40, deadline=None)
def test_a_higher_rail_never_lowers_the_worst_dissipation(
    V_rail: float, more: float, angle: float, I_Q: float, f: float | None
) -> None:
    load = at_angle(8.0, angle if f else 0)
    low = by_name(stage(V_rail, load, f, I_Q=I_Q, R_E=0.2))
    high = by_name(stage(V_rail * more, load, f, I_Q=I_Q, R_E=0.2))
    assert mean(high["worst-level"]) >= mean(low["worst-level"]) * (1 - 1e-9)


def test_uneven_sharing_gives_the_worst_device_its_share() -> None:
    even, worse = (
        by_name(stage(42.0, 4.0, pairs=2), fitted(share=0.5)),
        by_name(stage(42.0, 4.0, pairs=2), fitted(share=0.6)),
    )
    assert mean(worse["worst-level"]) == pytest.approx(1.2 * mean(even["worst-level"]), rel=1e-12)
    whole = [mean(found["worst-level"]) * float(found["worst-level"].heat_ratio[0, 0]) for found in (even, worse)]
    assert whole[0] == pytest.approx(whole[1], rel=1e-12)


def test_each_bridged_amplifier_sees_half_of_the_load() -> None:
    # Second way: +-42 V bridged on 8 ohm is each half on 4 ohm; the level at the load is twice that of one output.
    bridged, single = by_name(stage(42.0, 8.0, bridged=True)), by_name(stage(42.0, 4.0))
    assert mean(bridged["worst-level"]) == pytest.approx(mean(single["worst-level"]), rel=1e-12)
    assert bridged["worst-level"].heat_ratio == pytest.approx(4.0)
    assert float(bridged["any-level"].members.value.max()) == pytest.approx(84.0)
    at = by_name(stage(42.0, 8.0, bridged=True, level="voltage", level_value=60.0))["at-level"]
    assert fact(at, "V") == pytest.approx(30.0)
    assert fact(at, "V_load") == pytest.approx(60.0)
    assert push_pull.devices(stage(bridged=True, pairs=3), 1) == 12
    assert push_pull.devices(stage(pairs=3), 1) == 6
    assert push_pull.sharing(stage(pairs=3), 1) == 3


def test_a_held_line_is_worst_at_half_of_the_rail() -> None:
    # Analytic: (V - v) v/R is V^2/(4 R) at v = V/2; one half carries it, the other is off.
    found = by_name(stage(35.0, 8.0, None))
    assert locus_of(found["worst-level"]).use is Use.HELD
    assert mean(found["worst-level"]) == pytest.approx(35**2 / 32, rel=1e-12)
    assert found["worst-level"].heat_ratio == pytest.approx(1.0)
    assert found["idle"].heat_ratio == pytest.approx(2.0)
    searched = by_name(stage(35.0, 8.0, None, I_Q=1e-5, R_E=0.1))["worst-level"]
    assert fact(searched, "V") == pytest.approx(35 * 8 / (2 * 8.1), rel=1e-3)


def test_a_shorted_output_lasts_as_long_as_is_stated() -> None:
    once = locus_of(by_name(stage(28.0, I_limit=6.0, fault_time=0.2))["shorted-output"])
    assert once.use is Use.ONCE
    assert float(once.duration[0, 0]) == pytest.approx(0.2)
    held = by_name(stage(28.0, 8.0, None, I_limit=6.0, R_E=0.5))["shorted-output"]
    assert locus_of(held).use is Use.HELD
    assert mean(held) == pytest.approx((28 - 3) * 6)
    lowest = locus_of(by_name(stage(28.0, 8.0, (20.0, 2e4), I_limit=6.0))["shorted-output"])
    assert float(lowest.duration[0, 0]) == pytest.approx(1 / 20)


def test_a_clipped_resistive_stage_is_nearly_a_square_wave() -> None:
    # Analytic limit: flat tops of V_rail/R; dissipation only in the edges, integral of the overdriven sine's edge.
    duty = by_name(stage(35.0, 8.0, level="clipped"))["at-level"]
    locus = locus_of(duty)
    assert float(locus.i_peak[0, 0]) == pytest.approx(35 / 8)
    assert float(locus.i_rms[0, 0]) == pytest.approx(35 / 8 / math.sqrt(2), rel=0.025)
    a = np.linspace(0, math.asin(0.1), 20001)
    edge = np.trapezoid((1 - 10 * np.sin(a)) * 10 * np.sin(a), a) * 2 / (2 * math.pi)
    assert mean(duty) == pytest.approx(35**2 / 8 * edge, rel=5e-3)


def test_a_clipped_inductance_draws_a_triangular_current() -> None:
    # Analytic: a square wave on a pure inductance gives a triangle of peak V T/(4 L) = V pi/(2 w L), mean dissipation
    # V^2 pi/(8 w L), 23 % above the full sine's V^2/(pi w L). Edges of arcsin(1/10) take from the peak
    # a - 10 (1 - cos a) = 0.0500 of 1.5708, which is 3 %, and less than 4 % from the mean.
    duty = by_name(stage(35.0, at_angle(8.0, 90), level="clipped"))["at-level"]
    locus = locus_of(duty)
    assert float(locus.i_peak[0, 0]) == pytest.approx(35 / 8 * 1.5208, rel=1e-3)
    assert mean(duty) == pytest.approx(35**2 / 8 * math.pi / 8, rel=0.04)
    assert float(locus.v_peak[0, 0]) == pytest.approx(70.0)


def test_clipping_a_resistance_and_inductance_agrees_with_time_stepping() -> None:
    # Second way: implicit trapezoidal steps of L di/dt + R i = v over ten periods.
    load = at_angle(8.0, 60)
    duty = by_name(stage(35.0, load, level="clipped"))["at-level"]
    locus = locus_of(duty)
    R, L, n = 4.0, 8 * math.sin(math.pi / 3) / (2 * math.pi * 1000), 20000
    h = 1e-3 / n
    v = 35 * np.clip(10 * np.sin(2 * np.pi * np.arange(n + 1) / n), -1, 1)
    i, kept = 0.0, np.zeros(n + 1)
    for _ in range(10):
        for k in range(n):
            i = ((L / h - R / 2) * i + (v[k] + v[k + 1]) / 2) / (L / h + R / 2)
            kept[k + 1] = i
        kept[0] = i
    expected = np.interp(locus.t[0, 0], np.arange(n + 1) * h, np.maximum(kept, 0))
    np.testing.assert_allclose(locus.i[0, 0], expected, atol=5e-3)


def test_the_worst_frequency_of_a_range_is_found() -> None:
    # Second way: a scan of a loudspeaker-like load (voice coil and a resonance) over the range, closed forms.
    box = Group(kind="parallel", parts=(part("R", 30.0), part("L", 20e-3), part("C", 500e-6)))
    load = Group(kind="series", parts=(part("R", 6.0), part("L", 0.8e-3), box))
    given_stage = stage(40.0, load, (20.0, 20e3))
    found = by_name(given_stage)
    f = np.geomspace(20, 20e3, 20001)[None, :]
    Z = given_stage.Z_at(f)
    V = class_b.worst_swing(40.0, 40.0, 0.0, np.abs(Z), np.angle(Z))
    P = class_b.mean_power(40.0, V, 0.0, np.abs(Z), np.angle(Z))
    assert mean(found["worst-level"]) == pytest.approx(float(P.max()), rel=1e-4)
    most = class_b.peak_power(40.0, np.abs(Z), np.angle(Z))
    every = locus_of(found["any-level"])
    assert float(every.p_peak.max()) == pytest.approx(float(most.max()), rel=2e-3)
    assert float(every.i_peak.max()) == pytest.approx(40 / float(np.abs(Z).min()), rel=1e-3)
    assert every.shape[1] <= 400
    ends = 1 / every.duration[0]
    assert float(ends.min()) == pytest.approx(20.0)
    assert float(ends.max()) == pytest.approx(20e3)


def test_the_worst_frequency_of_a_class_ab_stage_is_no_cooler_than_a_scan() -> None:
    load = Group(kind="series", parts=(part("R", 3.0), part("L", 1e-3), part("C", 40e-6)))
    found = by_name(stage(40.0, load, (100.0, 10e3), I_Q=0.1, R_E=0.2))
    scan = [
        mean(by_name(stage(40.0, load, float(f), I_Q=0.1, R_E=0.2))["worst-level"]) for f in np.geomspace(100, 10e3, 60)
    ]
    assert mean(found["worst-level"]) >= max(scan) * (1 - 1e-6)


def test_a_resistance_needs_only_the_ends_of_a_range() -> None:
    duty = by_name(stage(35.0, 8.0, (20.0, 20e3)))["worst-level"]
    assert float(locus_of(duty).duration[0, 0]) == pytest.approx(1 / 20)


def test_cases_are_worked_out_as_if_alone() -> None:
    rails, idle = np.array([30.0, 35.0, 50.0]), np.array([0.0, 0.05, 0.2])
    together = by_name(stage(rails, 8.0, I_Q=idle, R_E=np.array([0.1, 0.2, 0.0])))
    for case, R_E in enumerate((0.1, 0.2, 0.0)):
        alone = by_name(stage(float(rails[case]), 8.0, I_Q=float(idle[case]), R_E=R_E))
        for name in ("idle", "worst-level", "full-level"):
            assert mean(together[name], case=case) == pytest.approx(mean(alone[name]), rel=1e-8, abs=1e-12)


def test_mosfets_cross_over_by_the_square_law_and_darlingtons_with_two_junctions() -> None:
    # A Darlington's crossover is softer (2 V_T), a square-law one ends at 4 I_Q.
    load = stage(35.0, 8.0, I_Q=0.1, R_E=0.2, level="voltage", level_value=2.0)
    watts = [mean(by_name(load, fitted(kind))["at-level"]) for kind in ("npn", "npn-darlington", "n-mosfet")]
    assert watts[1] > watts[0]
    a = np.linspace(0, 2 * np.pi, 20001)
    i = 0.25 * np.sin(a)
    upper = 0.1 * (1 + i / 0.4) ** 2
    assert watts[2] == pytest.approx(
        float(np.trapezoid((35 - 2 * np.sin(a) - 0.2 * upper) * upper, a)) / (2 * np.pi), rel=1e-4
    )


def test_what_is_not_analysed_is_said_by_name() -> None:
    said = push_pull.not_analysed(stage())
    assert "shorted output (no I_limit)" in said
    assert "dc at the output (no dc protection stated)" in said
    assert len(push_pull.not_analysed(stage(I_limit=6.0, dc_protected=True, level="clipped"))) == 0
    assert push_pull.not_analysed(stage(f=None, I_limit=6.0)) == ()


def test_the_locus_of_a_duty_is_read_only() -> None:
    duty = by_name(stage(I_Q=0.1))["worst-level"]
    locus = locus_of(duty)
    assert not locus.v.flags.writeable


def test_each_level_says_which_it_is_and_at_what_angle_of_the_load() -> None:
    for f in (1000.0, None):
        said = {d.name: d.level for d in by_name(stage(f=f, I_limit=6.0)).values()}
        assert said.pop("worst-level") == "worst"
        assert said.pop("full-level") == "full"
        assert set(said.values()) == {None}
        at = by_name(stage(f=f, level="ratio", level_value=0.6))["at-level"]
        assert at.level == "stated"
        assert at.load_angle is not None
        assert at.load_angle.at(0) == 0.0
    found = by_name(stage(load=at_angle(8.0, 40)))
    for name in ("worst-level", "full-level"):
        angle = found[name].load_angle
        assert angle is not None
        assert angle.at(0) == pytest.approx(40)


@pytest.mark.parametrize("f", [1000.0, None])
def test_levels_are_not_cut_to_the_current_into_a_short_and_what_they_ask_for_is_kept(f: float | None) -> None:
    # Analytic: 30 V into 8 ohm with two 0.2 ohm resistors in parallel asks for 30/8.1 = 3.7 A from the half.
    free = by_name(stage(30.0, 8.0, f, R_E=0.2, pairs=2), fitted(share=0.6))
    for limit in (1.0, 6.0):
        found = by_name(stage(30.0, 8.0, f, R_E=0.2, pairs=2, I_limit=limit), fitted(share=0.6))
        assert mean(found["worst-level"]) == mean(free["worst-level"])
        limiter = found["any-level"].limiter
        assert limiter is not None
        assert limiter.I_limit.at(0) == limit
        assert limiter.I_peak.at(0) == pytest.approx(30 / 8.1)
    assert free["any-level"].limiter is None
    stated = by_name(stage(30.0, 8.0, f, level="voltage", level_value=16.0, I_limit=1.0))["at-level"].limiter
    assert stated is not None
    assert stated.I_peak.at(0) == pytest.approx(2.0)


def longest_over(ratio: FloatArray, share_of_period: float) -> float:
    """The height that a periodic, evenly sampled ratio stays above for just this share of its period."""
    low, high = 0.0, float(ratio.max())
    for _ in range(40):
        height = (low + high) / 2
        below = np.flatnonzero(np.concatenate([ratio <= height] * 2))
        run = int(np.diff(below).max()) - 1 if below.size > 1 else ratio.size
        low, high = (height, high) if run >= share_of_period * ratio.size else (low, height)
    return high


@pytest.mark.parametrize(
    ("angle", "slope", "share"), [(0, 1.0, 0.3), (0, 2.0, 0.1), (0, 2.5, 0.05), (45, 1.5, 0.1), (60, 1.0, 0.2)]
)
def test_levels_lie_close_enough_for_the_time_spent_above_a_curve(angle: float, slope: float, share: float) -> None:
    # Second way: the same reading at 400 levels. The curve: 6 A flat, then falling with this slope on log paper.
    load = at_angle(8.0, angle)
    time = np.linspace(0, 1e-3, 2000, endpoint=False)

    def worst(locus: Locus) -> float:
        heights = []
        for member in range(locus.shape[1]):
            v = np.interp(time, locus.t[0, member], locus.v[0, member])
            i = np.interp(time, locus.t[0, member], locus.i[0, member])
            heights.append(longest_over(i / np.minimum(6.0, 60 * np.maximum(v, 1e-9) ** -slope), share))
        return max(heights)

    driven = driven_by(stage(35.0, load), fitted())
    close = driven.at(np.linspace(0.2, 1, 400)[None, :], np.array([[1000.0]]))[1]
    assert worst(locus_of(by_name(stage(35.0, load))["any-level"])) == pytest.approx(worst(close), rel=5e-3)
