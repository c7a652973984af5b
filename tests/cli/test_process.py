"""The process as a shell sees it: streams, exit statuses, what is loaded."""

from __future__ import annotations

import json
import os
import pty
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

import soacheck

SOACHECK = [sys.executable, "-m", "soacheck"]
# prints the names of all loaded modules when the process ends, whatever its exit status
LOADED = (
    "import atexit, sys; atexit.register(lambda: print(' '.join(sorted(sys.modules)), file=sys.stderr)); "
    "from soacheck.cli import main; main()"
)


def run(
    *arguments: str, env: dict[str, str] | None = None, cwd: Path | None = None
) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path), **(env or {})}
    return subprocess.run(
        [*SOACHECK, *arguments],
        env=environment,
        cwd=cwd,
        capture_output=True,
        text=True,
        check=False,
        timeout=60,
    )


def loaded(*arguments: str, cwd: Path | None = None) -> set[str]:
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(
        [sys.executable, "-c", LOADED, *arguments],
        env=environment,
        cwd=cwd,
        capture_output=True,
        text=True,
        check=False,
    )
    assert "Traceback" not in done.stderr
    return set(done.stderr.splitlines()[-1].split())


def test_the_version_is_that_of_the_package_and_loads_no_parser() -> None:
    assert run("--version").stdout == f"soacheck {soacheck.__version__}\n"
    assert not loaded("--version") & {"typer", "numpy", "pint", "pydantic"}


def test_help_loads_neither_numpy_nor_the_decorations_of_the_parser() -> None:
    assert not loaded("--help") & {"numpy", "scipy", "matplotlib", "pint", "rich"}


def test_check_loads_only_what_it_computes_with() -> None:
    examples = Path(soacheck.__file__).parent / "examples"
    modules = loaded("check", "greenhouse-vent.toml", cwd=examples)
    assert "numpy" in modules
    assert not modules & {"matplotlib", "pint", "scipy.signal", "scipy.optimize", "rich", "numpy.ma", "pydantic"}


def test_help_lists_only_commands_that_work_and_fits_eighty_columns() -> None:
    text = run("--help", env={"COLUMNS": "80"}).stdout
    commands = re.findall(r"^  (\w[\w-]*)  ", text.split("Commands:")[1], re.MULTILINE)
    assert commands == ["check", "point", "plot", "demo", "device"]
    assert max(map(len, text.splitlines())) <= 80


@pytest.mark.parametrize(
    "arguments", [(), ("chek",), ("size", "x.toml"), ("check",), ("device",), ("check", "--change")]
)
def test_a_wrong_command_line_ends_with_2_and_says_what_is_possible(arguments: tuple[str, ...]) -> None:
    done = run(*arguments)
    assert (done.returncode, done.stdout) == (2, "")
    assert "--help" in done.stderr
    assert "Traceback" not in done.stderr


def test_a_misspelt_command_is_told_the_nearest() -> None:
    assert "Did you mean 'check'?" in run("chek").stderr


def test_a_wrong_command_line_with_json_gives_the_errors_document() -> None:
    done = run("check", "--json")
    assert done.returncode == 2
    (error,) = json.loads(done.stdout)["errors"]
    assert error.keys() == {"file", "line", "key", "value", "problem", "remedy"}
    assert done.stderr == ""


def test_json_and_sheet_exclude_each_other(tmp_path: Path) -> None:
    done = run("check", str(tmp_path / "absent.toml"), "--json", "--sheet")
    assert done.returncode == 2


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_the_shell_gets_a_completion_script(shell: str) -> None:
    done = run(env={"_SOACHECK_COMPLETE": f"source_{shell}"})
    assert done.returncode == 0
    assert "_SOACHECK_COMPLETE" in done.stdout


def test_the_shell_completes_a_command() -> None:
    done = run(env={"_SOACHECK_COMPLETE": "complete_bash", "COMP_WORDS": "soacheck ch", "COMP_CWORD": "1"})
    assert (done.returncode, done.stdout.split()) == (0, ["check"])


def test_a_completion_that_fails_is_never_taken_for_a_verdict() -> None:
    assert run(env={"_SOACHECK_COMPLETE": "nonsense"}).returncode == 2


def ended(command: str) -> tuple[int, str]:
    """Exit status and standard error of a command line of the shell."""
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(["sh", "-c", command], env=environment, capture_output=True, text=True, check=False)
    return done.returncode, done.stderr


@pytest.mark.parametrize("arguments", ["--version", "--help"])
def test_output_that_cannot_be_written_ends_with_74(arguments: str) -> None:
    command = f"'{sys.executable}' -m soacheck {arguments}"
    for redirection in (">&-", ">/dev/full"):
        status, errors = ended(f"{command} {redirection}")
        assert status == 74
        assert "cannot be written" in errors
        assert "Exception ignored" not in errors


def test_a_reader_that_goes_away_ends_the_process_quietly_with_141() -> None:
    reader, writer = os.pipe()
    os.close(reader)
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(
        [*SOACHECK, "--help"], stdout=writer, stderr=subprocess.PIPE, env=environment, check=False, text=True
    )
    os.close(writer)
    assert (done.returncode, done.stderr) == (141, "")


def test_closed_standard_error_does_not_change_the_verdict() -> None:
    assert ended(f"'{sys.executable}' -m soacheck chek 2>&-")[0] == 2


def test_an_interrupt_ends_with_130_and_without_a_traceback(tmp_path: Path) -> None:
    program = (
        "import time, sys; import soacheck.cli.commands as commands\n"
        "def wait(*a, **k): print('ready', file=sys.stderr, flush=True); time.sleep(60)\n"
        "commands._rendered = wait\n"
        "import soacheck.cli; sys.argv = ['soacheck', 'check', 'absent.toml']; soacheck.cli.main()"
    )
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    process = subprocess.Popen(
        [sys.executable, "-c", program], stderr=subprocess.PIPE, stdout=subprocess.PIPE, text=True,
        env=environment, cwd=tmp_path,
    )  # fmt: skip
    assert process.stderr is not None
    assert process.stderr.readline() == "ready\n"
    process.send_signal(signal.SIGINT)
    out, errors = process.communicate(timeout=30)
    assert (process.returncode, out, errors) == (130, "", "")


def test_a_fault_of_our_own_keeps_its_traceback_and_ends_with_70() -> None:
    program = (
        "import sys; import soacheck.cli.commands as commands\n"
        "def broken(*a, **k): raise ZeroDivisionError('a bug')\n"
        "commands._rendered = broken\n"
        "import soacheck.cli; sys.argv = ['soacheck', 'check', 'absent.toml']; soacheck.cli.main()"
    )
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    command = [sys.executable, "-c", program]
    done = subprocess.run(command, capture_output=True, text=True, env=environment, check=False)
    assert (done.returncode, done.stdout) == (70, "")
    assert "ZeroDivisionError: a bug" in done.stderr
    assert done.stderr.endswith("a fault in soacheck itself, not a verdict\n")


@pytest.mark.parametrize(
    "environment",
    [
        {"PYTHONIOENCODING": "ascii"},
        {"PYTHONIOENCODING": "cp1252"},
        {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
        {"COLUMNS": "5"},
        {"FORCE_COLOR": "1"},
    ],
)
def test_an_odd_terminal_gets_plain_text(environment: dict[str, str], tmp_path: Path) -> None:
    done = run("check", "Ω-日本.toml", env=environment, cwd=tmp_path)
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
    assert "\x1b" not in done.stderr


def test_the_file_name_of_an_error_is_shown_in_the_signs_of_the_terminal(tmp_path: Path) -> None:
    done = run("check", "2 Ω.toml", env={"PYTHONIOENCODING": "ascii", "PYTHONUTF8": "1"}, cwd=tmp_path)
    assert "2 ohm.toml" in done.stderr


def on_a_terminal(*arguments: str, env: dict[str, str], cwd: Path) -> str:
    """What a command writes when its standard output is a terminal."""
    controller, terminal = pty.openpty()
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path), "TERM": "xterm", **env}
    process = subprocess.Popen([*SOACHECK, *arguments], stdout=terminal, stderr=terminal, env=environment, cwd=cwd)
    os.close(terminal)
    pieces = []
    deadline = time.monotonic() + 60
    while time.monotonic() < deadline:
        try:
            piece = os.read(controller, 65536)
        except OSError:  # Linux: the terminal's last user has closed it
            break
        if not piece:
            break
        pieces.append(piece)
    process.wait(timeout=30)
    os.close(controller)
    return b"".join(pieces).decode()


def test_a_terminal_gets_colour_unless_it_is_asked_not_to() -> None:
    examples = Path(soacheck.__file__).parent / "examples"
    coloured = on_a_terminal("check", "greenhouse-vent.toml", env={"NO_COLOR": ""}, cwd=examples)
    plain = on_a_terminal("check", "greenhouse-vent.toml", env={"NO_COLOR": "1"}, cwd=examples)
    assert "\x1b[" in coloured
    assert re.sub("\x1b\\[[0-9;]*m", "", coloured) == plain
