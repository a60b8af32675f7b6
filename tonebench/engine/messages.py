"""What goes through the pipe to the child, beside coefficients themselves."""

from dataclasses import dataclass

from tonebench.core.coefficients import Coefficients


@dataclass(frozen=True, slots=True)
class Options:
    """What the child is started with."""

    shared_name: str
    capture_frames: int
    device: str | int | None
    block_frames: int


@dataclass(frozen=True, slots=True)
class ChainMessage:
    """A chain; the child writes its number back when it has taken it, and only then the next one is sent."""

    number: int
    coefficients: Coefficients


@dataclass(frozen=True, slots=True)
class ClipMessage:
    """A clip in shared memory, and the chain that it starts with."""

    name: str
    shape: tuple[int, int]
    sample_rate_hz: float
    number: int
    coefficients: Coefficients
