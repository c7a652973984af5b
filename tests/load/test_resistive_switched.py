"""Resistive stages switched: published losses, regions, turn-off marks, the drive."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from soacheck.device.laws import ACTIVE, CUTOFF, SATURATION, regions
from tests.load.stages import (
    PULSED,
    SATURATES,
    SWITCHED,
    device,
    duties,
    fact,
    locus,
    triple,
    value,
)


@pytest.mark.parametrize(
    ("V", "I", "t_r", "t_f", "f", "watts"),
    [
        # Own recomputation of V*I*(t_on + t_off)*f/6 for a resistive load (Mohan, Undeland & Robbins, Power
        # Electronics, chapter 2, gives the clamped-load form with 1/2).
        (400, 10, "50 ns", "80 ns", "100 kHz", 8.66667),
        (48, 20, "30 ns", "30 ns", "200 kHz", 1.92),
        (220, 80, "1 us", "3 us", "5 kHz", 58.6667),
    ],
)
def test_the_overlap_of_a_resistive_load(
    V: float, I: float, t_r: str, t_f: str, f: str, watts: float  # noqa: E741  the symbol of the formula
) -> None:  # fmt: skip
    text = (
        f'{SWITCHED}V_CC = "{V} V"\nR_C = "{V / I} ohm"\nf = "{f}"\nduty_factor = "50 %"\nt_r = "{t_r}"\nt_f = "{t_f}"'
    )
    duty = duties("resistive", text, device(V_CE_sat=triple("V_CE_sat", "V", 1e-9)))["switched"]
    path = locus(duty)
    assert fact(duty, "P_edges") == pytest.approx(watts, rel=1e-5)
    assert path.p_mean == pytest.approx(watts, rel=1e-5)
    assert path.p_peak == pytest.approx(V * I / 4)


def test_turn_on_and_conduction_of_bimbhra() -> None:
    # Published: Bimbhra, Power Electronics, Example 2.2: 220 V, 80 A, V_CES 2 V, t_r 1 us, 5 kHz: turn-on 14.93 W,
    # peak 4440.4 W; 40 W of conduction over 50 us. The 1 us is split over both edges: the formula is the same.
    text = (
        f'{SWITCHED}V_CC = "220 V"\nR_C = "2.725 ohm"\nf = "5 kHz"\nduty_factor = {{ value = "25.25 %" }}\n'
        't_r = "0.5 us"\nt_f = "0.5 us"'
    )
    duty = duties("resistive", text, device(V_CE_sat=triple("V_CE_sat", "V", 2.0)))["switched"]
    assert fact(duty, "I_on") == pytest.approx(80.0)
    assert fact(duty, "P_edges") == pytest.approx(14.93, abs=0.005)
    assert fact(duty, "P_on") == pytest.approx(40.0)
    assert locus(duty).p_peak == pytest.approx(4440.4, abs=0.05)
    assert fact(duty, "P_mean") == pytest.approx(float(locus(duty).p_mean[0, 0]))


def test_leakage_warms_the_device_while_it_is_off() -> None:
    made = device(leakage=triple("I_CBO", "A", 1e-3), **SATURATES)
    both = duties("resistive", PULSED, made)
    assert fact(both["switched"], "P_off") == pytest.approx(100 * 1e-3 * (1 - 0.4 - 2e-6 * 1e4))
    assert fact(both["switched"], "P_mean") == pytest.approx(float(locus(both["switched"]).p_mean[0, 0]))
    assert locus(both["idle"]).p_mean == pytest.approx(0.1)
    assert locus(both["idle"]).v == pytest.approx(100.0)


def test_the_regions_of_a_period_are_off_active_on_active_off() -> None:
    path = locus(duties("resistive", PULSED, device(**SATURATES))["switched"])
    fine = path.refined(16)
    assert fine.region is not None
    v, i, region = fine.v[0, 0], fine.i[0, 0], fine.region
    order = [int(region[0]), *(int(b) for a, b in pairwise(region) if a != b)]
    assert order == [CUTOFF, ACTIVE, SATURATION, ACTIVE, CUTOFF]
    assert np.all(v[region == SATURATION] == pytest.approx(0.5))
    assert np.all(i[region == CUTOFF] == 0.0)
    # Second way: the device's own law of regions, wherever it is not about to change
    own = regions(device(**SATURATES), v, i)
    clear = (region == ACTIVE) & (i > 0.1) & (v > 1.0)
    assert np.all(own[clear] == ACTIVE)


@pytest.mark.parametrize("drive", ['V_BE_off = "5 V"', 'I_B2 = "1 A"'])
def test_a_reverse_driven_base_marks_the_turn_off_and_nothing_else(drive: str) -> None:
    duty = duties("resistive", PULSED + drive, device(**SATURATES))["switched"]
    path = locus(duty)
    assert path.turn_off is not None
    t = path.t[0, 0]
    assert t[path.turn_off] == pytest.approx([40e-6, 42e-6])
    assert duty.termination == "reverse"
    assert duty.drive is not None
    assert (duty.drive.V_off is not None) == ("V_BE_off" in drive)
    assert (duty.drive.I_B2 is not None) == ("I_B2" in drive)


def test_without_a_reverse_drive_no_turn_off_is_marked() -> None:
    duty = duties("resistive", PULSED, device(**SATURATES))["switched"]
    assert locus(duty).turn_off is None
    assert duty.termination == "open"


def test_the_drive_must_carry_the_current_of_the_lowest_drop() -> None:
    made = device(V_CE_sat=triple("V_CE_sat", "V", 0.2, 0.5, 2.0))
    duty = duties("resistive", PULSED + 'I_B = "0.8 A"', made, count=2, share=0.55)["switched"]
    drive = duty.drive
    assert drive is not None
    assert drive.saturates
    assert drive.I_B is not None
    assert drive.I_B.at(0) == pytest.approx(0.8)
    assert drive.I_on is not None
    assert drive.I_on.at(0) == pytest.approx(0.55 * (100 - 0.2) / 10)
    assert locus(duty).v.min() == pytest.approx(2.0)


def test_a_mosfet_conducts_through_its_hot_on_resistance() -> None:
    made = device("n-mosfet", R_DS_on=triple("R_DS_on", "ohm", 0.1), R_DS_on_hot=triple("R_DS_on_hot", "ohm", 0.25))
    text = PULSED.replace("V_CC", "V_DD").replace("R_C", "R_D") + 'V_GS = "10 V"\nV_GS_off = "5 V"\nR_G = "22 ohm"'
    duty = duties("resistive", text, made)["switched"]
    on = 100 / 10.25
    assert fact(duty, "I_on") == pytest.approx(on)
    assert fact(duty, "P_on") == pytest.approx(on**2 * 0.25 * (0.4 - 0.01))
    assert duty.drive is not None
    assert duty.drive.V_on is not None
    assert duty.drive.V_on.at(0) == 10.0
    assert duty.drive.R_G is not None
    assert duty.drive.R_G.at(0) == 22.0
    assert duty.termination == "reverse"


def test_the_switching_times_of_the_device_stand_in_for_those_of_the_stage() -> None:
    text = PULSED.replace('t_r = "1 us"\nt_f = "2 us"\n', "")
    made = device(t_r=value("t_r", 1e-6, "s"), t_f=value("t_f", 2e-6, "s"), **SATURATES)
    theirs = locus(duties("resistive", text, made)["switched"])
    stated = locus(duties("resistive", PULSED, device(**SATURATES))["switched"])
    assert theirs.t == pytest.approx(stated.t)


def test_switching_times_of_the_device_that_do_not_fit_leave_the_duty_unknown() -> None:
    text = PULSED.replace('t_r = "1 us"\nt_f = "2 us"\n', "")
    made = device(t_r=value("t_r", 50e-6, "s"), t_f=value("t_f", 2e-6, "s"), **SATURATES)
    duty = duties("resistive", text, made)["switched"]
    assert duty.locus is None
    assert "do not fit" in duty.unknown[0].where
