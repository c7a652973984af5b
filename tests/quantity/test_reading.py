"""Texts that must be read, and to what; texts that must be refused by every dimension."""

from __future__ import annotations

import math

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from soacheck.errors import QuantityError
from soacheck.quantity import DIMENSIONS, UNITS, read

# What a general unit library makes of these is given beside them: each was seen to be read wrongly by one.
READ = [
    ("−5 V", "voltage", -5.0),  # minus sign dropped: +5 V
    ("25 ℃", "temperature", 298.15),  # 25, no unit
    ("25 ˚C", "temperature", 298.15),  # 25 coulomb
    ("25 ºC", "temperature", 298.15),  # refused
    ("25 °C", "temperature", 298.15),
    ("25 degC", "temperature", 298.15),
    ("25 deg C", "temperature", 298.15),
    ("25 deg. C", "temperature", 298.15),
    ("25 degree Celsius", "temperature", 298.15),
    ("25 degrees C", "temperature", 298.15),
    ("25 Celsius", "temperature", 298.15),
    ("25 ° C", "temperature", 298.15),
    ("-40 °C", "temperature", 233.15),
    ("150 °C", "temperature", 423.15),
    ("1 K∕W", "thermal resistance", 1.0),  # division dropped: kelvin watt
    ("0.5 °C/W", "thermal resistance", 0.5),  # 273.65 K/W with automatic offset conversion
    ("0.5 K / W", "thermal resistance", 0.5),
    ("500 mK/W", "thermal resistance", 0.5),
    ("500 K/kW", "thermal resistance", 0.5),
    ("500 m°C/W", "thermal resistance", 0.5),
    ("0.35 K/mW", "thermal resistance", 350.0),
    ("2 mV/°C", "voltage tempco", 2e-3),  # 0.0072953 mV/K
    ("-2 mV/K", "voltage tempco", -2e-3),
    ("3 Ω", "resistance", 3.0),  # the ohm sign is refused, the Greek letter is not
    ("3 Ω", "resistance", 3.0),
    ("2.2 kΩ", "resistance", 2200.0),
    ("45 mOhm", "resistance", 0.045),
    ("1 MOhm", "resistance", 1e6),
    ("1 kOhm", "resistance", 1e3),
    ("10 Ohm", "resistance", 10.0),
    ("10 K", "temperature difference", 10.0),  # kelvin sign
    ("10 µs", "time", 1e-5),
    ("10 μs", "time", 1e-5),
    ("10 us", "time", 1e-5),
    ("10\u00a0us", "time", 1e-5),
    ("10\u2009us", "time", 1e-5),
    ("10us", "time", 1e-5),
    ("2 min", "time", 120.0),
    ("1 h", "time", 3600.0),
    ("1 S", "conductance", 1.0),
    ("12 A/V", "conductance", 12.0),
    ("1 s", "time", 1.0),
    ("1 H", "inductance", 1.0),
    ("25 C", "charge", 25.0),
    ("3 Ws", "energy", 3.0),
    ("4 mJ/K", "heat capacity", 4e-3),
    ("4 Ws/K", "heat capacity", 4.0),
    ("3 W/(m K)", "thermal conductivity", 3.0),
    ("3 W/(m*K)", "thermal conductivity", 3.0),
    ("3 W/(m·K)", "thermal conductivity", 3.0),
    ("3 W/m/K", "thermal conductivity", 3.0),
    ("5 cm²", "area", 5e-4),
    ("5 cm^2", "area", 5e-4),
    ("5 mm2", "area", 5e-6),
    ("36 m³/h", "flow", 0.01),
    ("100 cfm", "flow", 100 * 0.3048**3 / 60),  # centifermi
    ("3.6 km/h", "velocity", 1.0),
    ("80 %", "ratio", 0.8),
    ("80%", "ratio", 0.8),
    ("180 deg", "angle", 180.0),
    ("60°", "angle", 60.0),
    ("+.5 V", "voltage", 0.5),
    ("5. V", "voltage", 5.0),
    ("1e3 V", "voltage", 1000.0),
    ("1E-3V", "voltage", 1e-3),
    (" 12 V ", "voltage", 12.0),
    ("5e−3 V", "voltage", 5e-3),  # 15 elementary charges volt
]

REFUSED = [
    "1,5 V", "1,000 V", "1_000 V", "1 500 V", "1.2.3 V", "[1,2] V", "–5 V", "15 ma", "1 pa", "1 a", "15 MA", "1 Nm",
    "1 k", "1 M", "1 e", "1 c", "1 pi", "1e V", "7 % 4", "2 2 V", "1 V; 2 V", "1 V # c", "1 V\x00", "1 😀", "K?",
    "1(2) V", "1±0.1 V", "nan V", "inf V", "-inf V", "infinity V", "NaN", "1e999 V", "1e400", "V", "lambda: 1", "a.b",
    "1/3 V", "   ", "", "()", '__import__("os")', "1 V/", "9**9**9 V", "9^9^9^9", "10**10**8", "1 V**9**9**9",
    "10^10^7 V", "9" * 10_000 + " V", "1 " + "x" * 10_000, "(" * 1000, "٣ V", "１２ V", "1 V\n", "1\nV", "\ud800 V",
    "1 \ud800", "10**400.0 V", "1 kw", "1 KW", "1 Mw", "1 Kg", "1 hz", "1 khz", "1 v", "1 w", "1 j", "1 ΔK", "1 °K",
    "1 Volt", "5 A 3 V", "2*3 V", "2 V + 3 V", "2 to 3 V", "2..3 V", "0x10 V", "4k7", "1 dB", "V 5", "5 V^0",
    "1 a/b/c/d/e", "1 abcdefghijklm", "1 V^5", "1 (V)", "-300 degC",
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension", "si"), READ)
def test_a_text_of_the_trade_is_read(text: str, dimension: str, si: float) -> None:
    reading = read(text, dimension)
    assert reading.si == pytest.approx(si, rel=1e-14)
    assert reading.caution == ""


@pytest.mark.parametrize("text", REFUSED)
def test_a_doubtful_text_is_refused_whatever_is_wanted(text: str) -> None:
    for dimension in DIMENSIONS:
        with pytest.raises(QuantityError):
            read(text, dimension)


@pytest.mark.parametrize("value", [None, True, 5, 5.0, float("nan"), 10**400, b"5 V", [], ["5 V"], {}, object()])
def test_what_is_not_a_text_is_refused(value: object) -> None:
    with pytest.raises(QuantityError):
        read(value, "voltage")


@pytest.mark.parametrize("name", sorted(UNITS))
def test_a_unit_is_refused_where_another_dimension_is_wanted(name: str) -> None:
    for dimension in DIMENSIONS.keys() - {UNITS[name].dimension}:
        with pytest.raises(QuantityError):
            read(f"1 {name}", dimension)


def test_a_decimal_prefix_costs_no_rounding() -> None:
    # Analytic limit: the float nearest to the decimal number, which 10 * 1e-6 is not.
    assert read("10 us", "time").si == 1e-5
    assert read("2.2 kohm", "resistance").si == 2200.0
    assert read("0.83 K/W", "thermal resistance").si == 0.83
    assert read("80 %", "ratio").si == 0.8


def test_both_ends_of_the_band_are_plausible() -> None:
    assert read("1 A", "current", (1.0, 2.0)).si == 1.0
    assert read("2 A", "current", (1.0, 2.0)).si == 2.0
    with pytest.raises(QuantityError):
        read("2.0001 A", "current", (1.0, 2.0))
    with pytest.raises(QuantityError):
        read("0.9999 A", "current", (1.0, 2.0))


def test_an_unknown_dimension_is_a_bug_and_not_an_input_error() -> None:
    with pytest.raises(KeyError):
        read("1 V", "volume")


_likely = st.text(alphabet="0123456789.,eE+-−/*^()% \u00a0VAWKCJsmkuµΩ°degCohnpM", max_size=14)
_near = st.builds(
    lambda number, blank, unit, tail: f"{number}{blank}{unit}{tail}",
    st.one_of(st.floats().map(str), st.integers(-(10**9), 10**9).map(str)),
    st.sampled_from(["", " ", "  ", "\t", "\u2009"]),
    st.sampled_from(sorted(UNITS)),
    st.sampled_from(["", " ", "\n", "^2", "/s", ";", "0"]),
)


@given(st.one_of(st.text(max_size=80), _likely, _near), st.sampled_from(sorted(DIMENSIONS)))
@example("1 V\x00", "voltage")
@example("1 Δ°C", "temperature")
def test_any_text_gives_a_finite_number_or_a_quantity_error(text: str, dimension: str) -> None:
    answer = _answer(text, dimension)
    if isinstance(answer, float):
        assert math.isfinite(answer)
        return
    assert answer.problem
    assert answer.remedy
    assert str(answer).replace("\n", "").isprintable()
    if answer.instead:  # what is offered must itself be right
        assert isinstance(_answer(answer.instead, dimension), float)


def _answer(text: str, dimension: str) -> float | QuantityError:
    try:
        return read(text, dimension).si
    except QuantityError as error:
        return error
