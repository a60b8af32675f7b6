"""Presets to text and back: the same value, and every comment and unknown key where it was."""

import difflib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings

from tests.strategies import STEADY, presets
from tonebench.core.kinds import Kind, WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.errors import PresetError
from tonebench.files.bundled import bundled_presets
from tonebench.files.presets import load_preset, parse_preset, save_preset
from tonebench.files.writing import preset_text
from tonebench.session.preset import Preset

WRITTEN = """\
# by hand, in an order of its own
tonebench = 1   # version

[chain]
name = 'Odd "order"' # refused below, so replaced there
sample_rate_hz = 48_000 # rate

[target] # first
arithmetic = "F32/tdf2"

# about one
[[section]]
kind = "Peak"  # k
frequency_hz = 1.0e2 # f
q = 1.00 # sharp
mystery = 3

[other]
text = '''
[chain]
# not a comment'''

# about two
[[section]]
kind = "free"
poles = { radius = 0.9990, angle_deg = 7.50, why = "x" } # pp
zeros = { real = [1.00, -1.0] }
# end of two

# about three
[[section]]
kind = "free"
[section.poles] # sub
radius = 0.9 # r
angle_deg = 10.00
""".replace("'Odd \"order\"' # refused below, so replaced there", '"Odd" # name')


def _changes(before: str, after: str) -> tuple[list[str], list[str]]:
    """Return the lines that went and those that came, the hearing table aside."""
    own = after[: after.index("\n# hearing: ")].splitlines()
    lines = list(difflib.ndiff(before.splitlines(), own))
    return [one[2:] for one in lines if one[0] == "-"], [one[2:] for one in lines if one[0] == "+"]


def _preset() -> Preset:
    return parse_preset(WRITTEN, "a.toml").preset


def _with_section(index: int, section: Section) -> Preset:
    preset = _preset()
    return replace(preset, chain=preset.chain.with_section(index, section))


@settings(STEADY, max_examples=60)
@given(presets())
def test_preset_comes_back_equal_and_without_notes(preset: Preset) -> None:
    """Every value survives, radians of every angle among them; the hearing numbers written agree with the chain."""
    loaded = parse_preset(preset_text(preset), "a.toml")
    assert replace(loaded.preset, written_hearing=None) == preset
    assert loaded.notes == ()


@settings(STEADY, max_examples=60)
@given(presets())
def test_saving_what_was_loaded_changes_no_byte(preset: Preset) -> None:
    """Save after load is a fixed point."""
    text = preset_text(preset)
    assert preset_text(parse_preset(text, "a.toml").preset, text) == text


@settings(STEADY, max_examples=40)
@given(presets(), presets())
def test_any_preset_can_be_saved_over_any_other(old: Preset, new: Preset) -> None:
    """However much changed: the new value is read back, and unknown tables and their comments are still there."""
    text = preset_text(old) + "\n# kept\n[unknown]\nkey = [1,\n  2] # too\n"
    saved = preset_text(new, text)
    assert replace(parse_preset(saved, "a.toml").preset, written_hearing=None) == new
    assert "\n# kept\n[unknown]\nkey = [1,\n  2] # too\n" in saved


def test_nothing_moves_where_nothing_changed() -> None:
    """A hand-written file, in its own order and spelling, only gets its hearing table."""
    assert _changes(WRITTEN, preset_text(_preset(), WRITTEN)) == ([], [])


def test_only_the_changed_number_is_rewritten() -> None:
    """A new frequency leaves the line's comment, the width's form and the unknown key."""
    section = _preset().chain.sections[0].with_frequency_hz(200.0)
    saved = preset_text(_with_section(0, section), WRITTEN)
    assert _changes(WRITTEN, saved) == (["frequency_hz = 1.0e2 # f"], ["frequency_hz = 200 # f"])


def test_another_width_takes_the_old_ones_line() -> None:
    """The key changes in place and keeps its comment."""
    section = _preset().chain.sections[0].with_width(WidthKey.RING_S, 0.2)
    saved = preset_text(_with_section(0, section), WRITTEN)
    assert _changes(WRITTEN, saved) == (["q = 1.00 # sharp"], ["ring_s = 0.2 # sharp"])


def test_roots_are_edited_in_place() -> None:
    """A new radius keeps the angle as written and an unknown key in the braces; a table of its own keeps its lines."""
    inline = _with_section(1, Section(ByHand(ConjugatePair(0.8, _angle(1)), RealRoots((1.0, -1.0)))))
    assert _changes(WRITTEN, preset_text(inline, WRITTEN)) == (
        ['poles = { radius = 0.9990, angle_deg = 7.50, why = "x" } # pp'],
        ['poles = { radius = 0.8, angle_deg = 7.50, why = "x" } # pp'],
    )
    table = _with_section(2, Section(ByHand(ConjugatePair(0.8, _angle(2)))))
    assert _changes(WRITTEN, preset_text(table, WRITTEN)) == (["radius = 0.9 # r"], ["radius = 0.8 # r"])


def _angle(index: int) -> float:
    made = _preset().chain.sections[index].made
    assert isinstance(made, ByHand)
    assert isinstance(made.poles, ConjugatePair)
    return made.poles.angle_rad


def test_roots_of_another_sort_keep_unknown_keys() -> None:
    """A pair that becomes real loses radius and angle, and nothing else."""
    saved = preset_text(_with_section(1, Section(ByHand(RealRoots((0.5,)), RealRoots((1.0, -1.0))))), WRITTEN)
    gone, come = _changes(WRITTEN, saved)
    assert gone == ['poles = { radius = 0.9990, angle_deg = 7.50, why = "x" } # pp']
    assert len(come) == 1
    assert "real = [0.5]" in come[0]
    assert 'why = "x"' in come[0]
    assert come[0].endswith("# pp")


def test_comments_follow_their_section() -> None:
    """Reordered, each section takes the comment above it along; removed, only its own goes."""
    preset = _preset()
    turned = preset.chain.with_sections([preset.chain.sections[index] for index in (2, 0, 1)])
    saved = preset_text(replace(preset, chain=turned), WRITTEN)
    places = [saved.index(f"# about {one}\n[[section]]") for one in ("three", "one", "two")]
    assert places == sorted(places)
    shorter = replace(preset, chain=preset.chain.with_sections(preset.chain.sections[1:]))
    saved = preset_text(shorter, WRITTEN)
    assert "# about one" not in saved
    assert "mystery" not in saved
    assert all(one in saved for one in ("# about two", "# about three", "# end of two", "[other]"))


def test_nearest_section_takes_the_comment() -> None:
    """With one of two nameless notches removed and the other moved, the comment that stays is the moved one's."""
    chain = parse_preset('tonebench = 1\n[chain]\nname = "a"\nsample_rate_hz = 48000\n', "a").preset.chain
    notches = [by_kind(Kind.NOTCH, hz, ("q", 10.0)) for hz in (50, 100)]
    text = preset_text(Preset(chain.with_sections(notches)))
    text = text.replace("frequency_hz = 50\n", "frequency_hz = 50 # low\n").replace("= 100\n", "= 100 # high\n")
    saved = preset_text(Preset(chain.with_sections([by_kind(Kind.NOTCH, 101, ("q", 10.0))])), text)
    assert "frequency_hz = 101 # high" in saved
    assert "# low" not in saved


def test_kind_with_an_order_can_become_free() -> None:
    """Keys without meaning for a free section are taken out, defaults that were written among them."""
    text = preset_text(Preset(_preset().chain.with_sections([by_kind(Kind.LOW_SHELF, 300.0, None, 3.0)])))
    assert "order = 1" in text
    free = Preset(_preset().chain.with_sections([Section(ByHand(RealRoots((0.5,))))]))
    assert parse_preset(preset_text(free, text), "a").preset.chain == free.chain


def test_line_ends_stay_as_the_file_has_them() -> None:
    """A file from Windows gets no bare line feed."""
    text = WRITTEN.replace("\n", "\r\n")
    saved = preset_text(_preset(), text)
    assert saved.count("\n") == saved.count("\r\n")
    assert saved.startswith(text)


def test_new_file_says_what_it_is_and_carries_the_caution(tmp_path: Path) -> None:
    """A header comment, the caution above [hearing] with whom to ask, and the numbers as they are returned."""
    path = tmp_path / "new.toml"
    written = save_preset(_preset(), path).written_hearing
    text = path.read_text(encoding="utf-8")
    assert text.startswith("# ")
    caution = text[text.index("# hearing: ") : text.index("[hearing]")]
    for words in ("Start low", "cannot know the sound pressure", "qualified person", "noise programme", "audiologist"):
        assert words in caution
    assert load_preset(path).preset.written_hearing == written


def test_hearing_numbers_are_compared_on_load() -> None:
    """A number that is not the chain's is a note; a missing table is none."""
    text = preset_text(_preset())
    start = text.index("largest_gain_db = ")
    wrong = text[:start] + "largest_gain_db = 3.0" + text[text.index("\n", start) :]
    assert any("largest_gain_db says 3" in note for note in parse_preset(wrong, "a.toml").notes)
    assert parse_preset(WRITTEN, "a.toml").notes == ()


def test_caution_is_not_repeated() -> None:
    """However often it is saved, it stands there once, and a comment of the user's above it stays."""
    text = preset_text(_preset(), WRITTEN).replace("# hearing: this", "# mine\n# hearing: this")
    louder = _preset()
    louder = replace(louder, chain=replace(louder.chain, gain_db=6.0))
    saved = preset_text(louder, text)
    assert saved.count("Start low") == 1
    assert "# mine\n" in saved


def test_unstable_chain_is_saved_with_infinity(tmp_path: Path) -> None:
    """A pole outside has no largest gain; the file says inf and is read again without a note."""
    path = tmp_path / "wild.toml"
    wild = Preset(_preset().chain.with_sections([Section(ByHand(ConjugatePair(1.1, 0.5)))]))
    save_preset(wild, path)
    assert "largest_gain_db = inf" in path.read_text(encoding="utf-8")
    assert "unstable" in path.read_text(encoding="utf-8")
    assert load_preset(path).notes == ()


@pytest.mark.parametrize("item", bundled_presets(), ids=lambda item: item.name)
def test_bundled_preset_is_a_fixed_point_and_modest(item: object) -> None:
    """Each loads without notes, saves to the same bytes, is stable, says what it is, and lifts no tone by 6 dB."""
    path = item.path  # type: ignore[attr-defined]
    loaded = load_preset(path)
    text = path.read_text(encoding="utf-8")
    assert loaded.notes == ()
    assert preset_text(loaded.preset, text) == text
    assert text.startswith("# ")
    gain_db = loaded.preset.written_hearing.largest_gain_db if loaded.preset.written_hearing else None
    assert gain_db is not None
    assert gain_db <= 6.0  # inf if it were unstable


def test_name_that_no_file_may_hold_is_not_saved(tmp_path: Path) -> None:
    """The session may hold it; the file that is there stays as it was."""
    path = tmp_path / "a.toml"
    path.write_text(WRITTEN, encoding="utf-8")
    bad = replace(_preset(), chain=replace(_preset().chain, name="a*/b"))
    with pytest.raises(PresetError, match=r"name must be without double quotes"):
        save_preset(bad, path)
    assert path.read_text(encoding="utf-8") == WRITTEN
