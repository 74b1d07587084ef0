"""Bridges: the rim left open in a few places, so that the disc stays in its sheet till it is broken out."""

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.cut.blank import WIDEST_ARC_RAD
from layout.cut.plan import Circles, Entity, Outlines
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.bridging import gap_mm, gaps_in
from layout.mechanics.turning import FULL_TURN_RAD


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Arc:
    """A stretch of the rim's circle, anticlockwise."""

    from_rad: float
    to_rad: float


_Item = _Arc | FloatArray | None  # an arc; the corners of a notch, both mouths among them; a gap


def with_bridges(entity: Entity, cutter: Cutter) -> Iterator[Entity]:
    """The rim as open lines between its bridges, anticlockwise; all else as it is.

    The gaps stand on the arcs between the notches. Each is a kerf longer than its bridge is wide, for the
    beam takes half a kerf more at either end. A rim without room for its bridges stays closed.

    Args:
        entity: Seen from the label side, as it is drawn.
        cutter: Its bridges.
    """
    if entity.layer != "RIM" or cutter.bridges is None or not isinstance(entity, Circles | Outlines):
        yield entity
        return
    rim_mm, arcs, corners_mm = _parts(entity)
    width_rad = 2 * math.asin(min(gap_mm(cutter, cutter.bridges) / (2 * rim_mm), 1.0))
    spans = [(arc.from_rad, arc.to_rad) for arc in arcs]
    gaps = gaps_in(spans, count=cutter.bridges.count, width_rad=width_rad)
    if gaps is None:
        yield entity
        return
    items: list[_Item] = []
    for arc, on_arc, corners in zip(arcs, gaps, corners_mm, strict=True):
        ends = [arc.from_rad, *(end for gap in on_arc for end in (gap.from_rad, gap.to_rad)), arc.to_rad]
        for first, last in zip(ends[::2], ends[1::2], strict=True):
            items += [_Arc(from_rad=first, to_rad=last), None]
        items[-1] = corners
    begin = next(place for place, item in enumerate(items) if item is None)
    yield from _lines(items[begin + 1 :] + items[: begin + 1], rim_mm)


def _parts(rim: Circles | Outlines) -> tuple[float, list[_Arc], list[FloatArray]]:
    """Radius, arcs and the corners after each arc; a whole circle has one arc and no corners."""
    if isinstance(rim, Circles):
        return float(rim.radius_mm[0]), [_Arc(from_rad=0.0, to_rad=FULL_TURN_RAD)], [np.zeros((0, 2))]
    points_mm, round_piece = rim.points_mm[0], rim.bulges != 0
    begins = np.flatnonzero(round_piece & ~np.roll(round_piece, 1))
    arcs, corners_mm = [], []
    for place, begin in enumerate(begins.tolist()):
        next_begin = int(begins[(place + 1) % len(begins)])
        around = np.arange(begin, begin + (next_begin - begin - 1) % len(points_mm) + 2) % len(points_mm)
        corners = points_mm[around[int(round_piece[around[:-1]].sum()) :]]
        arcs.append(_arc_between(points_mm[begin], corners[0]))
        corners_mm.append(corners)
    rim_mm = float(np.hypot(*points_mm[begins[0]])) if len(begins) else math.inf
    return rim_mm, arcs, corners_mm


def _arc_between(start_mm: FloatArray, end_mm: FloatArray) -> _Arc:
    from_rad, to_rad = math.atan2(start_mm[1], start_mm[0]), math.atan2(end_mm[1], end_mm[0])
    return _Arc(from_rad=from_rad, to_rad=from_rad + (to_rad - from_rad) % FULL_TURN_RAD)


def _lines(items: list[_Item], rim_mm: float) -> Iterator[Outlines]:
    """An open line for all that stands before each gap."""
    vertices: list[tuple[float, float]] = []
    bulges: list[float] = []
    end_rad = 0.0
    for item in items:
        if isinstance(item, _Arc):
            pieces = max(math.ceil((item.to_rad - item.from_rad) / WIDEST_ARC_RAD), 1)
            step_rad, end_rad = (item.to_rad - item.from_rad) / pieces, item.to_rad
            vertices += [_on_rim(item.from_rad + step_rad * piece, rim_mm) for piece in range(pieces)]
            bulges += [math.tan(step_rad / 4)] * pieces
        elif item is not None:
            vertices += [(x, y) for x, y in item[:-1].tolist()]  # the last begins the arc that follows
            bulges += [0.0] * len(item[:-1])
        else:
            around_mm = np.array([*vertices, _on_rim(end_rad, rim_mm)])
            yield Outlines(
                layer="RIM",
                points_mm=frozen_floats(around_mm[None]),
                bulges=frozen_floats([*bulges, 0.0]),
                closed=False,
            )
            vertices, bulges = [], []


def _on_rim(angle_rad: float, rim_mm: float) -> tuple[float, float]:
    return rim_mm * math.cos(angle_rad), rim_mm * math.sin(angle_rad)
