"""Whether a chain is stable, and how near its outermost pole lies to the unit circle."""

import math

from tonebench.core.chain import Chain
from tonebench.core.roots import largest_radius


def outermost_radius(chain: Chain) -> float:
    """Return the radius of the outermost pole of the active sections, 0.0 without poles.

    The causal chain's region of convergence is everything outside this radius.
    """
    return largest_radius([one.poles for one in chain.realised()])


def is_stable(chain: Chain) -> bool:
    """Tell whether every pole lies inside the unit circle, so that the region of convergence holds the circle.

    Poles that a zero cancels count too: in any arithmetic the cancellation is not exact.
    """
    return outermost_radius(chain) < 1.0


def margin_nepers(chain: Chain) -> float:
    """Return −ln of the outermost radius: positive when stable, inf without poles."""
    radius = outermost_radius(chain)
    return math.inf if radius == 0.0 else -math.log(radius)
