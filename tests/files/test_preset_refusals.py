"""The remaining refusals of a preset's keys, table by table, and the hearing numbers one by one."""

import math
import re
import unicodedata
from dataclasses import replace
from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.strategies import STEADY, names, presets
from tonebench.errors import PresetError, StorageError
from tonebench.files.bundled import bundled_clips, bundled_presets, clip_for_preset, find_clip, find_preset, is_bundled
from tonebench.files.presets import load_preset, parse_preset, save_preset
from tonebench.files.writing import preset_text
from tonebench.session.names import LONGEST_NAME, complaint_about_name
from tonebench.session.preset import Preset

HEAD = 'tonebench = 1\n[chain]\nname = "a"\nsample_rate_hz = 48000\n'
SECTION = "[[section]]\nkind = "
PEAK = SECTION + '"peak"\nfrequency_hz = 100\nq = 1\n'
FREE = SECTION + '"free"\n'
TARGET = '[target]\narithmetic = "q31/df1"\n'

CASES = {
    "no name": ("tonebench = 1\n[chain]\nsample_rate_hz = 48000\n", r"^a: line 2, name: name is missing in \[chain\]"),
    "no rate": (
        'tonebench = 1\n[chain]\nname = "a"\n',
        r"^a: line 2, sample_rate_hz: .* is missing in \[chain\]; give",
    ),
    "no chain": ("tonebench = 1\n", r"^a: line 1, name: name is missing in \[chain\]; give a text in quotes$"),
    "name that is a number": (HEAD.replace('"a"', "3"), r"^a: line 3, name: name must be a text in quotes, got 3"),
    "rate too low": (HEAD.replace("48000", "10"), r"^a: line 4, sample_rate_hz: .* between 1000 and 1e\+06, got 10\.0"),
    "combine": (
        HEAD + 'combine = "product"\n',
        r'^a: line 5, combine: combine must be "series" or "sum", got \'product',
    ),
    "direct in series": (
        HEAD + "direct_gain_db = 0\n",
        r"^a: line 5, direct_gain_db: .* left out for a chain in series",
    ),
    "chain gain": (HEAD + "gain_db = inf\n", r"^a: line 5, gain_db: gain_db must be between -200 and 200 dB, got inf"),
    "line after a sub-table": (HEAD + "[[chain.x]]\n[target]\n" + 'arithmetic = "f32"\n', r"^a: line 7, arithmetic: "),
    "section without a kind": (HEAD + "[[section]]\nq = 1\n", r"^a: line 5, kind: kind is missing in \[section\]"),
    "frequency 0": (HEAD + PEAK.replace("100", "0"), r"^a: line 7, frequency_hz: .* finite number over 0, got 0\.0"),
    "frequency_is": (HEAD + PEAK + 'frequency_is = "zero"\n', r'^a: line 9, frequency_is: .* "peak" or "pole"'),
    "pole of a peak": (HEAD + PEAK + 'frequency_is = "pole"\n', r"^a: line 9, frequency_is: .* any kind but resonator"),
    "order 3": (HEAD + PEAK + "order = 3\n", r"^a: line 9, order: order must be 1 or 2, got 3"),
    "order of a peak": (HEAD + PEAK.replace("q = 1", "order = 1"), r"^a: line 8, order: order must be 2 for a peak"),
    "width of first order": (
        HEAD + PEAK.replace("peak", "low-pass") + "order = 1\n",
        r"^a: line 8, q: q must be left out for first order",
    ),
    "gain of a notch": (HEAD + PEAK.replace("peak", "notch") + "gain_db = 1\n", r"^a: line 9, gain_db: .* no gain"),
    "gain too large": (HEAD + PEAK + "gain_db = 201\n", r"^a: line 9, gain_db: .* between -200 and 200 dB, got 201"),
    "polarity": (HEAD + PEAK + "polarity = 2\n", r"^a: line 9, polarity: polarity must be 1 or -1, got 2"),
    "delay": (HEAD + PEAK + "delay = -1\n", r"^a: line 9, delay: delay must be whole samples from 0 to 65535, got -1"),
    "half a delay": (HEAD + PEAK + "delay = 0.5\n", r"^a: line 9, delay: delay must be a whole number, got 0\.5"),
    "bypass": (HEAD + PEAK + 'bypass = "yes"\n', r"^a: line 9, bypass: bypass must be true or false, got 'yes'"),
    "radius 1": (HEAD + PEAK.replace("q = 1", "radius = 1"), r"^a: line 8, radius: radius must be under 1 for a kind"),
    "radius of real poles": (HEAD + PEAK.replace("q = 1", "radius = 0.1"), r"^a: line 8, radius: .* real and have no"),
    "ring of real poles": (HEAD + PEAK.replace("q = 1", "ring_s = 1e-9"), r"^a: line 8, ring_s: ring_s must be over"),
    "band over half the rate": (HEAD + PEAK.replace("q = 1", "bandwidth_hz = 3e4"), r"^a: line 8, bandwidth_hz: "),
    "poles of a kind": (
        HEAD + PEAK + "poles = {real = [0]}\n",
        r'^a: line 9, poles: poles belongs to .* kind = "free"',
    ),
    "place of a kind's gain": (HEAD + PEAK + "gain_at_hz = 5\n", r"^a: line 9, gain_at_hz: gain_at_hz belongs to"),
    "frequency of a free one": (
        HEAD + FREE + "frequency_hz = 5\n",
        r"^a: line 7, frequency_hz: .* no meaning for a free",
    ),
    "roots that are a list": (HEAD + FREE + "poles = [0.5]\n", r"^a: line 7, poles: poles must be \{ radius = "),
    "real that is a number": (
        HEAD + FREE + "poles = {real = 0.5}\n",
        r"^a: line 7, poles: .* list of numbers in \[ \]",
    ),
    "real with a text": (HEAD + FREE + 'poles = {real = ["a"]}\n', r"^a: line 7, poles: .* list of numbers .* got 'a'"),
    "real nan": (HEAD + FREE + "poles = {real = [nan]}\n", r"^a: line 7, poles: real must be finite numbers, got nan"),
    "angle left out": (
        HEAD + FREE + "poles = {radius = 1}\n",
        r"^a: line 7, poles: angle_deg of poles must be a number",
    ),
    "angle nan": (HEAD + FREE + "poles = {radius = 1, angle_deg = nan}\n", r"line 7, poles: .* 0 and 180, got nan"),
    "angle under 0": (
        HEAD + FREE + "poles = {radius = 1, angle_deg = -0.1}\n",
        r"line 7, poles: .* 0 and 180, got -0\.1",
    ),
    "gain place": (HEAD + FREE + "gain_at_hz = -1\n", r"^a: line 7, gain_at_hz: .* finite frequency of 0 or more"),
    "gain place on a zero": (
        HEAD + FREE + "zeros = {real = [1]}\ngain_at_hz = 0\n",
        r"^a: line 8, gain_at_hz: .* without a zero or a pole on the unit circle",
    ),
    "target without arithmetic": (HEAD + "[target]\n", r"^a: line 5, arithmetic: arithmetic is missing in \[target\]"),
    "format": (HEAD + TARGET.replace("q31", "q7"), r"^a: line 6, arithmetic: format must be q15, q31 or qM\.N"),
    "word": (HEAD + TARGET.replace("q31", "q40.40"), r"^a: line 6, arithmetic: format must be 8 to 64 bits"),
    "rounding": (HEAD + TARGET + 'rounding = "up"\n', r"^a: line 7, rounding: .* one of nearest, floor, toward_zero"),
    "products": (HEAD + TARGET + 'products = "low"\n', r"^a: line 7, products: .* one of full, high_word, got 'low'"),
    "overflow": (HEAD + TARGET + 'overflow = "no"\n', r"^a: line 7, overflow: .* one of saturate, wrap, got 'no'"),
    "accumulator": (HEAD + TARGET + "accumulator_bits = 16\n", r"^a: line 7, accumulator_bits: .* word length \(32\)"),
    "fused": (HEAD + TARGET + "fused = 1\n", r"^a: line 7, fused: fused must be true or false, got 1"),
    "rates": (
        HEAD + "[build]\nsample_rates_hz = 44100\n",
        r"^a: line 6, sample_rates_hz: .* a list of numbers in \[ \]",
    ),
    "low rate": (HEAD + "[build]\nsample_rates_hz = [3]\n", r"^a: line 6, sample_rates_hz: .* between 1000 and 1e\+06"),
    "export without to": (HEAD + '[[export]]\nfile = "a.h"\n', r"^a: line 5, to: to is missing in \[export\]"),
    "export to nothing": (
        HEAD + '[[export]]\nto = ""\nfile = "a.h"\n',
        r"^a: line 6, to: to must be a language such as c",
    ),
    "rooted export": (HEAD + '[[export]]\nto = "c"\nfile = "/tmp/a.h"\n', r"^a: line 7, file: .* preset's own folder"),
    "export on a drive": (
        HEAD + "[[export]]\nto = 'c'\nfile = 'C:\\a.h'\n",
        r"^a: line 7, file: .* preset's own folder",
    ),
    "acceptance of nothing": (HEAD + '[[accept]]\nbecause = "a"\n', r"^a: line 5, code: code is missing in \[accept\]"),
    "acceptance code": (HEAD + '[[accept]]\ncode = "A"\nbecause = "a"\n', r"^a: line 6, code: .* such as pole-moved"),
    "no reason": (HEAD + '[[accept]]\ncode = "a"\nbecause = " "\n', r"^a: line 7, because: .* a reason in words"),
    "accepted section": (HEAD + '[[accept]]\ncode = "a"\nbecause = "b"\nsection = 1.5\n', r"^a: line 8, section: "),
}


@pytest.mark.parametrize("case", list(CASES))
def test_each_key_is_refused_at_its_line(case: str) -> None:
    """File, line, key, rule and value, on one line."""
    text, message = CASES[case]
    with pytest.raises(PresetError, match=message) as caught:
        parse_preset(text, "a")
    assert "\n" not in str(caught.value)


@settings(STEADY, max_examples=400)
@given(
    st.lists(
        st.one_of(
            st.sampled_from(
                (HEAD, PEAK, FREE, TARGET, "[hearing]\n", "[build]\n", "[[export]]\n", "[[accept]]\n", "x", "\n")
            ),
            st.sampled_from(
                ("q = ", "poles = ", "name = ", "sample_rates_hz = ", "gain_db = ", "ring_s = ", "section = ")
            ),
            st.sampled_from(
                ("{}", "[]", "nan\n", "-inf\n", "1e999\n", "true\n", '"""\n', "1979-05-27\n", "0x1f\n", "''\n")
            ),
            st.text(max_size=6),
        ),
        max_size=10,
    )
)
def test_any_text_is_a_preset_or_one_complaint(pieces: list[str]) -> None:
    """Nothing but a PresetError that begins with the file ever comes out."""
    try:
        parse_preset("".join(pieces), "a")
    except PresetError as error:
        complaint = str(error)
    else:
        return
    assert re.match(r"a: .", complaint)
    assert "\n" not in complaint


@settings(STEADY, max_examples=200)
@given(names)
def test_names_of_visible_characters_are_fine(name: str) -> None:
    """What the strategies draw, in any script."""
    assert complaint_about_name(name) == ""


@settings(STEADY, max_examples=200)
@given(st.text(st.characters(categories=("Cc", "Cf", "Zl", "Zp")), min_size=1, max_size=3), st.text(max_size=5))
def test_names_with_what_cannot_be_seen_are_not(hidden: str, rest: str) -> None:
    """Control and direction characters, and line ends of any kind, wherever they stand."""
    assert all(unicodedata.category(one) in ("Cc", "Cf", "Zl", "Zp") for one in hidden)
    assert complaint_about_name(rest + hidden)
    assert complaint_about_name(hidden + rest)


def test_name_limits() -> None:
    """80 characters fit, 81 do not; a comment of C cannot be opened or closed."""
    assert complaint_about_name(LONGEST_NAME * "a") == ""
    assert "at most 80 characters" in complaint_about_name((LONGEST_NAME + 1) * "a")
    for name in ("a*/b", "/*", 'a"b'):
        assert "choose another name" in complaint_about_name(name)


@pytest.mark.parametrize("key", ["largest_gain_db", "largest_gain_hz", "worst_peak_db", "ring_s"])
def test_each_hearing_number_is_compared(key: str) -> None:
    """One that was tampered with is one note, with both numbers; one that was left out is none."""
    text = find_preset("boathouse").read_text(encoding="utf-8")
    head, mark, table = text.rpartition("[hearing]\n")
    line = next(one for one in table.splitlines() if one.startswith(f"{key} = "))
    wrong = 3.0 * float(line.split(" = ")[1]) + 1.0
    (note,) = parse_preset(head + mark + table.replace(line, f"{key} = {wrong}"), "a").notes
    assert note.startswith(f"a: {key} says {wrong:g}, the chain has ")
    assert parse_preset(head + mark + table.replace(f"{line}\n", ""), "a").notes == ()


def test_hearing_within_its_tolerances_is_no_note() -> None:
    """0.1 dB and 2 % are rounding; a little more is a note (core/hearing.py)."""
    text = find_preset("boathouse").read_text(encoding="utf-8")
    hearing = parse_preset(text, "a").preset.written_hearing
    assert hearing is not None
    assert hearing.ring_s is not None
    for factor, count in ((1.015, 0), (1.03, 1)):
        # The section's own ring_s has the same text: only the last one is the hearing table's.
        head, _, tail = text.rpartition(f"ring_s = {hearing.ring_s}\n")
        changed = f"{head}ring_s = {hearing.ring_s * factor}\n{tail}"
        assert len(parse_preset(changed, "a").notes) == count


@settings(STEADY, max_examples=40)
@given(presets(largest_pole_radius=1.2, max_sections=2))
def test_unstable_presets_come_back_too(preset: Preset) -> None:
    """Poles on and outside the circle, with their infinities."""
    loaded = parse_preset(preset_text(preset), "a")
    assert replace(loaded.preset, written_hearing=None) == preset
    assert loaded.notes == ()


@settings(STEADY, max_examples=25)
@given(presets(max_sections=3))
def test_saved_file_is_the_text_and_saving_again_changes_no_byte(preset: Preset) -> None:
    """Through a real file, twice; what save returns is what load finds."""
    path = Path("preset.toml")
    with pytest.MonkeyPatch.context() as patch, TemporaryDirectory() as folder:
        patch.chdir(folder)
        saved = save_preset(preset, path)
        first = path.read_bytes()
        assert load_preset(path).preset == saved
        save_preset(saved, path)
        assert path.read_bytes() == first


def test_saving_over_what_is_no_preset_leaves_it(tmp_path: Path) -> None:
    """Someone else's TOML is not rewritten."""
    path = tmp_path / "a.toml"
    path.write_text("[tool]\nx = 1\n", encoding="utf-8")
    with pytest.raises(PresetError, match=r"a\.toml: line 1, tonebench: tonebench is missing"):
        save_preset(load_preset(find_preset("boathouse")).preset, path)
    assert path.read_text(encoding="utf-8") == "[tool]\nx = 1\n"


def test_bundled_presets_and_the_clips_that_suit_them(tmp_path: Path) -> None:
    """At least six, one of them a sum of bells; each finds a clip, a preset of one's own the first one."""
    found = {item.name: item for item in bundled_presets()}
    assert len(found) >= 6
    assert all(item.description for item in found.values())
    loaded = {name: load_preset(item.path).preset for name, item in found.items()}
    bells = [one for one in loaded.values() if one.chain.combine == "sum"]
    assert any(all(section.kind == "resonator" for section in one.chain.sections) for one in bells)
    assert all(math.isfinite(one.chain.gain_db) for one in loaded.values())
    clips = {item.name: item.path for item in bundled_clips()}
    assert clip_for_preset(found["workshop"].path) == clips["workshop"]
    assert clip_for_preset(found["boathouse-clean"].path) == clips["boathouse"]
    assert clip_for_preset(tmp_path / "workshop.toml") == clips["boathouse"]
    assert is_bundled(found["tilt"].path)
    assert not is_bundled(tmp_path / "tilt.toml")


@pytest.mark.parametrize("name", ["", "\0", "a\nb", "x" * 5000, "\udc80", "//", "nul\0l"])
def test_no_name_breaks_the_search(name: str) -> None:
    """Whatever is typed is one plain line that fits a terminal."""
    for find in (find_preset, find_clip):
        with pytest.raises(StorageError, match=r"is neither a file nor a bundled|is a folder") as caught:
            find(name)
        assert "\n" not in str(caught.value)
        assert "\0" not in str(caught.value)
        assert len(str(caught.value)) <= 200
