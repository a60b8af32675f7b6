"""What a chain becomes for running: rows of second-order coefficients, delays and gains.

Everything that runs a chain (play, render, exported code, norms) starts from these numbers, so that all of it is
the same filter. They are derived from poles and zeros and never edited back.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.roots import polynomial


@dataclass(frozen=True, slots=True, eq=False)
class Coefficients:
    """Rows of coefficients in processing order.

    Attributes
    ----------
    sample_rate_hz : float
        The rate that the numbers belong to.
    combine : str
        ``"series"``: each section hears the one before; ``"sum"``: each hears the input and the outputs are added.
    rows : ndarray, shape (n, 6)
        ``b0 b1 b2 1 a1 a2`` of each section that is not bypassed; polarity and section gain are inside ``b``.
    delays : tuple of int
        Whole samples of delay per row.
    identities : tuple of int
        The identity of the section that each row came from; unique.
    gain : float
        Linear gain of the whole chain, applied last.
    direct_gain : float
        Sum only: the input itself is added with this factor; 0.0 adds nothing.

    """

    sample_rate_hz: float
    combine: str
    rows: NDArray[np.float64]
    delays: tuple[int, ...]
    identities: tuple[int, ...]
    gain: float
    direct_gain: float


def section_row(realised: PoleZero) -> tuple[float, float, float, float, float, float]:
    """Return ``b0 b1 b2 1 a1 a2`` of one section."""
    c1, c2 = polynomial(realised.zeros)
    a1, a2 = polynomial(realised.poles)
    gain = realised.gain
    return (gain, gain * c1, gain * c2, 1.0, a1, a2)


def from_chain(chain: Chain) -> Coefficients:
    """Return what the chain becomes for running; bypassed sections are left out."""
    realised = chain.realised()
    rows = np.array([section_row(one) for one in realised], dtype=np.float64).reshape(len(realised), 6)
    return Coefficients(
        sample_rate_hz=chain.sample_rate_hz,
        combine=chain.combine,
        rows=rows,
        delays=tuple(one.delay_samples for one in realised),
        identities=tuple(one.identity for one in realised),
        gain=10.0 ** (chain.gain_db / 20.0),
        direct_gain=chain.direct_gain,
    )
