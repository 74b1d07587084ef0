"""The work sheet: what the people at the cutter, the anvil and the bench need of one disc, on two A4 pages."""

from layout.cut.plan import CutPlan
from layout.making.making import Making
from layout.write.laid_out import LaidOut
from layout.write.work_sheet.cautions import cautions_written
from layout.write.work_sheet.disc_drawing import BOX_HEIGHT_MM, BOX_WIDTH_MM, disc_scale, drawn_disc
from layout.write.work_sheet.facts import facts_written
from layout.write.work_sheet.findings import findings_written
from layout.write.work_sheet.forming import forming_written
from layout.write.work_sheet.frame import framed
from layout.write.work_sheet.inspection import count_table_height_mm, counts_written, inspection_written, remarks_ruled
from layout.write.work_sheet.notes import notes_written
from layout.write.work_sheet.paper import Area, Paper

_GAP_MM = 3.0
_LISTS_HEIGHT_MM = 90.0  # what inspection and cautions need at most
_COLUMN_MM = 85.5


def write_work_sheet(plan: CutPlan, laid_out: LaidOut, making: Making | None) -> bytes:
    """The work sheet of one disc as a PDF of two A4 pages; the same values give the same bytes.

    The first page has the disc to scale, what it is cut from and how its projections are formed; the second what was
    found, what to inspect and what to beware of. Text is text, in the PDF standard fonts. A disc
    without projections gets the sheet of a bare blank.

    Args:
        plan: The cut plan of the disc.
        laid_out: The layout the plan is of.
        making: What making it takes; None where nobody reckoned it.
    """
    disc, scale = laid_out.disc, disc_scale(laid_out.disc).told
    movement = disc.movement
    paper = Paper(
        title=f"Work sheet: {plan.title}",
        subject=f"{movement.id} revision {movement.revision}, {disc.cutter.id}, {plan.fingerprint}",
    )
    _first_page(paper, framed(paper, plan, laid_out, scale=scale, sheet_number=1), (plan, laid_out, making))
    paper.next_page()
    _second_page(paper, framed(paper, plan, laid_out, scale=scale, sheet_number=2), laid_out)
    return paper.finished()


def _first_page(paper: Paper, area: Area, told: tuple[CutPlan, LaidOut, Making | None]) -> None:
    plan, laid_out, making = told
    disc = laid_out.disc
    top = area.strip(BOX_HEIGHT_MM)
    drawn_disc(paper, top, plan, disc)
    notes_written(paper, top.beside(BOX_WIDTH_MM + _GAP_MM, area.width_mm - BOX_WIDTH_MM - _GAP_MM), plan, disc, making)
    under = area.below(BOX_HEIGHT_MM)
    facts_written(paper, under.beside(0, _COLUMN_MM), plan, disc)
    forming_written(paper, under.beside(area.width_mm - _COLUMN_MM, _COLUMN_MM), disc)


def _second_page(paper: Paper, area: Area, laid_out: LaidOut) -> None:
    disc = laid_out.disc
    needed_mm = _LISTS_HEIGHT_MM + count_table_height_mm(disc) + 2 * _GAP_MM
    findings = area.strip(area.height_mm - needed_mm)
    left = findings_written(paper, findings, laid_out)
    area = area.below(findings.height_mm - left.height_mm + _GAP_MM)
    lists = area.strip(_LISTS_HEIGHT_MM)
    after = [
        inspection_written(paper, lists.beside(0, _COLUMN_MM), disc),
        cautions_written(paper, lists.beside(area.width_mm - _COLUMN_MM, _COLUMN_MM), disc),
    ]
    area = area.below(_LISTS_HEIGHT_MM - min(left.height_mm for left in after) + _GAP_MM)
    remarks_ruled(paper, counts_written(paper, area, disc).below(_GAP_MM))
