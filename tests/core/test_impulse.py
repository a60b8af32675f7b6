"""Time domain against a naive loop and scipy, and against the frequency domain."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal

from tests.core import oracles
from tests.core.cases import STEADY, chain_of, free, own_row, stable_chains
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.impulse import impulse_response, run, step_response
from tonebench.core.response import chain_response
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, Section


def naive(chain: Chain, samples: NDArray[np.float64]) -> NDArray[np.float64]:
    """Run a chain sample by sample from its own rows."""
    gain = 10.0 ** (chain.gain_db / 20.0)
    if chain.combine == "series":
        for one in chain.realised():
            samples = oracles.naive_filter(own_row(one).tolist(), one.delay_samples, samples)
        return np.asarray(gain * samples)
    direct = 0.0 if chain.direct_gain_db is None else 10.0 ** (chain.direct_gain_db / 20.0)
    total = direct * samples
    for one in chain.realised():
        total = total + oracles.naive_filter(own_row(one).tolist(), one.delay_samples, samples)
    return np.asarray(gain * total)


@settings(STEADY, max_examples=60)
@given(stable_chains(), st.integers(0, 300), st.integers(0, 2**32 - 1))
def test_any_signal_against_a_naive_loop(chain: Chain, frames: int, seed: int) -> None:
    """Noise of any length, series and sum, delays, direct gain, over several blocks of 64.

    1e-10 of the largest value anywhere: four sections near the circle amplify roundings by their noise gain, which
    is under 1e5 for 300 samples, of 1e-16.
    """
    noise = np.random.default_rng(seed).standard_normal(frames)
    wanted = naive(chain, noise)
    found = run(from_chain(chain), noise)
    assert found.shape == (frames,)
    scale = np.max(np.abs(wanted), initial=1e-6)
    for section in chain.sections:  # an output may be a small difference of large parts
        scale = max(scale, np.max(np.abs(naive(chain_of(section), noise)), initial=0.0))
    assert np.max(np.abs(found - wanted), initial=0.0) <= 1e-10 * scale


@pytest.mark.parametrize("frames", [1, 63, 64, 65, 128, 100_000])
def test_long_impulse_is_scipys(frames: int) -> None:
    """scipy.signal.sosfilt over 100 000 samples of a slow pole; 1e-9: rounding adds up over 1/(1 − r) = 1e4 samples."""
    chain = chain_of(
        free(ConjugatePair(0.9999, 0.01), RealRoots((1.0, -1.0)), -60.0), free(ConjugatePair(0.99, 2.0), gain_db=3.0)
    )
    rows = np.array([own_row(one) for one in chain.realised()])
    click = np.zeros(frames)
    click[0] = 1.0
    wanted = signal.sosfilt(rows, click)
    scale = np.max(np.abs(wanted))
    assert impulse_response(from_chain(chain), frames) == pytest.approx(wanted, abs=1e-9 * scale)
    steps = signal.sosfilt(rows, np.ones(frames))
    assert step_response(from_chain(chain), frames) == pytest.approx(steps, abs=1e-9 * np.max(np.abs(steps)))


def test_unstable_growth_is_followed() -> None:
    """Radius 1.05 for 2000 samples, to 1e42: relative 1e-11; and overflow in the far end leaves the beginning right."""
    chain = chain_of(free(ConjugatePair(1.05, 0.3)))
    click = np.zeros(2000)
    click[0] = 1.0
    wanted = signal.lfilter([1.0], own_row(chain.realised()[0])[3:], click)
    found = impulse_response(from_chain(chain), 2000)
    envelope = 1.05 ** np.arange(2000)
    assert np.max(np.abs(found - wanted) / envelope) < 1e-9  # the rounded r and angle count 2000-fold: 1e-12
    far = impulse_response(from_chain(chain_of(free(ConjugatePair(1e6, 0.1)))), 200)
    assert far[:2] == pytest.approx([1.0, 2e6 * np.cos(0.1)], rel=1e-14)
    assert not np.isfinite(far[-1])


@settings(STEADY, max_examples=40)
@given(stable_chains())
def test_transform_of_the_impulse_is_the_response(chain: Chain) -> None:
    """FFT of 2^14 samples where every pole is inside 0.998: the rest of the tail is under 1e-14."""
    radii = [one.poles.radius if isinstance(one.poles, ConjugatePair) else 0.999 for one in chain.realised()]
    frames = 2**14
    if max(radii, default=0.0) > 0.9975:
        frames = 2**16
    if max(radii, default=0.0) > 0.9992:
        return
    spectrum = np.fft.rfft(impulse_response(from_chain(chain), frames))
    wanted = chain_response(chain, np.fft.rfftfreq(frames, 1.0 / 48000.0))
    scale = np.max(np.abs(wanted), initial=1e-12)
    for section in chain.sections:
        scale = max(scale, np.max(np.abs(chain_response(chain_of(section), [0.0, 1000.0, 24000.0]))))
    assert np.max(np.abs(spectrum - wanted)) <= 1e-8 * scale  # a real pole pair at 0.999: 1/(1 − r)² times 1e-16·√n


def test_delays_and_empty_chains() -> None:
    """A delay longer than the signal is silence; no section is a wire; no samples are no samples."""
    late = from_chain(chain_of(Section(ByHand(), delay_samples=500)))
    assert not impulse_response(late, 100).any()
    assert np.flatnonzero(impulse_response(late, 600)).tolist() == [500]
    assert impulse_response(from_chain(chain_of()), 3).tolist() == [1.0, 0.0, 0.0]
    assert impulse_response(from_chain(chain_of(combine="sum")), 3).tolist() == [0.0, 0.0, 0.0]
    assert impulse_response(late, 0).size == 0
    off = from_chain(chain_of(Section(ByHand(gain_db=6.0), is_bypassed=True)))
    assert off.rows.shape == (0, 6)
    assert step_response(off, 2).tolist() == [1.0, 1.0]


def test_coefficients_carry_what_the_engine_needs() -> None:
    """Rows, delays and identities in the chain's order; polarity inside b; the two gains beside."""
    sections = (
        Section(ByHand(gain_db=20.0), polarity=-1, delay_samples=3),
        Section(ByHand(), is_bypassed=True),
        free(),
    )
    found = from_chain(Chain("", 44100.0, sections, -20.0, "sum", 40.0))
    assert found.rows.tolist() == [[-10.0, -0.0, -0.0, 1.0, -0.0, 0.0], [1.0, -0.0, 0.0, 1.0, -0.0, 0.0]]
    assert (found.delays, found.identities) == ((3, 0), (1, 3))
    assert (found.gain, found.direct_gain) == pytest.approx((0.1, 100.0), rel=1e-14)
    assert (found.sample_rate_hz, found.combine) == (44100.0, "sum")
