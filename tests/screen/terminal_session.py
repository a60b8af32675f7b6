"""A real terminal for tests: a tmux server of its own, so that no other session is touched."""

import contextlib
import os
import shutil
import subprocess
import sys
import time
import uuid
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

_DEADLINE_S = 40.0  # a slow machine starts the engine's process in a few seconds


@dataclass(frozen=True)
class TerminalSession:
    """A program in a terminal."""

    server: str

    def tmux(self, *arguments: str) -> str:
        """Run one command of this server."""
        command = ["tmux", "-L", self.server, *arguments]
        # readline, which pytest loads, puts its own idea of a size into these two; the program would believe it.
        environment = {name: value for name, value in os.environ.items() if name not in ("COLUMNS", "LINES")}
        done = subprocess.run(command, env=environment, capture_output=True, text=True, check=True, timeout=20)
        return done.stdout

    def keys(self, *names: str) -> None:
        """Press keys, by tmux's names."""
        self.tmux("send-keys", "-t", "bench", *names)

    def type_text(self, text: str) -> None:
        """Type characters as they are."""
        self.tmux("send-keys", "-t", "bench", "-l", text)

    def text(self) -> str:
        """Return what is on the screen."""
        return self.tmux("capture-pane", "-p", "-t", "bench")

    def close(self) -> None:
        """Close the terminal with whatever runs in it, as a person closes a window; may be called twice."""
        with contextlib.suppress(subprocess.CalledProcessError):
            self.tmux("kill-server")

    def wait_for(self, *words: str) -> str:
        """Wait until all words are on the screen, and return it."""
        deadline = time.monotonic() + _DEADLINE_S
        while time.monotonic() < deadline:
            text = self.text()
            if all(word in text for word in words):
                return text
            time.sleep(0.05)
        raise AssertionError(f"{words} did not come; on the screen is\n{self.text()}")


def need_tmux() -> None:
    """Skip where there is no tmux, unless the machine must have it."""
    if shutil.which("tmux") is None:
        if os.environ.get("TONEBENCH_REQUIRE_SOUND"):
            pytest.fail("tmux is missing, and TONEBENCH_REQUIRE_SOUND asks for the terminal tests")
        pytest.skip("tmux is missing: apt install tmux")


@contextlib.contextmanager
def terminal(folder: Path, arguments: str, size: tuple[int, int] = (120, 40)) -> Iterator[TerminalSession]:
    """Run ``tonebench`` with these arguments in a terminal; its exit code is printed when it has ended."""
    session = TerminalSession(f"tonebench-test-{uuid.uuid4().hex[:8]}")
    # The terminal must outlive the program, so that what it left behind can be read.
    command = f"'{sys.executable}' -m tonebench {arguments}; echo \"exit code $?.\"; exec sleep 60"
    width, height = (str(one) for one in size)
    session.tmux(
        "-f", os.devnull, "new-session", "-d", "-s", "bench", "-x", width, "-y", height, "-c", str(folder), command
    )
    try:
        yield session
    finally:
        session.close()
