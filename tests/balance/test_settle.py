"""Operating temperatures against a second way: the same ladder marched as an ordinary differential equation."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from soacheck.balance.chain import chain
from soacheck.balance.operating import Operating
from soacheck.evaluate import evaluate
from tests.whole import DEVICE, HELD, PROFILE, put, stage_of

CAUER = put(DEVICE, Z_th_jc='{ cauer = [["0.1 K/W", "2 mJ/K"], ["0.3 K/W", "40 mJ/K"], ["0.433 K/W", "300 mJ/K"]] }')
R, C = np.array([0.1, 0.3, 0.433]), np.array([2e-3, 40e-3, 300e-3])
R_CS, R_SA, T_AIR = 0.4, 1.2, 313.15


def ode(
    p, spans: list[tuple[float, float]], y0: np.ndarray, C_sink: float | None, T_sink: float
) -> tuple[np.ndarray, np.ndarray]:  # type: ignore[no-untyped-def]  # scipy's own callable
    """Times and node temperatures (junction cells, then the sink when it has a capacity)."""

    def rate(t: float, y: np.ndarray) -> np.ndarray:
        cells = y[:3]
        sink = y[3] if C_sink is not None else T_sink
        q01, q12 = (cells[0] - cells[1]) / R[0], (cells[1] - cells[2]) / R[1]
        out = (cells[2] - sink) / (R[2] + R_CS)
        d = [(p(t) - q01) / C[0], (q01 - q12) / C[1], (q12 - out) / C[2]]
        if C_sink is not None:
            d.append((out - (sink - T_AIR) / R_SA) / C_sink)
        return np.array(d)

    ts, ys = [], []
    for start, stop in spans:
        inner = (start + 1e-12, stop - 1e-12)
        done = solve_ivp(rate, inner, y0, method="LSODA", rtol=1e-10, atol=1e-10, max_step=(stop - start) / 50)
        y0 = done.y[:, -1]
        ts.append(done.t), ys.append(done.y)
    return np.concatenate(ts), np.concatenate(ys, axis=1)


def operating(folder: Path, stage: str, device: str = CAUER) -> Operating:
    return evaluate(stage_of(folder, stage, device))[0].judged[0].operating


def power(t: float) -> float:
    """Power of PROFILE: 30 V and 0.5 to 1.5 A for 5 ms, 2 V and 3 A for 15 ms."""
    t = t % 20e-3
    return 30 * (0.5 + t / 5e-3) if t < 5e-3 else 6.0


def test_periodic_profile_settles_where_marching_settles(tmp_path: Path) -> None:
    op = operating(tmp_path, PROFILE)
    mean = (30 * 1.0 * 5 + 6.0 * 15) / 20
    assert op.P_mean[0, 0] == pytest.approx(mean, rel=1e-12)
    T_sink = T_AIR + R_SA * mean
    y = T_sink + mean * np.array([R.sum() + R_CS, R[1:].sum() + R_CS, R[2] + R_CS])
    for k in range(150):
        t, ys = ode(power, [(k * 0.02, k * 0.02 + 0.005), (k * 0.02 + 0.005, (k + 1) * 0.02)], y, None, T_sink)
        y = ys[:, -1]
    assert op.T_j_peak[0, 0] == pytest.approx(ys[0].max(), abs=2e-3)
    case = T_sink + R_CS * (ys[2] - T_sink) / (R[2] + R_CS)
    assert op.T_case_peak[0, 0] == pytest.approx(case.max(), abs=2e-3)
    assert t.size > 100


def test_one_shot_on_a_stated_start_with_a_sink_that_warms(tmp_path: Path) -> None:
    stage = put(PROFILE, repeat='false\nT_start = "60 degC"', heatsink='{ R_th = "1.2 K/W", C_th = "0.5 J/K" }')
    op = operating(tmp_path, stage)
    _, ys = ode(power, [(0, 0.005), (0.005, 0.02)], np.full(4, 333.15), 0.5, np.nan)
    assert op.T_j_peak[0, 0] == pytest.approx(ys[0].max(), abs=2e-3)
    assert op.T_before[0, 0] == 333.15


def test_held_points_are_the_chain_of_resistances(tmp_path: Path) -> None:
    # Analytic limit: T = T_air + P * (R_sa + R_cs + R_jc) at every point.
    op = operating(tmp_path, HELD)
    assert op.T_j_peak == pytest.approx(T_AIR + op.P_mean * (R_SA + R_CS + 0.833), rel=1e-9)


def test_written_chain_gives_the_temperatures_that_were_computed(tmp_path: Path) -> None:
    sitting = evaluate(stage_of(tmp_path, PROFILE, CAUER))[0]
    op, steps = sitting.judged[0].operating, chain(sitting.judged[0].operating, sitting.place)
    assert steps.T_heatsink is not None
    assert steps.T_j_mean is not None
    assert steps.T_heatsink.at(0) == pytest.approx(op.T_heatsink[0, 0], rel=1e-12)
    assert steps.T_j_mean.at(0) == pytest.approx(op.T_j_mean[0, 0], rel=1e-12)


SINKS = {
    "resistance": 'heatsink = "1.2 K/W"\ninterface = "0.4 K/W"\nextra_heat = "7 W"',
    "with capacity": 'heatsink = { R_th = "1.2 K/W", C_th = "100 J/K" }\ninterface = "0.4 K/W"\nshared_by = 3',
    "ideal": 'heatsink = "ideal"\ninterface = "0.4 K/W"',
    "none": 'heatsink = "none"',
    "held case": 'T_case = "70 degC"',
}
BOXES = {"room": "", "box": 'R_th_enclosure = "0.3 K/W"\nextra_box_heat = "11 W"',
         "sink outside": 'R_th_enclosure = "0.3 K/W"\nsink_outside = true'}  # fmt: skip


@pytest.mark.parametrize("box", sorted(BOXES))
@pytest.mark.parametrize("sink", sorted(SINKS))
def test_the_sheet_writes_the_temperatures_that_were_judged(sink: str, box: str, tmp_path: Path) -> None:
    if sink == "held case" and box != "room":
        return  # refused: nothing behind the case counts
    if sink == "none" and box == "sink outside":
        return  # refused: there is no sink to stand outside
    head = PROFILE[: PROFILE.index("[heat_path]")]
    text = f'{head}[heat_path]\n{SINKS[sink]}\n[surroundings]\nT_ambient = "40 degC"\n{BOXES[box]}\n'
    sitting = evaluate(stage_of(tmp_path, text, put(CAUER, R_th_jc='"0.833 K/W"\nR_th_ja = "35 K/W"')))[0]
    op, steps = sitting.judged[0].operating, chain(sitting.judged[0].operating, sitting.place)
    for written, judged in (
        (steps.T_heatsink, op.T_heatsink),
        (steps.T_case, op.T_case),
        (steps.T_j_mean, op.T_j_mean),
    ):
        assert np.isnan(judged[0, 0]) if written is None else written.at(0) == pytest.approx(judged[0, 0], rel=1e-12)


def test_long_shot_on_a_sink_of_unknown_capacity_is_not_within(tmp_path: Path) -> None:
    # 60 W for 100 s: held at 60 degC the junction would do, with the sink following it would not: nobody knows.
    rows = 'points = [["0 s", "30 V", "2 A"], ["100 s", "30 V", "2 A"]]'
    stage = put(PROFILE, repeat='false\nT_start = "60 degC"', points=rows.split(" = ", 1)[1])
    sitting = evaluate(stage_of(tmp_path, stage, CAUER))[0]
    hot = next(f for f in sitting.findings if f.limit == "junction-temperature")
    assert hot.status[0] == 2
    assert "heat_path.heatsink.C_th" in hot.missing(0)


def test_a_slow_repetition_on_a_sink_of_unknown_capacity_is_not_within(tmp_path: Path) -> None:
    # 39 W for half an hour, then off for half an hour: the mean would do, half an hour at 39 W on 1.6 K/W would not.
    rows = (
        '[["0 s", "30 V", "1.3 A"], ["1800 s", "30 V", "1.3 A"], ["1800 s", "30 V", "0 A"], ["3600 s", "30 V", "0 A"]]'
    )
    text = put(PROFILE, points=rows, heatsink='"1.6 K/W"')
    sitting = evaluate(stage_of(tmp_path, text, CAUER))[0]
    op = sitting.judged[0].operating
    assert op.T_j_peak[0, 0] == pytest.approx(T_AIR + 39 * (1.6 + R_CS + 0.833), abs=0.01)
    hot = next(f for f in sitting.findings if f.limit == "junction-temperature")
    assert hot.status[0] == 2
    assert "heat_path.heatsink.C_th" in hot.missing(0)
    known = put(PROFILE, points=rows, heatsink='{ R_th = "1.6 K/W", C_th = "100 J/K" }')
    exact = next(f for f in evaluate(stage_of(tmp_path, known, CAUER))[0].findings if f.limit == "junction-temperature")
    assert exact.status[0] == 3


@pytest.mark.parametrize("seconds", [1.0, 30.0])
def test_a_bare_package_is_not_held_for_a_second(seconds: float, tmp_path: Path) -> None:
    rows = f'[["0 s", "40 V", "2 A"], ["{seconds} s", "40 V", "2 A"]]'
    head = put(PROFILE, points=rows, repeat='false\nT_start = "40 degC"')
    text = head[: head.index("[heat_path]")] + '[heat_path]\nheatsink = "none"\n[surroundings]\nT_ambient = "40 degC"\n'
    device = put(CAUER, R_th_jc='"0.833 K/W"\nR_th_ja = "35 K/W"')
    findings = evaluate(stage_of(tmp_path, text, device))[0].findings
    assert next(f for f in findings if f.limit == "junction-temperature").status[0] == 2


def test_a_start_below_the_air_leaves_the_sink_in_the_air(tmp_path: Path) -> None:
    op = operating(tmp_path, put(PROFILE, repeat='false\nT_start = "-40 degC"'))
    assert op.T_before[0, 0] == pytest.approx(233.15)
    assert op.T_heatsink[0, 0] == pytest.approx(T_AIR)


def test_no_temperature_passes_what_the_peak_power_could_hold(tmp_path: Path) -> None:
    # Analytic limit: from 40 degC on an ideal sink, T_j never passes T_air + P_peak * (R_jc + R_cs), kinks or not.
    text = put(
        PROFILE,
        points='[["0 s", "20 V", "0 A"], ["2 s", "20 V", "2 A"], ["4 s", "20 V", "0 A"]]',
        repeat='false\nT_start = "40 degC"',
        heatsink='"ideal"',
    )
    op = operating(tmp_path, text)
    assert op.T_j_peak[0, 0] <= T_AIR + 40 * (0.833 + R_CS)
    assert op.T_j_peak[0, 0] == pytest.approx(op.T_j[0, 0].max(), abs=1e-3)


@pytest.mark.parametrize("sink", ['heatsink = "ideal"', 'heatsink = { R_th = "1 K/W", C_th = "300 J/K" }'])
@pytest.mark.parametrize("repeat", ["true", 'false\nT_start = "25 degC"'])
def test_the_air_of_a_box_follows_four_hours_of_heat(sink: str, repeat: str, tmp_path: Path) -> None:
    # 30 W for four hours in a box of 3 K/W: the air alone comes to 40 + 90 degC.
    rows = (
        '[["0 s", "10 V", "3 A"], ["14400 s", "10 V", "3 A"], ["14400 s", "10 V", "0 A"], ["28800 s", "10 V", "0 A"]]'
    )
    head = put(PROFILE, points=rows, repeat=repeat)
    text = head[: head.index("[heat_path]")] + f'[heat_path]\n{sink}\ninterface = "0.4 K/W"\n[surroundings]\n'
    text += 'T_ambient = "40 degC"\nR_th_enclosure = "3 K/W"\n'
    findings = evaluate(stage_of(tmp_path, text, CAUER))[0].findings
    hot = next(f for f in findings if f.limit == "junction-temperature")
    assert hot.status[0] >= 2
    assert hot.status[0] == 3 or "surroundings.T_ambient" in hot.missing(0)


def test_a_shot_that_outlasts_the_chart_is_judged_at_the_case_it_reaches(tmp_path: Path) -> None:
    # 120 V, 0.32 A for 2000 s is dc to the chart: what repeats for ever and what lasts once for long agree.
    rows = '[["0 s", "120 V", "0.32 A"], ["2000 s", "120 V", "0.32 A"]]'
    sink = '{ R_th = "0.95 K/W", C_th = "50 J/K" }'
    shares = []
    for repeat in ("true", 'false\nT_start = "25 degC"'):
        text = put(PROFILE, points=rows, heatsink=sink, repeat=repeat)
        findings = evaluate(stage_of(tmp_path, text, CAUER))[0].findings
        shares.append(next(f for f in findings if f.limit == "safe-area").utilisation[0])
    assert shares[1] == pytest.approx(shares[0], rel=0.01)
