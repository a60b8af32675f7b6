"""``tonebench play`` on the silent clock: captures, watching, and how it ends."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
import soundfile

from tests.cli.running import tonebench


def _clip(folder: Path) -> None:
    samples = 0.02 * np.random.default_rng(1).standard_normal((96_000, 2))
    soundfile.write(folder / "in.wav", samples, 48000, subtype="FLOAT")


def test_capture_is_rendered_sound(tmp_path: Path) -> None:
    """At 0 dB what left the guard is what render writes, after the fade-in; another rate than the preset's is told."""
    _clip(tmp_path)
    tonebench("edit", "a.toml", "notch 50 Hz q 10", cwd=tmp_path)
    options = ("--clip", "in.wav", "--seconds", "1", "--level", "0", "--device", "silent", "--capture", "left.wav")
    played = tonebench("play", "a.toml", *options, cwd=tmp_path)
    assert played.returncode == 0, played.stderr
    assert "silent clock" in played.stderr
    assert tonebench("render", "a.toml", "in.wav", "-o", "out.wav", cwd=tmp_path).returncode == 0
    left = soundfile.read(tmp_path / "left.wav", dtype="float32")[0]
    expected = soundfile.read(tmp_path / "out.wav", dtype="float32")[0]
    settled = 2600  # fade-in and look-ahead
    assert np.array_equal(left[settled : settled + 30_000], expected[settled - 72 : settled - 72 + 30_000])
    again = tonebench("play", "a.toml", *options, cwd=tmp_path)
    assert again.returncode == 2
    assert "left.wav" in again.stderr


def _start(folder: Path, *options: str) -> subprocess.Popen[str]:
    command = [sys.executable, "-m", "tonebench", "play", "a.toml", "--clip", "in.wav", "--device", "silent", *options]
    return subprocess.Popen(command, cwd=folder, stderr=subprocess.PIPE, text=True, start_new_session=True)


def _memories() -> set[str]:
    folder = Path("/dev/shm")  # noqa: S108  (where Linux keeps shared memory)
    return {path.name for path in folder.glob("psm_*")} if folder.is_dir() else set()


@pytest.mark.parametrize("wait_s", [0.3, 0.8, 2.5])
@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM, signal.SIGHUP])
def test_a_signal_to_the_whole_group_ends_it_quietly(number: signal.Signals, wait_s: float, tmp_path: Path) -> None:
    """Ctrl-C, a polite kill and a closed terminal, early and late: no traceback, and nothing left behind."""
    _clip(tmp_path)
    tonebench("edit", "a.toml", "notch 50 Hz q 10", cwd=tmp_path)
    before = _memories()
    process = _start(tmp_path)
    time.sleep(wait_s)
    os.killpg(process.pid, number)
    _, narration = process.communicate(timeout=30)
    assert "Traceback" not in narration
    assert "resource_tracker" not in narration
    deadline = time.monotonic() + 5.0
    while not _memories() <= before and time.monotonic() < deadline:
        time.sleep(0.05)
    assert _memories() <= before


def test_watch_tells_each_change_and_keeps_the_chain_over_a_slip(tmp_path: Path) -> None:
    """A saved preset is heard and told, a line per change; a broken one is told and the old chain kept."""
    _clip(tmp_path)
    tonebench("edit", "a.toml", "notch 50 Hz q 10", cwd=tmp_path)
    process = _start(tmp_path, "--watch", "--seconds", "6")
    time.sleep(3.0)
    tonebench("edit", "a.toml", "1 50.02 Hz", "peak 320 Hz -4 dB q 1.2", cwd=tmp_path)
    time.sleep(1.0)
    (tmp_path / "a.toml").write_text("tonebench = 1\n[chain\n", encoding="utf-8")
    _, narration = process.communicate(timeout=30)
    assert process.returncode == 0, narration
    assert "section 1: notch 50 Hz q 10 is now notch 50.02 Hz q 10" in narration
    assert "section 2 added: peak 320 Hz q 1.2 -4 dB" in narration
    assert "kept the chain as it was: a.toml: line 2" in narration
