"""The rim chart in words, for piped output and screen readers; loads no drawing library."""

from tonebench.screen.charts.rim_marks import RimMark, RimPicture
from tonebench.screen.charts.rim_scale import RimScale, Zone, ring_s
from tonebench.screen.charts.words import frequency_text, time_text


def describe_rim(picture: RimPicture) -> str:
    """Return a rim chart's content in words, one line per section and one for the region of convergence."""
    if not picture.marks:
        return "Rim chart: no poles and no zeros."
    lines = [f"Rim chart at {frequency_text(picture.sample_rate_hz)} sample rate."]
    f0_hz = {leader.section_number: leader.f0_hz for leader in picture.leaders}
    for number in sorted({mark.section_number for mark in picture.marks}):
        own = [mark for mark in picture.marks if mark.section_number == number]
        notes = [word for word, is_so in _section_notes(own) if is_so]
        if number in f0_hz:
            notes.append(f"f0 {frequency_text(f0_hz[number])}")
        head = ", ".join([f"Section {number}", *notes])
        lines.append(f"{head}: " + "; ".join(_mark_words(mark, picture.sample_rate_hz) for mark in own) + ".")
    lines.append(_convergence_words(picture))
    return "\n".join(lines)


def _section_notes(own: list[RimMark]) -> list[tuple[str, bool]]:
    return [
        ("selected", any(mark.is_selected for mark in own)),
        ("bypassed", all(mark.is_bypassed for mark in own)),
    ]


def _mark_words(mark: RimMark, sample_rate_hz: float) -> str:
    scale = RimScale(1, sample_rate_hz)
    zone = scale.zone(mark.radius)
    time = time_text(ring_s(mark.radius, sample_rate_hz))
    where = f"{mark.role} at {frequency_text(mark.frequency_hz)}"
    if zone is Zone.RIM:
        return f"{where} on the unit circle"
    verb = "grows by 60 dB in" if zone is Zone.OUTSIDE else "rings for"
    if mark.role == "zero":
        return f"{where}, radius {mark.radius:.7g}" + (", outside" if zone is Zone.OUTSIDE else "")
    return f"{where}, radius {mark.radius:.7g}, {verb} {time}"


def _convergence_words(picture: RimPicture) -> str:
    pole = picture.outermost_pole
    if pole is None:
        return "No poles are in the chain."
    side = "inside the unit circle: every ring dies away" if pole.radius < 1 else "not inside the unit circle"
    return f"The outermost pole is that of section {pole.section_number}, {side}."
