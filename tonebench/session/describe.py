"""Numbers and sections in plain words, the same on the screen and on the command line."""

import math

from tonebench.core.design import realise
from tonebench.core.kinds import WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots, Roots, is_on_rim
from tonebench.core.section import ByKind, Section
from tonebench.core.widths import all_widths, ring_from_radius

_WIDTH_WORDS = {
    WidthKey.Q: "q",
    WidthKey.BANDWIDTH_HZ: "bandwidth",
    WidthKey.BANDWIDTH_OCT: "bandwidth",
    WidthKey.RING_S: "ring",
    WidthKey.RADIUS: "radius",
}


def format_frequency(frequency_hz: float) -> str:
    """Return ``50.02 Hz``, ``1250.5 Hz``: hundredths under 1 kHz, tenths above, no trailing zeros."""
    decimals = 4 if frequency_hz < 1.0 else 2 if frequency_hz < 1000.0 else 1
    return f"{_trimmed(f'{frequency_hz:.{decimals}f}')} Hz"


def format_ring(ring_s: float) -> str:
    """Return ``0.44 s`` or ``12.3 ms``: three digits; ``endless`` on the unit circle."""
    if math.isinf(ring_s):
        return "endless"
    if ring_s >= 0.1:
        return f"{_significant(ring_s, 3)} s"
    return f"{_significant(1000.0 * ring_s, 3)} ms"


def format_radius(radius: float) -> str:
    """Return a radius with three digits of its distance from 1, grouped in threes: ``0.999 67``."""
    distance = abs(1.0 - radius)
    decimals = 5 if distance == 0.0 else min(max(5, 2 - math.floor(math.log10(distance) + 1e-9)), 15)
    return _grouped(f"{radius:.{decimals}f}")


def format_angle_deg(angle_rad: float) -> str:
    """Return degrees with five significant digits, grouped: ``0.374 67 deg``."""
    degrees = math.degrees(angle_rad)
    decimals = 3 if degrees == 0.0 else min(max(3, 4 - math.floor(math.log10(degrees))), 9)
    return f"{_grouped(_trimmed(f'{degrees:.{decimals}f}'))} deg"


def format_gain_db(gain_db: float) -> str:
    """Return a signed level: ``+1.5 dB``, ``-4.0 dB``, ``0 dB`` for less than a hundredth."""
    if round(gain_db, 2) == 0.0:
        return "0 dB"
    decimals = 1 if round(gain_db, 1) == round(gain_db, 3) else 2
    return f"{gain_db:+.{decimals}f} dB"


def format_width(key: WidthKey, value: float) -> str:
    """Return a width with its word and unit: ``q 1.2``, ``ring 0.44 s``, ``bandwidth 5.04 Hz``."""
    if key is WidthKey.RING_S:
        return f"ring {format_ring(value)}"
    if key is WidthKey.RADIUS:
        return f"radius {format_radius(value)}"
    unit = {WidthKey.BANDWIDTH_HZ: " Hz", WidthKey.BANDWIDTH_OCT: " oct"}.get(key, "")
    return f"{_WIDTH_WORDS[key]} {_significant(value, 4)}{unit}"


def _significant(value: float, digits: int) -> str:
    if value == 0.0:
        return "0"
    decimals = max(digits - 1 - math.floor(math.log10(abs(value))), 0)
    return _trimmed(f"{value:.{min(decimals, 9)}f}")


def _trimmed(text: str) -> str:
    return text.rstrip("0").rstrip(".") if "." in text else text


def _grouped(text: str) -> str:
    whole, point, decimals = text.partition(".")
    groups = [decimals[start : start + 3] for start in range(0, len(decimals), 3)]
    return whole + point + " ".join(groups)


def describe_section(section: Section, number: int, sample_rate_hz: float) -> str:
    """Return one line for the chain's list: number, name, kind, frequency, gain, ring or width, and what is unusual."""
    made = section.made
    parts = [str(number)]
    if section.name:
        parts.append(section.name)
    kind = section.kind.value
    parts.append(f"{kind} 1st order" if isinstance(made, ByKind) and made.order == 1 else kind)
    if isinstance(made, ByKind):
        parts.append(format_frequency(made.frequency_hz))
    if section.gain_db != 0.0:
        parts.append(format_gain_db(section.gain_db))
    parts.append(_ring_words(section, sample_rate_hz))
    if section.polarity < 0:
        parts.append("inverted")
    if section.delay_samples:
        parts.append(f"delay {section.delay_samples}")
    if section.is_bypassed:
        parts.append("(bypassed)")
    return " ".join(part for part in parts if part)


def _ring_words(section: Section, sample_rate_hz: float) -> str:
    poles = realise(section, sample_rate_hz).poles
    if isinstance(poles, ConjugatePair):
        if is_on_rim(poles.radius):
            return "on the rim"
        word = "grows in" if poles.radius > 1.0 else "ring"
        return f"{word} {format_ring(ring_from_radius(poles.radius, sample_rate_hz))}"
    made = section.made
    if isinstance(made, ByKind) and made.width is not None:
        return format_width(made.width.key, made.width.value)
    return ""


def describe_pole(section: Section, sample_rate_hz: float) -> tuple[str, ...]:
    """Return the read-out of a section's poles, widths and zeros, one fact per line."""
    realised = realise(section, sample_rate_hz)
    made = section.made
    lines = _root_lines("pole", realised.poles, sample_rate_hz)
    if isinstance(made, ByKind):
        asked = "pole" if made.is_pole_frequency else "f0"
        lines.append(f"{asked} {format_frequency(made.frequency_hz)}  gain {format_gain_db(made.gain_db)}")
        widths = all_widths(made, sample_rate_hz)
        kept = made.width.key if made.width is not None else None
        words = [
            format_width(key, value) + (" (kept)" if key is kept else "")
            for key, value in widths.items()
            if key is kept or key not in (WidthKey.RING_S, WidthKey.RADIUS)
        ]
        lines += ["  ".join(words[start : start + 2]) for start in range(0, len(words), 2)]
    else:
        where = "" if made.gain_at_hz is None else f" at {format_frequency(made.gain_at_hz)}"
        lines.append(f"gain {format_gain_db(made.gain_db)}{where}")
    return tuple(lines + _root_lines("zero", realised.zeros, sample_rate_hz))


def _root_lines(word: str, roots: Roots, sample_rate_hz: float) -> list[str]:
    if isinstance(roots, RealRoots):
        return [
            f"{word} real {_significant(value, 7)}{_real_ring(word, value, sample_rate_hz)}" for value in roots.values
        ]
    frequency_hz = roots.angle_rad * sample_rate_hz / (2.0 * math.pi)
    place = f"{word} radius {format_radius(roots.radius)}"
    if is_on_rim(roots.radius):
        place = f"{word} on the rim"
    elif word == "pole" or roots.radius != 1.0:
        ring = format_ring(ring_from_radius(roots.radius, sample_rate_hz))
        place += f"  {'grows in' if roots.radius > 1.0 else 'ring'} {ring}"
    return [place, f"  angle {format_angle_deg(roots.angle_rad)}  {format_frequency(frequency_hz)}"]


def _real_ring(word: str, value: float, sample_rate_hz: float) -> str:
    if word != "pole" or value == 0.0:
        return ""
    return f"  ring {format_ring(ring_from_radius(abs(value), sample_rate_hz))}"
