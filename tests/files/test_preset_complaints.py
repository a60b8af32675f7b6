"""Everything that can be wrong with a preset file: one line with file, line, key and remedy, never another error."""

from pathlib import Path

import pytest

from tonebench.errors import PresetError, StorageError
from tonebench.files.presets import LARGEST_BYTES, load_preset, parse_preset

HEAD = 'tonebench = 1\n[chain]\nname = "a"\nsample_rate_hz = 48000\n'
PEAK = '[[section]]\nkind = "peak"\nfrequency_hz = 100\n'
FREE = '[[section]]\nkind = "free"\n'
LONG = "1" + "0" * 400

CASES = {
    "broken": (HEAD + "[[section]\n", r"line 5: not valid TOML"),
    "empty": ("", r"line 1, tonebench: tonebench is missing"),
    "version": (HEAD.replace("= 1", "= 2", 1), r"line 1, tonebench: tonebench must be 1"),
    "version true": (HEAD.replace("= 1", "= true", 1), r"must be a whole number, got True"),
    "byte order mark": ("\ufeff" + HEAD, r"line 1: must not begin with a byte order mark; save it as UTF-8 without"),
    "long number": (HEAD.replace("48000", LONG), r"line 4, sample_rate_hz: .* at most 300 digits"),
    "endless number": (HEAD.replace("48000", "1" * 5000), r"line 4: a number must be of a size"),
    "endless exponent": (HEAD.replace("48000", "1e99999999999999999999"), r"line 4: a number must be of a size"),
    "long hex": (HEAD + PEAK + "q = 1\npolarity = 0x" + "f" * 6000, r"line 9, polarity: .* at most 18 digits"),
    "long radius": (HEAD + FREE + f"poles = {{radius = {LONG}, angle_deg = 3}}\n", r"line 7, poles: .*300 digits"),
    "long rate": (HEAD + f"[build]\nsample_rates_hz = [{LONG}]\n", r"line 6, sample_rates_hz: .*300 digits"),
    "deep": (HEAD + "x = " + "[" * 50000, r"nested a few levels"),
    "inline chain": ('tonebench = 1\nchain = {name = "a"}\n', r"under the header \[chain\]"),
    "section as a table": (HEAD + "[section]\n", r"header \[\[section\]\] of its own"),
    "missing key": (HEAD + '[[section]]\nkind = "peak"\nq = 1\n', r"line 5, frequency_hz: frequency_hz is missing"),
    "boolean": (HEAD + PEAK + "q = true\n", r"line 8, q: q must be a number, got True"),
    "date": (HEAD + PEAK.replace("100", "1979-05-27") + "q = 1\n", r"line 7, frequency_hz: .* a number"),
    "nan": (HEAD + PEAK + "q = nan\n", r"line 8, q: q must be a finite number over 0, got nan"),
    "negative radius": (HEAD + FREE + "poles = {radius = -1, angle_deg = 3}\n", r"line 7, poles: radius must be"),
    "nan radius": (HEAD + FREE + "poles = {radius = nan, angle_deg = 3}\n", r"line 7, poles: radius .* got nan"),
    "angle": (HEAD + FREE + "poles = {radius = 1, angle_deg = 181}\n", r"angle_deg of poles must be between 0 and 180"),
    "three roots": (HEAD + FREE + "zeros = {real = [1, 2, 3]}\n", r"line 7, zeros: real must be at most two roots"),
    "both sorts": (HEAD + FREE + "zeros = {real = [1], radius = 1}\n", r"line 7, zeros: .* not both"),
    "width without meaning": (
        HEAD + PEAK.replace("peak", "low-pass") + "bandwidth_hz = 5\n",
        r"line 8, bandwidth_hz: .* no meaning for a low-pass, got 5; give one of q, ring_s, radius$",
    ),
    "two widths": (HEAD + PEAK + "q = 1\nradius = 0.9\n", r"line 9, radius: one width is enough, got q and radius"),
    "no width": (HEAD + PEAK, r"line 6, kind: a peak needs one width"),
    "width of a free one": (HEAD + FREE + "q = 1\n", r"line 7, q: q has no meaning for a free section"),
    "at Nyquist": (HEAD + PEAK.replace("100", "24000") + "q = 1\n", r"line 7, frequency_hz: .*24000 Hz"),
    "129": (HEAD + (PEAK + "q = 1\n") * 129, r"line 517, section: .* at most 128, got 129"),
    "kind": (HEAD + PEAK.replace("peak", "peek") + "q = 1\n", r"line 6, kind: kind must be one of"),
    "quote": (HEAD.replace('"a"', "'a\"b'"), r"line 3, name: .*double quotes"),
    "newline": (HEAD.replace('"a"', '"a\\nb"'), r"line 3, name: .* one line of visible characters"),
    "direction mark": (HEAD.replace('"a"', '"\\u202e"'), r"line 3, name: .* one line of visible characters"),
    "comment end": (HEAD + PEAK + 'q = 1\nname = "*/"\n', r"line 9, name: "),
    "long name": (HEAD.replace('"a"', f'"{"a" * 81}"'), r"line 3, name: .* at most 80 characters"),
    "prefix": (HEAD + '[[export]]\nto = "c"\nfile = "a.h"\nprefix = "1a"\n', r"line 8, prefix: .* C identifier"),
    "folder": (HEAD + '[[export]]\nto = "c"\nfile = "b/../../a.h"\n', r"line 7, file: .* own folder"),
    "arithmetic": (HEAD + '[target]\narithmetic = "f32"\n', r"line 6, arithmetic: .* FORMAT/STRUCTURE"),
    "accept": (HEAD + '[[accept]]\ncode = "a"\nbecause = "b"\nup_to = nan\n', r"line 8, up_to: .* got nan"),
    "hearing": (HEAD + "[hearing]\nring_s = true\n", r"line 6, ring_s: .* a number, got True"),
}


@pytest.mark.parametrize("case", list(CASES))
def test_bad_text_is_one_line_with_its_place(case: str) -> None:
    """File, line and key come first; no complaint takes two lines."""
    text, message = CASES[case]
    with pytest.raises(PresetError, match=message) as caught:
        parse_preset(text, "a.toml")
    assert str(caught.value).startswith("a.toml: ")
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    "text",
    [
        HEAD + "# a\u2028[chain]\n" + PEAK + "q = 1\n",
        HEAD + "# '''\n" + PEAK + "q = 1\n",
        HEAD + 'x = """\n[chain]\n"""\n' + PEAK + "q = 1\n",
        HEAD + "x = [\n[1]\n]\n" + PEAK + "q = 1\n",
        HEAD.replace("[chain]", '[ "chain" ] # [section]') + PEAK + "q = 1\n",
    ],
)
def test_what_only_looks_like_a_header_is_none(text: str) -> None:
    """Brackets in comments, strings and lists do not hide or double a table."""
    assert len(parse_preset(text, "a.toml").preset.chain.sections) == 1


def test_slip_in_a_key_is_a_note() -> None:
    """An unknown key is kept; one that is close to a known one is asked about."""
    notes = parse_preset(HEAD + "gian_db = 1\n" + PEAK + "q = 1\ncolour = 3\n", "a.toml").notes
    assert len(notes) == 1
    assert "gian_db in [chain]" in notes[0]
    assert "did you mean gain_db?" in notes[0]


def test_file_that_is_no_preset_is_refused(tmp_path: Path) -> None:
    """Another encoding, a folder, a missing and a huge file, and one without an end."""
    latin = tmp_path / "latin.toml"
    latin.write_bytes("tonebench = 1 # \u00e9".encode("latin-1"))
    huge = tmp_path / "huge.toml"
    huge.write_bytes(b"#" * (LARGEST_BYTES + 1))
    for path, sort, message in (
        (latin, PresetError, r"latin.toml is not UTF-8 text \(byte 16\); save it as UTF-8"),
        (huge, PresetError, r"huge.toml is larger than 1000 kB"),
        (Path("/dev/zero"), PresetError, r"/dev/zero is larger than"),
        (tmp_path, StorageError, r"is a folder; give a preset in it"),
        (tmp_path / "none.toml", StorageError, r"none.toml does not exist; check the path"),
        (latin / "a.toml", StorageError, r"cannot be read: Not a directory"),
        (tmp_path / ("a" * 300), StorageError, r"cannot be read: File name too long"),
    ):
        with pytest.raises(sort, match=message):
            load_preset(path)
