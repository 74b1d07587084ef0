"""The disc in the picture: a group for each layer, the working edges, and which way it turns."""

import math
from typing import Literal

import numpy as np
from svgwrite.base import Title
from svgwrite.container import Group
from svgwrite.path import Path
from svgwrite.shapes import Circle

from layout.cut.plan import CutPlan, Entity, LayerName
from layout.mechanics.arrays import FloatArray
from layout.mechanics.frame import on_disc_mm
from layout.place.disc import Disc
from layout.write.svg_page import Page, short
from layout.write.svg_paths import circles, lines_data, path_data
from layout.write.svg_style import BLACK, EMPHASIS_WIDTH, LAYER_STYLES, WORD_GREY

_FROM_RECORD = ("AFTER_FORMING", "FOLDS", "TRACKS")  # all else is shown as it is cut
_MOST_OF_EDGE = 0.3  # of its length: how thick a working edge is drawn at most
_ARROW_FROM_DEG, _ARROW_TO_DEG = 52.0, 33.0  # on the page, up from the right: beside the upper right corner's words
_ARROW_OUT, _ARROW_HEAD = 2.2, 1.5  # hundredths of the page's width
_ROW_GAP, _ROW_MARK = 0.8, 2.0
_ROW_DASHES_RATIO = (0.012, 0.004, 0.002, 0.004)


def layer_groups(plan: CutPlan, page: Page) -> list[Group]:
    """A group for each layer that occurs, named as the layer, in painting order."""
    drawn: dict[LayerName, list[Entity]] = {}
    for drawing, wanted in ((plan.disc, False), (plan.record, True)):
        for entity in drawing.entities:
            if (entity.layer in _FROM_RECORD) is wanted:
                drawn.setdefault(entity.layer, []).append(entity)
    return [_layer_group(layer, drawn[layer], page) for layer in LAYER_STYLES if layer in drawn]


def _layer_group(layer: LayerName, entities: list[Entity], page: Page) -> Group:
    style = LAYER_STYLES[layer]
    group = Group(
        id=layer.lower(),
        fill=style.fill,
        stroke=style.stroke,
        stroke_width=page.part(style.line_ratio),
        stroke_dasharray=page.dashes(style.dashes_ratio),
        stroke_linecap="round",
        stroke_linejoin="round",
        debug=False,
    )
    group.elements.append(Title(style.title))
    data = path_data(entities)
    if data:
        group.add(Path(d=data, debug=False))
    for x, y, radius in circles(entities):
        group.add(Circle(center=(x, y), r=radius, debug=False))
    return group


def working_edges(plan: CutPlan, disc: Disc, page: Page) -> Group:
    """A short thick line at every working edge, as drawn."""
    width_mm = disc.movement.projection.width_mm
    edge_mm = np.array([(0.0, -width_mm / 2), (0.0, width_mm / 2)])
    ends_mm = on_disc_mm(edge_mm, disc.radius_mm, disc.edge_angle_rad, disc.turning.direction)
    thick_mm = min(page.units_mm(EMPHASIS_WIDTH), width_mm * _MOST_OF_EDGE)
    group = Group(id="working_edges", fill="none", stroke=BLACK, stroke_width=short(thick_mm), debug=False)
    group.elements.append(Title("working edge"))
    if disc.projection_count:
        group.add(Path(d=lines_data(as_drawn(ends_mm, plan)), debug=False))
    return group


def as_drawn(points_mm: FloatArray, plan: CutPlan) -> FloatArray:
    """Points seen from the label side, of shape (…, 2), as the drawings have them."""
    return points_mm if plan.drawn_from == "label-side" else points_mm * (1, -1)


def turning_as_drawn(plan: CutPlan, disc: Disc) -> Literal["clockwise", "anticlockwise"]:
    """Which way the disc turns seen from the side drawn: from the star side, the other way."""
    clockwise = (disc.turning.direction > 0) == (plan.drawn_from == "label-side")
    return "clockwise" if clockwise else "anticlockwise"


def turning_arrow(disc: Disc, plan: CutPlan, page: Page) -> Group:
    """An arrow beside the rim that shows which way the disc turns, as drawn."""
    clockwise = turning_as_drawn(plan, disc) == "clockwise"
    ends_deg = (_ARROW_FROM_DEG, _ARROW_TO_DEG) if clockwise else (_ARROW_TO_DEG, _ARROW_FROM_DEG)
    reach_mm = page.disc_radius_mm + page.units_mm(_ARROW_OUT)
    start, end = (_on_page(reach_mm, angle_deg) for angle_deg in ends_deg)
    heading_rad = math.radians(ends_deg[1]) + (-math.pi / 2 if clockwise else math.pi / 2)
    ahead = np.array([math.cos(heading_rad), -math.sin(heading_rad)]) * page.units_mm(_ARROW_HEAD)
    aside = np.array([-ahead[1], ahead[0]]) * 0.5
    head = [np.array(end) + ahead, np.array(end) + aside, np.array(end) - aside]
    group = Group(id="turning", stroke=BLACK, stroke_width=page.units(0.45), fill="none", debug=False)
    group.elements.append(Title(f"the disc turns {turning_as_drawn(plan, disc)} seen from this side"))
    arc = f"M{_place(start)}A{short(reach_mm)} {short(reach_mm)} 0 0 {int(clockwise)} {_place(end)}"
    group.add(Path(d=arc, debug=False))
    group.add(Path(d="M" + "L".join(map(_place, head)) + "Z", fill=BLACK, stroke="none", debug=False))
    return group


def row_of_star_wheels(disc: Disc, plan: CutPlan, page: Page) -> Group:
    """The line that lies over the star wheels when the disc is at rest, and a mark beside the rim."""
    row_mm = disc.movement.gantry_offset_mm * (1 if plan.drawn_from == "label-side" else -1)
    from_mm, rim_mm = disc.movement.disc.centre_hole_mm / 2 + page.units_mm(1), page.disc_radius_mm
    tip_mm, back_mm = rim_mm + page.units_mm(_ROW_GAP), rim_mm + page.units_mm(_ROW_GAP + _ROW_MARK)
    half_mm = page.units_mm(_ROW_MARK / 2)
    group = Group(id="star_wheels", stroke=WORD_GREY, stroke_width=page.units(0.09), fill=WORD_GREY, debug=False)
    group.elements.append(Title("row of star wheels, the disc at rest"))
    line = f"M{_place((from_mm, -row_mm))}L{_place((rim_mm, -row_mm))}"
    group.add(Path(d=line, stroke_dasharray=page.dashes(_ROW_DASHES_RATIO), debug=False))
    corners = [(tip_mm, -row_mm), (back_mm, -row_mm - half_mm), (back_mm, -row_mm + half_mm)]
    group.add(Path(d="M" + "L".join(map(_place, corners)) + "Z", stroke="none", debug=False))
    return group


def _on_page(radius_mm: float, angle_deg: float) -> tuple[float, float]:
    angle_rad = math.radians(angle_deg)
    return radius_mm * math.cos(angle_rad), -radius_mm * math.sin(angle_rad)


def _place(at_mm: FloatArray | tuple[float, float]) -> str:
    return f"{short(float(at_mm[0]))} {short(float(at_mm[1]))}"
