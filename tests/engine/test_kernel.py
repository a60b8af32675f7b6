"""The kernel: one result, however the signal is cut, and states that follow their sections."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal

from tonebench.core.chain import Chain
from tonebench.core.coefficients import Coefficients, from_chain
from tonebench.core.kinds import Kind
from tonebench.core.section import Section, by_kind
from tonebench.engine.kernel import Kernel

RATE_HZ = 48000.0


def _coefficients(combine: str, delays: tuple[int, ...] = (0, 0, 0), direct_db: float | None = None) -> Coefficients:
    made = (
        by_kind(Kind.NOTCH, 50.0, ("q", 30.0)),
        by_kind(Kind.PEAK, 320.0, ("q", 1.2), -4.0),
        by_kind(Kind.RESONATOR, 440.0, ("ring_s", 0.8), -6.0),
    )
    sections = tuple(Section(one.made, delay_samples=delay) for one, delay in zip(made, delays, strict=True))
    return from_chain(Chain("x", RATE_HZ, sections, -1.5, combine, direct_db))


def _noise(frames: int, channels: int = 2, seed: int = 1) -> NDArray[np.float64]:
    return np.random.default_rng(seed).standard_normal((frames, channels))


def _naive(coefficients: Coefficients, samples: NDArray[np.float64]) -> NDArray[np.float64]:
    """Run the difference equation of each row sample by sample, one channel."""

    def section(row: NDArray[np.float64], delay: int, given_: NDArray[np.float64]) -> NDArray[np.float64]:
        b0, b1, b2, _, a1, a2 = row
        out = np.zeros(given_.size)
        for n in range(given_.size):
            x1, x2 = (given_[n - 1] if n > 0 else 0.0), (given_[n - 2] if n > 1 else 0.0)
            y1, y2 = (out[n - 1] if n > 0 else 0.0), (out[n - 2] if n > 1 else 0.0)
            out[n] = b0 * given_[n] + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2
        return np.concatenate([np.zeros(delay), out])[: given_.size]

    rows = list(zip(coefficients.rows, coefficients.delays, strict=True))
    if coefficients.combine == "sum":
        parts = [section(row, delay, samples) for row, delay in rows]
        return np.asarray(coefficients.gain * (coefficients.direct_gain * samples + np.sum(parts, axis=0)))
    for row, delay in rows:
        samples = section(row, delay, samples)
    return np.asarray(coefficients.gain * samples)


def test_kernel_is_the_difference_equation() -> None:
    """Series and sum, delays, direct: 1e-9 is the rounding of a direct form near 0 Hz over 800 samples."""
    samples = _noise(800, 1)
    for coefficients in (
        _coefficients("series", (0, 5, 0)),
        _coefficients("sum", (3, 0, 70)),
        _coefficients("sum", direct_db=-3.0),
    ):
        out = Kernel(coefficients, 1).process_block(samples)[:, 0]
        assert np.max(np.abs(out - _naive(coefficients, samples[:, 0]))) < 1e-9


def test_series_without_delays_is_sosfilt() -> None:
    """The named library routine, bit for bit."""
    coefficients = _coefficients("series")
    samples = _noise(5000)
    expected = coefficients.gain * signal.sosfilt(coefficients.rows, samples, axis=0)
    assert np.array_equal(Kernel(coefficients, 2).process_block(samples), expected)


@settings(max_examples=60, deadline=None)
@given(
    st.sampled_from(["series", "sum"]),
    st.tuples(*[st.sampled_from([0, 0, 1, 7, 300])] * 3),
    st.lists(st.integers(1, 900), max_size=8),
    st.integers(0, 3),
)
def test_blocks_do_not_matter(combine: str, delays: tuple[int, ...], sizes: list[int], silent_part: int) -> None:
    """Any cut into blocks gives the same bits, silences that fall asleep included."""
    coefficients = _coefficients(combine, delays)
    samples = _noise(2500)
    samples[600 * silent_part : 600 * silent_part + 1500] = 0.0
    whole = Kernel(coefficients, 2).process_block(samples)
    kernel, parts, start = Kernel(coefficients, 2), [], 0
    for size in [*sizes, 2500]:
        parts.append(kernel.process_block(samples[start : start + size]))
        start += size
        if start >= 2500:
            break
    assert np.array_equal(np.concatenate(parts), whole)


def test_empty_chain_passes_and_empty_sum_is_the_input_alone() -> None:
    """Without sections a series is a wire; a sum is only what is added directly."""
    samples = _noise(100)
    wire = Coefficients(RATE_HZ, "series", np.zeros((0, 6)), (), (), 1.0, 0.0)
    assert np.array_equal(Kernel(wire, 2).process_block(samples), samples)
    nothing = Coefficients(RATE_HZ, "sum", np.zeros((0, 6)), (), (), 1.0, 0.0)
    assert not Kernel(nothing, 2).process_block(samples).any()
    half = Coefficients(RATE_HZ, "sum", np.zeros((0, 6)), (), (), 1.0, 0.5)
    assert np.array_equal(Kernel(half, 2).process_block(samples), 0.5 * samples)


def test_state_follows_the_section() -> None:
    """Sections put in another order keep their own memory, so a chain that only moved them goes on without a step."""
    chain = Chain("x", RATE_HZ, (by_kind(Kind.NOTCH, 50.0, ("q", 10.0)), by_kind(Kind.PEAK, 900.0, ("q", 2.0), 6.0)))
    swapped = chain.with_sections(chain.sections[::-1])
    samples = _noise(4000, 1)
    old, new = Kernel(from_chain(chain), 1), Kernel(from_chain(swapped), 1)
    old.process_block(samples)
    new.copy_state_from(old)
    assert np.array_equal(new.state.sections[0], old.state.sections[1])
    assert np.array_equal(new.state.sections[1], old.state.sections[0])
