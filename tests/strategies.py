"""Hypothesis strategies for sections, chains and presets, shared by the rooms above core.

Every value drawn here is one that the data model accepts. Rings stay short (radii up to 0.9995 where a chain must be
stable), since the hearing numbers of a preset sum its impulse response.
"""

import math
from dataclasses import replace

from hypothesis import settings
from hypothesis import strategies as st

from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind, Width, WidthKey, has_first_order, has_gain
from tonebench.core.roots import ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.core.widths import all_widths
from tonebench.errors import InvalidValueError
from tonebench.session.preset import Acceptance, ExportRequest, Preset
from tonebench.target.arithmetic import Overflow, Products, Rounding, Structure, Target, parse_format

# The same cases on every run and machine, and no time limit per case on a busy core.
STEADY = settings(derandomize=True, deadline=None)

RATES_HZ = (8000.0, 44100.0, 48000.0, 96000.0, 192000.0)
MADE_KINDS = tuple(kind for kind in Kind if kind is not Kind.FREE)

rates_hz = st.sampled_from(RATES_HZ)
gains_db = st.one_of(st.floats(-24.0, 24.0), st.integers(-24, 24).map(float))
qs = st.floats(-0.3, 1.5).map(lambda exponent: 10.0**exponent)

# One line of visible characters without what could end a string or a comment: what a preset file lets a name hold.
names = st.text(st.characters(exclude_categories=("C", "Zl", "Zp"), exclude_characters='"'), max_size=40).filter(
    lambda name: "*/" not in name and "/*" not in name
)


def frequencies_hz(rate_hz: float) -> st.SearchStrategy[float]:
    """Draw evenly in log frequency, from 5 Hz to 0.47 of the rate."""
    return st.floats(math.log(5.0), math.log(0.47 * rate_hz)).map(math.exp)


@st.composite
def made_second_order(draw: st.DrawFn, rate_hz: float) -> ByKind:
    """Draw any kind of second order, with any of the widths that mean something for it."""
    kind = draw(st.sampled_from(MADE_KINDS))
    frequency_hz = draw(frequencies_hz(rate_hz))
    gain_db = draw(gains_db) if has_gain(kind) else 0.0
    is_pole = draw(st.booleans()) if kind is Kind.RESONATOR else False
    q = draw(qs) + (0.5 if is_pole else 0.0)  # at a q of 0.5 and less a pole has no angle of its own
    made = ByKind(kind, frequency_hz, Width(WidthKey.Q, q), gain_db, is_pole_frequency=is_pole)
    widths = all_widths(made, rate_hz)
    key = draw(st.sampled_from(sorted(widths)))
    written = replace(made, width=Width(key, widths[key]))
    try:
        all_widths(written, rate_hz)
    except InvalidValueError:  # rounding at the very edge of a width's range
        return made
    return written


@st.composite
def made_first_order(draw: st.DrawFn, rate_hz: float) -> ByKind:
    """Draw any kind that has a first order."""
    kind = draw(st.sampled_from([one for one in MADE_KINDS if has_first_order(one)]))
    gain_db = draw(gains_db) if has_gain(kind) else 0.0
    return ByKind(kind, draw(frequencies_hz(rate_hz)), None, gain_db, order=1)


def roots(largest_radius: float) -> st.SearchStrategy[Roots]:
    """Draw a pair, or up to two real roots, up to a radius."""
    pairs = st.builds(ConjugatePair, st.floats(0.0, largest_radius), st.floats(0.0, math.pi))
    reals = st.lists(st.floats(-largest_radius, largest_radius), max_size=2)
    return st.one_of(pairs, reals.map(lambda values: RealRoots(tuple(values))))


@st.composite
def made_by_hand(draw: st.DrawFn, rate_hz: float, largest_pole_radius: float = 0.9995) -> ByHand:
    """Draw poles and zeros; a level is kept at a frequency only where the zeros leave one."""
    poles, zeros = draw(roots(largest_pole_radius)), draw(roots(4.0))
    made = ByHand(poles, zeros, draw(gains_db))
    placed = replace(made, gain_at_hz=draw(st.one_of(st.none(), st.floats(0.0, 0.5 * rate_hz))))
    try:
        Chain("", rate_hz, (Section(placed),))
    except InvalidValueError:
        return made
    return placed


@st.composite
def sections(draw: st.DrawFn, rate_hz: float, largest_pole_radius: float = 0.9995) -> Section:
    """Draw a section of any kind, first order and free ones among them, with all that may be added to it."""
    made = draw(
        st.one_of(made_second_order(rate_hz), made_first_order(rate_hz), made_by_hand(rate_hz, largest_pole_radius))
    )
    return Section(
        made, draw(names), draw(st.booleans()), draw(st.sampled_from((1, -1))), draw(st.sampled_from((0, 0, 1, 37)))
    )


@st.composite
def chains(draw: st.DrawFn, largest_pole_radius: float = 0.9995, max_sections: int = 4) -> Chain:
    """Draw a chain in series or as a sum."""
    rate_hz = draw(rates_hz)
    combine = draw(st.sampled_from(("series", "sum")))
    direct_gain_db = draw(st.one_of(st.none(), gains_db)) if combine == "sum" else None
    parts = tuple(draw(st.lists(sections(rate_hz, largest_pole_radius), max_size=max_sections)))
    return Chain(draw(names), rate_hz, parts, draw(gains_db), combine, direct_gain_db)


@st.composite
def targets(draw: st.DrawFn) -> Target:
    """Draw a target with any rules."""
    number_format = parse_format(draw(st.sampled_from(("f32", "f64", "q15", "q31", "q1.14", "q8.24"))))
    bits = number_format.word_bits
    return Target(
        number_format,
        draw(st.sampled_from(Structure)),
        draw(st.one_of(st.none(), st.integers(bits, 256))),
        draw(st.sampled_from(Rounding)),
        draw(st.sampled_from(Products)),
        draw(st.sampled_from(Overflow)),
        draw(st.booleans()),
        draw(st.booleans()),
    )


export_requests = st.builds(
    ExportRequest,
    st.just("c"),
    st.from_regex(r"\A[a-z]{1,8}(/[a-z_]{1,8}){0,2}\.h\Z"),
    st.one_of(st.just(""), st.from_regex(r"\A[a-z][a-z0-9_]{0,12}\Z")),
)
acceptances = st.builds(
    Acceptance,
    st.sampled_from(("pole-moved", "ring-after-tone", "dc-gain")),
    names.filter(lambda text: bool(text.strip())),
    st.one_of(st.just(""), st.just("2"), names),
    st.one_of(st.none(), st.floats(0.0, 1e4)),
)


@st.composite
def presets(draw: st.DrawFn, largest_pole_radius: float = 0.9995, max_sections: int = 4) -> Preset:
    """Draw a preset with everything that one can hold."""
    return Preset(
        draw(chains(largest_pole_radius, max_sections)),
        draw(targets()),
        tuple(draw(st.lists(st.sampled_from(RATES_HZ), max_size=3))),
        tuple(draw(st.lists(export_requests, max_size=2))),
        tuple(draw(st.lists(acceptances, max_size=2))),
    )
