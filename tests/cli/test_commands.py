"""What each command prints, as text and as JSON."""

import json
from pathlib import Path

import numpy as np
import pytest
import soundfile

from tests.cli.running import tonebench


def test_show_json_gives_poles_and_zeros_of_a_notch(tmp_path: Path) -> None:
    """A notch typed by radius keeps it, has its zeros on the circle at f0, and poles at their own angle."""
    tonebench("edit", "a.toml", "notch 50.02 Hz radius 0.9995", cwd=tmp_path)
    shown = tonebench("show", "a.toml", "--json", cwd=tmp_path)
    assert shown.returncode == 0, shown.stderr
    content = json.loads(shown.stdout)
    assert content["sample_rate_hz"] == 48000
    (section,) = content["sections"]
    (pole,) = section["poles"]
    (zero,) = section["zeros"]
    assert pole["radius"] == 0.9995
    # The pole of a published notch: cos(theta) = cos(w0)·(1 + r²)/(2r), from equating both forms of a1.
    radius, omega = 0.9995, 2.0 * np.pi * 50.02 / 48000
    theta = np.arccos(np.cos(omega) * (1.0 + radius**2) / (2.0 * radius))
    assert pole["frequency_hz"] == pytest.approx(theta * 48000 / (2.0 * np.pi), rel=1e-9)  # arccos near 1 loses digits
    assert pole["angle_deg"] == pytest.approx(np.degrees(theta), rel=1e-9)
    assert zero["radius"] == 1.0
    assert zero["frequency_hz"] == pytest.approx(50.02, rel=1e-12)


@pytest.mark.parametrize("command", [("show", "boathouse"), ("check", "boathouse"), ("presets",), ("clips",)])
def test_text_is_plain_and_at_most_80_columns_when_piped(command: tuple[str, ...], tmp_path: Path) -> None:
    """No escape sequences, no long lines."""
    result = tonebench(*command, cwd=tmp_path)
    assert result.returncode == 0, result.stderr
    assert result.stdout
    assert "\x1b" not in result.stdout
    assert max(len(line) for line in result.stdout.splitlines()) <= 80


@pytest.mark.parametrize(
    "command", [("show", "boathouse"), ("check", "boathouse"), ("presets",), ("clips",), ("devices",)]
)
def test_json_and_its_long_form_are_the_same(command: tuple[str, ...], tmp_path: Path) -> None:
    """``--json`` is short for ``--format json``."""
    short = tonebench(*command, "--json", cwd=tmp_path)
    long = tonebench(*command, "--format", "json", cwd=tmp_path)
    assert short.returncode == 0, short.stderr
    assert json.loads(short.stdout) == json.loads(long.stdout)


def test_check_fails_at_the_chosen_severity(tmp_path: Path) -> None:
    """An unstable chain is danger: exit 1 by default; accepted findings and lower ones do not fail."""
    tonebench("edit", "a.toml", "free poles 1.01 at 30 deg gain 0 dB", cwd=tmp_path)
    result = tonebench("check", "a.toml", "--json", cwd=tmp_path)
    report = json.loads(result.stdout)
    assert result.returncode == 1
    assert report["stable"] is False
    assert {"code", "severity", "section", "measured", "limit", "unit", "message", "remedy", "accepted"} <= set(
        report["findings"][0]
    )
    tonebench("edit", "fine.toml", "peak 1000 Hz 3 dB q 1", cwd=tmp_path)
    assert tonebench("check", "fine.toml", cwd=tmp_path).returncode == 0


def test_check_takes_several_presets_and_targets(tmp_path: Path) -> None:
    """Each preset is judged for each target given."""
    result = tonebench(
        "check", "boathouse", "workshop", "--target", "f32/df1", "--target", "f64/tdf2", "--json", cwd=tmp_path
    )
    reports = json.loads(result.stdout)["reports"]
    assert [(one["preset"], one["target"]) for one in reports] == [
        ("boathouse", "f32/df1"),
        ("boathouse", "f64/tdf2"),
        ("workshop", "f32/df1"),
        ("workshop", "f64/tdf2"),
    ]


def test_every_bundled_preset_passes_check(tmp_path: Path) -> None:
    """What comes with the bench has no finding of danger in its own target."""
    names = [one["name"] for one in json.loads(tonebench("presets", "--json", cwd=tmp_path).stdout)]
    assert len(names) >= 6
    result = tonebench("check", *names, cwd=tmp_path)
    assert result.returncode == 0, result.stdout + result.stderr


def test_render_several_inputs_into_a_folder(tmp_path: Path) -> None:
    """Each input becomes a float32 WAV of its own rate, channels and length."""
    generator = np.random.default_rng(5)
    for name, rate_hz, channels in (("a.wav", 48000, 1), ("b.wav", 44100, 2), ("c.flac", 96000, 1)):
        soundfile.write(tmp_path / name, generator.uniform(-0.5, 0.5, (4000, channels)), rate_hz)
    result = tonebench("render", "boathouse", "a.wav", "b.wav", "c.flac", "-o", "out", cwd=tmp_path)
    assert result.returncode == 0, result.stderr
    assert "44100" in result.stderr  # another rate than the preset's is said
    for name, rate_hz, channels in (("a", 48000, 1), ("b", 44100, 2), ("c", 96000, 1)):
        found = soundfile.info(tmp_path / "out" / f"{name}.wav")
        assert (found.samplerate, found.channels, found.frames, found.subtype) == (rate_hz, channels, 4000, "FLOAT")


def test_render_of_one_name_twice_is_refused(tmp_path: Path) -> None:
    """Two inputs that would write one file are refused before anything is written."""
    for name in ("a.wav", "a.flac"):
        soundfile.write(tmp_path / name, np.zeros(480), 48000)
    result = tonebench("render", "boathouse", "a.wav", "a.flac", "-o", "out", cwd=tmp_path)
    assert result.returncode == 2
    assert "both write" in result.stderr
    assert list((tmp_path / "out").iterdir()) == []


def test_edit_answers_each_line_and_keeps_comments(tmp_path: Path) -> None:
    """Answers go to stdout, one per line; a comment in the file survives."""
    tonebench("edit", "a.toml", "notch 50 Hz q 10", cwd=tmp_path)
    path = tmp_path / "a.toml"
    path.write_text("# mine\n" + path.read_text(encoding="utf-8"), encoding="utf-8")
    result = tonebench("edit", "a.toml", "1 50.02 Hz", "1 name hum", cwd=tmp_path)
    assert result.returncode == 0, result.stderr
    assert len(result.stdout.splitlines()) == 2
    text = path.read_text(encoding="utf-8")
    assert text.startswith("# mine\n")
    assert "50.02" in text
    assert "[hearing]" in text
