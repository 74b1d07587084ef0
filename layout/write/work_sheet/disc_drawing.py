"""The disc to scale, as it is cut: what CutPlan.disc holds, its diameter, and which way it turns."""

import math

import numpy as np
from reportlab.pdfgen.pathobject import PDFPathObject

from layout.cut.plan import Circles, CutPlan, Entity, LayerName, Lettering, Outlines, Points
from layout.place.disc import Disc
from layout.write.svg_signs import turning_as_drawn
from layout.write.work_sheet.paper import HAIR_MM, NARROW_MM, WIDE_MM, Area, Face, Paper, Pen, Point
from layout.write.work_sheet.scale import Scale, scale_for

DRAWING_MM = 119.0  # the largest a disc is drawn: room is left for its turning arrow and its diameter
BOX_WIDTH_MM, BOX_HEIGHT_MM = 126.0, 133.0
_FROM_TOP_MM = 63.5  # where the disc's centre lies
_HIT_MM = 0.4  # across the square dot that stands for a hit
_BEYOND_MM = 3.0  # outside the rim: what is off the disc is shown as far as this
_ARROW_OUT_MM, _ARROW_FROM_DEG, _ARROW_TO_DEG = 1.8, 118.0, 142.0
_TICK_MM = 2.5
_WIDEST_ARC_RAD = math.pi / 2  # of one Bezier curve, which then lies within 0.03 % of its radius
_DIMENSION = Face(size_mm=2.8, anchor="middle")

_PENS: dict[LayerName, Pen] = {
    "RIM": Pen(width_mm=WIDE_MM),
    "HOLES": Pen(width_mm=NARROW_MM),
    "SLITS": Pen(width_mm=HAIR_MM),
    "SLOTS": Pen(width_mm=HAIR_MM),
    "HITS": Pen(width_mm=0.0, fill_ratio=0.0),
    "LEADS": Pen(width_mm=HAIR_MM, grey_ratio=0.4),
    "MARKS": Pen(width_mm=HAIR_MM),
}
_INDEX = Pen(width_mm=NARROW_MM)


def disc_scale(disc: Disc) -> Scale:
    """The scale the disc is drawn in."""
    return scale_for(disc.movement.disc.outer_diameter_mm, DRAWING_MM)


def drawn_disc(paper: Paper, area: Area, plan: CutPlan, disc: Disc) -> None:
    """Draws the disc in the upper left corner of an area, with its diameter and a turning arrow.

    Args:
        paper: The page.
        area: At least BOX_WIDTH_MM by BOX_HEIGHT_MM.
        plan: What is drawn: its cutting drawing, entity by entity.
        disc: For the diameter and the turning.
    """
    scale = disc_scale(disc)
    centre = disc_centre(area)
    rim_mm = scale.paper_mm(disc.movement.disc.outer_diameter_mm / 2)
    clip = paper.new_path()
    clip.circle(*centre, rim_mm + _BEYOND_MM)
    paper.clip_to(clip)
    for entity in plan.disc.entities:
        path = paper.new_path()
        _add(path, entity, centre, scale)
        is_index = entity.layer == "MARKS" and isinstance(entity, Outlines)
        paper.draw(path, _INDEX if is_index else _PENS.get(entity.layer, Pen(width_mm=HAIR_MM)))
    paper.unclip()
    _ticks(paper, centre, rim_mm)
    _turning_arrow(paper, plan, disc, centre, rim_mm)
    _diameter(paper, f"Ø {disc.movement.disc.outer_diameter_mm:g}", centre, rim_mm)


def disc_centre(area: Area) -> Point:
    """Where the centre of the disc lies on the page."""
    return area.left_mm + BOX_WIDTH_MM / 2, area.top_mm - _FROM_TOP_MM


def _add(path: PDFPathObject, entity: Entity, centre: Point, scale: Scale) -> None:
    factor = scale.paper_mm(1.0)
    match entity:
        case Outlines():
            for points in (entity.points_mm * factor + centre).tolist():
                _add_outline(path, points, entity.bulges.tolist(), closed=entity.closed)
        case Circles():
            for (x, y), radius in zip(
                (entity.centres_mm * factor + centre).tolist(), (entity.radius_mm * factor).tolist(), strict=True
            ):
                path.circle(x, y, radius)
        case Points():
            for x, y in (entity.points_mm * factor + centre).tolist():
                path.rect(x - _HIT_MM / 2, y - _HIT_MM / 2, _HIT_MM, _HIT_MM)
        case Lettering():
            for stroke in entity.strokes_mm:
                points = (stroke * factor + centre).tolist()
                _add_outline(path, points, [0.0] * len(points), closed=False)


def _add_outline(path: PDFPathObject, points: list[Point], bulges: list[float], *, closed: bool) -> None:
    path.moveTo(*points[0])
    ends = [*points[1:], points[0]] if closed else points[1:]
    for start, end, bulge in zip(points, ends, bulges, strict=False):
        if bulge:
            _add_arc(path, start, end, bulge)
        else:
            path.lineTo(*end)
    if closed:
        path.close()


def _add_arc(path: PDFPathObject, start: Point, end: Point, bulge: float) -> None:
    """An arc by its bulge, in Bezier curves of a quarter circle at most.

    The included angle is θ = 4·atan(b); the centre lies (1 − b²)/(4b) of the chord to its left. A curve's
    handles are 4/3·tan(φ/4) of the radius long, φ its own angle; elementary geometry.
    """
    chord = (end[0] - start[0], end[1] - start[1])
    off = (1 - bulge**2) / (4 * bulge)
    middle = ((start[0] + end[0]) / 2 - chord[1] * off, (start[1] + end[1]) / 2 + chord[0] * off)
    turn_rad = 4 * math.atan(bulge)
    pieces = math.ceil(abs(turn_rad) / _WIDEST_ARC_RAD - 1e-9)
    step_rad = turn_rad / pieces
    handle = 4 / 3 * math.tan(step_rad / 4)
    arm = (start[0] - middle[0], start[1] - middle[1])
    cos, sin = math.cos(step_rad), math.sin(step_rad)
    for _ in range(pieces):
        on = (arm[0] * cos - arm[1] * sin, arm[0] * sin + arm[1] * cos)
        path.curveTo(
            middle[0] + arm[0] - handle * arm[1],
            middle[1] + arm[1] + handle * arm[0],
            middle[0] + on[0] + handle * on[1],
            middle[1] + on[1] - handle * on[0],
            middle[0] + on[0],
            middle[1] + on[1],
        )
        arm = on


def _ticks(paper: Paper, centre: Point, rim_mm: float) -> None:
    """Where the centre lines leave the rim."""
    for out in ((1, 0), (0, 1), (-1, 0), (0, -1)):
        ends = [(centre[0] + out[0] * (rim_mm + far), centre[1] + out[1] * (rim_mm + far)) for far in (0.6, _TICK_MM)]
        paper.line(ends, Pen(width_mm=NARROW_MM))


def _turning_arrow(paper: Paper, plan: CutPlan, disc: Disc, centre: Point, rim_mm: float) -> None:
    clockwise = turning_as_drawn(plan, disc) == "clockwise"
    degrees = (_ARROW_TO_DEG, _ARROW_FROM_DEG) if clockwise else (_ARROW_FROM_DEG, _ARROW_TO_DEG)
    reach_mm = rim_mm + _ARROW_OUT_MM
    points = [
        (centre[0] + reach_mm * math.cos(angle), centre[1] + reach_mm * math.sin(angle))
        for angle in np.radians(np.linspace(*degrees, 25)).tolist()
    ]
    paper.line(points, Pen(width_mm=WIDE_MM))
    back, tip = points[-2], points[-1]
    far_mm = math.dist(back, tip)
    ahead = tuple(tip[axis] + (tip[axis] - back[axis]) / far_mm * 1.5 for axis in (0, 1))
    paper.head(back, (ahead[0], ahead[1]), Pen(), 2.8)


def _diameter(paper: Paper, text: str, centre: Point, rim_mm: float) -> None:
    at_mm = centre[1] - rim_mm - 6.0
    left, right = centre[0] - rim_mm, centre[0] + rim_mm
    pen = Pen(width_mm=HAIR_MM)
    for side in (left, right):
        paper.line([(side, centre[1] - rim_mm * 0.25), (side, at_mm - 1.5)], pen)
    paper.line([(left, at_mm), (right, at_mm)], pen)
    paper.head((right, at_mm), (left, at_mm), Pen())
    paper.head((left, at_mm), (right, at_mm), Pen())
    paper.text((centre[0], at_mm + 0.9), text, _DIMENSION)
