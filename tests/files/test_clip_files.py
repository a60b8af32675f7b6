"""Clips in and out: every sample exact, every bad file one plain line."""

from pathlib import Path

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray

from tonebench.errors import ClipError, EngineError, StorageError
from tonebench.files import clips
from tonebench.files.bundled import bundled_clips, find_clip, find_preset, sniff
from tonebench.files.clips import ClipWriter, load_clip, read_blocks


def _noise(frames: int, channels: int) -> NDArray[np.float32]:
    return np.random.default_rng(3).normal(0.0, 2.0, (frames, channels)).astype(np.float32)


def _write(path: Path, frames: NDArray[np.float32], *, is_forced: bool = False) -> None:
    with ClipWriter(path, 48000.0, frames.shape[1], is_forced=is_forced) as writer:
        for start in range(0, frames.shape[0], 100):
            writer.write(frames[start : start + 100])


@pytest.mark.parametrize("channels", [1, 2])
def test_float_samples_come_back_bit_for_bit(channels: int, tmp_path: Path) -> None:
    """Values over full scale and subnormals among them, as a clip and in blocks."""
    frames = _noise(1234, channels)
    frames[0, 0] = np.float32(1e-42)
    _write(tmp_path / "a.wav", frames)
    assert np.array_equal(load_clip(tmp_path / "a.wav").frames, frames)
    with read_blocks(tmp_path / "a.wav", 100) as blocks:
        assert (blocks.frames, blocks.channels, blocks.sample_rate_hz) == (1234, channels, 48000.0)
        assert np.array_equal(np.concatenate(list(blocks)), frames.astype(np.float64))


def test_more_than_two_channels(tmp_path: Path) -> None:
    """A clip takes the first two and says so; blocks have them all."""
    frames = _noise(50, 5)
    _write(tmp_path / "a.wav", frames)
    clip = load_clip(tmp_path / "a.wav")
    assert np.array_equal(clip.frames, frames[:, :2])
    assert "5 channels; the first two" in clip.notes[0]
    with read_blocks(tmp_path / "a.wav", 100) as blocks:
        assert next(iter(blocks)).shape == (50, 5)


def test_samples_that_are_no_numbers_become_silence(tmp_path: Path) -> None:
    """In a clip with a note, in blocks with a count: one of them would fill a recursive filter for ever."""
    frames = _noise(50, 1)
    frames[[3, 20, 30], 0] = (np.nan, np.inf, -np.inf)
    _write(tmp_path / "a.wav", frames)
    frames[[3, 20, 30], 0] = 0.0
    clip = load_clip(tmp_path / "a.wav")
    assert np.array_equal(clip.frames, frames)
    assert "3 samples that are no numbers" in clip.notes[0]
    with read_blocks(tmp_path / "a.wav", 16) as blocks:
        assert np.array_equal(np.concatenate(list(blocks)), frames.astype(np.float64))
        assert blocks.bad_samples == 3


def test_bad_clip_is_one_plain_line(tmp_path: Path) -> None:
    """Text, nothing, no samples, an impossible rate, a cut file, no file at all."""
    (tmp_path / "text.wav").write_text("hello\n", encoding="utf-8")
    (tmp_path / "empty.wav").write_bytes(b"")
    (tmp_path / "a.raw").write_bytes(b"1234")
    soundfile.write(tmp_path / "silent.wav", np.zeros(0), 48000)
    soundfile.write(tmp_path / "slow.wav", np.zeros(9), 500)
    (tmp_path / "cut.flac").write_bytes(find_clip("chime").read_bytes()[:5000])
    for path, sort, message in (
        (tmp_path / "text.wav", ClipError, r"text.wav is not audio that can be read .*; give a WAV"),
        (tmp_path / "empty.wav", ClipError, r"empty.wav is not audio"),
        (tmp_path / "a.raw", ClipError, r"a.raw does not say what is in it"),
        (tmp_path / "silent.wav", ClipError, r"silent.wav holds no samples"),
        (tmp_path / "slow.wav", ClipError, r"sample rate between 1000 .* got 500"),
        (tmp_path / "cut.flac", ClipError, r"cut.flac is not audio that can be read"),
        (tmp_path / "none.wav", StorageError, r"none.wav does not exist"),
        (tmp_path, StorageError, r"is no regular file"),
        (Path("/dev/zero"), StorageError, r"is no regular file"),
        (tmp_path / "text.wav" / "a.wav", StorageError, r"cannot be read: Not a directory"),
    ):
        with pytest.raises(sort, match=message) as caught:
            load_clip(path)
        assert "\n" not in str(caught.value)


def test_clip_too_long_for_memory_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """With the way out; blocks read it all the same."""
    _write(tmp_path / "a.wav", _noise(200, 2))
    monkeypatch.setattr(clips, "LARGEST_CLIP_SAMPLES", 399)
    with pytest.raises(ClipError, match=r"too long for a clip .*; cut out a part, or render"):
        load_clip(tmp_path / "a.wav")
    with read_blocks(tmp_path / "a.wav", 100) as blocks:
        assert sum(block.shape[0] for block in blocks) == 200


def test_errors_of_the_reader_are_not_blamed_on_the_file(tmp_path: Path) -> None:
    """What goes wrong while a block is being used passes through unchanged."""
    _write(tmp_path / "a.wav", _noise(20, 1))
    for error in (TypeError("mine"), EngineError("mine")):
        with pytest.raises(type(error), match=r"^mine$"), read_blocks(tmp_path / "a.wav", 9):
            raise error


def test_failed_write_leaves_the_old_file_and_nothing_else(tmp_path: Path) -> None:
    """An error inside the block, an existing file, a folder that is a file, a format that cannot be."""
    path = tmp_path / "a.wav"
    frames = _noise(20, 1)
    _write(path, frames)
    before = path.read_bytes()

    def write_half() -> None:
        with ClipWriter(path, 48000.0, 1, is_forced=True) as writer:
            writer.write(frames)
            raise ZeroDivisionError("mine")

    with pytest.raises(ZeroDivisionError, match=r"^mine$"):
        write_half()
    with pytest.raises(StorageError, match=r"already there; give --force"):
        _write(path, frames)
    with pytest.raises(StorageError, match=r"could not be written: Not a directory"):
        _write(path / "b.wav", frames)
    with pytest.raises(StorageError, match=r"could not be written: .*; nothing was changed$"):
        _write(tmp_path / "b.wav", np.zeros((1, 5000), np.float32))
    assert path.read_bytes() == before
    assert [one.name for one in tmp_path.iterdir()] == ["a.wav"]
    _write(path, frames[:5], is_forced=True)
    assert load_clip(path).frames.shape == (5, 1)


def test_complaint_about_the_input_is_not_wrapped_as_one_about_the_output(tmp_path: Path) -> None:
    """A storage error from inside the block keeps its own words."""
    with pytest.raises(StorageError, match=r"^the input is gone$"), ClipWriter(tmp_path / "a.wav", 48000.0, 1):
        raise StorageError("the input is gone")


def test_file_over_4_gb_is_announced_as_rf64(tmp_path: Path) -> None:
    """EBU Tech 3306: a WAV's 32-bit lengths end at 4 GB; the form RF64 carries 64-bit ones."""
    with ClipWriter(tmp_path / "a.wav", 48000.0, 2, frames=600_000_000) as writer:
        writer.write(_noise(10, 2))
    assert (tmp_path / "a.wav").read_bytes()[:4] == b"RF64"
    assert load_clip(tmp_path / "a.wav").frames.shape == (10, 2)


def test_bundled_material_is_found_by_name_and_path() -> None:
    """Three clips that describe themselves; a slip gets a suggestion."""
    found = {item.name: item for item in bundled_clips()}
    assert found.keys() >= {"boathouse", "workshop", "chime"}
    assert all(item.description for item in found.values())
    assert find_clip(str(found["chime"].path)) == find_clip("chime")
    with pytest.raises(StorageError, match=r"did you mean boathouse\?"):
        find_preset("boathuose")
    with pytest.raises(StorageError, match=r"see tonebench clips"):
        find_clip("zzz")


def test_content_decides_what_a_file_is(tmp_path: Path) -> None:
    """Not its name; where the content says nothing, the name tells which complaint is the useful one."""
    (tmp_path / "preset.txt").write_text("tonebench = 1\n", encoding="utf-8")
    (tmp_path / "clip.toml").write_bytes(find_clip("chime").read_bytes())
    (tmp_path / "text.wav").write_text("hello", encoding="utf-8")
    (tmp_path / "latin.toml").write_bytes(b"# \xe9")
    (tmp_path / "note").write_text("hello", encoding="utf-8")
    expected = {"preset.txt": "preset", "clip.toml": "audio", "text.wav": "audio", "latin.toml": "preset"}
    expected |= {"note": "other", "none": "missing", ".": "other"}
    assert {name: sniff(tmp_path / name) for name in expected} == expected
