"""What a build computes in: number format, structure, and the rules of its arithmetic.

Written FORMAT/STRUCTURE: ``f32/tdf2``, ``q31/df1``, ``q1.14/coupled``. Fixed point is named by its integer and
fraction bits: Qm.n has 1 sign + m + n bits; q15 is Q0.15 and q31 is Q0.31.
"""

import re
from dataclasses import dataclass
from enum import StrEnum

from tonebench.errors import InvalidValueError, must_be

LARGEST_WORD_BITS = 64


class Structure(StrEnum):
    """How the second-order recursion is arranged."""

    DF1 = "df1"
    DF2 = "df2"
    TDF2 = "tdf2"
    COUPLED = "coupled"
    SVF = "svf"


class Rounding(StrEnum):
    """What a fixed-point product or sum loses its low bits to."""

    NEAREST = "nearest"
    FLOOR = "floor"
    TOWARD_ZERO = "toward_zero"


class Products(StrEnum):
    """Whether a product keeps all its bits until the accumulator is rounded, or only its high word."""

    FULL = "full"
    HIGH_WORD = "high_word"


class Overflow(StrEnum):
    """What a fixed-point value over its range becomes."""

    SATURATE = "saturate"
    WRAP = "wrap"


@dataclass(frozen=True, slots=True)
class NumberFormat:
    """A word format for the signal.

    Attributes
    ----------
    is_float : bool
    integer_bits, fraction_bits : int
        Fixed point: m and n of Qm.n. Floating point: 0 and the stored bits of the significand (23 or 52).

    """

    is_float: bool
    integer_bits: int
    fraction_bits: int

    @property
    def word_bits(self) -> int:
        """Bits of a whole word."""
        if self.is_float:
            return 32 if self.fraction_bits == 23 else 64
        return 1 + self.integer_bits + self.fraction_bits

    def __str__(self) -> str:
        """Return the name as it is written in a preset."""
        if self.is_float:
            return f"f{self.word_bits}"
        if self.integer_bits == 0 and self.fraction_bits in (15, 31):
            return f"q{self.fraction_bits}"
        return f"q{self.integer_bits}.{self.fraction_bits}"


F64 = NumberFormat(is_float=True, integer_bits=0, fraction_bits=52)
F32 = NumberFormat(is_float=True, integer_bits=0, fraction_bits=23)


def parse_format(text: str) -> NumberFormat:
    """Read ``f64``, ``f32``, ``q15``, ``q31`` or ``qM.N``.

    Raises
    ------
    InvalidValueError
        If it is none of them, or the word is longer than 64 bits.

    """
    plain = text.strip().lower()
    if plain in ("f64", "f32"):
        return F64 if plain == "f64" else F32
    match = re.fullmatch(r"q(\d{1,3})(?:\.(\d{1,3}))?", plain)
    if match is None:
        raise InvalidValueError(must_be("format", "f64, f32, q15, q31 or qM.N such as q1.14", text))
    if match[2] is None:
        if plain not in ("q15", "q31"):
            raise InvalidValueError(must_be("format", "q15, q31 or qM.N such as q1.14", text))
        return NumberFormat(is_float=False, integer_bits=0, fraction_bits=int(match[1]))
    result = NumberFormat(is_float=False, integer_bits=int(match[1]), fraction_bits=int(match[2]))
    if not 8 <= result.word_bits <= LARGEST_WORD_BITS or result.fraction_bits < 1:
        rule = f"8 to {LARGEST_WORD_BITS} bits with its sign, one of them at least a fraction bit"
        raise InvalidValueError(must_be("format", rule, text))
    return result


@dataclass(frozen=True, slots=True)
class Target:
    """What the build computes in.

    Attributes
    ----------
    number_format : NumberFormat
        Of the signal; coefficient words have the same length.
    structure : Structure
    accumulator_bits : int or None
        None: wide enough to hold every product and sum exactly.
    rounding, products, overflow
        Rules of fixed point.
    is_fused : bool
        Floating point multiplies and adds in one rounding.
    is_flushing_subnormals : bool

    """

    number_format: NumberFormat = F32
    structure: Structure = Structure.TDF2
    accumulator_bits: int | None = None
    rounding: Rounding = Rounding.NEAREST
    products: Products = Products.FULL
    overflow: Overflow = Overflow.SATURATE
    is_fused: bool = False
    is_flushing_subnormals: bool = False

    def __post_init__(self) -> None:
        if self.accumulator_bits is not None and not self.number_format.word_bits <= self.accumulator_bits <= 256:
            rule = f"from the word length ({self.number_format.word_bits}) to 256"
            raise InvalidValueError(must_be("accumulator_bits", rule, self.accumulator_bits))

    def __str__(self) -> str:
        """Return FORMAT/STRUCTURE."""
        return f"{self.number_format}/{self.structure}"


def parse_target(text: str) -> Target:
    """Read FORMAT/STRUCTURE with the default rules.

    Raises
    ------
    InvalidValueError
        If either part is unknown.

    """
    name, slash, structure = text.strip().lower().partition("/")
    known = [one.value for one in Structure]
    if not slash or structure not in known:
        rule = f"FORMAT/STRUCTURE, such as f32/tdf2; structures are {', '.join(known)}"
        raise InvalidValueError(must_be("arithmetic", rule, text))
    return Target(parse_format(name), Structure(structure))
