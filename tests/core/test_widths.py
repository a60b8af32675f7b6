"""The five widths: definitions, round trips, which one is kept, what is refused."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.core.cases import STEADY, chain_of, kind_of, kinds_at_rate
from tests.core.oracles import MP
from tonebench.core.coefficients import section_row
from tonebench.core.design import realise
from tonebench.core.kinds import Kind, WidthKey, allowed_widths, has_first_order
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import Section, by_kind
from tonebench.core.widths import all_widths, prototype
from tonebench.errors import InvalidValueError


@STEADY
@given(kinds_at_rate(smallest_q=0.1))
def test_round_trip_through_every_width(case: tuple[Section, float]) -> None:
    """Each width of the read-out, written back, makes the same section, the same read-out, and keeps its own key.

    1e-8: radius near 1 keeps −ln r to 1e-16/3e-7 at 5 Hz and Q 100; near half the rate w0's rounding counts 34-fold.
    """
    section, rate_hz = case
    widths = all_widths(kind_of(section), rate_hz)
    poles = realise(section, rate_hz).poles
    assert ({WidthKey.RADIUS, WidthKey.RING_S} <= set(widths)) == isinstance(poles, ConjugatePair)
    row = section_row(realise(section, rate_hz))
    for key, value in widths.items():
        if key is WidthKey.RADIUS and value < 1e-4:
            continue  # nearly real poles: tanh(−ln r) is 1 within rounding, and the width is refused with its range
        again = kind_of(section.with_width(key, value))
        if _nearly_critical(section, rate_hz):
            continue
        assert again.width is not None
        assert again.width.key is key
        assert prototype(again, rate_hz).q == pytest.approx(prototype(kind_of(section), rate_hz).q, rel=1e-8)
        back = section_row(realise(Section(again), rate_hz))
        assert back == pytest.approx(row, rel=1e-8, abs=1e-8 * max(abs(x) for x in row[:3]))
        assert all_widths(again, rate_hz) == pytest.approx(widths, rel=1e-8)


def _nearly_critical(section: Section, rate_hz: float) -> bool:
    """Poles within 1e-6 of meeting on the axis: r has a vertical tangent there and the round trip no meaning."""
    made = kind_of(section)
    a = 10.0 ** (made.gain_db / 40.0) if made.kind is Kind.PEAK else 1.0
    return abs(prototype(made, rate_hz).q * a - 0.5) < 1e-6


@STEADY
@given(kinds_at_rate(smallest_q=1.0))
def test_widths_by_their_definitions(case: tuple[Section, float]) -> None:
    """Octaves by the Cookbook's formula, Hz by 2·atan(alpha), radius by r² = (1 − alpha)/(1 + alpha), T60 = ln 1000.

    All written again in mpmath; 1e-9 is the radius's own rounding over −ln r ≥ 1e-7.
    """
    section, rate_hz = case
    made = kind_of(section)
    assert made.width is not None
    widths = all_widths(made, rate_hz)
    w0, q = 2 * MP.pi * MP.mpf(made.frequency_hz) / MP.mpf(rate_hz), MP.mpf(made.width.value)
    alpha, a = MP.sin(w0) / (2 * q), MP.mpf(10) ** (MP.mpf(made.gain_db) / 40)
    if WidthKey.BANDWIDTH_HZ in allowed_widths(made.kind):
        # 1/(2Q) = sinh(½·ln 2·BW·w0/sin w0)
        octaves = 2 * MP.asinh(1 / (2 * q)) * MP.sin(w0) / (MP.log(2) * w0)
        assert widths[WidthKey.BANDWIDTH_OCT] == pytest.approx(float(octaves), rel=1e-12)  # w0's rounding, 34-fold
        assert widths[WidthKey.BANDWIDTH_HZ] == pytest.approx(float(MP.atan(alpha) * rate_hz / MP.pi), rel=1e-12)
    pole_alpha = alpha / a if made.kind is Kind.PEAK else alpha
    if made.kind in (Kind.LOW_SHELF, Kind.HIGH_SHELF):
        shift = MP.sqrt(a) if made.kind is Kind.HIGH_SHELF else 1 / MP.sqrt(a)
        pole_alpha = MP.sin(2 * MP.atan(MP.tan(w0 / 2) * shift)) / (2 * q)
    if pole_alpha < MP.mpf("0.999") * MP.sin(w0) and WidthKey.RADIUS in widths:
        radius = MP.sqrt((1 - pole_alpha) / (1 + pole_alpha))
        assert widths[WidthKey.RADIUS] == pytest.approx(float(radius), rel=1e-13)  # rounding of alpha
        ring_s = MP.log(1000) / (-MP.log(radius) * rate_hz)
        assert widths[WidthKey.RING_S] == pytest.approx(float(ring_s), rel=1e-12)


def test_octaves_asked_and_given() -> None:
    """facts.md 5.1, trap (e): one octave asked gives 0.99977 at 1 kHz and 0.98783 at 10 kHz (48 kHz)."""
    for frequency_hz, printed in ((1000.0, 0.99977), (10000.0, 0.98783)):
        section = by_kind(Kind.BAND_PASS, frequency_hz, ("bandwidth_oct", 1.0))
        half = math.pi * all_widths(kind_of(section), 48000.0)[WidthKey.BANDWIDTH_HZ] / 48000.0
        middle = math.acos(math.cos(half) * math.cos(2.0 * math.pi * frequency_hz / 48000.0))
        assert math.log2((middle + half) / (middle - half)) == pytest.approx(printed, abs=6e-6)  # five places


@STEADY
@given(kinds_at_rate(smallest_q=2.0), st.floats(0.5, 1.5), st.floats(-6.0, 6.0))
def test_the_written_width_is_kept(case: tuple[Section, float], ratio: float, gain_db: float) -> None:
    """Another frequency, gain or rate leaves key and value of the written width to the last bit, and it is obeyed."""
    section, rate_hz = case
    made = kind_of(section)
    for key, value in all_widths(made, rate_hz).items():
        written = section.with_width(key, value)
        moved = written.with_frequency_hz(min(made.frequency_hz * ratio, 0.45 * rate_hz))
        if made.kind in (Kind.PEAK, Kind.LOW_SHELF, Kind.HIGH_SHELF, Kind.RESONATOR):
            moved = moved.with_gain_db(gain_db)
        width = kind_of(moved).width
        assert width is not None
        assert (width.key, width.value) == (key, value)
        try:
            shown = all_widths(kind_of(moved), rate_hz)
        except InvalidValueError:
            assert key in (WidthKey.RADIUS, WidthKey.RING_S)  # too short a ring for conjugate poles at the new place
            continue
        assert shown[key] == value
        poles = realise(moved, rate_hz).poles
        if key is WidthKey.RADIUS:
            assert isinstance(poles, ConjugatePair)
            assert poles.radius == value
        if key is WidthKey.RING_S:
            assert isinstance(poles, ConjugatePair)
            ring_s = math.log(1000.0) / (-math.log(poles.radius) * rate_hz)
            assert ring_s == pytest.approx(value, rel=1e-8)  # a double holds r to 1e-16 over −ln r of 1e-7


def test_which_widths_a_kind_has() -> None:
    """A bandwidth needs two edges; the others describe the pole pair."""
    plain = {WidthKey.Q, WidthKey.RING_S, WidthKey.RADIUS}
    for kind in (Kind.LOW_PASS, Kind.HIGH_PASS, Kind.ALL_PASS, Kind.LOW_SHELF, Kind.HIGH_SHELF):
        assert set(allowed_widths(kind)) == plain
        assert has_first_order(kind)
    for kind in (Kind.PEAK, Kind.NOTCH, Kind.BAND_PASS, Kind.RESONATOR):
        assert set(allowed_widths(kind)) == set(WidthKey)
        assert not has_first_order(kind)


def smallest_radius(frequency_hz: float) -> float:
    """Return the radius at which the poles of a notch meet: alpha = sin w0."""
    sine = math.sin(2.0 * math.pi * frequency_hz / 48000.0)
    return math.sqrt((1.0 - sine) / (1.0 + sine))


@pytest.mark.parametrize("factor", [0.5, 0.99])
def test_too_short_a_ring_is_refused_with_the_range(factor: float) -> None:
    """The message gives the smallest radius, or the shortest ring, that this frequency can have; and what to do."""
    limit = smallest_radius(1000.0)
    pattern = rf"^section 1: radius must be over {limit:.6g} and under 1 here .*real.*; or give q instead$"
    with pytest.raises(InvalidValueError, match=pattern):
        chain_of(by_kind(Kind.NOTCH, 1000.0, ("radius", factor * limit)))
    ring_s = math.log(1000.0) / (-math.log(limit) * 48000.0)
    with pytest.raises(InvalidValueError, match=rf"^section 1: ring_s must be over {ring_s:.4g} s here .*q instead$"):
        chain_of(by_kind(Kind.NOTCH, 1000.0, ("ring_s", factor * ring_s)))
    chain_of(
        by_kind(Kind.NOTCH, 1000.0, ("radius", 1.001 * limit)), by_kind(Kind.NOTCH, 1000.0, ("ring_s", 1.001 * ring_s))
    )


def test_other_ranges_are_refused() -> None:
    """A band wider than half the rate, octaves beyond computing."""
    with pytest.raises(InvalidValueError, match=r"bandwidth_hz must be under half the sampling rate \(24000 Hz\), got"):
        chain_of(by_kind(Kind.PEAK, 1000.0, ("bandwidth_hz", 24000.0)))
    with pytest.raises(InvalidValueError, match=r"bandwidth_oct must be small enough to be computed, got 5000\.0"):
        chain_of(by_kind(Kind.PEAK, 1000.0, ("bandwidth_oct", 5000.0)))
    chain_of(by_kind(Kind.PEAK, 1000.0, ("bandwidth_hz", 23999.0)))
