"""The commands, run in this process: what they print and their exit status."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest

import soacheck
from soacheck.cli.answer import ExitStatus, worst
from soacheck.cli.process import run
from soacheck.device.ratings import KINDS
from tests.whole import DEVICE, HELD

EXAMPLES = Path(soacheck.__file__).parent / "examples"


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A working folder with a device and three stages."""
    (tmp_path / "test-npn.toml").write_text(DEVICE)
    (tmp_path / "held.toml").write_text(HELD)
    (tmp_path / "no-sink.toml").write_text(HELD.replace('heatsink = "1.2 K/W"', ""))
    (tmp_path / "hot.toml").write_text(HELD.replace('V_CC = "24 V"', 'V_CC = "90 V"'))
    (tmp_path / "wrong.toml").write_text(HELD.replace('V_CC = "24 V"', 'V_CC = "24 W"').replace("I_CQ", "I_CX"))
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize(
    ("verdicts", "status"),
    [
        (("within",), 0),
        (("exceeds",), 1),
        (("unproven",), 3),
        (("marginal",), 4),
        (("marginal", "within"), 4),
        (("marginal", "unproven"), 3),
        (("unproven", "exceeds", "marginal"), 1),
    ],
)
def test_the_exit_status_is_that_of_the_worst_stage(verdicts: tuple[str, ...], status: int) -> None:
    assert worst(verdicts) == status


def test_no_verdict_shares_its_status_with_a_fault() -> None:
    assert len(set(ExitStatus)) == len(ExitStatus.__members__) == 9


def test_check_prints_the_verdict_first_and_nothing_else_on_standard_error(
    folder: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    status = run(["check", "held.toml"])
    out, errors = capfd.readouterr()
    word = out.split(":")[0]
    assert status == ExitStatus[word]
    assert errors == ""


def test_a_stage_without_a_sink_is_unproven(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "no-sink.toml"]) == ExitStatus.UNPROVEN
    assert "heat_path.heatsink" in capfd.readouterr().out


def test_several_stages_give_a_list_and_the_worst_status(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "no-sink.toml", "hot.toml", "--json"]) == ExitStatus.EXCEEDS
    content = json.loads(capfd.readouterr().out)
    assert [entry["verdict"] for entry in content] == ["unproven", "exceeds"]


def test_errors_of_one_stage_go_to_standard_error_and_the_others_are_still_checked(
    folder: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    assert run(["check", "held.toml", "wrong.toml"]) == ExitStatus.INPUT
    out, errors = capfd.readouterr()
    assert "Findings, worst first" in out
    assert "wrong.toml:" in errors
    assert "load.V_CC" in errors
    assert "load.I_CX" in errors


def test_errors_with_json_are_the_one_document(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "held.toml", "wrong.toml", "--json"]) == ExitStatus.INPUT
    out, errors = capfd.readouterr()
    content = json.loads(out)
    assert content.keys() == {"format", "errors"}
    assert {error["key"] for error in content["errors"]} >= {"load.V_CC", "load.I_CX"}
    assert errors == ""


def test_the_sheet_goes_to_standard_output(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    run(["check", "held.toml", "--sheet"])
    assert capfd.readouterr().out.startswith("CALCULATION SHEET\n")


def test_a_point_is_checked_without_a_stage_file(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["point", "TEST-NPN", "20 V", "1 A", "--case", "60 degC"]) == ExitStatus.WITHIN
    assert run(["point", "TEST-NPN", "80 V", "5 A", "--case", "60 degC"]) == ExitStatus.EXCEEDS
    capfd.readouterr()
    assert run(["point", "TEST-NPN", "80 V", "5"]) == ExitStatus.INPUT
    assert "Traceback" not in capfd.readouterr().err


def test_a_device_is_read_back(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["device", "show", "TEST-NPN"]) == 0
    by_name = capfd.readouterr().out
    assert "160 V" in by_name
    assert run(["device", "show", "test-npn.toml"]) == 0
    assert "160 V" in capfd.readouterr().out


def test_a_rating_file_is_started_but_never_over_another(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["device", "new", "npn", "MY-PART", "-o", "mine.toml"]) == 0
    first = Path("mine.toml").read_text()
    assert "MY-PART" in first
    assert run(["device", "new", "npn", "OTHER", "-o", "mine.toml"]) == ExitStatus.INPUT
    assert Path("mine.toml").read_text() == first
    assert "--force" in capfd.readouterr().err
    assert run(["device", "new", "npn", "OTHER", "-o", "mine.toml", "--force"]) == 0
    assert "OTHER" in Path("mine.toml").read_text()


def test_the_help_names_every_kind_of_device(capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["device", "new", "--help"]) == 0
    assert f"One of: {', '.join(KINDS)}." in " ".join(capfd.readouterr().out.split())


def test_an_unknown_kind_of_device_is_told_the_nearest(capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["device", "new", "n-mosfett"]) == ExitStatus.INPUT
    assert "did you mean n-mosfet?" in capfd.readouterr().err


def test_a_picture_is_drawn_and_its_file_named(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["plot", "held.toml", "safe-area", "-o", "pictures", "--format", "svg"]) == 0
    files = capfd.readouterr().out.split()
    assert len(files) == 1
    assert Path(files[0]).parent == Path("pictures")
    assert Path(files[0]).read_text().startswith("<?xml")


def test_an_unknown_picture_is_told_the_nearest(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["plot", "held.toml", "safe-aera"]) == ExitStatus.INPUT
    assert "did you mean safe-area?" in capfd.readouterr().err


def test_pictures_that_cannot_be_written_end_with_74(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    Path("file").write_text("")
    assert run(["plot", "held.toml", "-o", "file/pictures"]) == ExitStatus.OUTPUT
    assert "cannot be made" in capfd.readouterr().err


def test_the_examples_are_written_once_and_kept_when_changed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert run(["demo", "examples"]) == 0
    names = [line for line in capfd.readouterr().out.splitlines() if not line.startswith("try: ")]
    assert {Path(name) for name in names} == {path for path in Path("examples").rglob("*") if path.is_file()}
    assert run(["demo", "examples"]) == 0  # nothing was changed: nothing to lose
    changed = Path(names[0])
    changed.write_text("mine")
    assert run(["demo", "examples"]) == ExitStatus.INPUT
    assert changed.read_text() == "mine"
    assert run(["demo", "examples", "--force"]) == 0
    assert changed.read_text() != "mine"


def test_every_example_gives_a_verdict(capfd: pytest.CaptureFixture[str]) -> None:
    for stage in sorted(EXAMPLES.glob("*.toml")):
        status = run(["check", str(stage)])
        out, errors = capfd.readouterr()
        assert status in (0, 1, 3, 4), (stage.name, errors)
        assert errors == ""
        assert all(len(line) <= 80 for line in out.splitlines())


def test_a_missing_stage_file_is_an_input_error(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "absent.toml"]) == ExitStatus.INPUT
    out, errors = capfd.readouterr()
    assert out == ""
    assert "absent.toml" in errors
    assert "Traceback" not in errors


def test_a_stage_that_is_no_file_is_answered_at_once(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    os.mkfifo("pipe.toml")
    for name in (".", "pipe.toml", "/dev/zero"):
        assert run(["check", name]) == ExitStatus.INPUT
        assert "Traceback" not in capfd.readouterr().err


def test_a_negative_value_is_told_that_magnitudes_are_wanted(capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["point", "EXAMPLE-PNP-160", "40 V", "-1 A"]) == ExitStatus.INPUT
    assert "values are magnitudes" in capfd.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "head"), [(("plot", "x.toml", "foo"), "NAME = 'foo'"), (("device", "new", "foo"), "KIND = 'foo'")]
)
def test_a_name_that_is_none_is_said_with_its_argument(
    arguments: tuple[str, ...], head: str, capfd: pytest.CaptureFixture[str]
) -> None:
    assert run(arguments) == ExitStatus.INPUT
    assert capfd.readouterr().err.startswith(head)


def test_a_narrow_page_is_honoured(
    folder: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("COLUMNS", "48")
    for more in ((), ("--sheet",)):
        run(["check", str(folder / "held.toml"), *more])
        assert max(map(len, capfd.readouterr().out.splitlines())) <= 48
