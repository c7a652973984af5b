"""The quiescent point of a resistive stage: published circuits, and the circuit solved a second way."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st
from scipy.optimize import brentq

from soacheck.device.ratings import Device
from soacheck.duty import Duty
from soacheck.trace import frozen
from tests.load.stages import device, duties, fact, greatest, locus, triple

SWING = 'use = "swing"\nf = "1 kHz"\n'


def bipolar(*h_FE: float, V_BE: float = 0.65, **more: Any) -> Device:
    return device(h_FE=triple("h_FE", "1", *h_FE), V_BE=triple("V_BE", "V", V_BE), **more)


def idle(text: str, made: Device, **how: Any) -> Duty:
    return duties("resistive", SWING + text, made, **how)["idle"]


def test_the_self_biased_stage_of_millman_and_halkias() -> None:
    # Published: Millman & Halkias, Integrated Electronics, Example 9.1: 22.5 V, 90k/10k, 5.6k, 1k, beta 55,
    # V_BE 0.65 V; I_C = 1.35 to 1.36 mA, V_CE = 13.5 V.
    text = 'V_CC = "22.5 V"\nR_C = "5.6 kohm"\nR_E = "1 kohm"\n[load.bias]\nR_1 = "90 kohm"\nR_2 = "10 kohm"'
    duty = idle(text, bipolar(55))
    assert 1.345e-3 < fact(duty, "I_CQ") < 1.365e-3
    assert fact(duty, "V_CEQ") == pytest.approx(13.5, abs=0.05)
    assert fact(duty, "V_th") == pytest.approx(2.25)
    assert fact(duty, "R_th") == pytest.approx(9e3)


def test_the_fixed_bias_stage_of_boylestad() -> None:
    # Published: Boylestad & Nashelsky, Electronic Devices and Circuit Theory, Example 12.1: 20 V, R_B 1k, R_C 20,
    # beta 25; supply power 9.65 W at rest.
    duty = idle('V_CC = "20 V"\nR_C = "20 ohm"\n[load.bias]\nR_B = "1 kohm"', bipolar(25, V_BE=0.7))
    assert 20.0 * fact(duty, "I_CQ") == pytest.approx(9.65, abs=0.005)
    # Own arithmetic on the same circuit: 482.5 mA, 10.35 V.
    assert fact(duty, "I_CQ") == pytest.approx(0.4825)
    assert fact(duty, "V_CEQ") == pytest.approx(10.35)
    assert fact(duty, "I_B") == pytest.approx(19.3e-3)


def test_the_quiescent_dissipation_of_malvino_and_bates() -> None:
    # Published: Malvino & Bates, Electronic Principles, Example 12-4: V_CEQ = 9 V, I_CQ = 150 mA, P_DQ = 1.35 W.
    # The circuit is chosen to stand at that point.
    duty = idle('V_CC = "18 V"\nR_C = "60 ohm"\nI_CQ = "150 mA"', device())
    assert fact(duty, "V_CEQ") == pytest.approx(9.0)
    assert locus(duty).p_mean == pytest.approx(1.35)


@pytest.mark.parametrize(
    ("R_B", "R_E", "beta", "rise"),
    [
        # From memory: Boylestad & Nashelsky, stability factor S(V_BE), for V_BE 0.65 to 0.48 V: 70.9, 50 and 36 uA
        # (recomputed 70.8333, 49.8534, 36.1702).
        ("240 kohm", "0 ohm", 100, 70.8333e-6),
        ("240 kohm", "1 kohm", 100, 49.8534e-6),
        ("47 kohm", "4.7 kohm", 100, None),
    ],
)
def test_a_falling_base_emitter_voltage_raises_the_current_as_the_stability_factor_says(
    R_B: str, R_E: str, beta: float, rise: float | None
) -> None:
    text = f'V_CC = "20 V"\nR_C = "100 ohm"\nR_E = "{R_E}"\n[load.bias]\nV_BB = "6 V"\nR_B = "{R_B}"'
    cold, hot = (fact(idle(text, bipolar(beta, V_BE=volts)), "I_CQ") for volts in (0.65, 0.48))
    ohms_B, ohms_E = (float(one.split()[0]) * (1e3 if "k" in one else 1.0) for one in (R_B, R_E))
    # Analytic limit: S(V_BE) = -beta/(R_B + (1 + beta) R_E).
    assert hot - cold == pytest.approx(beta * 0.17 / (ohms_B + (1 + beta) * ohms_E), rel=1e-9)
    if rise is not None:
        assert hot - cold == pytest.approx(rise, rel=1e-5)


def test_a_higher_gain_raises_the_current_as_the_stability_factor_says() -> None:
    # From memory: Boylestad & Nashelsky, S(beta): 2 mA, beta 50 to 80, R_B/R_E = 20: 0.25 mA (recomputed 0.249505).
    text = 'V_CC = "20 V"\nR_C = "1 kohm"\nR_E = "1 kohm"\n[load.bias]\nV_BB = "3.49 V"\nR_B = "20 kohm"'
    low, high = (fact(idle(text, bipolar(beta)), "I_CQ") for beta in (50, 80))
    assert low == pytest.approx(2e-3)
    assert high - low == pytest.approx(0.249505e-3, rel=1e-5)


@for_all(
    V_CC=st.floats(5, 100),
    R_C=st.floats(1, 1e3),
    R_E=st.floats(0, 100),
    R_1=st.floats(100, 1e5),
    R_2=st.floats(100, 1e5),
    beta=st.floats(5, 500),
)
def test_the_divider_bias_solves_the_circuit(
    V_CC: float, R_C: float, R_E: float, R_1: float, R_2: float, beta: float
) -> None:
    # Second way: node voltage at the base by bisection, currents from Kirchhoff's laws alone.
    text = f'V_CC = "{V_CC} V"\nR_C = "{R_C} ohm"\nR_E = "{R_E} ohm"\n[load.bias]\nR_1 = "{R_1} ohm"\nR_2 = "{R_2} ohm"'
    duty = idle(text, bipolar(beta, V_CE_sat=triple("V_CE_sat", "V", 0.2)))

    def excess(V_B: float) -> float:
        into_base = (V_CC - V_B) / R_1 - V_B / R_2
        return V_B - 0.65 - (1 + beta) * into_base * R_E if into_base > 0 else 1.0

    open_circuit = V_CC * R_2 / (R_1 + R_2)
    if open_circuit <= 0.65:
        assert fact(duty, "I_CQ") == 0.0
        assert fact(duty, "V_CEQ") == pytest.approx(V_CC)
        return
    V_B = brentq(excess, 0.65, open_circuit, xtol=1e-14, rtol=1e-14) if R_E > 0 else 0.65
    I_B = (V_CC - V_B) / R_1 - V_B / R_2
    I_C = beta * I_B
    V_CE = V_CC - I_C * R_C - (I_C + I_B) * R_E
    if fact(duty, "I_active") < 0.999 * fact(duty, "I_end") and V_CE > 0.2:
        assert fact(duty, "I_CQ") == pytest.approx(I_C, rel=1e-6, abs=1e-12)
        assert fact(duty, "V_CEQ") == pytest.approx(V_CE, rel=1e-6, abs=1e-6 * V_CC)
    elif I_C > 1.001 * (V_CC - 0.2) / (R_C + R_E):  # asked for more than the line carries: fully on
        assert fact(duty, "V_CEQ") == pytest.approx(0.2)
        assert fact(duty, "I_CQ") == pytest.approx((V_CC - 0.2) / (R_C + R_E))


def test_a_gate_bias_stands_where_transfer_line_and_source_resistor_meet() -> None:
    # Second way: the current at which g_fs*(V_G - I*R_S - V_GS_th) = I, by bisection.
    made = device("n-mosfet", g_fs=triple("g_fs", "S", 8.0), V_GS_th=triple("V_GS_th", "V", 3.0))
    text = 'V_DD = "40 V"\nR_D = "8 ohm"\nR_S = "1 ohm"\n[load.bias]\nR_1 = "82 kohm"\nR_2 = "12 kohm"'
    duty = idle(text, made)
    V_G = 40 * 12 / 94
    expected = brentq(lambda i: 8.0 * (V_G - i * 1.0 - 3.0) - i, 0, 10)
    assert fact(duty, "I_DQ") == pytest.approx(expected)
    assert fact(duty, "V_DSQ") == pytest.approx(40 - expected * 9)


def test_a_separate_gate_supply_below_threshold_leaves_the_device_off() -> None:
    made = device("n-mosfet", g_fs=triple("g_fs", "S", 8.0), V_GS_th=triple("V_GS_th", "V", 3.0))
    duty = idle('V_DD = "40 V"\nR_D = "8 ohm"\n[load.bias]\nV_GG = "2.5 V"', made)
    assert locus(duty).p_mean == 0.0
    assert locus(duty).v == pytest.approx(40.0)


def test_a_stage_that_is_off_carries_the_stated_leakage() -> None:
    made = bipolar(50, leakage=triple("I_CBO", "A", 2e-3))
    duty = idle('V_CC = "30 V"\nR_C = "10 ohm"\n[load.bias]\nV_BB = "0.3 V"\nR_B = "1 kohm"', made)
    assert locus(duty).i == pytest.approx(2e-3)
    assert locus(duty).p_mean == pytest.approx(2e-3 * (30 - 0.02))


def test_parallel_devices_that_are_off_leak_each_for_itself() -> None:
    made = bipolar(50, leakage=triple("I_CBO", "A", 2e-3))
    text = 'V_CC = "30 V"\nR_C = "10 ohm"\n[load.bias]\nV_BB = "0.3 V"\nR_B = "1 kohm"'
    path = locus(idle(text, made, count=4, share=0.25))
    assert path.i == pytest.approx(2e-3)
    assert path.v == pytest.approx(30 - 4 * 2e-3 * 10)


def test_a_stage_that_is_fully_on_keeps_the_highest_saturation_voltage() -> None:
    made = bipolar(100, V_CE_sat=triple("V_CE_sat", "V", 0.2, 0.5, 1.5))
    duty = idle('V_CC = "12 V"\nR_C = "3 ohm"\n[load.bias]\nR_B = "100 ohm"', made)
    assert locus(duty).v == pytest.approx(1.5)
    assert locus(duty).i == pytest.approx((12 - 1.5) / 3)
    assert duty.I_B_peak is not None
    assert duty.I_B_peak.at(0) == pytest.approx((12 - 0.65) / 100)


def test_a_saturation_voltage_that_nobody_states_is_the_usual_one_and_says_so() -> None:
    duty = idle('V_CC = "12 V"\nR_C = "3 ohm"\n[load.bias]\nR_B = "100 ohm"', bipolar(100))
    node = next(n for one in duty.facts for n in one.walk() if n.symbol == "V_CE_sat")
    assert "common practice" in node.source
    assert locus(duty).v == pytest.approx(1.0)


def test_the_spread_of_gain_is_met_from_end_to_end_with_the_worst_point_between() -> None:
    # Analytic limit: between a low-gain and a high-gain sample stands one at half the supply, V^2/(4 R).
    text = 'V_CC = "24 V"\nR_C = "8 ohm"\n[load.bias]\nR_B = "1 kohm"'
    duty = idle(text, bipolar(30, 45, 120))
    path = locus(duty)
    low, high = 30 * 23.35e-3, 120 * 23.35e-3
    assert path.i.min() == pytest.approx(low)
    assert path.i.max() == pytest.approx(high)
    assert greatest(path.p_mean) == pytest.approx(24**2 / 32, rel=1e-3)
    assert fact(duty, "I_CQ") == pytest.approx(45 * 23.35e-3)
    assert duty.members.name == "I_CQ"
    assert duty.members.value == pytest.approx(path.i[:, :, 0])


def test_a_spread_of_base_emitter_voltage_counts_together_with_the_gain() -> None:
    text = 'V_CC = "24 V"\nR_C = "8 ohm"\nR_E = "2 ohm"\n[load.bias]\nV_BB = "3 V"\nR_B = "10 ohm"'
    made = device(h_FE=triple("h_FE", "1", 40, 90, 180), V_BE=triple("V_BE", "V", 0.6, 0.7, 0.9))
    path = locus(idle(text, made))

    def current(beta: float, V_BE: float) -> float:
        return beta * (3 - V_BE) / (10 + (1 + beta) * 2)

    assert path.i.min() == pytest.approx(current(40, 0.9))
    assert path.i.max() == pytest.approx(current(180, 0.6))


def test_a_gain_curve_is_read_at_the_current_that_it_sets_itself() -> None:
    # Second way: the current that h_FE(I) * I_B = I asks for, by bisection over the curve as printed.
    points = frozen([[0.1, 298.15, 120.0], [1.0, 298.15, 80.0], [10.0, 298.15, 20.0]])
    made = device(h_FE_points=points, V_BE=triple("V_BE", "V", 0.65))
    duty = idle('V_CC = "40 V"\nR_C = "2 ohm"\n[load.bias]\nR_B = "1 kohm"', made)
    I_B = 39.35e-3

    def excess(i: float) -> float:
        return float(np.interp(np.log(i), np.log(points[:, 0]), points[:, 2])) * I_B - i

    assert fact(duty, "I_CQ") == pytest.approx(brentq(excess, 0.1, 10.0), rel=1e-6)


def test_beyond_the_gain_curve_the_point_is_not_a_number() -> None:
    points = frozen([[0.01, 298.15, 120.0], [0.1, 298.15, 100.0]])
    made = device(h_FE_points=points, V_BE=triple("V_BE", "V", 0.65))
    duty = idle('V_CC = "40 V"\nR_C = "2 ohm"\n[load.bias]\nR_B = "1 kohm"', made)
    assert np.isnan(locus(duty).p_mean).all()


def test_parallel_devices_meet_the_circuit_each_through_its_own_emitter_resistor() -> None:
    # Second way: two equal transistors, each with its R_E, by the loop of one of them.
    text = 'V_CC = "24 V"\nR_C = "4 ohm"\nR_E = "1 ohm"\n[load.bias]\nV_BB = "3 V"\nR_B = "20 ohm"'
    duty = idle(text, bipolar(50), count=2, share=0.5)
    each = brentq(lambda I_B: 3 - 20 * (2 * I_B) - 0.65 - 51 * I_B * 1.0, 0, 1)
    path = locus(duty)
    assert path.i == pytest.approx(50 * each)
    assert path.v == pytest.approx(24 - 4 * 2 * 50 * each - 51 * each)
    assert fact(duty, "P_idle") == pytest.approx(float(path.p_mean[0, 0]))
    assert duty.I_B_peak is not None
    assert duty.I_B_peak.at(0) == pytest.approx(each)


@pytest.mark.parametrize(
    ("text", "made", "missing"),
    [
        ('[load.bias]\nR_B = "1 kohm"', device(V_BE=triple("V_BE", "V", 0.65)), ["typical.h_FE"]),
        ('[load.bias]\nR_B = "1 kohm"', device(h_FE=triple("h_FE", "1", 50)), ["typical.V_BE"]),
        ('[load.bias]\nR_B = "1 kohm"', device(), ["typical.h_FE", "typical.V_BE"]),
        ('[load.bias]\nV_BB = "2 V"', bipolar(50), ["load.bias.R_B"]),
        ("", bipolar(50), ["load.I_CQ"]),
    ],
)
def test_a_point_that_cannot_be_worked_out_names_what_is_missing(text: str, made: Device, missing: list[str]) -> None:
    all_of_them = duties("resistive", f'{SWING}V_CC = "24 V"\nR_C = "8 ohm"\n{text}', made)
    assert set(all_of_them) == {"idle", "full-swing"}
    for duty in all_of_them.values():
        assert duty.locus is None
        assert [one.key for one in duty.unknown] == missing
        assert all(one.where for one in duty.unknown)


def test_a_gate_bias_names_threshold_and_slope_when_they_are_missing() -> None:
    text = f'{SWING}V_DD = "24 V"\nR_D = "8 ohm"\n[load.bias]\nV_GG = "5 V"'
    duty = duties("resistive", text, device("p-mosfet"))["idle"]
    assert [one.key for one in duty.unknown] == ["typical.V_GS_th", "typical.g_fs"]


def test_the_uncertainty_of_the_supply_moves_the_point_case_by_case() -> None:
    text = 'V_CC = { value = "24 V", min = "20 V", max = "28 V" }\nR_C = "8 ohm"\n[load.bias]\nR_B = "1 kohm"'
    duty = idle(text, bipolar(40), corners=True)
    assert locus(duty).i[:, 0, 0] == pytest.approx([40 * (v - 0.65) / 1e3 for v in (24, 20, 28)])
    one = idle('V_CC = "28 V"\nR_C = "8 ohm"\n[load.bias]\nR_B = "1 kohm"', bipolar(40))
    assert locus(duty).p_mean[2, 0] == pytest.approx(float(locus(one).p_mean[0, 0]), rel=1e-13)


def test_every_figure_of_the_point_is_a_formula_over_what_was_stated() -> None:
    text = 'V_CC = "22.5 V"\nR_C = "5.6 kohm"\nR_E = "1 kohm"\n[load.bias]\nR_1 = "90 kohm"\nR_2 = "10 kohm"'
    duty = idle(text, bipolar(55))
    nodes = list(duty.facts[0].walk())
    assert {"V_CC", "R_C", "R_E", "R_1", "R_2", "h_FE", "V_BE", "V_th", "R_th", "I_B", "I_CQ", "V_CEQ"} <= {
        node.symbol for node in nodes
    }
    assert all(node.formula or node.source for node in nodes)
    assert "25 degC" in duty.facts[0].how
