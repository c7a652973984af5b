"""One held or pulsed point without a stage file: the stage is written out and put to `check`."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from soacheck.check import check
from soacheck.errors import InputError, Problem, QuantityError
from soacheck.quantity import read
from soacheck.result import Result
from soacheck.stage import stage_from_text

HELD = "1 s"  # length of the period that a held point is written as; it repeats for ever


def point(
    device: str,
    v: str,
    i: str,
    *,
    pulse: str | None = None,
    heatsink: str | None = None,
    interface: str | None = None,
    ambient: str | None = None,
    case: str | None = None,
    devices: Sequence[Path] = (),
) -> Result:
    """Check one point.

    device: name or rating file, as the device path finds it from the working folder. v, i: quantities, "30 V",
    "1.5 A". pulse: width of a single pulse; absent: held for ever. heatsink, interface, ambient: the heat path; case:
    a case temperature in its place. A pulse starts with the junction at the case's, else the ambient's temperature.
    Raises InputError for an option that is no such quantity.
    """
    given = {
        "V": (v, "voltage"),
        "I": (i, "current"),
        "--pulse": (pulse, "time"),
        "--interface": (interface, "thermal resistance"),
        "--ambient": (ambient, "temperature"),
        "--case": (case, "temperature"),
    }
    if heatsink not in ("ideal", "none"):
        given["--heatsink"] = (heatsink, "thermal resistance")
    problems = [
        problem for option, (text, dimension) in given.items() if (problem := _problem(option, text, dimension))
    ]
    if case is not None:
        problems += [
            Problem(
                key=option,
                value=text,
                problem="--case takes the place of what lies behind the case",
                remedy=f"--case or {option}, not both",
            )
            for option, text in (("--heatsink", heatsink), ("--interface", interface))
            if text is not None
        ]
    if problems:
        raise InputError(*problems)
    name = str(Path(device).resolve()) if device.endswith(".toml") else device
    return check(
        stage_from_text(
            _stage(name, v, i, pulse, heatsink, interface, ambient, case),
            shown_as="point",
            folder=Path(),
            devices=devices,
        )
    )


def _problem(option: str, text: str | None, dimension: str) -> Problem | None:
    if text is None:
        return None
    try:
        read(text, dimension)
    except QuantityError as error:
        return Problem(key=option, value=f"'{text}'", problem=error.problem, remedy=error.remedy)
    return None


def _stage(
    device: str,
    v: str,
    i: str,
    pulse: str | None,
    heatsink: str | None,
    interface: str | None,
    ambient: str | None,
    case: str | None,
) -> str:
    """The stage file that asks the same."""
    start = case or ambient
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
    lines += [
        f"{key} = {_quoted(text)}"
        for key, text in (("heatsink", heatsink), ("interface", interface), ("T_case", case))
        if text is not None
    ]
    if ambient is not None:
        lines += ["[surroundings]", f"T_ambient = {_quoted(ambient)}"]
    return "\n".join(lines) + "\n"


def _quoted(text: str) -> str:
    """A TOML basic string."""
    escaped = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04X}" for c in escaped) + '"'
