"""Properties of whole checks: what makes a stage worse never looks better."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from soacheck.result import Result, Status
from tests.whole import DEVICE, HELD, PROFILE, PUSH_PULL, put, result_of

TEMPERATURE = ("junction-temperature", "dissipation", "safe-area")


def ask(stage: str, device: str = DEVICE) -> Result:
    with tempfile.TemporaryDirectory() as folder:
        return result_of(Path(folder), stage, device)


def utilisations(result: Result, limits: tuple[str, ...]) -> dict[tuple[str, str], float]:
    """By limit and duty; an excess without a number counts as infinite."""
    return {
        (f.limit, f.duty): float(f.utilisation[0]) if np.isfinite(f.utilisation[0]) else np.inf
        for f in result.findings
        if f.limit in limits and f.status[0] != Status.UNPROVEN
    }


def assert_no_lower(before: Result, after: Result, limits: tuple[str, ...] = TEMPERATURE) -> None:
    was, now = utilisations(before, limits), utilisations(after, limits)
    assert was
    lost = [key for key in was if key not in now]  # a hotter stage may leave what is known: unproven is no lower
    assert len(lost) <= 1
    for key, value in was.items():
        if key in now:
            assert now[key] >= value * (1 - 1e-6), key


@settings(max_examples=15)
@given(
    st.sampled_from(["T_ambient", "interface", "heatsink", "R_th_jc"]),
    st.floats(1.01, 1.6),
    st.floats(10, 60),
    st.floats(0.2, 2.5),
)
def test_hotter_air_or_more_thermal_resistance_never_lowers_a_temperature_utilisation(
    what: str, factor: float, volts: float, amps: float
) -> None:
    stage = put(
        PROFILE,
        points=f'[["0 ms", "{volts:.6g} V", "{amps:.6g} A"], ["5 ms", "{volts:.6g} V", "0 A"], '
        '["20 ms", "1 V", "1 A"]]',
    )
    base = {"T_ambient": (40.0, "degC"), "interface": (0.4, "K/W"), "heatsink": (1.2, "K/W"), "R_th_jc": (0.833, "K/W")}
    value, unit = base[what]
    changed = {what: f'"{value * factor:.9g} {unit}"'}
    before = ask(stage)
    if what == "R_th_jc":
        cells = ((0.083, "0.2 ms"), (0.25, "5 ms"), (0.5, "60 ms"))
        pairs = ", ".join(f'["{factor * r:.9g} K/W", "{tau}"]' for r, tau in cells)
        scaled = {"Z_th_jc": f"{{ foster = [{pairs}] }}"}
        after = ask(stage, put(DEVICE, **changed, **scaled))
    else:
        after = ask(put(stage, **changed))
    assert_no_lower(before, after)


@settings(max_examples=10)
@given(st.sampled_from(["v", "i"]), st.floats(1.02, 1.5))
def test_more_voltage_or_current_along_a_locus_never_lowers_a_utilisation(axis: str, factor: float) -> None:
    rows = [(0, 30, 0.5), (5, 30, 1.5), (5, 2, 3), (20, 2, 3)]

    def stage(k_v: float, k_i: float) -> str:
        points = ", ".join(f'["{t} ms", "{v * k_v:.9g} V", "{i * k_i:.9g} A"]' for t, v, i in rows)
        return put(PROFILE, points=f"[{points}]")

    before = ask(stage(1, 1))
    after = ask(stage(factor if axis == "v" else 1, factor if axis == "i" else 1))
    assert_no_lower(before, after, ("voltage", "current", "peak-current", *TEMPERATURE))


@settings(max_examples=8)
@given(st.floats(15, 50), st.floats(1.02, 1.4))
def test_raising_the_supply_never_lowers_the_dissipation(volts: float, factor: float) -> None:
    for stage, key, duty in ((HELD, "V_CC", "held-worst-point"), (PUSH_PULL, "V_rail", "worst-level")):
        P = []
        for supply in (volts, volts * factor):
            result = ask(put(stage, **{key: f'"{supply:.9g} V"'}))
            worst = next(d for d in result.duties if d.name == duty)
            assert worst.P_mean is not None
            P.append(worst.P_mean.at(0))
        assert P[1] >= P[0] * (1 - 1e-9)


def scaled(a: float, b: float) -> tuple[str, str]:
    """DEVICE and PROFILE with volts times a, amps times b, watts times ab, kelvins per watt over ab."""

    def text(template: str) -> str:
        import re

        def one(match: re.Match[str]) -> str:
            number, unit = float(match[1]), match[2]
            factor = {"V": a, "A": b, "uA": b, "W": a * b, "K/W": 1 / (a * b)}.get(unit, 1.0)
            return f'"{number * factor:.12g} {unit}"'

        return re.sub(r'"([0-9.]+) (V|A|uA|W|K/W|ms|degC)"', one, template)

    return text(PROFILE), text(DEVICE)


@settings(max_examples=6)
@given(st.floats(0.5, 2.0), st.floats(0.5, 2.0))
def test_scaling_everything_together_changes_nothing(a: float, b: float) -> None:
    stage, device = scaled(a, b)
    before, after = ask(PROFILE), ask(stage, device)
    limits = ("voltage", "current", "peak-current", *TEMPERATURE)
    was, now = utilisations(before, limits), utilisations(after, limits)
    assert was.keys() == now.keys()
    for key, value in was.items():
        assert now[key] == pytest.approx(value, rel=2e-4), key


def test_splitting_a_locus_finer_converges() -> None:
    values = []
    for parts in (1, 4, 16):
        t = np.linspace(0, 5, parts + 1)
        rows = [f'["{x:.9g} ms", "30 V", "{0.5 + x / 5:.9g} A"]' for x in t]
        points = f'[{", ".join(rows)}, ["5 ms", "2 V", "3 A"], ["20 ms", "2 V", "3 A"]]'
        values.append(utilisations(ask(put(PROFILE, points=points)), TEMPERATURE))
    for key in values[0]:
        assert values[1][key] == pytest.approx(values[2][key], rel=2e-3), key
        assert values[0][key] == pytest.approx(values[2][key], rel=5e-3), key


def test_the_same_input_gives_the_same_bytes() -> None:
    from soacheck.show.as_json import as_json

    assert as_json([ask(PUSH_PULL)]) == as_json([ask(PUSH_PULL)])
