"""The words above and beside the disc: title, verdict, the side it is seen from, its turning."""

from collections import Counter

from svgwrite.container import Group
from svgwrite.path import Path
from svgwrite.shapes import Circle, Rect

from layout.check.finding import Level
from layout.cut.plan import CutPlan
from layout.write.laid_out import NOT_GOOD, LaidOut
from layout.write.svg_page import Face, Page, fitted, short, shortened, words
from layout.write.svg_signs import turning_as_drawn
from layout.write.svg_style import (
    BLACK,
    BLUISH_GREEN,
    LEAD_SIZE,
    SMALL_SIZE,
    TITLE_SIZE,
    VERDICT_SIZE,
    VERMILION,
    WHITE,
    WORD_GREY,
)

_REASON_SIZE = 2.2
_BAND, _GOOD_LINE, _HEAD = 8.2, 4.6, 10.2  # heights in hundredths of the page's width
_LEAST_TITLE_SIZE = 3.0
_LINE_HEIGHT = 1.15  # of the letter size


def is_good(plan: CutPlan, laid_out: LaidOut) -> bool:
    """Whether the disc may be cut: no error stands and nobody overruled one."""
    return plan.not_good is None and laid_out.good_to_cut


def header_height_mm(plan: CutPlan, laid_out: LaidOut, page: Page) -> float:
    """How high title and verdict are together."""
    verdict = _GOOD_LINE if is_good(plan, laid_out) else _BAND
    return _head_height_mm(plan, page) + page.units_mm(verdict)


def _title(plan: CutPlan, page: Page) -> tuple[Face, list[str]]:
    face = Face(size_mm=page.units_mm(TITLE_SIZE), bold=True)
    return fitted(plan.title, face, page.room_mm, page.units_mm(_LEAST_TITLE_SIZE))


def _head_height_mm(plan: CutPlan, page: Page) -> float:
    face, lines = _title(plan, page)
    return page.units_mm(_HEAD) + (len(lines) - 1) * face.size_mm * _LINE_HEIGHT


def header(plan: CutPlan, laid_out: LaidOut, page: Page, top_mm: float) -> Group:
    """Title, movement and verdict, from top_mm down."""
    group = Group(id="header", debug=False)
    title, lines = _title(plan, page)
    lead = Face(size_mm=page.units_mm(LEAD_SIZE), colour=WORD_GREY)
    left_mm, room_mm = page.left_mm, page.room_mm
    for place, line in enumerate(lines):
        down_mm = page.units_mm(5.6) + place * title.size_mm * _LINE_HEIGHT
        group.add(words(line, (left_mm, top_mm + down_mm), title))
    verdict_mm = top_mm + _head_height_mm(plan, page)
    part = f"{plan.part.capitalize()} for " if plan.part else ""
    movement = shortened(f"{part}{laid_out.disc.movement.title}", lead, room_mm)
    group.add(words(movement, (left_mm, verdict_mm - page.units_mm(1.2)), lead))
    group.add(
        _good(laid_out, page, verdict_mm) if is_good(plan, laid_out) else _not_good(plan, laid_out, page, verdict_mm)
    )
    return group


def _good(laid_out: LaidOut, page: Page, top_mm: float) -> Group:
    group = Group(id="verdict", debug=False)
    x_mm, y_mm, unit_mm = page.left_mm + page.units_mm(1.5), top_mm + page.units_mm(2.2), page.units_mm(1)
    group.add(Circle(center=(short(x_mm), short(y_mm)), r=page.units(1.5), fill=BLUISH_GREEN, debug=False))
    tick = [(-0.7, 0.05), (-0.2, 0.6), (0.75, -0.6)]
    data = "M" + "L".join(f"{short(x_mm + x * unit_mm)} {short(y_mm + y * unit_mm)}" for x, y in tick)
    group.add(Path(d=data, fill="none", stroke=WHITE, stroke_width=page.units(0.4), debug=False))
    face = Face(size_mm=page.units_mm(LEAD_SIZE), bold=True)
    text = ", ".join(["Good to cut", *level_counts(laid_out)])
    group.add(words(text, (x_mm + page.units_mm(2.3), y_mm + page.units_mm(0.85)), face))
    return group


def level_counts(laid_out: LaidOut) -> list[str]:
    """How many findings there are of each level, such as "1 error" and "2 warnings"."""
    counts = Counter(finding.level for finding in laid_out.findings)
    one = {Level.ERROR: "error", Level.WARNING: "warning", Level.ADVICE: "piece of advice"}
    many = {Level.ERROR: "errors", Level.WARNING: "warnings", Level.ADVICE: "pieces of advice"}
    return [f"{counts[level]} {(one if counts[level] == 1 else many)[level]}" for level in Level if counts[level]]


def _not_good(plan: CutPlan, laid_out: LaidOut, page: Page, top_mm: float) -> Group:
    group = Group(id="verdict", debug=False)
    left_mm, width_mm, height_mm = page.left_mm, page.room_mm, page.units_mm(_BAND - 0.8)
    frame = {"stroke": VERMILION, "stroke_width": page.units(0.7)}
    corner, size = (short(left_mm), short(top_mm)), (short(width_mm), short(height_mm))
    group.add(Rect(insert=corner, size=size, fill=BLACK, debug=False, **frame))
    verdict = Face(size_mm=page.units_mm(VERDICT_SIZE), bold=True, colour=WHITE)
    inside_mm = left_mm + page.units_mm(2)
    group.add(words(NOT_GOOD, (inside_mm, top_mm + page.units_mm(3.9)), verdict))
    why = Face(size_mm=page.units_mm(_REASON_SIZE), colour=WHITE)
    reason = "cutting files kept back" if plan.not_good is None else f"cutting files given because: {plan.not_good}"
    reason = shortened(reason, why, width_mm - page.units_mm(4))
    group.add(words(reason, (inside_mm, top_mm + page.units_mm(6.5)), why))
    counts = Face(size_mm=page.units_mm(_REASON_SIZE), colour=WHITE, anchor="end")
    right_mm = left_mm + width_mm - page.units_mm(2)
    group.add(words(", ".join(level_counts(laid_out)), (right_mm, top_mm + page.units_mm(3.9)), counts))
    return group


def corner_words(plan: CutPlan, laid_out: LaidOut, page: Page) -> Group:
    """Beside the disc: the side it is seen from at the upper left, its turning at the upper right."""
    group = Group(id="sides", debug=False)
    small = page.units_mm(SMALL_SIZE)
    top_mm, right_mm = -page.disc_radius_mm, page.left_mm + page.room_mm
    side = "LABEL SIDE" if plan.drawn_from == "label-side" else "STAR SIDE"
    seen = "seen from this side"
    turns = [f"turns {turning_as_drawn(plan, laid_out.disc)}", seen]
    bold = Face(size_mm=page.units_mm(LEAD_SIZE), bold=True)
    group.add(words(side, (page.left_mm, top_mm + page.units_mm(1.2)), bold))
    group.add(words(seen, (page.left_mm, top_mm + page.units_mm(3.5)), Face(size_mm=small, colour=WORD_GREY)))
    for place, line in enumerate(turns):
        face = Face(size_mm=small, colour=WORD_GREY, anchor="end")
        group.add(words(line, (right_mm, top_mm + page.units_mm(1.2 + 2.2 * place)), face))
    return group
