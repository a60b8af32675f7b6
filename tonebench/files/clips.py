"""Audio in and out through libsndfile (soundfile).

soundfile is loaded inside the functions: the screen imports this module on its way to the first picture.
"""

import contextlib
import os
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import Any, Self

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import LARGEST_SAMPLE_RATE_HZ, SMALLEST_SAMPLE_RATE_HZ
from tonebench.errors import ClipError, StorageError
from tonebench.files.atomic import replacing

_LARGEST_WAV_BYTES = 4_000_000_000  # a WAV's length fields have 32 bits
LARGEST_CLIP_SAMPLES = 200_000_000  # 800 MB of float32, 35 minutes of stereo at 48 kHz: a clip is held in memory


@dataclass(frozen=True, slots=True, eq=False)
class Clip:
    """A clip held in memory.

    Attributes
    ----------
    frames : ndarray of float32, shape (n, channels)
        One or two channels; finite.
    sample_rate_hz : float
    name : str
        The file's name.
    path : Path or None
    description : str
        The file's comment tag, or empty.
    notes : tuple of str
        What was left out or changed while reading, one plain line each.

    """

    frames: NDArray[np.float32]
    sample_rate_hz: float
    name: str
    path: Path | None = None
    description: str = ""
    notes: tuple[str, ...] = ()

    @property
    def seconds(self) -> float:
        """Its length."""
        return float(self.frames.shape[0] / self.sample_rate_hz)


@contextlib.contextmanager
def _opened(path: Path) -> Iterator[Any]:
    """Open a file for reading, with every way of failing in one plain line."""
    import soundfile  # noqa: PLC0415

    if not path.exists():
        raise StorageError(f"{path} does not exist; check the path")
    if path.is_dir():
        raise StorageError(f"{path} is a folder; give an audio file")
    if not os.access(path, os.R_OK):
        raise StorageError(f"{path} may not be read; check its permissions")
    try:
        with soundfile.SoundFile(str(path)) as file:
            _check(file, path)
            yield file
    except soundfile.LibsndfileError as error:
        reason = str(error.error_string).strip().rstrip(".") or "unknown format"
        raise ClipError(
            f"{path} is not audio that can be read ({reason}); give a WAV, FLAC, OGG or AIFF file"
        ) from error
    except (RuntimeError, TypeError) as error:
        raise ClipError(
            f"{path} is not audio that can be read ({error}); give a WAV, FLAC, OGG or AIFF file"
        ) from error


def _check(file: Any, path: Path) -> None:
    if file.frames < 1:
        raise ClipError(f"{path} holds no samples; give a clip with sound in it")
    if not SMALLEST_SAMPLE_RATE_HZ <= file.samplerate <= LARGEST_SAMPLE_RATE_HZ:
        rule = f"between {SMALLEST_SAMPLE_RATE_HZ:g} and {LARGEST_SAMPLE_RATE_HZ:g} Hz"
        raise ClipError(f"{path} must have a sample rate {rule}, got {file.samplerate}; convert it first")


def load_clip(path: Path) -> Clip:
    """Read a whole clip as float32; of more than two channels, the first two.

    Raises
    ------
    ClipError
        If it is not audio, empty, of an impossible rate, or too long to hold in memory.
    StorageError
        If it cannot be opened.

    """
    with _opened(path) as file:
        if file.frames * file.channels > LARGEST_CLIP_SAMPLES:
            minutes = LARGEST_CLIP_SAMPLES / file.channels / file.samplerate / 60.0
            raise ClipError(
                f"{path} is too long for a clip (at most {minutes:.0f} minutes here); cut out a part, or render"
            )
        frames = file.read(dtype="float32", always_2d=True)
        rate_hz, comment = float(file.samplerate), str(file.comment or "")
    if frames.shape[0] < 1:
        raise ClipError(f"{path} holds no samples; give a clip with sound in it")
    notes = []
    if frames.shape[1] > 2:
        notes.append(f"{path.name} has {frames.shape[1]} channels; the first two are played")
        frames = np.ascontiguousarray(frames[:, :2])
    bad = int(np.count_nonzero(~np.isfinite(frames)))
    if bad:
        notes.append(f"{path.name} holds {bad} samples that are no numbers; they are played as silence")
        frames = np.nan_to_num(frames, nan=0.0, posinf=0.0, neginf=0.0)
    return Clip(frames, rate_hz, path.name, path, comment, tuple(notes))


def describe_file(path: Path) -> str:
    """Return the comment tag of an audio file, or empty."""
    with _opened(path) as file:
        return str(file.comment or "")


@dataclass(frozen=True, slots=True)
class Blocks:
    """A file that is being read block by block; iterate for float64 blocks of shape (frames, channels)."""

    sample_rate_hz: float
    channels: int
    frames: int
    _file: Any
    _block_frames: int

    def __iter__(self) -> Iterator[NDArray[np.float64]]:
        while True:
            block = self._file.read(self._block_frames, dtype="float64", always_2d=True)
            if block.shape[0] == 0:
                return
            yield block


@contextlib.contextmanager
def read_blocks(path: Path, block_frames: int) -> Iterator[Blocks]:
    """Open a file of any length and channel count for reading in blocks.

    Raises
    ------
    ClipError, StorageError
        As ``load_clip``.

    """
    with _opened(path) as file:
        yield Blocks(float(file.samplerate), int(file.channels), int(file.frames), file, block_frames)


class ClipWriter:
    """Write a 32-bit float WAV; it takes its name only when the block ends well.

    Samples are written as they are: values over full scale are kept.

    Parameters
    ----------
    path : Path
    sample_rate_hz : float
    channels : int
    is_forced : bool
        Overwrite an existing file.
    frames : int
        How many are expected; a file that would pass 4 GB is written as RF64.

    """

    def __init__(
        self, path: Path, sample_rate_hz: float, channels: int, *, is_forced: bool = False, frames: int = 0
    ) -> None:
        self._path = path
        self._rate_hz = round(sample_rate_hz)
        self._channels = channels
        self._is_forced = is_forced
        self._format = "RF64" if frames * channels * 4 > _LARGEST_WAV_BYTES else "WAV"
        self._stack = contextlib.ExitStack()
        self._file: Any = None

    def __enter__(self) -> Self:
        import soundfile  # noqa: PLC0415

        with contextlib.ExitStack() as stack:
            temporary = stack.enter_context(replacing(self._path, is_forced=self._is_forced))
            self._file = stack.enter_context(
                soundfile.SoundFile(
                    str(temporary), "w", self._rate_hz, self._channels, subtype="FLOAT", format=self._format
                )
            )
            self._stack = stack.pop_all()
        return self

    def write(self, frames: NDArray[np.float32]) -> None:
        """Append frames of shape (n, channels)."""
        if not frames.shape[0]:
            return
        try:
            self._file.write(frames)
        except RuntimeError as error:  # libsndfile's own, for a full disk or a WAV over 4 GB
            raise StorageError(f"{self._path} could not be written: {error}; nothing was changed") from error

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._stack.__exit__(kind, error, trace)
