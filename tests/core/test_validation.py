"""Every refusal of the values of the core room: what was asked, what was given, what to do."""

import math
from dataclasses import replace

import pytest

from tests.core.cases import chain_of, free
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind, Width, WidthKey, parse_kind
from tonebench.core.roots import ConjugatePair, RealRoots, polar_points, polynomial, root_values
from tonebench.core.section import ByHand, ByKind, Section, by_kind
from tonebench.core.stability import is_stable
from tonebench.errors import InvalidValueError, TonebenchError

Q1 = Width(WidthKey.Q, 1.0)


@pytest.mark.parametrize("value", [-0.1, math.nan, math.inf])
def test_radius_and_angle_of_a_pair(value: float) -> None:
    """A radius of 0 or more, an angle of half a turn."""
    with pytest.raises(InvalidValueError, match=r"^radius must be a finite number of 0 or more, got "):
        ConjugatePair(value, 1.0)
    with pytest.raises(InvalidValueError, match=r"^angle must be between 0 and pi radians \(0 and 180 degrees\), got "):
        ConjugatePair(1.0, value)
    with pytest.raises(InvalidValueError, match=r"^angle must be between 0 and pi radians"):
        ConjugatePair(1.0, 3.15)


def test_real_roots() -> None:
    """Two at most, finite."""
    with pytest.raises(InvalidValueError, match=r"^real must be at most two roots, got \[1\.0, 2\.0, 3\.0\]$"):
        RealRoots((1.0, 2.0, 3.0))
    with pytest.raises(InvalidValueError, match=r"^real must be finite numbers, got nan$"):
        RealRoots((1.0, math.nan))


@pytest.mark.parametrize("key", list(WidthKey))
@pytest.mark.parametrize("value", [0.0, -1.0, math.nan, math.inf])
def test_width_is_over_zero(key: WidthKey, value: float) -> None:
    """Whatever the key."""
    with pytest.raises(InvalidValueError, match=rf"^{key.value} must be a finite number over 0, got {value!r}$"):
        Width(key, value)


@pytest.mark.parametrize("value", [1.0, 1.5])
def test_radius_of_a_kind_is_under_one(value: float) -> None:
    """Going further is an explicit act."""
    with pytest.raises(
        InvalidValueError, match=r"^radius must be under 1 for a kind, got .*; make the section free to"
    ):
        Width(WidthKey.RADIUS, value)


def test_kinds_and_their_names() -> None:
    """Spaces, hyphens and underscores are the same; anything else is answered with the list."""
    assert [parse_kind(text) for text in ("Low Pass", "low_pass", " LOWPASS ", "low-pass")] == [Kind.LOW_PASS] * 4
    assert all(parse_kind(kind.value) is kind for kind in Kind)
    with pytest.raises(InvalidValueError, match=r"^kind must be one of peak, low shelf, .*, free, got 'bell'$"):
        parse_kind("bell")


def test_by_kind_refusals() -> None:
    """Frequency, gain, order, width: each says its rule."""
    with pytest.raises(
        InvalidValueError, match=r"^kind must be a kind with a frequency, got 'free'; give poles and zer"
    ):
        ByKind(Kind.FREE, 100.0, Q1)
    for value in (0.0, -5.0, math.nan, math.inf):
        with pytest.raises(InvalidValueError, match=r"^frequency_hz must be a finite number over 0, got "):
            ByKind(Kind.PEAK, value, Q1)
    for value in (200.1, -200.1, math.nan):
        with pytest.raises(InvalidValueError, match=r"^gain_db must be between -200 and 200 dB, got "):
            ByKind(Kind.PEAK, 100.0, Q1, value)
        with pytest.raises(InvalidValueError, match=r"^gain_db must be between -200 and 200 dB, got "):
            ByHand(gain_db=value)
    for kind in (Kind.NOTCH, Kind.LOW_PASS, Kind.HIGH_PASS, Kind.BAND_PASS, Kind.ALL_PASS):
        with pytest.raises(
            InvalidValueError, match=rf"^gain_db must be left out for a {kind}, which has no gain of its"
        ):
            ByKind(kind, 100.0, Q1, 1.0)
    with pytest.raises(InvalidValueError, match=r"^order must be 1 or 2, got 3$"):
        ByKind(Kind.PEAK, 100.0, Q1, order=3)
    with pytest.raises(InvalidValueError, match=r"^order must be 2 for a notch, got 1$"):
        ByKind(Kind.NOTCH, 100.0, None, order=1)
    with pytest.raises(InvalidValueError, match=r"^q must be left out for first order, which has no width, got 1\.0$"):
        ByKind(Kind.LOW_PASS, 100.0, Q1, order=1)
    with pytest.raises(
        InvalidValueError, match=r"^a peak needs one width; give one of q, bandwidth_hz, bandwidth_oct, r"
    ):
        ByKind(Kind.PEAK, 100.0, None)
    with pytest.raises(
        InvalidValueError, match=r"^bandwidth_hz must be left out: it has no meaning for a low shelf, got "
    ):
        ByKind(Kind.LOW_SHELF, 100.0, Width(WidthKey.BANDWIDTH_HZ, 10.0))
    with pytest.raises(
        InvalidValueError, match=r"^frequency_is must be left out for any kind but resonator, got 'pole'$"
    ):
        ByKind(Kind.PEAK, 100.0, Q1, is_pole_frequency=True)


def test_by_hand_and_section_refusals() -> None:
    """Level frequency, polarity, delay, and what a free section has not."""
    for value in (-1.0, math.nan, math.inf):
        with pytest.raises(InvalidValueError, match=r"^gain_at_hz must be a finite frequency of 0 or more, got "):
            ByHand(gain_at_hz=value)
    for polarity in (0, 2):
        with pytest.raises(InvalidValueError, match=rf"^polarity must be 1 or -1, got {polarity}$"):
            Section(ByHand(), polarity=polarity)
    for delay in (-1, 65536):
        with pytest.raises(InvalidValueError, match=rf"^delay must be whole samples from 0 to 65535, got {delay}$"):
            Section(ByHand(), delay_samples=delay)
    with pytest.raises(
        InvalidValueError, match=r"^a free section has no frequency_hz; move its poles and zeros instead$"
    ):
        free().with_frequency_hz(100.0)
    with pytest.raises(InvalidValueError, match=r"^a free section has no q; move its poles and zeros instead$"):
        free().with_width(WidthKey.Q, 1.0)


def test_delay_is_whole() -> None:
    """1.5 samples are refused where they are given."""
    with pytest.raises(InvalidValueError, match=r"^delay must be whole samples"):
        Section(ByHand(), delay_samples=1.5)  # type: ignore[arg-type]


@pytest.mark.parametrize(("key", "value"), [("q", 1e17), ("ring_s", 1e15), ("bandwidth_hz", 1e-13)])
def test_a_kind_stops_at_the_rim_whatever_its_width(key: str, value: float) -> None:
    """design.md: a kind stops at the rim; here it is made on the circle. Refused or stable, but not this."""
    try:
        chain = chain_of(by_kind(Kind.NOTCH, 1000.0, (key, value)))
    except InvalidValueError:
        return
    assert is_stable(chain)


@pytest.mark.parametrize("rate_hz", [999.9, 1_000_001.0, math.nan, math.inf, 0.0, -48000.0])
def test_rate_of_a_chain(rate_hz: float) -> None:
    """From 1 kHz to 1 MHz."""
    with pytest.raises(InvalidValueError, match=r"^sample_rate_hz must be between 1000 and 1e\+06, got "):
        Chain("", rate_hz)


def test_chain_refusals() -> None:
    """Combination, count, gains, and a section named by its number."""
    with pytest.raises(InvalidValueError, match=r'^combine must be "series" or "sum", got \'parallel\'$'):
        Chain("", 48000.0, combine="parallel")
    Chain("", 48000.0, (free(),) * 128)
    with pytest.raises(InvalidValueError, match=r"^the number of sections must be at most 128, got 129$"):
        Chain("", 48000.0, (free(),) * 129)
    for value in (math.nan, 200.5, -math.inf):
        with pytest.raises(InvalidValueError, match=r"^gain_db must be between -200 and 200 dB, got "):
            Chain("", 48000.0, gain_db=value)
        with pytest.raises(InvalidValueError, match=r"^direct_gain_db must be between -200 and 200 dB, got "):
            Chain("", 48000.0, combine="sum", direct_gain_db=value)
    with pytest.raises(
        InvalidValueError, match=r'^direct_gain_db must be left out for a chain in series; set combine = "'
    ):
        Chain("", 48000.0, direct_gain_db=0.0)
    for hz in (24000.0, 30000.0):
        for section in (by_kind(Kind.PEAK, hz, ("q", 1.0)), by_kind(Kind.LOW_PASS, hz)):
            with pytest.raises(
                InvalidValueError, match=r"^section 2: frequency_hz must be under half the sampling rate \("
            ):
                chain_of(free(), section)
    with pytest.raises(
        InvalidValueError, match=r"^section 1: gain_at_hz must be at most half the sampling rate \(24000"
    ):
        chain_of(Section(ByHand(gain_at_hz=24001.0)))
    for made in (ByHand(RealRoots((1.0,)), gain_at_hz=0.0), ByHand(zeros=RealRoots((-1.0,)), gain_at_hz=24000.0)):
        with pytest.raises(
            InvalidValueError, match=r"^section 1: gain_at_hz must be a frequency without a zero or a pol"
        ):
            chain_of(Section(made))
    assert issubclass(InvalidValueError, TonebenchError)
    assert issubclass(InvalidValueError, ValueError)


def test_gain_low_on_the_flank_of_a_double_zero() -> None:
    """At 0.005 Hz and 192 kHz (1 − 1/z)² is 2.7e-14, a level like any other; the zero is at 0 Hz."""
    chain_of(Section(ByHand(zeros=RealRoots((1.0, 1.0)), gain_at_hz=0.005)), rate_hz=192000.0)


def test_identities_are_given_once_and_kept() -> None:
    """Unique from 1; a kept one stays with its section through edits and reorders; names and identity compare."""
    chain = chain_of(free(), free(gain_db=1.0), free(gain_db=2.0))
    assert [one.identity for one in chain.sections] == [1, 2, 3]
    turned = chain.with_sections([*chain.sections[::-1], free()])
    assert [one.identity for one in turned.sections] == [3, 2, 1, 4]
    doubled = chain.with_sections([chain.sections[0], chain.sections[0]])
    assert [one.identity for one in doubled.sections] == [1, 2]
    edited = chain.with_section(1, chain.sections[1].with_gain_db(9.0))
    assert [(one.identity, one.gain_db) for one in edited.sections] == [(1, 0.0), (2, 9.0), (3, 2.0)]
    assert replace(chain.sections[0], identity=77) == chain.sections[0]


def test_roots_in_every_form() -> None:
    """Polynomials and points by hand: (1 − 0.5/z)(1 + 2/z) = 1 + 1.5/z − z⁻²; a pair of radius 2 at 60°."""
    assert polynomial(RealRoots((0.5, -2.0))) == (1.5, -1.0)
    assert polynomial(RealRoots((0.5,))) == (-0.5, 0.0)
    assert polynomial(ConjugatePair(2.0, math.pi / 3.0)) == pytest.approx((-2.0, 4.0), rel=1e-15)
    points = polar_points(RealRoots((0.5, -2.0)))
    assert [(one.radius, one.angle_rad, one.is_pair) for one in points] == [(0.5, 0.0, False), (2.0, math.pi, False)]
    assert [one.is_pair for one in polar_points(ConjugatePair(2.0, 1.0))] == [True]
    upper, lower = root_values(ConjugatePair(2.0, math.pi / 2.0))
    assert upper == pytest.approx(2.0j, abs=1e-15)
    assert lower == upper.conjugate()
