"""Atomic writes: as it was or wholly new, with its permissions, and never a device replaced."""

import os
import stat
from pathlib import Path

import pytest

from tonebench.errors import StorageError
from tonebench.files.atomic import replacing, write_text_atomically


def test_permissions_are_kept_and_links_followed(tmp_path: Path) -> None:
    """A link still points at its file, which has the new text and the old bits."""
    path, link = tmp_path / "a", tmp_path / "link"
    path.write_text("old", encoding="utf-8")
    path.chmod(0o640)
    link.symlink_to(path)
    write_text_atomically(link, "new\r\n")
    assert link.is_symlink()
    assert path.read_bytes() == b"new\r\n"
    assert stat.S_IMODE(path.stat().st_mode) == 0o640


def test_new_file_gets_the_usual_permissions(tmp_path: Path) -> None:
    """Not the private ones of a temporary file."""
    mask = os.umask(0o022)
    try:
        write_text_atomically(tmp_path / "a", "x")
    finally:
        os.umask(mask)
    assert stat.S_IMODE((tmp_path / "a").stat().st_mode) == 0o644


def test_failure_leaves_the_old_file_alone(tmp_path: Path) -> None:
    """An error inside the block leaves the text and no temporary file."""
    path = tmp_path / "a"
    path.write_text("old", encoding="utf-8")

    def write_half() -> None:
        with replacing(path) as temporary:
            temporary.write_text("half", encoding="utf-8")
            raise OSError(28, "No space left on device")

    with pytest.raises(StorageError, match=r"could not be written: No space left"):
        write_half()
    assert path.read_text(encoding="utf-8") == "old"
    assert list(tmp_path.iterdir()) == [path]


def test_places_that_cannot_be_written_say_so(tmp_path: Path) -> None:
    """Under a file, under /proc (for root, too), a folder, a name of too many characters or with NUL, a device."""
    (tmp_path / "file").write_text("", encoding="utf-8")
    for path, message in (
        (tmp_path / "file" / "a", r"could not be written: Not a directory; choose a folder"),
        (Path("/proc/tonebench-test"), r"could not be written: .*; choose a folder"),
        (tmp_path, r"is a folder; give the name of a file"),
        (tmp_path / ("a" * 300), r"could not be written: File name too long"),
        (tmp_path / "a\0b", r"is no name for a file"),
        (Path("/dev/null"), r"is a device or a pipe"),
    ):
        with pytest.raises(StorageError, match=message):
            write_text_atomically(path, "x")
    assert [one.name for one in tmp_path.iterdir()] == ["file"]
    assert stat.S_ISCHR(Path("/dev/null").stat().st_mode)


def test_existing_file_needs_force(tmp_path: Path) -> None:
    """Unless forced, nothing is overwritten."""
    write_text_atomically(tmp_path / "a", "old", is_forced=False)
    with pytest.raises(StorageError, match=r"already there; give --force to overwrite it"):
        write_text_atomically(tmp_path / "a", "new", is_forced=False)
    assert (tmp_path / "a").read_text(encoding="utf-8") == "old"
