"""The commands: each parses, calls the library once and gives back one rendering and the exit status."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from soacheck import __version__
from soacheck.cli.answer import Answer, ExitStatus, worst
from soacheck.cli.plain_arguments import Command, Group
from soacheck.cli.process import refused
from soacheck.errors import InputError, Problem
from soacheck.show.text import clean, page_width, wants_colour

if TYPE_CHECKING:
    from soacheck.result import Result

app = typer.Typer(
    cls=Group,
    name="soacheck",
    help="Check a power transistor stage: dissipation, temperatures, safe area. Every figure traceable.",
    epilog="Exit status of check, point: 0 within, 1 exceeds, 2 the input is wrong, 3 unproven, 4 marginal.",
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
)
device_app = typer.Typer(cls=Group, help="Read a rating file back, or start one.", rich_markup_mode=None)
app.add_typer(device_app, name="device")


class Format(StrEnum):
    """File formats of the pictures."""

    png = "png"
    svg = "svg"
    pdf = "pdf"


JsonFlag = Annotated[bool, typer.Option("--json", help="One JSON document instead of text.")]
SheetFlag = Annotated[bool, typer.Option("--sheet", help="The calculation written out, to be redone by hand.")]
Devices = Annotated[
    list[Path] | None,
    typer.Option("--devices", metavar="DIR", help="A further folder of rating files; may be given several times."),
]
_KINDS = "One of: npn, pnp, npn-darlington, pnp-darlington, n-mosfet, p-mosfet, n-igbt."  # a test compares it
Force = Annotated[bool, typer.Option("--force", help="Write over files that are there.")]


def _version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"soacheck {__version__}")
        raise typer.Exit


@app.callback()
def soacheck(
    version: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Print the version and end.")
    ] = False,
) -> None:
    """Options of soacheck itself."""


@app.command(cls=Command)
def check(
    stages: Annotated[list[Path], typer.Argument(metavar="STAGE", help="Stage files (TOML).")],
    as_json: JsonFlag = False,
    as_sheet: SheetFlag = False,
    devices: Devices = None,
) -> Answer:
    """Check stages against every limit and give the verdict."""
    from soacheck.check import check as decide
    from soacheck.stage import read_stage

    results: list[Result] = []
    problems: list[Problem] = []
    for path in stages:
        try:
            results.append(decide(read_stage(path, devices=devices or ()), pictures=False))
        except InputError as error:
            problems += error.problems
    return _rendered(results, problems, as_json, as_sheet)


@app.command(cls=Command)
def point(
    device: Annotated[str, typer.Argument(metavar="DEVICE", help="A device's name or its rating file.")],
    voltage: Annotated[str, typer.Argument(metavar="V", help='Voltage across the device: "30 V".')],
    current: Annotated[str, typer.Argument(metavar="I", help='Current through it: "1.5 A".')],
    *,
    pulse: Annotated[str | None, typer.Option(help='Width of a single pulse, "10 ms"; absent: held for ever.')] = None,
    heatsink: Annotated[str | None, typer.Option(help='Thermal resistance, "1.6 K/W", or "ideal", "none".')] = None,
    interface: Annotated[str | None, typer.Option(help='Case to sink, "0.4 K/W".')] = None,
    ambient: Annotated[str | None, typer.Option(help='Air temperature, "40 degC".')] = None,
    case: Annotated[str | None, typer.Option(help='Case temperature held, "90 degC", in place of the above.')] = None,
    as_json: JsonFlag = False,
    as_sheet: SheetFlag = False,
    devices: Devices = None,
) -> Answer:
    """Check one point, held or pulsed, without a stage file."""
    from soacheck.jobs.point import point as check_point

    result = check_point(
        device,
        voltage,
        current,
        pulse=pulse,
        heatsink=heatsink,
        interface=interface,
        ambient=ambient,
        case=case,
        devices=devices or (),
    )
    return _rendered([result], [], as_json, as_sheet)


@app.command(cls=Command)
def plot(
    stage: Annotated[Path, typer.Argument(metavar="STAGE", help="A stage file (TOML).")],
    name: Annotated[str | None, typer.Argument(metavar="NAME", help="One picture; absent: all.")] = None,
    folder: Annotated[Path, typer.Option("-o", "--output", metavar="DIR", help="Where the files go.")] = Path(),
    form: Annotated[Format, typer.Option("--format", help="File format.")] = Format.png,
    devices: Devices = None,
) -> Answer:
    """Draw the pictures of a stage."""
    from soacheck.check import check as decide
    from soacheck.show.figures import NAMES, write_figures
    from soacheck.stage import read_stage

    if name is not None and name not in NAMES:
        raise InputError(_unknown("NAME", "picture", name, NAMES))
    result = decide(read_stage(stage, devices=devices or ()))
    written = write_figures(result, folder, which=name, fmt=form.value)
    left_out = "".join(f"left out: {clean(what)}: {clean(why)}\n" for what, why in written.left_out)
    drawn = ExitStatus.WITHIN if written.paths else ExitStatus.INPUT
    return Answer(text=_lines(written.paths), notes=left_out, status=drawn)


@app.command(cls=Command)
def demo(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="Where the files go.")],
    force: Force = False,
) -> Answer:
    """Write the example stages and devices to a folder."""
    from soacheck.jobs.demo import examples
    from soacheck.show.files import make_folder, write_atomic

    files = {folder / name: content for name, content in examples()}
    _keep_existing({path: content for path, content in files.items() if not _holds(path, content)}, force)
    for path, content in files.items():
        make_folder(path.parent)
        write_atomic(path, content)
    return Answer(text=_lines(files) + f"try: soacheck check {next(iter(files))}\n")


@device_app.command("show", cls=Command)
def show(
    device: Annotated[str, typer.Argument(metavar="DEVICE", help="A device's name or its rating file.")],
    devices: Devices = None,
) -> Answer:
    """Read a rating file back: every value as soacheck understands it."""
    from soacheck.device.path import find_device
    from soacheck.device.reader import read_device
    from soacheck.device.shown import shown

    file = find_device(device, Path(), devices or ())
    return Answer(text=shown(read_device(file, shown_as=str(file))))


@device_app.command("new", cls=Command)
def new(
    kind: Annotated[str, typer.Argument(metavar="KIND", help=_KINDS)],
    name: Annotated[str | None, typer.Argument(metavar="NAME", help="The device's name.")] = None,
    output: Annotated[
        Path | None,
        typer.Option("-o", "--output", metavar="FILE", help="Where it goes; absent: standard output."),
    ] = None,
    force: Force = False,
) -> Answer:
    """Start a rating file: every key of this kind of device with what it means, to be filled in."""
    from soacheck.device.ratings import KINDS
    from soacheck.device.template import template
    from soacheck.show.files import write_atomic

    if kind not in KINDS:
        raise InputError(_unknown("KIND", "kind of device", kind, KINDS))
    text = template(kind) if name is None else _named(template(kind), name)
    if output is None:
        return Answer(text=text)
    _keep_existing([output], force)
    write_atomic(output, text.encode())
    return Answer(text=_lines([output]))


def _rendered(results: Sequence[Result], problems: Sequence[Problem], as_json: bool, as_sheet: bool) -> Answer:
    """Results as JSON, as the calculation sheet or as text for the terminal; input errors outrank them.

    Colour and width are asked of `sys.__stdout__`: sys.stdout is ours while the parser prints (see process).
    """
    if as_json and as_sheet:
        raise typer.BadParameter("--json and --sheet exclude each other")
    errors = refused(problems, as_json) if problems else None
    if errors is not None and (as_json or not results):
        return errors
    if as_json:
        from soacheck.show.as_json import as_json as render

        text = render(results)
    elif as_sheet:
        from soacheck.show.sheet import sheets

        text = sheets(results, page_width(sys.__stdout__))
    else:
        from soacheck.show.terminal import terminal_blocks

        text = terminal_blocks(results, wants_colour(sys.__stdout__), page_width(sys.__stdout__))
    if errors is not None:
        return Answer(text=text, notes=errors.notes, status=ExitStatus.INPUT)
    return Answer(text=text, status=worst(tuple(result.verdict.word for result in results)))


def _unknown(argument: str, what: str, name: str, known: Sequence[str]) -> Problem:
    from difflib import get_close_matches

    near = get_close_matches(name.lower(), known, n=1)
    remedy = f"did you mean {near[0]}?" if near else f"one of: {', '.join(known)}"
    return Problem(key=argument, value=f"'{name}'", problem=f"there is no {what} of this name", remedy=remedy)


def _named(text: str, name: str) -> str:
    """A rating file with its name filled in, the remark beside it staying in its column where there is room."""
    blank, filled = 'name = "..."', f"name = {json.dumps(clean(name))}"
    room = " " * min(max(len(filled) - len(blank), 0), 20)
    return text.replace(blank + room, filled, 1)


def _lines(paths: Sequence[Path] | dict[Path, bytes]) -> str:
    return "".join(f"{clean(str(path))}\n" for path in paths)


def _holds(path: Path, content: bytes) -> bool:
    """Whether a file already has this content."""
    return path.is_file() and path.stat().st_size == len(content) and path.read_bytes() == content


def _keep_existing(paths: Sequence[Path] | dict[Path, bytes], force: bool) -> None:
    """Refuse to write over files, unless that was asked for."""
    if not force:
        there = [path for path in paths if os.path.lexists(path)]
        problems = (
            Problem(file=str(path), problem="the file is there already", remedy="another name, or --force")
            for path in there
        )
        if there:
            raise InputError(*problems)
