"""Positive modes from a step response at points."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.heat.zth import PositiveModes, positive_modes
from soacheck.trace import FloatArray

T = np.geomspace(1e-5, 10, 49)


def answer(fit: PositiveModes, t: FloatArray, offset: float = 0.0) -> FloatArray:
    return np.asarray(offset - np.expm1(-t[:, None] / fit.tau) @ fit.gain)


def test_a_body_of_few_modes_is_met_within_a_part_in_a_thousand() -> None:
    z = -np.expm1(-T[:, None] / np.array([1e-3, 1e-2, 1e-1])) @ np.array([0.1, 0.3, 0.6])
    fit = positive_modes(T, z, total=1.0)
    assert fit.error < 2e-3
    assert answer(fit, T) == pytest.approx(z, rel=2e-3)


@given(st.floats(0.25, 0.75), st.floats(0, 0.3))
def test_powers_of_time_are_met_within_a_percent_by_modes_that_end_in_the_total(slope: float, offset: float) -> None:
    z = offset + (1 - offset) * -np.expm1(-((T / 0.3) ** slope))
    fit = positive_modes(T, z, offset=offset, total=1.0)
    assert (fit.gain >= 0).all()
    assert offset + fit.gain.sum() == pytest.approx(1.0, rel=1e-12)
    assert answer(fit, T, offset) == pytest.approx(z, rel=0.01)
    assert fit.error == pytest.approx(np.abs(answer(fit, T, offset) / z - 1).max(), rel=1e-9)


@given(st.lists(st.floats(-0.1, 0.1), min_size=49, max_size=49), st.sampled_from([-1.0, 0.02]))
def test_where_it_is_raised_it_lies_on_or_above_every_point(reading: list[float], raise_above: float) -> None:
    z = np.minimum(np.maximum.accumulate(-np.expm1(-np.sqrt(T / 0.3)) * np.exp(reading)), 0.99)
    fit = positive_modes(T, z, total=1.0, raise_above=raise_above)
    if fit.error > raise_above:
        assert (answer(fit, T) / z).min() >= 1 - 1e-9
    assert fit.gain.sum() == pytest.approx(1.0, rel=1e-12)


def test_raising_costs_no_more_than_the_scatter_asks() -> None:
    rng = np.random.default_rng(7)
    true = -np.expm1(-np.sqrt(T / 0.3))
    z = np.minimum(true * np.exp(rng.uniform(-0.05, 0.05, T.size)), 0.995)
    z = np.maximum.accumulate(z)
    early = T < 0.1
    above = (answer(positive_modes(T, z, total=1.0), T) / true)[early]
    assert above.max() < 1.12


def test_a_guide_steers_where_there_are_no_points() -> None:
    t, z = np.array([1e-3, 1.0]), np.array([0.1, 0.9])
    between = np.geomspace(1e-3, 1, 20)
    line = np.exp(np.interp(np.log(between), np.log(t), np.log(z)))
    alone = positive_modes(t, z, total=1.0)
    led = positive_modes(t, z, total=1.0, guide=(between, line))
    off = [float(np.abs(answer(fit, between) / line - 1).max()) for fit in (alone, led)]
    assert off[1] < 0.1 < off[0]
    assert led.error < 0.02


def test_an_offset_answers_at_once() -> None:
    z = 0.3 + 0.7 * -np.expm1(-T / 1e-2)
    fit = positive_modes(T, z, offset=0.3, total=1.0)
    assert answer(fit, np.array([1e-12, 1e3]), 0.3) == pytest.approx([0.3, 1.0], abs=1e-6)


@pytest.mark.parametrize(
    ("t", "z", "offset", "total"),
    [
        ([], [], 0.0, 1.0), ([1.0], [0.5, 0.6], 0.0, 1.0), ([0.0], [0.5], 0.0, 1.0), ([1.0], [1.1], 0.0, 1.0),
        ([1.0], [0.2], 0.3, 1.0), ([1.0], [0.0], 0.0, 1.0), ([1.0], [np.nan], 0.0, 1.0), ([1.0], [1.0], 1.0, 1.0),
        ([np.nan], [0.5], 0.0, 1.0),
    ],
)  # fmt: skip
def test_what_is_no_step_response_is_refused(t: list[float], z: list[float], offset: float, total: float) -> None:
    with pytest.raises(ValueError, match="step response"):
        positive_modes(np.array(t), np.array(z), offset=offset, total=total)
