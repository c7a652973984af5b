"""Profiles: points to a locus, and everything that can be wrong with them."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st

from soacheck.load import load_kind
from soacheck.locus import Use
from tests.load.stages import duties, fact, locus, read, refusals

RAMP = 'points = [["0 ms", "24 V", "0 A"], ["10 ms", "24 V", "2 A"]]'
STEP = 'points = [["0 ms", "24 V", "1 A"], ["2 ms", "24 V", "1 A"], ["2 ms", "1 V", "3 A"], ["10 ms", "1 V", "3 A"]]'


def test_a_profile_is_straight_between_its_points() -> None:
    # Analytic limit: 24 V with a current ramp from 0 to 2 A carries 24 W in the mean, 48 W at its end.
    duty = duties("profile", f"{RAMP}\nrepeat = true")["profile"]
    path = locus(duty)
    assert path.use is Use.REPEATED
    assert path.p_mean == pytest.approx(24.0)
    assert path.p_peak == pytest.approx(48.0)
    assert fact(duty, "P_mean") == pytest.approx(24.0)


def test_two_points_at_one_time_make_a_step() -> None:
    # Analytic limit: (24 W for 2 ms + 3 W for 8 ms)/10 ms.
    path = locus(duties("profile", f"{STEP}\nrepeat = true")["profile"])
    assert path.p_mean == pytest.approx((24 * 2 + 3 * 8) / 10)
    assert path.p_peak == pytest.approx(24.0)


def test_a_falling_current_at_a_rising_voltage_has_its_peak_between_the_points() -> None:
    # Analytic limit: the overlap of a resistive transition, V*I/4 in the middle and V*I/6 in the mean.
    text = 'points = [["0 us", "400 V", "0 A"], ["1 us", "0 V", "10 A"]]\nrepeat = false'
    duty = duties("profile", text)["profile"]
    assert locus(duty).p_peak == pytest.approx(1000.0)
    assert fact(duty, "E") == pytest.approx(400 * 10 * 1e-6 / 6)


def test_a_profile_that_happens_once_has_an_energy_and_its_own_start() -> None:
    duty = duties("profile", f'{RAMP}\nrepeat = false\nT_start = "80 degC"')["profile"]
    assert locus(duty).use is Use.ONCE
    assert fact(duty, "E") == pytest.approx(0.24)
    assert duty.T_start is not None
    assert duty.T_start.at(0) == pytest.approx(353.15)


def test_the_worst_of_parallel_devices_carries_its_share_of_the_current() -> None:
    alone = locus(duties("profile", f"{STEP}\nrepeat = true")["profile"])
    duty = duties("profile", f"{STEP}\nrepeat = true", count=2, share=0.55)["profile"]
    shared = locus(duty)
    assert shared.i == pytest.approx(0.55 * alone.i)
    assert shared.v == pytest.approx(alone.v)
    # all devices together dissipate what the whole current does
    assert shared.p_mean * duty.heat_ratio == pytest.approx(alone.p_mean)
    kind, load = load_kind("profile"), read("profile", f"{STEP}\nrepeat = true")
    assert (kind.devices(load, 4), kind.sharing(load, 4), kind.halves(load)) == (4, 4, 1)


def test_a_marked_turn_off_has_its_own_samples_and_changes_nothing_else() -> None:
    bare = locus(duties("profile", f"{STEP}\nrepeat = true")["profile"])
    spans = 'turn_off = [["1 ms", "1.5 ms"], ["6 ms", "9 ms"]]'
    path = locus(duties("profile", f"{STEP}\nrepeat = true\n{spans}")["profile"])
    assert path.p_mean == pytest.approx(bare.p_mean)
    assert path.turn_off is not None
    t = path.t[0, 0]
    inside = ((t >= 1e-3) & (t <= 1.5e-3)) | ((t >= 6e-3) & (t <= 9e-3))
    assert np.array_equal(path.turn_off, inside)
    assert {1e-3, 1.5e-3, 6e-3, 9e-3} <= set(t)


def test_what_lies_between_two_turn_offs_stays_unmarked_when_the_path_is_cut_finer() -> None:
    spans = 'turn_off = [["3 ms", "4 ms"], ["6 ms", "7 ms"]]'
    fine = locus(duties("profile", f"{RAMP}\nrepeat = false\n{spans}")["profile"]).refined(32)
    assert fine.turn_off is not None
    t, marked = fine.t[0, 0], np.broadcast_to(fine.turn_off, fine.t[0, 0].shape)
    assert not marked[(t > 4e-3 + 1e-9) & (t < 6e-3 - 1e-9)].all()
    share = np.trapezoid(marked.astype(float), t) / 2e-3
    assert 1.0 <= share < 1.05


def test_without_a_marked_turn_off_nothing_is_marked() -> None:
    assert locus(duties("profile", f"{RAMP}\nrepeat = true")["profile"]).turn_off is None


def test_the_drive_at_a_marked_turn_off_is_handed_on() -> None:
    text = f'{RAMP}\nrepeat = true\nturn_off = [["2 ms", "3 ms"]]\nV_BE_off = "5 V"\nI_B2 = "1 A"'
    drive = duties("profile", text)["profile"].drive
    assert drive is not None
    assert drive.V_off is not None
    assert drive.V_off.at(0) == 5.0
    assert drive.I_B2 is not None
    assert not drive.saturates
    assert duties("profile", f"{RAMP}\nrepeat = true")["profile"].drive is None


def test_a_negative_voltage_is_kept_for_the_limits_to_judge() -> None:
    text = 'points = [["0 ms", "-1 V", "2 A"], ["1 ms", "-1 V", "2 A"]]\nrepeat = true'
    assert locus(duties("profile", text)["profile"]).v.min() == -1.0


def test_a_stated_independence_of_temperature_is_printed_with_its_reason() -> None:
    text = f'{RAMP}\nrepeat = true\ntemperature_independent = true\nbecause = "a loop holds the current"'
    facts = duties("profile", text)["profile"].facts
    assert any("a loop holds the current" in one.source for one in facts)


@pytest.mark.parametrize(
    ("text", "key", "problem", "remedy"),
    [
        (RAMP, "load.repeat", "absent", "repeat = "),
        ("repeat = true", "load.points", "absent", "points = "),
        ('points = [["0 ms", "1 V", "1 A"]]\nrepeat = true', "load.points", "at least two points", "points = "),
        (
            'points = [["0 ms", "1 V", "1 A"], ["2 ms", "1 V", "1 A"], ["1 ms", "1 V", "1 A"]]\nrepeat = true',
            "load.points",
            "point 3 (0.001 s) comes before point 2 (0.002 s)",
            "order of time",
        ),
        (
            'points = [["0 s", "1 V", "1 A"], ["1 s", "1 V", "1 A"], ["1 s", "2 V", "1 A"], '
            '["1 s", "3 V", "1 A"]]\nrepeat = true',
            "load.points",
            "points 2 to 4 stand at one time (1 s)",
            "middle one",
        ),
        (
            'points = [["1 s", "1 V", "1 A"], ["1 s", "2 V", "1 A"]]\nrepeat = true',
            "load.points",
            "no time",
            "later time",
        ),
        (f'{RAMP}\nrepeat = true\nV_BE_off = "5 V"', "load.V_BE_off", "no turn-off is marked", "turn_off = "),
        (f'{RAMP}\nrepeat = true\nT_start = "80 degC"', "load.T_start", "has no start", "repeat = false"),
        (
            f"{RAMP}\nrepeat = true\ntemperature_independent = true",
            "load.temperature_independent",
            "a reason is wanted",
            "because =",
        ),
        (
            f'{RAMP}\nrepeat = true\nbecause = "so"',
            "load.because",
            "belongs to temperature_independent",
            "temperature_independent = true",
        ),
        (
            f'{RAMP}\nrepeat = true\nturn_off = [["2 ms", "1 ms"]]',
            "load.turn_off",
            "ends (0.001 s) before it begins",
            "begin, then end",
        ),
        (f'{RAMP}\nrepeat = true\nturn_off = [["2 ms", "2 ms"]]', "load.turn_off", "lasts no time", "begin, then end"),
        (
            f'{RAMP}\nrepeat = true\nturn_off = [["2 ms", "20 ms"]]',
            "load.turn_off",
            "leaves the points (0 s to 0.01 s)",
            "written as two",
        ),
        (
            f'{RAMP}\nrepeat = true\nturn_off = [["2 ms", "5 ms"], ["4 ms", "6 ms"]]',
            "load.turn_off",
            "overlap",
            "as one",
        ),
    ],
)
def test_what_is_wrong_with_a_profile_is_said(text: str, key: str, problem: str, remedy: str) -> None:
    found = refusals("profile", text)
    assert len(found) == 1, found
    assert found[0][0] == key
    assert problem in found[0][1]
    assert remedy in found[0][2]


@for_all(
    gaps=st.lists(st.integers(0, 5), min_size=1, max_size=12),
    levels=st.lists(st.tuples(st.integers(0, 100), st.integers(0, 20)), min_size=13, max_size=13),
)
def test_any_points_give_a_locus_or_a_refusal(gaps: list[int], levels: list[tuple[int, int]]) -> None:
    times = np.concatenate([[0], np.cumsum(gaps)])
    rows = ", ".join(f'["{t} ms", "{v} V", "{i} A"]' for t, (v, i) in zip(times, levels, strict=False))
    text = f"points = [{rows}]\nrepeat = false"
    if refusals("profile", text):
        thrice = any(a == b == c for a, b, c in zip(times, times[1:], times[2:], strict=False))
        assert thrice or times[-1] == 0
        return
    path = locus(duties("profile", text)["profile"])
    assert float(path.p_mean[0, 0]) <= float(path.p_peak[0, 0]) + 1e-9
    assert float(path.i_mean[0, 0]) <= float(path.i_rms[0, 0]) + 1e-9


def test_a_repetition_that_is_not_stated_is_asked_for_by_its_line() -> None:
    ((key, _, remedy),) = refusals("profile", RAMP)
    assert key == "load.repeat"
    assert remedy.startswith("add repeat = true (or false) under [load]")
