"""Writing a value and reading it back."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.quantity import DIMENSIONS, read, write


@pytest.mark.parametrize(
    ("si", "dimension", "text"),
    [
        (0.0022, "resistance", "2.2 mohm"),
        (2200.0, "resistance", "2.2 kohm"),
        (0.83, "thermal resistance", "0.83 K/W"),
        (298.15, "temperature", "25 degC"),
        (273.15, "temperature", "0 degC"),
        (10.0, "temperature difference", "10 K"),
        (1e-5, "time", "10 us"),
        (0.0, "voltage", "0 V"),
        (0.0, "mass", "0 kg"),
        (0.8, "ratio", "80 %"),
        (-0.002, "voltage tempco", "-2 mV/K"),
        (0.9999999, "voltage", "1 V"),  # rounds up into the next prefix
        (999.9999e-3, "current", "1 A"),
        (160.0, "voltage", "160 V"),
        (1e-30, "current", "1e-21 nA"),
        (5e-4, "area", "5 cm^2"),
        (0.01, "flow", "36 m^3/h"),
        (3.0, "thermal conductivity", "3 W/(m K)"),
    ],
)
def test_a_value_is_written_as_the_trade_writes_it(si: float, dimension: str, text: str) -> None:
    assert write(si, dimension) == text


def test_digits_are_significant_digits() -> None:
    assert write(math.pi, "voltage", 3) == "3.14 V"
    assert write(1234.5678, "power", 4) == "1.235 kW"


@pytest.mark.parametrize("si", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_not_written(si: float) -> None:
    with pytest.raises(ValueError, match="not written"):
        write(si, "voltage")


@given(
    st.floats(min_value=1e-15, max_value=1e12) | st.floats(min_value=-1e12, max_value=-1e-15) | st.just(0.0),
    st.sampled_from(sorted(DIMENSIONS.keys() - {"temperature"})),
    st.integers(min_value=1, max_value=15),
)
def test_what_is_written_reads_back_to_its_digits(si: float, dimension: str, digits: int) -> None:
    back = read(write(si, dimension, digits), dimension).si
    assert back == pytest.approx(si, rel=0.5001 * 10.0 ** (1 - digits) + 1e-15, abs=0.0)


@given(st.floats(min_value=1e-3, max_value=5000.0), st.integers(min_value=3, max_value=15))
def test_a_temperature_reads_back_to_the_digits_of_its_celsius_figure(kelvin: float, digits: int) -> None:
    back = read(write(kelvin, "temperature", digits), "temperature").si
    assert back == pytest.approx(kelvin, abs=abs(kelvin - 273.15) * 0.5001 * 10.0 ** (1 - digits) + 1e-12)
