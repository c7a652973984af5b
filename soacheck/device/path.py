"""The device path: from the name that a stage gives to the rating file."""

from __future__ import annotations

import difflib
import re
import tomllib
from collections.abc import Iterator, Sequence
from pathlib import Path

from soacheck.errors import InputError, Problem

_LARGEST = 1_000_000  # [byte] a rating file is a few thousand; what is larger is not searched for names
_OFFERED = 24  # names listed when none is near


def shipped_devices() -> Path:
    """The folder of the example devices: inside the package when installed, else beside it."""
    package = Path(__file__).resolve().parent.parent
    inside = package / "_devices"
    return inside if inside.is_dir() else package.parent / "devices"


def find_device(name: str, stage_folder: Path, devices_dirs: Sequence[Path] = ()) -> Path:
    """The rating file that a name means.

    Looked for by file stem, then by the name in its [device] table, in the stage file's folder, the folders
    of `devices_dirs`, the shipped devices, in that order; the first folder that has it decides. A name with
    a slash or ending in .toml is a path relative to the stage file.

    Raises
    ------
    InputError
        No such device (the nearest names are offered), two of that name in one folder (both files are
        named), or a folder of `devices_dirs` that is not there.
    """
    for folder in devices_dirs:
        if not folder.is_dir():
            raise InputError(
                Problem(
                    key="--devices",
                    value=str(folder),
                    problem="this folder of devices is not there",
                    remedy="give a folder that holds rating files: --devices DIR",
                )
            )
    if name.lstrip().startswith(("...", "\u2026")):
        raise InputError(Problem(key="device", value=name, problem="not filled in", remedy="fill it in"))
    if "/" in name or "\\" in name or name.lower().endswith(".toml"):
        return _by_path(name, stage_folder)
    folders = (stage_folder, *devices_dirs, shipped_devices())
    for folder in folders:
        if (found := _in_folder(name, folder)) is not None:
            return found
    raise InputError(_not_found(name, folders))


def device_name(file: Path) -> str | None:
    """The name in the [device] table of a file; None for a file that is no rating file or cannot be read.

    A rating file with a syntax error elsewhere still has its name: reading it will say what is wrong with it.
    """
    text = _text(file)
    if text is None or "device" not in text:
        return None
    try:
        table = tomllib.loads(text).get("device")
    except (ValueError, RecursionError):
        section = re.search(r"^\s*\[\s*device\s*\][^\n]*\n(.*?)(?=^\s*\[|\Z)", text, re.MULTILINE | re.DOTALL)
        line = section and re.search(r"^\s*name\s*=\s*([\"'])(.*?)\1", section[1], re.MULTILINE)
        return line[2] if line else None
    name = table.get("name") if isinstance(table, dict) else None
    return name if isinstance(name, str) else None


def _by_path(name: str, stage_folder: Path) -> Path:
    path = stage_folder / name
    if _exists(path):
        return path
    near = difflib.get_close_matches(path.name, [file.name for file in _files(path.parent)], n=3)
    raise InputError(
        Problem(
            key="device",
            value=name,
            problem=f"there is no file {path}",
            remedy=f"did you mean {_listed(near)}?" if near else "a path starts at the stage file's folder",
        )
    )


def _in_folder(name: str, folder: Path) -> Path | None:
    by_stem = folder / f"{name}.toml"
    # A stage file may carry the name of its device.
    if _is_file(by_stem) and not _is_stage(by_stem):
        return by_stem
    named = [file for file in _files(folder) if _mentions(file, name) and device_name(file) == name]
    if len(named) > 1:
        files = [file.name for file in named]
        raise InputError(
            Problem(
                key="device",
                value=name,
                problem=f"two files of one folder hold a device of this name: {' and '.join(files)}",
                remedy=f"say which, by its file name: device = {named[0].stem!r}",
            )
        )
    return named[0] if named else None


def _exists(path: Path) -> bool:
    try:
        return path.exists()
    except (OSError, ValueError):
        return False


def _is_file(path: Path) -> bool:
    try:
        return path.is_file()
    except (OSError, ValueError):  # a name too long for the system, or with a zero byte in it, is no file
        return False


def _not_found(name: str, folders: Sequence[Path]) -> Problem:
    known: dict[str, None] = {}
    for folder in folders:
        for file in _files(folder):
            stated = device_name(file)
            if stated is not None:
                known.update({file.stem: None, stated: None})
    lower = {each.lower(): each for each in known}
    near = [lower[each] for each in difflib.get_close_matches(name.lower(), lower, n=3)]
    if near:
        remedy = f"did you mean {_listed(near)}?"
    else:
        some = sorted(known)[:_OFFERED]
        left_out = len(known) - len(some)
        remedy = f"known here: {', '.join(some)}" + (f" and {left_out} more" if left_out else "")
    places = dict.fromkeys(str(folder) for folder in folders)
    return Problem(
        key="device",
        value=name,
        problem=f"no device of this name; looked in {', '.join(places)}",
        remedy=remedy,
    )


def _files(folder: Path) -> Iterator[Path]:
    """The regular .toml files of a folder by name; nothing when it cannot be listed."""
    try:
        yield from sorted(file for file in folder.glob("*.toml") if file.is_file())
    except OSError:
        return


def _text(file: Path) -> str | None:
    try:
        if file.stat().st_size > _LARGEST:
            return None
        return file.read_bytes().decode("utf-8-sig", errors="replace")
    except OSError:  # an unreadable file in the folder is not the one that is meant
        return None


def _mentions(file: Path, name: str) -> bool:
    text = _text(file)
    return text is not None and name in text


def _is_stage(file: Path) -> bool:
    text = _text(file)
    if text is None:
        return False
    return re.search(r"^\s*\[\s*stage\s*\]", text, re.MULTILINE) is not None and device_name(file) is None


def _listed(names: Sequence[str]) -> str:
    return " or ".join(repr(name) for name in names)
