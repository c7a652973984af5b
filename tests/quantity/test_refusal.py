"""What a refused text is told: the usual slips are recognised, and the offered line is right."""

from __future__ import annotations

import pytest

from soacheck.errors import QuantityError
from soacheck.quantity import read

OFFERED = [
    ("25 C", "temperature", "25 degC"),
    ("25 c", "temperature", "25 degC"),
    ("25 deg", "temperature", "25 degC"),
    ("25 °", "temperature", "25 degC"),
    ("40 K", "temperature", "40 degC"),
    ("313.15 K", "temperature", "40 degC"),
    ("25", "temperature", "25 degC"),
    (25, "temperature", "25 degC"),
    ("10 degC", "temperature difference", "10 K"),
    ("10 °C", "temperature difference", "10 K"),
    ("10 C", "temperature difference", "10 K"),
    ("10 ΔK", "temperature difference", "10 K"),
    ("3 W/m K", "thermal conductivity", "3 W/(m K)"),
    ("3 W/mK", "thermal conductivity", "3 W/(m K)"),
    ("4k7", "resistance", "4.7 kohm"),
    ("2R2", "resistance", "2.2 ohm"),
    ("0R22", "resistance", "0.22 ohm"),
    ("3V3", "voltage", "3.3 V"),
    ("4u7", "capacitance", "4.7 uF"),
    ("10K", "resistance", "10 kohm"),
    ("10k", "resistance", "10 kohm"),
    ("10R", "resistance", "10 ohm"),
    ("1M", "resistance", "1 Mohm"),
    ("1,5 V", "voltage", "1.5 V"),
    ("1,5", "voltage", "1.5 V"),
    ("1 500 V", "voltage", "1500 V"),
    ("1_000 V", "voltage", "1000 V"),
    ("15 MA", "current", "15 mA"),
    ("15 ma", "current", "15 mA"),
    ("150 V", "power", "150 W"),
    ("150", "power", "150 W"),
    (150, "power", "150 W"),
    ("0.8", "ratio", "80 %"),
    (0.8, "ratio", "80 %"),
    ("0.5 C/W", "thermal resistance", "0.5 K/W"),
    ("0.5 W/K", "thermal resistance", "2 K/W"),
    ("-2 mV/C", "voltage tempco", "-2 mV/K"),
    ("1 volts DC", "voltage", "1 volts"),
    ("5 kHZ", "frequency", "5 kHz"),
]


@pytest.mark.parametrize(("value", "dimension", "instead"), OFFERED)
def test_a_usual_slip_is_offered_the_line_that_was_meant(value: object, dimension: str, instead: str) -> None:
    with pytest.raises(QuantityError) as caught:
        read(value, dimension)
    assert caught.value.instead == instead
    read(instead, dimension)  # and that line is right


def test_a_kelvin_for_a_temperature_is_answered_with_a_question() -> None:
    with pytest.raises(QuantityError, match=r"was 40 degC meant\?"):
        read("40 K", "temperature")


def test_a_comma_that_can_be_read_in_two_ways_is_offered_both() -> None:
    with pytest.raises(QuantityError) as caught:
        read("1,000 V", "voltage")
    assert caught.value.instead == ""
    assert '"1.000 V" or "1000 V"' in caught.value.remedy


def test_a_wrong_dimension_says_what_is_wanted_and_what_the_unit_measures() -> None:
    with pytest.raises(QuantityError) as caught:
        read("150 V", "power")
    assert caught.value.problem == "a power is wanted here, V measures a voltage"


def test_a_prefix_in_the_wrong_case_is_caught_by_the_band() -> None:
    with pytest.raises(QuantityError) as caught:
        read("45 Mohm", "resistance", (1e-4, 1e4))
    assert caught.value.instead == "45 mohm"
    with pytest.raises(QuantityError) as caught:
        read("5 mW", "power", (1e3, 1e8))
    assert caught.value.instead == "5 MW"


def test_an_implausible_value_is_told_the_band() -> None:
    with pytest.raises(QuantityError) as caught:
        read("5 kA", "current", (1e-9, 1e3))
    assert "1 nA to 1 kA" in caught.value.problem
    assert caught.value.instead == ""


def test_a_list_and_a_date_are_named_for_what_they_are() -> None:
    import datetime

    with pytest.raises(QuantityError, match="a list stands where a voltage is wanted"):
        read(["1 V"], "voltage")
    with pytest.raises(QuantityError, match="a date or time stands where an energy is wanted"):
        read(datetime.date(2020, 1, 2), "energy")


def test_control_characters_of_the_text_do_not_reach_the_message() -> None:
    for text in ("1 \x1b[31m", "\x07", "5 V\u202e", "1,5 \x00"):
        with pytest.raises(QuantityError) as caught:
            read(text, "voltage")
        assert str(caught.value).isprintable()


@pytest.mark.parametrize(("written", "right"), [("80", "80 %"), ("0.8", "80 %"), ("1", "100 %")])
def test_a_bare_ratio_is_offered_in_per_cent_as_it_was_meant(written: str, right: str) -> None:
    with pytest.raises(QuantityError) as caught:
        read(written, "ratio")
    assert right in caught.value.remedy
