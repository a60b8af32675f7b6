"""Whether the recursion with the rounded words is stable, decided in exact fractions: no tolerance in it.

Direct forms by the stability triangle |a2| < 1, |a1| < 1 + a2 (E. I. Jury, "Theory and Application of the
z-Transform Method", 1964, for second order); the others by what their own words say.
"""

from fractions import Fraction

from tonebench.target.rounding import RoundedSection
from tonebench.target.structures import Form


def is_section_stable(section: RoundedSection) -> bool:
    """Tell whether every pole that the words make lies inside the unit circle; False where they are not held."""
    if section.transfer is None:
        return False
    one, other = section.words[:2]
    if section.form is Form.COUPLED:
        return one * one + other * other < 1
    if section.form is Form.FIRST_ORDERS:
        return abs(one) < 1 and abs(other) < 1
    if section.form is Form.SVF:
        # The bilinear transform of s² + kg·s + g²: stable exactly when both are positive (Hurwitz).
        return one * one > 0 and one * other > 0
    return is_inside_triangle(section.transfer.a1, section.transfer.a2)


def is_inside_triangle(a1: Fraction, a2: Fraction) -> bool:
    """Tell whether 1 + a1/z + a2/z² has both roots inside the unit circle."""
    return abs(a2) < 1 and abs(a1) < 1 + a2
