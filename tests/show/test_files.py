"""Files are written whole or not at all, and nothing that stands there is changed otherwise."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from soacheck.errors import OutputError
from soacheck.show.files import make_folder, write_atomic


def test_a_new_file_gets_the_mode_of_the_umask(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        write_atomic(tmp_path / "new", b"text")
    finally:
        os.umask(before)
    assert (tmp_path / "new").read_bytes() == b"text"
    assert stat.S_IMODE((tmp_path / "new").stat().st_mode) == 0o640


def test_an_old_file_keeps_its_mode(tmp_path: Path) -> None:
    file = tmp_path / "old"
    file.write_bytes(b"before")
    file.chmod(0o664)
    write_atomic(file, b"after")
    assert (file.read_bytes(), stat.S_IMODE(file.stat().st_mode)) == (b"after", 0o664)


def test_a_link_keeps_pointing_at_its_target(tmp_path: Path) -> None:
    target, link = tmp_path / "target", tmp_path / "link"
    target.write_bytes(b"before")
    link.symlink_to(target)
    write_atomic(link, b"after")
    assert link.is_symlink()
    assert target.read_bytes() == b"after"


def test_a_device_is_written_to_and_stays_one() -> None:
    write_atomic(Path("/dev/null"), b"gone")
    assert stat.S_ISCHR(Path("/dev/null").stat().st_mode)


def test_what_cannot_be_written_is_our_own_error_and_leaves_nothing(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="cannot be written"):
        write_atomic(tmp_path, b"text")
    with pytest.raises(OutputError, match="cannot be written"):
        write_atomic(tmp_path / "no-such-folder" / "file", b"text")
    with pytest.raises(OutputError, match="cannot be written"):
        write_atomic(tmp_path / ("é" * 200), b"text")
    assert list(tmp_path.iterdir()) == []


def test_a_disk_that_fails_keeps_the_old_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "old"
    file.write_bytes(b"before")

    def full(_descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(OutputError, match="No space left on device"):
        write_atomic(file, b"after")
    assert file.read_bytes() == b"before"
    assert list(tmp_path.iterdir()) == [file]


def test_a_folder_that_cannot_be_made_is_our_own_error(tmp_path: Path) -> None:
    make_folder(tmp_path / "a" / "b")
    make_folder(tmp_path / "a" / "b")
    (tmp_path / "file").write_bytes(b"")
    with pytest.raises(OutputError, match="cannot be made"):
        make_folder(tmp_path / "file" / "b")
