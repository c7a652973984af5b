"""How errors are told."""

from __future__ import annotations

from soacheck.errors import InputError, Problem, QuantityError, SoacheckError, plain


def test_a_problem_reads_like_a_compiler_message() -> None:
    problem = Problem(
        problem="a power is wanted here, V measures a voltage", remedy='P_tot = "150 W"',
        file="amp.toml", line=12, key="max.P_tot", value="'150 V'",
    )  # fmt: skip
    assert str(problem) == (
        "amp.toml:12: max.P_tot = '150 V'\n"
        "  problem: a power is wanted here, V measures a voltage\n"
        '  remedy:  P_tot = "150 W"'
    )


def test_a_problem_without_a_place_starts_with_what_is_wrong() -> None:
    assert str(Problem(problem="a", remedy="b")) == "  problem: a\n  remedy:  b"
    assert str(Problem(problem="a", remedy="b", key="point.V", value="'x'")).startswith("point.V = 'x'\n")


def test_no_control_character_of_a_file_reaches_the_terminal() -> None:
    problem = Problem(problem="a\x1b[2J\nb", remedy="c\x07", file="x\r.toml", key="k\x00", value="'\x1b]0;t\x07'")
    assert str(problem).replace("\n", "").isprintable()
    assert str(problem).count("\n") == 2  # nor can a text fake a line


def test_an_excerpt_stands_under_the_problem() -> None:
    problem = Problem(problem="a", remedy="b", excerpt=("x = \x1b1", "    ^"))
    assert str(problem) == "  problem: a\n           x = \\x1b1\n               ^\n  remedy:  b"


def test_text_for_a_message_is_cut_and_escaped() -> None:
    assert plain("short") == "short"
    assert plain("x" * 100) == "x" * 57 + "..."
    assert plain("a\u202eb\ud800") == "a\\u202eb\\ud800"


def test_our_errors_have_one_base() -> None:
    assert issubclass(InputError, SoacheckError)
    assert issubclass(QuantityError, SoacheckError)
    assert InputError(Problem(problem="a", remedy="b")).problems[0].remedy == "b"
