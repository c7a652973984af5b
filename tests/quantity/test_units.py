"""Our unit table against a second source, entry by entry."""

from __future__ import annotations

import re

import pint
import pytest

from soacheck.quantity import DIMENSIONS, UNITS, Unit
from soacheck.quantity.units import canonical

_BASE = {
    "ratio": "dimensionless",
    "thermal conductivity": "W/m/K",
    "angle": "degree",
    "temperature difference": "kelvin",
}


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


def spelled_for_pint(name: str) -> str:
    """The few spellings of the trade that pint reads otherwise or not at all."""
    text = name.replace("Ohm", "ohm").replace("Ws", "W*s").replace("L/", "l/")
    text = re.sub(r"([mnukp]?)degC", r"\1delta_degC", text)  # in a quotient a degree is a difference
    text = re.sub(r"m([23])\b", r"m^\1", text)
    return {"cfm": "ft^3/min", "CFM": "ft^3/min", "amps": "ampere"}.get(text, text)


@pytest.mark.parametrize("name", sorted(UNITS))
def test_an_entry_of_the_table_agrees_with_pint(name: str, registry: pint.UnitRegistry) -> None:
    unit = UNITS[name]
    if unit.dimension == "temperature":
        assert registry.Quantity(25.0, name).to("kelvin").magnitude == pytest.approx(25.0 + unit.offset, rel=1e-15)
        return
    target = _BASE.get(unit.dimension, DIMENSIONS[unit.dimension])
    second_way = registry.Quantity(1.0, registry.parse_units(spelled_for_pint(name))).to(target).magnitude
    assert unit.multiplier / unit.divisor == pytest.approx(second_way, rel=1e-13)
    assert unit.offset == 0.0


@pytest.mark.parametrize("dimension", sorted(DIMENSIONS.keys() - {"temperature", "ratio"}))
def test_the_base_unit_of_a_dimension_is_in_the_table_with_factor_one(dimension: str) -> None:
    assert UNITS[canonical(DIMENSIONS[dimension])] == Unit(dimension)


def test_every_spelling_of_the_table_is_its_own_canonical_form() -> None:
    assert {name for name in UNITS if canonical(name) != name} == set()


def test_a_superscript_stays_an_exponent_and_an_ordinal_sign_a_degree() -> None:
    # Compatibility normalisation would make "mm2" and "oC" of these.
    assert canonical("mm²") == "mm^2"
    assert canonical("ºC") == "degC"
