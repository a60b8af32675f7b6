"""The exported text: what is refused, what is said, numbers that read back, and names that are identifiers."""

import re
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tonebench.builds import LANGUAGES, default_prefix, export_text
from tonebench.builds.digest import digest
from tonebench.builds.naming import RESERVED_WORDS, checked_prefix, comment_text
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.errors import ExportError
from tonebench.target.arithmetic import Target, parse_target

RATE_HZ = 48000.0
F32 = parse_target("f32/tdf2")
NOTCH = replace(by_kind(Kind.NOTCH, 50.02, ("radius", 0.9995)), name="hum")
CHAIN = Chain("Boathouse charger", RATE_HZ, (NOTCH, by_kind(Kind.PEAK, 320.0, ("q", 1.2), -4.0)))


def table(text: str) -> list[list[str]]:
    """Return the words of the coefficient table, by a reader that knows only C's braces."""
    body = text.split("_coefficients[", 1)[1].split("= {", 1)[1].split("};", 1)[0]
    return [[word.strip() for word in row.split(",")] for row in re.findall(r"\{([^}]*)\}", body)]


@pytest.mark.parametrize("name", ["q15/df1", "q1.14/tdf2", "f32/coupled", "f64/svf"])
def test_targets_not_offered_name_what_is(name: str) -> None:
    """Fixed point, coupled and svf come later; the refusal says what there is."""
    with pytest.raises(ExportError, match=rf"^{re.escape(name)} cannot be exported yet; what is offered is f32 or f64"):
        export_text(CHAIN, parse_target(name), "c")


def test_fused_targets_are_refused() -> None:
    """The text is written for separate roundings."""
    with pytest.raises(ExportError, match="fused multiply-add cannot be exported yet"):
        export_text(CHAIN, Target(is_fused=True), "c")


def test_unknown_language_names_the_known() -> None:
    """A language that is not there is refused with the list."""
    assert LANGUAGES == ("c",)
    with pytest.raises(ExportError, match="language must be one of c, got 'cobol'"):
        export_text(CHAIN, F32, "cobol")


@pytest.mark.parametrize("poles", [RealRoots((1.0,)), ConjugatePair(1.0001, 0.3), RealRoots((-1.5, 0.2))])
def test_unstable_is_refused_unless_forced(poles: ConjugatePair | RealRoots) -> None:
    """An unstable chain leaves only by force, and the file then says so."""
    chain = CHAIN.with_sections((NOTCH, Section(ByHand(poles))))
    with pytest.raises(
        ExportError, match=r"section 2 of this chain is unstable with the coefficients of f32/tdf2; make"
    ):
        export_text(chain, F32, "c")
    assert "UNSTABLE: section 2" in export_text(chain, F32, "c", is_forced=True)
    assert "UNSTABLE" not in export_text(CHAIN, F32, "c", is_forced=True)


def test_unstable_by_rounding_alone_is_refused() -> None:
    """Stable in doubles, on the circle in float32."""
    chain = CHAIN.with_sections((Section(ByHand(RealRoots((1.0 - 1e-9,)))),))
    assert export_text(chain, parse_target("f64/tdf2"), "c")
    with pytest.raises(ExportError, match="section 1 of this chain is unstable with the coefficients of f32/tdf2"):
        export_text(chain, F32, "c")


def test_bypassed_unstable_section_is_no_obstacle() -> None:
    """What is left out cannot be unstable."""
    chain = CHAIN.with_sections((NOTCH, Section(ByHand(RealRoots((2.0,))), is_bypassed=True)))
    assert "1 bypassed section left out" in export_text(chain, F32, "c")


def test_a_coefficient_out_of_range_is_refused() -> None:
    """What no float holds is an error with the section's number."""
    chain = CHAIN.with_sections((Section(ByHand(NOTCH_POLES, RealRoots((1e200,)))),))
    with pytest.raises(ExportError, match="section 1: a coefficient is out of the range of f64"):
        export_text(chain, parse_target("f64/df1"), "c")


NOTCH_POLES = ConjugatePair(0.9, 0.1)


@settings(max_examples=60, deadline=None)
@given(st.floats(20.0, 20000.0), st.floats(0.1, 200.0), st.floats(-24.0, 24.0), st.sampled_from(["f32", "f64"]))
def test_coefficients_read_back(frequency_hz: float, q: float, gain_db: float, name: str) -> None:
    """Every printed decimal reads back to the word itself, and no shorter decimal would."""
    chain = Chain("", RATE_HZ, (by_kind(Kind.PEAK, frequency_hz, ("q", q), gain_db),))
    (row,) = table(export_text(chain, parse_target(f"{name}/df1"), "c"))
    wanted = from_chain(chain).rows[0, [0, 1, 2, 4, 5]]
    for word, value in zip(row, wanted, strict=True):
        if name == "f32":
            assert word.endswith("f")
            assert np.float32(word[:-1]) == np.float32(value)
            assert len(re.sub(r"e.*|[-.f]", "", word).strip("0")) <= 9  # nine digits always do for binary32
        else:
            assert float(word) == value
            assert word == repr(float(value))


def test_the_header_says_what_it_is() -> None:
    """Name, rate, target, sections with f0 and pole, convention, digest and format; no date, version or licence."""
    text = export_text(CHAIN, F32, "c")
    for words in (
        "Boathouse charger",
        "sample rate 48000 Hz, series",
        "target f32/tdf2, 2 sections",
        "1: notch (hum), f0 50.02 Hz, radius 0.9995, pole pair radius 0.9995 angle 0.374",
        "2: peak, f0 320 Hz, q 1.2, gain -4 dB",
        "y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2",
        f"preset digest {digest(CHAIN, F32)}",
        "format 1",
        "#ifndef boathouse_charger_H_INCLUDED",
        "static inline void boathouse_charger_process(boathouse_charger_state *state, const float *in, float *out,",
    ):
        assert words in text, words
    for word in ("tonebench", "licen", "copyright", "SPDX", "2026", "version"):
        assert word.lower() not in text.lower()


def test_same_chain_same_bytes() -> None:
    """The text depends on chain, target and prefix only: not on identities, nor on 48000 or 48000.0."""
    again = Chain(CHAIN.name, 48000, tuple(replace(one, identity=one.identity + 5) for one in CHAIN.sections))
    assert export_text(CHAIN, F32, "c") == export_text(again, F32, "c")
    assert export_text(CHAIN, F32, "c", "a") != export_text(CHAIN, F32, "c", "b")


@pytest.mark.parametrize(
    "other",
    [
        replace(CHAIN, gain_db=-0.1),
        replace(CHAIN, name="other"),
        CHAIN.with_sections(CHAIN.sections[::-1]),
        CHAIN.with_section(0, replace(NOTCH, delay_samples=1)),
    ],
)
def test_the_digest_follows_the_chain(other: Chain) -> None:
    """Any change of chain or target is another digest."""
    assert re.fullmatch("[0-9a-f]{64}", digest(CHAIN, F32))
    assert digest(other, F32) != digest(CHAIN, F32)
    assert digest(CHAIN, parse_target("f32/df1")) != digest(CHAIN, F32)


@pytest.mark.parametrize(
    ("name", "prefix"),
    [
        ("Boathouse charger", "boathouse_charger"),
        ("Übung 2", "ubung_2"),
        ("2 bells", "chain_2_bells"),
        ("int", "chain_int"),
        ("", "chain"),
        ("零", "chain"),
        ("  --x--  ", "x"),
    ],
)
def test_default_prefix(name: str, prefix: str) -> None:
    """Names become identifiers."""
    assert default_prefix(name) == prefix


@settings(max_examples=200, deadline=None)
@given(st.text(max_size=300))
def test_any_name_gives_a_usable_prefix_and_a_harmless_comment(name: str) -> None:
    """Whatever the name: an identifier that is no reserved word, and one harmless line."""
    prefix = default_prefix(name)
    assert checked_prefix(prefix) == prefix
    assert prefix not in RESERVED_WORDS
    comment = comment_text(name)
    assert re.fullmatch(r"[A-Za-z0-9 _.,:;()+=%#@&-]{0,100}", comment)


@pytest.mark.parametrize("prefix", ["2x", "a b", "a__b", "_a", "a_", "ä", "x" * 49, "a*/", "", "while"])
def test_prefixes_refused(prefix: str) -> None:
    """What is no identifier in every language is refused with a proposal."""
    with pytest.raises(ExportError, match=r"prefix must be .*; try [a-z]"):
        checked_prefix(prefix)


def test_the_whole_text_is_ascii_with_line_feeds() -> None:
    """The bytes are the same on every system."""
    text = export_text(CHAIN, F32, "c")
    assert text.isascii()
    assert "\r" not in text
    assert text.endswith("#endif /* boathouse_charger_H_INCLUDED */\n")
