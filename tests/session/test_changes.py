"""What changed between two presets, one plain line per change."""

from dataclasses import replace

import pytest
from hypothesis import given, settings

from tests.session.cases import bench, bench_preset
from tests.strategies import STEADY, presets
from tonebench.core.hearing import Hearing
from tonebench.session.changes import describe_changes
from tonebench.session.preset import Acceptance, ExportRequest, Preset
from tonebench.target.arithmetic import Rounding, parse_target


def changed_by(*lines: str) -> tuple[str, ...]:
    """Return the words for what these typed lines change."""
    session = bench()
    for line in lines:
        session.type_line(line)
    return describe_changes(bench_preset(), session.preset)


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("2 50.02 Hz", 'section 2: "hum" notch 50 Hz ring_s 0.4 is now "hum" notch 50.02 Hz ring_s 0.4'),
        ("1 q 2", "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 2 -6 dB"),
        ("1 gain 0.1 dB", "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 1.2 +0.1 dB"),
        ("1 gain 0 dB", "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 1.2"),
        ("1 bypass", "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 1.2 -6 dB bypassed"),
        ("1 polarity delay 3", "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 1.2 -6 dB polarity -1 delay 3"),
        ("3 pole 0.99 at 90 deg zeros none", "section 3: {free} is now free -20 dB poles 0.99 at 90 deg zeros none"),
        (
            "3 at 1000 Hz",
            "section 3: {free} is now free -20 dB at 1000 Hz poles 0.99 at 28.64788975654116 deg zeros 0.5",
        ),
        ("2 remove", 'section 2 removed: "hum" notch 50 Hz ring_s 0.4'),
        ("low-pass 9 kHz order 1", "section 2 added: low-pass 9000 Hz order 1"),
        ("resonator 440 Hz pole q 9", "section 2 added: resonator 440 Hz of the pole q 9"),
        ("chain gain -3 dB", "chain gain: 0 is now -3 dB"),
        ("chain name Boot", 'chain name: "Bench" is now "Boot"'),
        ("chain sum", "chain: series is now sum"),
        ("target q31/df1", "target f32/tdf2 is now q31/df1"),
        ("build rates 44100 96000", "build rates are now 44100, 96000"),
        ("accept pole-moved because it is far", "accepted findings changed"),
    ],
)
def test_one_change_is_one_line(line: str, expected: str) -> None:
    """Old and new in the preset's own words."""
    free = "free -20 dB poles 0.99 at 28.64788975654116 deg zeros 0.5"
    assert changed_by(line) == (expected.replace("{free}", free),)


def test_several_changes() -> None:
    """The chain first, then its sections in order."""
    assert changed_by("chain sum", "chain direct -6 dB", "chain rate 44100", "3 remove", "1 q 2") == (
        "chain sample rate: 48000 is now 44100 Hz",
        "chain: series is now sum",
        "the input itself is now added at -6 dB",
        "section 1: peak 320 Hz q 1.2 -6 dB is now peak 320 Hz q 2 -6 dB",
        "section 3 removed: free -20 dB poles 0.99 at 28.64788975654116 deg zeros 0.5",
    )
    session = bench()
    session.type_line("chain sum")
    session.type_line("chain direct -6 dB")
    before = session.preset
    session.type_line("chain direct off")
    assert describe_changes(before, session.preset) == ("the input itself is now left out",)


def test_rules_of_the_target_are_named() -> None:
    """Two targets of one format and structure that differ in their rules do not read the same."""
    before = bench_preset()
    target = replace(parse_target("q31/df1"), rounding=Rounding.FLOOR, accumulator_bits=40, is_flushing_subnormals=True)
    lines = describe_changes(replace(before, target=parse_target("q31/df1")), replace(before, target=target))
    assert lines == ("target q31/df1 is now q31/df1 accumulator 40 bits rounding floor flushing subnormals",)


def test_what_the_build_needs() -> None:
    """Exports and build rates."""
    before = replace(bench_preset(), build_rates_hz=(44100.0,))
    after = replace(bench_preset(), exports=(ExportRequest("c", "hum.h"),))
    assert describe_changes(before, after) == ("build rates are now none", "exported files changed")


def test_hearing_numbers_are_no_change() -> None:
    """They are computed anew on every save."""
    assert describe_changes(bench_preset(), replace(bench_preset(), written_hearing=Hearing(1.0, 1.0, 1.0, 1.0))) == ()


def test_tiny_changes_are_seen() -> None:
    """A difference in the last bit reads as two numbers."""
    before, after = bench(), bench()
    before.type_line("1 frequency 320.00000000000006 Hz")
    after.type_line("1 frequency 320.0000000000001 Hz")
    (line,) = describe_changes(before.preset, after.preset)
    assert "320.00000000000006 Hz" in line
    assert "320.0000000000001 Hz" in line


@settings(STEADY, max_examples=150)
@given(presets(max_sections=3), presets(max_sections=3))
def test_lines_if_and_only_if_something_differs(before: Preset, after: Preset) -> None:
    """Equal presets have no lines, different ones have, and each line is one that can be read."""
    assert describe_changes(before, before) == ()
    mixed = replace(after, chain=replace(before.chain, gain_db=after.chain.gain_db))
    for one in (after, mixed):
        lines = describe_changes(before, one)
        assert bool(lines) == (one != before)
        assert all(line and "\n" not in line for line in lines)


def test_acceptances_differ_by_their_reason() -> None:
    """Another reason is a change."""
    before = replace(bench_preset(), acceptances=(Acceptance("pole-moved", "old"),))
    after = replace(bench_preset(), acceptances=(Acceptance("pole-moved", "new"),))
    assert describe_changes(before, after) == ("accepted findings changed",)
