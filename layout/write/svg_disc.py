"""The disc in the picture: a group for each layer, the working edges, and the circle that bounds them."""

import numpy as np
from svgwrite.base import Title
from svgwrite.container import Defs, Group
from svgwrite.masking import ClipPath
from svgwrite.path import Path
from svgwrite.shapes import Circle

from layout.cut.plan import CutPlan, Entity, LayerName, Outlines
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from layout.write.svg_page import Page, short
from layout.write.svg_paths import area_data, circles, lines_data, path_data
from layout.write.svg_style import BLACK, EMPHASIS_WIDTH, LAYER_STYLES, OVER_EDGES

_FROM_RECORD = ("AFTER_FORMING", "FOLDS", "TRACKS")  # all else is shown as it is cut
_MOST_OF_EDGE = 0.3  # of its length: how thick a working edge is drawn at most
CLIP = 1.9  # hundredths of the page's width beyond the rim: room for the ring of a finding there
_CLIP_ID = "disc_circle"


def disc_area(page: Page, groups: list[Group]) -> tuple[Defs, Group]:
    """The groups, shown only as far as a circle round the rim, and that circle.

    What lies off the disc, as on a movement whose tracks are larger than its disc, does not run over
    the words round it.
    """
    circle, area = ClipPath(id=_CLIP_ID, debug=False), Group(id="disc", debug=False)
    circle.add(Circle(center=("0", "0"), r=short(page.disc_radius_mm + page.units_mm(CLIP)), debug=False))
    defs = Defs(debug=False)
    defs.add(circle)
    area["clip-path"] = f"url(#{_CLIP_ID})"
    for group in groups:
        area.add(group)
    return defs, area


def layer_groups(plan: CutPlan, page: Page) -> tuple[list[Group], list[Group]]:
    """A group for each layer that occurs, named as the layer, in painting order: below and above the working edges."""
    drawn: dict[LayerName, list[Entity]] = {}
    for drawing, wanted in ((plan.disc, False), (plan.record, True)):
        for entity in drawing.entities:
            if (entity.layer in _FROM_RECORD) is wanted:
                drawn.setdefault(entity.layer, []).append(entity)
    groups = {layer: layer_group(layer, drawn[layer], page) for layer in LAYER_STYLES if layer in drawn}
    above = [groups.pop(layer) for layer in OVER_EDGES if layer in groups]
    return list(groups.values()), above


def layer_group(layer: LayerName, entities: list[Entity], page: Page) -> Group:
    """The group of one layer, named as it in small letters; empty but for its title without entities."""
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
    if style.fill != "none" and any(isinstance(each, Outlines) and not each.closed for each in entities):
        # Bridges leave outlines open: filled is what lines bound together, drawn are the lines.
        group.add(Path(d=area_data(entities), stroke="none", debug=False))
        group.add(Path(d=data, fill="none", debug=False))
    elif data:
        group.add(Path(d=data, debug=False))
    for x, y, radius in circles(entities):
        group.add(Circle(center=(x, y), r=radius, debug=False))
    return group


def working_edges(plan: CutPlan, disc: Disc, page: Page) -> Group:
    """A short thick line at every working edge, as drawn."""
    width_mm = disc.movement.projection.width_mm
    edge_mm = np.array([(0.0, -width_mm / 2), (0.0, width_mm / 2)])
    ends_mm = disc.placed_mm(edge_mm)
    thick_mm = min(page.units_mm(EMPHASIS_WIDTH), width_mm * _MOST_OF_EDGE)
    group = Group(id="working_edges", fill="none", stroke=BLACK, stroke_width=short(thick_mm), debug=False)
    group.elements.append(Title("working edge"))
    if disc.projection_count:
        group.add(Path(d=lines_data(as_drawn(ends_mm, plan)), debug=False))
    return group


def as_drawn(points_mm: FloatArray, plan: CutPlan) -> FloatArray:
    """Points seen from the label side, of shape (…, 2), as the drawings have them."""
    return points_mm if plan.drawn_from == "label-side" else points_mm * (1, -1)
