"""How numbers are written: degrees that come back as the same radians, whole numbers without a point."""

import math
from decimal import Decimal

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.core.oracles import MP
from tests.strategies import STEADY
from tonebench.files.keys import angle_from_degrees, degrees_text, plain_number

# Every double from 0 to pi by its bits, so that tiny ones come up as often as others.
_PI_BITS = int(np.float64(math.pi).view(np.int64))
angles_rad = st.one_of(
    st.integers(0, _PI_BITS).map(lambda bits: float(np.int64(bits).view(np.float64))),
    st.floats(0.0, math.pi),
    st.integers(0, 1800).map(lambda tenths: math.radians(tenths / 10.0)),
)


@settings(STEADY, max_examples=600)
@given(angles_rad)
def test_every_angle_comes_back_to_the_bit(angle_rad: float) -> None:
    """The text is a plain decimal with a point, as TOML's floats are, and reads back as exactly this double."""
    text = degrees_text(angle_rad)
    assert angle_from_degrees(Decimal(text)) == angle_rad
    assert set(text) <= set("0123456789.")
    assert text.count(".") == 1
    assert not text.startswith(".")
    assert not text.endswith(".")


@settings(STEADY, max_examples=200)
@given(st.decimals(0, 180, places=7))
def test_degrees_are_rounded_once(degrees: Decimal) -> None:
    """Against pi/180 at 50 digits: the nearest double, which a product of two doubles often misses."""
    exact = MP.mpf(str(degrees)) * MP.pi / 180
    assert angle_from_degrees(degrees) == float(exact)


def test_a_product_of_doubles_would_not_do() -> None:
    """The reason for decimals: some radians are not reached from any text through math.radians of its own degrees."""
    generator = np.random.default_rng(11)
    missed = [one for one in generator.uniform(0.0, math.pi, 2000) if math.radians(math.degrees(one)) != one]
    assert missed
    assert all(angle_from_degrees(Decimal(degrees_text(float(one)))) == one for one in missed)


@pytest.mark.parametrize(("degrees", "text"), [("7.5", "7.5"), ("0", "0.0"), ("90", "90.0"), ("0.375", "0.375")])
def test_round_degrees_stay_short(degrees: str, text: str) -> None:
    """What a hand would type is what is written."""
    assert degrees_text(angle_from_degrees(Decimal(degrees))) == text


@pytest.mark.parametrize(
    ("value", "text"), [(48000.0, "48000"), (0.7071, "0.7071"), (-3.0, "-3"), (1e7, "10000000.0"), (math.inf, "inf")]
)
def test_whole_numbers_have_no_point(value: float, text: str) -> None:
    """Of moderate size; the value is the same."""
    assert str(plain_number(value)) == text
    assert plain_number(value) == value
