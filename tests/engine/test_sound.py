"""The real path: engine, PortAudio, a sound server, and what it captured."""

import time
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from tests.sound import RATE_HZ, find_excerpt, private_pulse, read_capture
from tonebench.core.chain import Chain
from tonebench.core.coefficients import Coefficients, from_chain
from tonebench.core.kinds import Kind
from tonebench.core.section import Section, by_kind
from tonebench.engine.client import EngineClient, EngineStatus
from tonebench.engine.guard import FADE_IN_S, LOOK_AHEAD_S
from tonebench.engine.kernel import Kernel

pytestmark = pytest.mark.sound

TRIES = 5  # a run in which the device ran dry is void; on a busy machine that happens
SETTLED = int((FADE_IN_S + LOOK_AHEAD_S) * RATE_HZ) + 64


def _clip(seconds: float = 2.0) -> NDArray[np.float32]:
    generator = np.random.default_rng(11)
    return (0.02 * generator.standard_normal((int(seconds * RATE_HZ), 2))).astype(np.float32)


def _chain(combine: str) -> Coefficients:
    sections = (
        by_kind(Kind.NOTCH, 50.0, ("q", 10.0)),
        Section(by_kind(Kind.PEAK, 320.0, ("q", 1.2), -4.0).made, delay_samples=37),
        by_kind(Kind.HIGH_SHELF, 4000.0, ("q", 0.7), 2.0),
    )
    return from_chain(Chain("x", RATE_HZ, sections, -1.0, combine))


def _wait(engine: EngineClient, phase: str, seconds: float = 20.0) -> EngineStatus:
    deadline = time.monotonic() + seconds
    while time.monotonic() < deadline:
        status = engine.status()
        if status.phase == phase:
            return status
        time.sleep(0.02)
    pytest.fail(f"the engine did not come to {phase}: {engine.status()}")


@pytest.mark.parametrize("combine", ["series", "sum"])
def test_captured_sound_is_the_kernel_bit_for_bit(combine: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """At level 0 dB, under the ceiling, after the fade-in, one pass: what the server got is what was computed."""
    clip, coefficients = _clip(), _chain(combine)
    expected = Kernel(coefficients, 2).process_block(clip.astype(np.float64)).astype(np.float32)
    assert np.max(np.abs(expected)) < 10.0 ** (-6.0 / 20.0)
    with private_pulse(monkeypatch) as pulse:
        for _ in range(TRIES):
            with pulse.recording() as path:
                underflows = _play_once(clip, coefficients)
            if underflows == 0:
                break
        else:
            pytest.fail(f"the device ran dry in each of {TRIES} runs")
        capture = read_capture(path)
    start = find_excerpt(capture, expected[SETTLED : SETTLED + 64])
    assert start >= 0
    rest = expected[SETTLED:]
    assert np.array_equal(capture[start : start + rest.shape[0]], rest)


def _play_once(clip: NDArray[np.float32], coefficients: Coefficients) -> int:
    engine = EngineClient(device="pulse")
    try:
        engine.set_coefficients(coefficients)
        engine.load_clip(clip, RATE_HZ)
        engine.set_is_looping(is_looping=False)
        engine.set_level_db(0.0)
        _wait(engine, "stopped")
        engine.play()
        status = _wait(engine, "playing")
        assert status.is_sounding_device, status.message
        time.sleep(clip.shape[0] / RATE_HZ + 0.5)
        return engine.status().underflows
    finally:
        engine.close()


def test_nothing_sounds_before_play_and_mute_silences(monkeypatch: pytest.MonkeyPatch) -> None:
    """The capture holds only zeros until play; after mute it holds only zeros again."""
    with private_pulse(monkeypatch) as pulse, pulse.recording() as path:
        engine = EngineClient(device="pulse")
        try:
            engine.load_clip(_clip(), RATE_HZ)
            _wait(engine, "stopped")
            time.sleep(0.3)
            quiet_until = path.stat().st_size
            engine.play()
            _wait(engine, "playing")
            time.sleep(0.5)
            engine.set_muted(is_muted=True)
            time.sleep(0.5)
        finally:
            engine.close()
        capture = read_capture(path)
    assert not capture[: quiet_until // 8].any()
    sounding = np.flatnonzero(capture.any(axis=1))
    assert sounding.size > 0.2 * RATE_HZ
    assert not capture[sounding[-1] + 1 :].any()
    assert capture.shape[0] - sounding[-1] > 0.2 * RATE_HZ


def test_server_killed_and_back(monkeypatch: pytest.MonkeyPatch) -> None:
    """A dead server is one plain line; when it is back, so is the sound."""
    with private_pulse(monkeypatch) as pulse:
        engine = EngineClient(device="pulse")
        try:
            engine.load_clip(_clip(), RATE_HZ)
            engine.play()
            _wait(engine, "playing")
            pulse.kill()
            status = _wait(engine, "faulted", 5.0)
            assert "gone" in status.message
            assert "\n" not in status.message
            pulse.start()
            status = _wait(engine, "playing", 8.0)
            assert status.is_sounding_device
            with pulse.recording() as path:
                time.sleep(1.0)
            assert np.abs(read_capture(path)).max() > 0.0
        finally:
            engine.close()


def test_play_command_captures_what_render_writes(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """``tonebench play --capture`` and the server's own capture both equal ``tonebench render``, bit for bit."""
    import soundfile  # noqa: PLC0415

    from tests.cli.running import tonebench  # noqa: PLC0415

    soundfile.write(tmp_path / "in.wav", _clip(3.0), RATE_HZ, subtype="FLOAT")
    made = tonebench("edit", "a.toml", "notch 50 Hz q 10", "peak 320 Hz -4 dB q 1.2", cwd=tmp_path)
    assert made.returncode == 0, made.stderr
    rendered = tonebench("render", "a.toml", "in.wav", "-o", "out.wav", cwd=tmp_path)
    assert rendered.returncode == 0, rendered.stderr
    expected = soundfile.read(tmp_path / "out.wav", dtype="float32", always_2d=True)[0]
    options = ("--clip", "in.wav", "--seconds", "2.5", "--level", "0", "--device", "pulse")
    with private_pulse(monkeypatch) as pulse:
        for number in range(TRIES):
            with pulse.recording() as path:
                played = tonebench("play", "a.toml", *options, "--capture", f"left{number}.wav", cwd=tmp_path)
            assert played.returncode == 0, played.stderr
            if "underflow" not in played.stderr:
                break
        else:
            pytest.fail(f"the device ran dry in each of {TRIES} runs")
        capture = read_capture(path)
    left = soundfile.read(tmp_path / f"left{number}.wav", dtype="float32", always_2d=True)[0]
    excerpt = expected[SETTLED : SETTLED + 64]
    length = int(1.5 * RATE_HZ)
    for heard in (capture, left):
        start = find_excerpt(heard, excerpt)
        assert start >= 0
        assert np.array_equal(heard[start : start + length], expected[SETTLED : SETTLED + length])
