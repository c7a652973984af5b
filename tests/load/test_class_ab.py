"""The crossover of the pair against the loop equation solved otherwise, and its limits."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from soacheck.load.parts.class_ab import (
    class_b_pair,
    exponential_pair,
    square_law_pair,
    thermal_voltage,
)

V_T = thermal_voltage()
loads = st.floats(-30.0, 30.0, allow_nan=False)
idles = st.floats(1e-4, 2.0)
resistors = st.floats(0.0, 2.0)


def by_high_precision(i_load: float, I_Q: float, R_E: float) -> tuple[float, float]:
    """Both currents from the loop equation with 60 digits, by bisection over the logarithm of the smaller one."""
    with mpmath.workdps(60):
        size, idle, R, V = (mpmath.mpf(x) for x in (abs(i_load), I_Q, R_E, V_T))

        def loop(u: mpmath.mpf) -> mpmath.mpf:
            less = idle * mpmath.exp(-u)
            more = less + size
            return V * mpmath.log(more / idle) - V * u + R * (more + less - 2 * idle)

        low, high = mpmath.mpf(0), 2 * (mpmath.log(1 + size / idle) + R * size / V) + 1
        for _ in range(240):
            middle = (low + high) / 2
            low, high = (middle, high) if loop(middle) > 0 else (low, middle)
        less = idle * mpmath.exp(-(low + high) / 2)
        pair = float(less + size), float(less)
    return pair if i_load >= 0 else pair[::-1]


def test_thermal_voltage_at_25_degc_is_the_printed_one() -> None:
    # Published: 25.69 mV at 298.15 K (k/e of the SI, CODATA 2018, four digits).
    assert pytest.approx(25.69e-3, abs=5e-6) == V_T


@settings(max_examples=60, deadline=None)
@given(i=loads, I_Q=idles, R_E=resistors)
def test_crossover_agrees_with_sixty_digits(i: float, I_Q: float, R_E: float) -> None:
    # Second way: bisection in mpmath.
    upper, lower = by_high_precision(i, I_Q, R_E)
    pair = exponential_pair(i, I_Q, R_E, V_T)
    # g = ln(i_u i_l/I_Q^2) may reach -1000s; its rounding is a relative error of the smaller current.
    loose = 1e-12 * (1 + R_E * (abs(i) + I_Q) / V_T)
    assert float(pair.upper) == pytest.approx(upper, rel=loose, abs=1e-250)
    assert float(pair.lower) == pytest.approx(lower, rel=loose, abs=1e-250)


@given(i=loads, I_Q=idles, R_E=resistors)
def test_currents_differ_by_the_load_current_and_are_never_negative(i: float, I_Q: float, R_E: float) -> None:
    for pair in (exponential_pair(i, I_Q, R_E, V_T), square_law_pair(i, I_Q), class_b_pair(i)):
        assert float(pair.upper - pair.lower) == pytest.approx(i, rel=1e-12, abs=1e-12)
        assert min(float(pair.upper), float(pair.lower)) >= 0


@given(I_Q=idles, R_E=resistors)
def test_without_load_current_both_halves_idle(I_Q: float, R_E: float) -> None:
    for pair in (exponential_pair(0.0, I_Q, R_E, V_T), square_law_pair(0.0, I_Q)):
        assert float(pair.upper) == pytest.approx(I_Q, rel=1e-14)
        assert float(pair.lower) == pytest.approx(I_Q, rel=1e-14)


@given(i=loads, I_Q=idles)
def test_without_resistors_the_product_of_the_currents_stays(i: float, I_Q: float) -> None:
    # Analytic limit: i_u i_l = I_Q^2, so that i_u = i/2 + sqrt(i^2/4 + I_Q^2).
    upper = exponential_pair(i, I_Q, 0.0, V_T).upper
    expected = abs(i) / 2 + np.sqrt(i * i / 4 + I_Q * I_Q)
    assert float(upper if i >= 0 else exponential_pair(-i, I_Q, 0.0, V_T).upper) == pytest.approx(expected, rel=1e-12)


def test_no_idle_current_is_class_b() -> None:
    i = np.linspace(-5, 5, 11)
    exact, ideal = exponential_pair(i, 0.0, 0.22, V_T), class_b_pair(i)
    np.testing.assert_array_equal(exact.upper, ideal.upper)
    np.testing.assert_array_equal(exact.lower, ideal.lower)
    near = exponential_pair(i, 1e-9, 0.22, V_T)
    np.testing.assert_allclose(near.upper, ideal.upper, atol=2e-9)


def test_large_resistors_keep_the_sum_of_the_currents_until_one_half_is_off() -> None:
    # Analytic limit: R_E I_Q much above V_T: i_u = I_Q + i/2 up to i = 2 I_Q.
    i = np.linspace(-0.15, 0.15, 7)
    pair = exponential_pair(i, 0.1, 1e5, V_T)
    np.testing.assert_allclose(pair.upper, 0.1 + i / 2, rtol=1e-4)


@given(i=loads, I_Q=idles, R_E=st.floats(0.0, 1.0), more=st.floats(1e-3, 1.0))
def test_a_larger_resistor_lowers_both_currents(i: float, I_Q: float, R_E: float, more: float) -> None:
    small, large = exponential_pair(i, I_Q, R_E, V_T), exponential_pair(i, I_Q, R_E + more, V_T)
    assert float(large.upper) <= float(small.upper) * (1 + 1e-12)
    assert float(large.lower) <= float(small.lower) * (1 + 1e-9)


@given(i=loads, I_Q=idles)
def test_the_halves_are_mirror_images(i: float, I_Q: float) -> None:
    for law in (lambda x: exponential_pair(x, I_Q, 0.3, V_T), lambda x: square_law_pair(x, I_Q)):
        assert float(law(i).upper) == pytest.approx(float(law(-i).lower), rel=1e-12, abs=1e-300)


def test_square_law_halves_keep_the_sum_of_their_drive_until_one_is_off() -> None:
    # Analytic: sqrt(i_u) + sqrt(i_l) = 2 sqrt(I_Q); off at 4 I_Q, where the other carries 4 I_Q.
    i = np.array([-0.3, -0.1, 0.0, 0.2, 0.39])
    pair = square_law_pair(i, 0.1)
    np.testing.assert_allclose(np.sqrt(pair.upper) + np.sqrt(pair.lower), 2 * np.sqrt(0.1), rtol=1e-12)
    at_cutoff = square_law_pair(0.4, 0.1)
    assert float(at_cutoff.upper) == pytest.approx(0.4)
    assert float(at_cutoff.lower) == 0.0
    assert float(square_law_pair(3.0, 0.1).lower) == 0.0


def test_a_square_law_crossover_with_source_resistors_carries_less_than_the_one_without() -> None:
    # Second way: the loop sqrt(i_u/K) + R i_u + sqrt(i_l/K) + R i_l with K = 2 A/V^2, solved by bisection.
    R, K, I_Q = 0.3, 2.0, 0.15
    for i in np.linspace(0.0, 0.5, 6):
        whole = 2 * (np.sqrt(I_Q / K) + R * I_Q)
        low, high = 0.0, I_Q
        for _ in range(100):
            less = (low + high) / 2
            drive = np.sqrt((less + i) / K) + np.sqrt(less / K) + R * (2 * less + i)
            low, high = (less, high) if drive < whole else (low, less)
        assert low <= float(square_law_pair(i, I_Q).lower) + 1e-12


def test_arrays_give_what_their_scalars_give() -> None:
    i, I_Q = np.array([[-2.0, 0.1], [0.7, 9.0]]), np.array([0.05, 0.2])
    whole = exponential_pair(i, I_Q, 0.22, V_T).upper
    for row in range(2):
        for column in range(2):
            single = float(exponential_pair(i[row, column], I_Q[column], 0.22, V_T).upper)
            assert whole[row, column] == pytest.approx(single, rel=1e-13)
