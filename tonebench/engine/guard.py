"""The guard: the last thing before the ears. It cannot be switched off.

Whatever comes in, what goes out is finite and at most the ceiling. A look-ahead limiter lowers the gain before a peak
arrives; a clamp at the largest float32 under the ceiling stands behind it. A signal that runs away, or is no number,
is faded out before it arrives, and stays silent until the guard is armed again. When nothing is wrong every factor is
exactly 1.0, so that what is heard is what was computed, bit for bit, only later by the look-ahead.

All of it is computed sample by sample from sample numbers, so the result does not depend on how the signal was cut
into blocks.
"""

import math

import numpy as np
from numpy.typing import NDArray

LOOK_AHEAD_S = 0.0015  # also the time of every fade-out: mute, stop, run-away
FADE_IN_S = 0.05
RELEASE_S = 0.12
RUN_AWAY_DB = 30.0
RUN_AWAY_S = 0.01
LOWEST_CEILING_DB = -60.0

_SNAP = 1e-6  # a released gain this close to 1 is 1
_UNITS = 1 << 28  # the envelope in whole numbers: steps of −168 dB


def float32_ceiling(ceiling_db: float) -> np.float32:
    """Return the largest float32 that is not over the ceiling."""
    exact = 10.0 ** (ceiling_db / 20.0)
    nearest = np.float32(exact)
    return nearest if float(nearest) <= exact else np.nextafter(nearest, np.float32(0.0))


class Guard:
    """Limiter, fades, run-away watch and clamp for one stream.

    Parameters
    ----------
    sample_rate_hz : float
    channels : int
    ceiling_db : float
        Between ``LOWEST_CEILING_DB`` and 0.

    """

    def __init__(self, sample_rate_hz: float, channels: int = 2, ceiling_db: float = -6.0) -> None:
        self.look_ahead_frames = max(int(LOOK_AHEAD_S * sample_rate_hz), 1)
        self._fade_in_frames = max(int(FADE_IN_S * sample_rate_hz), 1)
        self._run_away_frames = max(int(RUN_AWAY_S * sample_rate_hz), 1)
        self._run_away_level = 10.0 ** (RUN_AWAY_DB / 20.0)
        self._release = 1.0 - math.exp(-1.0 / (RELEASE_S * sample_rate_hz))
        size = self.look_ahead_frames
        hann = 0.5 - 0.5 * np.cos(2.0 * np.pi * (np.arange(size + 1) + 0.5) / (size + 1))
        # Whole numbers, so that the mean over the look-ahead is exact, and the same however the signal is cut.
        self._weights: NDArray[np.int64] = np.rint(hann * (_UNITS / 256)).astype(np.int64)
        self._weight = float(self._weights.sum()) * _UNITS
        self._held = np.zeros((size, channels))
        self._wanted = np.ones(size)  # the gain that each held sample asks for
        self._envelope = np.ones(size)
        self._released = 1.0
        # The fade is a whole number of units out of a whole: up by one step per frame, down by another.
        self._whole = self._fade_in_frames * size
        self._fade = 0
        self._is_open = False
        self._loud_start = -1
        self._loud_last = -1
        self._frame = 0
        self.is_tripped = False
        self.reason = ""
        self.is_limiting = False
        self.set_ceiling_db(ceiling_db)

    def set_ceiling_db(self, ceiling_db: float) -> None:
        """Set the ceiling; the clamp follows at once."""
        self._ceiling = float32_ceiling(ceiling_db)

    def open(self) -> None:
        """Let sound through from the next block, faded in; while tripped nothing is let through."""
        self._is_open = True

    def close(self) -> None:
        """Fade out over the look-ahead from the next block, and stay silent."""
        self._is_open = False

    def shut(self) -> None:
        """Be silent at once: after a fault of the device the next sound fades in from nothing."""
        self._is_open = False
        self._fade = 0

    def rearm(self) -> None:
        """Take the guard out of its tripped state; sound fades in if it is open."""
        self.is_tripped = False
        self.reason = ""
        self._loud_start = self._loud_last = -1

    @property
    def is_closed(self) -> bool:
        """Whether nothing at all comes through."""
        return self._fade == 0 and (self.is_tripped or not self._is_open)

    def process_block(self, block: NDArray[np.float64]) -> NDArray[np.float32]:
        """Return the next block, late by ``look_ahead_frames``.

        Parameters
        ----------
        block : ndarray, shape (frames, channels)
            Anything, infinities and NaN included.

        """
        frames = block.shape[0]
        size = self.look_ahead_frames
        trip_at = self._watch(block)
        with np.errstate(all="ignore"):
            clean = np.where(np.isfinite(block), block, 0.0)
            joined = np.concatenate([self._held, clean])
            gain = self._limit(clean)
            fade = self._fades(frames, trip_at)
            out = joined[:frames]
            if gain is not None:
                out = out * gain[:, None]
            if fade is not None:
                out = out * fade[:, None]
            result = out.astype(np.float32)
        self._held = joined[frames : frames + size].copy()
        self._frame += frames
        np.nan_to_num(result, copy=False, nan=0.0, posinf=0.0, neginf=0.0)
        np.clip(result, -self._ceiling, self._ceiling, out=result)
        return result

    def _watch(self, block: NDArray[np.float64]) -> int | None:
        """Return the frame of this block at which the guard trips, if it does."""
        if self.is_tripped:
            return None
        with np.errstate(invalid="ignore"):
            peak = np.abs(block).max(axis=1)
            suspects = np.flatnonzero(~(peak <= self._run_away_level))
        for index in suspects.tolist():
            if not math.isfinite(peak[index]):
                return self._trip(index, "the signal is no longer a number")
            now = self._frame + index
            if self._loud_start < 0 or now - self._loud_last > self._run_away_frames:
                self._loud_start = now
            self._loud_last = now
            if now - self._loud_start >= self._run_away_frames:
                return self._trip(index, f"the signal ran away, over +{RUN_AWAY_DB:g} dBFS")
        return None

    def _trip(self, index: int, reason: str) -> int:
        self.is_tripped = True
        self.reason = reason
        return index

    def _limit(self, clean: NDArray[np.float64]) -> NDArray[np.float64] | None:
        """Return the limiter's gain for each sample that leaves, or None while it is 1 throughout.

        A sample that asks for a gain g holds the envelope at or under g from its arrival until it leaves; the weighted
        mean over the look-ahead that smooths the envelope is then at or under g as it leaves.
        """
        size = self.look_ahead_frames
        frames = clean.shape[0]
        ceiling = float(self._ceiling)
        peak = np.abs(clean).max(axis=1)
        is_quiet = bool((peak <= ceiling).all()) and self._released == 1.0
        if is_quiet and bool((self._wanted == 1.0).all()) and bool((self._envelope == 1.0).all()):
            self.is_limiting = False
            return None
        wanted = np.concatenate([self._wanted, np.where(peak > ceiling, ceiling / np.maximum(peak, ceiling), 1.0)])
        envelope = np.concatenate([self._envelope, self._release_from(_lowest(wanted, size + 1))])
        units = np.floor(envelope * _UNITS).astype(np.int64)
        total = np.convolve(units, self._weights, "valid") / self._weight
        floor = _lowest(envelope, size + 1)
        self._wanted, self._envelope = wanted[frames:].copy(), envelope[frames:].copy()
        self.is_limiting = bool((floor < 1.0).any())
        return np.where(floor == 1.0, 1.0, np.minimum(total, 1.0))

    def _release_from(self, lowest: NDArray[np.float64]) -> NDArray[np.float64]:
        """Follow the lowest wanted gain down at once and up slowly."""
        released = self._released
        result = np.empty(lowest.size)
        for index, value in enumerate(lowest.tolist()):
            released += (1.0 - released) * self._release
            if released > 1.0 - _SNAP:
                released = 1.0
            released = min(released, value)
            result[index] = released
        self._released = released
        return result

    def _fades(self, frames: int, trip_at: int | None) -> NDArray[np.float64] | None:
        """Return the fade for each sample that leaves, or None while it is fully open."""
        is_opening = self._is_open and (not self.is_tripped or trip_at is not None)
        if trip_at is None:
            units = self._ramp(frames, is_opening=is_opening)
        else:
            units = np.concatenate(
                [self._ramp(trip_at, is_opening=is_opening), self._ramp(frames - trip_at, is_opening=False)]
            )
        if units.size and units.min() == self._whole:
            return None
        return 0.5 - 0.5 * np.cos(np.pi * units / self._whole)

    def _ramp(self, frames: int, *, is_opening: bool) -> NDArray[np.int64]:
        step = self.look_ahead_frames if is_opening else -self._fade_in_frames
        units = np.clip(self._fade + step * np.arange(1, frames + 1, dtype=np.int64), 0, self._whole)
        if frames:
            self._fade = int(units[-1])
        return units


def _lowest(values: NDArray[np.float64], width: int) -> NDArray[np.float64]:
    """Return the smallest value of every window, by windows that double."""
    reach = 1
    while 2 * reach <= width:
        values = np.minimum(values[:-reach], values[reach:])
        reach *= 2
    rest = width - reach
    return np.minimum(values[: values.size - rest], values[rest:])
