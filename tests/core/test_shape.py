"""Moving a pole: it lands where it was asked, the kind keeps its law, and the way back is the inverse."""

import math

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from tests.core.cases import STEADY, chain_of, free, kind_of, kinds_at_rate
from tonebench.core.design import realise
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, ByKind, Section, by_kind
from tonebench.core.shape import Move, move_pole, set_pole
from tonebench.core.widths import all_widths
from tonebench.errors import InvalidValueError

cents = st.floats(-300.0, 300.0)
ring_ratios = st.floats(0.7, 1.4)


def pair_of(section: Section, rate_hz: float = 48000.0) -> ConjugatePair:
    """Return the pole pair of a section that has one."""
    poles = realise(section, rate_hz).poles
    assert isinstance(poles, ConjugatePair)
    return poles


@st.composite
def paired(draw: st.DrawFn) -> tuple[Section, float]:
    """Draw a section with a conjugate pair well off the axis, any of its widths written, and a rate."""
    section, rate_hz = draw(kinds_at_rate(smallest_q=1.0))
    made = kind_of(section)
    widths = all_widths(made, rate_hz)
    assume(WidthKey.RADIUS in widths)
    pair = pair_of(section, rate_hz)
    assume(pair.angle_rad > 0.2 * -math.log(pair.radius))
    assume(0.0 < pair.angle_rad < 0.8 * math.pi)
    assume(-math.log(pair.radius) > 2e-7)  # nearer to the rim the ring cannot be moved: see below
    key = draw(st.sampled_from(sorted(widths)))
    return section.with_width(key, widths[key]), rate_hz


@STEADY
@given(paired(), cents, ring_ratios)
def test_the_pole_moves_as_asked(case: tuple[Section, float], pitch_cents: float, ring_ratio: float) -> None:
    """Angle by the cents, ring (1/−ln r) by the ratio; kind, gain and the key of the width stay.

    A double holds a radius to 1.1e-16, over −ln r of 3e-7 at 5 Hz and Q 100: 4e-10, and a few of those: 1e-8.
    """
    section, rate_hz = case
    before = pair_of(section, rate_hz)
    pitch_ratio = 2.0 ** (pitch_cents / 1200.0)
    moved = move_pole(section, rate_hz, Move(pitch_ratio, ring_ratio))
    after = pair_of(moved, rate_hz)
    assert after.angle_rad == pytest.approx(before.angle_rad * pitch_ratio, rel=1e-8)
    assert math.log(after.radius) * ring_ratio == pytest.approx(math.log(before.radius), rel=1e-8, abs=0.0)
    was, now = kind_of(section), kind_of(moved)
    assert (now.kind, now.gain_db, now.order) == (was.kind, was.gain_db, was.order)
    assert was.width is not None
    assert now.width is not None
    assert now.width.key is was.width.key
    if now.kind is Kind.NOTCH:
        zeros = realise(moved, rate_hz).zeros
        assert isinstance(zeros, ConjugatePair)
        assert zeros.radius == 1.0
        assert zeros.angle_rad == pytest.approx(2.0 * math.pi * now.frequency_hz / rate_hz, rel=1e-15)


@STEADY
@given(paired(), cents, ring_ratios)
def test_the_way_back_is_the_inverse(case: tuple[Section, float], pitch_cents: float, ring_ratio: float) -> None:
    """There and back: f0 and the kept width's value; 1e-7 is twice the error of one move over a tenth of a radian."""
    section, rate_hz = case
    ratio = 2.0 ** (pitch_cents / 1200.0)
    there = move_pole(section, rate_hz, Move(ratio, ring_ratio))
    back = kind_of(move_pole(there, rate_hz, Move(1.0 / ratio, 1.0 / ring_ratio)))
    made = kind_of(section)
    assert made.width is not None
    assert back.width is not None
    assert back.frequency_hz == pytest.approx(made.frequency_hz, rel=1e-7)
    assert back.width.value == pytest.approx(made.width.value, rel=1e-7)


@STEADY
@given(paired(), st.floats(0.05, 2.9), st.floats(0.5, 5.0))
def test_set_pole_puts_it_there(case: tuple[Section, float], angle_rad: float, exponent: float) -> None:
    """Any kind, any place: 1e-10 in z is 1e-16 through f0 (6 digits lost at most: an angle far smaller than −ln r)."""
    section, rate_hz = case
    radius = 1.0 - 10.0**-exponent
    after = pair_of(set_pole(section, rate_hz, radius, angle_rad), rate_hz)
    assert after.radius == pytest.approx(radius, abs=1e-10)
    assert after.angle_rad == pytest.approx(angle_rad, abs=1e-10)
    if kind_of(section).width == Width(WidthKey.RADIUS, radius):
        assert after.radius == radius


@STEADY
@given(st.floats(0.05, 3.0), st.floats(0.5, 5.0), st.sampled_from(tuple(WidthKey)))
def test_set_pole_of_a_resonator_given_by_its_pole(angle_rad: float, exponent: float, key: WidthKey) -> None:
    """With ``is_pole_frequency`` the frequency is the pole's own, and stays so."""
    value = {"q": 9.0, "bandwidth_hz": 12.0, "bandwidth_oct": 0.2, "ring_s": 0.3, "radius": 0.998}[key.value]
    section = Section(ByKind(Kind.RESONATOR, 500.0, Width(key, value), 3.0, is_pole_frequency=True))
    radius = 1.0 - 10.0**-exponent
    if key is WidthKey.BANDWIDTH_OCT:
        assume(-math.log(radius) < 0.5 * angle_rad)  # wider ones: see the next test
    moved = set_pole(section, 48000.0, radius, angle_rad)
    after = pair_of(moved)
    assert kind_of(moved).is_pole_frequency
    assert kind_of(moved).frequency_hz == pytest.approx(angle_rad * 48000.0 / (2.0 * math.pi), rel=1e-15)
    assert after.angle_rad == pytest.approx(angle_rad, rel=1e-9)
    assert after.radius == pytest.approx(radius, abs=1e-10)


def test_octaves_that_set_pole_itself_chose_are_accepted() -> None:
    """A resonator at its pole: where two poles have the same octaves, q is kept instead, and the pole is there."""
    made = ByKind(Kind.RESONATOR, 500.0, Width(WidthKey.BANDWIDTH_OCT, 0.2), is_pole_frequency=True)
    moved = set_pole(Section(made), 48000.0, 0.684, 0.125)
    assert pair_of(moved).radius == pytest.approx(0.684, abs=1e-10)


@pytest.mark.parametrize("move", [Move(1e6, 1.0), Move(1e-6, 1.0), Move(1.0, 1e12), Move(3.0, 1e12)])
@pytest.mark.parametrize("kind", [Kind.PEAK, Kind.NOTCH, Kind.LOW_PASS, Kind.HIGH_SHELF, Kind.ALL_PASS])
def test_a_held_key_stops_inside_the_kind(kind: Kind, move: Move) -> None:
    """Far beyond every end the section can still be made: inside the circle by 5e-8, off 0 and half the rate."""
    moved = by_kind(kind, 1000.0, ("q", 30.0))
    for _ in range(3):
        moved = move_pole(moved, 48000.0, move)
    chain_of(moved)
    poles = realise(moved, 48000.0).poles
    if isinstance(poles, ConjugatePair):
        assert poles.radius <= math.exp(-4.99e-8)
        assert 0.0 < poles.angle_rad <= 0.9999 * math.pi * (1.0 + 1e-12)


@pytest.mark.parametrize("key", ["q", "radius", "ring_s"])
def test_a_pole_stopped_at_the_rim_can_come_back(key: str) -> None:
    """After the stop, a shorter ring must be reachable again by the same arrows."""
    value = {"q": 30.0, "radius": 0.9999, "ring_s": 1.0}[key]
    stopped = move_pole(by_kind(Kind.PEAK, 1000.0, (key, value), 3.0), 48000.0, Move(1.0, 1e12))
    back = move_pole(stopped, 48000.0, Move(1.0, 0.01))
    assert pair_of(back).radius < 1.0 - 1e-6


def test_a_narrow_section_at_a_high_rate_can_be_moved() -> None:
    """Low-pass 5.75 Hz, q 1000 at 192 kHz: no stop was reached, and a shorter ring is asked."""
    section = by_kind(Kind.LOW_PASS, 5.75, ("q", 1000.0))
    before, after = (pair_of(one, 192000.0) for one in (section, move_pole(section, 192000.0, Move(1.0, 0.75))))
    assert math.log(after.radius) * 0.75 == pytest.approx(math.log(before.radius), rel=1e-8, abs=0.0)


def test_real_poles_fall_back_on_frequency_and_q() -> None:
    """Low-pass q 0.3 has real poles: pitch moves f0, ring moves Q, the other alone stays."""
    section = by_kind(Kind.LOW_PASS, 1000.0, ("q", 0.3))
    made = kind_of(move_pole(section, 48000.0, Move(2.0, 1.1)))
    assert made.frequency_hz == pytest.approx(2000.0, rel=1e-12)  # rounding
    assert made.width is not None
    assert made.width.key is WidthKey.Q
    assert made.width.value == pytest.approx(0.33, rel=1e-12)
    wide = by_kind(Kind.BAND_PASS, 1000.0, ("bandwidth_hz", 5000.0))
    kept = kind_of(move_pole(wide, 48000.0, Move(1.0, 1.0)))
    assert kept.width is not None
    assert kept.width.key is WidthKey.BANDWIDTH_HZ
    assert kept.width.value == pytest.approx(5000.0, rel=1e-12)


def test_first_order_moves_its_frequency_only() -> None:
    """There is no ring; held up, f0 stops under half the rate, held down, over 0."""
    section = by_kind(Kind.LOW_SHELF, 1000.0, None, 6.0)
    moved = kind_of(move_pole(section, 48000.0, Move(1.5, 9.0)))
    assert moved == ByKind(Kind.LOW_SHELF, 1500.0, None, 6.0, 1)
    for ratio in (1e9, 1e-9):
        stopped = move_pole(section, 48000.0, Move(ratio))
        chain_of(stopped)
        assert 0.0 < kind_of(stopped).frequency_hz < 24000.0


def by_hand(section: Section) -> ByHand:
    """Return what a free section is made by."""
    assert isinstance(section.made, ByHand)
    return section.made


@STEADY
@given(st.floats(0.1, 0.999), st.floats(0.01, 1.5), cents, ring_ratios)
def test_free_poles_move_and_zeros_stay(radius: float, angle_rad: float, pitch: float, ring_ratio: float) -> None:
    """Angle and ln r by the ratios, to rounding; zeros, gain and everything else are left alone."""
    zeros = ConjugatePair(1.0, 0.5)
    section = free(ConjugatePair(radius, angle_rad), zeros, -3.0)
    moved = by_hand(move_pole(section, 48000.0, Move(2.0 ** (pitch / 1200.0), ring_ratio)))
    assert isinstance(moved.poles, ConjugatePair)
    assert moved.poles.angle_rad == pytest.approx(angle_rad * 2.0 ** (pitch / 1200.0), rel=1e-14)
    assert math.log(moved.poles.radius) * ring_ratio == pytest.approx(math.log(radius), rel=1e-12)
    assert (moved.zeros, moved.gain_db) == (zeros, -3.0)


def test_free_poles_at_the_edges() -> None:
    """Real poles keep their sign; outside stays outside; the rim and the floor are not left by a step."""
    moved = by_hand(move_pole(free(RealRoots((-0.9, 0.5))), 48000.0, Move(2.0, 2.0)))
    assert isinstance(moved.poles, RealRoots)
    assert moved.poles.values == pytest.approx((-math.sqrt(0.9), math.sqrt(0.5)), rel=1e-14)
    outside = by_hand(move_pole(free(ConjugatePair(1.1, 1.0)), 48000.0, Move(1.0, 2.0))).poles
    assert isinstance(outside, ConjugatePair)
    assert (outside.radius, outside.angle_rad) == pytest.approx((math.sqrt(1.1), 1.0), rel=1e-14)
    for radius in (0.0, 1.0):
        still = by_hand(move_pole(free(ConjugatePair(radius, 1.0)), 48000.0, Move(1.0, 0.5)))
        assert still.poles == ConjugatePair(radius, 1.0)
    double = by_hand(move_pole(free(ConjugatePair(0.9, math.pi)), 48000.0, Move(0.5))).poles
    assert isinstance(double, ConjugatePair)
    assert (double.radius, double.angle_rad) == pytest.approx((0.9, math.pi), rel=1e-14)


def test_refusals() -> None:
    """Each refusal says what was given and what to do."""
    with pytest.raises(InvalidValueError, match=r"^this section has no pole to move; type one, for example: poles"):
        move_pole(free(), 48000.0, Move(2.0))
    with pytest.raises(InvalidValueError, match=r"^a first-order section has no pole pair; set its frequency instead$"):
        set_pole(by_kind(Kind.LOW_PASS, 100.0), 48000.0, 0.9, 0.1)
    peak = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 3.0)
    for radius in (0.0, 1.0, 1.1, math.nan):
        with pytest.raises(
            InvalidValueError, match=r"^radius must be over 0 and under 1 for a peak, got .*make the sec"
        ):
            set_pole(peak, 48000.0, radius, 0.1)
    for angle_rad in (0.0, math.pi, -0.1, math.nan):
        with pytest.raises(
            InvalidValueError, match=r"^the angle of a pole pair must lie between 0 and 180 degrees, got"
        ):
            set_pole(peak, 48000.0, 0.9, angle_rad)
    assert by_hand(set_pole(free(), 48000.0, 1.2, 0.0)).poles == ConjugatePair(1.2, 0.0)
