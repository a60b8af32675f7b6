"""Outside answers for the tests of the core room, sharing no code with it.

Formulas are written again from the published text, in mpmath at 50 digits; time-domain answers come from loops that
are as plain as can be. ``test_oracles.py`` checks each of them on a case worked by hand or printed in a source.
"""

from collections.abc import Sequence
from typing import Any

import mpmath
import numpy as np
from numpy.typing import NDArray

MP: Any = mpmath.mp.clone()
MP.dps = 50

Polynomial = tuple[Any, Any, Any]


def cookbook(kind: str, f0: float, fs: float, q: float, gain_db: float = 0.0) -> tuple[Polynomial, Polynomial]:
    """Return b and a of the Audio EQ Cookbook (R. Bristow-Johnson, W3C Working Group Note), divided by a0.

    The kinds are the Note's own: LPF, HPF, BPF (0 dB peak gain), notch, APF, peakingEQ, lowShelf, highShelf.
    """
    A = MP.mpf(10) ** (MP.mpf(gain_db) / 40)
    w0 = 2 * MP.pi * MP.mpf(f0) / MP.mpf(fs)
    c, alpha = MP.cos(w0), MP.sin(w0) / (2 * MP.mpf(q))
    root = 2 * MP.sqrt(A) * alpha
    plain = (1 + alpha, -2 * c, 1 - alpha)
    b, a = {
        "LPF": (((1 - c) / 2, 1 - c, (1 - c) / 2), plain),
        "HPF": (((1 + c) / 2, -(1 + c), (1 + c) / 2), plain),
        "BPF": ((alpha, MP.mpf(0), -alpha), plain),
        "notch": ((MP.mpf(1), -2 * c, MP.mpf(1)), plain),
        "APF": ((1 - alpha, -2 * c, 1 + alpha), plain),
        "peakingEQ": ((1 + alpha * A, -2 * c, 1 - alpha * A), (1 + alpha / A, -2 * c, 1 - alpha / A)),
        "lowShelf": (
            (A * ((A + 1) - (A - 1) * c + root), 2 * A * ((A - 1) - (A + 1) * c), A * ((A + 1) - (A - 1) * c - root)),
            ((A + 1) + (A - 1) * c + root, -2 * ((A - 1) + (A + 1) * c), (A + 1) + (A - 1) * c - root),
        ),
        "highShelf": (
            (A * ((A + 1) + (A - 1) * c + root), -2 * A * ((A - 1) + (A + 1) * c), A * ((A + 1) + (A - 1) * c - root)),
            ((A + 1) - (A - 1) * c + root, 2 * ((A - 1) - (A + 1) * c), (A + 1) - (A - 1) * c - root),
        ),
    }[kind]
    return (b[0] / a[0], b[1] / a[0], b[2] / a[0]), (MP.mpf(1), a[1] / a[0], a[2] / a[0])


def first_order(kind: str, f0: float, fs: float, gain_db: float = 0.0) -> tuple[Polynomial, Polynomial]:
    """Return b and a of an analogue prototype of first order under the exact bilinear transform.

    (B1 s + B0)/(A1 s + A0) with s = (1 − 1/z)/(1 + 1/z)/tan(w0/2), so that s = j falls on f0. The shelves are
    (s + A)/(s + 1/A) with A = 10^(gain/40), and A²(s + 1/A)/(s + A): gain A² at one end, 1 at the other, A at f0.
    """
    A = MP.mpf(10) ** (MP.mpf(gain_db) / 40)
    k = MP.tan(MP.pi * MP.mpf(f0) / MP.mpf(fs))
    (b1, b0), (a1, a0) = {
        "LPF": ((0, 1), (1, 1)),
        "HPF": ((1, 0), (1, 1)),
        "APF": ((-1, 1), (1, 1)),
        "lowShelf": ((1, A), (1, 1 / A)),
        "highShelf": ((A * A, A), (1, A)),
    }[kind]
    scale = a1 + a0 * k
    return ((b1 + b0 * k) / scale, (b0 * k - b1) / scale, MP.mpf(0)), (MP.mpf(1), (a0 * k - a1) / scale, MP.mpf(0))


def polynomial_response(b: Polynomial, a: Polynomial, omega: Any) -> Any:
    """Return B/A at e^{j·omega}."""
    x = MP.expj(-omega)
    return (b[0] + b[1] * x + b[2] * x * x) / (a[0] + a[1] * x + a[2] * x * x)


def roots_of(c: Polynomial) -> tuple[Any, Any]:
    """Return both roots in z of c0 + c1/z + c2/z²."""
    half, product = c[1] / (2 * c[0]), c[2] / c[0]
    root = MP.sqrt(MP.mpc(half * half - product))
    return -half + root, -half - root


def pair(radius: float, angle_rad: float) -> list[Any]:
    """Return a conjugate pair at exactly these doubles."""
    return [MP.mpf(radius) * MP.expj(MP.mpf(angle_rad)), MP.mpf(radius) * MP.expj(-MP.mpf(angle_rad))]


def root_response(zeros: Sequence[Any], poles: Sequence[Any], gain: Any, delay: int, omega: Any) -> Any:
    """Return gain·z^−delay·Π(1 − q/z)/Π(1 − p/z) at z = e^{j·omega}."""
    x = MP.expj(-omega)
    value = MP.mpc(gain) * x**delay
    for zero in zeros:
        value *= 1 - zero * x
    for pole in poles:
        value /= 1 - pole * x
    return value


def group_delay_samples(response: Any, omega: Any) -> Any:
    """Return −d(phase)/d(omega) of a callable response, by mpmath's own numeric derivative."""
    return -MP.im(MP.diff(response, omega) / response(omega))


def naive_filter(
    row: Sequence[float], delay: int, samples: NDArray[np.float64] | Sequence[float]
) -> NDArray[np.float64]:
    """Run the difference equation of one section, sample by sample, direct form I."""
    b0, b1, b2, _, a1, a2 = (float(one) for one in row)
    x1 = x2 = y1 = y2 = 0.0
    result = [0.0] * delay
    for x0 in (float(one) for one in samples):
        y0 = b0 * x0 + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2
        result.append(y0)
        x1, x2, y1, y2 = x0, x1, y0, y1
    return np.array(result[: len(samples)])


def tail_envelope(tail: NDArray[np.float64], angle_rad: float) -> NDArray[np.float64]:
    """Return the envelope of a slowly decaying tone of a known angle: from neighbouring samples in quadrature."""
    quadrature = (tail[:-1] * np.cos(angle_rad) - tail[1:]) / np.sin(angle_rad)
    return np.asarray(np.hypot(tail[:-1], quadrature))


def time_above(envelope: NDArray[np.float64], level: float) -> int:
    """Return the number of the last sample whose envelope is over a level, 0 where there is none."""
    above = np.flatnonzero(envelope > level)
    return int(above[-1]) if above.size else 0
