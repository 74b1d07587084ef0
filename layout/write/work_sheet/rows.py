"""Names and values in two columns, and lists with boxes to tick."""

from layout.write.work_sheet.paper import BODY, LABEL, NARROW_MM, Area, Face, Paper, Pen, written

Row = tuple[str, str]
TICK_MM = 2.4  # a box to tick
ROW_GAP_MM = 0.5


def rows_written(
    paper: Paper, area: Area, rows: list[Row], *, name_mm: float, most_lines: int = 3, gap_mm: float = ROW_GAP_MM
) -> Area:
    """Writes names and values down from the top of an area, and gives what is left.

    A row for which there is no room is left out; tests hold that all there may be have room.
    """
    for name, value in rows:
        if area.height_mm < BODY.line_mm:
            break
        written(paper, area.beside(0, name_mm), name, LABEL, most_lines=1)
        left = written(paper, area.beside(name_mm, area.width_mm - name_mm), value, BODY, most_lines=most_lines)
        area = area.below(area.height_mm - left.height_mm + gap_mm)
    return area


def ticked_list(paper: Paper, area: Area, texts: list[str], face: Face = BODY, *, most_lines: int = 4) -> Area:
    """Writes a list with a box to tick before every line, and gives what is left."""
    for text in texts:
        if area.height_mm < face.line_mm:
            break
        tick_box(paper, area.left_mm, area.top_mm - TICK_MM)
        left = written(
            paper, area.beside(TICK_MM + 1.4, area.width_mm - TICK_MM - 1.4), text, face, most_lines=most_lines
        )
        area = area.below(area.height_mm - left.height_mm + ROW_GAP_MM)
    return area


def tick_box(paper: Paper, left_mm: float, bottom_mm: float, size_mm: float = TICK_MM) -> None:
    """A box to tick."""
    box = Area(left_mm=left_mm, bottom_mm=bottom_mm, width_mm=size_mm, height_mm=size_mm)
    paper.box(box, Pen(width_mm=NARROW_MM))
