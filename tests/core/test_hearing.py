"""Hearing numbers and stability against brute force: dense transforms and very long impulse responses."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal

from tests.core.cases import STEADY, chain_of, free, stable_chains
from tests.core.test_ring import play
from tonebench.core.chain import Chain
from tonebench.core.hearing import Hearing, differences, hearing, largest_gain, worst_peak_db
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair, RealRoots, polar_points
from tonebench.core.section import by_kind
from tonebench.core.stability import is_stable, margin_nepers, outermost_radius


def click(chain: Chain, frames: int) -> NDArray[np.float64]:
    """Return a long impulse response by scipy."""
    return play(chain, np.eye(1, frames)[0])


@settings(STEADY, max_examples=40)
@given(stable_chains())
def test_norms_against_brute_force(chain: Chain) -> None:
    """Over all bins of a long transform no bin is higher, and one comes close; the sum of |h| is the same.

    Where the outermost pole is inside 0.999, 2^17 samples hold all of h, and bins are 0.37 Hz apart: a resonance of
    15 Hz is met within 0.01 dB. The sum is cut where one pole is 120 dB down; two double poles on one spot, the most
    that is let through here, have 5.5e-4 of it beyond (the gamma tail at 13.8): 0.005 dB. More: see below.
    """
    logs = sorted(-math.log(p.radius) for one in chain.realised() for p in polar_points(one.poles) if p.radius > 0.0)
    assume(outermost_radius(chain) <= 0.999)
    assume(sum(one < 3.0 * logs[0] for one in logs) <= 2)
    h = click(chain, 2**17)
    gain_db, _ = largest_gain(chain)
    peak_db = worst_peak_db(chain)
    largest = float(np.max(np.abs(np.fft.rfft(h))))
    if largest < 1e-8:
        return
    has_comb = chain.combine == "sum" and any(one.delay_samples for one in chain.sections)
    # Delays in a sum make a comb, whose highest tooth the grid may miss: see below.
    assert gain_db >= 20.0 * math.log10(largest) - (0.01 if has_comb else 1e-6)
    assert gain_db == pytest.approx(20.0 * math.log10(largest), abs=0.01)
    assert peak_db == pytest.approx(20.0 * math.log10(float(np.sum(np.abs(h)))), abs=0.01)
    assert peak_db >= gain_db - 0.01  # ‖H‖∞ ≤ ‖h‖₁


def test_published_norms() -> None:
    """facts.md 7.1: r = .99, theta = .3: ‖H‖₂ 17.037805 ≤ ‖H‖∞ 170.043377 ≤ ‖h‖₁ 216.436641; printed to 1e-6."""
    chain = chain_of(free(ConjugatePair(0.99, 0.3)))
    assert 10.0 ** (largest_gain(chain)[0] / 20.0) == pytest.approx(170.043377, abs=1e-5)
    assert 10.0 ** (worst_peak_db(chain) / 20.0) == pytest.approx(216.436641, rel=1e-5)  # the cut tail: 1e-6 of it
    assert math.sqrt(float(np.sum(click(chain, 4000) ** 2))) == pytest.approx(17.037805, abs=1e-6)
    # The peak of 1/A is at cos w = (1 + r²)·cos(theta)/(2r) (facts.md 6).
    peak = math.acos((1.0 + 0.99**2) * math.cos(0.3) / 1.98) * 48000.0 / (2.0 * math.pi)
    assert largest_gain(chain)[1] == pytest.approx(peak, rel=1e-6)  # a flat top: the root of 1e-16, over its curvature


def test_published_peaks_of_notches() -> None:
    """facts.md 11: a lone notch has ‖h‖₁ = +7.1 dB; 16 of them +11.1 dB, which holds at radius .9995 on 50 Hz·k."""
    lone = chain_of(by_kind(Kind.NOTCH, 50.02, ("q", 10.0)))
    assert worst_peak_db(lone) == pytest.approx(7.1, abs=0.05)  # printed to 0.1 dB
    sixteen = chain_of(*(by_kind(Kind.NOTCH, 50.0 * k, ("radius", 0.9995)) for k in range(1, 17)))
    assert worst_peak_db(sixteen) == pytest.approx(11.1, abs=0.05)
    assert worst_peak_db(sixteen) == pytest.approx(20.0 * math.log10(np.sum(np.abs(click(sixteen, 200_000)))), abs=1e-3)


@pytest.mark.parametrize("count", [8, 16])
def test_worst_peak_of_many_equal_poles(count: int) -> None:
    """Sixteen bells on one pitch: +2.1 dB, not −6.2, which is even below the largest gain of 0 dB."""
    chain = chain_of(*(by_kind(Kind.RESONATOR, 1000.0, ("ring_s", 0.05)) for _ in range(count)))
    wanted = 20.0 * math.log10(float(np.sum(np.abs(click(chain, 60_000)))))
    assert worst_peak_db(chain) == pytest.approx(wanted, abs=0.05)


def test_largest_gain_of_a_sum_with_a_delay() -> None:
    """A peak and a bell 5000 samples late: a long transform finds 0.115 dB more, over the 0.1 dB of a difference."""
    frequency_hz, q, gain_db = 341.6612828119265, 2.5522903272632504, 11.771956235742557
    late = replace(by_kind(Kind.RESONATOR, 1.3 * frequency_hz, ("q", q), gain_db), delay_samples=5000)
    chain = chain_of(by_kind(Kind.PEAK, frequency_hz, ("q", q), gain_db), late, combine="sum")
    largest = float(np.max(np.abs(np.fft.rfft(click(chain, 2**18), 2**20))))
    assert largest_gain(chain)[0] == pytest.approx(20.0 * math.log10(largest), abs=0.01)


@STEADY
@given(st.floats(20.0, 23000.0), st.floats(-1.0, 3.0), st.floats(0.5, 24.0))
def test_largest_gain_of_one_peak_is_its_own(frequency_hz: float, exponent: float, gain_db: float) -> None:
    """Gain g at f0, however narrow; the frequency to 1e-4 of a bandwidth, which is where its top is flat in double."""
    found_db, found_hz = largest_gain(chain_of(by_kind(Kind.PEAK, frequency_hz, ("q", 10.0**exponent), gain_db)))
    assert found_db == pytest.approx(gain_db, abs=1e-6)
    assert found_hz == pytest.approx(frequency_hz, rel=1e-2 / 10.0**exponent)


@STEADY
@given(st.floats(1000.0, 20000.0), st.floats(3.0, 5.0))
def test_a_narrow_peak_is_not_lost_beside_a_wide_one(frequency_hz: float, exponent: float) -> None:
    """+12 dB of Q 1000 and more, thinner than the grid's 1 %, over a broad +9 dB at 100 Hz, which adds under 1 dB."""
    broad = by_kind(Kind.PEAK, 100.0, ("q", 1.0), 9.0)
    narrow = by_kind(Kind.PEAK, frequency_hz, ("q", 10.0**exponent), 12.0)
    found_db, found_hz = largest_gain(chain_of(broad, narrow))
    assert 12.0 <= found_db < 13.0
    assert found_hz == pytest.approx(frequency_hz, rel=0.1 / 10.0**exponent)  # a tenth of its bandwidth


def test_largest_gain_at_the_ends_and_flat() -> None:
    """A shelf's end, a wire, and silence."""
    low, high = (largest_gain(chain_of(by_kind(kind, 100.0, None, 6.0))) for kind in (Kind.LOW_SHELF, Kind.HIGH_SHELF))
    assert low == pytest.approx((6.0, 0.0), abs=1e-9)
    assert high == pytest.approx((6.0, 24000.0), abs=1e-9)
    wire = hearing(chain_of())
    assert (wire.largest_gain_db, wire.largest_gain_hz, wire.ring_s) == (0.0, 0.0, 0.0)
    assert wire.worst_peak_db == pytest.approx(0.0, abs=1e-12)
    assert largest_gain(chain_of(combine="sum"))[0] == -400.0


@pytest.mark.parametrize("roots", [ConjugatePair(1.0, 0.5), ConjugatePair(1.01, 0.5), RealRoots((-1.5, 0.2))])
def test_unstable_chains_are_endless(roots: ConjugatePair | RealRoots) -> None:
    """All infinite, at the outermost pole's own frequency; and only then is the chain unstable."""
    chain = chain_of(free(roots))
    assert not is_stable(chain)
    angle = roots.angle_rad if isinstance(roots, ConjugatePair) else math.pi
    found = hearing(chain)
    assert (found.largest_gain_db, found.worst_peak_db, found.ring_s) == (math.inf, math.inf, math.inf)
    assert found.largest_gain_hz == pytest.approx(angle * 48000.0 / (2.0 * math.pi), rel=1e-14)


@STEADY
@given(stable_chains(), st.floats(0.0, 2.0))
def test_stable_is_the_triangle(chain: Chain, scale: float) -> None:
    """is_stable against |a2| < 1 and |a1| < 1 + a2 (facts.md 7.1), and the margin is −ln of the radius."""
    assert is_stable(chain)
    if outermost_radius(chain) > 0.0:
        assert math.exp(-margin_nepers(chain)) == pytest.approx(outermost_radius(chain), rel=1e-14)
    angle = 1.0
    a1, a2 = -2.0 * scale * math.cos(angle), scale * scale
    triangle = abs(a2) < 1.0 and abs(a1) < 1.0 + a2
    grown = chain.with_sections([*chain.sections, free(ConjugatePair(scale, angle))])
    assert is_stable(grown) == triangle
    poles = np.abs(signal.tf2zpk([1.0], [1.0, a1, a2])[1])
    assert outermost_radius(grown) == pytest.approx(max(outermost_radius(chain), *poles), rel=1e-9, abs=1e-12)


def test_margin_without_poles_and_cancelled_poles() -> None:
    """No pole, no limit; a pole that a zero cancels counts; a bypassed one does not."""
    assert margin_nepers(chain_of()) == math.inf
    cancelled = free(ConjugatePair(1.2, 0.5), ConjugatePair(1.2, 0.5))
    assert not is_stable(chain_of(cancelled))
    assert is_stable(chain_of(replace(cancelled, is_bypassed=True)))


PEAK = chain_of(by_kind(Kind.PEAK, 1000.0, ("q", 5.0), 6.0))


def test_no_difference_from_its_own_numbers() -> None:
    """What was just computed is the chain's; so is nothing at all."""
    assert differences(hearing(PEAK), PEAK) == ()
    assert differences(Hearing(None, None, None, None), PEAK) == ()
    endless = chain_of(free(ConjugatePair(1.1, 1.0)))
    assert differences(hearing(endless), endless) == ()


@pytest.mark.parametrize("field", ["largest_gain_db", "worst_peak_db"])
@pytest.mark.parametrize("sign", [-1.0, 1.0])
def test_tolerance_in_db(field: str, sign: float) -> None:
    """0.1 dB is still the same, 0.101 is not (design.md); the line names the key and both numbers."""
    own = hearing(PEAK)
    value = getattr(own, field)
    assert differences(replace(own, **{field: value + sign * 0.0999}), PEAK) == ()
    lines = differences(replace(own, **{field: value + sign * 0.101}), PEAK)
    assert lines == (f"{field} says {value + sign * 0.101:g}, the chain has {value:.1f}",)


@pytest.mark.parametrize("factor", [0.98, 1.02])
def test_tolerance_of_the_ring(factor: float) -> None:
    """2 % (design.md), of the chain's own ring."""
    own = hearing(PEAK)
    assert own.ring_s is not None
    inside, beyond = 1.0 + 0.99 * (factor - 1.0), 1.0 + 1.05 * (factor - 1.0)
    assert differences(replace(own, ring_s=own.ring_s * inside), PEAK) == ()
    lines = differences(replace(own, ring_s=own.ring_s * beyond), PEAK)
    assert lines == (f"ring_s says {own.ring_s * beyond:g}, the chain has {own.ring_s:.3g}",)


def test_frequency_counts_where_the_gain_stands_out() -> None:
    """0.5 dB (design.md): beside the top it is close enough, far from it, or outside the spectrum, it is not."""
    own = hearing(PEAK)
    levels = {hz: own.largest_gain_db - largest_at(hz) for hz in (1020.0, 1030.0, 1045.0, 1100.0)}  # type: ignore[operator]
    for hz, below_db in levels.items():
        lines = differences(replace(own, largest_gain_hz=hz), PEAK)
        assert bool(lines) == (below_db > 0.5)
    assert {below_db > 0.5 for below_db in levels.values()} == {True, False}
    for hz in (-1.0, 24001.0):
        assert differences(replace(own, largest_gain_hz=hz), PEAK)[0].startswith(f"largest_gain_hz says {hz:g}, the")
    flat = chain_of()
    assert differences(Hearing(0.0, 12345.0, 0.0, 0.0), flat) == ()


def largest_at(frequency_hz: float) -> float:
    """Return the level of the peak by scipy's freqz of an independent peak of the published form."""
    a = 10.0 ** (6.0 / 40.0)
    omega = 2.0 * math.pi * 1000.0 / 48000.0
    alpha = math.sin(omega) / 10.0
    b = [1.0 + alpha * a, -2.0 * math.cos(omega), 1.0 - alpha * a]
    d = [1.0 + alpha / a, -2.0 * math.cos(omega), 1.0 - alpha / a]
    _, response = signal.freqz(b, d, [frequency_hz], fs=48000.0)
    return 20.0 * math.log10(abs(response[0]))


def test_unstable_against_written_numbers() -> None:
    """A chain that has become unstable differs in every number that was finite."""
    lines = differences(hearing(PEAK), chain_of(free(ConjugatePair(1.1, 1.0))))
    assert [line.split()[0] for line in lines] == ["largest_gain_db", "worst_peak_db", "ring_s"]
    back = differences(Hearing(math.inf, 1000.0, math.inf, math.inf), PEAK)
    assert [line.split()[0] for line in back] == ["largest_gain_db", "worst_peak_db", "ring_s"]
