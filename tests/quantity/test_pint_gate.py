"""pint: units outside our table, and quantities of other programs."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pint
import pytest

from soacheck.errors import QuantityError
from soacheck.quantity import DIMENSIONS, as_pint, read


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize(
    ("text", "dimension", "si"),
    [
        ("5 inch", "length", 0.127),  # 25.4 mm, exact
        ("1 N*m", "energy", 1.0),
        ("1 W*h", "energy", 3600.0),
        ("77 degF", "temperature", 298.15),
        ("100 ft/min", "velocity", 0.508),
        ("2 Btu", "energy", 2 * 1055.056),  # International Table British thermal unit, ISO 31-4: 1055.06 J
    ],
)
def test_a_unit_outside_the_table_is_read_and_said(text: str, dimension: str, si: float) -> None:
    reading = read(text, dimension)
    assert reading.si == pytest.approx(si, rel=1e-5)
    assert text in reading.caution
    assert "was read as" in reading.caution


@pytest.mark.parametrize(
    ("text", "dimension"),
    [
        ("3 rpm", "frequency"),  # 0.314 "Hz" otherwise: a turn is 2 pi
        ("3 rad/s", "frequency"),
        ("3 dB", "ratio"),
        ("5 e", "charge"),
        ("1 c", "velocity"),
        ("3 pi", "ratio"),
        ("1 hbar", "pressure"),
        ("1 km/s/s", "velocity"),
        ("1 V^5", "voltage"),
        ("1 in*in*in*in*in", "length"),
        ("1 parsec", "time"),
    ],
)
def test_a_unit_that_pint_reads_otherwise_than_the_trade_is_refused(text: str, dimension: str) -> None:
    with pytest.raises(QuantityError):
        read(text, dimension)


def test_the_band_holds_for_a_unit_that_pint_knows() -> None:
    with pytest.raises(QuantityError, match="not plausible"):
        read("5 mile", "length", (1e-6, 10.0))


def test_pint_quantities_of_any_registry_are_read(registry: pint.UnitRegistry) -> None:
    other = pint.UnitRegistry(autoconvert_offset_to_baseunit=True)
    for made in (registry, other):
        assert read(made.Quantity(150.0, "degC"), "temperature").si == pytest.approx(423.15)
        assert read(made.Quantity(77.0, "degF"), "temperature").si == pytest.approx(298.15)
        assert read(made.Quantity(10.0, "delta_degC"), "temperature difference").si == pytest.approx(10.0)
        assert read(made.Quantity(0.83, "K/W"), "thermal resistance").si == pytest.approx(0.83)
        assert read(made.Quantity(2, "mV/delta_degC"), "voltage tempco").si == pytest.approx(2e-3)
        assert read(made.Quantity(np.float64(2.2), "kohm"), "resistance").si == pytest.approx(2200.0)
        assert read(made.Quantity(0.8), "ratio").si == pytest.approx(0.8)
        assert read(made.Quantity(90.0, "degree"), "angle").si == pytest.approx(90.0)


def test_a_pint_temperature_and_a_pint_difference_stay_different_kinds(registry: pint.UnitRegistry) -> None:
    with pytest.raises(QuantityError, match="measures a difference"):
        read(registry.Quantity(40.0, "K"), "temperature")
    with pytest.raises(QuantityError, match="measures a difference"):
        read(registry.Quantity(150.0, "degC") - registry.Quantity(25.0, "degC"), "temperature")
    with pytest.raises(QuantityError, match="states a temperature"):
        read(registry.Quantity(10.0, "degC"), "temperature difference")


@pytest.mark.parametrize("magnitude", ["abc", 1j, [1.0, 2.0], True, float("nan"), float("inf")])
def test_a_pint_quantity_without_one_finite_number_is_refused(registry: pint.UnitRegistry, magnitude: object) -> None:
    quantity = registry.Quantity(1.0, "V")
    quantity._magnitude = magnitude
    with pytest.raises(QuantityError):
        read(quantity, "voltage")


def test_a_pint_quantity_of_another_dimension_is_refused(registry: pint.UnitRegistry) -> None:
    for unit in ("A", "degC/W", "rpm", "m"):
        with pytest.raises(QuantityError):
            read(registry.Quantity(1.0, unit), "voltage")


@pytest.mark.parametrize("dimension", sorted(DIMENSIONS))
def test_a_value_goes_out_as_a_pint_quantity_and_comes_back(dimension: str) -> None:
    assert read(as_pint(321.5, dimension), dimension).si == pytest.approx(321.5, rel=1e-12)


def test_reading_a_plain_value_loads_neither_pint_nor_numpy() -> None:
    code = (
        "import sys; from soacheck.quantity import read, write; read('0.83 K/W', 'thermal resistance');"
        "write(1.0, 'voltage'); assert not {'pint', 'numpy'} & set(sys.modules), sorted(sys.modules)"
    )
    subprocess.run([sys.executable, "-c", code], check=True)
