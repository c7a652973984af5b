"""Resistive stages held and swung: published figures, analytic limits, properties."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st

from soacheck.device.ratings import SafeAreaCurve
from soacheck.load import load_kind
from soacheck.load.parts.load_line import clipping_amplitude, sine_swing
from soacheck.locus import Use
from soacheck.trace import frozen
from tests.load.stages import (
    HELD,
    SATURATES,
    SWING,
    device,
    duties,
    fact,
    greatest,
    locus,
    read,
    triple,
)


def test_the_worst_held_point_is_half_the_supply() -> None:
    # Analytic limit: V^2/(4 R) at V/2.
    duty = duties("resistive", HELD, device(**SATURATES))["held-worst-point"]
    path = locus(duty)
    assert path.use is Use.HELD
    worst = int(np.argmax(path.p_mean[0]))
    assert path.v[0, worst, 0] == 12.0
    assert path.p_mean[0, worst] == pytest.approx(18.0, rel=1e-14)
    assert fact(duty, "P_max") == pytest.approx(18.0)
    assert duty.facts[0].formula == "V_CC ** 2 / (4 * (R_C + R_E))"
    assert duty.members.name == "V_CE"
    assert np.array_equal(duty.members.value, path.v[:, :, 0])


def test_the_held_line_runs_from_cut_off_to_saturation() -> None:
    made = device(V_CE_sat=triple("V_CE_sat", "V", 0.3, 0.5, 1.0))
    path = locus(duties("resistive", HELD + 'R_E = "1 ohm"', made)["held-worst-point"])
    assert path.v[0, -1, 0] == 24.0
    assert path.i[0, -1, 0] == 0.0
    assert path.v[0, 0, 0] == pytest.approx(0.3)  # the lowest drop makes the longest line
    assert path.i[0, 0, 0] == pytest.approx((24 - 0.3) / 9)
    assert path.shape[1] >= 129
    assert path.v[0, :, 0] + 9 * path.i[0, :, 0] == pytest.approx(24.0)


def test_the_held_line_of_a_mosfet_ends_on_its_on_resistance() -> None:
    made = device("n-mosfet", R_DS_on=triple("R_DS_on", "ohm", 0.5))
    path = locus(duties("resistive", 'use = "held"\nV_DD = "24 V"\nR_D = "7.5 ohm"', made)["held-worst-point"])
    assert path.i[0, 0, 0] == pytest.approx(3.0)
    assert path.v[0, 0, 0] == pytest.approx(1.5)


def test_a_line_that_ends_above_half_the_supply_has_no_parabola_top() -> None:
    made = device("n-igbt", V_CE_TO=triple("V_CE_TO", "V", 2.0), r_CE=triple("r_CE", "ohm", 3.0))
    duty = duties("resistive", 'use = "held"\nV_CC = "5 V"\nR_C = "1 ohm"', made)["held-worst-point"]
    # Analytic limit: the line ends at (5 - 2)/(1 + 3) A, 4.25 V; the greatest dissipation stands at that end.
    assert greatest(locus(duty).p_mean) == pytest.approx(0.75 * 4.25)
    assert "P_max" not in {one.symbol for one in duty.facts}


def test_the_corners_of_printed_safe_area_curves_are_met_exactly() -> None:
    curve = SafeAreaCurve(
        label="dc", pulse=np.inf, points=frozen([[5.0, 10.0], [13.7, 4.1], [160.0, 0.2]]), T_ref=298.15
    )
    path = locus(duties("resistive", HELD, device(soa=(curve,)))["held-worst-point"])
    assert {5.0, 13.7} <= set(path.v[0, :, 0])
    assert path.v.max() == 24.0


@for_all(V=st.floats(1, 500), more=st.floats(1.0, 3.0), R_C=st.floats(0.1, 1e3), R_E=st.floats(0, 50))
def test_raising_the_supply_never_lowers_the_worst_held_dissipation(
    V: float, more: float, R_C: float, R_E: float
) -> None:
    def worst(volts: float) -> float:
        text = f'use = "held"\nV_CC = "{volts} V"\nR_C = "{R_C} ohm"\nR_E = "{R_E} ohm"'
        return greatest(locus(duties("resistive", text, device(**SATURATES))["held-worst-point"]).p_mean)

    assert worst(V * more) >= worst(V) * (1 - 1e-12)


@for_all(a=st.floats(0.1, 10), b=st.floats(0.1, 10))
def test_the_held_line_scales_with_voltage_and_current(a: float, b: float) -> None:
    plain = locus(duties("resistive", HELD)["held-worst-point"])
    text = f'use = "held"\nV_CC = "{24 * a} V"\nR_C = "{8 * a / b} ohm"'
    scaled = locus(duties("resistive", text)["held-worst-point"])
    assert scaled.v == pytest.approx(plain.v * a)
    assert scaled.i == pytest.approx(plain.i * b, abs=1e-12)


def test_without_a_bias_the_idle_duty_is_not_analysed_and_said_so() -> None:
    assert set(duties("resistive", HELD)) == {"held-worst-point"}
    left_out = load_kind("resistive").not_analysed(read("resistive", HELD))
    assert left_out == ("idle (no bias: neither [load] I_CQ nor [load.bias] is stated)",)
    with_bias = HELD + 'I_CQ = "1 A"'
    assert set(duties("resistive", with_bias)) == {"idle", "held-worst-point"}
    assert load_kind("resistive").not_analysed(read("resistive", with_bias)) == ()


def test_the_worst_of_parallel_devices_carries_its_share_along_the_line() -> None:
    text = HELD + 'R_E = "0.4 ohm"'
    duty = duties("resistive", text, device(), count=2, share=0.6)["held-worst-point"]
    path = locus(duty)
    total = path.i / 0.6
    # Second way: Kirchhoff's loop through the worst device, whose own emitter resistor carries its own current.
    assert path.v + total * 8 + path.i * 0.4 == pytest.approx(24.0)
    assert fact(duty, "P_max") == pytest.approx(greatest(path.p_mean))
    assert duty.heat_ratio == pytest.approx(1 / 0.6)
    kind, load = load_kind("resistive"), read("resistive", text)
    assert (kind.devices(load, 3), kind.sharing(load, 3), kind.halves(load)) == (3, 3, 1)


# swing


def test_the_sine_of_boylestad_takes_its_power_out_of_the_device() -> None:
    # Published: Boylestad & Nashelsky, Example 12.1: 20 V, 20 ohm, I_CQ = 0.4825 A, peak 250 mA: P_o = 0.625 W.
    quiet = 0.4825 * 10.35
    path = sine_swing(
        np.array([[0.4825]]), np.array([[10.35]]), np.array([20.0]), np.array([[0.25]]),
        f=np.array([1e3]), share=np.array([1.0]),
    )  # fmt: skip
    assert quiet - path.p_mean == pytest.approx(0.625, rel=2e-4)


def test_a_series_fed_stage_at_mid_supply_reaches_a_quarter_efficiency() -> None:
    # Analytic limit: I_Q = V/(2R); at full swing the device keeps V^2/(8R), the load gets V^2/(8R) of V^2/(2R).
    duty = duties("resistive", SWING + 'I_CQ = "1.5 A"\nf = "1 kHz"')["full-swing"]
    path = locus(duty)
    assert path.use is Use.REPEATED
    assert path.p_mean == pytest.approx(24**2 / 64, rel=2e-4)
    assert path.i_mean * 24 == pytest.approx(24**2 / 16)
    assert fact(duty, "P_swing") == pytest.approx(9.0)
    assert fact(duty, "I_swing") == pytest.approx(1.5)
    assert path.i.max() == pytest.approx(3.0)
    assert path.v.min() == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(("I_CQ", "amplitude"), [(0.6, 0.6), (2.5, (24 - 2.5 * 8 - 0.5) / 8)])
def test_the_swing_ends_at_the_nearer_of_cut_off_and_saturation(I_CQ: float, amplitude: float) -> None:
    duty = duties("resistive", SWING + f'I_CQ = "{I_CQ} A"\nf = "50 Hz"', device(**SATURATES))["full-swing"]
    assert fact(duty, "I_swing") == pytest.approx(amplitude)
    assert locus(duty).i.max() == pytest.approx(I_CQ + amplitude)
    assert locus(duty).duration == pytest.approx(0.02)


def test_a_coupled_load_makes_the_swing_run_on_its_own_line() -> None:
    # Analytic limit: with R_ac the voltage moves R_ac per ampere about Q; here cut-off is nearer.
    duty = duties("resistive", SWING + 'I_CQ = "1 A"\nR_ac = "5 ohm"\nf = "1 kHz"')["full-swing"]
    path = locus(duty)
    assert path.v.max() == pytest.approx(16 + 5 * 1)
    assert (path.v - 16) == pytest.approx(-5 * (path.i - 1))
    assert fact(duty, "P_swing") == pytest.approx(16 - 5 / 2)


def test_a_transformer_coupled_load_lifts_the_voltage_to_twice_the_supply() -> None:
    # Analytic limit: no direct resistance, R_ac = V/I_Q: v runs from 0 to 2 V, half of the power reaches the load.
    text = 'use = "swing"\nV_CC = "24 V"\nR_C = "1 mohm"\nI_CQ = "1 A"\nR_ac = "24 ohm"\nf = "1 kHz"'
    path = locus(duties("resistive", text)["full-swing"])
    assert path.v.max() == pytest.approx(48.0, rel=1e-3)
    assert path.p_mean == pytest.approx(12.0, rel=1e-3)


def test_a_swing_without_a_frequency_may_stop_anywhere() -> None:
    duty = duties("resistive", SWING + 'I_CQ = "1 A"')["full-swing"]
    path = locus(duty)
    assert path.use is Use.HELD
    # the swing about 1 A and 16 V passes half the supply, where V^2/(4R) may then be held
    assert greatest(path.p_mean) == pytest.approx(18.0, rel=1e-3)
    assert path.i.max() == pytest.approx(2.0)
    assert fact(duty, "P_max") == greatest(path.p_mean)
    assert "no frequency" in duty.facts[0].how


def test_a_slow_swing_over_a_spread_of_gain_covers_every_swing() -> None:
    made = device(h_FE=triple("h_FE", "1", 30, 45, 90), V_BE=triple("V_BE", "V", 0.65))
    duty = duties("resistive", SWING + '[load.bias]\nR_B = "1 kohm"', made)["full-swing"]
    path = locus(duty)
    for beta in (30, 45, 90):
        quiet = beta * 23.35e-3
        top = quiet + min(quiet, (24 - 8 * quiet) / 8)
        assert path.i.max() >= top * (1 - 1e-9)
    assert path.v + 8 * path.i == pytest.approx(24.0)


@for_all(i=st.floats(0.01, 10), v=st.floats(0.1, 100), R=st.floats(0.1, 100), V_0=st.floats(0, 3), R_on=st.floats(0, 2))
def test_the_swing_never_leaves_the_device(i: float, v: float, R: float, V_0: float, R_on: float) -> None:
    one = [np.array([[x]]) for x in (i, v, R, V_0, R_on)]
    amplitude = float(clipping_amplitude(*one)[0, 0])
    if v < V_0 + R_on * i:
        assert amplitude == 0.0
        return
    assert 0 <= amplitude <= i
    assert v - R * amplitude >= V_0 + R_on * (i + amplitude) - 1e-9


@for_all(I_CQ=st.floats(0.05, 2.9))
def test_supply_device_and_load_keep_the_energy(I_CQ: float) -> None:
    path = locus(duties("resistive", SWING + f'I_CQ = "{I_CQ} A"\nf = "1 kHz"')["full-swing"])
    assert 24 * path.i_mean == pytest.approx(path.p_mean + 8 * path.i_rms**2)


def test_a_held_line_without_a_stated_saturation_voltage_ends_at_nothing_and_says_so() -> None:
    duty = duties("resistive", HELD, device())["held-worst-point"]
    node = next(n for one in duty.facts for n in one.walk() if n.symbol == "V_CE_sat_min")
    assert "not stated" in node.source
    assert fact(duty, "I_end") == pytest.approx(24 / 8)


@pytest.mark.parametrize("R_ac", [None, 2, 5, 12])
@pytest.mark.parametrize("R_B", [0.9, 1.0, 1.5, 2.7, 5.0])
def test_a_slow_swing_over_a_spread_of_gain_meets_the_greatest_dissipation(R_ac: float | None, R_B: float) -> None:
    # Second way: 4001 quiescent points between the ends of the spread, the parabola of each in closed form.
    own = "" if R_ac is None else f'R_ac = "{R_ac} ohm"\n'
    made = device(h_FE=triple("h_FE", "1", 30, 45, 90), V_BE=triple("V_BE", "V", 0.65), **SATURATES)
    duty = duties("resistive", f'{SWING}{own}[load.bias]\nR_B = "{R_B} kohm"', made)["full-swing"]
    R = 8.0 if R_ac is None else R_ac
    low, high = (min(gain * 23.35 / (R_B * 1e3), 23.5 / 8) for gain in (30, 90))
    i_Q = np.linspace(low, high, 4001)
    v_Q = 24 - 8 * i_Q
    reach = np.maximum(np.minimum(i_Q, (v_Q - 0.5) / R), 0)
    top = np.clip((v_Q / R - i_Q) / 2, -reach, reach)
    P = (v_Q - R * top) * (i_Q + top)
    assert greatest(locus(duty).p_mean) == pytest.approx(float(P.max()), rel=1e-3)
