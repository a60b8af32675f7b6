"""Playing 32 sections in stereo: how much of a block's time the callback takes."""

import os
import time

import numpy as np
import pytest

from tests.benchmarks.row import Row
from tests.sound import missing_for_sound, private_pulse
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.engine.client import EngineClient

_SECONDS = 20.0
_RATE_HZ = 48000.0
BLOCK_FRAMES = 256


def _play(device: str) -> tuple[np.ndarray, int]:
    sections = tuple(by_kind(Kind.PEAK, 100.0 * 1.15**index, ("q", 3.0), (-1) ** index * 3.0) for index in range(32))
    engine = EngineClient(device=device, block_frames=BLOCK_FRAMES)
    try:
        engine.load_clip((0.05 * np.random.default_rng(1).standard_normal((96_000, 2))).astype(np.float32), _RATE_HZ)
        engine.set_coefficients(from_chain(Chain("x", _RATE_HZ, sections)))
        engine.play()
        deadline = time.monotonic() + _SECONDS
        while time.monotonic() < deadline:
            time.sleep(0.1)
            engine.status()
        return engine.loads(), engine.status().underflows
    finally:
        engine.close()


def rows() -> list[Row]:
    """Measure through a private sound server, or on the silent clock where there is none."""
    if missing_for_sound():
        where, (loads, underflows) = "silent clock", _play("silent")
    else:
        with pytest.MonkeyPatch.context() as patch, private_pulse(patch):
            where, (loads, underflows) = "PortAudio and PulseAudio", _play("pulse")
    yardstick = f"a block of {BLOCK_FRAMES} frames, {where}, {os.cpu_count()} cores, {underflows} underflows"
    values = [
        (name, float(np.percentile(loads, part)), goal) for name, part, goal in (("median", 50, 0.1), ("p99", 99, 0.4))
    ]
    return [
        Row(
            f"callback {name}, 32 sections stereo",
            f"{1000.0 * load * BLOCK_FRAMES / _RATE_HZ:.2f} ms",
            yardstick,
            load,
            goal,
        )
        for name, load, goal in values
    ]
