"""The process: arguments to a command, its answer to the streams, every way to end to an exit status."""

from __future__ import annotations

import contextlib
import io
import os
import re
import sys
from collections.abc import Sequence
from typing import TextIO

from soacheck import __version__
from soacheck.cli.answer import Answer, ExitStatus
from soacheck.errors import InputError, OutputError, Problem, SoacheckError
from soacheck.show.errors_text import errors_text
from soacheck.show.text import clean, encodable

_THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
_NEGATIVE = re.compile(r"No such option: -[\d.]")
_COMPLETION = "_SOACHECK_COMPLETE"  # set by the shell's completion script, which gives no arguments


def main() -> None:
    """The entry point of the command `soacheck`."""
    for name in _THREADS:
        os.environ.setdefault(name, "1")  # read when numpy loads: for our small matrices threads only cost
    sys.exit(run(sys.argv[1:]))


def run(arguments: Sequence[str]) -> int:
    """Carry out one command line and return its exit status."""
    try:
        answer = _answered(list(arguments))
        if answer.notes and sys.stderr is not None:
            with contextlib.suppress(OSError):  # nowhere is left to say that standard error is gone
                _write(sys.stderr, answer.notes)
        return _printed(answer)
    except KeyboardInterrupt:
        return ExitStatus.INTERRUPTED


def _answered(arguments: list[str]) -> Answer:
    """The answer of a command, or the one that an exception means. A bug keeps its traceback."""
    as_json = "--json" in arguments
    try:
        return _called(arguments)
    except InputError as error:
        return refused(error.problems, as_json)
    except OutputError as error:
        return Answer(notes=f"soacheck: {clean(str(error))}\n", status=ExitStatus.OUTPUT)
    except SoacheckError as error:
        return refused((Problem(problem=str(error), remedy="soacheck --help"),), as_json)
    except Exception as error:
        usage = _usage(error)
        if usage is not None:
            return refused((usage,), as_json)
        return Answer(notes=_fault(), status=ExitStatus.FAULT)


def _called(arguments: list[str]) -> Answer:
    if arguments == ["--version"]:
        return Answer(text=f"soacheck {__version__}\n")
    if not arguments and _COMPLETION not in os.environ:
        return Answer(notes=_called(["--help"]).text, status=ExitStatus.INPUT)

    from soacheck.cli.commands import app  # loads typer

    printed = io.StringIO()  # help and completion, which the parser prints by itself
    try:
        with contextlib.redirect_stdout(printed):
            outcome = app(arguments, prog_name="soacheck", standalone_mode=False)
    except SystemExit as end:  # the parser's, after shell completion
        outcome = end.code
    if isinstance(outcome, Answer):
        return outcome
    # the parser's own numbers: 0 after help, 130 after an interrupt; its 1 must never look like a verdict
    ends = {None: ExitStatus.WITHIN, 0: ExitStatus.WITHIN, 130: ExitStatus.INTERRUPTED}
    return Answer(text=printed.getvalue(), status=ends.get(outcome, ExitStatus.INPUT))


def refused(problems: Sequence[Problem], as_json: bool) -> Answer:
    """The answer to an input that cannot be used: errors as JSON, or as text for standard error."""
    if as_json:
        from soacheck.show.document import errors_as_json

        return Answer(text=errors_as_json(problems), status=ExitStatus.INPUT)
    return Answer(notes=errors_text(problems), status=ExitStatus.INPUT)


def _usage(error: Exception) -> Problem | None:
    """What the parser objects to, or None when the error is not the parser's.

    Its exceptions are told by what they offer: their place inside typer moved from release to release.
    """
    message = getattr(error, "format_message", None)
    if message is None or not hasattr(error, "exit_code"):
        return None
    context = getattr(error, "ctx", None)
    path = getattr(context, "command_path", "soacheck")
    commands = sorted(getattr(getattr(context, "command", None), "commands", ()))
    offered = f" (commands: {', '.join(commands)})" if commands else ""
    said, remedy = str(message()).rstrip("."), f"{path} --help{offered}"
    if _NEGATIVE.search(said):
        remedy = (
            "values are magnitudes, for PNP and P-channel devices too; a minus that is meant needs -- before DEVICE"
        )
    return Problem(problem=said, remedy=remedy)


def _fault() -> str:
    import traceback

    return f"{traceback.format_exc()}soacheck: a fault in soacheck itself, not a verdict\n"


def _printed(answer: Answer) -> int:
    """Write the text and say how the process ends."""
    if not answer.text:
        return answer.status
    try:
        if sys.stdout is None:
            raise OSError("standard output is closed")
        _write(sys.stdout, answer.text)
    except BrokenPipeError:
        _discard_stdout()
        return ExitStatus.BROKEN_PIPE
    except OSError as error:
        _discard_stdout()
        if sys.stderr is not None:
            with contextlib.suppress(OSError):
                _write(sys.stderr, f"soacheck: the result cannot be written: {error.strerror or error}\n")
        return ExitStatus.OUTPUT
    return answer.status


def _write(stream: TextIO, text: str) -> None:
    stream.write(encodable(text, stream.encoding))
    stream.flush()


def _discard_stdout() -> None:
    """Let what is still buffered go nowhere: the interpreter would try to write it again when it ends."""
    if sys.stdout is not None:
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, sys.stdout.fileno())
        os.close(nowhere)
