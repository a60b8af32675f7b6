"""Typed lines that change sections: numbers, names, poles by hand.

A signed level or frequency is relative (``+1.5 dB``); ``gain -4 dB`` sets it.
"""

import math
from collections.abc import Callable
from dataclasses import replace

from tonebench.core.design import realise
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.core.shape import Move, move_pole, set_pole
from tonebench.core.widths import all_widths
from tonebench.errors import TypedLineError
from tonebench.session.line_sections import WIDTH_WORDS, read_roots, read_width, take_kind
from tonebench.session.names import checked_name
from tonebench.session.tokens import Cursor, Token

Edit = Callable[[Section, float], Section]

_WORDS = (
    *WIDTH_WORDS, "gain", "angle", "pole", "poles", "zero", "zeros", "name", "bypass", "polarity", "delay", "free",
    "frequency", "at", "kind",
)  # fmt: skip
EDIT_WORDS = _WORDS


def read_edits(cursor: Cursor) -> list[Edit]:
    """Read every edit on the rest of the line."""
    edits = []
    while not cursor.is_done():
        edits.append(_read_edit(cursor))
    return edits


def _read_edit(cursor: Cursor) -> Edit:
    token = cursor.peek()
    word = cursor.take_word(*_WORDS)
    if word is None:
        return _read_number(cursor, token)
    if word in WIDTH_WORDS:
        return _read_width_edit(word, cursor)
    readers: dict[str, Callable[[Cursor], Edit]] = {
        "gain": _read_gain, "angle": _read_angle, "pole": _read_pole, "poles": _read_pole, "zero": _read_zeros,
        "zeros": _read_zeros, "name": _read_name, "bypass": _read_bypass, "polarity": _read_polarity,
        "delay": _read_delay, "free": lambda _: make_free, "frequency": _read_frequency, "at": _read_gain_place,
        "kind": _read_kind,
    }  # fmt: skip
    return readers[word](cursor)


def _read_number(cursor: Cursor, token: Token | None) -> Edit:
    if token is None or token.sort != "number" or token.unit not in ("hz", "db", "cents"):
        shown = "nothing" if token is None else token.text
        raise TypedLineError(
            f"{shown} is not understood here: give a number in Hz, dB or cents, or one of {', '.join(_WORDS)}"
        )
    cursor.take()
    value = token.value
    if token.unit == "cents":
        return lambda section, rate: move_pole(section, rate, Move(pitch_ratio=_power_of_two(value / 1200.0)))
    if token.unit == "db":
        if token.is_signed:
            return lambda section, _: section.with_gain_db(section.gain_db + value)
        return lambda section, _: section.with_gain_db(value)
    if token.is_signed:
        return lambda section, _: section.with_frequency_hz(_frequency_hz(section) + value)
    return lambda section, _: section.with_frequency_hz(value)


def _power_of_two(exponent: float) -> float:
    if abs(exponent) > 20.0:
        raise TypedLineError("cents must be within 20 octaves (24000 cents)")
    return float(2.0**exponent)


def _frequency_hz(section: Section) -> float:
    if isinstance(section.made, ByHand):
        raise TypedLineError("a free section has no frequency of its own; move its poles and zeros")
    return section.made.frequency_hz


def _read_frequency(cursor: Cursor) -> Edit:
    token = cursor.peek()
    if token is not None and token.sort == "factor":
        factor = cursor.take().value
        return lambda section, _: section.with_frequency_hz(_frequency_hz(section) * factor)
    value = cursor.number("frequency", "hz", "").value
    return lambda section, _: section.with_frequency_hz(value)


def _read_width_edit(word: str, cursor: Cursor) -> Edit:
    token = cursor.peek()
    if token is not None and (token.sort == "factor" or (token.unit == "%" and token.is_signed)):
        cursor.take()
        factor = token.value if token.sort == "factor" else 1.0 + token.value / 100.0
        return lambda section, rate: _scaled_width(section, rate, word, factor)
    width = read_width(word, cursor)
    return lambda section, rate: _with_width(section, rate, width)


def _with_width(section: Section, rate_hz: float, width: Width) -> Section:
    if isinstance(section.made, ByHand):
        return _hand_ring(section, rate_hz, width)
    return section.with_width(width.key, width.value)


def _hand_ring(section: Section, rate_hz: float, width: Width) -> Section:
    """Set ring or radius of a free section's pole pair."""
    made = section.made
    if not isinstance(made, ByHand) or not isinstance(made.poles, ConjugatePair):
        raise TypedLineError(f"a section without a pole pair has no {width.key}; type its poles")
    if width.key is WidthKey.RADIUS:
        radius = width.value
    elif width.key is WidthKey.RING_S:
        radius = math.exp(-math.log(1000.0) / (width.value * rate_hz))
    else:
        raise TypedLineError(f"a free section has no {width.key}; give ring or radius")
    return replace(section, made=replace(made, poles=replace(made.poles, radius=radius)))


def _scaled_width(section: Section, rate_hz: float, word: str, factor: float) -> Section:
    if not factor > 0.0:
        raise TypedLineError(f"the factor of {word} must be over 0, got {factor:g}")
    made = section.made
    if isinstance(made, ByHand):
        if word != "ring":
            raise TypedLineError(f"a free section has no {word} to multiply; try ring x{factor:g}")
        return move_pole(section, rate_hz, Move(ring_ratio=factor))
    widths = all_widths(made, rate_hz)
    key = {"q": WidthKey.Q, "ring": WidthKey.RING_S, "radius": WidthKey.RADIUS, "bandwidth": WidthKey.BANDWIDTH_HZ}[
        word
    ]
    if word == "bandwidth" and made.width is not None and made.width.key is WidthKey.BANDWIDTH_OCT:
        key = WidthKey.BANDWIDTH_OCT
    if key not in widths:
        raise TypedLineError(f"this {section.kind} has no {word} now; it has {', '.join(widths) or 'no width'}")
    return section.with_width(key, widths[key] * factor)


def _read_gain(cursor: Cursor) -> Edit:
    value = cursor.number("gain", "db", "").value
    return lambda section, _: section.with_gain_db(value)


def _read_gain_place(cursor: Cursor) -> Edit:
    value = cursor.number("the frequency of the gain", "hz", "").value

    def place(section: Section, _: float) -> Section:
        if not isinstance(section.made, ByHand):
            raise TypedLineError("only a free section keeps its level at a frequency of its own")
        return replace(section, made=replace(section.made, gain_at_hz=value))

    return place


def _read_angle(cursor: Cursor) -> Edit:
    angle_rad = math.radians(cursor.number("angle", "deg", "").value)

    def turn(section: Section, rate_hz: float) -> Section:
        poles = realise(section, rate_hz).poles
        if not isinstance(poles, ConjugatePair):
            raise TypedLineError("the poles of this section are real and have no angle; type: pole RADIUS at ANGLE deg")
        return set_pole(section, rate_hz, poles.radius, angle_rad)

    return turn


def _read_pole(cursor: Cursor) -> Edit:
    roots = read_roots(cursor)

    def place(section: Section, rate_hz: float) -> Section:
        if isinstance(section.made, ByHand):
            return replace(section, made=replace(section.made, poles=roots))
        if not isinstance(roots, ConjugatePair):
            raise TypedLineError(
                f"the poles of a {section.kind} are set as RADIUS at ANGLE deg; make it free for others"
            )
        return set_pole(section, rate_hz, roots.radius, roots.angle_rad)

    return place


def _read_zeros(cursor: Cursor) -> Edit:
    roots = read_roots(cursor)

    def place(section: Section, _: float) -> Section:
        if not isinstance(section.made, ByHand):
            raise TypedLineError(f"the zeros of a {section.kind} follow its kind; type free to set them by hand")
        return replace(section, made=replace(section.made, zeros=roots))

    return place


def _read_name(cursor: Cursor) -> Edit:
    name = checked_name(cursor.rest())
    return lambda section, _: replace(section, name=name)


def _read_bypass(cursor: Cursor) -> Edit:
    word = cursor.take_word("on", "off")
    if word is None:
        return lambda section, _: replace(section, is_bypassed=not section.is_bypassed)
    return lambda section, _: replace(section, is_bypassed=word == "on")


def _read_polarity(cursor: Cursor) -> Edit:
    sign = cursor.take_word("+", "-")
    if sign is None:
        return lambda section, _: replace(section, polarity=-section.polarity)
    return lambda section, _: replace(section, polarity=1 if sign == "+" else -1)


def _read_delay(cursor: Cursor) -> Edit:
    value = cursor.number("delay", "", "samples").value
    if value != int(value):
        raise TypedLineError(f"delay must be whole samples, got {value:g}")
    return lambda section, _: replace(section, delay_samples=int(value))


def _read_kind(cursor: Cursor) -> Edit:
    kind = take_kind(cursor)
    if kind is None or kind is Kind.FREE:
        raise TypedLineError("kind must be followed by a kind such as notch; type free alone to set poles by hand")

    def change(section: Section, _: float) -> Section:
        if not isinstance(section.made, ByKind):
            raise TypedLineError("a free section keeps its poles; add a new section of the kind instead")
        return replace(section, made=replace(section.made, kind=kind))

    return change


def make_free(section: Section, rate_hz: float) -> Section:
    """Return the section with its poles and zeros by hand, sounding as before."""
    if isinstance(section.made, ByHand):
        return section
    realised = realise(section, rate_hz)
    gain = abs(realised.gain)
    if gain == 0.0:
        raise TypedLineError("this section is silent and cannot be made free")
    polarity = 1 if realised.gain > 0.0 else -1
    made = ByHand(realised.poles, realised.zeros, 20.0 * math.log10(gain))
    return replace(section, made=made, polarity=polarity, delay_samples=realised.delay_samples)
