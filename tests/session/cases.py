"""The chain that the typed line's help speaks of, and short ways to type on it."""

from dataclasses import replace

from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import ByHand, ByKind, Section, by_kind
from tonebench.session.preset import Preset
from tonebench.session.session import Session

RATE_HZ = 48000.0


def bench_preset() -> Preset:
    """Return a preset whose section 1 is a peak, 2 a notch named hum, 3 a free section."""
    free = ByHand(ConjugatePair(0.99, 0.5), RealRoots((0.5,)), -20.0)
    sections = (
        by_kind(Kind.PEAK, 320, ("q", 1.2), -6.0),
        replace(by_kind(Kind.NOTCH, 50, ("ring_s", 0.4)), name="hum"),
        Section(free),
    )
    return Preset(Chain("Bench", RATE_HZ, sections))


def bench(selected: int = 0) -> Session:
    """Return a session on it."""
    session = Session(bench_preset())
    session.select(selected)
    return session


def made_by_kind(session: Session, index: int) -> ByKind:
    """Return what a section is made by, which must be a kind."""
    made = session.chain.sections[index].made
    assert isinstance(made, ByKind)
    return made


def made_by_hand(session: Session, index: int) -> ByHand:
    """Return the poles and zeros of a section, which must be free."""
    made = session.chain.sections[index].made
    assert isinstance(made, ByHand)
    return made
