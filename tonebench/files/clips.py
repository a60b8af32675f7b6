"""Audio in and out through libsndfile (soundfile).

soundfile is loaded inside the functions: the screen imports this module on its way to the first picture.
"""

import contextlib
import os
import stat
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
def _plainly(path: Path) -> Iterator[None]:
    """Turn libsndfile's complaints about a file into one plain line."""
    import soundfile  # noqa: PLC0415

    try:
        yield
    except soundfile.LibsndfileError as error:
        reason = str(error.error_string).strip().rstrip(".") or "unknown format"
        raise ClipError(
            f"{path} is not audio that can be read ({reason}); give a WAV, FLAC, OGG or AIFF file"
        ) from error


@contextlib.contextmanager
def _opened(path: Path) -> Iterator[Any]:
    """Open a file for reading; what goes wrong inside the block is not this function's business."""
    import soundfile  # noqa: PLC0415

    try:
        is_file = stat.S_ISREG(path.stat().st_mode)
        with path.open("rb") if is_file else contextlib.nullcontext():
            pass  # libsndfile calls every failure to open a "system error"; Python says which
    except FileNotFoundError as error:
        raise StorageError(f"{path} does not exist; check the path") from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or error
        raise StorageError(f"{path} cannot be read: {reason}; check the path and its permissions") from error
    if not is_file:
        raise StorageError(f"{path} is no regular file; give an audio file")
    try:
        with _plainly(path):
            file = soundfile.SoundFile(str(path))
    except TypeError as error:  # what soundfile raises for a name that ends in .raw
        raise ClipError(f"{path} does not say what is in it ({error}); give a WAV, FLAC, OGG or AIFF file") from error
    with file:
        _check(file, path)
        yield file


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
        with _plainly(path):
            frames = file.read(dtype="float32", always_2d=True)
        rate_hz, comment = float(file.samplerate), str(file.comment or "")
    if frames.shape[0] < 1:
        raise ClipError(f"{path} holds no samples; give a clip with sound in it")
    notes = []
    if frames.shape[1] > 2:
        notes.append(f"{path.name} has {frames.shape[1]} channels; the first two are played")
        frames = np.ascontiguousarray(frames[:, :2])
    bad = _silence_bad(frames)
    if bad:
        notes.append(f"{path.name} holds {bad} samples that are no numbers; they are played as silence")
    return Clip(frames, rate_hz, path.name, path, comment, tuple(notes))


def describe_file(path: Path) -> str:
    """Return the comment tag of an audio file, or empty."""
    with _opened(path) as file:
        return str(file.comment or "")


@dataclass(slots=True)
class Blocks:
    """A file that is being read block by block; iterate for float64 blocks of shape (frames, channels).

    Samples that are no numbers become silence, as in a clip; ``bad_samples`` counts them.
    """

    sample_rate_hz: float
    channels: int
    frames: int
    _file: Any
    _path: Path
    _block_frames: int
    bad_samples: int = 0

    def __iter__(self) -> Iterator[NDArray[np.float64]]:
        while True:
            with _plainly(self._path):
                block = self._file.read(self._block_frames, dtype="float64", always_2d=True)
            if block.shape[0] == 0:
                return
            self.bad_samples += _silence_bad(block)
            yield block


def _silence_bad(frames: NDArray[Any]) -> int:
    """Set what is no finite number to 0 in place, and return how many there were."""
    is_bad = ~np.isfinite(frames)
    frames[is_bad] = 0.0
    return int(np.count_nonzero(is_bad))


@contextlib.contextmanager
def read_blocks(path: Path, block_frames: int) -> Iterator[Blocks]:
    """Open a file of any length and channel count for reading in blocks.

    Raises
    ------
    ClipError, StorageError
        As ``load_clip``.

    """
    with _opened(path) as file:
        yield Blocks(float(file.samplerate), int(file.channels), int(file.frames), file, path, block_frames)


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
            stack.callback(_flush_to_disk, temporary)
            with self._storage():
                self._file = soundfile.SoundFile(
                    str(temporary), "w", self._rate_hz, self._channels, subtype="FLOAT", format=self._format
                )
            stack.callback(self._close)
            self._stack = stack.pop_all()
        return self

    def write(self, frames: NDArray[np.float32]) -> None:
        """Append frames of shape (n, channels)."""
        if frames.shape[0]:
            with self._storage():
                self._file.write(frames)

    def _close(self) -> None:
        with self._storage():
            self._file.close()

    @contextlib.contextmanager
    def _storage(self) -> Iterator[None]:
        """Say in plain words what libsndfile complains about: a full disk, a WAV over 4 GB, too many channels."""
        try:
            yield
        except (RuntimeError, ValueError, OSError) as error:
            reason = str(getattr(error, "error_string", error)).rstrip(".")
            raise StorageError(f"{self._path} could not be written: {reason}; nothing was changed") from error

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._stack.__exit__(kind, error, trace)


def _flush_to_disk(path: Path) -> None:
    """Have the bytes on the disk before the name: a crash in between leaves the old file whole."""
    with path.open("rb+") as file:
        os.fsync(file.fileno())
