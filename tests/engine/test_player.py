"""The player: loops, edits, what is heard, level; all through the guard."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from tests import strategies
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.engine.guard import FADE_IN_S, LOOK_AHEAD_S
from tonebench.engine.kernel import Kernel
from tonebench.engine.player import CROSS_FADE_S, Loop, Player

RATE_HZ = 48000.0
LOOK_AHEAD = int(LOOK_AHEAD_S * RATE_HZ)
SETTLED = int(FADE_IN_S * RATE_HZ) + LOOK_AHEAD


def _chain(frequency_hz: float = 50.0) -> Chain:
    return Chain("x", RATE_HZ, (by_kind(Kind.NOTCH, frequency_hz, ("q", 10.0)),))


def _player(clip: NDArray[np.float32], chain: Chain | None = None, level_db: float = 0.0) -> Player:
    player = Player(clip, RATE_HZ, Kernel(from_chain(chain or _chain()), clip.shape[1]))
    player.set_level_db(level_db)
    player.is_wanted = True
    return player


def _play(player: Player, frames: int, block_frames: int = 256) -> NDArray[np.float32]:
    return np.concatenate([player.fill_block(block_frames) for _ in range(-(-frames // block_frames))])[:frames]


def _noise(frames: int, channels: int = 1) -> NDArray[np.float32]:
    return (0.05 * np.random.default_rng(2).standard_normal((frames, channels))).astype(np.float32)


@pytest.mark.parametrize("block_frames", [64, 256, 1000])
def test_loop_goes_round_exactly(block_frames: int) -> None:
    """What is heard is the kernel's answer to the clip repeated between its loop points, to both ears."""
    clip = _noise(5000)
    player = _player(clip)
    player.loop = Loop(700, 4100)
    out = _play(player, 12_000, block_frames)
    turns = np.concatenate([clip[700:4100]] * 4)[:12_000].astype(np.float64)
    expected = Kernel(from_chain(_chain()), 1).process_block(turns).astype(np.float32)
    assert np.array_equal(out[SETTLED:, 0], expected[SETTLED - LOOK_AHEAD : -LOOK_AHEAD, 0])
    assert np.array_equal(out[:, 0], out[:, 1])


def test_without_looping_the_clip_ends_in_its_own_ring() -> None:
    """After the end the chain hears zeros, and the position stays at the end."""
    clip = _noise(6000, 2)
    player = _player(clip)
    player.loop = Loop(0, 6000, is_looping=False)
    out = _play(player, 9000)
    padded = np.concatenate([clip, np.zeros((3000, 2), dtype=np.float32)]).astype(np.float64)
    expected = Kernel(from_chain(_chain()), 2).process_block(padded).astype(np.float32)
    assert np.array_equal(out[SETTLED:], expected[SETTLED - LOOK_AHEAD : -LOOK_AHEAD])
    assert player.position == 6000


def test_starts_silent_fades_in_and_at_minus_twenty() -> None:
    """Nothing before play; then a fade from zero to a tenth of the clip."""
    clip = np.full((20_000, 1), 0.5, dtype=np.float32)
    wire = Chain("x", RATE_HZ)
    player = Player(clip, RATE_HZ, Kernel(from_chain(wire), 1))
    assert not _play(player, 1000).any()
    assert player.position == 0
    player.is_wanted = True
    out = _play(player, 10_000)[:, 0]
    assert (np.diff(out[:SETTLED]) >= 0.0).all()
    assert out[-1] == np.float32(0.05)


def test_hear_input_output_and_change() -> None:
    """Input is the clip, change is output minus input; a switch is a fade without a jump."""
    clip = _noise(20_000)
    for what in ("input", "change"):
        player = _player(clip)
        player.hear(what)
        out = _play(player, 12_000)[SETTLED:, 0]
        source = clip[:12_000].astype(np.float64)
        output = Kernel(from_chain(_chain()), 1).process_block(source)
        wanted = source if what == "input" else output - source
        assert np.array_equal(out, wanted.astype(np.float32)[SETTLED - LOOK_AHEAD : -LOOK_AHEAD, 0])


def test_an_edit_is_heard_without_a_click() -> None:
    """A notch moved by 1 Hz under a 1 kHz tone: at most −75 dBFS from the tone's own course.

    Even a perfect switch moves the tone by some −80 dBFS, since its two steady states differ.
    """
    time_s = np.arange(96_000) / RATE_HZ
    tone = (0.25 * np.sin(2.0 * np.pi * 1000.0 * time_s))[:, None].astype(np.float32)
    player = _player(tone, _chain(50.0))
    _play(player, 48_000 - 48_000 % 256)
    player.pending_kernel = Kernel(from_chain(_chain(51.0)), 1)
    out = _play(player, 9600)[:, 0].astype(np.float64)
    course = np.column_stack(
        [np.sin(2e3 * np.pi * np.arange(9600) / RATE_HZ), np.cos(2e3 * np.pi * np.arange(9600) / RATE_HZ)]
    )
    fit = course @ np.linalg.lstsq(course, out, rcond=None)[0]
    assert 20.0 * np.log10(np.abs(out - fit).max()) < -75.0


def test_hum_in_a_moved_notch_does_not_come_back() -> None:
    """A notch moved by 0.02 Hz on its hum: the state is carried, and the hum stays 30 dB down."""
    time_s = np.arange(240_000) / RATE_HZ
    hum = (0.5 * np.sin(2.0 * np.pi * 50.0 * time_s))[:, None].astype(np.float32)
    player = _player(hum, _chain(50.0))
    _play(player, 144_000)
    moved = _chain(50.0).with_section(0, _chain(50.0).sections[0].with_frequency_hz(50.02))
    player.pending_kernel = Kernel(from_chain(moved), 1)
    out = _play(player, 48_000)
    assert 20.0 * np.log10(np.abs(out).max() / 0.5) < -30.0


def test_of_several_edits_the_last_wins() -> None:
    """Edits during a fade wait; only the last of them is heard when it is over."""
    clip = _noise(48_000)
    player = _player(clip)
    _play(player, 2560)
    for frequency_hz in (60.0, 70.0, 80.0):
        player.pending_kernel = Kernel(from_chain(_chain(frequency_hz)), 1)
        player.fill_block(64)
    _play(player, 4 * int(CROSS_FADE_S * RATE_HZ))
    assert np.array_equal(player._kernel.coefficients.rows, from_chain(_chain(80.0)).rows)
    assert player._old_kernel is None


def test_a_chain_that_runs_away_is_silenced_and_comes_back_armed() -> None:
    """An unstable chain trips the guard; nothing passes the ceiling; a stable one plays again after rearm."""
    from dataclasses import replace  # noqa: PLC0415

    clip = _noise(48_000)
    stable = from_chain(_chain())
    growing = replace(stable, rows=np.array([[1.0, 0.0, 0.0, 1.0, -2.02, 1.03]]))
    player = _player(clip)
    _play(player, 5120)
    player.pending_kernel = Kernel(growing, 1)
    out = _play(player, 24_000)
    assert player.guard.reason
    assert np.isfinite(out).all()
    assert np.abs(out).max() <= 10.0 ** (-6.0 / 20.0)
    assert not out[-1000:].any()
    player.pending_kernel = Kernel(stable, 1)
    _play(player, 5120)
    player.rearm()
    out = _play(player, 9600)
    assert not player.guard.reason
    assert out[-1000:].any()


def test_a_loop_moved_away_is_a_fade() -> None:
    """Where the clip was goes on under what comes: no step larger than the tone's own and the fade's together."""
    time_s = np.arange(96_000) / RATE_HZ
    tone = (0.2 * np.sin(2.0 * np.pi * 100.0 * time_s))[:, None].astype(np.float32)
    player = _player(tone, Chain("x", RATE_HZ))
    _play(player, 48_000)
    player.loop = Loop(120, 24_120)  # a quarter of a period away
    out = _play(player, 4800)[:, 0].astype(np.float64)
    own = 0.2 * 2.0 * np.pi * 100.0 / RATE_HZ
    fade = 0.4 * np.pi / 2.0 / (CROSS_FADE_S * RATE_HZ)  # a raised cosine between values at most 0.4 apart
    assert np.abs(np.diff(out)).max() <= own + fade


def test_rearm_of_an_idle_guard_changes_nothing() -> None:
    """The chain's state goes on: the samples are those of a player that was left alone."""
    clip = _noise(48_000)
    armed, alone = _player(clip), _player(clip)
    for player in (armed, alone):
        _play(player, 4096)
    armed.rearm()
    assert np.array_equal(_play(armed, 4096), _play(alone, 4096))


@settings(max_examples=60, deadline=None)
@given(strategies.chains(largest_pole_radius=1.2), strategies.chains(largest_pole_radius=1.2), st.floats(-24.0, 0.0))
def test_every_random_chain_stays_under_the_ceiling(first: Chain, second: Chain, ceiling_db: float) -> None:
    """Unstable ones and huge gains included, at full level on full-scale noise, with an edit on the way."""
    clip = np.random.default_rng(9).uniform(-1.0, 1.0, (4800, 1)).astype(np.float32)
    player = _player(clip, first)
    player.guard.set_ceiling_db(ceiling_db)
    heard = _play(player, 6000)
    player.pending_kernel = Kernel(from_chain(second), 1)
    heard = np.concatenate([heard, _play(player, 6000)])
    assert np.isfinite(heard).all()
    assert float(np.abs(heard).max()) <= 10.0 ** (ceiling_db / 20.0)
