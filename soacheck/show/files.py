"""Writing files: whole or not at all, keeping the mode, links and special files that stand there."""

from __future__ import annotations

import os
import stat
import tempfile
from pathlib import Path

from soacheck.errors import OutputError


def write_atomic(path: Path, data: bytes) -> None:
    """Write a file so that a reader sees the old content or the new, never half. Raises OutputError.

    A symbolic link keeps pointing at its target, a device or pipe is written to, the mode stays; a new file
    gets the mode the umask allows.
    """
    try:
        _write(os.path.realpath(path), data)
    except OSError as error:
        raise OutputError(f"{path}: cannot be written: {error.strerror or error}") from error


def make_folder(path: Path) -> None:
    """A folder and what it lies in, unless they are there. Raises OutputError."""
    try:
        path.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise OutputError(f"{path}: the folder cannot be made: {error.strerror or error}") from error


def _write(target: str, data: bytes) -> None:
    try:
        there = os.stat(target)
    except FileNotFoundError:
        there = None
    if there is not None and not stat.S_ISREG(there.st_mode):
        with open(target, "wb") as special:  # raises IsADirectoryError for a folder
            special.write(data)
        return
    try:
        descriptor, temporary = tempfile.mkstemp(dir=os.path.dirname(target), prefix=".", suffix=".tmp")
    except PermissionError:
        if there is None:
            raise
        with open(target, "wb") as in_place:  # a writable file in a folder that is not
            in_place.write(data)
        return
    try:
        with os.fdopen(descriptor, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(temporary, stat.S_IMODE(there.st_mode) if there is not None else 0o666 & ~_umask())
        os.replace(temporary, target)
    except BaseException:
        os.unlink(temporary)
        raise


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
