"""Start-up as ratios: the help beside an empty Python, the first picture beside a bare Textual application.

Both of a pair run in turn in the same process of measuring, several times, and the medians are compared; so the
speed of the machine cancels.
"""

import fcntl
import os
import pty
import select
import statistics
import struct
import subprocess
import sys
import termios
import time
from pathlib import Path

from tests.benchmarks.row import Row

RUNS = 7
_SIZE = struct.pack("HHHH", 40, 120, 0, 0)
_ROOT = Path(__file__).resolve().parents[2]
_BARE = (
    "from textual.app import App\n"
    "from textual.widgets import Static\n"
    "class Bare(App):\n"
    "    def compose(self):\n"
    "        yield Static('first paint')\n"
    "Bare().run()\n"
)
_BENCH = "import sys; from tonebench.cli.main import main; sys.exit(main(['open', '--device', 'silent']))"


def seconds_to_end(arguments: list[str]) -> float:
    """Return how long a process takes to end, in seconds."""
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, cwd=_ROOT, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def seconds_to_paint(script: str, words: bytes) -> float:
    """Return the time from the start of a process to words on its terminal, in seconds; then end that process."""
    start = time.perf_counter()
    child, terminal = pty.fork()
    if child == 0:
        os.chdir(_ROOT)
        os.environ["TERM"] = "xterm-256color"
        os.execv(sys.executable, [sys.executable, "-c", script])  # noqa: S606 - the interpreter that runs this
    fcntl.ioctl(terminal, termios.TIOCSWINSZ, _SIZE)
    try:
        _read_until(terminal, words, start + 30.0)
        return time.perf_counter() - start
    finally:
        _end(child, terminal)


def _read_until(terminal: int, words: bytes, deadline: float) -> None:
    seen = b""
    while words not in seen:
        ready, _, _ = select.select([terminal], [], [], max(deadline - time.perf_counter(), 0.0))
        if not ready:
            raise TimeoutError(f"{words!r} did not come; seen {seen[-400:]!r}")
        seen += os.read(terminal, 65536)


def _end(child: int, terminal: int) -> None:
    """Press Ctrl-Q, and read until the program has ended, so that nothing is left behind."""
    os.write(terminal, b"\x11")
    deadline = time.perf_counter() + 20.0
    while time.perf_counter() < deadline:
        try:
            if select.select([terminal], [], [], 0.05)[0]:
                os.read(terminal, 65536)
        except OSError:  # the other end is closed
            break
        if os.waitpid(child, os.WNOHANG)[0]:
            os.close(terminal)
            return
    else:
        os.kill(child, 9)
    os.waitpid(child, 0)
    os.close(terminal)


def rows() -> list[Row]:
    """Measure both pairs."""
    pairs = [(seconds_to_end(["-c", "pass"]), seconds_to_end(["-m", "tonebench", "--help"])) for _ in range(RUNS)]
    paints = [(seconds_to_paint(_BARE, b"first paint"), seconds_to_paint(_BENCH, b"findings")) for _ in range(RUNS)]
    return [
        _row("tonebench --help", "python -c pass", pairs, 4.0),
        _row("first paint of the screen", "a bare Textual application", paints, 1.5),
    ]


def _row(what: str, yardstick: str, pairs: list[tuple[float, float]], goal: float) -> Row:
    bare, ours = (statistics.median(one) for one in zip(*pairs, strict=True))
    return Row(what, f"{ours:.3f} s", f"{yardstick}, {bare:.3f} s", ours / bare, goal)
