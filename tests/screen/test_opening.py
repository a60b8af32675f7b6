"""What opens with what, what is told when it does not, and that the first picture waits for nothing heavy."""

import asyncio
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from tests.screen.fakes import FakeEngine
from tonebench.errors import ClipError, PresetError, StorageError, TonebenchError
from tonebench.files.clips import ClipWriter
from tonebench.screen.app import BenchApp
from tonebench.screen.loading import Loader, Wanted, load_material
from tonebench.screen.start import start
from tonebench.screen.terminal import choose_marks

CHAIN = 'tonebench = 1\n[chain]\nname = "one"\nsample_rate_hz = 48000\ngain_db = 0.0\ncombine = "series"\n'


def _write_clip(path: Path, sample_rate_hz: float = 44100.0) -> Path:
    with ClipWriter(path, sample_rate_hz, 1) as writer:
        writer.write(np.full((4410, 1), 0.1, np.float32))
    return path


def test_a_clip_alone_has_an_empty_chain_at_its_rate(tmp_path: Path) -> None:
    """The demo chain is never laid over someone's recording."""
    path = _write_clip(tmp_path / 'take "7".wav')
    loaded, clip = load_material(None, str(path))
    assert loaded.preset.chain.sections == ()
    assert loaded.preset.chain.sample_rate_hz == clip.sample_rate_hz == 44100.0
    assert loaded.preset.chain.name == "take 7"
    assert loaded.path is None


def test_a_path_that_does_not_exist_is_a_new_preset(tmp_path: Path) -> None:
    """Made on save, not before."""
    path = tmp_path / "new.toml"
    loaded, clip = load_material(str(path), None)
    assert (loaded.path, loaded.preset.chain.sections) == (path, ())
    assert clip.name == "boathouse.flac"
    assert not path.exists()


def test_a_preset_alone_has_a_clip_that_suits(tmp_path: Path) -> None:
    """A person's own preset gets the boathouse; with a clip, that one."""
    path = tmp_path / "mine.toml"
    path.write_text(CHAIN, encoding="utf-8")
    assert load_material(str(path), None)[1].name == "boathouse.flac"
    assert load_material(str(path), str(_write_clip(tmp_path / "a.wav")))[1].name == "a.wav"


def test_nothing_given_opens_the_boathouse() -> None:
    """Clip and preset of the same name, and saving asks for a name."""
    loaded, clip = load_material(None, None)
    assert clip.name == "boathouse.flac"
    assert loaded.path is not None
    assert loaded.path.stem == "boathouse"
    bench = Loader(Wanted(), lambda _: FakeEngine()).load()
    assert bench.path is None
    assert bench.suggested == "boathouse.toml"
    assert bench.like is not None


@pytest.mark.parametrize(
    ("text", "kind", "reason"),
    [
        ("chain = [", PresetError, "line 1"),
        (CHAIN.replace("48000", '"fast"'), PresetError, "sample_rate_hz"),
        (CHAIN + '[[section]]\nkind = "notch"\nfrequency_hz = 30000\nq = 1\n', PresetError, "frequency_hz"),
    ],
)
def test_a_bad_preset_leaves_the_screen_with_one_line(
    tmp_path: Path, text: str, kind: type[TonebenchError], reason: str
) -> None:
    """The error goes to the command line, which prints it; nothing was started."""
    path = tmp_path / "bad.toml"
    path.write_text(text, encoding="utf-8")

    async def run() -> BenchApp:
        app = BenchApp(Loader(Wanted(str(path)), lambda _: FakeEngine()))
        async with app.run_test() as pilot:
            for _ in range(300):
                if app._exit:
                    break
                await pilot.pause(0.01)
        return app

    app = asyncio.run(run())
    assert isinstance(app.failure, kind)
    assert reason in str(app.failure)
    assert "bad.toml" in str(app.failure)


def test_start_raises_what_could_not_be_loaded(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """One error with one line; a text file named .wav is no clip."""
    path = tmp_path / "text.wav"
    path.write_text("no sound", encoding="utf-8")
    monkeypatch.setattr(BenchApp, "run", lambda app: app.run_headless())
    monkeypatch.setattr(BenchApp, "run_headless", _run_until_left, raising=False)
    with pytest.raises(ClipError, match=r"text\.wav is not audio"):
        start(None, str(path), "silent")
    with pytest.raises(StorageError, match="neither a file nor a bundled preset"):
        start("nonsense", None, "silent")


def _run_until_left(app: BenchApp) -> None:
    async def run() -> None:
        async with app.run_test() as pilot:
            for _ in range(300):
                if app._exit:
                    break
                await pilot.pause(0.01)

    asyncio.run(run())


def test_the_engine_is_closed_whichever_comes_first() -> None:
    """Closed after it was made; never made after the screen was left."""
    engine = FakeEngine()
    loader = Loader(Wanted(), lambda _: engine)
    loader._open_engine()
    loader.close()
    loader.close()
    assert engine.is_closed
    with pytest.raises(RuntimeError, match="left while it was loading"):
        loader._open_engine()


def test_the_first_picture_loads_nothing_heavy() -> None:
    """In a process of its own: the shell without numpy, the screen's whole path without scipy and sounddevice."""
    script = (
        "import sys\n"
        "import tonebench.screen.start\n"
        "heavy = {'numpy', 'scipy', 'sounddevice', 'soundfile', 'tomlkit'}\n"
        "assert not heavy & set(sys.modules), heavy & set(sys.modules)\n"
        "rooms = ('tonebench.core', 'tonebench.session', 'tonebench.files')\n"
        "assert not [name for name in sys.modules if name.startswith(rooms)]\n"
        "import tonebench.screen.bench, tonebench.screen.pictures, tonebench.screen.spectra\n"
        "import tonebench.screen.charts.rim, tonebench.screen.charts.response, tonebench.screen.charts.spectrum\n"
        "import tonebench.files.presets, tonebench.files.clips, tonebench.builds, tonebench.target.check\n"
        "import tonebench.engine.client, tonebench.session.session, tonebench.hum.peaks\n"
        "assert 'numpy' in sys.modules\n"
        "assert not {'scipy', 'sounddevice'} & set(sys.modules)\n"
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, timeout=60, check=False)
    assert done.returncode == 0, done.stderr


def test_marks_follow_the_terminal() -> None:
    """The variable wins; a slip in it is passed over; an encoding without braille gets ASCII."""
    assert choose_marks({}, "utf-8") == "braille"
    assert choose_marks({}, "ISO-8859-1") == "ascii"
    assert choose_marks({}, "no-such-encoding") == "ascii"
    assert choose_marks({"TONEBENCH_MARKS": "half-block"}, "utf-8") == "half-block"
    assert choose_marks({"TONEBENCH_MARKS": "dots"}, "utf-8") == "braille"
