"""What changed between two presets, one plain line per change."""

import math

from tonebench.core.chain import Chain
from tonebench.core.roots import ConjugatePair, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.session.preset import Preset
from tonebench.target.arithmetic import Target


def describe_changes(before: Preset, after: Preset) -> tuple[str, ...]:
    """Return one line per difference; no lines for equal presets.

    Sections are compared by position, after equal ones at the front and the back are set aside, so that one section
    put in or taken out is one line.
    """
    lines = _chain_changes(before.chain, after.chain)
    if before.target != after.target:
        lines.append(f"target {_target_words(before.target)} is now {_target_words(after.target)}")
    if before.build_rates_hz != after.build_rates_hz:
        lines.append("build rates are now " + (", ".join(_number(one) for one in after.build_rates_hz) or "none"))
    if before.exports != after.exports:
        lines.append("exported files changed")
    if before.acceptances != after.acceptances:
        lines.append("accepted findings changed")
    return tuple(lines)


def _chain_changes(before: Chain, after: Chain) -> list[str]:
    lines = []
    if before.name != after.name:
        lines.append(f'chain name: "{before.name}" is now "{after.name}"')
    for words, then, now, unit in (
        ("sample rate", before.sample_rate_hz, after.sample_rate_hz, "Hz"),
        ("gain", before.gain_db, after.gain_db, "dB"),
    ):
        if then != now:
            lines.append(f"chain {words}: {_number(then)} is now {_number(now)} {unit}")
    if before.combine != after.combine:
        lines.append(f"chain: {before.combine} is now {after.combine}")
    if before.direct_gain_db != after.direct_gain_db:
        level = "left out" if after.direct_gain_db is None else f"added at {_number(after.direct_gain_db)} dB"
        lines.append(f"the input itself is now {level}")
    return lines + _section_changes(before.sections, after.sections)


def _section_changes(before: tuple[Section, ...], after: tuple[Section, ...]) -> list[str]:
    head = 0
    while head < min(len(before), len(after)) and before[head] == after[head]:
        head += 1
    tail = 0
    while tail < min(len(before), len(after)) - head and before[-1 - tail] == after[-1 - tail]:
        tail += 1
    old, new = before[head : len(before) - tail], after[head : len(after) - tail]
    lines = []
    for offset in range(max(len(old), len(new))):
        number = head + offset + 1
        if offset >= len(new):
            lines.append(f"section {number} removed: {_words(old[offset])}")
        elif offset >= len(old):
            lines.append(f"section {number} added: {_words(new[offset])}")
        elif old[offset] != new[offset]:
            lines.append(f"section {number}: {_words(old[offset])} is now {_words(new[offset])}")
    return lines


def _words(section: Section) -> str:
    parts = [f'"{section.name}"'] if section.name else []
    parts.append(section.kind.value)
    made = section.made
    parts += _made_words(made) if isinstance(made, ByKind) else _hand_words(made)
    if section.polarity < 0:
        parts.append("polarity -1")
    if section.delay_samples:
        parts.append(f"delay {section.delay_samples}")
    if section.is_bypassed:
        parts.append("bypassed")
    return " ".join(parts)


def _made_words(made: ByKind) -> list[str]:
    parts = [f"{_number(made.frequency_hz)} Hz"]
    if made.is_pole_frequency:
        parts.append("of the pole")
    if made.order == 1:
        parts.append("order 1")
    if made.width is not None:
        parts.append(f"{made.width.key} {_number(made.width.value)}")
    if made.gain_db:
        parts.append(f"{_signed(made.gain_db)} dB")
    return parts


def _hand_words(made: ByHand) -> list[str]:
    parts = [f"{_signed(made.gain_db)} dB"]
    if made.gain_at_hz is not None:
        parts.append(f"at {_number(made.gain_at_hz)} Hz")
    return [*parts, f"poles {_root_words(made.poles)}", f"zeros {_root_words(made.zeros)}"]


def _root_words(roots: Roots) -> str:
    if isinstance(roots, ConjugatePair):
        return f"{_number(roots.radius)} at {_number(math.degrees(roots.angle_rad))} deg"
    return " ".join(_number(value) for value in roots.values) or "none"


def _number(value: float) -> str:
    """Return the shortest text that is this number, so that two different ones never read the same."""
    return f"{value:.15g}" if float(f"{value:.15g}") == value else repr(value)


def _signed(value: float) -> str:
    return _number(value) if value < 0.0 else f"+{_number(abs(value))}"


def _target_words(target: Target) -> str:
    """Return FORMAT/STRUCTURE and every rule that is not the usual one."""
    usual = Target(target.number_format, target.structure)
    parts = [str(target)]
    if target.accumulator_bits is not None:
        parts.append(f"accumulator {target.accumulator_bits} bits")
    for words, now, then in (
        ("rounding", target.rounding, usual.rounding),
        ("products", target.products, usual.products),
        ("overflow", target.overflow, usual.overflow),
    ):
        if now != then:
            parts.append(f"{words} {now.value}")
    if target.is_fused:
        parts.append("fused")
    if target.is_flushing_subnormals:
        parts.append("flushing subnormals")
    return " ".join(parts)
