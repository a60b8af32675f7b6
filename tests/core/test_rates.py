"""Another sample rate: Hz and seconds are kept, and what cannot be kept is named."""

import math
from dataclasses import replace

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from tests.core.cases import STEADY, chain_of, free, kind_of, kinds_at_rate, stable_roots
from tonebench.core.chain import Chain
from tonebench.core.design import realise
from tonebench.core.hearing import largest_gain, worst_peak_db
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.rates import at_rate
from tonebench.core.response import chain_response
from tonebench.core.roots import ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.core.widths import all_widths, ring_from_radius


@STEADY
@given(kinds_at_rate(smallest_q=1.0), st.sampled_from((44100.0, 48000.0, 96000.0, 192000.0)))
def test_kinds_keep_hz_gain_and_the_written_width(case: tuple[Section, float], new_hz: float) -> None:
    """f0, gain and width stay as written; a radius keeps its seconds, r^(old/new), to the rounding of r."""
    section, rate_hz = case
    made = kind_of(section)
    assume(made.frequency_hz < 0.45 * new_hz)
    for key, value in all_widths(made, rate_hz).items():
        chain = chain_of(section.with_width(key, value), rate_hz=rate_hz)
        change = at_rate(chain, new_hz)
        if change.lost:
            assert key in (WidthKey.RADIUS, WidthKey.RING_S)  # warped, those poles would be real at the new rate
            continue
        after = kind_of(change.chain.sections[0])
        assert (after.frequency_hz, after.gain_db, after.kind) == (made.frequency_hz, made.gain_db, made.kind)
        assert after.width is not None
        if key is not WidthKey.RADIUS:
            assert after.width == Width(key, value)
        else:
            assert ring_from_radius(after.width.value, new_hz) == pytest.approx(
                ring_from_radius(value, rate_hz), rel=1e-8
            )  # 1e-16 over −ln r of 1e-7


@STEADY
@given(stable_roots, stable_roots, st.sampled_from((44100.0, 96000.0, 192000.0)))
def test_free_roots_keep_hz_and_seconds(poles: Roots, zeros: Roots, new_hz: float) -> None:
    """r^(old/new) and angle·old/new: T60 in seconds and frequency in Hz are what they were."""
    change = at_rate(chain_of(free(poles, zeros)), new_hz)
    made = change.chain.sections[0].made
    assert isinstance(made, ByHand)
    for before, after in ((poles, made.poles), (zeros, made.zeros)):
        if isinstance(before, ConjugatePair):
            assert isinstance(after, ConjugatePair)
            hz = after.angle_rad * new_hz
            assert hz == pytest.approx(min(before.angle_rad * 48000.0, math.pi * new_hz), rel=1e-14)
            radii = [(before.radius, after.radius)]
        else:
            assert isinstance(after, RealRoots)
            assert [math.copysign(1.0, v) for v in after.values] == [math.copysign(1.0, v) for v in before.values]
            radii = [(abs(x), abs(y)) for x, y in zip(before.values, after.values, strict=True)]
        for x, y in radii:
            if 1e-60 < x < 1.0:
                assert ring_from_radius(y, new_hz) == pytest.approx(ring_from_radius(x, 48000.0), rel=1e-9)
    moves = (poles, zeros) != (made.poles, made.zeros)
    assert any("the level of a free section changes with the rate" in loss for _, loss in change.lost) == moves


@STEADY
@given(st.lists(st.tuples(stable_roots, stable_roots), max_size=4))
def test_there_and_back(pairs: list[tuple[Roots, Roots]]) -> None:
    """48 → 96 → 48 kHz is the same chain, to the rounding of r^½ squared."""
    sections = [free(poles, zeros, -6.0) for poles, zeros in pairs]
    sections.append(by_kind(Kind.NOTCH, 50.02, ("radius", 0.9995)))
    chain = chain_of(*sections)
    there = at_rate(chain, 96000.0).chain
    back = at_rate(there, 48000.0).chain
    assert back.sample_rate_hz == 48000.0
    assert [one.identity for one in back.sections] == [one.identity for one in chain.sections]
    for before, after in zip(chain.realised(), back.realised(), strict=True):
        assert after.gain == pytest.approx(before.gain, rel=1e-9)
        for x, y in ((before.poles, after.poles), (before.zeros, after.zeros)):
            if isinstance(x, ConjugatePair):
                assert isinstance(y, ConjugatePair)
                assert (y.radius, y.angle_rad) == pytest.approx((x.radius, x.angle_rad), rel=1e-14)
            else:
                assert isinstance(y, RealRoots)
                assert y.values == pytest.approx(x.values, rel=1e-12)


def test_same_rate_is_the_same_chain() -> None:
    """Nothing is touched and nothing lost."""
    chain = chain_of(free(ConjugatePair(0.9, 1.0)))
    assert at_rate(chain, 48000.0).chain is chain
    assert at_rate(chain, 48000.0).lost == ()


def test_published_levels_of_a_free_section() -> None:
    """facts.md 11: poles .999 at 7.5°, zeros ±1: +60.0 dB at 1000 Hz, ℓ1 62.1 dB; 59.3/60.0/66.0/72.0 dB by rate."""
    chain = chain_of(free(ConjugatePair(0.999, math.radians(7.5)), RealRoots((1.0, -1.0))))
    gain_db, gain_hz = largest_gain(chain)
    assert gain_db == pytest.approx(60.0, abs=0.05)
    assert gain_hz == pytest.approx(1000.0, abs=0.5)
    assert worst_peak_db(chain) == pytest.approx(62.1, abs=0.05)  # each printed to 0.1 dB
    for rate_hz, printed in ((44100.0, 59.3), (48000.0, 60.0), (96000.0, 66.0), (192000.0, 72.0)):
        assert largest_gain(at_rate(chain, rate_hz).chain)[0] == pytest.approx(printed, abs=0.05)


@STEADY
@given(st.floats(20.0, 20000.0), st.floats(-60.0, 60.0), st.sampled_from((44100.0, 96000.0, 192000.0)))
def test_gain_at_hz_is_kept(at_hz: float, gain_db: float, new_hz: float) -> None:
    """With ``gain_at_hz`` the level there is the one written, before and after; 1e-9 dB is rounding near a pole."""
    made = ByHand(ConjugatePair(0.999, 0.13), RealRoots((0.99, -0.5)), gain_db, at_hz)
    change = at_rate(chain_of(Section(made)), new_hz)
    assert not change.lost or all("negative real" in loss for _, loss in change.lost)
    for chain in (chain_of(Section(made)), change.chain):
        level = 20.0 * math.log10(abs(chain_response(chain, [at_hz])[0]))
        assert level == pytest.approx(gain_db, abs=1e-9)


def test_what_is_lost_is_named() -> None:
    """Each line with its section's number: left out, held, rounded delay, level, negative real roots."""
    sections = (
        by_kind(Kind.PEAK, 20000.0, ("q", 1.0), 3.0),
        replace(free(gain_db=1.0), delay_samples=5),
        free(ConjugatePair(0.9, 3.0)),
        Section(ByHand(RealRoots((-0.5,)), gain_at_hz=100.0)),
        Section(ByHand(gain_at_hz=20000.0)),
    )
    change = at_rate(Chain("", 48000.0, sections), 32000.0)
    lines = dict.fromkeys(range(1, 6), "")
    for number, loss in change.lost:
        lines[number] += loss + "\n"
    assert "left out at 32000 Hz: frequency_hz must be under half the sampling rate (16000 Hz)" in lines[1]
    assert "delay of 5 samples becomes 3, not 3.333" in lines[2]
    assert "its poles lie over half of 32000 Hz and are held there" in lines[3]
    assert "level of a free section changes" in lines[3]
    assert "its negative real poles stay at half the sampling rate, which is another frequency now" in lines[4]
    assert "left out at 32000 Hz: gain_at_hz must be at most half the sampling rate" in lines[5]
    assert len(change.chain.sections) == 3


def test_delay_keeps_its_seconds() -> None:
    """12 samples at 48 kHz are 24 at 96 kHz, and nothing is lost."""
    change = at_rate(chain_of(replace(free(), delay_samples=12)), 96000.0)
    assert change.chain.sections[0].delay_samples == 24
    assert change.lost == ()


@pytest.mark.parametrize(
    "section",
    [
        replace(free(), delay_samples=40000),
        by_kind(Kind.PEAK, 1000.0, ("radius", math.nextafter(1.0, 0.0)), 3.0),
    ],
    ids=["delay", "radius"],
)
def test_what_does_not_fit_the_new_rate_is_lost_and_not_an_error(section: Section) -> None:
    """A delay over 65535 samples, or a radius whose root is 1 in double, is left out and reported."""
    change = at_rate(chain_of(section), 192000.0)
    assert change.lost[0][0] == 1
    assert realise(section, 48000.0).identity == 0
