"""Whatever stands in a file, there are values or an input error; nothing else."""

from __future__ import annotations

import string

from hypothesis import example, given
from hypothesis import strategies as st

from soacheck.errors import InputError, Problem
from soacheck.table import Document
from tests.table.declarations import COMPLETE, KEYS, document


def everything(read: Document) -> None:
    """Take every value through every accessor that fits its form."""
    for key in KEYS:
        if "." in key.table or key.table in ("", "soa"):
            continue
        cells = read.table(key.table)
        cells.has(key.name)
        cells.missing(key.name)
        cells.text(key.name), cells.flag(key.name), cells.count(key.name), cells.points(key.name)
        cells.inside(key.name), cells.raw(key.name), cells.span(key.name)
        if key.lists != 2:
            cells.quantity(key.name), cells.three(key.name)
    for cells in read.listed("soa"):
        cells.points("points"), cells.text("pulse"), cells.quantity("pulse")
    read.stated()
    read.keys_stated()


def problems_of(text: str, kind: str | None) -> tuple[Problem, ...]:
    try:
        read = document(text, kind)
        everything(read)
        read.finish()
    except InputError as error:
        return error.problems or (Problem(problem="", remedy=""),)
    return ()


def answered(text: str, kind: str | None) -> bool:
    """Whether the file is good; checks that it is told why when it is not."""
    problems = problems_of(text, kind)
    for problem in problems:
        assert problem.problem
        assert problem.remedy
        assert str(problem).replace("\n", "").isprintable()
    return not problems


_kinds = st.sampled_from(["npn", "n-mosfet", None])
_lines = COMPLETE.splitlines()


@given(st.text(max_size=200), _kinds)
@example("\ufeff", None)
@example("a = 1\r", None)
def test_any_text_gives_values_or_an_input_error(text: str, kind: str | None) -> None:
    answered(text, kind)


@given(st.text(alphabet=string.ascii_letters[:6] + "[]{}=\"'.,#\n\t 01\\-_", max_size=60), _kinds)
def test_any_text_like_toml_gives_values_or_an_input_error(text: str, kind: str | None) -> None:
    answered(text, kind)


@given(st.data(), _kinds)
def test_a_good_file_with_any_slip_gives_values_or_an_input_error(data: st.DataObject, kind: str | None) -> None:
    at = data.draw(st.integers(0, len(COMPLETE)))
    cut = data.draw(st.integers(0, 12))
    put = data.draw(st.text(max_size=6) | st.sampled_from(['"', "[", "]", "{", "}", "=", "\n", ",", "0", "-", "."]))
    answered(COMPLETE[:at] + put + COMPLETE[at + cut :], kind)


_atoms = st.sampled_from(
    ["1", "-1", "1e999", "nan", "true", "2020-01-02", '"1 V"', '"-1 V"', '"1 K/W"', '"ideal"', '"x"', '""', "[]", "{}",
     '"10 %"', '"25 degC"', '"dc"', "0x" + "f" * 400, '"\\u001b"']
)  # fmt: skip
_toml = st.recursive(
    _atoms,
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda parts: "[" + ", ".join(parts) + "]"),
        st.dictionaries(st.sampled_from(["value", "min", "max", "tol", "R_th", "grade", "source", "z"]), inner).map(
            lambda parts: "{" + ", ".join(f"{name} = {part}" for name, part in parts.items()) + "}"
        ),
    ),
    max_leaves=6,
)


@given(st.dictionaries(st.sampled_from(KEYS), _toml, min_size=1, max_size=5), _kinds)
def test_any_value_under_any_key_gives_values_or_an_input_error(values: dict[object, str], kind: str | None) -> None:
    lines = []
    for key, value in values.items():
        name = f"{key.table}.{key.name}" if key.table else key.name  # type: ignore[attr-defined]  # keys are Key
        lines.append(f"{name} = {value}")
    answered("\n".join(lines), kind)


def test_the_complete_example_gives_values() -> None:
    assert answered(COMPLETE, "npn")
    assert len(_lines) > 20
