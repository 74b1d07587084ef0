"""How a cutter makes one projection of a movement: its flat pattern.

The flat frame of a projection has its origin on the track where the working edge lies:
u along the tangent, positive in the direction of travel; v along the radius, outwards.
Every projection of a disc has the same pattern, in a frame of its own.

    v ▲      ┌────────────────────────────┐╌╌╌relief
      │      │  ┌─────────────────────────┴──
      │      │  │ tab, folded down           ← tangent line   travel ──▶ u
      │      │  └─────────────────────────┬──
      │      └────────────────────────────┘╌╌╌
      └─────   free end        fold line ┆ 0 = working edge

A relief runs on straight past the tangent line, then ends square, or in a half circle as wide as it is.
"""

import math
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from layout.documents.cutter import Cutter, Fold, Tool
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.bending import bend_allowance_mm

HALF_CIRCLE_BULGE = 1.0  # DXF reference: bulge = tan(included angle / 4), 1 is a semicircle
# Straight pieces outside a half circle: its core then reaches 1/cos(90°/8) − 1, 2 % of its radius, too far at most,
# so that webs are told too thin rather than too thick, by 0.004 mm at a relief of 0.42 mm.
HALF_CIRCLE_PIECES = 8
SIZE_AGREES_MM = 0.02  # mm; common practice: press tools are ground to about a hundredth


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shape:
    """An outline or open line in a flat frame.

    Attributes:
        points_mm: Shape (n, 2). u, v of the vertices; anticlockwise where closed.
        bulges: Shape (n,). DXF bulge of the piece that starts at each vertex; 0 is straight.
        closed: Whether the last vertex joins the first.
    """

    points_mm: FloatArray
    bulges: FloatArray
    closed: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pattern:
    """The flat pattern of one projection, as this cutter makes it.

    Attributes:
        making: "fold", "lance" or "slot".
        opening: The whole hole that remains after forming; closed.
        core_points_mm: Shape (n, 2). The opening is this polygon (or, with two points, this line)
            grown by core_round_mm on all sides: so distances are exact, round ends included; only round
            reliefs are held a little larger than they are, see HALF_CIRCLE_PIECES.
        core_round_mm: Radius of the growing; 0 for straight-sided openings.
        cut: What is cut, in SLITS (fold) or SLOTS (slot); None where a press hits.
        fold_line_mm: The line to fold on, (2, 2); None where nothing is folded.
        blank_length_mm: Length of the flat tab from its tangent line; 0 where nothing is folded.
        body_behind_mm: How far standing metal reaches behind the working edge, along the travel.
        strike_u_mm: Where the tool strikes on the u axis; 0 on a laser. There the frame is square to the radius.
        tool: The press tool's name, "" on a laser or where no tool fits.
    """

    making: Literal["fold", "lance", "slot"]
    opening: Shape
    core_points_mm: FloatArray
    core_round_mm: float
    cut: Shape | None
    fold_line_mm: FloatArray | None
    blank_length_mm: float
    body_behind_mm: float
    strike_u_mm: float
    tool: str


def fitting_tool(movement: Movement, cutter: Cutter) -> Tool | None:
    """The press's tool that makes this movement's projections, or None."""
    projection = movement.projection
    for tool in cutter.tools:
        wanted: list[tuple[float | None, float | None]]
        if projection.kind == "slot" and tool.makes == "slot":
            wanted = [(tool.footprint_length_mm, projection.length_mm), (tool.footprint_width_mm, projection.width_mm)]
        elif projection.kind == "standing" and tool.makes == "lance":
            wanted = [(tool.tab_width_mm, projection.width_mm), (tool.tab_depth_mm, projection.depth_mm)]
        else:
            continue
        if all(abs((has or 0.0) - (needs or 0.0)) <= SIZE_AGREES_MM for has, needs in wanted):
            return tool
    return None


def pattern_of(movement: Movement, cutter: Cutter) -> Pattern:
    """The flat pattern this cutter gives this movement's projections.

    A cutter that cannot make them (no fold stated, no tool that fits) still gets a pattern, of
    the tab's own size, so that the disc can be shown; a check then says that it cannot be made.
    """
    if cutter.kind == "punch-press":
        return _struck(movement, fitting_tool(movement, cutter))
    if movement.projection.kind == "slot":
        return _slot(movement.projection.length_mm or 0.0, movement.projection.width_mm)
    if cutter.fold is None:
        return _struck(movement, None)
    return _folded(movement, cutter, cutter.fold)


def _straight(points: list[tuple[float, float]], *, closed: bool) -> Shape:
    return Shape(points_mm=frozen_floats(np.array(points)), bulges=frozen_floats([0.0] * len(points)), closed=closed)


def _folded(movement: Movement, cutter: Cutter, fold: Fold) -> Pattern:
    thickness_mm, radius_mm = movement.disc.thickness_mm, fold.inside_radius_mm
    allowance_mm = bend_allowance_mm(radius_mm, thickness_mm)
    blank_mm = allowance_mm + (movement.projection.depth_mm or 0.0) - radius_mm
    behind = fold.fold_side == "behind"
    tangent_mm = radius_mm if behind else -(radius_mm + thickness_mm)
    away = -1.0 if behind else 1.0  # which way the blank lies from its tangent line, along u
    half_mm = movement.projection.width_mm / 2
    opening = _fold_opening(tangent_mm, away, half_mm, blank_mm, cutter=cutter)
    fold_u_mm = tangent_mm + away * allowance_mm / 2
    return Pattern(
        making="fold",
        opening=opening,
        core_points_mm=_held_by(opening),
        core_round_mm=0.0,
        cut=_fold_cut(tangent_mm, away, half_mm, blank_mm, cutter=cutter),
        fold_line_mm=frozen_floats(np.array([(fold_u_mm, -half_mm), (fold_u_mm, half_mm)])),
        blank_length_mm=blank_mm,
        body_behind_mm=thickness_mm if behind else thickness_mm + radius_mm,
        strike_u_mm=0.0,
        tool="",
    )


def _fold_opening(tangent_mm: float, away: float, half_mm: float, blank_mm: float, *, cutter: Cutter) -> Shape:
    slit_mm, relief_mm, relief_width_mm = _slit(cutter)
    outer_mm, relief_outer_mm, far_mm = half_mm + slit_mm, half_mm + relief_width_mm, blank_mm + slit_mm
    side = [(far_mm, outer_mm)]
    if relief_mm > 0:
        if relief_width_mm != slit_mm:
            side += [(0.0, outer_mm), (0.0, relief_outer_mm)]
        side += [(-relief_mm, relief_outer_mm), (-relief_mm, half_mm), (0.0, half_mm)]
    else:
        side += [(0.0, outer_mm)]
        if _ends_round(cutter):
            side += [(0.0, half_mm)]
    return _mirrored_outline(side, tangent_mm, away, round_at_mm=-relief_mm if _ends_round(cutter) else None)


def _fold_cut(tangent_mm: float, away: float, half_mm: float, blank_mm: float, *, cutter: Cutter) -> Shape:
    slit_mm, relief_mm, relief_width_mm = _slit(cutter)
    if cutter.fold is not None and cutter.fold.slit == "centre-line":
        # The beam is as wide as the kerf: its line ends half a kerf early, so that the metal is gone up to the
        # relief's end and no further; but for a round end, which is the beam's own.
        end_mm, line_mm = -relief_mm if _ends_round(cutter) else slit_mm / 2 - relief_mm, half_mm + slit_mm / 2
        far_mm = blank_mm + slit_mm / 2
        points = [(end_mm, line_mm), (far_mm, line_mm), (far_mm, -line_mm), (end_mm, -line_mm)]
        return _straight([(tangent_mm + away * q, v) for q, v in points], closed=False)
    outer_mm, relief_outer_mm = half_mm + slit_mm, half_mm + relief_width_mm
    # Starts, and is pierced, at the far corner: the corner farthest from the working edge.
    side = [(blank_mm + slit_mm, outer_mm)]
    if relief_width_mm != slit_mm and relief_mm > 0:
        side += [(0.0, outer_mm), (0.0, relief_outer_mm)]
    side += [(-relief_mm, relief_outer_mm if relief_mm > 0 else outer_mm), (-relief_mm, half_mm), (blank_mm, half_mm)]
    return _mirrored_outline(side, tangent_mm, away, round_at_mm=-relief_mm if _ends_round(cutter) else None)


def _slit(cutter: Cutter) -> tuple[float, float, float]:
    """Slit width, relief length and relief width of a cutter that folds."""
    if cutter.fold is None:
        return cutter.kerf_mm, 0.0, cutter.kerf_mm
    slit_mm = cutter.fold.slit_width_mm or cutter.kerf_mm
    return slit_mm, cutter.fold.relief_mm, cutter.fold.relief_width_mm or slit_mm


def _ends_round(cutter: Cutter) -> bool:
    return cutter.fold is not None and cutter.fold.relief_ends == "round"


def _mirrored_outline(
    side: list[tuple[float, float]], tangent_mm: float, away: float, *, round_at_mm: float | None
) -> Shape:
    """A closed outline from its half at v > 0, given as (distance from the tangent line, v).

    Where it is round, the pieces across a relief at that distance are half circles that bulge outwards.
    """
    whole = _anticlockwise([(away * q, v) for q, v in side + [(q, -v) for q, v in reversed(side)]])
    arcs_at_mm = None if round_at_mm is None else away * round_at_mm
    bulges = [
        HALF_CIRCLE_BULGE if q == next_q == arcs_at_mm and v * next_v > 0 else 0.0
        for (q, v), (next_q, next_v) in zip(whole, whole[1:] + whole[:1], strict=True)
    ]
    points_mm = np.array([(tangent_mm + q, v) for q, v in whole])
    return Shape(points_mm=frozen_floats(points_mm), bulges=frozen_floats(bulges), closed=True)


def _held_by(outline: Shape) -> FloatArray:
    """Shape (n, 2). The corners of a polygon that holds an outline: each half circle in pieces that touch it."""
    corners: list[FloatArray] = []
    for start, end, bulge in zip(
        outline.points_mm, np.roll(outline.points_mm, -1, axis=0), outline.bulges, strict=True
    ):
        corners.append(start[None])
        if bulge:
            middle, out = (start + end) / 2, (start - end) / 2
            turn_rad = math.pi * (np.arange(HALF_CIRCLE_PIECES) + 0.5) / HALF_CIRCLE_PIECES
            across = np.array([-out[1], out[0]])
            touching = np.outer(np.cos(turn_rad), out) + np.outer(np.sin(turn_rad), across)
            corners.append(middle + touching / math.cos(math.pi / (2 * HALF_CIRCLE_PIECES)))
    return frozen_floats(np.concatenate(corners))


def _anticlockwise(points: list[tuple[float, float]]) -> list[tuple[float, float]]:
    pairs = zip(points, points[1:] + points[:1], strict=True)
    twice_area = sum(a[0] * b[1] - b[0] * a[1] for a, b in pairs)
    return points if twice_area > 0 else [points[0], *reversed(points[1:])]


def _slot(length_mm: float, width_mm: float) -> Pattern:
    half_mm, far_mm = width_mm / 2, length_mm - width_mm / 2
    # Starts at the leading end; the trailing end, at u = 0, is the working edge.
    points = [(far_mm, -half_mm), (far_mm, half_mm), (half_mm, half_mm), (half_mm, -half_mm)]
    bulges = [HALF_CIRCLE_BULGE, 0.0, HALF_CIRCLE_BULGE, 0.0]
    if length_mm == width_mm:
        points, bulges = points[:2], [HALF_CIRCLE_BULGE] * 2
    outline = Shape(points_mm=frozen_floats(np.array(points)), bulges=frozen_floats(bulges), closed=True)
    return Pattern(
        making="slot",
        opening=outline,
        core_points_mm=frozen_floats(np.array([(half_mm, 0.0), (far_mm, 0.0)])),
        core_round_mm=half_mm,
        cut=outline,
        fold_line_mm=None,
        blank_length_mm=0.0,
        body_behind_mm=0.0,
        strike_u_mm=0.0,
        tool="",
    )


def _struck(movement: Movement, tool: Tool | None) -> Pattern:
    projection, thickness_mm = movement.projection, movement.disc.thickness_mm
    if projection.kind == "slot":
        slot = _slot(projection.length_mm or 0.0, projection.width_mm)
        strike_mm = 0.0 if tool is None else -tool.edge_ahead_mm
        return replace(slot, cut=None, strike_u_mm=strike_mm, tool="" if tool is None else tool.tool)
    depth_mm = projection.depth_mm or 0.0
    if tool is None:
        behind_mm, ahead_mm, half_mm, strike_mm = depth_mm, thickness_mm, projection.width_mm / 2, 0.0
    else:
        strike_mm, half_mm = -tool.edge_ahead_mm, tool.footprint_width_mm / 2
        ahead_mm = strike_mm + tool.footprint_length_mm / 2
        behind_mm = tool.footprint_length_mm / 2 - strike_mm
    corners = [(-behind_mm, half_mm), (-behind_mm, -half_mm), (ahead_mm, -half_mm), (ahead_mm, half_mm)]
    opening = _straight(corners, closed=True)
    return Pattern(
        making="lance",
        opening=opening,
        core_points_mm=opening.points_mm,
        core_round_mm=0.0,
        cut=None,
        fold_line_mm=None,
        blank_length_mm=0.0,
        body_behind_mm=thickness_mm,
        strike_u_mm=strike_mm,
        tool="" if tool is None else tool.tool,
    )
