"""Whatever a user feeds in: one clear line, exit code 2, and nothing lost."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import soundfile

from tests.cli.running import assert_refused, tonebench

HEAD = 'tonebench = 1\n[chain]\nname = "a"\nsample_rate_hz = 48000\n'
NOTCH = '[[section]]\nkind = "notch"\nfrequency_hz = 50\n'


def _chain_named(name_in_toml: str) -> str:
    return HEAD.replace('"a"', name_in_toml)


BAD_PRESETS: dict[str, tuple[str, tuple[str, ...]]] = {
    "broken TOML": (HEAD + "[[section]\n", ("line 5",)),
    "no version": (HEAD.removeprefix("tonebench = 1\n"), ("tonebench",)),
    "version of the future": (HEAD.replace("= 1", "= 99"), ("tonebench", "99")),
    "text for a number": (
        HEAD + '[[section]]\nkind = "notch"\nfrequency_hz = "fifty"\nq = 10\n',
        ("frequency_hz", "7"),
    ),
    "boolean for a number": (HEAD + NOTCH + "q = true\n", ("line 8", "q")),
    "number for a name": (HEAD.replace('"a"', "7"), ("line 3", "name")),
    "negative radius": (HEAD + NOTCH + "radius = -0.5\n", ("line 8", "radius", "-0.5")),
    "radius that is no number": (HEAD + NOTCH + "radius = nan\n", ("line 8", "radius", "nan")),
    "radius over the rim": (HEAD + NOTCH + "radius = 1.5\n", ("line 8", "radius", "free")),
    "width without meaning": (
        HEAD + '[[section]]\nkind = "low shelf"\nfrequency_hz = 100\nbandwidth_hz = 5\n',
        ("line 8", "bandwidth_hz", "low shelf"),
    ),
    "two widths": (HEAD + NOTCH + "q = 3\nring_s = 0.3\n", ("ring_s", "q")),
    "no width": (HEAD + NOTCH, ("width",)),
    "over half the rate": (HEAD + '[[section]]\nkind = "notch"\nfrequency_hz = 24000\nq = 3\n', ("line 7", "24000")),
    "129 sections": (HEAD + (NOTCH + "q = 3\n") * 129, ("128", "129")),
    "unknown kind": (HEAD + '[[section]]\nkind = "nutch"\nfrequency_hz = 50\nq = 3\n', ("line 6", "nutch")),
    "name with a quote": (_chain_named("'say \"a\"'"), ("line 3", "name")),
    "name with a newline": (_chain_named('"a\\nb"'), ("line 3", "name")),
    "name that ends a comment": (_chain_named('"a */ b"'), ("line 3", "name")),
    "export that leaves its folder": (HEAD + '[[export]]\nto = "c"\nfile = "../a.h"\n', ("line 7", "file")),
    "export to the root": (HEAD + '[[export]]\nto = "c"\nfile = "/tmp/a.h"\n', ("line 7", "file")),
    "unknown arithmetic": (HEAD + '[target]\narithmetic = "f32"\n', ("line 6", "arithmetic")),
    "free pole with a negative radius": (
        HEAD + '[[section]]\nkind = "free"\ngain_db = 0\npoles = { radius = -1, angle_deg = 3 }\n',
        ("line 8", "radius"),
    ),
}


@pytest.mark.parametrize("case", list(BAD_PRESETS))
def test_bad_preset_is_refused_with_file_place_and_reason(case: str, tmp_path: Path) -> None:
    """Each bad preset names the file, the line and the key, and stays byte for byte as it was."""
    text, words = BAD_PRESETS[case]
    path = tmp_path / "bad.toml"
    path.write_text(text, encoding="utf-8")
    assert_refused(tonebench("edit", "bad.toml", "chain gain -1 dB", cwd=tmp_path), "bad.toml", *words)
    assert path.read_text(encoding="utf-8") == text
    assert [one.name for one in tmp_path.iterdir()] == ["bad.toml"]


def _text_as_wav(path: Path) -> None:
    path.write_text("this is no sound\n", encoding="utf-8")


def _empty_wav(path: Path) -> None:
    soundfile.write(path, np.zeros(0), 48000)


def _empty_file(path: Path) -> None:
    path.write_bytes(b"")


@pytest.mark.parametrize("make", [_text_as_wav, _empty_wav, _empty_file])
def test_bad_clip_is_refused(make: Callable[[Path], None], tmp_path: Path) -> None:
    """A text named .wav, a clip without samples and an empty file are refused by play and by render."""
    make(tmp_path / "bad.wav")
    played = tonebench("play", "boathouse", "--clip", "bad.wav", "--device", "silent", "--seconds", "1", cwd=tmp_path)
    assert_refused(played, "bad.wav")
    assert_refused(tonebench("render", "boathouse", "bad.wav", "-o", "out.wav", cwd=tmp_path), "bad.wav")
    assert not (tmp_path / "out.wav").exists()


def test_unwritable_folder_is_refused(tmp_path: Path) -> None:
    """Render, export and edit into a folder that cannot be written say so, and leave nothing behind."""
    (tmp_path / "file").write_text("in the way", encoding="utf-8")
    soundfile.write(tmp_path / "a.wav", np.zeros(480), 48000)
    assert_refused(tonebench("export", "boathouse", "--to", "c", "-o", "file/a.h", cwd=tmp_path), "file/a.h")
    assert_refused(tonebench("edit", "file/a.toml", "notch 50 Hz q 3", cwd=tmp_path), "file/a.toml")
    assert_refused(tonebench("render", "boathouse", "a.wav", "-o", "file/out.wav", cwd=tmp_path), "file/out.wav")


def test_nothing_is_overwritten_without_force(tmp_path: Path) -> None:
    """Render, export and edit -o refuse a file that is there, and take it with --force."""
    soundfile.write(tmp_path / "a.wav", np.zeros(480), 48000)
    for name, command in (
        ("out.wav", ("render", "boathouse", "a.wav", "-o", "out.wav")),
        ("a.h", ("export", "boathouse", "--to", "c", "-o", "a.h")),
        ("b.toml", ("edit", "boathouse", "1 +1 Hz", "-o", "b.toml")),
    ):
        (tmp_path / name).write_text("precious", encoding="utf-8")
        assert_refused(tonebench(*command, cwd=tmp_path), name, "--force")
        assert (tmp_path / name).read_text(encoding="utf-8") == "precious"
        forced = tonebench(*command, "--force", cwd=tmp_path)
        assert forced.returncode == 0, forced.stderr


def test_bundled_preset_is_not_edited_in_place(tmp_path: Path) -> None:
    """A preset that comes with the bench asks for a copy."""
    assert_refused(tonebench("edit", "boathouse", "1 +1 Hz", cwd=tmp_path), "boathouse", "-o")


def test_refused_line_saves_nothing(tmp_path: Path) -> None:
    """If the second line is refused, the first is not saved either."""
    assert_refused(tonebench("edit", "new.toml", "notch 50 Hz q 3", "notch 50 bananas", cwd=tmp_path), "bananas")
    assert not (tmp_path / "new.toml").exists()


@pytest.mark.parametrize(
    ("arguments", "word"),
    [
        (("--seconds", "0"), "--seconds"),
        (("--seconds", "nan"), "--seconds"),
        (("--level", "3"), "--level"),
        (("--hear", "everything"), "--hear"),
    ],
)
def test_bad_play_option_is_refused(arguments: tuple[str, ...], word: str, tmp_path: Path) -> None:
    """Options out of range are named."""
    assert_refused(tonebench("play", "boathouse", "--device", "silent", *arguments, cwd=tmp_path), word)


@pytest.mark.parametrize("name", ['a"b', "a\nb", "a*/b", "", "../nowhere.toml/x", "\udce9"])
def test_hostile_preset_argument_is_refused(name: str, tmp_path: Path) -> None:
    """A preset argument that names nothing is one line, whatever is in it."""
    assert_refused(tonebench("show", name, cwd=tmp_path))
