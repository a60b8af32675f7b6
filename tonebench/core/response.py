"""Magnitude, phase and group delay of sections and chains, computed from poles and zeros.

Never from rounded coefficients: their response is a second curve, and ``target`` computes it from their own roots.
"""

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.roots import NO_ROOTS, ConjugatePair, Roots, factors

SILENCE_DB = -400.0  # stands for minus infinity where a chart or a text needs a number


def to_omega_rad(frequency_hz: ArrayLike, sample_rate_hz: float) -> NDArray[np.float64]:
    """Return radians per sample."""
    return np.asarray(frequency_hz, dtype=np.float64) * (2.0 * math.pi / sample_rate_hz)


def section_response(realised: PoleZero, omega_rad: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Return H(exp(j·omega)) of one section; infinite where a pole lies on the circle at that frequency."""
    result = np.full(omega_rad.shape, complex(realised.gain), dtype=np.complex128)
    if realised.delay_samples:
        result *= np.exp(-1j * realised.delay_samples * omega_rad)
    for one in factors(realised.zeros, omega_rad):
        result *= one
    with np.errstate(divide="ignore", invalid="ignore"):
        for one in factors(realised.poles, omega_rad):
            result /= one
    return result


def combined_response(
    parts: list[NDArray[np.complex128]], combine: str, gain: float, direct_gain: float, frames: int
) -> NDArray[np.complex128]:
    """Combine section responses the way a chain combines its sections; infinite where a part is."""
    with np.errstate(all="ignore"):
        if combine == "sum":
            total = np.full(frames, complex(direct_gain), dtype=np.complex128)
            for part in parts:
                total += part
        else:
            total = np.ones(frames, dtype=np.complex128)
            for part in parts:
                total *= part
        total *= gain
    is_infinite = np.zeros(frames, dtype=np.bool_)
    for part in parts:
        is_infinite |= np.isinf(np.abs(part))
    # Complex products and sums with an infinity are NaN by the rules of arithmetic; a pole on the circle is not.
    total[is_infinite] = math.inf
    return total


def chain_response(chain: Chain, frequency_hz: ArrayLike) -> NDArray[np.complex128]:
    """Return the complex response of a chain.

    Parameters
    ----------
    chain : Chain
    frequency_hz : array_like, shape (k,)
        From 0 to half the sampling rate.

    Returns
    -------
    ndarray of complex, shape (k,)

    """
    omega = to_omega_rad(frequency_hz, chain.sample_rate_hz)
    parts = [section_response(one, omega) for one in chain.realised()]
    gain = 10.0 ** (chain.gain_db / 20.0)
    return combined_response(parts, chain.combine, gain, chain.direct_gain, omega.size)


def magnitude_db(response: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Return 20·log10|H|, no lower than ``SILENCE_DB``."""
    with np.errstate(divide="ignore", invalid="ignore"):
        level = 20.0 * np.log10(np.abs(response))
    return np.asarray(np.maximum(level, SILENCE_DB), dtype=np.float64)


def phase_rad(response: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Return the phase, unwrapped along the frequencies given."""
    return np.unwrap(np.angle(response))


def group_delay_s(chain: Chain, frequency_hz: ArrayLike) -> NDArray[np.float64]:
    """Return the group delay of a chain in seconds, −d(phase)/d(omega), from the roots in closed form.

    At a frequency where a zero lies on the circle the phase jumps and the value is NaN.

    Parameters
    ----------
    chain : Chain
    frequency_hz : array_like, shape (k,)

    """
    omega = to_omega_rad(frequency_hz, chain.sample_rate_hz)
    realised = chain.realised()
    slopes = [_log_derivative(one, omega) for one in realised]
    if chain.combine == "series":
        slope = sum(slopes, np.zeros(omega.shape, dtype=np.complex128))
        return np.asarray(-slope.imag / chain.sample_rate_hz, dtype=np.float64)
    parts = [section_response(one, omega) for one in realised]
    total = combined_response(parts, "sum", 1.0, chain.direct_gain, omega.size)
    with np.errstate(divide="ignore", invalid="ignore"):
        derivative = np.zeros(omega.shape, dtype=np.complex128)
        for part, slope in zip(parts, slopes, strict=True):
            derivative += part * slope
        return np.asarray(-(derivative / total).imag / chain.sample_rate_hz, dtype=np.float64)


def _log_derivative(realised: PoleZero, omega_rad: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Return d(ln H)/d(omega)."""
    slope = np.full(omega_rad.shape, -1j * realised.delay_samples, dtype=np.complex128)
    return slope + _roots_slope(realised.zeros, omega_rad) - _roots_slope(realised.poles, omega_rad)


def _roots_slope(roots: Roots, omega_rad: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Sum j·root·e^{−jw}/(1 − root·e^{−jw}) over the roots: the slope of the logarithm of their factors."""
    if roots == NO_ROOTS:
        return np.zeros(omega_rad.shape, dtype=np.complex128)
    if isinstance(roots, ConjugatePair):
        deltas = (roots.angle_rad - omega_rad, -roots.angle_rad - omega_rad)
        turned = [roots.radius * np.exp(1j * delta) for delta in deltas]
    else:
        turned = [value * np.exp(-1j * omega_rad) for value in roots.values]
    total = np.zeros(omega_rad.shape, dtype=np.complex128)
    with np.errstate(divide="ignore", invalid="ignore"):
        for numerator, factor in zip(turned, factors(roots, omega_rad), strict=True):
            total += np.where(factor == 0.0, complex(np.nan, np.nan), 1j * numerator / factor)
    return total


def feature_frequencies_hz(chain: Chain, lowest_hz: float, highest_hz: float) -> NDArray[np.float64]:
    """Return frequencies at and around every root, so that no narrow peak or notch falls between grid points.

    Around each root's angle, offsets of up to 30 bandwidths in even steps of their logarithm.
    """
    found: list[NDArray[np.float64]] = []
    spread = np.concatenate([[0.0], np.geomspace(0.02, 30.0, 24)])
    offsets = np.concatenate([-spread[::-1], spread])
    for one in chain.realised():
        widest = max(_log_radius(one.poles), 1e-9)
        for roots in (one.poles, one.zeros):
            if isinstance(roots, ConjugatePair) and roots.radius > 0.0:
                width = max(abs(math.log(roots.radius)), widest if roots is one.zeros else 1e-9)
                found.append(roots.angle_rad + offsets * width)
    if not found:
        return np.empty(0)
    frequency_hz = np.concatenate(found) * (chain.sample_rate_hz / (2.0 * math.pi))
    inside = (frequency_hz >= lowest_hz) & (frequency_hz <= highest_hz)
    return np.unique(frequency_hz[inside])


def _log_radius(roots: Roots) -> float:
    if isinstance(roots, ConjugatePair) and roots.radius > 0.0:
        return abs(math.log(roots.radius))
    return 0.0
