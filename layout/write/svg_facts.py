"""The words below the disc: what is drawn how, and the facts of the disc."""

from collections import Counter
from collections.abc import Iterator

from svgwrite.container import Group
from svgwrite.shapes import Line, Rect

from layout.cut.plan import CutPlan, LayerName
from layout.write.laid_out import LaidOut
from layout.write.svg_page import Face, Page, short, text_width_mm, words, wrapped
from layout.write.svg_style import BLACK, EMPHASIS_WIDTH, LAYER_STYLES, SMALL_SIZE, TEXT_SIZE, TRACK_GREY, WORD_GREY

# What no one knows by sight; rim, holes and engraving explain themselves.
_EXPLAINED: tuple[LayerName, ...] = ("AFTER_FORMING", "SLITS", "SLOTS", "FOLDS", "HITS", "TRACKS", "LEADS")
_SWATCH, _GAP, _ROW_HEIGHT = 2.4, 0.7, 2.6  # hundredths of the page's width
_LEAST_SWATCH_LINE = 0.12
_LABEL, _COLUMN = 12.0, 47.5  # widths of a label and of a column of facts
_LINE_HEIGHT = 1.4  # of the letter size
Fact = tuple[str, str]


def legend(plan: CutPlan, page: Page, top_mm: float) -> tuple[Group, float]:
    """What is drawn how, row by row from top_mm down, and where it ends."""
    group = Group(id="legend", debug=False)
    face = Face(size_mm=page.units_mm(SMALL_SIZE), colour=WORD_GREY)
    x_mm, y_mm = page.left_mm, top_mm
    for title, stroke, fill, line in _swatches(plan):
        wide_mm = page.units_mm(_SWATCH + 3 * _GAP) + text_width_mm(title, face)
        if x_mm + wide_mm > page.left_mm + page.room_mm:
            x_mm, y_mm = page.left_mm, y_mm + page.units_mm(_ROW_HEIGHT)
        right_mm = x_mm + page.units_mm(_SWATCH)
        if fill == "none":
            ends = {"start": (short(x_mm), short(y_mm)), "end": (short(right_mm), short(y_mm))}
            group.add(Line(stroke=stroke, stroke_width=page.units(line), debug=False, **ends))
        else:
            corner = (short(x_mm), short(y_mm - page.units_mm(0.6)))
            group.add(Rect(insert=corner, size=(page.units(_SWATCH), page.units(1.2)), fill=fill, debug=False))
        group.add(words(title, (right_mm + page.units_mm(_GAP), y_mm + 0.36 * face.size_mm), face))
        x_mm += wide_mm
    return group, y_mm + page.units_mm(_ROW_HEIGHT / 2)


def _swatches(plan: CutPlan) -> Iterator[tuple[str, str, str, float]]:
    """Title, stroke, fill and line width of every row of the legend."""
    present = {entity.layer for drawing in (plan.disc, plan.record) for entity in drawing.entities}
    yield "working edge", BLACK, "none", 2 * EMPHASIS_WIDTH
    for layer in _EXPLAINED:
        if layer in present:
            style = LAYER_STYLES[layer]
            yield style.title, style.stroke, style.fill, max(100 * style.line_ratio, _LEAST_SWATCH_LINE)
    yield "row of star wheels at rest", WORD_GREY, "none", _LEAST_SWATCH_LINE


def facts(plan: CutPlan, laid_out: LaidOut, page: Page, top_mm: float) -> tuple[Group, float]:
    """Two columns of facts under a line, from top_mm down, and where they end."""
    group = Group(id="facts", debug=False)
    right_mm = page.left_mm + page.room_mm
    ends = {"start": (short(page.left_mm), short(top_mm)), "end": (short(right_mm), short(top_mm))}
    group.add(Line(stroke=TRACK_GREY, stroke_width=page.units(0.1), debug=False, **ends))
    bottoms = [
        _column(group, column, page, (page.left_mm + page.units_mm(place * _COLUMN), top_mm))
        for place, column in enumerate((_of_the_disc(plan, laid_out), _of_the_tune(plan, laid_out)))
    ]
    return group, max(bottoms)


def _column(group: Group, column: list[Fact], page: Page, corner_mm: tuple[float, float]) -> float:
    label, value = Face(size_mm=page.units_mm(TEXT_SIZE), colour=WORD_GREY), Face(size_mm=page.units_mm(TEXT_SIZE))
    x_mm, y_mm = corner_mm[0], corner_mm[1] + page.units_mm(0.6)
    for name, text in column:
        for place, line in enumerate(wrapped(text, value, page.units_mm(_COLUMN - _LABEL - 1))):
            y_mm += value.size_mm * _LINE_HEIGHT
            if place == 0:
                group.add(words(name, (x_mm, y_mm), label))
            group.add(words(line, (x_mm + page.units_mm(_LABEL), y_mm), value))
        y_mm += value.size_mm * 0.25
    return y_mm


def _of_the_disc(plan: CutPlan, laid_out: LaidOut) -> list[Fact]:
    movement, cutter = laid_out.disc.movement, laid_out.disc.cutter
    blank, tool = movement.disc, f", tool {plan.tool}" if plan.tool else ""
    mirrored = "" if plan.drawn_from == "label-side" else ", mirrored"
    return [
        ("Movement", f"{movement.id}, revision {movement.revision}"),
        ("Disc", f"{blank.outer_diameter_mm:g} mm across, {blank.thickness_mm:g} mm {blank.material}"),
        ("Turns", f"{movement.turns}, {movement.revolution_s:g} s a turn"),
        ("Cutter", f"{cutter.id}: {cutter.title}{tool}"),
        ("Drawn from", f"the {plan.drawn_from.replace('-', ' ')}{mirrored}, natural size"),
    ]


def _of_the_tune(plan: CutPlan, laid_out: LaidOut) -> list[Fact]:
    arrangement = laid_out.arrangement
    kept = sum(len(notes) for notes in arrangement.notes)
    reasons = Counter(left.reason for left in arrangement.left_out)
    left_out = ", ".join(f"{count} {reason.replace('-', ' ')}" for reason, count in reasons.most_common())
    semitones = arrangement.transposed_semitones
    return [
        ("Notes", f"{kept} of {laid_out.score.note_count} kept, on {laid_out.disc.projection_count} projections"),
        ("Left out", left_out or "none"),
        ("Transposed", f"{semitones:+d} semitones".replace("-", "−") if semitones else "not at all"),
        ("Speed", "as written" if arrangement.speed_factor == 1 else f"{arrangement.speed_factor:.4g} × as written"),
        ("Fingerprint", plan.fingerprint),
    ]
