"""Checks of a press: its force, hits that fall partly into an opening, feet that stand on formed metal."""

import math
from graphlib import CycleError, TopologicalSorter

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import MOST_FINDINGS, Condition, judged
from layout.documents.cutter import Tool
from layout.documents.reading import FULL_TURN_DEG
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.blank import feature_core_mm, features_once
from layout.mechanics.hits import GRAIN_MM2, Hits
from layout.mechanics.hole_hits import CENTRE_HOLE, hole_hits, hole_named, hole_tools
from layout.mechanics.punching import cutting_force_n, press_force_n, sheared_length_mm
from layout.place.disc import Disc

NOT_STRUCK = -1  # the turn of a hole that the press does not strike: there before all others
_QUARTER_STEPS = 64  # straight pieces to a quarter of a round end: off by 0.0002 of its radius at most


def press_is_strong_enough(disc: Disc) -> list[Finding]:
    """An error for every tool whose hit takes more force than the press has.

    Not judged where the press's capacity_n or the sheet's shear_strength_n_per_mm2 is not stated, nor
    where no tool fits.
    """
    if disc.cutter.kind == "laser":
        return []
    tools = list(hole_tools(disc.movement, disc.cutter))
    if disc.hits.tool is not None:
        tools.append(disc.hits.tool)
    return [finding for tool in tools for finding in _strong_enough(disc, tool)]


def _strong_enough(disc: Disc, tool: Tool) -> list[Finding]:
    press, blank = disc.hits.press, disc.movement.disc
    capacity_n, shear_n_per_mm2 = press.capacity_n, blank.shear_strength_n_per_mm2
    if capacity_n is None or shear_n_per_mm2 is None:
        return []
    length_mm = sheared_length_mm(tool)
    cutting_n = cutting_force_n(length_mm, blank.thickness_mm, shear_n_per_mm2)
    force_n = press_force_n(cutting_n, press.stripping_share)
    worth = disc.movement.plus_minus
    unsure = worth("/disc/thickness_mm") / blank.thickness_mm
    unsure += worth("/disc/shear_strength_n_per_mm2") / shear_n_per_mm2
    condition = Condition(
        code=Code.PRESS_TOO_WEAK,
        says=(
            f"A hit of {tool.tool} shears {length_mm:.2f} mm of {blank.thickness_mm:g} mm {blank.material} at "
            f"{shear_n_per_mm2:g} N/mm² and takes {force_n:.0f} N with stripping; "
            f"{disc.cutter.id} has {capacity_n:.0f} N"
        ),
        so="the press would stall or be overloaded",
        measured=force_n,
        limit=capacity_n,
        unit="N",
        margin=capacity_n - force_n,
        rests_on=(),
        also_unsure=force_n * unsure,
        at=Place(),
        remedy="Use a stronger press, a smaller tool or thinner sheet; a dull edge takes 15 to 30 % more.",
    )
    return judged(condition, disc.movement)


def hits_fall_on_whole_metal(disc: Disc) -> list[Finding]:
    """An error for every hit that falls partly into an opening struck before it, or into a hole of the blank.

    Hits of projections and of holes alike; of two holes that cut into each other, the one struck later is
    told, where the press strikes either.

    The metal then pushes the punch to one side, and its edge runs into the die (common practice). A hit
    that falls wholly into an opening meets no metal and is no matter of this check.
    """
    if disc.cutter.kind == "laser":
        return []
    over = _over_each_other(disc) + _over_the_blank(disc) + _holes_over_holes(disc)
    return over[:MOST_FINDINGS]


def _footprints(disc: Disc, hits: IntArray) -> NDArray[np.object_]:
    round_mm = disc.pattern.core_round_mm
    return np.array([_grown(core, round_mm) for core in disc.openings.cores[hits]], dtype=np.object_)


def _over_each_other(disc: Disc) -> list[Finding]:
    one, two, _ = disc.openings.webs_within(0.0)
    if not len(one):
        return []  # the usual case, which needs no order
    place = np.argsort(disc.hits.order())
    earlier, later = np.where(place[one] < place[two], one, two), np.where(place[one] < place[two], two, one)
    share = _shares(_footprints(disc, later), _footprints(disc, earlier))
    return [
        _over(disc, int(later[pair]), float(share[pair]), _opening_of(disc, earlier[pair]), (int(earlier[pair]),))
        for pair in _by_place(later, earlier, share)
    ]


def _over_the_blank(disc: Disc) -> list[Finding]:
    named = _blank_shapes(disc)
    shapes = np.array([shape for _, shape in named], dtype=np.object_)
    hole, hit, _ = disc.openings.distances_to(shapes, disc.pattern.core_round_mm)
    share = _shares(_footprints(disc, hit), shapes[hole])
    return [
        _over(disc, int(hit[pair]), float(share[pair]), named[hole[pair]][0], ())
        for pair in _by_place(hit, hole, share)
    ]


def _blank_shapes(disc: Disc) -> list[tuple[str, BaseGeometry]]:
    """The blank's holes and notches by name, the centre hole first."""
    blank = disc.movement.disc
    named: list[tuple[str, BaseGeometry]] = [(CENTRE_HOLE, _grown(shapely.Point(0, 0), blank.centre_hole_mm / 2))]
    for feature, angle_deg in features_once(blank):
        core, round_mm = feature_core_mm(feature, math.radians(angle_deg))
        named.append((hole_named(feature, angle_deg), _grown(core, round_mm)))
    return named


def _holes_over_holes(disc: Disc) -> list[Finding]:
    """Holes struck partly into another; what this press does not strike is there before."""
    named = _blank_shapes(disc)
    shapes = np.array([shape for _, shape in named], dtype=np.object_)
    earlier, later = shapely.STRtree(shapes).query(shapes, predicate="intersects")
    if (earlier == later).all():
        return []  # the usual case, which needs no order
    hits = hole_hits(disc.movement, disc.cutter, disc.turning.direction)
    turn = {name: place for place, name in enumerate(name for of_tool in hits for name in of_tool.holes)}
    turns = np.array([turn.get(name, NOT_STRUCK) for name, _ in named])
    after = turns[later] > turns[earlier]
    earlier, later = earlier[after], later[after]
    share = _shares(shapes[later], shapes[earlier])
    return [
        _hole_over(named[later[pair]], named[earlier[pair]][0], float(share[pair]))
        for pair in _by_place(turns[later], turns[earlier], share)
    ]


def _hole_over(hole: tuple[str, BaseGeometry], what: str, share: float) -> Finding:
    middle = hole[1].centroid
    return Finding(
        code=Code.HIT_OVER_OPENING,
        level=Level.ERROR,
        message=(
            f"The hit of {hole[0]} falls with {100 * share:.1f} % of its footprint into {what}: "
            "the metal pushes the punch aside and its edge runs into the die."
        ),
        measured=100 * share,
        limit=0.0,
        unit="%",
        at=Place(
            radius_mm=math.hypot(middle.x, middle.y),
            angle_deg=math.degrees(math.atan2(middle.y, middle.x)) % FULL_TURN_DEG,
        ),
        remedy="Correct the holes in the movement document; or have one of the two cut apart.",
    )


def _grown(core: BaseGeometry, round_mm: float) -> BaseGeometry:
    return core if round_mm == 0 else core.buffer(round_mm, quad_segs=_QUARTER_STEPS)


def _shares(of: NDArray[np.object_], under: NDArray[np.object_]) -> FloatArray:
    """Shape (n,). Which share of each shape lies over the other; 0 where that is mere rounding, or all of it."""
    common_mm2, whole_mm2 = shapely.area(shapely.intersection(of, under)), shapely.area(of)
    partly = (common_mm2 > GRAIN_MM2) & (common_mm2 < whole_mm2 - GRAIN_MM2)
    return np.where(partly, common_mm2 / whole_mm2, 0.0)


def _by_place(one: IntArray, two: IntArray, share: FloatArray) -> list[int]:
    order = np.lexsort((two, one))
    return [int(pair) for pair in order[share[order] > 0]]


def _opening_of(disc: Disc, projection: int) -> str:
    return f"the opening struck before it on track {int(disc.track_index[projection]) + 1}"


def _over(disc: Disc, hit: int, share: float, what: str, beside: tuple[int, ...]) -> Finding:
    track = int(disc.track_index[hit]) + 1
    return Finding(
        code=Code.HIT_OVER_OPENING,
        level=Level.ERROR,
        message=(
            f"The hit on track {track} falls with {100 * share:.1f} % of its footprint into {what}: "
            "the metal pushes the punch aside and its edge runs into the die."
        ),
        measured=100 * share,
        limit=0.0,
        unit="%",
        at=_place(disc, (hit, *beside)),
        remedy="Leave one of the two notes out or put it on another track; or correct the blank's hole.",
    )


def feet_stand_on_flat_metal(disc: Disc) -> list[Finding]:
    """An error for every hit whose tool would press its stripper or die foot on a tab formed before it.

    The foot would press the tab flat and the disc is spoilt, so it is an error. Only what is struck
    earlier stands already: the order of the hits decides. Not judged where the tool states no foot.
    """
    if disc.cutter.kind == "laser":
        return []
    hits = disc.hits
    pairs = hits.feet_on_formed()
    if _can_be_kept_apart(pairs):
        return []  # the usual case; every order struck does so, which takes long to find and need not be found here
    place = np.argsort(hits.order())
    standing, struck = pairs[place[pairs[:, 0]] < place[pairs[:, 1]]].T
    share = hits.under_the_foot(standing, struck)
    return [
        _foot(disc, hits, int(standing[pair]), int(struck[pair]), float(share[pair]))
        for pair in _by_place(struck, standing, share)[:MOST_FINDINGS]
    ]


def _can_be_kept_apart(pairs: IntArray) -> bool:
    """Whether some order strikes the second of every pair (standing, struck) before the first stands."""
    before: TopologicalSorter[int] = TopologicalSorter()
    for standing, struck in pairs.tolist():
        before.add(standing, struck)
    try:
        before.prepare()
    except CycleError:
        return False
    return True


def _foot(disc: Disc, hits: Hits, standing: int, struck: int, share: float) -> Finding:
    tracks = tuple(int(disc.track_index[index]) + 1 for index in (struck, standing))
    foot = None if hits.tool is None else hits.tool.foot
    size = (
        ""
        if hits.tool is None or foot is None
        else f" of {hits.tool.tool} ({foot.length_mm:g} by {foot.width_mm:g} mm)"
    )
    return Finding(
        code=Code.FOOT_ON_FORMED,
        level=Level.ERROR,
        message=(
            f"Striking on track {tracks[0]}, the foot{size} stands on {100 * share:.1f} % of the tab formed before it "
            f"on track {tracks[1]} and presses it flat."
        ),
        measured=100 * share,
        limit=0.0,
        unit="%",
        at=_place(disc, (struck, standing)),
        remedy="Leave one of the two notes out or put it on another track; or use a tool with a smaller foot.",
    )


def _place(disc: Disc, projections: tuple[int, ...]) -> Place:
    return Place(
        tracks=tuple(int(disc.track_index[index]) + 1 for index in projections),
        projections=projections,
        radius_mm=float(disc.radius_mm[projections[0]]),
        angle_deg=float(np.degrees(disc.edge_angle_rad[projections[0]])),
    )
