"""One held or pulsed point without a stage file: the stage is written out and put to `check`."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from soacheck.check import check
from soacheck.errors import InputError, Problem, QuantityError
from soacheck.quantity import read, write
from soacheck.result import Reason, Result
from soacheck.stage import stage_from_text

EXACT = 17  # digits that keep a float
HERE = "point"
# what asks for the keys that are written here
_ASKED = {
    "stage.device": "DEVICE",
    "load.points": "V, I",
    "load.T_start": "--case or --ambient",
    "heat_path.heatsink": "--heatsink",
    "heat_path.interface": "--interface",
    "heat_path.T_case": "--case",
    "surroundings.T_ambient": "--ambient",
}
HELD = "1 s"  # length of the period that a held point is written as; it repeats for ever


def point(
    device: str,
    v: object,
    i: object,
    *,
    pulse: object = None,
    heatsink: object = None,
    interface: object = None,
    ambient: object = None,
    case: object = None,
    devices: Sequence[Path] = (),
) -> Result:
    """Check one point.

    device: name or rating file, as the device path finds it from the working folder. v, i and the options are
    quantities: text ("30 V") or pint quantities. pulse: width of a single pulse; absent: held for ever. heatsink,
    interface, ambient: the heat path; case: a case temperature in its place. A pulse starts with the junction at the
    case's, else the ambient's temperature. Raises InputError for a value that is no such quantity.
    """
    problems: list[Problem] = []

    def as_text(option: str, value: object, dimension: str) -> str | None:
        if value is None or (option == "--heatsink" and value in ("ideal", "none")):
            return None if value is None else str(value)
        try:
            si = read(value, dimension).si
        except QuantityError as error:
            problems.append(Problem(key=option, value=f"'{value}'", problem=error.problem, remedy=error.remedy))
            return None
        return value if isinstance(value, str) else write(si, dimension, EXACT)

    volts, amps = as_text("V", v, "voltage"), as_text("I", i, "current")
    path = _Path(
        heatsink=as_text("--heatsink", heatsink, "thermal resistance"),
        interface=as_text("--interface", interface, "thermal resistance"),
        ambient=as_text("--ambient", ambient, "temperature"),
        case=as_text("--case", case, "temperature"),
    )
    width = as_text("--pulse", pulse, "time")
    if case is not None:
        problems += [
            Problem(
                key=option,
                value=f"'{value}'",
                problem="--case takes the place of what lies behind the case",
                remedy=f"--case or {option}, not both",
            )
            for option, value in (("--heatsink", heatsink), ("--interface", interface))
            if value is not None
        ]
    if problems or volts is None or amps is None:
        raise InputError(*problems)
    name = str(Path(device).resolve()) if device.endswith(".toml") else device
    text = _stage(name, volts, amps, width, path)
    try:
        return _in_options(check(stage_from_text(text, shown_as=HERE, folder=Path(), devices=devices)))
    except InputError as error:  # lines and keys of a file that nobody sees are no help
        raise InputError(*(_of_option(one) if one.file == HERE else one for one in error.problems)) from None


def _of_option(problem: Problem) -> Problem:
    said, remedy = _worded(problem.problem), _worded(problem.remedy)
    return replace(problem, file="", line=None, key=_ASKED.get(problem.key, problem.key), problem=said, remedy=remedy)


def _in_options(result: Result) -> Result:
    """The result with the options of the command in place of the keys of a stage file that nobody wrote."""

    def said(reason: Reason) -> Reason:
        missing = tuple(replace(item, key=_ASKED.get(item.key, item.key)) for item in reason.missing)
        return replace(reason, text=_worded(reason.text), missing=missing)

    return replace(
        result,
        findings=tuple(replace(found, reasons=tuple(map(said, found.reasons))) for found in result.findings),
        cautions=tuple(replace(caution, text=_worded(caution.text)) for caution in result.cautions),
        assumptions=tuple(map(_worded, result.assumptions)),
    )


def _worded(text: str) -> str:
    for key, option in _ASKED.items():
        text = re.sub(rf"\b{re.escape(key)}\b(?![.\w])", option, text)
    return text


@dataclass(frozen=True, slots=True, kw_only=True)
class _Path:
    """The heat path as texts."""

    heatsink: str | None
    interface: str | None
    ambient: str | None
    case: str | None


def _stage(device: str, v: str, i: str, pulse: str | None, path: _Path) -> str:
    """The stage file that asks the same."""
    start = path.case or path.ambient
    lines = [
        "[stage]",
        f"title = {_quoted(f'{v} and {i}, ' + ('held' if pulse is None else f'one pulse of {pulse}'))}",
        f"device = {_quoted(device)}",
        "[load]",
        'kind = "profile"',
        f'points = [["0 s", {_quoted(v)}, {_quoted(i)}], [{_quoted(pulse or HELD)}, {_quoted(v)}, {_quoted(i)}]]',
        f"repeat = {'true' if pulse is None else 'false'}",
    ]
    if pulse is not None and start is not None:
        lines.append(f"T_start = {_quoted(start)}")
    lines.append("[heat_path]")
    stated = (("heatsink", path.heatsink), ("interface", path.interface), ("T_case", path.case))
    lines += [f"{key} = {_quoted(text)}" for key, text in stated if text is not None]
    if path.ambient is not None:
        lines += ["[surroundings]", f"T_ambient = {_quoted(path.ambient)}"]
    return "\n".join(lines) + "\n"


def _quoted(text: str) -> str:
    """A TOML basic string."""
    escaped = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04X}" for c in escaped) + '"'
