"""Opens the real application without a terminal, on a small chain and an engine that makes no process."""

import contextlib
from collections.abc import AsyncIterator
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from textual.pilot import Pilot

from tests.screen.fakes import FakeEngine
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.files.clips import Clip
from tonebench.screen.app import BenchApp
from tonebench.screen.bench import Bench
from tonebench.screen.loading import Loader, Wanted
from tonebench.session.preset import Preset
from tonebench.session.session import Session

RATE_HZ = 48000.0


def hum_clip(sample_rate_hz: float = RATE_HZ, seconds: float = 1.0) -> Clip:
    """Return 50.2 Hz and its double over a little noise, made here."""
    time = np.arange(int(seconds * sample_rate_hz)) / sample_rate_hz
    noise = np.random.default_rng(7).standard_normal(time.size)
    frames = 0.1 * np.sin(2 * np.pi * 50.2 * time) + 0.05 * np.sin(2 * np.pi * 100.4 * time) + 1e-4 * noise
    return Clip(frames.astype(np.float32)[:, None], sample_rate_hz, "hum.wav")


def small_chain(sample_rate_hz: float = RATE_HZ) -> Chain:
    """Return a notch, a peak and a low shelf."""
    sections = (
        by_kind(Kind.NOTCH, 50.0, ("radius", 0.9995)),
        by_kind(Kind.PEAK, 320.0, ("q", 1.2), -4.0),
        by_kind(Kind.LOW_SHELF, 120.0, ("q", 0.7071), -3.0),
    )
    return Chain("small", sample_rate_hz, sections)


@dataclass
class ReadyLoader(Loader):
    """Hands over a bench that stands already."""

    bench: Bench
    is_closed: bool = field(default=False, init=False)

    def __post_init__(self) -> None:
        super().__init__(Wanted())

    def load(self) -> Bench:
        """Return the bench."""
        return self.bench

    def close(self) -> None:
        """Keep that it was closed."""
        self.is_closed = True


@dataclass
class Opened:
    """The application while it runs."""

    app: BenchApp
    pilot: Pilot[None]
    bench: Bench
    engine: FakeEngine

    @property
    def session(self) -> Session:
        """The session."""
        return self.bench.session

    async def press(self, *keys: str) -> None:
        """Press keys, and let the ticks after them pass."""
        await self.pilot.press(*keys)
        await self.settled()

    async def settled(self) -> None:
        """Wait until nothing waits: no pending move, no thread at work."""
        await self.pilot.pause()
        for _ in range(200):
            if not self.app._is_armed and not any(one.is_running for one in self.app.workers):
                break
            await self.pilot.pause(0.01)
        await self.pilot.pause()

    async def type_line(self, text: str) -> None:
        """Type a line as a whole and press Enter."""
        if not self.app.is_typing:
            await self.pilot.press("enter")
        self.app.typed_input.value = text
        await self.press("enter")

    @property
    def message(self) -> str:
        """What the message line says."""
        from tonebench.screen.panels.rows import MessageRow  # noqa: PLC0415

        return self.app.part(MessageRow).text

    def text(self) -> str:
        """Return all that is on the screen, row by row."""
        return "\n".join(strip.text for strip in self.app.screen._compositor.render_strips())


def make_bench(chain: Chain | None = None, clip: Clip | None = None, path: Path | None = None) -> Bench:
    """Return a bench on a fake engine."""
    held = hum_clip() if clip is None else clip
    engine = FakeEngine()
    engine.load_clip(held.frames, held.sample_rate_hz)
    return Bench(Session(Preset(small_chain() if chain is None else chain)), held, engine, path=path)


@contextlib.asynccontextmanager
async def opened(bench: Bench | None = None, size: tuple[int, int] = (120, 40)) -> AsyncIterator[Opened]:
    """Run the application until the block ends."""
    held = make_bench() if bench is None else bench
    app = BenchApp(ReadyLoader(held))
    async with app.run_test(size=size) as pilot:
        assert isinstance(held.engine, FakeEngine)
        one = Opened(app, pilot, held, held.engine)
        for _ in range(500):
            if app.bench is not None and app._has_charts:
                break
            await pilot.pause(0.01)
        await one.settled()
        yield one
