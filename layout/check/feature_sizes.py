"""Checks of feature sizes against the thickness of the sheet, by the rules of the cutter's shop.

A hole, web or edge that is small for its sheet burns, bulges or breaks; how small is too small differs
from shop to shop, so the cutter document says, as multiples of the thickness in three levels. The
cutter's min_web_mm and min_slot_mm stay its own hard limits whatever the sheet.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from itertools import pairwise
from typing import Literal

import numpy as np
import shapely

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, not_surely_held, told_worth
from layout.check.worth import (
    WIDTH,
    edge_unsure_mm,
    edges_unsure_mm,
    feature_unsure_mm,
    most_web_unsure_mm,
    web_unsure_mm,
)
from layout.documents.cutter import WIDEST_WEB_MM
from layout.mechanics.arrays import FloatArray
from layout.mechanics.blank import feature_core_mm, row_cores_mm
from layout.place.disc import Disc

Kind = Literal["hole", "web", "edge", "slit"]

_LEVELS = (Level.ERROR, Level.WARNING, Level.ADVICE)  # in the order of a rule's three ratios
_SO = {
    Level.ERROR: "it does not hold or cannot be cut cleanly",
    Level.WARNING: "it may burn, bulge or break",
    Level.ADVICE: "it asks for care",
}
_WORSE = {Level.WARNING: "an error", Level.ADVICE: "a warning"}
_REMEDY = {
    "hole": "Widen it in the movement document, use thinner sheet, or choose a cutter that cuts finer.",
    "web": "Leave one of the notes out or put it on another track, use narrower slits, or thinner sheet.",
    "edge": "Move the track or the hole away from the edge, or use thinner sheet.",
    "slit": "Widen it in the cutter or movement document, use thinner sheet, or choose a cutter that cuts finer.",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Size:
    """A feature: what it is, how wide, how far that may be off, where; how many others of its level it stands for."""

    what: str
    size_mm: float
    unsure_mm: float = 0.0
    others_count: int = 0
    at: Place = field(default_factory=Place)


def features_suit_the_sheet(disc: Disc) -> list[Finding]:
    """At most one finding for each kind of feature and level: the smallest there, and how many there are.

    A cutter that states no feature_rules is not held to any. Kinds: holes of the blank, webs between
    openings and to holes, edges (metal up to the rim or the centre hole), slits. What a size misses its limit by, or
    the next worse one holds by, is told where the movement's numbers may be off by more; a kind that is no finding, but
    by less than that, is told as advice.
    """
    rules = disc.cutter.feature_rules
    if rules is None:
        return []
    kinds: tuple[tuple[Kind, tuple[float, float, float], Iterator[_Size]], ...] = (
        ("hole", rules.hole, _holes(disc)),
        ("web", rules.web, _webs(disc, _levels_mm(disc, rules.web))),
        ("edge", rules.edge, _edges(disc, rules.edge[-1])),
        ("slit", rules.slit, _slits(disc)),
    )
    return [finding for kind, ratios, sizes in kinds for finding in _judged(disc, kind, ratios, list(sizes))]


def _levels_mm(disc: Disc, ratios: tuple[float, float, float]) -> tuple[float, ...]:
    """The limits of webs; above the last one more, up to which a web may still be below it by what it is worth."""
    limits_mm = tuple(ratio * disc.movement.disc.thickness_mm for ratio in ratios)
    rows_mm = max((feature_unsure_mm(disc, row) for row in range(len(disc.movement.disc.features))), default=0.0)
    most_mm = most_web_unsure_mm(disc) + rows_mm + _thickness_unsure_mm(disc, ratios[-1])
    return (*limits_mm, limits_mm[-1] + most_mm) if most_mm > 0 else limits_mm


def _judged(disc: Disc, kind: Kind, ratios: tuple[float, float, float], sizes: list[_Size]) -> list[Finding]:
    thickness_mm = disc.movement.disc.thickness_mm
    limits_mm = [ratio * thickness_mm for ratio in ratios]
    findings = []
    for place, level in enumerate(_LEVELS):
        least_mm = limits_mm[place - 1] if place else -math.inf
        small = [s for s in sizes if least_mm - GRAIN_MM <= s.size_mm < limits_mm[place] - GRAIN_MM]
        if not small:
            continue
        worst = min(small, key=lambda size: size.size_mm)
        count = sum(1 + size.others_count for size in small)
        others = f" {count - 1} more are below that." if count > 1 else ""
        unsure_mm = worst.unsure_mm + _thickness_unsure_mm(disc, ratios[place])
        worth = told_worth(worst.size_mm - limits_mm[place], unsure_mm, "mm", fails=True)
        if place:
            worse_mm = worst.unsure_mm + _thickness_unsure_mm(disc, ratios[place - 1])
            if worst.size_mm - least_mm < worse_mm:
                worth += (
                    f" It is {max(worst.size_mm - least_mm, 0.0):.3f} mm above {least_mm:.3f} mm, the limit for "
                    f"{_WORSE[level]}, less than the ±{worse_mm:.3f} mm of the numbers it stands on."
                )
        says = f"{_measured(worst, thickness_mm)}; {_asked(disc, ratios[place])}: {_SO[level]}.{others}{worth}"
        findings.append(_finding(worst, limits_mm[place], level, says, _REMEDY[kind]))
    return findings or _nearly_small(disc, ratios[-1], sizes)


def _nearly_small(disc: Disc, ratio: float, sizes: list[_Size]) -> list[Finding]:
    """Advice where all sizes of a kind hold, but the one nearest to its limit by less than its numbers are worth."""
    limit_mm, thickness_mm = ratio * disc.movement.disc.thickness_mm, disc.movement.disc.thickness_mm
    worth_mm = [size.unsure_mm + _thickness_unsure_mm(disc, ratio) for size in sizes]
    near = [
        (size.size_mm - limit_mm - worth, place)
        for place, (size, worth) in enumerate(zip(sizes, worth_mm, strict=True))
    ]
    if not near or min(near)[0] >= 0:
        return []
    place = min(near)[1]
    size = sizes[place]
    says = f"{_measured(size, thickness_mm)}; {_asked(disc, ratio)}."
    says += told_worth(size.size_mm - limit_mm, worth_mm[place], "mm", fails=False)
    finding = _finding(size, limit_mm, Level.ADVICE, says, "Measure again to be sure.")
    return [replace(finding, code=Code.MARGIN_UNSURE)]


def _measured(size: _Size, thickness_mm: float) -> str:
    ratio = size.size_mm / thickness_mm
    return f"{size.what} is {size.size_mm:.3f} mm, {ratio:.2f} times the sheet's {thickness_mm:g} mm"


def _asked(disc: Disc, ratio: float) -> str:
    return f"{disc.cutter.id} asks for {ratio:g} times, {ratio * disc.movement.disc.thickness_mm:.3f} mm"


def _finding(size: _Size, limit_mm: float, level: Level, says: str, remedy: str) -> Finding:
    return Finding(
        code=Code.SMALL_FOR_SHEET,
        level=level,
        message=says,
        measured=size.size_mm,
        limit=limit_mm,
        unit="mm",
        at=size.at,
        remedy=remedy,
    )


def _thickness_unsure_mm(disc: Disc, ratio: float) -> float:
    return ratio * disc.movement.plus_minus("/disc/thickness_mm")


def _holes(disc: Disc) -> Iterator[_Size]:
    blank = disc.movement.disc
    worth = disc.movement.plus_minus
    yield _Size(what="The centre hole", size_mm=blank.centre_hole_mm, unsure_mm=worth("/disc/centre_hole_mm"))
    for row, one in enumerate(blank.features):
        at = Place(radius_mm=one.radius_mm, angle_deg=one.first_at_deg % 360)
        narrower = "width_mm" if one.width_mm <= one.length_mm else "length_mm"
        yield _Size(
            what=f"A {one.purpose} {one.shape}",
            size_mm=min(one.width_mm, one.length_mm),
            unsure_mm=worth(f"/disc/features/{row}/{narrower}"),
            at=at,
        )


def _slits(disc: Disc) -> Iterator[_Size]:
    """A slit as wide as the kerf is no feature: the beam alone makes it. A press's lance leaves none."""
    projection, fold = disc.movement.projection, disc.cutter.fold
    if projection.kind == "slot":
        unsure_mm = disc.movement.plus_minus(WIDTH)
        yield _Size(what="The slot's width", size_mm=projection.width_mm, unsure_mm=unsure_mm)
    elif disc.pattern.making == "fold" and fold is not None and fold.slit_width_mm is not None:
        yield _Size(what="The slit's width", size_mm=fold.slit_width_mm)
        if fold.relief_mm > 0 and fold.relief_width_mm is not None:
            yield _Size(what="The relief's width", size_mm=fold.relief_width_mm)


def _edges(disc: Disc, ratio: float) -> Iterator[_Size]:
    """Metal between the rim or the centre hole and what lies nearest to it, track by track and row by row.

    Of the tracks only those that are not surely as far from it as the greatest ratio of the rule asks.
    """
    blank = disc.movement.disc
    rim_mm, hole_mm = blank.outer_diameter_mm / 2, blank.centre_hole_mm / 2
    worth = disc.movement.plus_minus
    rim_off_mm, hole_off_mm = worth("/disc/outer_diameter_mm") / 2, worth("/disc/centre_hole_mm") / 2
    unsure_mm = edges_unsure_mm(disc) + _thickness_unsure_mm(disc, ratio)
    limit_mm = ratio * blank.thickness_mm
    nearest_of_mm, farthest_of_mm = np.array(disc.reach_mm).T
    near = not_surely_held(rim_mm - farthest_of_mm - limit_mm, unsure_mm + rim_off_mm)
    near |= not_surely_held(nearest_of_mm - hole_mm - limit_mm, unsure_mm + hole_off_mm)
    for index in (used for used in disc.used_tracks if near[used]):
        nearest_mm, farthest_mm = disc.reach_mm[index]
        at = Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index]))
        of = f"from the openings of track {index + 1}"
        off_mm = edge_unsure_mm(disc, index)
        to_rim_mm, to_hole_mm = rim_mm - farthest_mm, nearest_mm - hole_mm
        yield _Size(what=f"The metal {of} to the rim", size_mm=to_rim_mm, unsure_mm=off_mm + rim_off_mm, at=at)
        yield _Size(
            what=f"The metal {of} to the centre hole", size_mm=to_hole_mm, unsure_mm=off_mm + hole_off_mm, at=at
        )
    for row, one in enumerate(blank.features):
        core, round_mm = feature_core_mm(one, math.radians(one.first_at_deg))
        nearest_mm, farthest_mm = _reach_mm(core, round_mm)
        at = Place(radius_mm=one.radius_mm, angle_deg=one.first_at_deg % 360)
        of, off_mm = f"from a {one.purpose} {one.shape}", feature_unsure_mm(disc, row)
        to_rim_mm, to_hole_mm = rim_mm - farthest_mm, nearest_mm - hole_mm
        if one.shape != "notch":  # which crosses the rim
            yield _Size(what=f"The metal {of} to the rim", size_mm=to_rim_mm, unsure_mm=off_mm + rim_off_mm, at=at)
        yield _Size(
            what=f"The metal {of} to the centre hole", size_mm=to_hole_mm, unsure_mm=off_mm + hole_off_mm, at=at
        )


def _webs(disc: Disc, limits_mm: tuple[float, ...]) -> Iterator[_Size]:
    """The thinnest web of each level, between two openings and between an opening and a feature of the blank.

    Webs above WIDEST_WEB_MM are not looked for, whatever the rule: no disc is that thick.
    """
    most_mm = min(limits_mm[-1], WIDEST_WEB_MM)
    one, two, webs_mm = disc.openings.webs_within(most_mm)
    for place, others_count in _thinnest(webs_mm, limits_mm):
        pair = (int(one[place]), int(two[place]))
        tracks = tuple(int(disc.track_index[index]) + 1 for index in pair)
        yield _Size(
            what=f"The web between two openings on tracks {tracks[0]} and {tracks[1]}",
            size_mm=float(webs_mm[place]),
            unsure_mm=web_unsure_mm(disc, *pair),
            others_count=others_count,
            at=_at(disc, pair, tracks),
        )
    for row, feature in enumerate(disc.movement.disc.features):
        holes, hole_round_mm = row_cores_mm(feature)
        apart_mm = disc.pattern.core_round_mm + hole_round_mm
        _, near, distance_mm = disc.openings.distances_to(holes, most_mm + apart_mm)
        webs_mm = distance_mm - apart_mm
        for place, others_count in _thinnest(webs_mm, limits_mm):
            track = int(disc.track_index[near[place]]) + 1
            yield _Size(
                what=f"The web between an opening on track {track} and a {feature.purpose} {feature.shape}",
                size_mm=float(webs_mm[place]),
                unsure_mm=feature_unsure_mm(disc, row) + edge_unsure_mm(disc, track - 1),
                others_count=others_count,
                at=_at(disc, (int(near[place]),), (track,)),
            )


def _thinnest(webs_mm: FloatArray, limits_mm: tuple[float, ...]) -> Iterator[tuple[int, int]]:
    """For each level that has webs, the place of the thinnest and how many others there are."""
    for least_mm, limit_mm in pairwise((-math.inf, *limits_mm)):
        of_level = np.flatnonzero((webs_mm >= least_mm - GRAIN_MM) & (webs_mm < limit_mm - GRAIN_MM))
        if len(of_level):
            yield int(of_level[np.argmin(webs_mm[of_level])]), len(of_level) - 1


def _at(disc: Disc, openings: tuple[int, ...], tracks: tuple[int, ...]) -> Place:
    return Place(
        tracks=tracks,
        projections=openings,
        radius_mm=float(disc.radius_mm[list(openings)].mean()),
        angle_deg=math.degrees(disc.edge_angle_rad[openings[0]]),
    )


def _reach_mm(core: shapely.Geometry, round_mm: float) -> tuple[float, float]:
    """Least and greatest distance from the centre of a core grown by a radius."""
    corners = shapely.get_coordinates(core)
    nearest_mm = float(shapely.distance(core, shapely.Point(0.0, 0.0)))
    return nearest_mm - round_mm, float(np.hypot(corners[:, 0], corners[:, 1]).max()) + round_mm
