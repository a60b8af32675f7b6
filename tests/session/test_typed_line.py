"""The typed line's grammar: numbers, relative and absolute, sections by number and name, and every complaint."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.session.cases import bench, made_by_hand, made_by_kind
from tests.strategies import STEADY, rates_hz, sections
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.response import chain_response
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots
from tonebench.core.section import ByHand, Section
from tonebench.errors import TypedLineError
from tonebench.session.line_chain import CHAIN_WORDS
from tonebench.session.line_edits import EDIT_WORDS, make_free
from tonebench.session.line_sections import WIDTH_WORDS
from tonebench.session.preset import Preset
from tonebench.session.session import Session
from tonebench.session.tokens import Token, tokenize


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("50.02 Hz", Token("50.02 Hz", "number", 50.02, "hz")),
        ("50,02Hz", Token("50,02Hz", "number", 50.02, "hz")),
        ("1.5khz", Token("1.5khz", "number", 1500.0, "hz")),
        ("2k", Token("2k", "number", 2000.0, "hz")),
        ("12 ms", Token("12 ms", "number", 0.012, "s")),
        ("-4 dB", Token("-4 dB", "number", -4.0, "db", is_signed=True)),
        ("−4 dB", Token("−4 dB", "number", -4.0, "db", is_signed=True)),
        ("+.5 %", Token("+.5 %", "number", 0.5, "%", is_signed=True)),
        ("7.5°", Token("7.5°", "number", 7.5, "deg")),
        ("3 octaves", Token("3 octaves", "number", 3.0, "oct")),
        ("1e-3", Token("1e-3", "number", 0.001)),
        ("1e−3 s", Token("1e−3 s", "number", 0.001, "s")),
        ("x0.8", Token("x0.8", "factor", 0.8)),
        ("×0,8", Token("×0,8", "factor", 0.8)),
        ("* 2", Token("* 2", "factor", 2.0)),
        ("-", Token("-", "sign")),
        ("3rd", Token("3rd", "word")),
        ("x2y", Token("x2y", "word")),
        ('"low hum"', Token("low hum", "quoted")),
    ],
)
def test_one_token(text: str, expected: Token) -> None:
    """Comma or point, unit attached or apart, the minus of typography."""
    assert tokenize(f" {text} ") == [expected]


def test_a_second_unit_is_a_word() -> None:
    """Only a bare number takes the unit that follows."""
    assert [token.sort for token in tokenize("5 Hz s")] == ["number", "word"]


@pytest.mark.parametrize(
    ("line", "frequency_hz"),
    [
        ("400 Hz", 400.0),
        ("+400 Hz", 720.0),
        ("-20 Hz", 300.0),
        ("−20 Hz", 300.0),
        ("frequency 400", 400.0),
        ("frequency 400 Hz", 400.0),
        ("frequency x2", 640.0),
        ("0,4 kHz", 400.0),
    ],
)
def test_frequency_relative_and_absolute(line: str, frequency_hz: float) -> None:
    """A sign makes a bare frequency relative; the word sets it."""
    session = bench()
    session.type_line(line)
    assert made_by_kind(session, 0).frequency_hz == frequency_hz


@pytest.mark.parametrize(
    ("line", "gain_db"), [("+1,5 dB", -4.5), ("-1.5 dB", -7.5), ("4 dB", 4.0), ("gain -4 dB", -4.0), ("gain -4", -4.0)]
)
def test_gain_relative_and_absolute(line: str, gain_db: float) -> None:
    """A sign makes a bare level relative; the word sets it, sign and all."""
    session = bench()
    session.type_line(line)
    assert made_by_kind(session, 0).gain_db == gain_db


@pytest.mark.parametrize(
    ("line", "value"),
    [("ring x2", 0.8), ("ring -50 %", 0.2), ("ring +25 %", 0.5), ("ring 250 ms", 0.25), ("ring 0,1 s", 0.1)],
)
def test_width_relative_and_absolute(line: str, value: float) -> None:
    """Factors and signed per cents multiply; a plain value sets."""
    session = bench(selected=1)
    session.type_line(line)
    assert made_by_kind(session, 1).width == Width(WidthKey.RING_S, value)


def test_a_new_section_takes_its_gain_as_it_stands() -> None:
    """There is nothing yet to be relative to."""
    session = bench()
    session.type_line("peak +3 dB 1 kHz")
    assert made_by_kind(session, 1).gain_db == 3.0


def test_several_edits_on_one_line() -> None:
    """From left to right, whole or not at all."""
    session = bench()
    session.type_line("1 400 Hz +2 dB q 3 name knock bypass on")
    made = made_by_kind(session, 0)
    assert (made.frequency_hz, made.gain_db, made.width) == (400.0, -4.0, Width(WidthKey.Q, 3.0))
    assert session.chain.sections[0].name == "knock bypass on"  # a name is the rest of the line
    before = session.preset
    with pytest.raises(TypedLineError, match=r"^section 1: frequency_hz must be under half the sampling rate"):
        session.type_line("1 q 9 30 kHz")
    assert session.preset is before


def test_names_keep_what_was_typed() -> None:
    """A comma, a minus and a times sign in a name are no numbers."""
    session = bench()
    session.type_line("2 name Take 1,5 − 2×3")
    assert session.chain.sections[1].name == "Take 1,5 − 2×3"
    session.type_line('"take 1,5 − 2×3" q 5')
    assert made_by_kind(session, 1).width == Width(WidthKey.Q, 5.0)
    session.type_line("chain name  Boot 2x4,5-1 +2   ms")
    assert session.chain.name == "Boot 2x4,5-1 +2 ms"
    session.type_line("accept pole-moved because 3,5 s are fine")
    assert session.preset.acceptances[0].because == "3,5 s are fine"


def test_sections_by_name_number_and_all() -> None:
    """A name is found in any case; two sections of one name are both meant; all means every one."""
    session = bench()
    session.type_line("1 name hum")
    assert session.type_line("HUM bypass") == "2 sections changed"
    assert [section.is_bypassed for section in session.chain.sections] == [True, True, False]
    session.type_line("all bypass on")
    assert all(section.is_bypassed for section in session.chain.sections)
    assert session.type_line("all remove") == "removed section 1, 2, 3"
    assert session.selected == -1


def test_a_name_that_is_a_word_of_the_grammar_is_reached_by_number() -> None:
    """``gain`` means the gain of the selected section even if a section is called so."""
    session = bench(selected=0)
    session.type_line("2 name gain")
    session.select(0)
    session.type_line("gain -1 dB")
    assert made_by_kind(session, 0).gain_db == -1.0


def test_polarity_bypass_and_delay() -> None:
    """With and without a value."""
    session = bench()

    def after(line: str) -> Section:
        session.type_line(line)
        return session.chain.sections[0]

    assert [after(line).polarity for line in ("polarity", "polarity −", "polarity +")] == [-1, -1, 1]
    lines = ("bypass on", "bypass on", "bypass off", "bypass", "bypass")
    assert [after(line).is_bypassed for line in lines] == [True, True, False, True, False]
    assert after("delay 12 samples").delay_samples == 12


def test_free_sections_by_hand() -> None:
    """Pairs, real roots, none, a level and its place."""
    session = bench(selected=-1)
    session.type_line("free")
    assert made_by_hand(session, 0).poles == session.chain.realised()[0].poles
    session.type_line("free poles 0.5 -0.25 zeros none gain -3 dB at 0 Hz")
    made = made_by_hand(session, 1)
    assert made == ByHand(RealRoots((0.5, -0.25)), NO_ROOTS, -3.0, 0.0)
    session.type_line("pole 1,02 at 90°")
    assert made_by_hand(session, 1).poles == ConjugatePair(1.02, math.radians(90.0))
    session.type_line("ring 0.5 s")
    assert made_by_hand(session, 1).poles == ConjugatePair(math.exp(-math.log(1000.0) / 24000.0), math.radians(90.0))
    session.type_line("radius 0.5")
    assert made_by_hand(session, 1).poles == ConjugatePair(0.5, math.radians(90.0))


def test_resonator_by_its_pole() -> None:
    """The word pole makes the frequency the pole's own."""
    session = bench()
    session.type_line("resonator 440 Hz pole ring 0.8 s")
    poles = session.chain.realised()[1].poles
    assert isinstance(poles, ConjugatePair)
    assert poles.angle_rad * 48000.0 / (2.0 * math.pi) == pytest.approx(440.0, rel=1e-12)


def test_chain_lines() -> None:
    """Sum, direct, series, gain, name and rate."""
    session = bench()

    def after(line: str) -> tuple[str, float | None]:
        session.type_line(line)
        return session.chain.combine, session.chain.direct_gain_db

    assert after("chain sum") == ("sum", None)
    assert after("chain direct -6 dB") == ("sum", -6.0)
    assert after("chain direct off") == ("sum", None)
    assert after("chain direct 0") == ("sum", 0.0)
    assert after("chain series") == ("series", None)
    session.type_line("chain gain -3,5 dB")
    assert session.chain.gain_db == -3.5
    session.type_line("peak 5 kHz")
    assert "left out at 8000 Hz" in session.type_line("chain rate 8 kHz")
    assert len(session.chain.sections) == 3
    session.type_line("build rates")
    assert session.preset.build_rates_hz == ()


def test_an_acceptance_takes_the_place_of_the_one_before() -> None:
    """Of the same code and section; another section has its own."""
    session = bench()
    session.type_line("accept pole-moved because of the old board")
    session.type_line("accept pole-moved hum because it is far")
    session.type_line("accept pole-moved up to 3 cents because of the new board")
    assert [(one.section, one.up_to, one.because) for one in session.preset.acceptances] == [
        ("hum", None, "it is far"),
        ("", 3.0, "of the new board"),
    ]


@settings(STEADY, max_examples=150)
@given(st.data(), rates_hz)
def test_made_free_sounds_as_before(data: st.DataObject, rate_hz: float) -> None:
    """Same response from 0 Hz to half the rate, relative to max(|H|, 1e-3 max|H|).

    Poles and zeros are the same doubles; the gain goes through decibels and back, 1e-14 at 24 dB.
    """
    section = data.draw(sections(rate_hz))
    free = make_free(section, rate_hz)
    assert isinstance(free.made, ByHand)
    grid_hz = np.linspace(0.0, 0.5 * rate_hz, 301)
    active = [Section(one.made, "", False, one.polarity, one.delay_samples) for one in (section, free)]
    before, after = (chain_response(Chain("", rate_hz, (one,)), grid_hz) for one in active)
    scale = np.maximum(np.abs(before), 1e-3 * np.max(np.abs(before)))
    assert np.max(np.abs(after - before) / scale) <= 1e-11
    assert (free.name, free.is_bypassed, free.delay_samples) == (
        section.name,
        section.is_bypassed,
        section.delay_samples,
    )


@pytest.mark.parametrize(
    ("line", "complaint"),
    [
        ("", r"^the line is empty; try: peak 320 Hz -4 dB q 1\.2$"),
        ("   ", r"^the line is empty"),
        ("peek 320 Hz", r"^peek is no kind, section or word of the typed line; did you mean peak\?$"),
        ("hmm q 3", r"^hmm is no kind, section or word of the typed line; did you mean hum\?$"),
        ("qqqqq", r"^qqqqq is no kind, .*; try: peak 320 Hz -4 dB q 1\.2$"),
        ("peak", r"^a peak needs a frequency, such as peak 320 Hz$"),
        (
            "peak 320 Hz 400 Hz",
            r"^400 Hz is not understood here: a peak takes a frequency, a gain in dB and one width$",
        ),
        ("peak 30 kHz", r"frequency_hz must be under half the sampling rate \(24000 Hz\), got 30000\.0"),
        ("peak 0 Hz", r"^frequency_hz must be a finite number over 0, got 0\.0$"),
        ("peak -5 Hz", r"^frequency_hz must be a finite number over 0, got -5\.0$"),
        ("peak 1e400 Hz", r"^frequency_hz must be a finite number over 0, got inf$"),
        ("peak 320 Hz order 1", r"^order must be 2 for a peak, got 1$"),
        ("low-pass 80 Hz q 1 order 1", r"^q must be left out for first order, which has no width, got 1\.0$"),
        ("low-pass 80 Hz bandwidth 3 Hz", r"^bandwidth_hz must be left out: it has no meaning for a low-pass"),
        ("notch 50 Hz -3 dB", r"^gain_db must be left out for a notch, which has no gain of its own, got -3\.0$"),
        ("notch 50 Hz radius 1", r"^radius must be under 1 for a kind, got 1\.0; make the section free to reach"),
        ("notch 50 Hz radius 0", r"^radius must be a finite number over 0, got 0\.0$"),
        ("notch 50 Hz radius 0.1", r"radius must be over 0\.993\d+ and under 1 here"),
        ("notch 50 Hz ring 0 s", r"^ring_s must be a finite number over 0, got 0\.0$"),
        ("notch 50 Hz q", r"^q must be a number without a unit, got nothing$"),
        ("notch 50 Hz ring 3 Hz", r"^ring must be a number in s, got 3 Hz$"),
        ("notch 50 Hz bandwidth 3", r"^bandwidth must be a number in Hz or in oct, got 3$"),
        ("resonator 440 Hz", r"^a resonator needs a ring or another width, such as resonator 440 Hz ring 0\.8 s$"),
        ("peak 320 Hz pole", r"^frequency_is must be left out for any kind but resonator, got \'pole\'$"),
        ("free poles 0.5 at 200 deg", r"^angle must be between 0 and pi radians"),
        ("free poles -0.5 at 20 deg", r"^radius must be a finite number of 0 or more, got -0\.5$"),
        ("free poles 0.5 at 20 Hz", r"^the angle must be a number in deg or without a unit, got 20 Hz$"),
        ("free knees 1", r"^knees is not understood here: a free section takes poles, zeros, gain and at$"),
        ("0 q 3", r"^section 0 does not exist: the chain has 3 sections$"),
        ("4 q 3", r"^section 4 does not exist: the chain has 3 sections$"),
        ("2", r"^say what to change, such as 2 \+1\.5 dB, or 2 remove$"),
        ("2 5 s", r"^5 s is not understood here: give a number in Hz, dB or cents, or one of q, ring"),
        ("2 +25000 cents", r"^cents must be within 20 octaves \(24000 cents\)$"),
        ("2 remove now", r"^now is left over at the end of the line; leave it out$"),
        ("all up", r"^one section at a time can be moved up$"),
        ("move 3", r"^move must be followed by two numbers: move 3 to 1$"),
        ("move 3 to 4", r"^section 4 does not exist: the chain has 3 sections$"),
        ("2 zeros 1", r"^the zeros of a notch follow its kind; type free to set them by hand$"),
        ("2 poles 0.5", r"^the poles of a notch are set as RADIUS at ANGLE deg; make it free for others$"),
        ("2 pole 1 at 1 deg", r"^radius must be over 0 and under 1 for a notch, got 1\.0; make the section free"),
        ("2 angle 0 deg", r"^the angle of a pole pair must lie between 0 and 180 degrees"),
        ("2 kind free", r"^kind must be followed by a kind such as notch; type free alone"),
        ("3 kind notch", r"^a free section keeps its poles; add a new section of the kind instead$"),
        ("3 frequency 50 Hz", r"^a free section has no frequency_hz; move its poles and zeros instead$"),
        ("3 +5 Hz", r"^a free section has no frequency of its own; move its poles and zeros$"),
        ("3 q 5", r"^a free section has no q; give ring or radius$"),
        ("3 q x5", r"^a free section has no q to multiply; try ring x5$"),
        ("2 at 50 Hz", r"^only a free section keeps its level at a frequency of its own$"),
        ("2 ring x0", r"^the factor of ring must be over 0, got 0$"),
        ("2 ring -100 %", r"^the factor of ring must be over 0, got 0$"),
        ("2 delay 1.5", r"^delay must be whole samples, got 1\.5$"),
        ("2 delay 70000", r"^delay must be whole samples from 0 to 65535, got 70000$"),
        ("2 delay 1e999", r"^a number in this line is too large$"),
        ("1 gain 1000 dB", r"^gain_db must be between -200 and 200 dB, got 1000\.0$"),
        ("chain", r"^chain must be followed by one of gain, series, sum, direct, name, rate$"),
        ("chain gain", r"^chain gain must be a number in dB or without a unit, got nothing$"),
        (
            "chain direct 0 dB",
            r'^direct_gain_db must be left out for a chain in series; set combine = "sum", got 0\.0$',
        ),
        ("chain rate 10", r"^sample_rate_hz must be between 1000 and 1e\+06, got 10\.0$"),
        ("target f16/tdf2", r"^format must be f64, f32, q15, q31 or qM\.N such as q1\.14, got 'f16'$"),
        ("target f32", r"^arithmetic must be FORMAT/STRUCTURE, such as f32/tdf2; structures are df1"),
        ("build", r"^build must be followed by rates and numbers, such as build rates 44100 48000$"),
        ("build rates 3", r"^sample_rates_hz must be between 1000 and 1e\+06, got 3\.0$"),
        ("accept", r"^accept must be followed by a finding's code, such as ring-after-tone$"),
        ("accept pole-moved", r"^because must be a reason in words, got ''$"),
        ("accept Pole because x", r"^code must be a finding's code such as pole-moved, got 'Pole'$"),
        ("accept pole-moved up 3", r"^up must be followed by to and a number$"),
        ('2 name "hum', r"^a quote in '2 name \"hum' is not closed; put a second one at its end$"),
        ("name " + 400 * "a", r"^a typed line must have at most 400 characters, got 405$"),
    ],
)
def test_refusals(line: str, complaint: str) -> None:
    """Each says what must be, what was typed, or what to do; nothing has changed."""
    session = bench(selected=1)
    before, selected = session.preset, session.selected
    with pytest.raises(TypedLineError, match=complaint):
        session.type_line(line)
    assert session.preset is before
    assert session.selected == selected
    assert not session.can_undo


@pytest.mark.parametrize("line", ["q 3", "+3 dB", "1 q 3", "all q 3", "remove", "free"])
def test_an_empty_chain_says_so(line: str) -> None:
    """There is nothing to edit yet."""
    session = Session(Preset(Chain("", 48000.0)))
    with pytest.raises(TypedLineError, match=r"no section is selected; add one first|the chain is empty"):
        session.type_line(line)


def test_a_129th_section_is_refused() -> None:
    """The chain holds 128."""
    session = Session(Preset(Chain("", 48000.0, (Section(ByHand()),) * 128)))
    with pytest.raises(TypedLineError, match=r"^the number of sections must be at most 128, got 129$"):
        session.type_line("notch 50 Hz")


_WORDS = (
    *(kind.value for kind in Kind), *WIDTH_WORDS, *EDIT_WORDS, *CHAIN_WORDS, "order", "none", "all", "move", "to", "up",
    "down", "remove", "chain", "direct", "off", "on", "target", "build", "rates", "accept", "because", "undo", "redo",
    "hum", "+", "-", "f32/tdf2", "q1.14/coupled", "pole-moved",
)  # fmt: skip
_NUMBERS = (
    "0", "-0", "1", "2", "3", "0.5", "-1", "1e308", "-1e308", "1e999", "1e-320", "nan", "inf", "1e5", "48000", "x0",
    "x1e308", "x1e-308", "+1e308", "0,5", "-20000", "9" * 60, "0.9999999999999999", "1.0000000000000002", "89.99999",
)  # fmt: skip
_UNITS = ("", "Hz", "kHz", "dB", "s", "ms", "%", "deg", "oct", "cents", "samples")
_pieces = st.one_of(
    st.sampled_from(_WORDS),
    st.tuples(st.sampled_from(_NUMBERS), st.sampled_from(_UNITS)).map(" ".join),
    st.floats(allow_nan=False, allow_infinity=False).map(repr),
    st.text(max_size=4),
)
_lines = st.one_of(st.text(max_size=60), st.lists(_pieces, max_size=9).map(" ".join))


@settings(STEADY, max_examples=1500)
@given(st.lists(_lines, min_size=1, max_size=4), st.integers(-1, 2))
def test_any_text_is_applied_or_refused_in_one_line(lines: list[str], selected: int) -> None:
    """Nothing but a complaint ever comes out, and a refused line changes nothing."""
    session = bench(selected)
    for line in lines:
        before = session.preset
        try:
            sentence = session.type_line(line)
        except TypedLineError as error:
            sentence = str(error)
            assert session.preset is before
        assert sentence.strip()
