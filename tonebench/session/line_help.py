"""What the typed line understands, as a table of examples; each of them is tested."""

from tonebench.core.kinds import Kind
from tonebench.session.line_chain import CHAIN_WORDS
from tonebench.session.line_edits import EDIT_WORDS

# Each example and what it does; they work on a chain whose section 1 is a peak, 2 a notch named hum, 3 a free section.
HELP: tuple[tuple[str, str], ...] = (
    ("peak 320 Hz -4 dB q 1.2", "add a section after the selected one"),
    ("notch 50.02 Hz radius 0.9995", "a width may be q, ring, radius or bandwidth"),
    ("low shelf 120 Hz -3 dB", "without a width: q 0.7071, peak 1, notch 10"),
    ("high-pass 80 Hz order 1", "one pole: shelves, low-, high- and all-pass"),
    ("resonator 440 Hz ring 0.8 s -6 dB", "a bell"),
    ("free poles 0.999 at 7.5 deg zeros 1 -1 gain -60 dB", "poles and zeros by hand"),
    ("50,02 Hz", "set the frequency of the selected section; comma or point"),
    ("+1.5 dB", "signed numbers are relative"),
    ("gain -4 dB", "set the gain"),
    ("2 q 9", "number or name of a section first"),
    ("hum ring 0.3 s", "the same by name"),
    ("all ring x0.8", "every section"),
    ("2 bandwidth 5 Hz", "in Hz, or in oct"),
    ("2 ring +10 %", "relative"),
    ("2 +5 cents", "move the pole's pitch"),
    ("2 angle 0.375 deg", "turn the pole, radius kept"),
    ("2 pole 0.9996 at 0.375 deg", "put the pole there"),
    ("2 frequency x1.01", "multiply"),
    ("3 poles 0.99 at 30 deg", "free sections only"),
    ("3 zeros 1 -1", "real zeros"),
    ("3 at 1000 Hz", "the gain of a free section is its level there"),
    ("2 name mains", "name a section"),
    ("2 bypass", "also bypass on, bypass off"),
    ("2 polarity -", "invert"),
    ("2 delay 3", "whole samples"),
    ("1 kind low shelf", "another kind with the same numbers"),
    ("2 free", "keep poles and zeros as they are, by hand from now on"),
    ("3 up", "also down, or move 3 to 1"),
    ("move 3 to 1", "put a section elsewhere"),
    ("2 remove", "take a section out"),
    ("chain gain -3 dB", "after the last section"),
    ("chain sum", "also chain series"),
    ("chain rate 44100", "Hz and seconds kept"),
    ("chain name Boat house", "name the chain"),
    ("target f32/tdf2", "the arithmetic that ships"),
    ("build rates 44100 48000 96000", "sample rates of the build"),
    ("accept ring-after-tone 2 up to 0.5 because nothing sings there", "a finding that is wanted"),
    ("undo", "also redo"),
)

_FIRST_WORDS = (
    *(kind.value for kind in Kind),
    *EDIT_WORDS,
    *("all", "move", "remove", "up", "down", "chain", "target", "build rates", "accept", "undo", "redo"),
)


def complete(text: str) -> tuple[str, ...]:
    """Return lines that the text could become, for completion: first words, and words of the chain."""
    plain = text.lstrip().lower()
    if plain.startswith("chain "):
        return tuple(f"chain {word}" for word in CHAIN_WORDS if f"chain {word}".startswith(plain))
    if not plain:
        return ()
    return tuple(dict.fromkeys(word for word in _FIRST_WORDS if word.startswith(plain) and word != plain))
