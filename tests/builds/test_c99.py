"""The C export, compiled and run: against a bit-exact model, scipy in doubles, and on real speech with hum."""

import math
import subprocess
import wave
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from tests.builds.models import float_model, reference
from tests.builds.noise_model import predicted_noise_rms
from tests.builds.programs import run_export
from tests.compiling import STRICT, compile_program, is_missing, needs_compiler, run_program
from tonebench.builds import export_text
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.rounded import round_chain

pytestmark = [pytest.mark.compiler, needs_compiler]

RATE_HZ = 48000.0
SPEECH = Path("/usr/share/sounds/alsa/Front_Center.wav")
STRUCTURES = ("tdf2", "df1", "df2")


def hum_chain(**changes: object) -> Chain:
    """Return a notch on the hum, a peak and a high-pass."""
    sections = (
        by_kind(Kind.NOTCH, 50.0, ("q", 10.0)),
        by_kind(Kind.PEAK, 320.0, ("q", 1.2), -4.0),
        by_kind(Kind.HIGH_PASS, 30.0),
    )
    return replace(Chain("hum", RATE_HZ, sections, gain_db=-1.5), **changes)  # type: ignore[arg-type]


def noise(frames: int, seed: int) -> NDArray[np.float64]:
    """Return white noise of peak 0.5 whose samples are float32 numbers."""
    generator = np.random.default_rng(seed)
    return generator.uniform(-0.5, 0.5, frames).astype(np.float32).astype(np.float64)


def speech_and_hum() -> NDArray[np.float64]:
    """Return alsa-utils' Front_Center.wav (Debian package alsa-utils) with a 50 Hz hum of 0.1 added, as float32."""
    with wave.open(str(SPEECH)) as recording:
        assert (recording.getframerate(), recording.getsampwidth()) == (48000, 2)
        words = np.frombuffer(recording.readframes(recording.getnframes()), dtype="<i2")[:: recording.getnchannels()]
    hum = 0.1 * np.sin(2.0 * np.pi * 50.0 / RATE_HZ * np.arange(words.size))
    return np.asarray((words / 32768.0 + hum).astype(np.float32).astype(np.float64))


def rounded_rows(chain: Chain, target: str) -> NDArray[np.float64]:
    """Return the rounded coefficients as doubles, in scipy's order."""
    words = [[float(word) for word in one.words] for one in round_chain(chain, parse_target(target)).sections]
    return np.array([[b0, b1, b2, 1.0, a1, a2] for b0, b1, b2, a1, a2 in words])


def test_the_model_by_hand() -> None:
    """The model of y = x + 0.5 y1 answers a click with 1, 1/2, 1/4, in all structures."""
    chain = Chain("", RATE_HZ, (Section(ByHand(RealRoots((0.5,)))),))
    for structure in STRUCTURES:
        made = float_model(from_chain(chain), structure, np.array([1.0, 0.0, 0.0]), np.float32)
        np.testing.assert_array_equal(made, [1.0, 0.5, 0.25])


@pytest.mark.parametrize("structure", STRUCTURES)
@pytest.mark.parametrize("combine", ["series", "sum"])
def test_float32_bit_for_bit(tmp_path: Path, structure: str, combine: str) -> None:
    """Every operation rounds as an independent numpy loop does: series and sum, delay, polarity, gain, bypass."""
    sections = (
        by_kind(Kind.NOTCH, 50.0, ("q", 10.0)),
        replace(by_kind(Kind.PEAK, 700.0, ("q", 2.0), 6.0), delay_samples=7, polarity=-1),
        replace(by_kind(Kind.LOW_PASS, 900.0), is_bypassed=True),
        replace(by_kind(Kind.HIGH_SHELF, 5000.0, ("q", 0.7), -3.0), delay_samples=300),
        Section(ByHand(ConjugatePair(0.99, 0.3), RealRoots((0.5, -1.0)), -20.0)),
    )
    direct_db = -3.0 if combine == "sum" else None
    chain = Chain("parts", RATE_HZ, sections, gain_db=2.5, combine=combine, direct_gain_db=direct_db)
    samples = noise(3000, 5)
    made = run_export(tmp_path, chain, f"f32/{structure}", samples)
    np.testing.assert_array_equal(made, float_model(from_chain(chain), structure, samples, np.float32))


# White model against float32 runs: -2.3 to +3.3 dB [measured while planning]; the arithmetic's own error is at most
# this factor over what the model says. A run of 70,000 frames of noise peaks under 6 times its rms (Gaussian: 4.4).
OWN_ERROR = 10.0 ** (4.0 / 20.0)
CREST = 6.0


@pytest.mark.parametrize("structure", STRUCTURES)
def test_float64_against_scipy(tmp_path: Path, structure: str) -> None:
    """f64 equals the naive loop bit for bit, and scipy within the round-off of both sides."""
    chain = hum_chain()
    coefficients = from_chain(chain)
    samples = noise(40_000, 6)
    made = run_export(tmp_path, chain, f"f64/{structure}", samples)
    np.testing.assert_array_equal(made, float_model(coefficients, structure, samples, np.float64))
    wanted = reference(coefficients, coefficients.rows, samples)
    # A double's ulp is 2^-29 of a float's.
    both = (predicted_noise_rms(coefficients.rows, one, coefficients.gain, samples) for one in (structure, "tdf2"))
    own = OWN_ERROR * 2.0**-29 * math.hypot(*both)
    error = made - wanted
    assert np.sqrt(np.mean(error**2)) <= own
    assert np.max(np.abs(error)) <= CREST * own


@pytest.mark.skipif(is_missing() or not SPEECH.exists(), reason="alsa-utils' Front_Center.wav is not installed")
@pytest.mark.parametrize("structure", STRUCTURES)
def test_float32_on_speech_with_hum(tmp_path: Path, structure: str) -> None:
    """On a real recording with hum, f32 is off from scipy in doubles by its own round-off and its words, no more."""
    chain = hum_chain()
    samples = speech_and_hum()
    made = run_export(tmp_path, chain, f"f32/{structure}", samples)
    coefficients = from_chain(chain)
    np.testing.assert_array_equal(made, float_model(coefficients, structure, samples, np.float32))
    rows = rounded_rows(chain, f"f32/{structure}")
    own = OWN_ERROR * predicted_noise_rms(rows, structure, coefficients.gain, samples)
    error = made - reference(coefficients, rows, samples)
    assert np.sqrt(np.mean(error**2)) <= own
    assert np.max(np.abs(error)) <= CREST * own
    # Against the unrounded chain the words' own change of the response comes on top: at most ‖h' − h‖₁ times the peak.
    unit = np.zeros(200_000)
    unit[0] = 1.0
    changed = np.sum(np.abs(reference(coefficients, rows, unit) - reference(coefficients, coefficients.rows, unit)))
    error = made - reference(coefficients, coefficients.rows, samples)
    assert np.max(np.abs(error)) <= CREST * own + changed * np.max(np.abs(samples))


def test_the_noise_model_by_hand() -> None:
    """A lone gain of 0.5 has exact products; the model charges them and the sums, 9 roundings of ulp²/12, at most."""
    rows = np.array([[0.5, 0.0, 0.0, 1.0, 0.0, 0.0]])
    samples = np.full(64, 0.75)  # 0.375 and 0.75 · 0.5: an ulp of 2^-25 for y, its product, and the gain's product
    wanted = np.sqrt(3.0 * 2.0**-50 / 12.0)
    assert predicted_noise_rms(rows, "tdf2", 1.0, samples) == pytest.approx(wanted, rel=1e-12)


@pytest.mark.parametrize(
    ("chain", "gain"),
    [
        (Chain("", RATE_HZ), 1.0),
        (Chain("", RATE_HZ, gain_db=-6.0), 10.0 ** (-6.0 / 20.0)),
        (Chain("", RATE_HZ, combine="sum"), 0.0),
        (Chain("", RATE_HZ, combine="sum", direct_gain_db=-6.0), 10.0 ** (-6.0 / 20.0)),
    ],
)
def test_chains_without_sections(tmp_path: Path, chain: Chain, gain: float) -> None:
    """An empty series is its gain, an empty sum only the input that is added."""
    samples = noise(500, 8)
    np.testing.assert_allclose(run_export(tmp_path, chain, "f64/tdf2", samples), gain * samples, rtol=1e-15, atol=0)


HOSTILE = (
    "*/ int x; /*",
    "quote \" and ' and `",
    "line\nfeed\r\n#include <evil.h>\u2028more",
    "trigraph ??/\n??)",
    "backslash \\\nnext",
    "\u202e\u2066turned\u2069 \u0000 \x1b[31m",
    "x" * 10_000 + "*/",
    "Ünïcödé ноль 零 \U0001f600",
    "*\u2215/ *\\\n/ */*/*/",
    "int",
    "",
)


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_names_compile(tmp_path: Path, name: str) -> None:
    """No name can leave its comment, in the chain or a section, and the prefix made of it is an identifier."""
    chain = Chain(name, RATE_HZ, (replace(by_kind(Kind.PEAK, 300.0, ("q", 1.0), 2.0), name=name),))
    text = export_text(chain, parse_target("f32/tdf2"), "c")
    assert text.isascii()
    assert text.count("/*") == text.count("*/")
    assert max(len(line) for line in text.splitlines()) < 250
    sources = {"hostile.h": text, "main.c": '#include "hostile.h"\nint main(void)\n{\n    return 0;\n}\n'}
    assert run_program(compile_program(tmp_path, sources, (*STRICT, "-trigraphs", "-Wtrigraphs")), b"") == b""


_UNIT = """
#include "first.h"
#include "second.h"
#include "first.h"
float {function}(float x);
float {function}(float x)
{{
    first_state one;
    second_state other;
    double y;
    first_reset(&one);
    second_reset(&other);
    first_process(&one, &x, &x, 1);
    y = (double)x;
    second_process(&other, &y, &y, 1);
    return (float)y;
}}
"""
_LINKED = """
float in_one(float x);
float in_other(float x);
int main(void)
{
    return (in_one(0.5f) < in_other(0.5f) || in_one(0.5f) > in_other(0.5f)) ? 1 : 0;
}
"""


def test_two_prefixes_in_two_units_link(tmp_path: Path) -> None:
    """Two exports, each included in two translation units, make one program."""
    sources = {
        "first.h": export_text(hum_chain(), parse_target("f32/df1"), "c", "first"),
        "second.h": export_text(hum_chain(name="x"), parse_target("f64/df2"), "c", "second"),
        "one.c": _UNIT.format(function="in_one"),
        "other.c": _UNIT.format(function="in_other"),
        "main.c": _LINKED,
    }
    run_program(compile_program(tmp_path, sources), b"")


@pytest.mark.skipif(is_missing("c++"), reason="no C++ compiler named c++")
@pytest.mark.parametrize("chain", [hum_chain(), hum_chain(combine="sum", direct_gain_db=0.0), Chain("", RATE_HZ)])
def test_the_header_is_valid_cpp(tmp_path: Path, chain: Chain) -> None:
    """A C++ compiler takes the same header without a warning."""
    delayed = chain.with_sections(replace(one, delay_samples=2) for one in chain.sections)
    (tmp_path / "hum.h").write_text(export_text(delayed, parse_target("f32/tdf2"), "c", "hum"), encoding="ascii")
    (tmp_path / "main.cpp").write_text(
        '#include "hum.h"\nint main() { hum_state s; float x = 1; hum_reset(&s); hum_process(&s, &x, &x, 1); }\n',
        encoding="ascii",
    )
    flags = ["-std=c++17", "-Wall", "-Wextra", "-Wpedantic", "-Wconversion", "-Werror"]
    done = subprocess.run(
        ["c++", *flags, "main.cpp", "-o", "main"],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )
    assert done.returncode == 0, done.stderr


def test_sanitizers_find_nothing(tmp_path: Path) -> None:
    """Delays and blocks stay inside their memory, under the address and undefined-behaviour sanitizers."""
    sections = (replace(by_kind(Kind.PEAK, 700.0, ("q", 2.0), 6.0), delay_samples=5), by_kind(Kind.LOW_PASS, 900.0))
    text = export_text(Chain("", RATE_HZ, sections), parse_target("f32/df1"), "c", "hum")
    main = (
        '#include "hum.h"\nint main(void)\n{\n    hum_state s;\n    float x[7] = {1.0f};\n    size_t i;\n'
        "    hum_reset(&s);\n    for (i = 0; i < 100u; ++i) {\n        hum_process(&s, x, x, i % 8u);\n    }\n"
        "    return 0;\n}\n"
    )
    flags = (*STRICT, "-g", "-fsanitize=address,undefined", "-fno-sanitize-recover=all")
    run_program(compile_program(tmp_path, {"hum.h": text, "main.c": main}, flags), b"")


def test_a_forced_unstable_export_compiles(tmp_path: Path) -> None:
    """By force an unstable chain is exported, and grows as it must."""
    chain = Chain("", RATE_HZ, (Section(ByHand(RealRoots((2.0,)))),))
    made = run_export(tmp_path, chain, "f64/tdf2", np.array([1.0, 0.0, 0.0, 0.0]), is_forced=True)
    np.testing.assert_array_equal(made, [1.0, 2.0, 4.0, 8.0])
