"""The typed line: one line of text to one change of a preset.

The same grammar serves the screen and ``tonebench edit``. A line is applied whole or not at all.
"""

import difflib
from collections.abc import Callable
from dataclasses import dataclass, replace

from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.section import Section
from tonebench.errors import InvalidValueError, TypedLineError
from tonebench.session.describe import describe_section
from tonebench.session.line_chain import accept_finding, change_build, change_chain, change_target
from tonebench.session.line_edits import EDIT_WORDS, read_edits
from tonebench.session.line_sections import read_section, take_kind
from tonebench.session.preset import Preset
from tonebench.session.tokens import Cursor, Token, tokenize

_WHOLE: dict[str, Callable[[Preset, Cursor], tuple[Preset, str]]] = {
    "chain": change_chain,
    "target": change_target,
    "build": change_build,
    "accept": accept_finding,
}
_STRUCTURE_WORDS = ("remove", "up", "down", "move")


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a line made: the preset, the selected index (−1 for none), and a sentence about it."""

    preset: Preset
    selected: int
    sentence: str


def apply_line(preset: Preset, selected: int, text: str) -> Outcome:
    """Apply one typed line.

    Parameters
    ----------
    preset : Preset
    selected : int
        Index of the selected section, −1 for none; a line without a section's number or name is about this one.
    text : str

    Raises
    ------
    TypedLineError
        If the line is not understood or its values are refused; nothing is changed then.

    """
    try:
        return _apply(preset, selected, Cursor(tokenize(text)))
    except TypedLineError:
        raise
    except InvalidValueError as error:
        raise TypedLineError(str(error)) from error
    except OverflowError as error:
        raise TypedLineError("a number in this line is too large") from error


def _apply(preset: Preset, selected: int, cursor: Cursor) -> Outcome:
    if cursor.is_done():
        raise TypedLineError("the line is empty; try: peak 320 Hz -4 dB q 1.2")
    whole = cursor.take_word(*_WHOLE)
    if whole is not None:
        changed, sentence = _WHOLE[whole](preset, cursor)
        _expect_end(cursor)
        return Outcome(changed, min(selected, len(changed.chain.sections) - 1), sentence)
    kind = take_kind(cursor)
    if kind is not None and not (kind is Kind.FREE and cursor.is_done()):
        return _add(preset, selected, read_section(kind, cursor))
    if kind is Kind.FREE:
        cursor = Cursor(tokenize("free"))  # alone it is an edit: make the selected section free
    if cursor.take_word("move"):
        return _move(preset, cursor)
    indices = _take_sections(preset.chain, selected, cursor)
    word = cursor.take_word(*_STRUCTURE_WORDS)
    if word is not None:
        return _restructure(preset, indices, word, cursor)
    return _edit(preset, indices, cursor)


def _expect_end(cursor: Cursor) -> None:
    token = cursor.peek()
    if token is not None:
        raise TypedLineError(f"{token.text} is left over at the end of the line; leave it out")


def _add(preset: Preset, selected: int, section: Section) -> Outcome:
    sections = list(preset.chain.sections)
    index = selected + 1 if selected >= 0 else len(sections)
    sections.insert(index, section)
    return _outcome(preset, sections, index)


def _outcome(preset: Preset, sections: list[Section], index: int, words: str = "") -> Outcome:
    chain = preset.chain.with_sections(sections)
    sentence = words or describe_section(chain.sections[index], index + 1, chain.sample_rate_hz)
    return Outcome(replace(preset, chain=chain), index, sentence)


def _take_sections(chain: Chain, selected: int, cursor: Cursor) -> list[int]:
    """Read which sections a line is about: a number, a name, ``all``, or else the selected one."""
    if cursor.take_word("all"):
        if not chain.sections:
            raise TypedLineError("the chain is empty; add a section first, such as notch 50 Hz")
        return list(range(len(chain.sections)))
    token = cursor.peek()
    if token is None:
        raise TypedLineError("the line is empty")
    named = [index for index, one in enumerate(chain.sections) if one.name and one.name.lower() == token.text.lower()]
    is_word_of_grammar = token.sort == "word" and token.plain in (*EDIT_WORDS, *_STRUCTURE_WORDS)
    if named and not is_word_of_grammar:
        cursor.take()
        return named
    if token.sort == "number" and not token.unit and not token.is_signed and token.value == int(token.value):
        cursor.take()
        return [_index(chain, token)]
    if token.sort in ("word", "quoted") and not is_word_of_grammar:
        raise TypedLineError(_unknown(token, chain))
    if selected < 0:
        raise TypedLineError("no section is selected; add one first, such as notch 50 Hz")
    return [selected]


def _index(chain: Chain, token: Token) -> int:
    count = len(chain.sections)
    if not 1 <= token.value <= count:
        has = f"the chain has {count} sections" if count else "the chain is empty"
        raise TypedLineError(f"section {token.text} does not exist: {has}")
    return int(token.value) - 1


def _unknown(token: Token, chain: Chain) -> str:
    known = [kind.value for kind in Kind] + [one.name for one in chain.sections if one.name]
    known += [*EDIT_WORDS, *_STRUCTURE_WORDS, *_WHOLE, "all", "undo", "redo"]
    near = difflib.get_close_matches(token.plain, known, n=1, cutoff=0.6)
    hint = f"did you mean {near[0]}?" if near else "try: peak 320 Hz -4 dB q 1.2"
    return f"{token.text} is no kind, section or word of the typed line; {hint}"


def _move(preset: Preset, cursor: Cursor) -> Outcome:
    start = _index(preset.chain, cursor.number("move", ""))
    if not cursor.take_word("to"):
        raise TypedLineError("move must be followed by two numbers: move 3 to 1")
    end = _index(preset.chain, cursor.number("to", ""))
    _expect_end(cursor)
    return _moved(preset, start, end)


def _moved(preset: Preset, start: int, end: int) -> Outcome:
    sections = list(preset.chain.sections)
    sections.insert(end, sections.pop(start))
    return _outcome(preset, sections, end, f"section {start + 1} is now section {end + 1}")


def _restructure(preset: Preset, indices: list[int], word: str, cursor: Cursor) -> Outcome:
    _expect_end(cursor)
    sections = list(preset.chain.sections)
    if word == "remove":
        kept = [one for index, one in enumerate(sections) if index not in indices]
        numbers = ", ".join(str(index + 1) for index in indices)
        selected = min(indices[0], len(kept) - 1)
        chain = preset.chain.with_sections(kept)
        return Outcome(replace(preset, chain=chain), selected, f"removed section {numbers}")
    if len(indices) != 1:
        raise TypedLineError(f"one section at a time can be moved {word}")
    end = indices[0] + (-1 if word == "up" else 1)
    if not 0 <= end < len(sections):
        raise TypedLineError(f"section {indices[0] + 1} cannot be moved {word}: it is at the end of the chain")
    return _moved(preset, indices[0], end)


def _edit(preset: Preset, indices: list[int], cursor: Cursor) -> Outcome:
    edits = read_edits(cursor)
    if not edits:
        raise TypedLineError("say what to change, such as 2 +1.5 dB, or 2 remove")
    chain = preset.chain
    sections = list(chain.sections)
    for index in indices:
        for edit in edits:
            sections[index] = edit(sections[index], chain.sample_rate_hz)
    words = f"{len(indices)} sections changed" if len(indices) > 1 else ""
    return _outcome(preset, sections, indices[0], words)
