"""What every sheet has: the frame, the title block and, where it must be said, NOT GOOD TO CUT."""

import math
from dataclasses import dataclass, replace

from layout.check.finding import Level
from layout.cut.plan import CutPlan
from layout.version import ENGINE_VERSION
from layout.write.laid_out import NOT_GOOD, LaidOut
from layout.write.svg_header import level_counts
from layout.write.work_sheet.letters import name_shown
from layout.write.work_sheet.paper import (
    DESCENDS,
    NARROW_MM,
    PAGE_HEIGHT_MM,
    PAGE_WIDTH_MM,
    SMALL,
    WIDE_MM,
    Area,
    Face,
    Paper,
    Pen,
    at_most,
    written,
)

# ISO 5457, from memory: 20 mm at the filing edge, 10 mm at the others.
FILING_MM, MARGIN_MM = 20.0, 10.0
BLOCK_HEIGHT_MM = 34.0
SHEET_COUNT = 2
_FRAME = Area(
    left_mm=FILING_MM,
    bottom_mm=MARGIN_MM,
    width_mm=PAGE_WIDTH_MM - FILING_MM - MARGIN_MM,
    height_mm=PAGE_HEIGHT_MM - 2 * MARGIN_MM,
)
_INSIDE_MM = 3.0  # between the frame and what stands in it
_LABEL = Face(size_mm=1.8, grey_ratio=0.3)
_VALUE = Face(size_mm=2.6)
_TITLE = Face(size_mm=4.2, bold=True)
_BAND_MM = 9.0
_VERDICT = Face(size_mm=4.6, bold=True, grey_ratio=1.0)
_WHY = Face(size_mm=2.3, grey_ratio=1.0)
_ACROSS = Face(size_mm=22.0, bold=True, grey_ratio=0.85, anchor="middle")
_CENTRING_MARK_MM = 5.0


@dataclass(frozen=True, slots=True, kw_only=True)
class _Cell:
    """One field of the title block: its name, what it says, and its place from the block's upper left corner."""

    name: str
    value: str
    at_mm: tuple[float, float]
    size_mm: tuple[float, float]
    face: Face = _VALUE


def is_good(plan: CutPlan, laid_out: LaidOut) -> bool:
    """Whether the disc may be cut: no error stands and nobody overruled one."""
    return plan.not_good is None and laid_out.good_to_cut


def framed(paper: Paper, plan: CutPlan, laid_out: LaidOut, *, scale: str, sheet_number: int) -> Area:
    """Draws frame, title block and warning of a page, and gives the area that is free.

    The frame is in the sense of ISO 5457, the title block in the sense of ISO 7200 (fields from memory). Who made
    and checked the disc, and when, is left to be written by hand: a file with a date would not be the same twice.

    Args:
        paper: The page begun.
        plan: The cut plan.
        laid_out: The layout.
        scale: Of the disc's drawing, such as "1:2".
        sheet_number: From 1.
    """
    good = is_good(plan, laid_out)
    if not good:
        _across(paper)
    paper.box(_FRAME, Pen(width_mm=WIDE_MM))
    _centring_marks(paper)
    block = Area(
        left_mm=_FRAME.left_mm, bottom_mm=_FRAME.bottom_mm, width_mm=_FRAME.width_mm, height_mm=BLOCK_HEIGHT_MM
    )
    paper.line([(block.left_mm, block.top_mm), (block.right_mm, block.top_mm)], Pen(width_mm=WIDE_MM))
    for cell in _cells(plan, laid_out, scale=scale, sheet=f"{sheet_number} / {SHEET_COUNT}"):
        _cell(paper, block, cell)
    free = Area(
        left_mm=_FRAME.left_mm,
        bottom_mm=block.top_mm,
        width_mm=_FRAME.width_mm,
        height_mm=_FRAME.height_mm - BLOCK_HEIGHT_MM,
    ).inside(_INSIDE_MM)
    return free if good else _verdict(paper, free, plan, laid_out)


def _across(paper: Paper) -> None:
    """The warning over the whole page, so light that all else is read on it."""
    angle_rad = math.atan2(_FRAME.height_mm, _FRAME.width_mm)
    down_mm = _ACROSS.size_mm * 0.36  # half of a capital's height: Helvetica's are 0.72 of the size
    centre = (_FRAME.left_mm + _FRAME.width_mm / 2, _FRAME.bottom_mm + _FRAME.height_mm / 2)
    at_mm = (centre[0] + down_mm * math.sin(angle_rad), centre[1] - down_mm * math.cos(angle_rad))
    paper.text(at_mm, NOT_GOOD, _ACROSS, turned_deg=math.degrees(angle_rad))


def _centring_marks(paper: Paper) -> None:
    middle = (PAGE_WIDTH_MM / 2, PAGE_HEIGHT_MM / 2)
    ends = [
        ((middle[0], _FRAME.top_mm), (middle[0], _FRAME.top_mm + _CENTRING_MARK_MM)),
        ((middle[0], _FRAME.bottom_mm), (middle[0], _FRAME.bottom_mm - _CENTRING_MARK_MM)),
        ((_FRAME.left_mm, middle[1]), (_FRAME.left_mm - _CENTRING_MARK_MM, middle[1])),
        ((_FRAME.right_mm, middle[1]), (_FRAME.right_mm + _CENTRING_MARK_MM, middle[1])),
    ]
    for start, end in ends:
        paper.line([start, end], Pen(width_mm=WIDE_MM))


def _verdict(paper: Paper, free: Area, plan: CutPlan, laid_out: LaidOut) -> Area:
    band = free.strip(_BAND_MM)
    paper.box(band, Pen(width_mm=0.0, fill_ratio=0.0))
    paper.text((band.left_mm + 2, band.bottom_mm + 2.9), NOT_GOOD, _VERDICT)
    reason = "cutting files kept back" if plan.not_good is None else f"cut all the same, because: {plan.not_good}"
    counts = ", ".join(level_counts(laid_out))
    words = Area(left_mm=band.left_mm + 55, bottom_mm=band.bottom_mm, width_mm=117, height_mm=_BAND_MM - 1.5)
    written(paper, words, f"{counts}; {reason}" if counts else reason, _WHY, most_lines=2)
    return free.below(_BAND_MM + 2)


def _cells(plan: CutPlan, laid_out: LaidOut, *, scale: str, sheet: str) -> list[_Cell]:
    movement, cutter = laid_out.disc.movement, laid_out.disc.cutter
    errors = sum(finding.level is Level.ERROR for finding in laid_out.findings)
    verdict = "good to cut" if is_good(plan, laid_out) else f"{NOT_GOOD}, errors: {errors}"
    part = plan.part or laid_out.part or "disc 1 of 1"
    rows: tuple[tuple[float, tuple[tuple[float, str, str], ...]], ...] = (
        (
            8.5,
            (
                (46, "Movement", f"{movement.id}, revision {movement.revision}"),
                (46, "Cutter", cutter.id),
                (36, "Fingerprint", plan.fingerprint),
                (26, "Disc", part),
                (26, "Drawn from", plan.drawn_from.replace("-", " ")),
            ),
        ),
        (
            8.5,
            (
                (46, "Order number", laid_out.order_number or ""),
                (46, "Verdict", verdict),
                (36, "Engine", f"discwright {ENGINE_VERSION}"),
                (26, "Scale", scale),
                (26, "Sheet", sheet),
            ),
        ),
        (8.5, ((46, "Made by", ""), (46, "Checked by", ""), (36, "Date made", ""), (52, "Date checked", ""))),
    )
    top_mm = BLOCK_HEIGHT_MM - sum(height_mm for height_mm, _ in rows)
    cells = [
        _Cell(name="Title", value=name_shown(plan.title), at_mm=(0, 0), size_mm=(128, top_mm), face=_TITLE),
        _Cell(name="Kind of document", value="Work sheet, one tune disc", at_mm=(128, 0), size_mm=(52, top_mm)),
    ]
    for height_mm, row in rows:
        left_mm = 0.0
        for width_mm, name, value in row:
            cells.append(_Cell(name=name, value=value, at_mm=(left_mm, top_mm), size_mm=(width_mm, height_mm)))
            left_mm += width_mm
        top_mm += height_mm
    return cells


def _cell(paper: Paper, block: Area, cell: _Cell) -> None:
    area = Area(
        left_mm=block.left_mm + cell.at_mm[0],
        bottom_mm=block.top_mm - cell.at_mm[1] - cell.size_mm[1],
        width_mm=cell.size_mm[0],
        height_mm=cell.size_mm[1],
    )
    paper.box(area, Pen(width_mm=NARROW_MM))
    paper.text((area.left_mm + 1, area.top_mm - 2.3), cell.name, _LABEL)
    room_mm = area.width_mm - 2
    # A long value is set ever smaller, then on two lines, before it is cut off.
    sizes_mm = (cell.face.size_mm, (cell.face.size_mm + SMALL.size_mm) / 2, SMALL.size_mm)
    faces = [replace(cell.face, size_mm=size_mm) for size_mm in sizes_mm]
    face = next((face for face in faces if len(at_most(2, cell.value, face, room_mm)) == 1), SMALL)
    lines = at_most(2, cell.value, face, room_mm)
    for place, line in enumerate(lines):
        up_mm = 0.5 + face.size_mm * DESCENDS + (len(lines) - 1 - place) * face.line_mm
        paper.text((area.left_mm + 1, area.bottom_mm + up_mm), line, face)
