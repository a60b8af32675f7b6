"""A file through a chain, block by block, with the very kernel that plays.

Memory does not grow with the file's length. What is written is the kernel's double rounded to float32, which is what
the engine hands to the device when level and guard change nothing.
"""

from collections.abc import Callable
from pathlib import Path

import numpy as np

from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.rates import at_rate
from tonebench.engine.kernel import Kernel
from tonebench.files.clips import ClipWriter, read_blocks

BLOCK_FRAMES = 65536  # about 1 MB of stereo doubles: against the call overhead of the kernel


def render_file(
    chain: Chain,
    source: Path,
    destination: Path,
    *,
    is_forced: bool = False,
    tell_frames: Callable[[int], None] = lambda _: None,
) -> None:
    """Render one audio file through a chain to a float32 WAV of the same length and rate.

    The chain is taken to the file's own rate, Hz and seconds kept.

    Parameters
    ----------
    chain : Chain
    source, destination : Path
    is_forced : bool
        Overwrite an existing destination.
    tell_frames : callable
        Called with the number of frames done since the last call.

    Raises
    ------
    ClipError, StorageError
        If a file cannot be used; the destination is left as it was.

    """
    with read_blocks(source, BLOCK_FRAMES) as blocks:
        running = at_rate(chain, blocks.sample_rate_hz).chain
        kernel = Kernel(from_chain(running), blocks.channels)
        with ClipWriter(
            destination, blocks.sample_rate_hz, blocks.channels, is_forced=is_forced, frames=blocks.frames
        ) as writer:
            for block in blocks:
                with np.errstate(over="ignore", invalid="ignore"):  # an unstable chain may grow without bound
                    writer.write(kernel.process_block(block).astype(np.float32))
                tell_frames(block.shape[0])
