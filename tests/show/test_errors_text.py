"""Errors of the input on the terminal."""

from __future__ import annotations

from soacheck.errors import Problem
from soacheck.show.errors_text import errors_text

from .build import HOSTILE


def test_a_problem_has_place_key_value_problem_and_remedy() -> None:
    problem = Problem(
        file="amp.toml",
        line=12,
        key="max.P_tot",
        value="'150 V'",
        problem="a power is wanted",
        remedy='P_tot = "150 W"',
    )
    assert errors_text([problem]) == (
        "amp.toml:12: max.P_tot = '150 V'\n  problem: a power is wanted\n  remedy:  P_tot = \"150 W\"\n"
    )


def test_a_place_is_never_broken_into_two_lines() -> None:
    place = "/".join(["a-long-folder-name"] * 10) + "/amp.toml"
    assert f"{place}:12: " in errors_text([Problem(file=place, line=12, key="k", problem="p", remedy="r")])


def test_several_problems_are_counted() -> None:
    problems = [Problem(problem="p", remedy="r")] * 3
    assert errors_text(problems).endswith("\n3 errors\n")


def test_hostile_values_cannot_fake_a_line_or_reach_the_terminal() -> None:
    text = errors_text([Problem(problem=HOSTILE, remedy=HOSTILE, file=HOSTILE, key=HOSTILE, value=HOSTILE, line=1)])
    assert text.count("\n") == 3
    assert "\x1b" not in text
    assert "\u202e" not in text
