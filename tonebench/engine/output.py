"""Opening what sound goes to: a PortAudio device, or the silent clock with a line that says what to install."""

import contextlib
import os
import platform
import time
from dataclasses import dataclass
from typing import Any

from tonebench.engine.callback import Callback
from tonebench.engine.shared import Meter, SharedBlock
from tonebench.engine.silent import SilentClock

SILENT = "silent"
_INSTALL = {
    "Linux": "on Debian or Ubuntu: apt install libportaudio2",
    "Darwin": "reinstall the sounddevice package, whose wheel brings it",
    "Windows": "reinstall the sounddevice package, whose wheel brings it",
}


@dataclass(slots=True)
class Output:
    """An open device or clock.

    Attributes
    ----------
    name, message : str
        The device's name, and one plain line if there is something to say.
    is_device : bool
    latency_s : float
    opened_s : float
        On the monotonic clock.

    """

    stream: Any
    name: str
    message: str
    is_device: bool
    latency_s: float
    opened_s: float

    @property
    def is_active(self) -> bool:
        """Whether blocks are still asked for."""
        return bool(self.stream.active)

    def close(self) -> None:
        """Close it; a device that is gone may complain, and that is no news."""
        with contextlib.suppress(Exception):
            self.stream.close()


@dataclass(frozen=True, slots=True)
class Wanted:
    """What is to be opened: device (None is the default), rate, block, and what fills the blocks."""

    device: str | int | None
    sample_rate_hz: float
    block_frames: int
    callback: Callback
    shared: SharedBlock

    def silent(self, message: str) -> Output:
        """Start the silent clock instead of a device."""
        clock = SilentClock(self.callback.fill, self.sample_rate_hz, self.block_frames)
        clock.start()
        return Output(clock, "", message, is_device=False, latency_s=0.0, opened_s=time.monotonic())


def open_output(wanted: Wanted) -> Output | str:
    """Open the device, or the silent clock where there is none.

    Returns
    -------
    Output or str
        A string is one plain line: a device was there before, or was asked for by name, and cannot be opened now.

    """
    if wanted.device == SILENT:
        return wanted.silent("no sound: the silent clock was asked for")
    sounddevice = load_sounddevice()
    if isinstance(sounddevice, str):
        return wanted.silent(sounddevice)
    had_device = bool(wanted.shared.meters[Meter.IS_DEVICE])
    if had_device:
        _look_again(sounddevice)
    try:
        stream = sounddevice.OutputStream(
            samplerate=wanted.sample_rate_hz,
            blocksize=wanted.block_frames,
            device=wanted.device,
            channels=2,
            dtype="float32",
            latency="low",
            callback=_stream_callback(wanted.callback, wanted.shared),
        )
        wanted.shared.meters[Meter.IS_DEVICE] = 1.0  # before the first block says that it plays
        stream.start()
        name = str(sounddevice.query_devices(stream.device)["name"])
    except Exception as error:  # noqa: BLE001  (PortAudioError, ValueError, and what drivers make up)
        wanted.shared.meters[Meter.IS_DEVICE] = float(had_device)
        return _failed(" ".join(str(error).split()), wanted, sounddevice)
    return Output(stream, name, "", is_device=True, latency_s=float(stream.latency), opened_s=time.monotonic())


def silence_descriptor_two() -> None:
    """Send what ALSA and PortAudio print nowhere: it would tear the screen."""
    with contextlib.suppress(OSError):
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, 2)
        os.close(nowhere)


def load_sounddevice() -> Any:
    """Return the sounddevice module, or one plain line why it cannot be used."""
    try:
        import sounddevice  # noqa: PLC0415  (loads PortAudio; only here, in a process that can be killed)
    except OSError:
        return f"no sound: PortAudio is not installed; {_INSTALL.get(platform.system(), 'install it')}"
    except ImportError as error:
        return f"no sound: the sounddevice package cannot be loaded ({error}); reinstall tonebench"
    return sounddevice


def _look_again(sounddevice: Any) -> None:
    """Let PortAudio list the devices anew: one that came back is not seen otherwise."""
    with contextlib.suppress(Exception):
        sounddevice._terminate()  # noqa: SLF001  (its documented way to do this)
        sounddevice._initialize()  # noqa: SLF001


def _stream_callback(callback: Callback, shared: SharedBlock) -> Any:
    def fill(out: Any, _frames: int, _time: Any, status: Any) -> None:
        if status.output_underflow:
            shared.meters[Meter.UNDERFLOWS] += 1
        callback.fill(out)

    return fill


def _failed(reason: str, wanted: Wanted, sounddevice: Any) -> Output | str:
    """Decide between waiting for a device that was there, and the silent clock."""
    if wanted.shared.meters[Meter.IS_DEVICE]:
        return f"the sound device cannot be opened ({reason}); trying again every second"
    if not any(one["max_output_channels"] > 0 for one in sounddevice.query_devices()):
        return wanted.silent("no sound: there is no sound device; connect one and start again")
    which = "the default sound device" if wanted.device is None else f"the sound device {wanted.device}"
    return wanted.silent(
        f"no sound: {which} cannot play at {wanted.sample_rate_hz:g} Hz ({reason}); choose another: tonebench devices"
    )
