"""Coefficient words: everything that is lost between a wanted number and a stored one lives here.

Round to nearest, ties to even, in every format (IEEE 754 for floating point; the same rule for fixed point). A fixed
word has the length of the signal's word; words that meet in one accumulator share the smallest m (0 or more) of Qm.n
that holds them all. The wanted numbers are doubles, so words of more than 53 bits gain nothing over that.
"""

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from tonebench.core.design import PoleZero
from tonebench.target.arithmetic import NumberFormat, Structure
from tonebench.target.structures import GROUPS, Form, Transfer, form_of, transfer, wanted_words

# A word over this is called not held, in any format: 2^100 is over 600 dB, and its square is still a double.
LARGEST_MAGNITUDE = 2.0**100


@dataclass(frozen=True, slots=True)
class RoundedSection:
    """A section as a target stores it.

    Attributes
    ----------
    form : Form
        How the words are read.
    words : tuple of Fraction
        Exact values, in the order of ``names``; empty where the format cannot hold them.
    integer_bits : tuple of int
        Fixed point: m of each group's words; empty for floating point.
    transfer : Transfer or None
        What the words really make; None where they are not held.
    delay_samples, identity : int
        The section's.

    """

    form: Form
    words: tuple[Fraction, ...]
    integer_bits: tuple[int, ...]
    transfer: Transfer | None
    delay_samples: int
    identity: int

    @property
    def names(self) -> tuple[str, ...]:
        """The words' names, group after group."""
        return tuple(name for group in GROUPS[self.form] for name in group)

    @property
    def is_held(self) -> bool:
        """Whether the format can hold the section at all."""
        return self.transfer is not None


def round_section(realised: PoleZero, number_format: NumberFormat, structure: Structure) -> RoundedSection:
    """Return the words of a section in a format and structure."""
    form = form_of(realised, structure)
    wanted = wanted_words(realised, form)
    words: list[Fraction] = []
    integer_bits: list[int] = []
    start = 0
    for group in GROUPS[form]:
        rounded = round_words(wanted[start : start + len(group)], number_format)
        start += len(group)
        if rounded is None:
            return RoundedSection(form, (), (), None, realised.delay_samples, realised.identity)
        words += rounded.words
        if rounded.integer_bits is not None:
            integer_bits.append(rounded.integer_bits)
    exact = tuple(words)
    made = transfer(form, exact)
    return RoundedSection(form, exact, tuple(integer_bits), made, realised.delay_samples, realised.identity)


@dataclass(frozen=True, slots=True)
class RoundedWords:
    """Words that share one shift: exact values, and m of Qm.n (None for floating point)."""

    words: tuple[Fraction, ...]
    integer_bits: int | None


def round_words(values: tuple[float, ...], number_format: NumberFormat) -> RoundedWords | None:
    """Round numbers to the words of a format; None where it cannot hold them."""
    if not all(math.isfinite(value) and abs(value) <= LARGEST_MAGNITUDE for value in values):
        return None
    if number_format.is_float:
        return RoundedWords(tuple(_float_word(value, number_format) for value in values), None)
    largest = max((abs(value) for value in values), default=0.0)
    for integer_bits in range(max(math.frexp(largest)[1] - 1, 0), number_format.word_bits):
        words = round_to_step(values, number_format.word_bits - 1 - integer_bits)
        if all(-(2**integer_bits) <= word < 2**integer_bits for word in words):
            return RoundedWords(words, integer_bits)
    return None


def round_to_step(values: tuple[float, ...], fraction_bits: int) -> tuple[Fraction, ...]:
    """Round numbers to multiples of 2^−fraction_bits, ties to even, without a limit of range."""
    scale = 2**fraction_bits
    return tuple(Fraction(round(Fraction(value) * scale), scale) for value in values)


def _float_word(value: float, number_format: NumberFormat) -> Fraction:
    return Fraction(value if number_format.word_bits == 64 else float(np.float32(value)))
