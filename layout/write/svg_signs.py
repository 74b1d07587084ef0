"""Signs on and beside the disc: which way it turns, where the star wheels are, where the disc rests."""

import math
from collections.abc import Iterator
from typing import Literal

import numpy as np
from svgwrite.base import Title
from svgwrite.container import Group
from svgwrite.path import Path

from layout.cut.plan import CutPlan, Outlines
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from layout.write.svg_page import Page, short
from layout.write.svg_paths import path_data
from layout.write.svg_style import BLACK, FLAG_WIDTH, ROW_DASHES_RATIO, WORD_GREY

_ARROW_FROM_DEG, _ARROW_TO_DEG = 52.0, 33.0  # on the page, up from the right: beside the upper right corner's words
_ARROW_OUT, _ARROW_HEAD = 2.2, 1.5  # hundredths of the page's width
_ROW_GAP, _ROW_MARK, _ROW_BEYOND, _ROW_OFF_MARK = 0.8, 2.0, 1.0, 0.2


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


def row_of_star_wheels(disc: Disc, plan: CutPlan, page: Page) -> tuple[Group, Group]:
    """The line over the star wheels when the disc is at rest, and a mark for it beside the rim.

    The line runs over the tracks only, and keeps off the index mark, which lies along it.
    """
    row_mm = disc.movement.gantry_offset_mm * (1 if plan.drawn_from == "label-side" else -1)
    line, mark = (
        Group(id=name, stroke=WORD_GREY, stroke_width=page.units(0.09), fill=WORD_GREY, debug=False)
        for name in ("star_wheels", "star_wheels_mark")
    )
    line.elements.append(Title("row of star wheels, the disc at rest"))
    pieces = "".join(f"M{_place((a, -row_mm))}L{_place((b, -row_mm))}" for a, b in _row_pieces_mm(disc, plan, page))
    if pieces:
        line.add(Path(d=pieces, stroke_dasharray=page.dashes(ROW_DASHES_RATIO), debug=False))
    tip_mm = page.disc_radius_mm + page.units_mm(_ROW_GAP)
    back_mm, half_mm = tip_mm + page.units_mm(_ROW_MARK), page.units_mm(_ROW_MARK / 2)
    corners = [(tip_mm, -row_mm), (back_mm, -row_mm - half_mm), (back_mm, -row_mm + half_mm)]
    mark.add(Path(d="M" + "L".join(map(_place, corners)) + "Z", stroke="none", debug=False))
    return line, mark


def _row_pieces_mm(disc: Disc, plan: CutPlan, page: Page) -> Iterator[tuple[float, float]]:
    """From where to where along x the row is drawn, from the centre outwards."""
    beyond_mm, off_mm = page.units_mm(_ROW_BEYOND), page.units_mm(_ROW_OFF_MARK)
    from_mm = float(disc.turning.radius_mm[0]) - beyond_mm
    to_mm = min(float(disc.turning.radius_mm[-1]) + beyond_mm, page.disc_radius_mm)
    for mark in sorted(_index_marks(plan), key=lambda mark: float(mark.points_mm[..., 0].min())):
        before_mm = float(mark.points_mm[..., 0].min()) - off_mm
        if from_mm < min(before_mm, to_mm):
            yield from_mm, min(before_mm, to_mm)
        from_mm = max(from_mm, float(mark.points_mm[..., 0].max()) + off_mm)
    if from_mm < to_mm:
        yield from_mm, to_mm


def _index_marks(plan: CutPlan) -> list[Outlines]:
    return [entity for entity in plan.disc.entities if isinstance(entity, Outlines) and entity.layer == "MARKS"]


def index_flag(plan: CutPlan, page: Page) -> Group:
    """The index mark once more, in a line that shows in a small picture; empty where there is none."""
    group = Group(id="index_mark", fill="none", stroke=BLACK, stroke_width=page.units(FLAG_WIDTH), debug=False)
    group.elements.append(Title("index mark: where the disc rests; its barb points the way the disc turns"))
    data = path_data(list(_index_marks(plan)))
    if data:
        group.add(Path(d=data, debug=False))
    return group


def _on_page(radius_mm: float, angle_deg: float) -> tuple[float, float]:
    angle_rad = math.radians(angle_deg)
    return radius_mm * math.cos(angle_rad), -radius_mm * math.sin(angle_rad)


def _place(at_mm: FloatArray | tuple[float, float]) -> str:
    return f"{short(float(at_mm[0]))} {short(float(at_mm[1]))}"
