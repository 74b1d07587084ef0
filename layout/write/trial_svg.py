"""trial-piece.svg: the piece to look at before it is cut, at its place on the disc."""

from collections.abc import Iterator

from svgwrite.container import Group
from svgwrite.shapes import Circle, Line

from layout.cut.plan import Entity, LayerName
from layout.trial.piece import Ladder, TrialPiece
from layout.version import ENGINE_VERSION
from layout.write.numbers import number
from layout.write.svg_disc import layer_group
from layout.write.svg_page import (
    Face,
    Page,
    bytes_of,
    describe,
    fitted,
    new_drawing,
    page_for,
    short,
    text_width_mm,
    words,
    wrapped,
)
from layout.write.svg_style import (
    BLACK,
    LAYER_STYLES,
    LEAD_SIZE,
    SMALL_SIZE,
    TEXT_SIZE,
    TITLE_SIZE,
    TRACK_GREY,
    VERMILION,
    WORD_GREY,
)

_TITLE = "Trial piece: not a disc"
_LEAST_TITLE_SIZE = 3.0
_LINE_HEIGHT = 1.4  # of the letter size
_GAP, _BELOW = 2.2, 3.5  # hundredths of the page's width
_LABEL = 15.0  # width of a label, the same
_SWATCH, _SWATCH_GAP, _LEAST_LINE_RATIO = 2.4, 0.7, 0.0012
_DISC_DASHES_RATIO = (0.004, 0.004)
# What no one knows by sight; outline, holes and engraving explain themselves.
_EXPLAINED: tuple[LayerName, ...] = ("SLITS", "SLOTS", "HITS", "LEADS")


def write_trial_svg(piece: TrialPiece) -> bytes:
    """The piece as an SVG picture in millimetres at natural size, UTF-8, the same bytes every time.

    For people to read; what is cut is trial-piece.dxf. Coordinates are (x, −y) of the drawing, without a transform,
    every layer that occurs is a group with its name in small letters as its id, and a dashed circle shows the
    disc the piece is a sector of. Below stand what is drawn how, the steps of each ladder, what is not tried, and what
    to mind. It holds no script and refers to nothing outside itself.

    Args:
        piece: The piece as it is cut.
    """
    page = page_for(piece.disc_diameter_mm)
    title, lines = fitted(
        f"{_TITLE}, for {piece.movement_id}",
        Face(size_mm=page.units_mm(TITLE_SIZE), bold=True),
        page.room_mm,
        page.units_mm(_LEAST_TITLE_SIZE),
    )
    height_mm = (len(lines) * title.size_mm + page.units_mm(LEAD_SIZE)) * _LINE_HEIGHT + 2 * page.units_mm(_GAP)
    top_mm = -page.disc_radius_mm - height_mm
    head = Group(id="header", debug=False)
    y_mm = top_mm + page.units_mm(_GAP)
    for line in lines:
        y_mm += title.size_mm * _LINE_HEIGHT
        head.add(words(line, (page.left_mm, y_mm), title))
    y_mm += page.units_mm(LEAD_SIZE) * _LINE_HEIGHT
    lead = Face(size_mm=page.units_mm(LEAD_SIZE), colour=WORD_GREY)
    head.add(words(_lead(piece), (page.left_mm, y_mm), lead))
    legend, y_mm = _legend(piece, page, page.disc_radius_mm + page.units_mm(_BELOW))
    told, bottom_mm = _told(piece, page, y_mm)
    drawing = new_drawing(page, top_mm, bottom_mm + page.units_mm(_GAP))
    for group in (head, _disc(page), *_layers(piece, page), legend, told):
        drawing.add(group)
    describe(drawing, f"{_TITLE}, for {piece.movement_id} on {piece.cutter_id}", _described(piece))
    return bytes_of(drawing)


def _lead(piece: TrialPiece) -> str:
    return f"drawn from the {piece.drawn_from.replace('-', ' ')}, natural size"


def _described(piece: TrialPiece) -> str:
    steps = sum(len(ladder.steps) for ladder in piece.ladders)
    return (
        f"A sector of a disc of {piece.disc_diameter_mm:g} mm with {steps} steps to measure. "
        f"{'. '.join(piece.drawing.comments)}."
    )


def _disc(page: Page) -> Group:
    group = Group(id="disc", fill="none", stroke=TRACK_GREY, debug=False)
    dashes = page.dashes(_DISC_DASHES_RATIO)
    group.add(
        Circle(
            center=("0", "0"),
            r=short(page.disc_radius_mm),
            stroke_width=page.part(_LEAST_LINE_RATIO),
            stroke_dasharray=dashes,
            debug=False,
        )
    )
    return group


def _layers(piece: TrialPiece, page: Page) -> Iterator[Group]:
    """A group for each layer that occurs, in painting order."""
    drawn: dict[LayerName, list[Entity]] = {}
    for entity in piece.drawing.entities:
        drawn.setdefault(entity.layer, []).append(entity)
    return (layer_group(layer, drawn[layer], page) for layer in LAYER_STYLES if layer in drawn)


def _legend(piece: TrialPiece, page: Page, top_mm: float) -> tuple[Group, float]:
    """What is drawn how, in one row, and where it ends."""
    group = Group(id="legend", debug=False)
    face = Face(size_mm=page.units_mm(SMALL_SIZE), colour=WORD_GREY)
    present = {entity.layer for entity in piece.drawing.entities}
    x_mm, long_mm = page.left_mm, page.units_mm(_SWATCH)
    for layer in (layer for layer in _EXPLAINED if layer in present):
        style = LAYER_STYLES[layer]
        wide_mm = page.width_mm * max(style.line_ratio, _LEAST_LINE_RATIO)
        if layer == "HITS":
            centre = (short(x_mm + long_mm / 2), short(top_mm))
            group.add(Circle(center=centre, r=short(wide_mm), fill=style.stroke, debug=False))
        else:
            ends = {"start": (short(x_mm), short(top_mm)), "end": (short(x_mm + long_mm), short(top_mm))}
            group.add(Line(stroke=style.stroke, stroke_width=short(wide_mm), debug=False, **ends))
        text_mm = x_mm + long_mm + page.units_mm(_SWATCH_GAP)
        group.add(words(style.title, (text_mm, top_mm + 0.36 * face.size_mm), face))
        x_mm = text_mm + text_width_mm(style.title, face) + 2 * page.units_mm(_SWATCH_GAP)
    return group, top_mm + page.units_mm(_GAP)


def _told(piece: TrialPiece, page: Page, top_mm: float) -> tuple[Group, float]:
    """Rows of a label and its words, and where they end."""
    group = Group(id="told", debug=False)
    label = Face(size_mm=page.units_mm(TEXT_SIZE), colour=WORD_GREY)
    y_mm = top_mm
    for name, text, colour in _rows(piece):
        value = Face(size_mm=label.size_mm, colour=colour)
        for place, line in enumerate(wrapped(text, value, page.room_mm - page.units_mm(_LABEL))):
            y_mm += value.size_mm * _LINE_HEIGHT
            if place == 0:
                group.add(words(name, (page.left_mm, y_mm), label))
            group.add(words(line, (page.left_mm + page.units_mm(_LABEL), y_mm), value))
        y_mm += value.size_mm * 0.25
    return group, y_mm


def _rows(piece: TrialPiece) -> Iterator[tuple[str, str, str]]:
    tool = "" if piece.hits is None else f", tool {piece.hits.tool}"
    yield "Movement", f"{piece.movement_id}, revision {piece.movement_revision}", BLACK
    yield "Sheet", f"{piece.material}, {number(piece.thickness_mm)} mm", BLACK
    yield "Cutter", f"{piece.cutter_id}{tool}; {piece.edges}", BLACK
    for ladder in piece.ladders:
        yield ladder.name.replace("-", " ").capitalize(), _steps(ladder), BLACK
    for left in piece.not_tried:
        yield "Not tried", f"{left.what}: {left.why}", VERMILION
    yield "Mind", piece.cautions[0], BLACK
    yield "Made by", f"discwright {ENGINE_VERSION}; what is cut is trial-piece.dxf, what to measure measure.pdf", BLACK


def _steps(ladder: Ladder) -> str:
    return ", ".join(f"{step.mark} {number(step.nominal_mm, 3)}" for step in ladder.steps) + " mm"
