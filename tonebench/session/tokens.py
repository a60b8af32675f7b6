"""The words of a typed line: numbers with units, factors, words and quoted names.

A decimal comma is a point; a minus sign of typography is a minus. Units may be attached or stand apart. Names and
reasons keep the text as it was typed.
"""

import re
from dataclasses import dataclass, field, replace

from tonebench.errors import TypedLineError

_UNITS = {
    "hz": "hz", "khz": "khz", "k": "khz", "s": "s", "ms": "ms", "db": "db", "%": "%", "deg": "deg", "°": "deg",
    "oct": "oct", "octave": "oct", "octaves": "oct", "cent": "cents", "cents": "cents", "samples": "samples",
}  # fmt: skip
_TOKEN = re.compile(
    r"""\s*(?:
      "(?P<quoted>[^"]*)"
    | (?P<factor>[x×*]\s*\d+(?:[.,]\d+)?(?:e[+\-−]?\d+)?)(?![\w])
    | (?P<number>[+\-−]?(?:\d+(?:,\d+|\.\d*)?|\.\d+)(?:e[+\-−]?\d+)?)(?P<unit>%|°|[a-zA-Z]+)?
    | (?P<sign>[+\-−])(?=\s|$)
    | (?P<word>[^\s"]+)
    )""",
    re.VERBOSE | re.IGNORECASE,
)
_LONGEST_LINE = 400


@dataclass(frozen=True, slots=True)
class Token:
    """One word of a typed line.

    Attributes
    ----------
    text : str
        As it was typed.
    sort : str
        ``number``, ``factor``, ``word``, ``quoted`` or ``sign``.
    value : float
        Of a number (in Hz and seconds) or factor.
    unit : str
        ``hz``, ``s``, ``db``, ``%``, ``deg``, ``oct``, ``cents``, ``samples`` or empty.
    is_signed : bool
        Typed with + or −.
    is_attached : bool
        No space stood between it and the token before.

    """

    text: str
    sort: str
    value: float = 0.0
    unit: str = ""
    is_signed: bool = False
    is_attached: bool = field(default=False, compare=False)

    @property
    def plain(self) -> str:
        """The text in lower case, with a plain minus."""
        return self.text.lower().replace("−", "-")


def tokenize(line: str) -> list[Token]:
    """Split a typed line into tokens.

    Raises
    ------
    TypedLineError
        If the line is too long, or a quote is not closed.

    """
    if len(line) > _LONGEST_LINE:
        raise TypedLineError(f"a typed line must have at most {_LONGEST_LINE} characters, got {len(line)}")
    tokens: list[Token] = []
    position = 0
    while position < len(line.rstrip()):
        match = _TOKEN.match(line, position)
        if match is None:
            raise TypedLineError(f"a quote in {line.strip()!r} is not closed; put a second one at its end")
        tokens.append(replace(_token(match), is_attached=position > 0 and not match[0][0].isspace()))
        position = match.end()
    return _with_units(tokens)


def _token(match: re.Match[str]) -> Token:
    if match["quoted"] is not None:
        return Token(match["quoted"], "quoted")
    if match["factor"] is not None:
        return Token(match["factor"], "factor", _value(match["factor"][1:].strip()))
    if match["sign"] is not None:
        return Token(match["sign"], "sign")
    if match["number"] is None:
        return Token(match["word"], "word")
    unit = (match["unit"] or "").lower()
    text = match[0].strip()
    if unit and unit not in _UNITS:
        return Token(text, "word")
    return _number(text, _value(match["number"]), unit, is_signed=match["number"][0] in "+-−")


def _value(text: str) -> float:
    return float(text.replace(",", ".").replace("−", "-"))


def _number(text: str, value: float, unit: str, *, is_signed: bool) -> Token:
    known = _UNITS.get(unit, "")
    if known == "khz":
        return Token(text, "number", 1000.0 * value, "hz", is_signed)
    if known == "ms":
        return Token(text, "number", 0.001 * value, "s", is_signed)
    return Token(text, "number", value, known, is_signed)


def _with_units(tokens: list[Token]) -> list[Token]:
    """Join each bare number with a unit that follows it as a word of its own."""
    result: list[Token] = []
    for token in tokens:
        last = result[-1] if result else None
        if token.sort == "word" and token.plain in _UNITS and last and last.sort == "number" and not last.unit:
            joined = _number(f"{last.text} {token.text}", last.value, token.plain, is_signed=last.is_signed)
            result[-1] = replace(joined, is_attached=last.is_attached)
        else:
            result.append(token)
    return result


class Cursor:
    """A reader of tokens from left to right."""

    def __init__(self, tokens: list[Token]) -> None:
        self._tokens = tokens
        self._position = 0

    def is_done(self) -> bool:
        """Whether everything was read."""
        return self._position >= len(self._tokens)

    def peek(self, ahead: int = 0) -> Token | None:
        """Return a coming token without reading it."""
        index = self._position + ahead
        return self._tokens[index] if index < len(self._tokens) else None

    def take(self) -> Token:
        """Read one token."""
        token = self._tokens[self._position]
        self._position += 1
        return token

    def take_word(self, *words: str) -> str | None:
        """Read one of these words if it comes next."""
        token = self.peek()
        if token is not None and token.sort in ("word", "sign") and token.plain in words:
            self._position += 1
            return token.plain
        return None

    def number(self, what: str, *units: str) -> Token:
        """Read a number with one of these units (an empty one allows none).

        Raises
        ------
        TypedLineError
            If something else comes next.

        """
        token = self.peek()
        if token is None or token.sort != "number" or token.unit not in units:
            shown = "nothing" if token is None else token.text
            wanted = " or ".join(_unit_word(unit) for unit in units)
            raise TypedLineError(f"{what} must be a number {wanted}, got {shown}")
        return self.take()

    def rest(self) -> str:
        """Read everything that is left as one text, as it was typed but for quotes and runs of spaces."""
        words = [f"{'' if token.is_attached else ' '}{token.text}" for token in self._tokens[self._position :]]
        self._position = len(self._tokens)
        return "".join(words).strip()


def _unit_word(unit: str) -> str:
    shown = {"hz": "Hz", "db": "dB"}.get(unit, unit)
    return f"in {shown}" if unit else "without a unit"
