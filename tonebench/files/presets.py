"""Presets on disk: load, compare the hearing numbers, save."""

import os
from dataclasses import dataclass, replace
from pathlib import Path

from tonebench.core.hearing import differences
from tonebench.errors import PresetError, StorageError
from tonebench.files.atomic import write_text_atomically
from tonebench.files.caution import rounded_hearing
from tonebench.files.reading import read_preset
from tonebench.session.names import complaint_about_name
from tonebench.session.preset import Preset

LARGEST_BYTES = 1_000_000  # 128 sections with long comments are 100 kB


@dataclass(frozen=True, slots=True)
class LoadedPreset:
    """A preset with what was noticed while it was read.

    Attributes
    ----------
    preset : Preset
    path : Path or None
    notes : tuple of str
        One plain line each: hearing numbers that differ, keys that look like slips.

    """

    preset: Preset
    path: Path | None
    notes: tuple[str, ...] = ()


def load_preset(path: Path) -> LoadedPreset:
    """Read a preset file.

    Raises
    ------
    StorageError
        If it cannot be read.
    PresetError
        If it is not a valid preset; the message names file, line and key.

    """
    loaded = parse_preset(read_text(path), str(path))
    return replace(loaded, path=path)


def read_text(path: Path) -> str:
    """Return the text of a preset file.

    Raises
    ------
    StorageError, PresetError
        If it cannot be read, is too large, or is not UTF-8.

    """
    try:
        with path.open("rb") as file:  # read no further than is allowed: some files have no end
            content = file.read(LARGEST_BYTES + 1)
        text = content.decode("utf-8") if len(content) <= LARGEST_BYTES else None
    except FileNotFoundError as error:
        raise StorageError(f"{path} does not exist; check the path, or see tonebench presets") from error
    except IsADirectoryError as error:
        raise StorageError(f"{path} is a folder; give a preset in it") from error
    except UnicodeDecodeError as error:
        raise PresetError(f"{path} is not UTF-8 text (byte {error.start}); save it as UTF-8") from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or error
        raise StorageError(f"{path} cannot be read: {reason}; check the path and its permissions") from error
    if text is None:
        raise PresetError(f"{path} is larger than {LARGEST_BYTES // 1000} kB and can be no preset; check the path")
    return text


def parse_preset(text: str, name: str) -> LoadedPreset:
    """Read a preset from text; ``name`` stands for the file in messages.

    Raises
    ------
    PresetError
        As ``load_preset``.

    """
    preset, notes = read_preset(text, name)
    if preset.written_hearing is not None:
        notes += tuple(f"{name}: {line}" for line in differences(preset.written_hearing, preset.chain))
    return LoadedPreset(preset, None, notes)


def save_preset(preset: Preset, path: Path, *, like: str | None = None, is_forced: bool = True) -> Preset:
    """Write a preset atomically, with its hearing numbers computed anew.

    Parameters
    ----------
    preset : Preset
    path : Path
    like : str, optional
        Text whose comments and unknown keys are kept; the file's own text if there is one and this is left out.
    is_forced : bool
        Overwrite an existing file.

    Returns
    -------
    Preset
        With ``written_hearing`` as it was written.

    Raises
    ------
    PresetError
        If a name cannot be written, or the old text cannot be edited without loss.
    StorageError
        If the file cannot be written; it is then as it was.

    """
    from tonebench.files.writing import preset_text  # noqa: PLC0415  (tomlkit, only to save)

    for name in (preset.chain.name, *(section.name for section in preset.chain.sections)):
        if complaint := complaint_about_name(name):
            raise PresetError(f"{path}: {complaint}")
    if like is None and is_forced and os.path.isfile(path):  # noqa: PTH113  (answers "no" where it may not look)
        like = read_text(path)
    write_text_atomically(path, preset_text(preset, like, name=str(path)), is_forced=is_forced)
    return replace(preset, written_hearing=rounded_hearing(preset.chain))
