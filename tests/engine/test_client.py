"""The client and its child, on the silent clock: commands, meters, capture, and a clean end."""

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.engine.client import EngineClient, EngineStatus
from tonebench.engine.devices import list_devices
from tonebench.engine.kernel import Kernel
from tonebench.engine.shared import read_ring, write_ring
from tonebench.errors import EngineError, InvalidValueError

RATE_HZ = 48000.0


def _clip(frames: int = 96_000) -> NDArray[np.float32]:
    return (0.05 * np.random.default_rng(2).standard_normal((frames, 1))).astype(np.float32)


@pytest.fixture
def engine() -> Iterator[EngineClient]:
    """Return an engine on the silent clock, and see to it that nothing of it stays."""
    client = EngineClient(device="silent", capture_frames=480_000)
    yield client
    number = client._process.pid
    own = {client._shared.name} | ({client._clip.name} if client._clip else set())
    client.close()
    client.close()
    assert number is not None
    assert not _is_running(number)
    assert not _memories() & own


def _memories() -> set[str]:
    folder = Path("/dev/shm")  # noqa: S108  (where Linux keeps shared memory)
    return {path.name for path in folder.glob("psm_*")} if folder.is_dir() else set()


def _is_running(number: int) -> bool:
    try:
        os.kill(number, 0)
    except ProcessLookupError:
        return False
    return True


def _wait(client: EngineClient, is_so: Callable[[EngineStatus], bool], seconds: float = 20.0) -> EngineStatus:
    deadline = time.monotonic() + seconds
    while time.monotonic() < deadline:
        status = client.status()
        if is_so(status):
            return status
        time.sleep(0.02)
    pytest.fail(f"it did not come: {client.status()}")


def test_captured_frames_are_the_kernel(engine: EngineClient) -> None:
    """Commands sent before the child is up are kept; what left the guard is complete, in order, and exact."""
    chain = Chain("x", RATE_HZ, (by_kind(Kind.NOTCH, 50.0, ("q", 10.0)),))
    engine.set_coefficients(from_chain(chain))
    engine.load_clip(_clip(), RATE_HZ)
    engine.set_level_db(0.0)
    engine.set_loop(0, 96_000)
    engine.play()
    _wait(engine, lambda status: status.position_frame > 24_000)
    engine.stop()
    _wait(engine, lambda status: status.phase == "stopped")
    captured = engine.drain_capture()
    expected = Kernel(from_chain(chain), 1).process_block(_clip().astype(np.float64)).astype(np.float32)
    settled = 2600
    part = captured[settled : settled + 20_000, 0]
    assert np.array_equal(part, expected[settled - 72 : settled - 72 + 20_000, 0])


def test_status_says_what_was_asked_for(engine: EngineClient) -> None:
    """Level starts at −20 dB; the silent clock is told in one line; meters move."""
    assert engine.status().phase == "starting"
    assert engine.status().level_db == -20.0
    engine.load_clip(_clip(), RATE_HZ)
    engine.set_hear("change")
    engine.set_muted(is_muted=True)
    engine.play()
    status = _wait(engine, lambda status: status.message != "")
    assert not status.is_sounding_device
    assert "silent clock" in status.message
    assert (status.hear, status.is_muted) == ("change", True)
    engine.set_muted(is_muted=False)
    engine.set_hear("input")
    status = _wait(engine, lambda status: status.output_peak_db > -60.0)
    before, after = engine.recent(4096)
    assert before.shape == after.shape
    assert before.any()


def test_an_unstable_chain_trips_and_rearm_brings_it_back(engine: EngineClient) -> None:
    """The guard's state and reason are told; after a stable chain and rearm it plays."""
    from dataclasses import replace  # noqa: PLC0415

    stable = from_chain(Chain("x", RATE_HZ, (by_kind(Kind.NOTCH, 50.0, ("q", 10.0)),)))
    engine.load_clip(_clip(), RATE_HZ)
    engine.set_coefficients(replace(stable, rows=np.array([[1.0, 0.0, 0.0, 1.0, -2.02, 1.03]])))
    engine.play()
    status = _wait(engine, lambda status: status.guard == "tripped")
    assert status.guard_reason
    engine.set_coefficients(stable)
    time.sleep(0.2)
    engine.rearm()
    _wait(engine, lambda status: status.guard == "idle")


def test_a_killed_child_is_started_again(engine: EngineClient) -> None:
    """SIGKILL on the child: one plain line, and it plays again with the same clip."""
    engine.load_clip(_clip(), RATE_HZ)
    engine.play()
    _wait(engine, lambda status: status.phase == "playing")
    number = engine._process.pid
    assert number is not None
    os.kill(number, signal.SIGKILL)
    _wait(engine, lambda status: "started again" in status.message)
    _wait(engine, lambda status: status.phase == "playing")
    assert engine._process.pid != number


def test_refusals(engine: EngineClient) -> None:
    """Each command out of range says what it must be."""
    with pytest.raises(EngineError, match="load a clip first"):
        engine.play()
    with pytest.raises(InvalidValueError, match=r"level must be between -120 and 0 dB, got 3"):
        engine.set_level_db(3.0)
    with pytest.raises(InvalidValueError, match="ceiling must be between"):
        engine.set_ceiling_db(1.0)
    with pytest.raises(InvalidValueError, match="hear must be one of input, output, change"):
        engine.set_hear("everything")
    with pytest.raises(InvalidValueError, match=r"shape \(n, 1\) or \(n, 2\)"):
        engine.load_clip(np.zeros((0, 1), dtype=np.float32), RATE_HZ)
    engine.load_clip(_clip(100), RATE_HZ)
    with pytest.raises(InvalidValueError, match="two frames in order from 0 to 100"):
        engine.set_loop(50, 50)
    with pytest.raises(InvalidValueError, match="block_frames must be between"):
        EngineClient(device="silent", block_frames=1 << 20)


def test_a_child_that_hangs_does_not_make_this_side_wait(engine: EngineClient) -> None:
    """A stopped child: 200 edits of 128 sections return at once, and the last is heard when it goes on."""
    sections = tuple(by_kind(Kind.PEAK, 100.0 + 50.0 * index, ("q", 3.0), 0.1) for index in range(128))
    full = from_chain(Chain("x", RATE_HZ, sections))
    engine.load_clip(_clip(), RATE_HZ)
    engine.play()
    _wait(engine, lambda status: status.phase == "playing")
    number = engine._process.pid
    assert number is not None
    os.kill(number, signal.SIGSTOP)
    start = time.monotonic()
    for _ in range(200):
        engine.set_coefficients(full)
    assert time.monotonic() - start < 2.0  # a full pipe would wait for ever
    os.kill(number, signal.SIGCONT)
    _wait(engine, lambda _: not engine._is_chain_waiting)
    assert engine.status().phase == "playing"


def test_after_close_everything_answers_and_nothing_moves() -> None:
    """A late timer of the screen finds the last status, and no samples."""
    client = EngineClient(device="silent", capture_frames=100)
    client.close()
    assert client.status().phase == "starting"
    assert client.recent(10)[0].shape == (0, 2)
    assert client.drain_capture().shape == (0, 2)
    with pytest.raises(EngineError, match="closed"):
        client.stop()


_PARENT = """
import sys, time, numpy as np
from tonebench.engine.client import EngineClient
if __name__ == "__main__":
    client = EngineClient(device="silent")
    client.load_clip(np.zeros((4800, 1), dtype=np.float32), 48000.0)
    client.play()
    while client.status().phase != "playing":
        time.sleep(0.02)
    print(client._process.pid, "scipy" in sys.modules, "sounddevice" in sys.modules, flush=True)
    time.sleep(60)
"""


def test_a_killed_parent_leaves_no_child_and_no_memory(tmp_path: Path) -> None:
    """SIGKILL on the parent: the child ends by itself; the parent has loaded neither scipy nor sounddevice."""
    before = _memories()
    script = tmp_path / "parent.py"
    script.write_text(_PARENT, encoding="utf-8")
    with subprocess.Popen([sys.executable, str(script)], stdout=subprocess.PIPE, text=True) as parent:
        assert parent.stdout is not None
        child, has_scipy, has_sounddevice = parent.stdout.readline().split()
        parent.kill()
    assert (has_scipy, has_sounddevice) == ("False", "False")
    deadline = time.monotonic() + 10.0
    while time.monotonic() < deadline and (_is_running(int(child)) or not _memories() <= before):
        time.sleep(0.05)
    assert not _is_running(int(child))
    assert _memories() <= before


def test_rings_go_round() -> None:
    """What was written is read, over the ring's end and for writes longer than the ring."""
    ring = np.zeros((8, 2), dtype=np.float32)
    frames = np.arange(40, dtype=np.float32).reshape(20, 2)
    count = write_ring(ring, 0, frames[:5])
    count = write_ring(ring, count, frames[5:11])
    assert np.array_equal(read_ring(ring, 3, 11), frames[3:11])
    assert write_ring(ring, count, frames) == 31
    assert np.array_equal(read_ring(ring, 23, 31), frames[12:])


def test_device_listing_answers() -> None:
    """Devices, or one plain line why there are none."""
    listing = list_devices()
    assert listing.devices or listing.message
    assert "\n" not in listing.message
