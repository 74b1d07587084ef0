"""The words below the disc: what is drawn how, and the facts of the disc."""

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from svgwrite.base import BaseElement
from svgwrite.container import Group
from svgwrite.shapes import Circle, Line, Rect

from layout.cut.plan import CutPlan, LayerName
from layout.write.laid_out import LaidOut
from layout.write.svg_page import Face, Page, short, text_width_mm, words, wrapped
from layout.write.svg_style import (
    BLACK,
    EMPHASIS_WIDTH,
    LAYER_STYLES,
    ROW_DASHES_RATIO,
    SMALL_SIZE,
    TEXT_SIZE,
    TRACK_GREY,
    WORD_GREY,
)

# What no one knows by sight; rim, holes and engraving explain themselves, fold lines stand with the working edge.
_EXPLAINED: tuple[LayerName, ...] = ("AFTER_FORMING", "SLITS", "SLOTS", "HITS", "TRACKS", "LEADS")
_SWATCH, _GAP, _ROW_HEIGHT = 2.4, 0.7, 2.6  # hundredths of the page's width
_LEAST_LINE_RATIO, _EDGE_SWATCH_RATIO = 0.0012, 2 * EMPHASIS_WIDTH / 100  # over the page's width
_DOT_TIMES = 2.5  # a dot alone is harder to see than one among hundreds
_LABEL, _COLUMN = 12.0, 47.5  # widths of a label and of a column of facts
_LINE_HEIGHT = 1.4  # of the letter size
Fact = tuple[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Stroke:
    """A line's colour, and its width and dashes over the page's width."""

    colour: str
    width_ratio: float
    dashes_ratio: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Swatch:
    """One row of the legend: its words, and how the thing looks on the disc.

    Attributes:
        title: What it is.
        shape: A line, an area or a dot.
        strokes: Its lines, the last on top; one for an area, and for a dot, as wide as that.
    """

    title: str
    shape: Literal["line", "area", "dot"]
    strokes: tuple[_Stroke, ...]


def legend(plan: CutPlan, page: Page, top_mm: float) -> tuple[Group, float]:
    """What is drawn how, row by row from top_mm down, and where it ends."""
    group = Group(id="legend", debug=False)
    face = Face(size_mm=page.units_mm(SMALL_SIZE), colour=WORD_GREY)
    x_mm, y_mm = page.left_mm, top_mm
    for swatch in _swatches(plan):
        wide_mm = page.units_mm(_SWATCH + 3 * _GAP) + text_width_mm(swatch.title, face)
        if x_mm + wide_mm > page.left_mm + page.room_mm:
            x_mm, y_mm = page.left_mm, y_mm + page.units_mm(_ROW_HEIGHT)
        for shape in _shown(swatch, (x_mm, y_mm), page):
            group.add(shape)
        text_mm = x_mm + page.units_mm(_SWATCH + _GAP)
        group.add(words(swatch.title, (text_mm, y_mm + 0.36 * face.size_mm), face))
        x_mm += wide_mm
    return group, y_mm + page.units_mm(_ROW_HEIGHT / 2)


def _shown(swatch: _Swatch, at_mm: tuple[float, float], page: Page) -> Iterator[BaseElement]:
    (x_mm, y_mm), long_mm = at_mm, page.units_mm(_SWATCH)
    for stroke in swatch.strokes:
        colour, wide_mm = stroke.colour, page.width_mm * stroke.width_ratio
        if swatch.shape == "area":
            corner = (short(x_mm), short(y_mm - page.units_mm(0.6)))
            yield Rect(insert=corner, size=(short(long_mm), page.units(1.2)), fill=colour, debug=False)
        elif swatch.shape == "dot":
            centre = (short(x_mm + long_mm / 2), short(y_mm))
            yield Circle(center=centre, r=short(wide_mm / 2), fill=colour, debug=False)
        else:
            ends = {"start": (short(x_mm), short(y_mm)), "end": (short(x_mm + long_mm), short(y_mm))}
            dashes = page.dashes(stroke.dashes_ratio)
            yield Line(stroke=colour, stroke_width=short(wide_mm), stroke_dasharray=dashes, debug=False, **ends)


def _swatches(plan: CutPlan) -> Iterator[_Swatch]:
    present = {entity.layer for drawing in (plan.disc, plan.record) for entity in drawing.entities}
    edge = _Stroke(colour=BLACK, width_ratio=_EDGE_SWATCH_RATIO)
    if "FOLDS" in present:  # drawn on the working edge, from which it lies a hair's breadth away
        yield _Swatch(title="working edge with fold line", shape="line", strokes=(edge, _stroke_of("FOLDS")))
    else:
        yield _Swatch(title="working edge", shape="line", strokes=(edge,))
    for layer in _EXPLAINED:
        if layer in present:
            is_area = LAYER_STYLES[layer].fill != "none"
            shape: Literal["line", "area", "dot"] = "area" if is_area else "dot" if layer == "HITS" else "line"
            yield _Swatch(title=LAYER_STYLES[layer].title, shape=shape, strokes=(_stroke_of(layer),))
    row = _Stroke(colour=WORD_GREY, width_ratio=_LEAST_LINE_RATIO, dashes_ratio=ROW_DASHES_RATIO)
    yield _Swatch(title="row of star wheels at rest", shape="line", strokes=(row,))


def _stroke_of(layer: LayerName) -> _Stroke:
    style = LAYER_STYLES[layer]
    is_dot, colour = layer == "HITS", style.stroke if style.fill == "none" else style.fill
    width_ratio = (_DOT_TIMES if is_dot else 1) * max(style.line_ratio, _LEAST_LINE_RATIO)
    return _Stroke(colour=colour, width_ratio=width_ratio, dashes_ratio=style.dashes_ratio)


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
        ("Turns", f"{movement.turns} seen from the label side, {movement.revolution_s:g} s a turn"),
        ("Cutter", f"{cutter.id}: {cutter.title}{tool}"),
        ("Drawn from", f"the {plan.drawn_from.replace('-', ' ')}{mirrored}, natural size"),
    ]


NOT_ASKED = ("outside-passage", "ruled-out", "past-the-turn")


def _of_the_tune(plan: CutPlan, laid_out: LaidOut) -> list[Fact]:
    arrangement = laid_out.arrangement
    kept = sum(len(notes) for notes in arrangement.notes)
    # What the maker left out, or the turn, is not asked of the comb; the report counts alike.
    reasons = Counter(left.reason for left in arrangement.left_out if left.reason not in NOT_ASKED)
    asked = kept + reasons.total()
    left_out = ", ".join(f"{count} {reason.replace('-', ' ')}" for reason, count in reasons.most_common())
    semitones = arrangement.transposed_semitones
    return [
        ("Notes", f"{kept} of {asked} asked for kept, on {laid_out.disc.projection_count} projections"),
        ("Left out", left_out or "none"),
        ("Transposed", f"{semitones:+d} semitones".replace("-", "−") if semitones else "not at all"),
        ("Speed", "as written" if arrangement.speed_factor == 1 else f"{arrangement.speed_factor:.4g} × as written"),
        ("Fingerprint", plan.fingerprint),
    ]
