"""What fills one block: clip, chain, what is heard, level, guard. It runs in the real-time callback.

Everything that another thread changes is one attribute, assigned whole; the callback takes it at its next block.
Nothing here locks, prints or touches a device.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.engine.guard import Guard
from tonebench.engine.kernel import Kernel

CROSS_FADE_S = 0.01
LEVEL_RAMP_S = 0.02
STARTING_LEVEL_DB = -20.0
# What is heard, as factors of the chain's input and output.
HEAR_FACTORS = {"input": (1.0, 0.0), "output": (0.0, 1.0), "change": (-1.0, 1.0)}
OUTPUT_CHANNELS = 2


@dataclass(frozen=True, slots=True)
class Loop:
    """Loop points in frames, ``start`` inclusive and ``end`` exclusive; without looping the clip ends in silence."""

    start: int
    end: int
    is_looping: bool = True


class Player:
    """One clip being played.

    Parameters
    ----------
    clip : ndarray of float32, shape (n, channels)
        One or two channels; one goes to both ears.
    sample_rate_hz : float
    kernel : Kernel
        With the clip's channels.

    """

    def __init__(self, clip: NDArray[np.float32], sample_rate_hz: float, kernel: Kernel) -> None:
        self._clip = clip
        self._kernel = kernel
        self._old_kernel: Kernel | None = None
        self._fade_position = 0
        fade_frames = max(int(CROSS_FADE_S * sample_rate_hz), 1)
        self._fade_in = 0.5 - 0.5 * np.cos(np.pi * (np.arange(fade_frames) + 1.0) / (fade_frames + 1.0))
        self._hear = _Ramp(HEAR_FACTORS["output"], fade_frames)
        self._level = _Ramp((10.0 ** (STARTING_LEVEL_DB / 20.0),), max(int(LEVEL_RAMP_S * sample_rate_hz), 1))
        self.guard = Guard(sample_rate_hz, OUTPUT_CHANNELS)
        self.position = 0
        self._left = -1  # where the clip would go on if the loop had not been moved away
        self._left_frames = 0
        self.is_wanted = False  # play or stop
        self.is_muted = False
        self.loop = Loop(0, clip.shape[0])
        self.pending_kernel: Kernel | None = None
        self.before = np.zeros((0, OUTPUT_CHANNELS))
        self.after = np.zeros((0, OUTPUT_CHANNELS))

    @property
    def clip_frames(self) -> int:
        """Length of the clip."""
        return int(self._clip.shape[0])

    @property
    def channels(self) -> int:
        """Channels of the clip and of the kernel."""
        return self._kernel.channels

    @property
    def is_idle(self) -> bool:
        """Whether the player stands still and nothing comes through."""
        return not self.is_wanted and self.guard.is_closed

    def hear(self, what: str) -> None:
        """Choose what is heard; faded."""
        self._hear.aim(HEAR_FACTORS[what])

    def set_level_db(self, level_db: float) -> None:
        """Choose the level; reached in a straight line, exactly."""
        self._level.aim((1.0 if level_db == 0.0 else 10.0 ** (level_db / 20.0),))

    def rearm(self) -> None:
        """Arm a guard that tripped, with the chain at rest: a run-away state would trip it at once."""
        if not self.guard.is_tripped:
            return
        self._kernel = Kernel(self._kernel.coefficients, self._kernel.channels)
        self._old_kernel = None
        self.guard.rearm()

    def fill_block(self, frames: int) -> NDArray[np.float32]:
        """Return the next block for the device, shape (frames, 2)."""
        if self.is_wanted and not self.is_muted:
            self.guard.open()
        else:
            self.guard.close()
        if self.is_idle:
            self.before = self.after = np.zeros((0, OUTPUT_CHANNELS))
            return np.zeros((frames, OUTPUT_CHANNELS), dtype=np.float32)
        source = self._take(frames).astype(np.float64)
        output = self._run_chain(source)
        self.before, self.after = _both_ears(source), _both_ears(output)
        heard = self._hear.mix(self.before, self.after)
        return self.guard.process_block(self._level.mix(heard))

    def _take(self, frames: int) -> NDArray[np.float32]:
        """Take the next frames of the clip, going round at the loop's end."""
        loop = self.loop
        if loop.is_looping and not loop.start <= self.position < loop.end:
            if self.before.shape[0]:  # something sounds
                self._left, self._left_frames = self.position, 0
            self.position = loop.start
        part = self._take_plain(frames, loop)
        return part if self._left < 0 else self._leave(part)

    def _leave(self, part: NDArray[np.float32]) -> NDArray[np.float32]:
        """Fade from where the clip was to where the loop has been moved."""
        weights = self._fade_in[self._left_frames : self._left_frames + part.shape[0], None]
        count = weights.shape[0]
        old = np.zeros((count, part.shape[1]))
        there = self._clip[self._left : self._left + count]
        old[: there.shape[0]] = there
        mixed = part.copy()
        mixed[:count] = weights * part[:count] + (1.0 - weights) * old
        self._left += count
        self._left_frames += count
        if self._left_frames >= self._fade_in.size:
            self._left = -1
        return mixed

    def _take_plain(self, frames: int, loop: Loop) -> NDArray[np.float32]:
        """Take frames as they stand in the clip."""
        end = loop.end if loop.is_looping else self._clip.shape[0]
        if self.position + frames <= end:
            part = self._clip[self.position : self.position + frames]
            self.position += frames
            if loop.is_looping and self.position == end:
                self.position = loop.start
            return part
        if not loop.is_looping:
            part = self._clip[self.position :]
            self.position = min(self.position + frames, self._clip.shape[0])
            return np.concatenate([part, np.zeros((frames - part.shape[0], part.shape[1]), dtype=np.float32)])
        offsets = (self.position - loop.start + np.arange(frames)) % (loop.end - loop.start)
        self.position = loop.start + (int(offsets[-1]) + 1) % (loop.end - loop.start)
        return self._clip[loop.start + offsets]

    def _run_chain(self, source: NDArray[np.float64]) -> NDArray[np.float64]:
        """Run the chain; a new one starts from the old one's state and is faded in beside it."""
        pending = self.pending_kernel
        if pending is not None and self._old_kernel is None:
            self.pending_kernel = None
            pending.copy_state_from(self._kernel)
            self._old_kernel, self._kernel = self._kernel, pending
            self._fade_position = 0
        output = self._kernel.process_block(source)
        if self._old_kernel is None:
            return output
        old = self._old_kernel.process_block(source)
        weights = self._fade_in[self._fade_position : self._fade_position + source.shape[0], None]
        count = weights.shape[0]
        with np.errstate(all="ignore"):
            output[:count] = weights * output[:count] + (1.0 - weights) * old[:count]
        self._fade_position += count
        if self._fade_position >= self._fade_in.size:
            self._old_kernel = None
        return output


class _Ramp:
    """Factors that go to their aim in a straight line and are then exactly there."""

    def __init__(self, factors: tuple[float, ...], frames: int) -> None:
        self._frames = frames
        self._from = np.array(factors)
        self._aim = np.array(factors)
        self._wanted: tuple[float, ...] = factors
        self._position = frames

    def aim(self, factors: tuple[float, ...]) -> None:
        """Choose new factors (from another thread: one assignment)."""
        self._wanted = factors

    def mix(self, *signals: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the sum of the signals, each of shape (frames, channels), times its factor."""
        wanted = self._wanted
        if tuple(self._aim) != wanted:
            self._from = self._now()
            self._aim = np.array(wanted)
            self._position = 0
        if self._position >= self._frames:
            return self._settled(signals)
        steps = np.minimum(self._position + 1 + np.arange(signals[0].shape[0]), self._frames) / self._frames
        self._position += signals[0].shape[0]
        total = np.zeros(signals[0].shape)
        for start, end, one in zip(self._from, self._aim, signals, strict=True):
            total += (start + (end - start) * steps)[:, None] * one
        return total

    def _now(self) -> NDArray[np.float64]:
        part = min(self._position, self._frames) / self._frames
        return np.asarray(self._from + (self._aim - self._from) * part)

    def _settled(self, signals: tuple[NDArray[np.float64], ...]) -> NDArray[np.float64]:
        """Multiply only by what is not 1 and leave out what is 0, so that an infinite input cannot spoil the output."""
        total: NDArray[np.float64] | None = None
        for factor, one in zip(self._aim.tolist(), signals, strict=True):
            if factor == 0.0:
                continue
            part = one if factor == 1.0 else factor * one
            total = part if total is None else total + part
        return np.zeros(signals[0].shape) if total is None else total


def _both_ears(samples: NDArray[np.float64]) -> NDArray[np.float64]:
    return samples if samples.shape[1] == OUTPUT_CHANNELS else np.repeat(samples, OUTPUT_CHANNELS, axis=1)


def peak_db(block: NDArray[np.float32]) -> float:
    """Return the largest sample in dBFS, −inf for silence."""
    peak = float(np.max(np.abs(block), initial=0.0))
    return 20.0 * math.log10(peak) if peak > 0.0 else -math.inf
