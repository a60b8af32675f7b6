"""The drawing of the rim chart: lines, leaders and marks from plain data into a raster.

The glyph of a mark always stands in its own cell; whatever does not fit beside it is moved or dropped.
"""

from typing import TYPE_CHECKING

from tonebench.screen.charts.axis import LABEL_COLUMNS
from tonebench.screen.charts.curves import draw_lines
from tonebench.screen.charts.marks import Ink, MarkSet
from tonebench.screen.charts.raster import Area, Raster
from tonebench.screen.charts.rim_marks import Cluster, RimPicture, clusters
from tonebench.screen.charts.rim_scale import DEFAULT_SPAN_S, RimScale, Zone
from tonebench.screen.charts.words import ring_label

if TYPE_CHECKING:
    from tonebench.screen.charts.axis import FrequencyAxis


def rim_scale(picture: RimPicture, rows: int, span_s: tuple[float, float] = DEFAULT_SPAN_S) -> RimScale:
    """Return the vertical scale that suits a picture and a number of rows."""
    return RimScale(rows, picture.sample_rate_hz, picture.has_outside, *span_s)


def draw_rim(picture: RimPicture, axis: "FrequencyAxis", scale: RimScale, height: int, marks: MarkSet) -> Raster:
    """Draw a rim chart.

    Parameters
    ----------
    picture : RimPicture
        What to show.
    axis, scale
        Where frequencies and radii stand.
    height : int
        Rows of the raster, those of the scale or more (the rest is left for the row of frequencies).
    marks : MarkSet
        Characters to use.
    """
    raster = Raster(axis.width, height, marks)
    if scale.rows <= 0 or axis.width <= 0:
        return raster
    axis.draw_grid(raster, scale.rows)
    _draw_convergence(raster, picture, axis, scale)
    _draw_rim_line(raster, axis, scale)
    _draw_labels(raster, scale)
    groups = clusters(picture.marks, axis, scale)
    # Glyphs first: no name, leader or line may hide a pole.
    for group in groups:
        raster.put(group.column, group.row, group.glyph, group.ink)
    for group in groups:
        _draw_name(raster, group)
    _draw_leaders(raster, picture, axis, scale)
    _name_rim(raster, axis, scale)
    return raster


def _draw_rim_line(raster: Raster, axis: "FrequencyAxis", scale: RimScale) -> None:
    for column in range(axis.zero_column - 1, raster.width):
        raster.put(column, scale.rim_row, "━", Ink.RIM, is_reserved=False)


def _draw_convergence(raster: Raster, picture: RimPicture, axis: "FrequencyAxis", scale: RimScale) -> None:
    """Draw the lower limit of the region of convergence, at the row of the outermost pole."""
    pole = picture.outermost_pole
    if pole is None or scale.zone(pole.radius) in (Zone.RIM, Zone.FLOOR):
        return
    for column in range(axis.plot_left, axis.plot_right):
        raster.put(column, scale.row(pole.radius), "┈", Ink.LEADER, is_reserved=False)


def _draw_name(raster: Raster, group: Cluster) -> None:
    """Write the name of a cluster where there is room, trying its shorter forms in turn."""
    column, row, ink = group.column, group.row, group.ink
    if group.is_selected or group.is_bypassed:
        left, right = "[]" if group.is_selected else "()"
        for text in (*group.texts, ""):
            if _enclose(raster, group, left, text, right):
                return
        if group.is_selected and _write_beside(raster, group):
            return
    for text in group.texts or (("",) if group.arrow else ()):
        if _has_room(raster, column + 1, row, len(text), far=column + 1 + len(text)):
            _write_after(raster, column + 1, row, text, group)
            return
        if _has_room(raster, column - len(text), row, len(text), far=column - len(text) - 1):
            raster.text(column - len(text), row, text, ink)
            return
    # ×1×2: tight, yet each number still follows its own sign.
    for text in group.texts:
        if raster.is_free(column + 1, row, len(text)) and not _is_digit(raster, column + 1 + len(text), row):
            raster.text(column + 1, row, text, ink)
            return


def _enclose(raster: Raster, group: Cluster, left: str, text: str, right: str) -> bool:
    """Put a cluster's glyph and number between brackets if there is room on the row: [×1] or [1×]."""
    column, row, ink = group.column, group.row, group.ink
    after, before = text + group.arrow + right, left + group.arrow + text
    if raster.is_free(column - 1, row) and raster.is_free(column + 1, row, len(after)):
        raster.text(column - 1, row, left, ink)
        return raster.text(column + 1, row, after, ink)
    if raster.is_free(column + 1, row) and raster.is_free(column - len(before), row, len(before)):
        raster.text(column - len(before), row, before, ink)
        return raster.text(column + 1, row, right, ink)
    return False


def _write_after(raster: Raster, column: int, row: int, text: str, group: Cluster) -> None:
    raster.text(column, row, text, group.ink)
    if group.arrow == "‹" and raster.text(column - 2, row, group.arrow, group.ink):
        return
    if group.arrow:
        raster.text(column + len(text), row, group.arrow, group.ink)


def _write_beside(raster: Raster, group: Cluster) -> bool:
    """Write the selected number over or under a mark that is hemmed in."""
    for text in (f"[{text}]" for text in group.texts):
        for row in (group.row - 1, group.row + 1):
            for shift in (len(text) // 2, 0, len(text) - 1):
                if raster.text(group.column - shift, row, text, group.ink):
                    return True
    return False


def _has_room(raster: Raster, column: int, row: int, length: int, far: int) -> bool:
    """Whether a number fits with a free cell at its far end, so that it cannot be read as its neighbour's."""
    return raster.is_free(column, row, length) and (raster.is_free(far, row) or not raster.is_inside(far, row))


def _is_digit(raster: Raster, column: int, row: int) -> bool:
    return raster.is_inside(column, row) and chr(raster.codes[row, column]).isdigit()


def _draw_leaders(raster: Raster, picture: RimPicture, axis: "FrequencyAxis", scale: RimScale) -> None:
    """Mark every f0 at the foot of the plot and join it to its section's first pole."""
    lines, feet = [], []
    for leader in picture.leaders:
        foot = (axis.column(leader.f0_hz), scale.floor_row)
        feet.append(foot)
        for pole in (m for m in picture.marks if m.role == "pole" and m.section_number == leader.section_number):
            lines.append(((axis.column(pole.frequency_hz), scale.row(pole.radius)), foot))
            break
    draw_lines(raster, lines, Ink.LEADER)
    for column, row in feet:
        raster.put(column, row, "▴", Ink.LEADER, is_reserved=False)


def _draw_labels(raster: Raster, scale: RimScale) -> None:
    """Name the rows at the left, and keep the numbers of sections out of there."""
    if scale.outside_rows:
        raster.text(0, 0, "outside", Ink.LABEL)
    for tick in scale.ticks():
        raster.text(0, tick.cell, tick.label, Ink.LABEL)
    if scale.floor_row > scale.rim_row:
        raster.text(0, scale.floor_row, f"<{ring_label(scale.low_s)}", Ink.LABEL)
    raster.reserve(Area(0, 0, LABEL_COLUMNS, scale.rim_row))
    raster.reserve(Area(0, scale.rim_row + 1, LABEL_COLUMNS, raster.height))


def _name_rim(raster: Raster, axis: "FrequencyAxis", scale: RimScale) -> None:
    """Name the rim on its own row where that is free, else at the left."""
    name = " unit circle"
    for column in range(axis.plot_right - len(name), axis.plot_left, -1):
        if raster.text(column, scale.rim_row, name, Ink.LABEL):
            return
    raster.text(0, scale.rim_row, "rim", Ink.LABEL)
