"""What the typed line understands beyond the session's grammar: words about files, sound and the screen.

Reading only: what they do stands in the actions. A line that starts with none of these words is the session's.
"""

import re
import shlex
from dataclasses import dataclass
from typing import Final

from tonebench.errors import TypedLineError

# Each example and what it does, for the help; each of them is tested.
EXAMPLES: Final = (
    ("save", "save to the preset's own file"),
    ("save mine.toml", "save to another file; save! replaces one that is there"),
    ("open boathouse", "open another preset; open! leaves unsaved work behind"),
    ("export c hum.h", "coefficients and code for the build; export! replaces"),
    ("level -26", "level in dB, at most 0"),
    ("ceiling -9", "the guard's ceiling in dBFS"),
    ("loop 2.5 6", "play from 2.5 s to 6 s; loop off for the whole clip"),
    ("hear change", "input, output or change"),
    ("quit", "leave; quit! leaves unsaved work behind"),
)
HEARD: Final = ("input", "output", "change")
_NUMBER = re.compile(r"([+-]?\d+(?:\.\d+)?)(db|dbfs|s)?", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Command:
    """A line of the screen's own.

    Attributes
    ----------
    word : str
        save, open, export, level, ceiling, loop, hear or quit.
    texts : tuple of str
        File names, languages and the like.
    numbers : tuple of float
    is_forced : bool
        An exclamation mark followed the word.

    """

    word: str
    texts: tuple[str, ...] = ()
    numbers: tuple[float, ...] = ()
    is_forced: bool = False


def read_command(line: str) -> Command | None:
    """Read a line of the screen's own; None if it is the session's.

    Raises
    ------
    TypedLineError
        If it starts with one of the words and does not go on as it must.

    """
    first, _, rest = line.strip().partition(" ")
    word, is_forced = first.lower().removesuffix("!"), first.endswith("!")
    if word in ("save", "open", "export", "quit"):
        return _about_files(word, _split(rest), is_forced)
    if word in ("level", "ceiling"):
        return Command(word, numbers=_numbers(word, rest, 1))
    if word == "loop":
        if rest.strip().lower() == "off":
            return Command(word)
        return Command(word, numbers=_numbers(word, rest, 2))
    if word == "hear":
        what = rest.strip().lower()
        if what not in HEARD:
            raise TypedLineError(f"hear must be followed by {', '.join(HEARD)}, got {what or 'nothing'}")
        return Command(word, (what,))
    return None


def _about_files(word: str, texts: list[str], is_forced: bool) -> Command:
    counts = {"save": (0, 1, "save FILE.toml"), "open": (1, 1, "open PRESET"), "export": (2, 2, "export c FILE.h")}
    least, most, example = counts.get(word, (0, 0, "quit"))
    if not least <= len(texts) <= most:
        raise TypedLineError(f'{word} is written {example}; put a name with spaces in quotes "…"')
    return Command(word, tuple(texts), is_forced=is_forced)


def _split(rest: str) -> list[str]:
    """Split file names; quotes hold spaces, a backslash is itself."""
    reader = shlex.shlex(rest, posix=True, punctuation_chars=False)
    reader.whitespace_split, reader.commenters, reader.escape = True, "", ""
    reader.quotes = '"'
    try:
        return list(reader)
    except ValueError as error:
        raise TypedLineError('a quote is not closed; end the name with "') from error


def _numbers(word: str, rest: str, count: int) -> tuple[float, ...]:
    texts = [one for one in rest.replace(",", ".").replace("−", "-").split() if one.lower() not in ("db", "dbfs", "s")]
    found = [_NUMBER.fullmatch(one) for one in texts]
    if len(found) != count or not all(found):
        example = {"level": "level -26", "ceiling": "ceiling -9"}.get(word, "loop 2.5 6, or loop off")
        raise TypedLineError(f"{word} is written {example}, got {rest.strip() or 'nothing after it'}")
    return tuple(float(one[1]) for one in found if one)


def quoted(name: str) -> str:
    """Return a file name as the typed line reads it back."""
    return f'"{name}"' if re.search(r"\s", name) else name
