"""The shipped examples: each tells its story, with the figures that its formulas give."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pytest

import soacheck
from soacheck.check import check
from soacheck.result import DutyResult, Finding, Result, Status
from soacheck.stage import read_stage
from soacheck.trace import Traced

EXAMPLES = Path(soacheck.__file__).parent / "examples"

STORIES = {
    "greenhouse-vent": Status.WITHIN,
    "hall-amplifier": Status.WITHIN,
    "hall-amplifier-60-degrees": Status.EXCEEDS,
    "electronic-load": Status.EXCEEDS,
    "valve-driver": Status.WITHIN,
    "valve-driver-extremes": Status.EXCEEDS,
}


@cache
def result(name: str) -> Result:
    return check(read_stage(EXAMPLES / f"{name}.toml"))


def duty(name: str, duty_name: str, half: str | None = None) -> DutyResult:
    return next(d for d in result(name).duties if d.name == duty_name and (half is None or d.half == half))


def find(name: str, limit: str, duty_name: str) -> Finding:
    return next(f for f in result(name).findings if f.limit == limit and f.duty == duty_name)


def figure(value: Traced | None) -> float:
    """One figure in the units of the result (degC for temperatures)."""
    assert value is not None
    return value.at(0) - (273.15 if value.unit == "degC" else 0.0)


@pytest.mark.parametrize("name", sorted(STORIES))
def test_each_example_has_the_verdict_its_story_means(name: str) -> None:
    assert result(name).verdict is STORIES[name]


def test_every_shipped_example_is_in_the_list() -> None:
    assert {path.stem for path in EXAMPLES.glob("*.toml")} == set(STORIES)


def test_hall_amplifier_on_a_resistive_load() -> None:
    # Worked by the closed forms: 42^2/(pi^2 4) = 44.7 W a side at most, half of it in each of two devices; class AB
    # with 50 mA idle and 0.22 ohm in the emitter moves it by a watt. Sink 40 + 0.45 * 89.4, case + 0.4 * 22.35,
    # junction + 0.83 * 22.35.
    worst = duty("hall-amplifier", "worst-level", "upper")
    assert figure(worst.P_mean) == pytest.approx(22.35, abs=1.0)
    assert figure(worst.T_heatsink) == pytest.approx(80, abs=2)
    assert figure(worst.T_case) == pytest.approx(89, abs=2.5)
    assert figure(worst.T_j_mean) == pytest.approx(108, abs=3)


def test_hall_amplifier_at_sixty_degrees() -> None:
    # Closed forms: mean 85 W a side at full drive, peak 396 W a side, 198 W a device; junction 169 degC mean.
    full = duty("hall-amplifier-60-degrees", "worst-level", "upper")
    assert figure(full.P_mean) == pytest.approx(42.6, abs=1.5)
    assert figure(full.P_peak) == pytest.approx(198, rel=0.04)
    assert figure(full.T_j_mean) == pytest.approx(169, abs=4)
    for limit in ("safe-area", "junction-temperature"):
        worst = max(f.status[0] for f in result("hall-amplifier-60-degrees").findings if f.limit == limit)
        assert worst == Status.EXCEEDS


def test_electronic_load_is_cool_enough_and_outside_its_safe_area() -> None:
    # 150 W in four, 30 % of it in the worst: 45 W; sink 35 + 0.25 * 150, case + 0.3 * 45, junction + 0.4 * 45.
    only = duty("electronic-load", "profile")
    assert figure(only.P_mean) == pytest.approx(45)
    assert figure(only.T_case) == pytest.approx(86.0, abs=0.05)
    assert figure(only.T_j_peak) == pytest.approx(104.0, abs=0.05)
    assert find("electronic-load", "junction-temperature", "profile").status[0] < Status.UNPROVEN
    assert find("electronic-load", "safe-area", "profile").status[0] == Status.EXCEEDS


@pytest.mark.parametrize(("name", "P", "T_j"), [("valve-driver", 7.1, 119), ("valve-driver-extremes", 10.8, 152)])
def test_valve_driver_is_hottest_at_mid_travel(name: str, P: float, T_j: float) -> None:
    # V^2/(4 R): 24 V and 20.2 ohm, 28.8 V and 19.2 ohm; 6 + 3 K/W above 55 degC.
    worst = duty(name, "held-worst-point")
    assert figure(worst.P_mean) == pytest.approx(P, abs=0.05)
    assert figure(worst.T_j_peak) == pytest.approx(T_j, abs=0.6)
    hot = find(name, "junction-temperature", "held-worst-point")
    supply = 24.0 if name == "valve-driver" else 28.8
    assert hot.where.v[0] == pytest.approx(supply / 2, rel=0.01)
