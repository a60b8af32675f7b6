"""Every example of the typed line's help does what the help says, on the chain that the help describes."""

import math
from collections.abc import Callable
from itertools import pairwise

import pytest

from tests.session.cases import bench, made_by_hand, made_by_kind
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, ByKind
from tonebench.core.widths import all_widths, ring_from_radius
from tonebench.session.line_help import HELP, complete
from tonebench.session.preset import Acceptance
from tonebench.session.session import Session
from tonebench.target.arithmetic import parse_target

Check = Callable[[Session, Session], bool]


def is_made(made: ByKind | ByHand, index: int = 1) -> Check:
    """Expect a section at this index, made so."""
    return lambda before, after: (
        after.chain.sections[index].made == made and len(after.chain.sections) == len(before.chain.sections) + 1
    )


def has_width(index: int, key: WidthKey, value: float) -> Check:
    """Expect another width and the same frequency."""
    return lambda before, after: (
        made_by_kind(after, index).width == Width(key, value)
        and made_by_kind(after, index).frequency_hz == made_by_kind(before, index).frequency_hz
    )


def pole(session: Session, index: int) -> ConjugatePair:
    """Return a section's pole pair."""
    poles = _realised_poles(session, index)
    assert isinstance(poles, ConjugatePair)
    return poles


def _realised_poles(session: Session, index: int) -> object:
    return session.chain.realised()[index].poles


def ring_s(session: Session, index: int) -> float:
    """Return a pole's ring time."""
    return ring_from_radius(pole(session, index).radius, session.chain.sample_rate_hz)


def is_near(value: float, wanted: float) -> bool:
    """Tell whether two numbers agree to 1e-9; a pole is solved back through a dozen operations, 5e-4 from the rim."""
    return math.isclose(value, wanted, rel_tol=1e-9)


Q, RING, RADIUS, HZ = WidthKey.Q, WidthKey.RING_S, WidthKey.RADIUS, WidthKey.BANDWIDTH_HZ
EXPECTED: dict[str, Check] = {
    "peak 320 Hz -4 dB q 1.2": is_made(ByKind(Kind.PEAK, 320.0, Width(Q, 1.2), -4.0)),
    "notch 50.02 Hz radius 0.9995": is_made(ByKind(Kind.NOTCH, 50.02, Width(RADIUS, 0.9995))),
    "low shelf 120 Hz -3 dB": is_made(ByKind(Kind.LOW_SHELF, 120.0, Width(Q, 0.7071), -3.0)),
    "high-pass 80 Hz order 1": is_made(ByKind(Kind.HIGH_PASS, 80.0, None, order=1)),
    "resonator 440 Hz ring 0.8 s -6 dB": is_made(ByKind(Kind.RESONATOR, 440.0, Width(RING, 0.8), -6.0)),
    "free poles 0.999 at 7.5 deg zeros 1 -1 gain -60 dB": is_made(
        ByHand(ConjugatePair(0.999, math.radians(7.5)), RealRoots((1.0, -1.0)), -60.0)
    ),
    "50,02 Hz": lambda _, after: made_by_kind(after, 0).frequency_hz == 50.02,
    "+1.5 dB": lambda _, after: made_by_kind(after, 0).gain_db == -4.5,
    "gain -4 dB": lambda _, after: made_by_kind(after, 0).gain_db == -4.0,
    "2 q 9": has_width(1, Q, 9.0),
    "hum ring 0.3 s": has_width(1, RING, 0.3),
    "all ring x0.8": lambda before, after: all(
        is_near(ring_s(after, index), 0.8 * ring_s(before, index)) for index in range(3)
    ),
    "2 bandwidth 5 Hz": has_width(1, HZ, 5.0),
    "2 ring +10 %": lambda before, after: is_near(ring_s(after, 1), 1.1 * ring_s(before, 1)),
    "2 +5 cents": lambda before, after: is_near(
        pole(after, 1).angle_rad / pole(before, 1).angle_rad, 2.0 ** (5.0 / 1200.0)
    ),
    "2 angle 0.375 deg": lambda before, after: (
        is_near(pole(after, 1).angle_rad, math.radians(0.375))
        and is_near(pole(after, 1).radius, pole(before, 1).radius)
    ),
    "2 pole 0.9996 at 0.375 deg": lambda _, after: (
        is_near(pole(after, 1).angle_rad, math.radians(0.375)) and is_near(pole(after, 1).radius, 0.9996)
    ),
    "2 frequency x1.01": lambda _, after: made_by_kind(after, 1).frequency_hz == 50.0 * 1.01,
    "3 poles 0.99 at 30 deg": lambda _, after: made_by_hand(after, 2).poles == ConjugatePair(0.99, math.radians(30.0)),
    "3 zeros 1 -1": lambda _, after: made_by_hand(after, 2).zeros == RealRoots((1.0, -1.0)),
    "3 at 1000 Hz": lambda _, after: made_by_hand(after, 2).gain_at_hz == 1000.0,
    "2 name mains": lambda _, after: after.chain.sections[1].name == "mains",
    "2 bypass": lambda _, after: after.chain.sections[1].is_bypassed,
    "2 polarity -": lambda _, after: after.chain.sections[1].polarity == -1,
    "2 delay 3": lambda _, after: after.chain.sections[1].delay_samples == 3,
    "1 kind low shelf": lambda _, after: made_by_kind(after, 0) == ByKind(Kind.LOW_SHELF, 320.0, Width(Q, 1.2), -6.0),
    "2 free": lambda before, after: (
        made_by_hand(after, 1).poles == _realised_poles(before, 1) and after.chain.sections[1].name == "hum"
    ),
    "3 up": lambda before, after: after.chain.sections == tuple(before.chain.sections[index] for index in (0, 2, 1)),
    "move 3 to 1": lambda before, after: (
        after.chain.sections == tuple(before.chain.sections[index] for index in (2, 0, 1))
    ),
    "2 remove": lambda before, after: after.chain.sections == (before.chain.sections[0], before.chain.sections[2]),
    "chain gain -3 dB": lambda _, after: after.chain.gain_db == -3.0,
    "chain sum": lambda _, after: after.chain.combine == "sum",
    "chain rate 44100": lambda before, after: (
        after.chain.sample_rate_hz == 44100.0
        and made_by_kind(after, 1) == made_by_kind(before, 1)
        and is_near(ring_s(after, 2), ring_s(before, 2))
    ),
    "chain name Boat house": lambda _, after: after.chain.name == "Boat house",
    "target f32/tdf2": lambda _, after: after.preset.target == parse_target("f32/tdf2"),
    "build rates 44100 48000 96000": lambda _, after: after.preset.build_rates_hz == (44100.0, 48000.0, 96000.0),
    "accept ring-after-tone 2 up to 0.5 because nothing sings there": lambda _, after: (
        after.preset.acceptances == (Acceptance("ring-after-tone", "nothing sings there", "2", 0.5),)
    ),
}
# It says what the preset has already.
WITHOUT_CHANGE = {"target f32/tdf2"}


def test_every_example_is_expected_here() -> None:
    """The help and this table name the same lines; ``undo`` has its own test."""
    assert {line for line, _ in HELP} == {*EXPECTED, "undo"}


@pytest.mark.parametrize(("line", "check"), EXPECTED.items(), ids=EXPECTED)
def test_example(line: str, check: Check) -> None:
    """It does what it says, in one sentence, and undo takes it back."""
    before, after = bench(), bench()
    sentence = after.type_line(line)
    assert sentence
    assert "\n" not in sentence
    assert check(before, after)
    assert (after.preset == before.preset) == (line in WITHOUT_CHANGE)
    if line not in WITHOUT_CHANGE:
        after.type_line("undo")
        assert after.preset == before.preset


@pytest.mark.parametrize("line", [line for line in EXPECTED if line not in WITHOUT_CHANGE])
def test_the_checks_above_can_fail(line: str) -> None:
    """None of them holds for a chain that was left alone."""
    try:
        is_held = EXPECTED[line](bench(), bench())
    except AssertionError:
        is_held = False
    assert not is_held


def test_undo_and_redo_by_line() -> None:
    """The last example."""
    session = bench()
    session.type_line("2 remove")
    assert session.type_line("undo") == "undone"
    assert len(session.chain.sections) == 3
    assert session.type_line("redo") == "redone"
    assert len(session.chain.sections) == 2


def test_examples_say_what_they_are_for() -> None:
    """Lines and words short enough for the help's two columns; no example twice."""
    lines = [line for line, _ in HELP]
    assert len(set(lines)) == len(lines)
    assert all(words and len(line) <= 64 for line, words in HELP)


def test_widths_named_by_the_help_exist() -> None:
    """Each of the words q, ring, radius and bandwidth sets the width of its name."""
    for line, key in (("q 2", Q), ("ring 20 ms", RING), ("radius 0.99", RADIUS), ("bandwidth 100 Hz", HZ)):
        session = bench()
        session.type_line(line)
        made = made_by_kind(session, 0)
        assert made.width is not None
        assert made.width.key is key
        assert all_widths(made, session.chain.sample_rate_hz)[key] == made.width.value
    session = bench()
    session.type_line("bandwidth 0.5 oct")
    assert made_by_kind(session, 0).width == Width(WidthKey.BANDWIDTH_OCT, 0.5)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("", ()),
        ("no", ("notch",)),
        ("NOT", ("notch",)),
        ("low", ("low shelf", "low-pass")),
        ("notch", ()),
        ("chain s", ("chain series", "chain sum")),
        ("chain d", ("chain direct",)),
        ("zzz", ()),
    ],
)
def test_completion(text: str, expected: tuple[str, ...]) -> None:
    """First words and the chain's words; nothing for a whole word or an unknown one."""
    assert complete(text) == expected


def test_completion_offers_no_word_twice() -> None:
    """For every first letter."""
    for letter in "abcdefghijklmnopqrstuvwxyz":
        offered = complete(letter)
        assert all(one != other for one, other in pairwise(sorted(offered)))
