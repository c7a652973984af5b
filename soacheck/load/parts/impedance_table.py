"""A measured impedance from a text file: f in hertz, magnitude in ohm, phase in degrees."""

from __future__ import annotations

import math
import os
import re
import stat
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from soacheck.table import Cells
from soacheck.trace import FloatArray

_LARGEST = 1_000_000  # [bytes] some twenty thousand rows
_NUMBER = re.compile(r"[+-]?(\d+([.]\d*)?|[.]\d+)([eE][+-]?\d+)?", re.ASCII)
_REMEDY = "rows of three numbers: frequency in Hz (rising), magnitude in ohm, phase in degrees (-90 to 90)"


class Refused(Exception):
    """What is wrong with the file, as a problem of the key that names it."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rows:
    """The rows of a table: (n,) each."""

    file: str
    f: FloatArray  # [Hz]
    magnitude: FloatArray  # [ohm]
    phase: FloatArray  # [deg]


def read_table(cells: Cells, name: str, value: object, folder: Path) -> Rows | None:
    """The table in a file of the stage's folder; None when something was wrong and has been reported."""
    if not isinstance(value, str) or not value.strip():
        cells.refuse(name, "the name of a file is wanted here", 'table = "impedance.csv"')
        return None
    try:
        return parse(_text(folder / value), value)
    except Refused as refused:
        cells.refuse(name, str(refused), _REMEDY)
        return None


def _text(path: Path) -> str:
    # O_NONBLOCK: opening a named pipe must not wait for a writer.
    try:
        handle = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0))
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else "not a file name"
        raise Refused(f"the file {path.name!r} cannot be read: {reason}") from error
    try:
        if not stat.S_ISREG(os.fstat(handle).st_mode):
            raise Refused(f"{path.name!r} is not a file")
        with os.fdopen(handle, "rb", closefd=False) as stream:
            data = stream.read(_LARGEST + 1)
    finally:
        os.close(handle)
    if len(data) > _LARGEST:
        raise Refused(f"{path.name!r} is larger than {_LARGEST // 1000} kB")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise Refused(f"{path.name!r} is not UTF-8 text (byte {error.start})") from error


def _fields(line: str) -> list[str]:
    # A semicolon or a tab separates before a comma does: the comma is then a decimal comma.
    for separator in (";", "\t"):
        if separator in line:
            return [field.strip().replace(",", ".") for field in line.split(separator)]
    return [field.strip() for field in line.split(",")]


def parse(text: str, file: str) -> Rows:
    """Rows of a text: separated by comma, semicolon (decimal comma allowed) or tab, after any header."""
    rows: list[tuple[float, float, float]] = []
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.strip():
            continue
        fields = _fields(line)
        numeric = [_NUMBER.fullmatch(field) is not None for field in fields]
        if not rows and not any(numeric):
            continue  # header
        place = f"{file}, line {number}"
        if len(fields) != 3:
            raise Refused(f"{place}: {len(fields)} fields where three are wanted")
        if not all(numeric):
            raise Refused(f"{place}: {fields[numeric.index(False)]!r} is not a number")
        f, magnitude, phase = (float(field) for field in fields)
        if not (0 < f < math.inf):
            raise Refused(f"{place}: the frequency {fields[0]} Hz is not positive")
        if rows and f <= rows[-1][0]:
            raise Refused(f"{place}: the frequency {fields[0]} Hz does not rise")
        if not (0 < magnitude < math.inf):
            raise Refused(f"{place}: the magnitude {fields[1]} ohm is not positive")
        if not -90 <= phase <= 90:
            raise Refused(f"{place}: the phase {fields[2]} degrees is that of a source, not of a load")
        rows.append((f, magnitude, phase))
    if len(rows) < 2:
        raise Refused(f"{file}: {len(rows)} rows of numbers, at least two are wanted")
    array = np.array(rows, dtype=np.float64)
    return Rows(file=file, f=array[:, 0], magnitude=array[:, 1], phase=array[:, 2])
