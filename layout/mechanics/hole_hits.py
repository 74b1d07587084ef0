"""Hits that strike the blank's own holes: which tool of the press makes which, and in what order.

The centre hole, and feature holes and slots, are struck where the press has a tool of just their size.
Notches are part of the rim: struck alone they would leave the punch half outside the metal, which
pushes it aside (common practice), so they are made with the rim. A rim is not nibbled: it is blanked,
or the blanks come round.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.documents.cutter import Cutter, Tool
from layout.documents.feature import Feature
from layout.documents.movement import DiscBlank, Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.blank import feature_axes, features_once
from layout.mechanics.hit_order import shortest_order
from layout.mechanics.hits import press_table
from layout.mechanics.projection import SIZE_AGREES_MM
from layout.mechanics.table import forward_angles_rad

CENTRE_HOLE = "the centre hole"
RIM = "rim"
_NO_TOOL = "no tool of that size"
_WITH_THE_RIM = "part of the rim"
_LEFT = "left to blanking"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HoleHits:
    """Hits of one tool on the blank's own holes, in the order struck, seen from the label side.

    Attributes:
        tool: The tool.
        at_mm: Shape (n, 2). The strike points, which are the middles of the holes.
        holes: What each hit makes, such as "the drive hole at 90.000°".
    """

    tool: Tool
    at_mm: FloatArray
    holes: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Hole:
    """One hole to strike: what it is, its middle, shape (2,), and its size along the travel and across it."""

    named: str
    at_mm: FloatArray
    length_mm: float
    width_mm: float


def hole_named(feature: Feature, angle_deg: float) -> str:
    """One feature of a row in words, such as "the drive hole at 90.000°"."""
    return f"the {feature.purpose} {feature.shape} at {angle_deg:.3f}°"


def hole_tool(cutter: Cutter, *, length_mm: float, width_mm: float) -> Tool | None:
    """The press's tool that strikes a hole of just this size, the nearest in size; None where it has none."""

    def off_mm(tool: Tool) -> float:
        return max(abs(tool.footprint_length_mm - length_mm), abs(tool.footprint_width_mm - width_mm))

    fits = [tool for tool in cutter.tools if tool.makes == "hole" and off_mm(tool) <= SIZE_AGREES_MM]
    return min(fits, key=off_mm, default=None)


def hole_hits(movement: Movement, cutter: Cutter, direction: int) -> tuple[HoleHits, ...]:
    """The hits on the blank's own holes, tool by tool; none where no tool is of just their size.

    Each tool is taken up once. The tools come in the order of the holes in the drawing: features from
    the innermost out, then the centre hole. The hits of one tool follow each other so that table and
    slide move little.

    Args:
        movement: The movement whose blank it is.
        cutter: The press; a laser has no tools, and so no hits.
        direction: +1 for a disc that turns clockwise, −1 for one that turns anticlockwise.
    """
    return tuple(_in_order(tool, holes, cutter, direction) for tool, holes in _by_tool(movement, cutter))


def hole_tools(movement: Movement, cutter: Cutter) -> tuple[Tool, ...]:
    """The tools of `hole_hits`, in their order; found without the order of the hits."""
    return tuple(tool for tool, _ in _by_tool(movement, cutter))


def _by_tool(movement: Movement, cutter: Cutter) -> list[tuple[Tool, list[_Hole]]]:
    """The holes that each tool strikes, by tool in the order in which the drawing first needs it."""
    of_tool: dict[str, list[_Hole]] = {}
    tools: dict[str, Tool] = {}
    for hole in _holes(movement.disc):
        tool = hole_tool(cutter, length_mm=hole.length_mm, width_mm=hole.width_mm)
        if tool is not None:
            tools[tool.tool] = tool
            of_tool.setdefault(tool.tool, []).append(hole)
    return [(tools[name], holes) for name, holes in of_tool.items()]


def not_struck(movement: Movement, cutter: Cutter) -> tuple[str, ...]:
    """What of the blank a press strikes with none of its tools, each with the reason in brackets.

    Features row by row, then the centre hole, then the rim, which a press of ours never strikes; none for
    a laser, which cuts it all.
    """
    if cutter.kind == "laser":
        return ()
    left = []
    for feature in sorted(movement.disc.features, key=lambda feature: feature.radius_mm):
        if feature.shape == "notch":
            left.append(f"{_row_told(feature)} ({_WITH_THE_RIM})")
        elif hole_tool(cutter, length_mm=feature.length_mm, width_mm=feature.width_mm) is None:
            left.append(f"{_row_told(feature)} ({_NO_TOOL})")
    centre_mm = movement.disc.centre_hole_mm
    if hole_tool(cutter, length_mm=centre_mm, width_mm=centre_mm) is None:
        left.append(f"centre hole {centre_mm:g} mm ({_NO_TOOL})")
    return (*left, f"{RIM} ({_LEFT})")


def _row_told(feature: Feature) -> str:
    size = f"{feature.width_mm:g}" if feature.shape == "hole" else f"{feature.length_mm:g} x {feature.width_mm:g}"
    shape = feature.shape if feature.count == 1 else "notches" if feature.shape == "notch" else f"{feature.shape}s"
    named = f"{feature.purpose} {shape} {size} mm"
    return named if feature.count == 1 else f"{feature.count} {named}"


def _holes(blank: DiscBlank) -> Iterator[_Hole]:
    rows = sorted(features_once(blank), key=lambda one: one[0].radius_mm)
    for feature, angle_deg in rows:
        if feature.shape != "notch":
            yield _Hole(
                named=hole_named(feature, angle_deg),
                at_mm=feature.radius_mm * feature_axes(float(np.radians(angle_deg)))[0],
                length_mm=feature.length_mm,
                width_mm=feature.width_mm,
            )
    centre_mm = blank.centre_hole_mm
    yield _Hole(named=CENTRE_HOLE, at_mm=np.zeros(2), length_mm=centre_mm, width_mm=centre_mm)


def _in_order(tool: Tool, holes: list[_Hole], cutter: Cutter, direction: int) -> HoleHits:
    at_mm = np.array([hole.at_mm for hole in holes])
    order = _little_moving(at_mm, cutter, direction)
    return HoleHits(tool=tool, at_mm=frozen_floats(at_mm[order]), holes=tuple(holes[place].named for place in order))


def _little_moving(at_mm: FloatArray, cutter: Cutter, direction: int) -> IntArray:
    radius_mm = np.hypot(at_mm[:, 0], at_mm[:, 1])
    table = press_table(cutter, radius_mm, forward_angles_rad(at_mm, direction))
    return shortest_order(table, np.zeros((0, 2), dtype=np.int64))
