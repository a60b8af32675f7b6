"""The hearing numbers of a chain: how much louder it can make a sound, and how long it rings.

They stand in every saved preset under a caution in words, and are compared when it is loaded.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.impulse import impulse_response
from tonebench.core.response import SILENCE_DB, chain_response, feature_frequencies_hz, magnitude_db
from tonebench.core.ring import longest_ring_s
from tonebench.core.roots import polar_points
from tonebench.core.stability import is_stable

GAIN_TOLERANCE_DB = 0.1
RING_TOLERANCE = 0.02
STANDS_OUT_DB = 0.5
_LARGEST_TAIL_FRAMES = 4_000_000  # 83 s at 48 kHz; beyond it the norm is a lower bound


@dataclass(frozen=True, slots=True)
class Hearing:
    """Numbers of the hearing caution; any of them is None where a hand-written file left it out.

    Attributes
    ----------
    largest_gain_db : float or None
        Largest |H| over frequency; inf for an unstable chain.
    largest_gain_hz : float or None
        Where.
    worst_peak_db : float or None
        20·log10 of the sum of |h|: no input of a given peak can come out higher than this above it (Jackson 1970,
        ℓ1 norm).
    ring_s : float or None
        Longest T60 of any pole.

    """

    largest_gain_db: float | None
    largest_gain_hz: float | None
    worst_peak_db: float | None
    ring_s: float | None


def hearing(chain: Chain) -> Hearing:
    """Compute the hearing numbers of a chain."""
    ring_s = longest_ring_s(chain)
    if not is_stable(chain):
        return Hearing(math.inf, _loudest_pole_hz(chain), math.inf, ring_s)
    gain_db, gain_hz = largest_gain(chain)
    return Hearing(gain_db, gain_hz, worst_peak_db(chain), ring_s)


def largest_gain(chain: Chain) -> tuple[float, float]:
    """Return the largest magnitude in dB and its frequency in Hz, from 0 to half the sampling rate.

    A grid with extra points around every root, then a golden-section search between the neighbours of the best.
    """
    half_hz = 0.5 * chain.sample_rate_hz
    grid = np.unique(
        np.concatenate(
            [
                [0.0, half_hz],
                np.geomspace(1.0, half_hz, 1024),
                feature_frequencies_hz(chain, 0.0, half_hz),
                _comb_hz(chain),
            ]
        )
    )
    level = magnitude_db(chain_response(chain, grid))
    best = int(np.argmax(level))
    low, high = grid[max(best - 1, 0)], grid[min(best + 1, grid.size - 1)]
    found_hz = _golden_section(chain, float(low), float(high))
    found_db = _level_at(chain, found_hz)
    if found_db <= level[best] + 1e-9:  # a flat top: keep the grid's own, stable under rounding
        return (float(level[best]), float(grid[best]))
    return (found_db, found_hz)


def _comb_hz(chain: Chain) -> NDArray[np.float64]:
    """Return a grid finer than the comb that parts of a sum with different delays make."""
    delays = [one.delay_samples for one in chain.realised()] + [0]
    if chain.combine != "sum" or max(delays) == 0:
        return np.empty(0)
    return np.linspace(0.0, 0.5 * chain.sample_rate_hz, 8 * max(delays) + 1)


def _golden_section(chain: Chain, low: float, high: float) -> float:
    ratio = (math.sqrt(5.0) - 1.0) / 2.0
    for _ in range(60):
        inner_low, inner_high = high - ratio * (high - low), low + ratio * (high - low)
        levels = magnitude_db(chain_response(chain, [inner_low, inner_high]))
        if levels[0] < levels[1]:
            low = inner_low
        else:
            high = inner_high
        if high - low <= 1e-9 * high:
            break
    return 0.5 * (low + high)


def _level_at(chain: Chain, frequency_hz: float) -> float:
    return float(magnitude_db(chain_response(chain, [frequency_hz]))[0])


def worst_peak_db(chain: Chain) -> float:
    """Return 20·log10 of the ℓ1 norm of a stable chain's impulse response.

    The response is taken long enough that its last quarter adds less than a millionth (equal poles in series rise for
    many time constants before they fall), or ``_LARGEST_TAIL_FRAMES`` samples.
    """
    coefficients = from_chain(chain)
    frames = int(2.0 * longest_ring_s(chain) * chain.sample_rate_hz) + 256 + sum(coefficients.delays)
    while True:
        frames = min(frames, _LARGEST_TAIL_FRAMES)
        magnitude = np.abs(impulse_response(coefficients, frames))
        total = float(np.sum(magnitude))
        if frames == _LARGEST_TAIL_FRAMES or float(np.sum(magnitude[-(frames // 4) :])) <= 1e-6 * total:
            return _decibel(total)
        frames *= 2


def _loudest_pole_hz(chain: Chain) -> float:
    points = [point for one in chain.realised() for point in polar_points(one.poles)]
    outermost = max(points, key=lambda point: point.radius)
    return outermost.angle_rad * chain.sample_rate_hz / (2.0 * math.pi)


def _decibel(ratio: float) -> float:
    return SILENCE_DB if ratio <= 0.0 else max(20.0 * math.log10(ratio), SILENCE_DB)


def differences(written: Hearing, chain: Chain) -> tuple[str, ...]:
    """Return which written hearing numbers are not the chain's, one plain line each.

    dB within 0.1, ring within 2 %; the frequency counts only if the largest gain stands out by 0.5 dB over the gain
    at the frequency that was written.
    """
    actual = hearing(chain)
    lines = []
    for name in ("largest_gain_db", "worst_peak_db"):
        then, now = getattr(written, name), getattr(actual, name)
        if then is not None and not _is_close(then, now, GAIN_TOLERANCE_DB):
            lines.append(f"{name} says {then:g}, the chain has {now:.1f}")
    then, now = written.ring_s, actual.ring_s
    if then is not None and now is not None and not _is_close(then, now, RING_TOLERANCE * abs(now)):
        lines.append(f"ring_s says {then:g}, the chain has {now:.3g}")
    lines += _frequency_difference(written, actual, chain)
    return tuple(lines)


def _frequency_difference(written: Hearing, actual: Hearing, chain: Chain) -> list[str]:
    then, now, gain = written.largest_gain_hz, actual.largest_gain_hz, actual.largest_gain_db
    if then is None or now is None or gain is None or math.isinf(gain):
        return []
    is_outside = not 0.0 <= then <= 0.5 * chain.sample_rate_hz
    if is_outside or gain - _level_at(chain, then) > STANDS_OUT_DB:
        return [f"largest_gain_hz says {then:g}, the chain has {now:.4g}"]
    return []


def _is_close(then: float, now: float, tolerance: float) -> bool:
    if math.isinf(then) or math.isinf(now):
        return then == now
    return abs(then - now) <= tolerance + 1e-9
