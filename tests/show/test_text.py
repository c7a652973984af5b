"""Numbers with their units, lines that fit, text that a terminal cannot be tricked with."""

from __future__ import annotations

import math
import os
import pty
import termios
import unicodedata
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.show.text import (
    cells,
    clean,
    encodable,
    number,
    page_width,
    pair,
    percent,
    plain,
    quantity,
    wants_colour,
    wrapped,
)

from .build import HOSTILE

SIZES = st.floats(min_value=1e-15, max_value=1e15)


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (22.34, "W", "22.34 W"),
        (0.85, "A", "0.85 A"),
        (0.012, "A", "12 mA"),
        (4.2e-5, "A", "42 uA"),
        (0.01, "s", "10 ms"),
        (1800.0, "s", "1800 s"),
        (2200.0, "ohm", "2.2 kohm"),
        (0.47, "ohm", "0.47 ohm"),
        (0.83, "K/W", "0.83 K/W"),
        (313.15, "degC", "40.0 degC"),
        (273.15 - 1e-9, "degC", "0.0 degC"),
        (0.0, "A", "0 A"),
        (0.5, "1", "0.5"),
        (math.nan, "W", "unknown"),
        (math.inf, "W", "unlimited W"),
    ],
)
def test_a_quantity_is_printed_with_its_unit_and_a_prefix_where_that_reads_better(
    value: float, unit: str, text: str
) -> None:
    assert quantity(value, unit) == text


def test_a_number_that_rounds_up_to_the_next_prefix_takes_it() -> None:
    assert quantity(9.99996e-3, "s") == "10 ms"
    assert quantity(0.9999996e-3, "s") == "1 ms"


@given(SIZES, st.sampled_from(["V", "A", "W", "s", "ohm", "Hz", "F", "H"]))
def test_a_printed_quantity_reads_back_to_four_digits(value: float, unit: str) -> None:
    text, printed_unit = quantity(value, unit).split(" ")
    prefix = {"p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "": 1.0, "k": 1e3, "M": 1e6, "G": 1e9}[
        printed_unit.removesuffix(unit)
    ]
    assert float(text) * prefix == pytest.approx(value, rel=5.1e-4)


@given(SIZES)
def test_a_value_put_into_a_formula_keeps_five_digits_and_its_base_unit(value: float) -> None:
    text, unit = plain(value, "A").split(" ")
    assert unit == "A"
    assert float(text) == pytest.approx(value, rel=5.1e-5)


def test_two_amounts_that_differ_never_look_equal() -> None:
    assert pair(150.00004, 150.0, "W") == "150.00004 of 150 W"
    assert pair(423.15004, 423.15, "degC") == "150.00004 of 150.00000 degC"


def test_two_amounts_share_the_unit_of_the_allowance() -> None:
    assert pair(1.2, 0.0851, "A") == "1200 of 85.1 mA"
    assert pair(12.0, 0.0, "W") == "12 of 0 W"
    assert pair(0.4, 1.0, "1") == "0.4 of 1"


def test_an_unknown_amount_is_called_so() -> None:
    assert pair(math.nan, 150.0, "W") == "unknown of 150 W"
    assert pair(12.0, math.nan, "W") == "12 W of unknown"
    assert pair(math.nan, math.nan, "W") == "unknown"


@pytest.mark.parametrize(
    ("utilisation", "text"),
    [
        (1.41, "141 %"),
        (0.083, "8.3 %"),
        (0.0, "0.0 %"),
        (1.0, "100 %"),
        (1.00003, "100.003 %"),
        (0.9999, "99.99 %"),
    ],
)
def test_only_an_exact_hundred_percent_is_printed_as_one(utilisation: float, text: str) -> None:
    assert percent(utilisation) == text


@pytest.mark.parametrize("utilisation", [math.nan, math.inf])
def test_a_utilisation_without_a_number_is_a_dash(utilisation: float) -> None:
    assert percent(utilisation) == "-"


@given(st.text())
def test_cleaned_text_holds_nothing_that_a_terminal_obeys(text: str) -> None:
    assert not any(unicodedata.category(sign) in ("Cc", "Cf", "Zl", "Zp") for sign in clean(text))


def test_brackets_dollars_and_tags_are_text() -> None:
    assert clean(HOSTILE) == "[/red]$x_1$<script>alert(1)</script>[31mred]0;title desrever1m  {0}%s\\"


@given(st.text(), st.integers(min_value=20, max_value=120))
def test_wrapped_lines_fit_and_lose_no_word(text: str, width: int) -> None:
    lines = wrapped(text, "  - ", width=width)
    assert all(cells(line) <= width for line in lines)
    wanted = clean(text).replace(" ", "").replace("\u00a0", "")
    assert "".join(lines).replace(" ", "").removeprefix("-") == wanted or wanted.strip() != wanted


def test_a_line_does_not_end_between_a_number_and_its_unit() -> None:
    assert wrapped("the current is 0.851 A here", width=21) == ["the current is", "0.851 A here"]


def test_signs_that_an_encoding_lacks_become_words() -> None:
    assert encodable("25 °C, 2 Ω, 10 µs", "ascii") == "25 degC, 2 ohm, 10 us"
    assert encodable("25 °C, 2 Ω, 10 µs", "cp1252") == "25 °C, 2 ohm, 10 µs"
    assert encodable("25 °C, 2 Ω, 10 µs", "utf-8") == "25 °C, 2 Ω, 10 µs"
    assert encodable("日本", "ascii") == "\\u65e5\\u672c"
    assert encodable("bad\udcb0name", "utf-8") == "bad\\udcb0name"


def test_a_number_stays_readable_at_both_ends() -> None:
    assert number(1e-9) == "1.000e-09"
    assert number(123456.0) == "123456"
    assert number(-0.5) == "-0.5"


class Terminal:
    def isatty(self) -> bool:
        return True


def test_colour_needs_a_terminal_that_nobody_asked_to_keep_plain(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm")
    assert wants_colour(Terminal())
    assert not wants_colour(None)
    monkeypatch.setenv("NO_COLOR", "1")
    assert not wants_colour(Terminal())
    monkeypatch.delenv("NO_COLOR")
    monkeypatch.setenv("TERM", "dumb")
    assert not wants_colour(Terminal())


@pytest.mark.parametrize(
    ("value", "unit", "text"), [(1.019e-30, "A", "0 A"), (-2e-18, "V", "0 V"), (3e-18, "s", "3.000e-06 ps")]
)
def test_what_is_only_rounding_is_nothing(value: float, unit: str, text: str) -> None:
    assert quantity(value, unit) == text


def test_beside_an_allowance_a_rounding_is_nothing() -> None:
    assert pair(1.019e-30, 15.0, "A") == "0 of 15 A"
    assert plain(1.019e-30, "A") == "0 A"


@pytest.mark.parametrize(("asked", "width"), [("60", 60), ("20", 40), ("200", 80), ("wide", 80), ("", 80), ("0", 80)])
def test_a_page_is_as_wide_as_columns_asks_within_our_bounds(
    asked: str, width: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", asked)
    assert page_width(None) == width


def test_a_page_is_as_wide_as_a_narrow_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("COLUMNS", raising=False)
    ours, theirs = pty.openpty()
    try:
        termios.tcsetwinsize(theirs, (24, 60))
        with os.fdopen(theirs, "w", closefd=False) as stream:
            assert page_width(stream) == 60
    finally:
        os.close(ours)
        os.close(theirs)


def test_a_file_gets_a_full_page(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("COLUMNS", raising=False)
    with (tmp_path / "kept.txt").open("w") as stream:
        assert page_width(stream) == 80
