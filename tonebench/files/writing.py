"""From a preset's value to its text, keeping what people wrote.

Comments, unknown keys and the form of every number that has not changed survive byte for byte; ``editing`` changes one
table at a time, and tables are added, removed and put in order as whole segments, in the places that they have.
"""

import re
from collections.abc import Mapping, Sequence
from typing import Any

from tonebench.core.chain import Chain
from tonebench.core.roots import ConjugatePair, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.errors import PresetError
from tonebench.files.caution import caution_lines, is_caution, rounded_hearing
from tonebench.files.editing import Angle, edited
from tonebench.files.keys import SINGLE_TABLES, plain_number
from tonebench.files.pairing import continued
from tonebench.files.reading import read_preset
from tonebench.files.segments import Segment, split_segments
from tonebench.session.preset import FORMAT_VERSION, ExportRequest, Preset

_NEW_TEXT = (
    "# A chain of filter sections for tonebench. Comments, and keys that it does not know, are kept when it is saved.\n"
    f"tonebench = {FORMAT_VERSION}                      # version of the format\n"
)
_ORDER = ("", "chain", "section", "target", "build", "export", "accept", "hearing")


def preset_text(preset: Preset, like: str | None = None, *, name: str = "the file") -> str:
    """Return the text of a preset.

    Parameters
    ----------
    preset : Preset
        Its hearing numbers are computed here, whatever ``written_hearing`` says.
    like : str, optional
        The text as it stands in the file; what has not changed is kept.
    name : str
        Stands for ``like`` in messages.

    Raises
    ------
    PresetError
        If ``like`` is no preset or cannot be edited without losing something, or the preset holds what none may.

    """
    old = None if like is None else read_preset(like, name)[0]
    segments = split_segments(_NEW_TEXT if like is None else like)
    texts = {
        "chain": [_single("chain", _chain_values(preset.chain), segments)],
        "section": _repeated("section", preset.chain.sections, old.chain.sections if old else (), segments),
        "target": [_single("target", _target_values(preset), segments)],
        "build": [],
        "export": _repeated("export", preset.exports, old.exports if old else (), segments),
        "accept": _repeated("accept", preset.acceptances, old.acceptances if old else (), segments),
        "hearing": [_hearing(preset.chain, segments)],
    }
    if preset.build_rates_hz or any(one.table == "build" for one in segments):
        rates = [plain_number(rate_hz) for rate_hz in preset.build_rates_hz]
        texts["build"] = [_single("build", {"sample_rates_hz": rates}, segments)]
    parts = _arranged(segments, texts)
    text = "".join(part if part.endswith("\n") or not part else part + "\n" for part in parts)
    if like is not None and "\n" in like and like.count("\n") == like.count("\r\n"):
        text = re.sub(r"(?<!\r)\n", "\r\n", text)  # what was added ends its lines as the file does
    _verify(preset, text)
    return text


def _arranged(segments: Sequence[Segment], texts: Mapping[str, list[str]]) -> list[str]:
    """Put each table's new texts in the places of its old ones; a new table follows those before it in order."""
    last = {segment.table: index for index, segment in enumerate(segments)}
    waiting = {table: list(new) for table, new in texts.items()}
    parts: list[tuple[str, str]] = []
    for index, segment in enumerate(segments):
        if segment.table not in waiting:
            parts.append((segment.table, segment.text))
            continue
        queue = waiting[segment.table]
        count = len(queue) if index == last[segment.table] else 1
        parts += [(segment.table, text) for text in queue[:count]]
        del queue[:count]
    for position, table in enumerate(_ORDER):
        if waiting.get(table):
            before = [index for index, (one, _) in enumerate(parts) if one in _ORDER[:position]]
            place = len(parts) if table == "hearing" else before[-1] + 1
            parts[place:place] = [(table, text) for text in waiting[table]]
    return [text for _, text in parts]


def _single(table: str, values: Mapping[str, Any], segments: list[Segment]) -> str:
    found = [one for one in segments if one.table == table]
    text = found[0].text if found else f"\n[{table}]\n"
    return edited(text, table, values, is_repeated=False)


def _verify(preset: Preset, text: str) -> None:
    again, _ = read_preset(text, "the preset")
    same = (
        again.chain == preset.chain
        and again.target == preset.target
        and again.build_rates_hz == preset.build_rates_hz
        and again.exports == preset.exports
        and again.acceptances == preset.acceptances
    )
    if not same:
        raise PresetError("this file's layout cannot be edited without loss; save under another name")


def _repeated(table: str, new: Sequence[Any], old: Sequence[Any], segments: list[Segment]) -> list[str]:
    """Return the text of each entry, built on the segment of the old entry that it continues."""
    found = [one.text for one in segments if one.table == table]
    texts = []
    for entry, index in zip(new, continued(new, old), strict=True):
        text = f"\n[[{table}]]\n" if index is None else found[index]
        values = _entry_values(entry)
        texts.append(
            text if index is not None and old[index] == entry else edited(text, table, values, is_repeated=True)
        )
    return texts


def _entry_values(entry: Any) -> dict[str, Any]:
    if isinstance(entry, Section):
        return _section_values(entry)
    if isinstance(entry, ExportRequest):
        return {"to": entry.to, "file": entry.file, "prefix": entry.prefix}
    return {"code": entry.code, "section": entry.section, "up_to": entry.up_to, "because": entry.because}


def _chain_values(chain: Chain) -> dict[str, Any]:
    return {
        "name": chain.name,
        "sample_rate_hz": plain_number(chain.sample_rate_hz),
        "gain_db": chain.gain_db,
        "combine": chain.combine,
        "direct_gain_db": chain.direct_gain_db,
    }


def _section_values(section: Section) -> dict[str, Any]:
    made = section.made
    values: dict[str, Any] = {
        "name": section.name,
        "kind": section.kind.value,
        "bypass": section.is_bypassed,
        "polarity": section.polarity,
        "delay": section.delay_samples,
        "gain_db": made.gain_db,
    }
    if isinstance(made, ByKind):
        values["frequency_hz"] = plain_number(made.frequency_hz)
        values["frequency_is"] = "pole" if made.is_pole_frequency else "peak"
        values["order"] = made.order
        if made.width is not None:
            values[made.width.key.value] = plain_number(made.width.value)
        return values
    return {**values, **_hand_values(made)}


def _hand_values(made: ByHand) -> dict[str, Any]:
    return {
        "gain_at_hz": made.gain_at_hz,
        "poles": _root_values(made.poles),
        "zeros": _root_values(made.zeros),
    }


def _root_values(roots: Roots) -> dict[str, Any] | None:
    if isinstance(roots, ConjugatePair):
        return {"radius": roots.radius, "angle_deg": Angle(roots.angle_rad)}
    return {"real": list(roots.values)} if roots.values else None


def _target_values(preset: Preset) -> dict[str, Any]:
    target = preset.target
    return {
        "arithmetic": str(target),
        "accumulator_bits": target.accumulator_bits,
        "rounding": target.rounding.value,
        "products": target.products.value,
        "overflow": target.overflow.value,
        "fused": target.is_fused,
        "flush_subnormals": target.is_flushing_subnormals,
    }


def _hearing(chain: Chain, segments: list[Segment]) -> str:
    """Return the hearing table under its caution; comments that are not the caution are kept."""
    numbers = rounded_hearing(chain)
    values = {key: getattr(numbers, key) for key in SINGLE_TABLES["hearing"]}
    found = [one for one in segments if one.table == "hearing"]
    lines = list(found[0].lines) if found else ["\n", "[hearing]\n"]
    header = next(index for index, line in enumerate(lines) if line.lstrip().startswith("["))
    kept = [line for line in lines[:header] if not is_caution(line)]
    return edited("".join([*kept, *caution_lines(numbers), *lines[header:]]), "hearing", values, is_repeated=False)
