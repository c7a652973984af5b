"""Reading a file as TOML: whatever the path points at and whatever stands in it, there is an answer."""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

import pytest

from soacheck.errors import InputError, Problem
from soacheck.table import parse_source, read_source


def refused(path: Path) -> Problem:
    with pytest.raises(InputError) as caught:
        read_source(path, shown_as="amp.toml")
    (problem,) = caught.value.problems
    assert problem.file == "amp.toml"
    return problem


def wrong(text: str) -> Problem:
    with pytest.raises(InputError) as caught:
        parse_source(text, shown_as="amp.toml")
    (problem,) = caught.value.problems
    return problem


@pytest.fixture
def file(tmp_path: Path) -> Path:
    return tmp_path / "amp.toml"


def test_a_missing_file_is_named(file: Path) -> None:
    assert refused(file).problem == "there is no such file"


def test_a_folder_a_fifo_and_a_device_are_refused_without_waiting(file: Path, tmp_path: Path) -> None:
    assert refused(tmp_path).problem == "this is a folder, not a file"
    os.mkfifo(file)
    assert refused(file).problem == "this is not a regular file"
    assert refused(Path("/dev/zero")).problem == "this is not a regular file"
    assert refused(Path("/dev/null")).problem == "this is not a regular file"


def test_a_path_that_cannot_be_opened_says_why(file: Path, tmp_path: Path) -> None:
    file.symlink_to(file)
    assert "cannot be read" in refused(file).problem
    assert "cannot be read" in refused(tmp_path / "amp\x00.toml").problem
    assert "cannot be read" in refused(tmp_path / ("é" * 200)).problem


def test_an_unreadable_file_says_so(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def denied(*_: object) -> int:  # a file mode would not stop root
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(os, "open", denied)
    problem = refused(file)
    monkeypatch.undo()
    assert problem.problem == "the file cannot be read: Permission denied"


def test_a_file_of_fifty_megabytes_is_refused_unread(file: Path) -> None:
    with file.open("wb") as handle:
        handle.truncate(50_000_000)
    assert refused(file).problem == "the file is larger than 1 MB"


@pytest.mark.parametrize("content", [b"", b" \n\t\n", b"\xef\xbb\xbf"])
def test_an_empty_file_says_so(file: Path, content: bytes) -> None:
    file.write_bytes(content)
    assert refused(file).problem == "the file is empty"
    assert "device new" in refused(file).remedy
    assert "demo" in refused(file).remedy  # it may be a stage


def test_what_is_not_utf8_is_told_with_its_line(file: Path) -> None:
    file.write_bytes(b"a = 1\n# 25 \xb0C\n")
    assert (refused(file).problem, refused(file).line) == ("the file is not UTF-8", 2)
    file.write_bytes("a = 1\n".encode("utf-16"))
    assert refused(file).problem == "the file is UTF-16"


def test_a_byte_order_mark_and_dos_line_ends_are_accepted(file: Path) -> None:
    content = b'\xef\xbb\xbf[max]\r\nP_tot = "1 W"\r\n'
    file.write_bytes(content)
    source = read_source(file, shown_as="amp.toml")
    assert source.data == {"max": {"P_tot": "1 W"}}
    assert source.sha256 == hashlib.sha256(content).hexdigest()


def test_lone_carriage_returns_are_refused_by_name() -> None:
    assert "carriage return" in wrong('a = "1"\rb = "2"\r').problem


@pytest.mark.parametrize(
    "text",
    [
        "a = " + "[" * 100_000,
        "a = " + "[" * 400 + "]" * 400,
        "a = " + "[" * 20 + "]" * 20,
        "a = " + "{ a = " * 300 + "1" + "}" * 300,
        "\n".join("[" + ".".join(["a"] * depth) + "]" for depth in range(1, 18)),
    ],
)
def test_deep_nesting_is_refused(text: str) -> None:
    assert "too deeply" in wrong(text).problem or "dotted key" in wrong(text).problem


@pytest.mark.parametrize("part", ["a", '"a"', "'a.b'"])
def test_a_dotted_key_of_many_parts_is_refused_before_it_is_parsed(part: str) -> None:
    assert "a dotted key of more than 16 parts" in wrong("x = 1\n" + ".".join([part] * 20_000) + " = 1").problem


def test_many_decimal_points_on_a_line_are_no_dotted_key() -> None:
    numbers = ", ".join(f"{number}.5" for number in range(200))
    assert len(parse_source(f"a = [{numbers}]", shown_as="amp.toml").data["a"]) == 200


def test_many_lines_and_endless_numbers_are_refused() -> None:
    assert "more than 10000 lines" in wrong("a = 1\n" * 10_002).problem
    assert "thousands of digits" in wrong("a = " + "9" * 5000).problem


@pytest.mark.parametrize(
    ("text", "line", "column", "remedy"),
    [
        ("rth = 0.83 K/W", 1, 12, 'values with units need quotes: rth = "0.83 K/W"'),
        ("\n[max]\nT_j = 150 degC  # rating", 3, 11, 'values with units need quotes: T_j = "150 degC"'),
        ("a = 1,5", 1, 6, "use a decimal point"),
        ("a = True", 1, 5, "lower case"),
        ("a = yes", 1, 5, "lower case"),
        ("a = .5", 1, 5, "0.5"),
        ("a = npn", 1, 5, 'text needs quotes: a = "npn"'),
        ('a: "x"', 1, 2, "joined by =, not by a colon"),
        ("Rθ = 1", 1, 2, "keys are letters, digits"),
        ('a = "C:\\Users"', 1, 10, "single quotes"),
        ("\u00a0a = 1", 1, 1, "no-break space"),
        ("a = “x”", 1, 5, "plain quotes"),
        ("a = 1\na = 2\nb = 3", 2, 6, "a stands twice"),
        ("[a]\n[a]", 2, 3, "[a] stands twice"),
        ('a = "x\x00"', 1, 7, "control character"),
        ("[a", 1, None, "close every quote and every bracket"),
        ('a = "x', 1, None, "close every quote and every bracket"),
        ("a = [1,\n\n", 1, None, "close every quote and every bracket"),
        ("= 1", 1, 1, "a line is"),
    ],
)
def test_a_syntax_error_has_line_column_and_a_remedy(text: str, line: int, column: int | None, remedy: str) -> None:
    problem = wrong(text)
    assert (problem.line, problem.column) == (line, column)
    assert remedy in problem.remedy
    assert problem.problem.startswith("not valid TOML: ")


def test_the_line_of_a_syntax_error_is_shown_with_a_mark_under_the_place() -> None:
    assert str(wrong("rth = 0.83 K/W")) == (
        "amp.toml:1:12\n"
        "  problem: not valid TOML: Expected newline or end of document after a statement\n"
        "           rth = 0.83 K/W\n"
        "                      ^\n"
        '  remedy:  values with units need quotes: rth = "0.83 K/W"'
    )
