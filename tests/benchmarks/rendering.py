"""Rendering ten minutes of stereo through eight sections, beside a bare loop of soundfile and sosfilt."""

import statistics
import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np
import soundfile

from tests.benchmarks.row import Row

RUNS = 3
_RATE_HZ = 48000
_LINES = tuple(f"peak {hz} Hz {gain:+d} dB q 1.5" for hz, gain in zip(range(100, 900, 100), (3, -3) * 4, strict=True))
_BARE = """
import sys, numpy as np, soundfile
from scipy import signal
rows = np.load(sys.argv[3])
state = np.zeros((len(rows), 2, 2))
with soundfile.SoundFile(sys.argv[1]) as source, soundfile.SoundFile(
        sys.argv[2], "w", source.samplerate, 2, subtype="FLOAT", format="WAV") as target:
    while True:
        block = source.read(65536, dtype="float64", always_2d=True)
        if not len(block):
            break
        out, state = signal.sosfilt(rows, block.T, zi=state)
        target.write(out.T.astype(np.float32))
"""
_TIMED = """
import json, resource, subprocess, sys, time
start = time.perf_counter()
subprocess.run(json.loads(sys.argv[1]), check=True, stderr=subprocess.DEVNULL)
print(time.perf_counter() - start, resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss)
"""


def _run(command: list[str]) -> tuple[float, float]:
    """Return seconds and peak memory in MB of a command."""
    import json  # noqa: PLC0415

    done = subprocess.run(
        [sys.executable, "-c", _TIMED, json.dumps(command)], check=True, capture_output=True, text=True
    )
    seconds, kilobytes = done.stdout.split()
    return float(seconds), float(kilobytes) / 1000.0


def _write_noise(path: Path, minutes: float) -> None:
    generator = np.random.default_rng(1)
    with soundfile.SoundFile(path, "w", _RATE_HZ, 2, subtype="PCM_16") as file:
        for _ in range(int(minutes * 60)):
            file.write(0.1 * generator.standard_normal((_RATE_HZ, 2)))


def rows() -> list[Row]:
    """Measure time against the bare loop, and memory of ten minutes against one."""
    from tonebench.core.coefficients import from_chain  # noqa: PLC0415
    from tonebench.files.presets import load_preset  # noqa: PLC0415

    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        _write_noise(folder / "ten.wav", 10.0)
        _write_noise(folder / "one.wav", 1.0)
        preset = folder / "p.toml"
        tonebench = [sys.executable, "-m", "tonebench"]
        subprocess.run([*tonebench, "edit", str(preset), *_LINES], check=True, capture_output=True)
        np.save(folder / "rows.npy", from_chain(load_preset(preset).preset.chain).rows)
        bare = [sys.executable, "-c", _BARE, str(folder / "ten.wav"), str(folder / "b.wav"), str(folder / "rows.npy")]
        ours = [*tonebench, "render", str(preset), str(folder / "ten.wav"), "-o", str(folder / "o.wav"), "--force"]
        short = [*ours[:5], str(folder / "one.wav"), *ours[6:]]
        pairs = [(_run(bare), _run(ours)) for _ in range(RUNS)]
        memory = _run(short)[1]
    bare_s = statistics.median(one[0][0] for one in pairs)
    ours_s = statistics.median(one[1][0] for one in pairs)
    ten = statistics.median(one[1][1] for one in pairs)
    return [
        Row("render, 10 min stereo, 8 sections", f"{ours_s:.2f} s", f"bare loop, {bare_s:.2f} s", ours_s / bare_s, 1.3),
        Row("memory of that render", f"{ten:.0f} MB", f"the same of 1 min, {memory:.0f} MB", ten / memory, 1.05),
    ]
