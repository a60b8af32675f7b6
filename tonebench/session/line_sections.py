"""Typed lines that make a section: kinds with their numbers, and poles and zeros by hand."""

import math
from dataclasses import dataclass, replace

from tonebench.core.kinds import Kind, Width, WidthKey, parse_kind
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.errors import InvalidValueError, TypedLineError
from tonebench.session.tokens import Cursor, Token

_DEFAULT_Q = {Kind.PEAK: 1.0, Kind.NOTCH: 10.0, Kind.BAND_PASS: 1.0}  # the others get 0.7071
WIDTH_WORDS = ("q", "ring", "radius", "bandwidth")


def take_kind(cursor: Cursor) -> Kind | None:
    """Read a kind of one or two words, if one comes next."""
    first, second = cursor.peek(), cursor.peek(1)
    if first is None or first.sort != "word":
        return None
    if second is not None and second.sort == "word":
        kind = _kind(f"{first.plain} {second.plain}")
        if kind is not None:
            cursor.take()
            cursor.take()
            return kind
    kind = _kind(first.plain)
    if kind is not None:
        cursor.take()
    return kind


def _kind(text: str) -> Kind | None:
    try:
        return parse_kind(text)
    except InvalidValueError:
        return None


def read_section(kind: Kind, cursor: Cursor) -> Section:
    """Read the numbers of a new section; they may come in any order.

    Raises
    ------
    InvalidValueError
        If one is missing or has no meaning; nothing is changed then.

    """
    if kind is Kind.FREE:
        return Section(_read_by_hand(cursor))
    numbers = _Numbers()
    while not cursor.is_done():
        numbers.read(kind, cursor)
    if numbers.frequency_hz is None:
        raise TypedLineError(f"a {kind} needs a frequency, such as {kind} 320 Hz")
    width = numbers.width
    if width is None and numbers.order == 2:
        width = _default_width(kind)
    return Section(ByKind(kind, numbers.frequency_hz, width, numbers.gain_db, numbers.order, numbers.is_pole_frequency))


@dataclass(slots=True)
class _Numbers:
    """What was read of a new section so far."""

    frequency_hz: float | None = None
    width: Width | None = None
    gain_db: float = 0.0
    order: int = 2
    is_pole_frequency: bool = False

    def read(self, kind: Kind, cursor: Cursor) -> None:
        token = cursor.peek()
        word = cursor.take_word(*WIDTH_WORDS, "order", "pole", "gain")
        if word in WIDTH_WORDS:
            self.width = read_width(word, cursor)
        elif word == "order":
            self.order = round(cursor.number("order", "").value)
        elif word == "pole":
            self.is_pole_frequency = True
        elif word == "gain" or (token is not None and token.unit == "db"):
            self.gain_db = cursor.number("gain", "db", "").value
        elif token is not None and token.sort == "number" and self.frequency_hz is None and token.unit in ("hz", ""):
            self.frequency_hz = cursor.take().value
        else:
            raise TypedLineError(_unexpected(token, f"a {kind} takes a frequency, a gain in dB and one width"))


def _default_width(kind: Kind) -> Width:
    if kind is Kind.RESONATOR:
        raise TypedLineError("a resonator needs a ring or another width, such as resonator 440 Hz ring 0.8 s")
    return Width(WidthKey.Q, _DEFAULT_Q.get(kind, 0.7071))


def read_width(word: str, cursor: Cursor) -> Width:
    """Read the value of a width whose word was just read."""
    if word == "q":
        return Width(WidthKey.Q, cursor.number("q", "").value)
    if word == "radius":
        return Width(WidthKey.RADIUS, cursor.number("radius", "").value)
    if word == "ring":
        return Width(WidthKey.RING_S, cursor.number("ring", "s").value)
    token = cursor.number("bandwidth", "hz", "oct")
    return Width(WidthKey.BANDWIDTH_HZ if token.unit == "hz" else WidthKey.BANDWIDTH_OCT, token.value)


def _read_by_hand(cursor: Cursor) -> ByHand:
    made = ByHand()
    while not cursor.is_done():
        token = cursor.peek()
        word = cursor.take_word("pole", "poles", "zero", "zeros", "gain", "at")
        if word in ("pole", "poles"):
            made = replace(made, poles=read_roots(cursor))
        elif word in ("zero", "zeros"):
            made = replace(made, zeros=read_roots(cursor))
        elif word == "gain":
            made = replace(made, gain_db=cursor.number("gain", "db", "").value)
        elif word == "at":
            made = replace(made, gain_at_hz=cursor.number("the frequency of the gain", "hz", "").value)
        else:
            raise TypedLineError(_unexpected(token, "a free section takes poles, zeros, gain and at"))
    return made


def read_roots(cursor: Cursor) -> Roots:
    """Read ``0.999 at 7.5 deg`` (a conjugate pair), up to two real roots, or ``none``."""
    if cursor.take_word("none"):
        return NO_ROOTS
    first = cursor.number("a root", "")
    if cursor.take_word("at"):
        angle = cursor.number("the angle", "deg", "")
        return ConjugatePair(first.value, math.radians(angle.value))
    values = [first.value]
    following = cursor.peek()
    if following is not None and following.sort == "number" and not following.unit:
        values.append(cursor.take().value)
    return RealRoots(tuple(values))


def _unexpected(token: Token | None, expected: str) -> str:
    shown = "nothing" if token is None else token.text
    return f"{shown} is not understood here: {expected}"
