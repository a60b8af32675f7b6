"""Run the program as its users do, in a process of its own."""

import os
import subprocess
import sys
from pathlib import Path


def tonebench(*arguments: str, cwd: Path, timeout_s: float = 120.0) -> subprocess.CompletedProcess[str]:
    """Return what ``python -m tonebench`` printed and its exit code; output is a pipe of 80 columns."""
    environment = {**os.environ, "COLUMNS": "80", "TERM": "xterm-256color"}
    return subprocess.run(
        [sys.executable, "-m", "tonebench", *arguments],
        cwd=cwd,
        env=environment,
        check=False,
        capture_output=True,
        text=True,
        timeout=timeout_s,
        stdin=subprocess.DEVNULL,
    )


def assert_refused(result: subprocess.CompletedProcess[str], *words: str) -> None:
    """Check for exit code 2, one plain line on stderr that holds these words, and nothing on stdout."""
    assert result.returncode == 2, result.stderr
    lines = result.stderr.strip().splitlines()
    assert len(lines) == 1, result.stderr
    assert "Traceback" not in result.stderr
    for word in words:
        assert word in lines[0], lines[0]
    assert result.stdout == ""
