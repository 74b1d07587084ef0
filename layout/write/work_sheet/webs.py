"""Which webs to measure: the thinnest between two openings of the disc."""

from dataclasses import dataclass

import numpy as np
import shapely

from layout.mechanics.spacing import core_geometries
from layout.place.disc import Disc

_FIRST_REACH_MM = 1.0  # how far pairs are looked for at first
_WIDER = 4.0  # and how much farther where there are too few


@dataclass(frozen=True, slots=True, kw_only=True)
class Web:
    """The metal between two openings.

    Attributes:
        tracks: Their tracks, from 1, the inner first.
        web_mm: How thick it is; not above 0 where the openings run into each other.
        radius_mm: Of its middle, from the centre of the disc.
        angle_deg: Of its middle, as drawn, anticlockwise from the index mark.
    """

    tracks: tuple[int, int]
    web_mm: float
    radius_mm: float
    angle_deg: float


def thinnest_webs(disc: Disc, most: int) -> tuple[Web, ...]:
    """The thinnest webs between openings after forming, thinnest first; none on a disc of under two projections.

    Args:
        disc: The disc.
        most: How many at most.
    """
    cores = core_geometries(disc.placed_mm(disc.pattern.core_points_mm))
    tree = shapely.STRtree(cores)
    wanted = min(most, disc.projection_count * (disc.projection_count - 1) // 2)
    reach_mm = _FIRST_REACH_MM + 2 * disc.pattern.core_round_mm
    one = two = np.empty(0, dtype=np.int64)
    while len(one) < wanted:
        one, two = tree.query(cores, predicate="dwithin", distance=reach_mm)
        one, two = one[one < two], two[one < two]
        reach_mm *= _WIDER
    apart_mm = shapely.distance(cores[one], cores[two]) - 2 * disc.pattern.core_round_mm
    order = np.lexsort((two, one, np.round(apart_mm, 6)))[:wanted]  # as they are told: rounding must not swap them
    return tuple(_web(disc, int(one[pair]), int(two[pair]), float(apart_mm[pair])) for pair in order)


def _web(disc: Disc, one: int, two: int, web_mm: float) -> Web:
    pair = np.array([one, two])
    points = disc.placed_mm(disc.pattern.core_points_mm)[pair]
    first, second = core_geometries(points)
    across = shapely.shortest_line(first, second)
    middle = shapely.get_coordinates(across).mean(axis=0)
    side = 1 if disc.cutter.drawn_from == "label-side" else -1
    return Web(
        tracks=(int(disc.track_index[pair].min()) + 1, int(disc.track_index[pair].max()) + 1),
        web_mm=web_mm,
        radius_mm=float(np.hypot(*middle)),
        angle_deg=float(np.degrees(np.arctan2(side * middle[1], middle[0])) % 360),
    )
