"""What changed between two presets, one plain line per change."""

from tonebench.core.chain import Chain
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.session.preset import Preset


def describe_changes(before: Preset, after: Preset) -> tuple[str, ...]:
    """Return one line per difference; no lines for equal presets.

    Sections are compared by position, after equal ones at the front and the back are set aside, so that one section
    put in or taken out is one line.
    """
    lines = _chain_changes(before.chain, after.chain)
    if before.target != after.target:
        lines.append(f"target {before.target} is now {after.target}")
    if before.build_rates_hz != after.build_rates_hz:
        lines.append("build rates are now " + (", ".join(f"{one:g}" for one in after.build_rates_hz) or "none"))
    if before.exports != after.exports:
        lines.append(f"exports: {len(before.exports)} before, {len(after.exports)} now, or changed in place")
    if before.acceptances != after.acceptances:
        lines.append("accepted findings changed")
    return tuple(lines)


def _chain_changes(before: Chain, after: Chain) -> list[str]:
    lines = []
    for name, unit in (("name", ""), ("sample_rate_hz", " Hz"), ("gain_db", " dB"), ("combine", "")):
        then, now = getattr(before, name), getattr(after, name)
        if then != now:
            lines.append(f"chain {name}: {then} is now {now}{unit}")
    if before.direct_gain_db != after.direct_gain_db:
        now = "left out" if after.direct_gain_db is None else f"added at {after.direct_gain_db:g} dB"
        lines.append(f"the input itself is now {now}")
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
        else:
            lines.append(f"section {number}: {_words(old[offset])} is now {_words(new[offset])}")
    return lines


def _words(section: Section) -> str:
    parts = [f'"{section.name}"'] if section.name else []
    parts.append(section.kind.value)
    made = section.made
    if isinstance(made, ByKind):
        parts.append(f"{made.frequency_hz:.10g} Hz")
        if made.width is not None:
            parts.append(f"{made.width.key} {made.width.value:.10g}")
    if made.gain_db or isinstance(made, ByHand):
        parts.append(f"{made.gain_db:+.10g} dB")
    if isinstance(made, ByHand):
        parts.append(f"poles {made.poles}, zeros {made.zeros}")
    if section.polarity < 0:
        parts.append("polarity -1")
    if section.delay_samples:
        parts.append(f"delay {section.delay_samples}")
    if section.is_bypassed:
        parts.append("bypassed")
    return " ".join(parts)
