"""The sketch of one projection to scale: a section through standing metal, or a slot from above."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from layout.documents.cutter import Fold
from layout.place.disc import Disc
from layout.write.work_sheet.paper import HAIR_MM, NARROW_MM, SMALL, WIDE_MM, Area, Face, Paper, Pen, Point
from layout.write.work_sheet.scale import Scale, scale_for

HEIGHT_MM = 39.0
_SQUARE_DEG = 90.0
_ROOM_MM = (61.0, 22.0)  # along the sheet, and from its upper face to the tip
_SHEET_SHOWN = 2.4  # thicknesses of sheet shown beyond bend and opening
_OUTLINE, _THIN = Pen(width_mm=WIDE_MM, fill_ratio=0.88), Pen(width_mm=HAIR_MM)
_CHAIN = Pen(width_mm=HAIR_MM, dashes_mm=(2.0, 0.6, 0.3, 0.6))
_MIDDLE, _END = Face(size_mm=SMALL.size_mm, anchor="middle"), Face(size_mm=SMALL.size_mm, anchor="end")
_ARC_POINTS = 13
Place = Callable[[float, float], Point]


def bend_to_deg(fold: Fold) -> float:
    """The angle to bend to, so that the tab rests at 90° once it is let go."""
    return _SQUARE_DEG + (0.0 if fold.springback is None else fold.springback.opens_deg)


def sketched(paper: Paper, area: Area, disc: Disc) -> Area:
    """Draws one projection to scale at the top of an area, and gives what is left.

    Nothing is drawn of a projection that the cutter cannot make.
    """
    section = section_of(disc)
    if disc.pattern.making == "slot":
        _slot(paper, area, disc)
    elif section is not None:
        _section(paper, area, disc, section)
    else:
        return area
    return area.below(HEIGHT_MM)


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A section along the travel: u in the direction of travel, z up from the sheet's star-side face.

    Attributes:
        tab_mm: The outline of sheet and tab in one piece, u and z.
        sheet_mm: From where to where along u the sheet goes on beyond the opening.
        tip_mm: z of the tab's tip.
        fold_mm: u of the fold line on the flat; None where the tool knows.
        radius_mm: Inside radius; None where the tool knows.
        away: Which way the opening lies from the tab, +1 ahead or −1 behind.
        bend_deg: The angle to bend to, where it is not 90; else None.
    """

    tab_mm: tuple[Point, ...]
    sheet_mm: tuple[float, float]
    tip_mm: float
    fold_mm: float | None
    radius_mm: float | None
    away: int
    bend_deg: float | None


def section_of(disc: Disc) -> Section | None:
    """The section through one projection; None for slots, and where the cutter has no way to form them."""
    fold = disc.cutter.fold
    if disc.pattern.making == "fold" and fold is not None:
        return _folded(disc, fold)
    return _lanced(disc) if disc.pattern.making == "lance" and disc.pattern.tool else None


def _folded(disc: Disc, fold: Fold) -> Section:
    behind = fold.fold_side == "behind"
    thickness_mm, radius_mm = disc.movement.disc.thickness_mm, fold.inside_radius_mm
    away = -1 if behind else 1
    tangent_mm = radius_mm if behind else -(radius_mm + thickness_mm)
    u_mm = disc.pattern.opening.points_mm[:, 0]
    far_mm = float(u_mm.min() if behind else u_mm.max())
    return Section(
        tab_mm=_bent(tangent_mm, away, thickness_mm, (radius_mm, disc.movement.projection.depth_mm or 0.0)),
        sheet_mm=(far_mm, far_mm + away * _SHEET_SHOWN * thickness_mm),
        tip_mm=-max(disc.movement.projection.depth_mm or 0.0, radius_mm),
        fold_mm=None if disc.pattern.fold_line_mm is None else float(disc.pattern.fold_line_mm[0, 0]),
        radius_mm=radius_mm,
        away=away,
        bend_deg=None if fold.springback is None else bend_to_deg(fold),
    )


def _lanced(disc: Disc) -> Section:
    """A lance's tab hangs on the end of its footprint that is nearer to the working edge; its bend is the tool's."""
    thickness_mm, depth_mm = disc.movement.disc.thickness_mm, disc.movement.projection.depth_mm or 0.0
    u_mm = disc.pattern.opening.points_mm[:, 0]
    ahead_mm, behind_mm = float(u_mm.max()), -float(u_mm.min()) - thickness_mm
    hangs_ahead = ahead_mm <= behind_mm
    away = -1 if hangs_ahead else 1
    room_mm = max(min(ahead_mm, behind_mm), 0.0)
    tangent_mm = ahead_mm if hangs_ahead else -thickness_mm - room_mm
    far_mm = float(u_mm.min()) if hangs_ahead else ahead_mm
    radius_mm = min(room_mm, depth_mm)
    return Section(
        tab_mm=_bent(tangent_mm, away, thickness_mm, (radius_mm, depth_mm)),
        sheet_mm=(far_mm, far_mm + away * _SHEET_SHOWN * thickness_mm),
        tip_mm=-depth_mm,
        fold_mm=None,
        radius_mm=None,
        away=away,
        bend_deg=None,
    )


def _bent(tangent_mm: float, away: int, thickness_mm: float, bend_mm: tuple[float, float]) -> tuple[Point, ...]:
    """Sheet, bend and tab in one outline; bend_mm are inside radius and depth."""
    radius_mm, depth_mm = bend_mm
    arc_rad = np.linspace(0.0, math.pi / 2, _ARC_POINTS)
    out = np.column_stack([tangent_mm + away * np.sin(arc_rad), np.cos(arc_rad)])
    centre = np.array([tangent_mm, -radius_mm])
    unit = out - np.array([tangent_mm, 0.0])
    outer, inner = centre + (radius_mm + thickness_mm) * unit, centre + radius_mm * unit
    tip_mm, end_mm = -max(depth_mm, radius_mm), tangent_mm - away * (_SHEET_SHOWN + 1) * thickness_mm
    points = [
        (end_mm, thickness_mm),
        *outer.tolist(),
        (outer[-1][0], tip_mm),
        (inner[-1][0], tip_mm),
        *inner[::-1].tolist(),
        (end_mm, 0.0),
    ]
    return tuple((float(u), float(z)) for u, z in points)


def _section(paper: Paper, area: Area, disc: Disc, section: Section) -> None:
    thickness_mm = disc.movement.disc.thickness_mm
    along = [u for u, _ in section.tab_mm] + list(section.sheet_mm)
    wide_mm, high_mm = max(along) - min(along), thickness_mm - section.tip_mm
    scales = [scale_for(size_mm, room_mm) for size_mm, room_mm in zip((wide_mm, high_mm), _ROOM_MM, strict=True)]
    scale = min(scales, key=lambda one: one.paper_mm(1.0))
    middle_mm = (max(along) + min(along)) / 2
    x_mm, y_mm = area.left_mm + area.width_mm / 2, area.top_mm - 10.0 - scale.paper_mm(thickness_mm)

    def at(u_mm: float, z_mm: float) -> Point:
        return x_mm + scale.paper_mm(u_mm - middle_mm), y_mm + scale.paper_mm(z_mm)

    paper.line([at(u, z) for u, z in section.tab_mm], _OUTLINE, closed=True)
    near, far = section.sheet_mm
    corners = [at(near, 0), at(near, thickness_mm), at(far, thickness_mm), at(far, 0)]
    paper.line(corners, _OUTLINE, closed=True)
    _labels(paper, area, at(0, thickness_mm)[1], scale)
    _height(paper, disc, section, at)
    _edge(paper, section, at)
    _sheet_sizes(paper, disc, section, at)


def _labels(paper: Paper, area: Area, face_mm: float, scale: Scale) -> None:
    """The two sides, the travel and the scale."""
    paper.text((area.left_mm, face_mm + 2.5), "label side", SMALL)
    paper.text((area.left_mm, face_mm - 7.0), "star side", SMALL)
    paper.text((area.left_mm, area.top_mm - 3.0), f"Section, {scale.told}", Face(size_mm=SMALL.size_mm, bold=True))
    paper.text((area.right_mm - 12.0, area.top_mm - 3.0), "travel", _END)
    paper.arrow((area.right_mm - 11.0, area.top_mm - 2.4), (area.right_mm - 1.0, area.top_mm - 2.4), Pen())


def _height(paper: Paper, disc: Disc, section: Section, at: Place) -> None:
    """The height from the star-side face to the tip, with its band, on the side of the opening."""
    side = section.away
    edge = [u for u, z in section.tab_mm if z == section.tip_mm]
    face_u = max(edge, key=lambda u: u * side)
    (x_mm, top_mm), (_, tip_mm) = at(face_u, 0.0), at(face_u, section.tip_mm)
    line_x = x_mm + side * 6.0
    for level_mm in (top_mm, tip_mm):
        paper.line([(x_mm + side * 0.6, level_mm), (line_x + side * 1.2, level_mm)], _THIN)
    paper.line([(line_x, top_mm), (line_x, tip_mm)], _THIN)
    for start, end in ((tip_mm, top_mm), (top_mm, tip_mm)):
        paper.head((line_x, start), (line_x, end), Pen(), 1.8)
    projection = disc.movement.projection
    face = _END if side < 0 else SMALL
    middle_mm = (top_mm + tip_mm) / 2
    height = f"{projection.depth_mm or 0:g} ± {projection.depth_plus_minus_mm:g}"
    paper.text((line_x + side * 1.5, middle_mm - 0.2), height, face)
    paper.text((line_x + side * 1.5, middle_mm - 2.6), "height", face)


def _edge(paper: Paper, section: Section, at: Place) -> None:
    tip = at(0.0, section.tip_mm * 0.85)
    words = (tip[0] + 5.0, at(0.0, section.tip_mm)[1] - 3.2)
    paper.arrow((words[0], words[1] + 1.2), tip, _THIN)
    paper.text((words[0] + 0.6, words[1]), "working edge", SMALL)


def _sheet_sizes(paper: Paper, disc: Disc, section: Section, at: Place) -> None:
    """Thickness and, where the shop folds, fold line, inside radius and the angle to bend to."""
    thickness_mm = disc.movement.disc.thickness_mm
    end = at(section.tab_mm[0][0], thickness_mm / 2)
    face = SMALL if section.away < 0 else _END
    paper.text((end[0] - section.away * 1.2, end[1] - 0.7), f"{thickness_mm:g} thick", face)
    if section.fold_mm is not None:
        top = at(section.fold_mm, thickness_mm)
        paper.line([at(section.fold_mm, -thickness_mm * 0.4), (top[0], top[1] + 3.0)], _CHAIN)
        paper.text((top[0], top[1] + 3.8), "fold line on the flat", _MIDDLE)
    if section.radius_mm is None:
        top = at(section.tab_mm[1][0], thickness_mm)
        paper.text((top[0], top[1] + 1.6), "bend as the tool forms it", _MIDDLE)
    else:
        inner = section.tab_mm[-1 - _ARC_POINTS // 2 - 1]
        words = (at(*inner)[0] - section.away * 5.0, at(*inner)[1] - 3.4)
        paper.arrow((words[0], words[1] + 0.8), at(*inner), _THIN)
        paper.text((words[0] - section.away * 0.6, words[1]), f"R {section.radius_mm:g} inside", face)
    if section.bend_deg is not None:
        below = at(0.0, section.tip_mm)
        paper.text((below[0], below[1] - 6.2), f"bend to {section.bend_deg:g}°", _MIDDLE)


def _slot(paper: Paper, area: Area, disc: Disc) -> None:
    """A slot from above: its length and width, and the end that works."""
    projection = disc.movement.projection
    length_mm, width_mm = projection.length_mm or projection.width_mm, projection.width_mm
    scale = scale_for(max(length_mm, width_mm), _ROOM_MM[1] * 1.3)
    long_mm, wide_mm = scale.paper_mm(length_mm), scale.paper_mm(width_mm)
    left_mm, middle_mm = area.left_mm + area.width_mm / 2 - long_mm / 2, area.top_mm - HEIGHT_MM / 2 + 1.0
    path = paper.new_path()
    path.roundRect(left_mm, middle_mm - wide_mm / 2, long_mm, wide_mm, wide_mm / 2)
    paper.draw(path, Pen(width_mm=WIDE_MM))
    paper.line([(left_mm - 3, middle_mm), (left_mm + long_mm + 3, middle_mm)], _CHAIN)
    below_mm, right_mm = middle_mm - wide_mm / 2 - 4.0, left_mm + long_mm + 6.0
    for end_mm in (left_mm, left_mm + long_mm):
        paper.line([(end_mm, middle_mm - wide_mm * 0.3), (end_mm, below_mm - 1.2)], _THIN)
    for end_mm in (middle_mm - wide_mm / 2, middle_mm + wide_mm / 2):
        paper.line([(left_mm + long_mm - wide_mm * 0.3, end_mm), (right_mm + 1.2, end_mm)], _THIN)
    paper.line([(left_mm, below_mm), (left_mm + long_mm, below_mm)], _THIN)
    paper.line([(right_mm, middle_mm - wide_mm / 2), (right_mm, middle_mm + wide_mm / 2)], _THIN)
    for start, end in (
        ((left_mm + long_mm, below_mm), (left_mm, below_mm)),
        ((left_mm, below_mm), (left_mm + long_mm, below_mm)),
        ((right_mm, middle_mm + wide_mm / 2), (right_mm, middle_mm - wide_mm / 2)),
        ((right_mm, middle_mm - wide_mm / 2), (right_mm, middle_mm + wide_mm / 2)),
    ):
        paper.head(start, end, Pen(width_mm=NARROW_MM), 1.8)
    paper.text((left_mm + long_mm / 2, below_mm - 2.8), f"{length_mm:g}", _MIDDLE)
    paper.text((right_mm + 2.0, middle_mm - 0.7), f"{width_mm:g}", SMALL)
    words = (left_mm - 8.0, middle_mm + wide_mm / 2 + 2.0)
    paper.arrow(words, (left_mm, middle_mm), _THIN)
    paper.text((words[0], words[1] + 0.6), "working edge", _END)
    paper.text((area.left_mm, area.top_mm - 3.0), f"From above, {scale.told}", Face(size_mm=SMALL.size_mm, bold=True))
    paper.text((area.right_mm - 12.0, area.top_mm - 3.0), "travel", _END)
    paper.arrow((area.right_mm - 11.0, area.top_mm - 2.4), (area.right_mm - 1.0, area.top_mm - 2.4), Pen())
