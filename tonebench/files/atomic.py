"""Atomic writes: a file is either as it was or wholly new, whatever happens in between."""

import contextlib
import os
import tempfile
from collections.abc import Iterator
from pathlib import Path

from tonebench.errors import StorageError


@contextlib.contextmanager
def replacing(path: Path, *, is_forced: bool = True) -> Iterator[Path]:
    """Yield a temporary path beside ``path``, which takes its place if the block ends well.

    A symbolic link keeps pointing at its file, which is the one replaced; an existing file's permission bits are kept.

    Raises
    ------
    StorageError
        If the folder cannot be written, or the file is there and ``is_forced`` is false. Nothing is left behind.

    """
    if "\0" in str(path):
        raise StorageError(f"{str(path)!r} is no name for a file; choose another")
    target = Path(os.path.realpath(path))
    # os.path answers "no" where a part of the path cannot be looked at; making the temporary file then says why.
    if os.path.isdir(target):  # noqa: PTH112
        raise StorageError(f"{path} is a folder; give the name of a file")
    if os.path.exists(target) and not os.path.isfile(target):  # noqa: PTH110, PTH113
        raise StorageError(f"{path} is a device or a pipe, which must stay what it is; give the name of a file")
    if not is_forced and os.path.exists(target):  # noqa: PTH110
        raise StorageError(f"{path} is already there; give --force to overwrite it, or another name")
    temporary = _temporary_beside(target, path)
    try:
        yield temporary
        _keep_permissions(target, temporary)
        temporary.replace(target)
    except StorageError:
        raise  # already in plain words, and perhaps about another file
    except OSError as error:
        raise StorageError(f"{path} could not be written: {error.strerror or error}; nothing was changed") from error
    finally:
        with contextlib.suppress(OSError):
            temporary.unlink()


def _temporary_beside(target: Path, shown: Path) -> Path:
    try:
        handle, name = tempfile.mkstemp(prefix=".tonebench.", suffix=".part", dir=target.parent)
    except OSError as error:
        raise StorageError(
            f"{shown} could not be written: {error.strerror or error}; choose a folder that exists and is writable"
        ) from error
    os.close(handle)
    return Path(name)


def _keep_permissions(target: Path, temporary: Path) -> None:
    if target.exists():
        temporary.chmod(target.stat().st_mode & 0o7777)
    else:
        mask = os.umask(0)
        os.umask(mask)
        temporary.chmod(0o666 & ~mask)


def write_text_atomically(path: Path, text: str, *, is_forced: bool = True) -> None:
    """Write UTF-8 text with line feeds as they are.

    Raises
    ------
    StorageError
        As ``replacing``.

    """
    with replacing(path, is_forced=is_forced) as temporary, temporary.open("wb") as file:
        file.write(text.encode("utf-8"))
        file.flush()
        os.fsync(file.fileno())
