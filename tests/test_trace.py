"""Traced values: the formula that is printed is the formula that was computed."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.trace import derived, distinct, found, given


def test_a_formula_is_evaluated_from_its_own_text() -> None:
    R, P, T = (
        given("R", [0.4, 0.5], "K/W", "file"),
        given("P", 20.0, "W", "file"),
        given("T", 300.0, "degC", "file"),
    )
    T_case = derived("T_case", "T + R * P", "degC", T, R, P)
    assert T_case.value.tolist() == [308.0, 310.0]
    assert T_case.inputs == (T, R, P)


def test_formula_and_inputs_must_name_the_same_symbols() -> None:
    a, b = given("a", 1.0, "1", ""), given("b", 1.0, "1", "")
    with pytest.raises(ValueError, match="needs"):
        derived("c", "a + z", "1", a)
    with pytest.raises(ValueError, match="needs"):
        derived("c", "a + a", "1", a, b)


@pytest.mark.parametrize("formula", ["a.real", "a[0]", "lambda: a", "a if a else a", "'x'.join(a)", "a and a", "a < a"])
def test_only_arithmetic_is_a_formula(formula: str) -> None:
    with pytest.raises(ValueError, match=r"not arithmetic|needs"):
        derived("c", formula, "1", given("a", 1.0, "1", ""))


def test_a_typical_value_is_seen_through_any_number_of_formulas() -> None:
    typical = given("R_th_jc", 0.8, "K/W", "file", "typical")
    once = derived("rise", "R_th_jc * 10", "K", typical)
    assert found("peak", [1.0], "K", "search", once).typical_below
    assert not given("x", 1.0, "1", "file", "guaranteed").typical_below


def test_values_cannot_be_changed_afterwards() -> None:
    source = np.array([1.0, 2.0])
    traced = given("x", source, "1", "file")
    source[0] = 9.0
    assert traced.value[0] == 1.0
    with pytest.raises(ValueError, match="read-only"):
        traced.value[0] = 3.0


def test_walk_gives_each_input_once_and_before_what_is_made_of_it() -> None:
    a = given("a", 1.0, "1", "")
    b = derived("b", "a * 2", "1", a)
    c = derived("c", "a + b", "1", a, b)
    assert [node.symbol for node in c.walk()] == ["a", "b", "c"]


def test_distinct_values_rise_and_stand_once() -> None:
    values = np.array([[3.0, 1.0], [np.inf, 3.0]])
    assert distinct(values).tolist() == [1.0, 3.0, np.inf]
    assert distinct([]).size == 0
