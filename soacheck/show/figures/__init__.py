"""Pictures of a result: PNG, SVG or PDF, readable in black and white. Importing this loads no matplotlib."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from types import ModuleType
from typing import TYPE_CHECKING

from soacheck.errors import InputError, Problem
from soacheck.result import Result
from soacheck.show.figures import canvas, dissipation, line, read, safe_area, temperature
from soacheck.show.files import make_folder, write_atomic

if TYPE_CHECKING:
    from matplotlib.figure import Figure

# Each has `lacks(result, half)` (why there is nothing to draw, empty when there is) and `draw(result, half)`.
_PICTURES: dict[str, ModuleType] = {
    "safe-area": safe_area,
    "line": line,
    "dissipation": dissipation,
    "temperature": temperature,
}
NAMES = tuple(_PICTURES)
FORMATS = canvas.FORMATS


@dataclass(frozen=True, slots=True, kw_only=True)
class Written:
    """The files written, and each picture left out with the reason: ("safe-area-lower", "the device ...")."""

    paths: tuple[Path, ...]
    left_out: tuple[tuple[str, str], ...] = ()


def halves(result: Result) -> tuple[str | None, ...]:
    """Each half has its own pictures; (None,) where the stage has but one device."""
    return read.halves(result)


def lacks(result: Result, name: str, half: str | None = None) -> str:
    """Why a picture cannot be drawn; empty when it can."""
    return str(_picture(name).lacks(result, half))


def draw(result: Result, name: str, half: str | None = None) -> Figure:
    """One picture as a matplotlib Figure. Raises InputError where `lacks` gives a reason."""
    reason = lacks(result, name, half)
    if reason:
        raise InputError(Problem(problem=f"the picture {name} cannot be drawn: {reason}", remedy="state what it lacks"))
    with canvas.settings():
        figure: Figure = _picture(name).draw(result, half)
    return figure


def rendered(result: Result, name: str, half: str | None = None, *, fmt: str = "png") -> bytes:
    """One picture as the bytes of a file; the same result gives the same bytes."""
    return canvas.rendered(draw(result, name, half), _format(fmt))


def write_figures(
    result: Result, folder: Path, *, which: str | None = None, fmt: str = "png", prefix: str = ""
) -> Written:
    """Write all pictures, or the named one, into a folder: `safe-area.png`, `safe-area-upper.png` for a half.

    prefix is put before each name, for several stages in one folder. Raises InputError for a name or format
    that is none, OutputError where a file cannot be written.
    """
    _format(fmt)
    names = NAMES if which is None else (which,)
    paths, left_out = [], []
    for name in names:
        for half in halves(result):
            stem = name if half is None else f"{name}-{half}"
            reason = lacks(result, name, half)
            if reason:
                left_out.append((stem, reason))
                continue
            data = rendered(result, name, half, fmt=fmt)
            make_folder(folder)
            path = folder / f"{prefix}{stem}.{fmt}"
            write_atomic(path, data)
            paths.append(path)
    return Written(paths=tuple(paths), left_out=tuple(left_out))


def _picture(name: str) -> ModuleType:
    if name not in _PICTURES:
        raise InputError(Problem(problem=f"no picture is called {name!r}", remedy=f"one of {', '.join(NAMES)}"))
    return _PICTURES[name]


def _format(fmt: str) -> str:
    if fmt not in FORMATS:
        raise InputError(Problem(problem=f"pictures are not written as {fmt!r}", remedy=f"one of {', '.join(FORMATS)}"))
    return fmt
