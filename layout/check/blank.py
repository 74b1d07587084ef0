"""Checks of the openings against the blank: rim, centre hole, features and keep-out rings."""

import math

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import (
    GRAIN_MM,
    MOST_FINDINGS,
    Condition,
    judged,
    not_surely_held,
    told_worth,
    unsure_advice,
)
from layout.check.worth import edge_unsure_mm, edges_unsure_mm, feature_unsure_mm
from layout.documents.feature import Feature
from layout.mechanics.arrays import FloatArray
from layout.mechanics.blank import row_cores_mm
from layout.place.disc import Disc

# An edge of the blank: the finding of a thin web to it, its name, and the movement's number for its diameter.
_RIM = Code.WEB_TO_RIM, "the rim", "/disc/outer_diameter_mm"
_CENTRE_HOLE = Code.WEB_TO_CENTRE_HOLE, "the centre hole", "/disc/centre_hole_mm"


def tracks_are_on_the_disc(disc: Disc) -> list[Finding]:
    """An error for every used track whose projections, by their width, do not lie wholly on the disc."""
    return [
        Finding(
            code=Code.TRACK_OFF_DISC,
            level=Level.ERROR,
            message=(
                f"Projections on track {index + 1} reach to {reach_mm:.3f} mm from the centre; "
                f"the disc's {edge} is at {limit_mm:.3f} mm."
            ),
            measured=reach_mm,
            limit=limit_mm,
            unit="mm",
            at=Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index])),
            remedy="Correct the track's radius_mm or the disc's diameter in the movement document.",
        )
        for index in disc.used_tracks
        for edge, reach_mm, limit_mm in _off_disc(disc, index)
    ]


def _off_disc(disc: Disc, index: int) -> list[tuple[str, float, float]]:
    """Which edge of the disc a track's projections cross, how far they reach, and where the edge is; mostly none."""
    blank, half_mm = disc.movement.disc, disc.movement.projection.width_mm / 2
    radius_mm = float(disc.turning.radius_mm[index])
    inner_mm, outer_mm = radius_mm - half_mm, radius_mm + half_mm
    crossed = []
    if outer_mm > blank.outer_diameter_mm / 2:
        crossed.append(("rim", outer_mm, blank.outer_diameter_mm / 2))
    if inner_mm < blank.centre_hole_mm / 2:
        crossed.append(("centre hole", inner_mm, blank.centre_hole_mm / 2))
    return crossed


def webs_to_the_rim_hold(disc: Disc) -> list[Finding]:
    """An error for a track whose openings leave less than the least web to the rim.

    A track whose projections are off the disc leaves no web to speak of; another check says so.
    """
    rim_mm = disc.movement.disc.outer_diameter_mm / 2
    return _webs_to(disc, _RIM, [rim_mm - farthest_mm for _, farthest_mm in disc.reach_mm])


def webs_to_the_centre_hole_hold(disc: Disc) -> list[Finding]:
    """An error for a track whose openings leave less than the least web to the centre hole; as for the rim."""
    hole_mm = disc.movement.disc.centre_hole_mm / 2
    return _webs_to(disc, _CENTRE_HOLE, [nearest_mm - hole_mm for nearest_mm, _ in disc.reach_mm])


def _webs_to(disc: Disc, edge: tuple[Code, str, str], webs_mm: list[float]) -> list[Finding]:
    """What is wrong with the webs of each track to one edge of the blank."""
    unsure_mm = edges_unsure_mm(disc) + disc.movement.plus_minus(edge[2]) / 2
    told = not_surely_held(np.array(webs_mm) - disc.cutter.min_web_mm, unsure_mm)
    return [
        finding
        for index in disc.used_tracks
        if told[index] and not _off_disc(disc, index)
        for finding in _web_to(disc, index, edge, webs_mm[index])
    ]


def keep_outs_are_clear(disc: Disc) -> list[Finding]:
    """An error where the openings of a track reach into a ring in which nothing may be cut."""
    findings: list[Finding] = []
    for index, place in _near_rings(disc):
        nearest_mm, farthest_mm = disc.reach_mm[index]
        ring = disc.movement.keep_out[place]
        outside_mm, inside_mm = nearest_mm - ring.to_radius_mm, ring.from_radius_mm - farthest_mm
        clear_mm, end = max((outside_mm, "to_radius_mm"), (inside_mm, "from_radius_mm"))
        condition = Condition(
            code=Code.IN_KEEP_OUT,
            says=(
                f"Openings on track {index + 1}, from {nearest_mm:.3f} to {farthest_mm:.3f} mm, come within "
                f"{clear_mm:.3f} mm of the ring from {ring.from_radius_mm:.3f} to {ring.to_radius_mm:.3f} mm that "
                f"must stay whole ({ring.why})"
            ),
            so="they cut into it",
            measured=clear_mm,
            limit=0.0,
            unit="mm",
            margin=clear_mm + GRAIN_MM,
            rests_on=(f"/keep_out/{place}/{end}",),
            also_unsure=edge_unsure_mm(disc, index),
            at=Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index])),
            remedy="Correct the ring or the track's radius_mm, or leave the notes of this track out.",
        )
        findings += judged(condition, disc.movement)
    return findings


def _near_rings(disc: Disc) -> list[tuple[int, int]]:
    """Used tracks, and of each the rings that must stay whole which its openings are not surely clear of."""
    near = [np.zeros((0, len(disc.reach_mm)), dtype=np.bool_)]
    nearest_mm, farthest_mm = np.array(disc.reach_mm).T
    for place, ring in enumerate(disc.movement.keep_out):
        clear_mm = np.maximum(nearest_mm - ring.to_radius_mm, ring.from_radius_mm - farthest_mm)
        ends_mm = [disc.movement.plus_minus(f"/keep_out/{place}/{end}") for end in ("from_radius_mm", "to_radius_mm")]
        near.append(not_surely_held(clear_mm, edges_unsure_mm(disc) + max(ends_mm))[None])
    of_track = np.concatenate(near).T
    return [(index, place) for index in disc.used_tracks for place in np.flatnonzero(of_track[index]).tolist()]


def _web_to(disc: Disc, index: int, edge: tuple[Code, str, str], web_mm: float) -> list[Finding]:
    limit_mm, (code, what, diameter) = disc.cutter.min_web_mm, edge
    condition = Condition(
        code=code,
        says=(
            f"Openings on track {index + 1} leave {web_mm:.3f} mm to {what}; {disc.cutter.id} needs {limit_mm:.3f} mm"
        ),
        so="the metal between would tear or burn away",
        measured=web_mm,
        limit=limit_mm,
        unit="mm",
        margin=web_mm - limit_mm + GRAIN_MM,
        rests_on=(),
        also_unsure=edge_unsure_mm(disc, index) + disc.movement.plus_minus(diameter) / 2,
        at=Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index])),
        remedy="Leave the notes of this track out, or correct the track's radius_mm or the blank's sizes.",
    )
    return judged(condition, disc.movement)


def webs_to_features_hold(disc: Disc) -> list[Finding]:
    """An error for every opening that leaves less than the least web to a hole, slot or notch of the blank.

    Where the openings of a row's features all keep it, but the nearest by less than its numbers are worth, one advice.
    """
    track_unsure_mm = edges_unsure_mm(disc)
    findings: list[Finding] = []
    for row, feature in enumerate(disc.movement.disc.features):
        unsure_mm = track_unsure_mm[disc.track_index] + feature_unsure_mm(disc, row)
        findings += _webs_to_row(disc, feature, unsure_mm)
    return findings[:MOST_FINDINGS]


def _webs_to_row(disc: Disc, feature: Feature, unsure_mm: FloatArray) -> list[Finding]:
    """Of one row of features; unsure_mm: how far the webs of each projection to it may be off, shape (n,)."""
    limit_mm = disc.cutter.min_web_mm
    holes, hole_round_mm = row_cores_mm(feature)
    rounds_mm = hole_round_mm + disc.pattern.core_round_mm
    most_mm = limit_mm + float(unsure_mm.max(initial=0.0)) + GRAIN_MM
    hole, index, distance_mm = disc.openings.distances_to(holes, most_mm + rounds_mm)
    webs_mm = distance_mm - hole_round_mm - disc.pattern.core_round_mm
    by_hole = np.lexsort((index, hole))
    thin = by_hole[webs_mm[by_hole] - limit_mm < -GRAIN_MM]
    sure_mm = webs_mm - limit_mm - unsure_mm[index]
    least_sure = np.lexsort((index, sure_mm))[:1]
    told = thin if len(thin) else least_sure[sure_mm[least_sure] < 0]
    found = [
        _web_to_feature(disc, feature, projection, web_mm, float(unsure_mm[projection]))
        for projection, web_mm in zip(index[told].tolist(), webs_mm[told].tolist(), strict=True)
    ]
    return found if len(thin) else [unsure_advice(finding) for finding in found]


def _web_to_feature(disc: Disc, feature: Feature, index: int, web_mm: float, unsure_mm: float) -> Finding:
    limit_mm = disc.cutter.min_web_mm
    fails = web_mm < limit_mm - GRAIN_MM
    return Finding(
        code=Code.WEB_TO_FEATURE,
        level=Level.ERROR,
        message=(
            f"An opening on track {int(disc.track_index[index]) + 1} leaves {web_mm:.3f} mm to a "
            f"{feature.purpose} {feature.shape}; {disc.cutter.id} needs {limit_mm:.3f} mm."
            + told_worth(web_mm - limit_mm, unsure_mm, "mm", fails=fails)
        ),
        measured=web_mm,
        limit=limit_mm,
        unit="mm",
        at=Place(
            tracks=(int(disc.track_index[index]) + 1,),
            projections=(index,),
            radius_mm=float(disc.radius_mm[index]),
            angle_deg=math.degrees(disc.edge_angle_rad[index]),
        ),
        remedy="Leave the note out or put it on another track, or correct the feature in the movement document.",
    )
