"""A private PulseAudio with a null sink: a real sound server that captures bit-exact float32.

Reached by PortAudio through ALSA's pulse plugin; no D-Bus, no session, works as root. ``norewinds=1`` is essential:
without it the stream stalls 1.4 s after its start.
"""

import contextlib
import ctypes.util
import os
import shutil
import subprocess
import tempfile
import time
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

RATE_HZ = 48000


def missing_for_sound() -> str:
    """Return what is not installed for the sound tests, or an empty text."""
    programs = [name for name in ("pulseaudio", "pactl", "parec") if shutil.which(name) is None]
    if ctypes.util.find_library("portaudio") is None:
        programs.append("libportaudio2")
    if not list(Path("/usr/lib").glob("*/alsa-lib/libasound_module_pcm_pulse.so")):
        programs.append("libasound2-plugins")
    return ", ".join(programs)


def require_sound() -> None:
    """Skip the test where something is missing; fail where sound was made mandatory."""
    missing = missing_for_sound()
    if not missing:
        return
    reason = f"not installed: {missing} (see DEVELOPERS.md)"
    if os.environ.get("TONEBENCH_REQUIRE_SOUND") == "1":
        pytest.fail(reason)
    pytest.skip(reason)


@dataclass(slots=True)
class Pulse:
    """A running server.

    Attributes
    ----------
    folder : Path
    environment : dict of str to str
        What a program needs to find this server and no other.

    """

    folder: Path
    environment: dict[str, str]
    _processes: list[subprocess.Popen[bytes]] = field(default_factory=list)

    def start(self, rate_hz: int = RATE_HZ) -> None:
        """Start the server and wait for it, at most ten seconds."""
        command = [
            "pulseaudio", "-n", "--daemonize=no", "--use-pid-file=no", "--exit-idle-time=-1", "--disable-shm=yes",
            "--high-priority=yes", "--realtime=yes",
            "-L", f"module-null-sink sink_name=tb format=float32le rate={rate_hz} channels=2 norewinds=1",
            "-L", f"module-native-protocol-unix socket={self.folder}/sock auth-anonymous=1",
        ]  # fmt: skip
        with (self.folder / "log").open("ab") as log:
            self._processes.append(subprocess.Popen(command, env=self.environment, stdout=log, stderr=log))
        deadline = time.monotonic() + 10.0
        while time.monotonic() < deadline:
            done = subprocess.run(["pactl", "info"], env=self.environment, capture_output=True, check=False)
            if done.returncode == 0:
                return
            time.sleep(0.05)
        pytest.fail("the private sound server did not start")

    def kill(self) -> None:
        """Kill the server, as a crash would."""
        for process in self._processes:
            process.kill()
            process.wait()
        self._processes.clear()

    @contextlib.contextmanager
    def recording(self) -> Iterator[Path]:
        """Record what the sink plays into a raw float32 stereo file."""
        path = self.folder / f"capture{time.monotonic_ns()}.f32"
        command = [
            "parec", "-d", "tb.monitor", "--latency-msec=50", "--format=float32le", f"--rate={RATE_HZ}",
            "--channels=2", "--raw",
        ]  # fmt: skip
        with path.open("wb") as file:
            process = subprocess.Popen(command, env=self.environment, stdout=file, stderr=subprocess.DEVNULL)
        deadline = time.monotonic() + 5.0
        while path.stat().st_size == 0 and time.monotonic() < deadline:
            time.sleep(0.02)
        try:
            yield path
        finally:
            time.sleep(0.3)  # what the monitor still holds: its latency is 50 ms
            process.terminate()
            process.wait()


@contextlib.contextmanager
def private_pulse(monkeypatch: pytest.MonkeyPatch) -> Iterator[Pulse]:
    """Run a server of one's own, and point this process and its children at it."""
    require_sound()
    folder = Path(tempfile.mkdtemp(prefix="tonebench-sound-"))
    (folder / "run").mkdir(mode=0o700)
    (folder / "home").mkdir()
    settings = {
        "PULSE_RUNTIME_PATH": str(folder / "run"),
        "XDG_RUNTIME_DIR": str(folder / "run"),
        "XDG_CONFIG_HOME": str(folder / "home"),
        "PULSE_SERVER": f"unix:{folder}/sock",
    }
    for name, value in settings.items():
        monkeypatch.setenv(name, value)
    pulse = Pulse(folder, {**os.environ})
    try:
        pulse.start()
        yield pulse
    finally:
        pulse.kill()
        shutil.rmtree(folder, ignore_errors=True)


def read_capture(path: Path) -> NDArray[np.float32]:
    """Return a recording, shape (n, 2)."""
    flat = np.fromfile(path, dtype=np.float32)
    return flat[: flat.size // 2 * 2].reshape(-1, 2)


def find_excerpt(capture: NDArray[np.float32], excerpt: NDArray[np.float32]) -> int:
    """Return where an excerpt stands in a capture, bit for bit, or −1."""
    first = excerpt[0]
    starts = np.flatnonzero((capture[: capture.shape[0] - excerpt.shape[0] + 1] == first).all(axis=1))
    for start in starts.tolist():
        if np.array_equal(capture[start : start + excerpt.shape[0]], excerpt):
            return int(start)
    return -1
