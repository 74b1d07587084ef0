"""Bridges that hold slugs: holes and slots left open in a few places, so that none tips up into the head's way."""

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from layout.cut.blank import turned_mm
from layout.cut.plan import Circles, Entity, LayerName, Outlines
from layout.documents.cutter import SAME_PLACE_MM, Cutter
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.lead import clear_of_lines_mm, pierced_inside_mm
from layout.mechanics.slugs import (
    OutlineGap,
    Where,
    begun_after,
    circle_with_gaps,
    gaps_on_outline,
    place_on,
    slug_is_held,
    where_on_feature,
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Held:
    """How the openings of one make are held: gaps, and for each the lead into the line after it.

    Leads are given as where they begin, seen from where they end, over the outline's first side: so they turn with it.
    """

    gaps: tuple[OutlineGap, ...]
    leads: tuple[complex | None, ...]


def with_held_slugs(entity: Entity, movement: Movement, cutter: Cutter) -> Iterator[Entity]:
    """Holes and slots whose slug is held as open lines between the bridges, each opening by itself; else as it is.

    The lines of an opening follow one another round it, each with its lead before it where the cutter wants leads and
    the slug has room for one. Where bridges have no room, and where nothing is to be held, an opening stays closed.

    Args:
        entity: Seen from the label side, as it is drawn.
        movement: What each hole is for.
        cutter: What is held, and by which bridges.
    """
    if cutter.bridges is None or cutter.bridges.slugs is None:
        yield entity
    elif isinstance(entity, Circles) and entity.layer == "HOLES":
        for centre_mm, radius_mm in zip(entity.centres_mm, entity.radius_mm.tolist(), strict=True):
            one = replace(entity, centres_mm=frozen_floats(centre_mm[None]), radius_mm=frozen_floats([radius_mm]))
            yield from _with_held_circle(one, movement, cutter)
    elif isinstance(entity, Outlines) and entity.closed and entity.layer in ("HOLES", "SLOTS"):
        yield from _with_held_outlines(entity, movement, cutter)
    else:
        yield entity


def loose_slug_count(entities: Iterable[Entity]) -> int:
    """How many holes and slots are closed outlines, so that what they leave is held by nothing."""
    inner = [entity for entity in entities if entity.layer in ("HOLES", "SLOTS")]
    circles = sum(len(entity.radius_mm) for entity in inner if isinstance(entity, Circles))
    return circles + sum(len(entity.points_mm) for entity in inner if isinstance(entity, Outlines) and entity.closed)


def _with_held_circle(circle: Circles, movement: Movement, cutter: Cutter) -> Iterator[Entity]:
    centre_mm, radius_mm = circle.centres_mm[0], float(circle.radius_mm[0])
    feature = _feature_at(centre_mm, movement)
    finished_mm = movement.disc.centre_hole_mm if feature is None else feature.width_mm
    where: Where = "anywhere" if feature is None else where_on_feature(feature)
    found = None
    if slug_is_held(cutter, finished_mm, finished_mm):
        found = circle_with_gaps(radius_mm, where, cutter)
    if found is None:
        yield circle
        return
    points_mm, bulges, gaps = found
    placed_mm = turned_mm(points_mm, np.array([math.atan2(centre_mm[1], centre_mm[0])])) + centre_mm
    outline = Outlines(layer="HOLES", points_mm=frozen_floats(placed_mm), bulges=bulges, closed=True)
    yield from _open_lines(outline, _held(outline, gaps, cutter))


def _with_held_outlines(outlines: Outlines, movement: Movement, cutter: Cutter) -> Iterator[Entity]:
    """Outlines of one make are held alike, but for a slot that two rows of features share and use differently."""
    projection = movement.projection
    known: dict[tuple[float, float, Where], _Held | None] = {}
    for points_mm in outlines.points_mm:
        one = replace(outlines, points_mm=frozen_floats(points_mm[None]))
        if outlines.layer == "SLOTS":
            key: tuple[float, float, Where] = (projection.length_mm or 0.0, projection.width_mm, "slot")
        else:
            feature = _feature_at(points_mm.mean(axis=0), movement)
            key = (0.0, 0.0, "ends") if feature is None else _key(feature)
        if key not in known:
            gaps = None
            if slug_is_held(cutter, *key[:2]):
                gaps = gaps_on_outline(points_mm, outlines.bulges, key[2], cutter)
            known[key] = None if gaps is None else _held(one, gaps, cutter)
        held = known[key]
        yield from [one] if held is None else _open_lines(one, held)


def _key(feature: Feature) -> tuple[float, float, Where]:
    return feature.length_mm, feature.width_mm, where_on_feature(feature)


def _feature_at(centre_mm: FloatArray, movement: Movement) -> Feature | None:
    """What a hole or slot of the blank is for, the strictest use first; None for the centre hole."""
    found = []
    for feature in movement.disc.features:
        angle_rad = np.radians(feature.angles_deg)
        away_mm = np.hypot(
            feature.radius_mm * np.cos(angle_rad) - centre_mm[0], feature.radius_mm * np.sin(angle_rad) - centre_mm[1]
        )
        if feature.shape != "notch" and away_mm.min() <= SAME_PLACE_MM:
            found.append(feature)
    return min(found, key=lambda feature: feature.purpose != "location", default=None)


def _held(outline: Outlines, gaps: tuple[OutlineGap, ...], cutter: Cutter) -> _Held:
    points_mm, side = outline.points_mm[0], _first_side(outline)
    leads: list[complex | None] = []
    for gap in gaps:
        pierced_mm = None
        if cutter.lead_in is not None:
            begun_mm, bulges = begun_after(gap, points_mm, outline.bulges)
            pierced_mm = pierced_inside_mm(
                begun_mm,
                bulges,
                length_mm=cutter.lead_in.length_mm,
                clear_mm=clear_of_lines_mm(cutter),
                forwards_only=True,
            )
        leads.append(None if pierced_mm is None else complex(*(pierced_mm - begun_mm[0])) / side)
    return _Held(gaps=gaps, leads=tuple(leads))


def _first_side(outline: Outlines) -> complex:
    return complex(*(outline.points_mm[0, 1] - outline.points_mm[0, 0]))


def _open_lines(outline: Outlines, held: _Held) -> Iterator[Outlines]:
    """From the end of each gap to the beginning of the next, round one closed outline, each after its lead."""
    points_mm, gaps = outline.points_mm[0], held.gaps
    for gap, following, lead in zip(gaps, (*gaps[1:], gaps[0]), held.leads, strict=True):
        first = place_on(points_mm, outline.bulges, gap.piece, gap.to_ratio)
        last = place_on(points_mm, outline.bulges, following.piece, following.from_ratio)
        count = (following.piece - gap.piece) % len(points_mm)
        if count == 0 and following.from_ratio < gap.to_ratio:  # all the way round to the same piece
            count = len(points_mm)
        around = [(gap.piece + step) % len(points_mm) for step in range(count + 1)]
        shares = [(0.0, 1.0)] * (count + 1)
        shares[0] = (gap.to_ratio, shares[0][1])
        shares[-1] = (shares[-1][0], following.from_ratio)
        bulges = [
            math.tan(math.atan(outline.bulges[piece]) * (to_ratio - from_ratio))
            for piece, (from_ratio, to_ratio) in zip(around, shares, strict=True)
        ]
        if lead is not None:
            yield _line("LEADS", [first + lead * _first_side(outline), first], [0.0, 0.0])
        corners = [complex(*points_mm[piece]) for piece in around[1:]]
        yield _line(outline.layer, [first, *corners, last], [*bulges, 0.0])


def _line(layer: LayerName, places: list[complex], bulges: list[float]) -> Outlines:
    points_mm = frozen_floats(np.array([[(place.real, place.imag) for place in places]]))
    return Outlines(layer=layer, points_mm=points_mm, bulges=frozen_floats(bulges), closed=False)
