"""The keys of the screen: one table that makes both the bindings and the help, so that neither can lie.

No key needs Alt, Ctrl or a function key; those with Ctrl are other ways to the same action.
"""

from dataclasses import dataclass
from typing import Final

from textual.binding import Binding


@dataclass(frozen=True, slots=True)
class Key:
    """One action and the keys that call it.

    Attributes
    ----------
    keys : str
        Textual's names, joined by commas.
    shown : str
        What the help and the row of hints call them.
    action : str
        Textual's action.
    words : str
        What it does, as the help says it.
    hint : str
        One word or two for the row of hints; empty leaves it out there.
    is_priority : bool
        The screen would take the key otherwise.

    """

    keys: str
    shown: str
    action: str
    words: str
    hint: str = ""
    is_priority: bool = False


HEAR: Final = (
    Key("space", "Space", "play", "play or stop; after the guard tripped: re-arm", "play"),
    Key("m", "m", "mute", "mute, and unmute", "mute"),
    Key("i", "i", "hear('input')", "hear the input: the clip as it is"),
    Key("o", "o", "hear('output')", "hear the output: the clip through the chain"),
    Key("d", "d", "hear('change')", "hear the change: what the chain takes away or adds", "input output change"),
    Key("left_curly_bracket", "{", "level(-1)", "level down by 1 dB"),
    Key("right_curly_bracket", "}", "level(1)", "level up by 1 dB, at most 0 dB", "level"),
)
SHAPE: Final = (
    Key("left", "←", "pitch(-1)", "pole lower in pitch by one step"),
    Key("right", "→", "pitch(1)", "pole higher in pitch by one step", "pitch"),
    Key("up", "↑", "ring(1)", "pole rings longer by one step"),
    Key("down", "↓", "ring(-1)", "pole rings shorter by one step", "ring"),
    Key("minus", "-", "gain(-1)", "gain down by one step"),
    Key("equals_sign,plus", "=", "gain(1)", "gain up by one step (also +)", "gain"),
    Key("left_square_bracket", "[", "step(-1)", "larger step"),
    Key("right_square_bracket", "]", "step(1)", "smaller step", "step"),
    Key("p", "p", "peak", "section onto the clip's spectral peak nearest it", "peak"),
)
CHAIN: Final = (
    Key("tab", "Tab", "section(1)", "next section", "section", is_priority=True),
    Key("shift+tab", "Shift+Tab", "section(-1)", "section before", is_priority=True),
    *(Key(str(n), str(n), f"number({n})", f"section {n}") for n in range(1, 10)),
    Key(
        "a", "a", "add", "add a section after this one: type it, or Enter for the one offered", "add", is_priority=True
    ),
    Key("x", "x", "remove", "remove this section", "remove"),
    Key("b", "b", "bypass", "bypass this section, or take it back in", "bypass"),
    Key("less_than_sign", "<", "reorder(-1)", "section one place earlier"),
    Key("greater_than_sign", ">", "reorder(1)", "section one place later", "move"),
    Key("u,ctrl+z", "u", "undo", "undo", "undo"),
    Key("U,ctrl+y", "U", "redo", "redo", "redo"),
)
LOOK: Final = (
    Key("g", "g", "chart", "next chart, where one is shown at a time", "chart"),
    Key("f", "f", "findings", "all findings, with what to do about them", "findings"),
    Key("question_mark", "?", "help", "this help", "help"),
    Key("escape", "Esc", "cancel", "leave the typed line, or close help and findings"),
)
KEEP: Final = (
    Key("enter", "Enter", "type", "open the typed line", "type", is_priority=True),
    Key("S,ctrl+s", "S", "save", "save; a new or bundled preset asks for a file name", "save", is_priority=True),
    Key("e", "e", "export", "export for the build", "export", is_priority=True),
    Key("q,ctrl+q,ctrl+c", "q", "quit", "quit; with unsaved work, press it twice", "quit"),
)
GROUPS: Final = (("Hear", HEAR), ("Shape", SHAPE), ("Chain", CHAIN), ("Look", LOOK), ("Keep", KEEP))
KEYS: Final = tuple(key for _, keys in GROUPS for key in keys)

# These open the typed line. They act before the next key is looked at (priority), so that what is typed fast behind
# them is text and not commands; the application hands them on while something else has the keys.
OPENING: Final = frozenset({"add", "type", "save", "export"})

# Pairs that the row of hints writes together, and the order there: what is needed most comes first, since a narrow
# terminal cuts the row at its end. Help and quit are always there.
_HINTS: Final[tuple[tuple[str, str], ...]] = (
    ("Space", "play"), ("←→", "pitch"), ("↑↓", "ring"), ("-=", "gain"), ("Enter", "type"), ("a", "add"),
    ("[]", "step"), ("Tab", "section"), ("S", "save"), ("u", "undo"), ("p", "peak"), ("m", "mute"), ("iod", "hear"),
    ("{}", "level"), ("g", "chart"), ("b", "bypass"), ("x", "remove"), ("<>", "move"), ("e", "export"),
    ("f", "findings"), ("U", "redo"),
)  # fmt: skip
_ALWAYS: Final = (("?", "help"), ("q", "quit"))
_GAP: Final = "  "

# ASCII terminals have no arrows.
PLAIN_ARROWS: Final = str.maketrans({"←": "<-", "→": " ->", "↑": "up", "↓": " down"})


def bindings() -> list[Binding]:
    """Return the table as Textual's bindings."""
    return [Binding(key.keys, key.action, key.words, show=False, priority=key.is_priority) for key in KEYS]


def hints(width: int, *, is_one_chart: bool = True) -> list[tuple[str, str]]:
    """Return the pairs of key and word that fit a row of this width."""
    wanted = [pair for pair in _HINTS if is_one_chart or pair[0] != "g"]
    room = width - 2 - sum(_length(pair) for pair in _ALWAYS)
    kept = []
    for pair in wanted:
        room -= _length(pair)
        if room < 0:
            break
        kept.append(pair)
    return [*kept, *_ALWAYS]


def _length(pair: tuple[str, str]) -> int:
    return len(pair[0]) + 1 + len(pair[1]) + len(_GAP)


def help_rows() -> list[tuple[str, list[tuple[str, str]]]]:
    """Return the groups of the help, each with rows of keys and words; the nine numbers share one row."""
    groups = []
    for title, keys in GROUPS:
        rows = [(key.shown, key.words) for key in keys if not key.shown.isdigit()]
        if keys is CHAIN:
            rows.insert(2, ("1 to 9", "section by its number"))
        groups.append((title, rows))
    return groups
