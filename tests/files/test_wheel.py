"""The built wheel carries clips and presets, and finds them without the checkout."""

import importlib.util
import os
import subprocess
import sys
import zipfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
# Run outside the checkout with the wheel's folder first on the path.
_LIST = (
    "import tonebench; from tonebench.files.bundled import *;"
    "print(tonebench.__file__); print(*[i.path for i in (*bundled_presets(), *bundled_clips())], sep='\\n')"
)


def _run(*arguments: str, cwd: Path, **extra: str) -> str:
    done = subprocess.run(
        [sys.executable, *arguments],
        cwd=cwd,
        env={**os.environ, **extra},
        capture_output=True,
        text=True,
        timeout=200,
        check=False,
    )
    assert done.returncode == 0, done.stdout[-1500:] + done.stderr[-1500:]
    return done.stdout


def test_wheel_carries_presets_and_clips_and_finds_them(tmp_path: Path) -> None:
    """Every preset and clip of the checkout is in the wheel, and found from it after installing."""
    has_backend = importlib.util.find_spec("hatchling") is not None
    _run(
        "-m",
        "build",
        "--wheel",
        *(["--no-isolation"] if has_backend else []),
        "-o",
        str(tmp_path),
        str(ROOT),
        cwd=tmp_path,
    )
    (wheel,) = tmp_path.glob("*.whl")
    shipped = [*(ROOT / "presets").glob("*.toml"), *(ROOT / "clips").glob("*.flac")]
    assert len(shipped) >= 9  # six presets and three clips
    with zipfile.ZipFile(wheel) as archive:
        for path in shipped:
            assert archive.read(f"tonebench/bundled/{path.parent.name}/{path.name}") == path.read_bytes()
    target = tmp_path / "installed"
    _run("-m", "pip", "install", "-q", "--no-deps", "--no-index", "--target", str(target), str(wheel), cwd=tmp_path)
    lines = _run("-c", _LIST, cwd=tmp_path, PYTHONPATH=str(target)).splitlines()
    assert all(Path(line).is_relative_to(target) for line in lines)
    assert {Path(line).name for line in lines[1:]} == {path.name for path in shipped}
