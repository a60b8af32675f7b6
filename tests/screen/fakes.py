"""An engine that makes no process and no sound: it keeps what it was told, and answers like the real one."""

from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from tonebench.core.coefficients import Coefficients
from tonebench.engine.client import EngineStatus

STOPPED = EngineStatus(
    phase="stopped",
    is_sounding_device=False,
    device_name="",
    message="",
    position_frame=0,
    loop_start_frame=0,
    loop_end_frame=1,
    is_muted=False,
    hear="output",
    level_db=-20.0,
    ceiling_db=-6.0,
    guard="idle",
    guard_reason="",
    underflows=0,
    callback_load=0.0,
    output_peak_db=-np.inf,
    sample_rate_hz=48000.0,
    latency_ms=0.0,
)


@dataclass
class FakeEngine:
    """Keeps every command, in order."""

    told: list[tuple[object, ...]] = field(default_factory=list)
    coefficients: list[Coefficients] = field(default_factory=list)
    now: EngineStatus = STOPPED
    is_closed: bool = False
    frames: NDArray[np.float32] = field(default_factory=lambda: np.zeros((1, 1), np.float32))

    def load_clip(self, frames: NDArray[np.float32], sample_rate_hz: float) -> None:
        """Keep the clip."""
        self.frames = frames
        self.now = replace(self.now, sample_rate_hz=sample_rate_hz, loop_end_frame=len(frames))

    def set_coefficients(self, coefficients: Coefficients) -> None:
        """Keep the coefficients."""
        self.coefficients.append(coefficients)

    def play(self) -> None:
        """Play."""
        self._set("play", phase="playing")

    def stop(self) -> None:
        """Stop."""
        self._set("stop", phase="stopped")

    def rearm(self) -> None:
        """Re-arm."""
        self._set("rearm", guard="idle")

    def set_muted(self, is_muted: bool) -> None:
        """Mute."""
        self._set("muted", is_muted=is_muted)

    def set_level_db(self, level_db: float) -> None:
        """Set the level."""
        self._set("level", level_db=level_db)

    def set_hear(self, what: str) -> None:
        """Hear something else."""
        self._set("hear", hear=what)

    def set_loop(self, start_frame: int, end_frame: int) -> None:
        """Set the loop."""
        self._set("loop", loop_start_frame=start_frame, loop_end_frame=end_frame)

    def set_ceiling_db(self, ceiling_db: float) -> None:
        """Set the ceiling."""
        self._set("ceiling", ceiling_db=ceiling_db)

    def status(self) -> EngineStatus:
        """Return what was told."""
        return self.now

    def recent(self, frames: int) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
        """Return the clip's beginning, before and after."""
        return self.frames[:frames], 0.5 * self.frames[:frames]

    def close(self) -> None:
        """Close."""
        self.is_closed = True

    def _set(self, word: str, **values: object) -> None:
        self.told.append((word, *values.values()))
        self.now = replace(self.now, **values)  # type: ignore[arg-type]  # one word, one field
