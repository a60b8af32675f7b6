"""Which table each section continues, where frequency alone cannot tell."""

from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.files.pairing import continued
from tonebench.files.writing import preset_text
from tonebench.session.preset import Acceptance, ExportRequest, Preset


def test_equal_sections_come_first() -> None:
    """Two peaks on one frequency that change places take their comments along."""
    wide, narrow = (by_kind(Kind.PEAK, 100, ("q", q), 3.0) for q in (1.0, 9.0))
    text = preset_text(Preset(Chain("a", 48000.0, (wide, narrow))))
    text = text.replace("q = 1\n", "q = 1 # wide\n").replace("q = 9\n", "q = 9 # narrow\n")
    turned = preset_text(Preset(Chain("a", 48000.0, (narrow, wide))), text)
    assert turned.index("q = 9 # narrow\n") < turned.index("q = 1 # wide\n")


def test_pairs() -> None:
    """Equal, then of one name, then of one kind and near, then in order; nothing is continued twice."""
    low, high = by_kind(Kind.NOTCH, 50, ("q", 9.0)), by_kind(Kind.NOTCH, 1000, ("q", 9.0))
    other = by_kind(Kind.PEAK, 60, ("q", 1.0))
    assert continued([high, low], [low, high]) == [1, 0]
    assert continued([by_kind(Kind.NOTCH, 900, ("q", 5.0))], [low, high]) == [1]
    assert continued([other], [low]) == [0]
    assert continued([other, low], [low]) == [None, 0]
    assert continued([low, low], [low]) == [0, None]
    assert continued([], [low]) == []


def test_exports_by_file_and_acceptances_by_code() -> None:
    """A new prefix or reason stays in its table."""
    assert continued([ExportRequest("c", "b.h", "x")], [ExportRequest("c", "a.h"), ExportRequest("c", "b.h")]) == [1]
    old = [Acceptance("pole-moved", "a"), Acceptance("dc-gain", "b")]
    assert continued([Acceptance("dc-gain", "c")], old) == [1]
