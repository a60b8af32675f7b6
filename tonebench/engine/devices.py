"""What can play sound here, asked in a process of its own: a driver may hang, and this process must not."""

import multiprocessing
from dataclasses import dataclass
from multiprocessing.connection import Connection

_LIMIT_S = 10.0


@dataclass(frozen=True, slots=True)
class Device:
    """One output device."""

    number: int
    name: str
    host_api: str
    output_channels: int
    default_sample_rate_hz: float
    is_default: bool


@dataclass(frozen=True, slots=True)
class DeviceListing:
    """The output devices, and one plain line if there is something to say (empty otherwise)."""

    devices: tuple[Device, ...]
    message: str


def list_devices() -> DeviceListing:
    """Return the output devices; within ten seconds, whatever the drivers do."""
    context = multiprocessing.get_context("spawn")
    ours, theirs = context.Pipe(duplex=False)
    process = context.Process(target=_ask, args=(theirs,), daemon=True)
    process.start()
    theirs.close()
    try:
        if ours.poll(_LIMIT_S):
            listing = ours.recv()
            if isinstance(listing, DeviceListing):
                return listing
        return DeviceListing((), "the sound system does not answer; play with --device silent")
    except EOFError:
        return DeviceListing((), "the sound system ended the process that asked it; play with --device silent")
    finally:
        ours.close()
        if process.is_alive():
            process.join(0.5)
        process.kill()
        process.join()
        process.close()


def _ask(connection: Connection) -> None:
    """Run in the child: load PortAudio and send what it lists."""
    from tonebench.engine.output import load_sounddevice, silence_descriptor_two  # noqa: PLC0415

    silence_descriptor_two()
    sounddevice = load_sounddevice()
    if isinstance(sounddevice, str):
        connection.send(DeviceListing((), sounddevice))
        return
    apis = sounddevice.query_hostapis()
    default = sounddevice.default.device[1]
    devices = tuple(
        Device(
            number=number,
            name=str(one["name"]),
            host_api=str(apis[one["hostapi"]]["name"]),
            output_channels=int(one["max_output_channels"]),
            default_sample_rate_hz=float(one["default_samplerate"]),
            is_default=number == default,
        )
        for number, one in enumerate(sounddevice.query_devices())
        if one["max_output_channels"] > 0
    )
    connection.send(DeviceListing(devices, "" if devices else "no sound: there is no sound device"))
