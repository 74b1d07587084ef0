"""A piece that is no disc, as it is cut: the rules of a disc, round an outline of its own.

Marks first, while the sheet lies still; then inside before outside: openings, the blank's holes, the outline last.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
import shapely

from layout.cut.blank import WIDEST_ARC_RAD, holes
from layout.cut.kerf import as_the_beam_runs
from layout.cut.leads import with_leads
from layout.cut.mirroring import mirrored, mirrored_points_mm
from layout.cut.path import HOT_WEB_MM
from layout.cut.plan import Drawing, Entity, Outlines, Points
from layout.cut.slugs import with_held_slugs
from layout.cut.touring import short_round_trip
from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.bridging import gap_mm, gaps_in
from layout.mechanics.hits import Hits
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of

_SAME_PLACE_MM = 1e-6  # mm; a nanometre: an arc whose centre lies so near the origin goes round it
_ON_AN_ARC = 8  # places that stand for an arc where openings are held against each other


@dataclass(frozen=True, slots=True, kw_only=True)
class PieceCuts:
    """A piece as it is cut.

    Attributes:
        drawing: In cutting order, the outline last.
        held: Whether it has the bridges that its cutter asks for; True where it asks for none.
    """

    drawing: Drawing
    held: bool


def plan_piece(drawing: Drawing, movement: Movement, cutter: Cutter) -> PieceCuts:
    """The cuts of a piece of a movement's disc, by the rules of the disc.

    A laser's openings follow one another on a short round trip, and two with less than HOT_WEB_MM of metal between
    them never directly, where that can be helped; a press's hits as on a disc, after the holes. Holes
    and outline have the leads and bridges the cutter asks for, slugs of holes too; openings have leads alone, since
    what falls out of them is to be seen falling.

    Args:
        drawing: What is marked, cut and struck, as finished and as drawn: one closed outline on RIM about the origin,
            and no holes.
        movement: With those features of its disc alone that the piece has.
        cutter: The cutter.
    """
    marks = [entity for entity in drawing.entities if entity.layer == "MARKS"]
    openings = [one for entity in drawing.entities if entity.layer in ("SLITS", "SLOTS") for one in _singly(entity)]
    ordered: list[Entity] = [openings[place] for place in _laser_order(openings, cutter).tolist()]
    ordered += [_struck_in_order(entity, movement, cutter) for entity in drawing.entities if isinstance(entity, Points)]
    holed = _holes(movement, cutter)
    beams = [part for entity in ordered for part in with_leads(as_the_beam_runs(entity, cutter), cutter)]
    # As on a disc: a press strikes holes first, so that none is struck beside formed metal (common practice).
    inner = [*holed, *beams] if cutter.kind == "punch-press" else [*beams, *holed]
    outline = [as_the_beam_runs(entity, cutter) for entity in drawing.entities if entity.layer == "RIM"]
    rim = [part for entity in outline if isinstance(entity, Outlines) for part in _with_bridges(entity, cutter)]
    led_in = [part for entity in rim for part in with_leads(entity, cutter)]
    held = cutter.bridges is None or any(not part.closed for part in rim)
    return PieceCuts(drawing=replace(drawing, entities=(*marks, *inner, *led_in)), held=held)


def _holes(movement: Movement, cutter: Cutter) -> list[Entity]:
    """The blank's holes as on a disc, slugs held and led in, as drawn."""
    held = [
        part for hole in holes(movement) for part in with_held_slugs(as_the_beam_runs(hole, cutter), movement, cutter)
    ]
    led_in = [part for entity in held for part in with_leads(entity, cutter)]
    return [mirrored(entity) for entity in led_in] if cutter.drawn_from == "star-side" else led_in


def _singly(entity: Entity) -> Iterator[Outlines]:
    if isinstance(entity, Outlines):
        for points_mm in entity.points_mm:
            yield replace(entity, points_mm=frozen_floats(points_mm[None]))


def _laser_order(openings: list[Outlines], cutter: Cutter) -> IntArray:
    if not openings:
        return np.zeros(0, dtype=np.int64)
    begun_mm = [
        one.points_mm[0, 0] if one.closed else (one.points_mm[0, 0] + one.points_mm[0, -1]) / 2 for one in openings
    ]
    hulls = np.array([shapely.MultiPoint(_places_mm(one)).convex_hull for one in openings], dtype=np.object_)
    # An open slit is the middle of its beam: half a kerf more is gone at either side.
    within_mm = HOT_WEB_MM + (0.0 if all(one.closed for one in openings) else cutter.kerf_mm)
    pairs = shapely.STRtree(hulls).query(hulls, predicate="dwithin", distance=within_mm).T
    pairs = pairs[pairs[:, 0] < pairs[:, 1]]
    hot = pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))].astype(np.int64)
    return short_round_trip(np.array(begun_mm), hot)


def _places_mm(outline: Outlines) -> FloatArray:
    """The vertices of one outline, and places on its arcs."""
    points, bulges = outline.points_mm[0] @ [1, 1j], outline.bulges
    pieces = np.flatnonzero(bulges if outline.closed else bulges[:-1])
    start, end, bulge = points[pieces], np.roll(points, -1)[pieces], bulges[pieces]
    # DXF reference: the centre stands (1 − b²)/(4b) chords to the left of the chord's middle.
    centre = (start + end) / 2 + 1j * (end - start) * (1 - bulge**2) / (4 * bulge)
    steps = np.arange(1, _ON_AN_ARC)[:, None] / _ON_AN_ARC
    on_arcs = (centre + (start - centre) * np.exp(4j * np.arctan(bulge) * steps)).ravel()
    every = np.concatenate([points, on_arcs])
    return np.column_stack([every.real, every.imag])


def _struck_in_order(points: Points, movement: Movement, cutter: Cutter) -> Points:
    """A press's hits in the order of a disc's: each strike point is that of a projection, which stands ahead of it."""
    pattern, turning = pattern_of(movement, cutter), turning_of(movement)
    seen_mm = points.points_mm if cutter.drawn_from == "label-side" else mirrored_points_mm(points.points_mm)
    strike_mm = pattern.strike_u_mm
    edge_mm = np.hypot(np.hypot(seen_mm[:, 0], seen_mm[:, 1]), strike_mm)
    behind_rad = turning.direction * np.arcsin(strike_mm / edge_mm)  # θ = α − s·asin(w/r), layout/mechanics/frame.py
    hits = Hits(
        movement=movement,
        cutter=cutter,
        turning=turning,
        pattern=pattern,
        edge_radius_mm=frozen_floats(edge_mm),
        edge_angle_rad=frozen_floats(np.arctan2(seen_mm[:, 1], seen_mm[:, 0]) + behind_rad),
    )
    return replace(points, points_mm=frozen_floats(points.points_mm[hits.order()]))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Span:
    """A stretch of an outline round the origin, anticlockwise."""

    radius_mm: float
    from_rad: float
    to_rad: float


_Vertex = tuple[float, float, float]  # x, y, and the bulge of the piece that starts there


def _with_bridges(outline: Outlines, cutter: Cutter) -> Iterator[Outlines]:
    """The outline as open lines between its bridges; closed, as it is, where it has no room for them.

    They stand on the arcs round the origin alone: a lead to their ends runs outwards along the radius, and
    beside a straight side it would cut along that side. They are shared out among the arcs by their lengths.
    """
    if cutter.bridges is None:
        yield outline
        return
    items = list(_items(outline))
    spans = [item for item in items if isinstance(item, _Span)]
    wide_mm = gap_mm(cutter, cutter.bridges)
    # Along the arc, so that its chord is as wide as asked for on the smallest.
    arcs_mm = [2 * span.radius_mm * math.asin(min(wide_mm / (2 * span.radius_mm), 1.0)) for span in spans]
    gaps = gaps_in(
        [(span.from_rad * span.radius_mm, span.to_rad * span.radius_mm) for span in spans],
        count=cutter.bridges.count,
        width_rad=max(arcs_mm, default=0.0),
    )
    if gaps is None:
        yield outline
        return
    on_span = iter(gaps)
    lines: list[list[_Vertex]] = [[]]
    for item in items:
        if not isinstance(item, _Span):
            lines[-1].append(item)
            continue
        begun_rad = item.from_rad
        for gap in next(on_span):
            end_rad = gap.from_rad / item.radius_mm
            lines[-1] += [*_arc(item.radius_mm, begun_rad, end_rad), _on_arc(item.radius_mm, end_rad, 0.0)]
            lines.append([])
            begun_rad = gap.to_rad / item.radius_mm
        lines[-1] += _arc(item.radius_mm, begun_rad, item.to_rad)
    for line in (*lines[1:-1], lines[-1] + lines[0]):
        vertices = np.array(line)
        yield replace(
            outline,
            points_mm=frozen_floats(vertices[None, :, :2]),
            bulges=frozen_floats(vertices[:, 2]),
            closed=False,
        )


def _items(outline: Outlines) -> Iterator[_Span | _Vertex]:
    """Arcs round the origin as spans, each whole; every other piece as the vertex it starts at."""
    points, bulges = outline.points_mm[0], outline.bulges.tolist()
    radius_mm, angle_rad = np.hypot(*points.T), np.arctan2(points[:, 1], points[:, 0])
    open_span: _Span | None = None
    for place, bulge in enumerate(bulges):
        turn_rad = 4 * math.atan(bulge)
        end = (place + 1) % len(bulges)
        # A chord of this turn about the origin has both ends on the circle, so many times its radius apart.
        chord_mm = 2 * radius_mm[place] * math.sin(turn_rad / 2)
        on_circle = abs(radius_mm[end] - radius_mm[place]) < _SAME_PLACE_MM
        round_origin = on_circle and abs(math.dist(points[place], points[end]) - chord_mm) < _SAME_PLACE_MM
        if bulge > 0 and round_origin:
            begun_rad = float(angle_rad[place])
            here = open_span or _Span(radius_mm=float(radius_mm[place]), from_rad=begun_rad, to_rad=begun_rad)
            open_span = replace(here, to_rad=here.to_rad + turn_rad)
            continue
        if open_span is not None:
            yield open_span
            open_span = None
        yield float(points[place, 0]), float(points[place, 1]), bulge
    if open_span is not None:
        yield open_span


def _arc(radius_mm: float, from_rad: float, to_rad: float) -> list[_Vertex]:
    """Where each piece of an arc starts; its end is left to what follows."""
    pieces = max(math.ceil((to_rad - from_rad) / WIDEST_ARC_RAD - _SAME_PLACE_MM), 1)
    step_rad = (to_rad - from_rad) / pieces
    return [_on_arc(radius_mm, from_rad + place * step_rad, math.tan(step_rad / 4)) for place in range(pieces)]


def _on_arc(radius_mm: float, angle_rad: float, bulge: float) -> _Vertex:
    return radius_mm * math.cos(angle_rad), radius_mm * math.sin(angle_rad), bulge
