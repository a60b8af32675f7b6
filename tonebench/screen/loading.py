"""Everything that is loaded after the first picture: numpy, the rooms below, preset, clip and engine.

Runs in a thread. Imports stand inside the functions, because this module is on the way to the first picture.
"""

import re
import sys
import threading
from contextlib import redirect_stderr
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    from tonebench.files.clips import Clip
    from tonebench.files.presets import LoadedPreset
    from tonebench.screen.bench import Bench, Engine

STARTING_PRESET = "boathouse"
_NEW_RATE_HZ = 48000.0


@dataclass(frozen=True, slots=True)
class Wanted:
    """What was asked for on the command line; None means the usual."""

    preset: str | None = None
    clip: str | None = None
    device: str | int | None = None


class Loader:
    """Loads once, and closes what it opened, whichever of the two comes first.

    Parameters
    ----------
    wanted : Wanted
    make_engine : callable, optional
        From a device to an engine; tests give one.

    """

    def __init__(self, wanted: Wanted, make_engine: "Callable[[str | int | None], Engine] | None" = None) -> None:
        self._wanted = wanted
        self._make_engine = make_engine or _engine_client
        self._lock = threading.Lock()
        self._engine: Engine | None = None
        self._is_closed = False

    def load(self) -> "Bench":
        """Import and load everything.

        Raises
        ------
        TonebenchError
            With one plain line, if preset or clip cannot be used.

        """
        from tonebench.screen.bench import Bench  # noqa: PLC0415
        from tonebench.session.session import Session  # noqa: PLC0415

        loaded, clip = load_material(self._wanted.preset, self._wanted.clip)
        engine = self._open_engine()
        bench = Bench(Session(loaded.preset), clip, engine, notes=(*loaded.notes, *clip.notes))
        place(bench, loaded, self._wanted.preset or (None if self._wanted.clip else STARTING_PRESET))
        engine.load_clip(clip.frames, clip.sample_rate_hz)
        engine.set_level_db(bench.level_db)
        bench.push()
        return bench

    def _open_engine(self) -> "Engine":
        with self._lock:
            if self._is_closed:
                raise RuntimeError("the screen was left while it was loading")
            self._engine = self._make_engine(self._wanted.device)
            return self._engine

    def close(self) -> None:
        """Close the engine if there is one, and see to it that there will be none."""
        with self._lock:
            self._is_closed = True
            engine, self._engine = self._engine, None
        if engine is not None:
            engine.close()


def _engine_client(device: str | int | None) -> "Engine":
    from multiprocessing import resource_tracker  # noqa: PLC0415

    from tonebench.engine.client import EngineClient  # noqa: PLC0415

    # Textual puts an object without a file descriptor in place of sys.stderr; the tracker of shared memory hands
    # that descriptor to its process and fails. It is started here, once, with the real one.
    with redirect_stderr(sys.__stderr__):
        resource_tracker.ensure_running()
        return EngineClient(device=device)


def load_material(preset: str | None, clip: str | None) -> "tuple[LoadedPreset, Clip]":
    """Load a preset and a clip by the rules of the command line.

    Neither: the starting ones. A clip alone: an empty chain at its rate. A preset alone: the bundled clip that suits
    it. A ``.toml`` path that does not exist: a new preset, made on save.
    """
    from tonebench.files.bundled import clip_for_preset, find_clip, find_preset  # noqa: PLC0415
    from tonebench.files.clips import load_clip  # noqa: PLC0415
    from tonebench.files.presets import load_preset  # noqa: PLC0415

    if preset is None and clip is not None:
        held = load_clip(find_clip(clip))
        return new_preset(clean_name(Path(held.name).stem), held.sample_rate_hz, None), held
    name = preset or STARTING_PRESET
    path = Path(name)
    is_new = path.suffix == ".toml" and not path.exists()
    if not is_new:
        path = find_preset(name)
    loaded = None if is_new else load_preset(path)
    held = load_clip(find_clip(clip) if clip is not None else clip_for_preset(path))
    return loaded or new_preset(clean_name(path.stem), held.sample_rate_hz, path), held


def new_preset(name: str, sample_rate_hz: float, path: Path | None) -> "LoadedPreset":
    """Return an empty preset."""
    from tonebench.core.chain import Chain  # noqa: PLC0415
    from tonebench.files.presets import LoadedPreset  # noqa: PLC0415
    from tonebench.session.preset import Preset  # noqa: PLC0415

    return LoadedPreset(Preset(Chain(name, sample_rate_hz)), path, ())


def clean_name(name: str) -> str:
    """Return a file's name as a chain's name: one line, without what a preset's names may not hold."""
    plain = "".join(one if one.isprintable() else " " for one in name).replace('"', "").replace("*/", "")
    return re.sub(r"\s+", " ", plain).strip()[:60] or "untitled"


def place(bench: "Bench", loaded: "LoadedPreset", name: str | None) -> None:
    """Settle where the preset is saved: its own file, or for a bundled one a copy that saving asks for."""
    from tonebench.files.bundled import is_bundled  # noqa: PLC0415
    from tonebench.files.presets import read_text  # noqa: PLC0415

    path = loaded.path
    bench.path, bench.like = path, None
    if path is not None and is_bundled(path):
        bench.path, bench.like = None, read_text(path)
    stem = path.stem if path is not None else Path(name or bench.session.chain.name).stem
    bench.suggested = f"{stem or 'preset'}.toml"
