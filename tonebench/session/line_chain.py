"""Typed lines about the whole preset: chain, target, build rates, accepted findings."""

from dataclasses import replace

from tonebench.core.rates import at_rate
from tonebench.errors import TypedLineError
from tonebench.session.names import checked_name
from tonebench.session.preset import Acceptance, Preset
from tonebench.session.tokens import Cursor
from tonebench.target.arithmetic import parse_target

CHAIN_WORDS = ("gain", "series", "sum", "direct", "name", "rate")


def change_chain(preset: Preset, cursor: Cursor) -> tuple[Preset, str]:
    """Apply what follows ``chain``; return the preset and a sentence about it."""
    chain = preset.chain
    word = cursor.take_word(*CHAIN_WORDS)
    if word == "gain":
        token = cursor.number("chain gain", "db", "")
        changed = replace(chain, gain_db=token.value)
        sentence = f"chain gain {token.value:+g} dB"
    elif word == "series":
        changed = replace(chain, combine="series", direct_gain_db=None)
        sentence = "sections in series: each hears the one before"
    elif word == "sum":
        changed = replace(chain, combine="sum")
        sentence = "sections as a sum: each hears the input, the outputs are added"
    elif word == "direct":
        level = None if cursor.take_word("off") else cursor.number("chain direct", "db", "").value
        changed = replace(chain, direct_gain_db=level)
        sentence = "the input itself is not added" if level is None else f"the input itself is added at {level:+g} dB"
    elif word == "name":
        changed = replace(chain, name=checked_name(cursor.rest()))
        sentence = f"chain named {changed.name}"
    elif word == "rate":
        change = at_rate(chain, cursor.number("chain rate", "hz", "").value)
        changed = change.chain
        lost = "; ".join(f"section {number}: {loss}" for number, loss in change.lost)
        sentence = f"chain at {changed.sample_rate_hz:g} Hz, Hz and seconds kept" + (f"; {lost}" if lost else "")
    else:
        raise TypedLineError(f"chain must be followed by one of {', '.join(CHAIN_WORDS)}")
    return replace(preset, chain=changed), sentence


def change_target(preset: Preset, cursor: Cursor) -> tuple[Preset, str]:
    """Apply what follows ``target``."""
    target = parse_target(cursor.rest().replace(" ", ""))
    return replace(preset, target=target), f"target {target}"


def change_build(preset: Preset, cursor: Cursor) -> tuple[Preset, str]:
    """Apply what follows ``build``: ``rates`` and numbers, or none to clear them."""
    if not cursor.take_word("rates"):
        raise TypedLineError("build must be followed by rates and numbers, such as build rates 44100 48000")
    rates = []
    while not cursor.is_done():
        rates.append(cursor.number("a build rate", "hz", "").value)
    words = ", ".join(f"{rate_hz:g}" for rate_hz in rates)
    return replace(preset, build_rates_hz=tuple(rates)), f"build rates {words} Hz" if rates else "no build rates"


def accept_finding(preset: Preset, cursor: Cursor) -> tuple[Preset, str]:
    """Apply what follows ``accept``: CODE [SECTION] [up to NUMBER] because REASON."""
    code = _take_any(cursor, "accept must be followed by a finding's code, such as ring-after-tone")
    section, up_to = "", None
    while not cursor.is_done() and not cursor.take_word("because"):
        if cursor.take_word("up"):
            if not cursor.take_word("to"):
                raise TypedLineError("up must be followed by to and a number")
            up_to = cursor.number("up to", "", "s", "db", "hz", "cents", "%").value
        else:
            section = _take_any(cursor, "")
    accepted = Acceptance(code, cursor.rest(), section, up_to)
    kept = tuple(one for one in preset.acceptances if (one.code, one.section) != (code, section))
    where = f" in section {section}" if section else ""
    limit = "" if up_to is None else f" up to {up_to:g}"
    return replace(preset, acceptances=(*kept, accepted)), f"{code}{where} accepted{limit}: {accepted.because}"


def _take_any(cursor: Cursor, complaint: str) -> str:
    if cursor.is_done():
        raise TypedLineError(complaint)
    return cursor.take().text
