"""Speed as ratios to a named baseline of the same run. Reported; red only at twice a target.

SOACHECK_BENCH_PYTHON names the interpreter of an environment in which the wheel is installed; without it the running
one is measured.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

import soacheck
from soacheck.heat.ladder import Ladder, network
from soacheck.heat.modes import one_shot, periodic

pytestmark = pytest.mark.bench

PYTHON = os.environ.get("SOACHECK_BENCH_PYTHON", sys.executable)
PACKAGE = Path(soacheck.__file__).parent
RUNS = 10


def process(*arguments: str) -> float:
    """Seconds of one whole process."""
    environment = {key: value for key, value in os.environ.items() if key != "PYTHONDONTWRITEBYTECODE"}
    start = time.perf_counter()
    subprocess.run([PYTHON, *arguments], check=False, capture_output=True, env=environment, cwd=PACKAGE / "examples")
    return time.perf_counter() - start


def medians(first: tuple[str, ...], second: tuple[str, ...]) -> tuple[float, float]:
    """Medians of two commands, run in turn."""
    process(*first), process(*second)
    pairs = [(process(*first), process(*second)) for _ in range(RUNS)]
    return statistics.median(a for a, _ in pairs), statistics.median(b for _, b in pairs)


def best(function: Callable[[], object], runs: int = 7) -> float:
    function()
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        function()
        times.append(time.perf_counter() - start)
    return min(times)


def report(name: str, value: float, baseline: float, target: float | None, what: str) -> None:
    ratio = value / baseline
    aim = f"target {target:g}" if target is not None else "reported"
    print(f"\nbench {name}: {value * 1e3:.1f} ms = {ratio:.2f} x {what} ({baseline * 1e3:.1f} ms), {aim}")
    if target is not None:
        assert ratio <= 2 * target


def test_check_of_the_main_example_as_a_whole_process() -> None:
    code = "import numpy, pint, typer, tomllib; pint.UnitRegistry()"
    ours, baseline = medians(("-m", "soacheck", "check", "greenhouse-vent.toml"), ("-c", code))
    report("check", ours, baseline, 0.8, "numpy + pint registry + typer")


def test_help_as_a_whole_process() -> None:
    ours, baseline = medians(("-m", "soacheck", "--help"), ("-c", "import typer"))
    report("--help", ours, baseline, 2.0, "import typer")


def test_periodic_steady_state_against_one_period() -> None:
    for span in (1e-3, 1.0, 1e5):
        ladder = Ladder(R=np.array([0.1, 0.3, 0.6]), C=np.array([1e-2, 1e-1, 1.0]) * span)
        one = np.ones(1)
        modes = network(ladder, one, 0.4 * one, None, None)
        t = np.linspace(0, 1e-2, 257)[None, None]
        p = np.maximum(np.sin(t * 2 * np.pi / 1e-2), 0) * np.linspace(1, 50, 64)[None, :, None]
        mid = (p[..., 1:] + p[..., :-1]) / 2
        begin = np.zeros((1, 64, modes.tau.shape[1]))
        steady = best(lambda modes=modes, t=t, p=p, mid=mid: periodic(modes, t, p, mid))
        once = best(lambda modes=modes, t=t, p=p, mid=mid, begin=begin: one_shot(modes, t, p, mid, begin))
        report(f"periodic, capacities x {span:g}", steady, once, 2.0, "one period's evaluation")


def test_warm_push_pull_check_at_any_level() -> None:
    stage = soacheck.read_stage(PACKAGE / "examples" / "hall-amplifier.toml")
    ours = best(lambda: soacheck.check_stage(stage))
    matrix = np.random.default_rng(1).normal(size=(200, 200))
    matrix = matrix + matrix.T
    report(
        "push-pull, any level, warm",
        ours,
        best(lambda: np.linalg.eigh(matrix)),
        None,
        "numpy.linalg.eigh of 200 x 200",
    )
