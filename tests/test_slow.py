"""Long runs: mutated files, random profiles against a marched differential equation."""

from __future__ import annotations

import random
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from soacheck.check import check
from soacheck.errors import InputError, Problem
from soacheck.evaluate import evaluate
from soacheck.result import Result, Status
from tests.whole import DEVICE, HELD, PROFILE, PUSH_PULL, put, result_of, stage_of

pytestmark = pytest.mark.slow

STAGES = (HELD, PROFILE, PUSH_PULL)
SPICE = (
    "nan",
    "inf",
    "1e309",
    "-",
    "0",
    "1e-12",
    "1e12",
    '"',
    "'",
    "[",
    "]",
    "{",
    "}",
    "=",
    ",",
    "\u00b5",
    "%",
    "K",
    "degC",
    "\n",
    "#",
)


def mutated(text: str, dice: random.Random) -> str:
    """A text with one to three small accidents."""
    for _ in range(dice.randint(1, 3)):
        lines = text.split("\n")
        k = dice.randrange(len(lines))
        kind = dice.randrange(6)
        if kind == 0:
            del lines[k]
        elif kind == 1:
            lines.insert(k, dice.choice(lines))
        elif kind == 2:
            other = dice.choice(lines)
            if "=" in lines[k] and "=" in other:
                lines[k] = lines[k].split("=", 1)[0] + "=" + other.split("=", 1)[1]
        elif kind == 3:
            at = dice.randint(0, len(lines[k]))
            lines[k] = lines[k][:at] + dice.choice(SPICE) + lines[k][at:]
        elif kind == 4 and lines[k]:
            at = dice.randrange(len(lines[k]))
            lines[k] = lines[k][:at] + lines[k][at + 1 :]
        elif kind == 5:
            digits = [i for i, c in enumerate(lines[k]) if c.isdigit()]
            if digits:
                at = dice.choice(digits)
                lines[k] = lines[k][:at] + dice.choice("0123456789") * dice.randint(1, 4) + lines[k][at + 1 :]
        text = "\n".join(lines) or "\n"
    return text


def sound(result: Result) -> None:
    """What every result must keep, whatever the numbers."""
    assert result.findings
    assert result.verdict == max(f.status[0] for f in result.findings)
    for f in result.findings:
        u = float(f.utilisation[0])
        assert not (f.status[0] == Status.WITHIN and (np.isnan(u) or u > 1)), (f.limit, f.duty, u)
        assert not (f.status[0] == Status.UNPROVEN and not f.reasons), (f.limit, f.duty)


def outcome(folder: Path, stage: str, device: str) -> tuple[Result | None, tuple[Problem, ...]]:
    """A result, or what is wrong with the files; any other exception is a failure of the test."""
    try:
        return result_of(folder, stage, device), ()
    except InputError as error:
        return None, error.problems


@pytest.mark.parametrize("seed", range(6))
def test_mutated_files_give_a_sound_result_or_an_input_error(seed: int, tmp_path: Path) -> None:
    dice = random.Random(seed)
    answered = 0
    for _ in range(500):
        stage, device = dice.choice(STAGES), DEVICE
        if dice.random() < 0.5:
            stage = mutated(stage, dice)
        else:
            device = mutated(device, dice)
        result, problems = outcome(tmp_path, stage, device)
        if result is None:
            assert problems
            assert all(problem.problem and problem.remedy for problem in problems)
            continue
        sound(result)
        answered += 1
    assert answered > 10


R, C = np.array([0.1, 0.3, 0.433]), np.array([2e-3, 40e-3, 300e-3])
CAUER = put(DEVICE, Z_th_jc='{ cauer = [["0.1 K/W", "2 mJ/K"], ["0.3 K/W", "40 mJ/K"], ["0.433 K/W", "300 mJ/K"]] }')


@pytest.mark.parametrize("seed", range(40))
def test_random_profiles_reach_the_temperature_that_marching_reaches(seed: int, tmp_path: Path) -> None:
    # Second way: three cells and a sink of 0.8 J/K as an ordinary differential equation, LSODA, from a stated start.
    dice = np.random.default_rng(seed)
    count = int(dice.integers(3, 7))
    t = np.cumsum(np.concatenate([[0.0], 10 ** dice.uniform(-4, -1, count)]))
    v, i = dice.uniform(0, 60, count + 1), dice.uniform(0, 3, count + 1)
    rows = ", ".join(
        f'["{a!r} s", "{b!r} V", "{c!r} A"]' for a, b, c in zip(*(x.tolist() for x in (t, v, i)), strict=True)
    )
    text = put(
        PROFILE,
        points=f"[{rows}]",
        repeat='false\nT_start = "55 degC"',
        heatsink='{ R_th = "1.2 K/W", C_th = "0.8 J/K" }',
    )
    op = evaluate(stage_of(tmp_path, text, CAUER))[0].judged[0].operating

    def rate(x: float, y: np.ndarray) -> np.ndarray:
        p = np.interp(x, t, v) * np.interp(x, t, i)
        flow = np.array([(y[0] - y[1]) / R[0], (y[1] - y[2]) / R[1], (y[2] - y[3]) / (R[2] + 0.4)])
        return np.array(
            [
                (p - flow[0]) / C[0],
                (flow[0] - flow[1]) / C[1],
                (flow[1] - flow[2]) / C[2],
                (flow[2] - (y[3] - 313.15) / 1.2) / 0.8,
            ]
        )

    y, peak = np.full(4, 328.15), 328.15
    for start, stop in pairwise(t):
        done = solve_ivp(rate, (start, stop), y, method="LSODA", rtol=1e-9, atol=1e-9, max_step=(stop - start) / 100)
        y, peak = done.y[:, -1], max(peak, float(done.y[0].max()))
    assert op.T_j_peak[0, 0] == pytest.approx(peak, abs=0.02)


@pytest.mark.parametrize("seed", range(12))
def test_any_level_is_as_bad_as_the_worst_single_level(seed: int, tmp_path: Path) -> None:
    # Second way: the same stage asked level by level.
    dice = np.random.default_rng(100 + seed)
    rail, ohms, henry = dice.uniform(15, 45), dice.uniform(3, 12), dice.uniform(0, 3)
    base = put(
        PUSH_PULL,
        V_rail=f'"{rail:.4g} V"',
        load=f'{{ R = "{ohms:.4g} ohm", L = "{henry:.4g} mH" }}',
        f=f'"{10 ** dice.uniform(1.3, 3.5):.4g} Hz"',
    )

    def worst(result: Result, limit: str) -> float:
        return max(float(np.nan_to_num(f.utilisation[0], nan=0.0)) for f in result.findings if f.limit == limit)

    whole = check(stage_of(tmp_path, base))
    single = [check(stage_of(tmp_path, put(base, level=f'"{share} %"'))) for share in range(4, 101, 4)]
    for limit in ("voltage", "current", "peak-current", "dissipation", "junction-temperature", "safe-area"):
        most = max(worst(one, limit) for one in single)
        assert worst(whole, limit) >= most * (1 - 2e-3), limit
        assert worst(whole, limit) <= most * 1.03 + 1e-3 or limit == "safe-area", limit
