"""The screen in a real terminal: opened, played, edited, saved, left, and opened again."""

import os
import signal
import time
from pathlib import Path

import pytest

from tests.screen.terminal_session import need_tmux, terminal

_SHARED = Path("/dev/shm")  # noqa: S108 - read only: where Linux shows shared memory


@pytest.mark.terminal
def test_the_job_in_a_terminal(tmp_path: Path) -> None:
    """Nothing sounds before Space; what was shaped is in the file; q leaves with code 0 and no traceback."""
    need_tmux()
    with terminal(tmp_path, "open boathouse --device silent") as one:
        first = one.wait_for("unit circle", "pole of section 1", "findings", "stopped")
        assert "playing" not in first.splitlines()[0]
        one.keys("Space")
        one.wait_for("playing, no sound")
        one.keys("d")
        one.wait_for("hearing the change")
        one.keys("o", "Right", "Right", "Up")
        one.wait_for("*")
        one.keys("Enter")
        one.type_text("peak 320 Hz -4 dB q 1.2")
        one.keys("Enter")
        one.wait_for("320 Hz", "-4.0 dB")
        one.keys("S")
        one.wait_for("save boathouse.toml")
        one.keys("Enter")
        one.wait_for("saved boathouse.toml")
        one.keys("q")
        last = one.wait_for("exit code 0.")
        assert "Traceback" not in last
    text = (tmp_path / "boathouse.toml").read_text(encoding="utf-8")
    assert "frequency_hz = 320" in text
    with terminal(tmp_path, "boathouse.toml --device silent", size=(80, 24)) as one:
        one.wait_for("320 Hz", "unit circle")
        one.keys("q")
        assert "Traceback" not in one.wait_for("exit code 0.")


@pytest.mark.terminal
def test_a_bad_preset_is_one_line_in_a_terminal(tmp_path: Path) -> None:
    """The screen is left, the terminal is whole again, and the code is 2."""
    need_tmux()
    (tmp_path / "bad.toml").write_text("tonebench = 1\n[chain\n", encoding="utf-8")
    with terminal(tmp_path, "bad.toml --device silent") as one:
        text = one.wait_for("exit code 2.")
    lines = [line for line in text.splitlines() if line.strip()]
    assert len(lines) <= 3  # the message may fill two rows
    assert lines[0].startswith("tonebench: bad.toml")
    assert "line 2" in " ".join(lines)


@pytest.mark.terminal
@pytest.mark.skipif(not _SHARED.is_dir(), reason="shared memory is no folder on this system")
@pytest.mark.parametrize("is_window_closed", [True, False])
def test_an_end_from_outside_leaves_nothing_behind(tmp_path: Path, *, is_window_closed: bool) -> None:
    """The window is closed, or the system ends the program, while it plays: no process, no shared memory stays."""
    need_tmux()
    with terminal(tmp_path, "open boathouse --device silent") as one:
        one.wait_for("unit circle", "stopped")
        one.keys("Space")
        one.wait_for("playing, no sound")
        shell = int(one.tmux("list-panes", "-t", "bench", "-F", "#{pane_pid}"))
        family = _descendants(shell)
        # What this very program has mapped: other programs' shared memory is none of this test's business.
        held = {path for process in family for path in _shared_memory(process)}
        assert held
        if is_window_closed:
            one.close()
        else:
            os.kill(family[0], signal.SIGTERM)
        deadline = time.monotonic() + 20.0
        while time.monotonic() < deadline and (any(map(_is_alive, family)) or any(path.exists() for path in held)):
            time.sleep(0.05)
        assert [process for process in family if _is_alive(process)] == []
        assert [path for path in held if path.exists()] == []


def _descendants(process: int) -> list[int]:
    found: list[int] = []
    for child in Path(f"/proc/{process}/task/{process}/children").read_text(encoding="ascii").split():
        found += [int(child), *_descendants(int(child))]
    return found


def _shared_memory(process: int) -> set[Path]:
    maps = Path(f"/proc/{process}/maps").read_text(encoding="utf-8").splitlines()
    return {Path(line.split()[-1]) for line in maps if f"{_SHARED}/psm_" in line and "(deleted)" not in line}


def _is_alive(process: int) -> bool:
    try:
        state = Path(f"/proc/{process}/stat").read_text(encoding="utf-8").rpartition(")")[2].split()[0]
    except OSError:
        return False
    return state != "Z"
