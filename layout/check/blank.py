"""Checks of the openings against the blank: rim, centre hole, features and keep-out rings."""

import math

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, MOST_FINDINGS, Condition, judged
from layout.documents.movement import Feature
from layout.mechanics.blank import feature_core_mm
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.spacing import core_geometries
from layout.place.disc import Disc


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
    inner_mm, outer_mm = disc.turning.radius_mm[index] + np.array([-half_mm, half_mm])
    crossed = []
    if outer_mm > blank.outer_diameter_mm / 2:
        crossed.append(("rim", float(outer_mm), blank.outer_diameter_mm / 2))
    if inner_mm < blank.centre_hole_mm / 2:
        crossed.append(("centre hole", float(inner_mm), blank.centre_hole_mm / 2))
    return crossed


def webs_to_the_rim_hold(disc: Disc) -> list[Finding]:
    """An error for a track whose openings leave less than the least web to the rim.

    A track whose projections are off the disc leaves no web to speak of; another check says so.
    """
    rim_mm = disc.movement.disc.outer_diameter_mm / 2
    return [
        finding
        for index in disc.used_tracks
        if not _off_disc(disc, index)
        for finding in _web_to(disc, index, Code.WEB_TO_RIM, "the rim", rim_mm - _radial_reach_mm(disc, index)[1])
    ]


def webs_to_the_centre_hole_hold(disc: Disc) -> list[Finding]:
    """An error for a track whose openings leave less than the least web to the centre hole; as for the rim."""
    hole_mm, code = disc.movement.disc.centre_hole_mm / 2, Code.WEB_TO_CENTRE_HOLE
    return [
        finding
        for index in disc.used_tracks
        if not _off_disc(disc, index)
        for finding in _web_to(disc, index, code, "the centre hole", _radial_reach_mm(disc, index)[0] - hole_mm)
    ]


def keep_outs_are_clear(disc: Disc) -> list[Finding]:
    """An error where the openings of a track reach into a ring in which nothing may be cut."""
    findings: list[Finding] = []
    for index in disc.used_tracks:
        nearest_mm, farthest_mm = _radial_reach_mm(disc, index)
        for place, ring in enumerate(disc.movement.keep_out):
            clear_mm = max(nearest_mm - ring.to_radius_mm, ring.from_radius_mm - farthest_mm)
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
                rests_on=(f"/keep_out/{place}/from_radius_mm", f"/keep_out/{place}/to_radius_mm"),
                at=Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index])),
                remedy="Correct the ring or the track's radius_mm, or leave the notes of this track out.",
            )
            findings += judged(condition, disc.movement)
    return findings


def _radial_reach_mm(disc: Disc, index: int) -> tuple[float, float]:
    """Least and greatest distance of a track's openings from the centre: the same for all of them."""
    radius_mm = disc.turning.radius_mm[[index]]
    pattern, direction = disc.pattern, disc.turning.direction
    points_mm = on_disc_mm(pattern.core_points_mm, radius_mm, np.zeros(1), direction, pattern.strike_u_mm)
    nearest_mm = float(shapely.distance(core_geometries(points_mm)[0], shapely.Point(0.0, 0.0)))
    farthest_mm = float(np.hypot(points_mm[0, :, 0], points_mm[0, :, 1]).max())
    return nearest_mm - disc.pattern.core_round_mm, farthest_mm + disc.pattern.core_round_mm


def _web_to(disc: Disc, index: int, code: Code, what: str, web_mm: float) -> list[Finding]:
    limit_mm = disc.cutter.min_web_mm
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
        rests_on=(f"/tracks/{index}/radius_mm", "/disc/outer_diameter_mm", "/disc/centre_hole_mm"),
        at=Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index])),
        remedy="Leave the notes of this track out, or correct the track's radius_mm or the blank's sizes.",
    )
    return judged(condition, disc.movement)


def webs_to_features_hold(disc: Disc) -> list[Finding]:
    """An error for every opening that leaves less than the least web to a hole, slot or notch of the blank."""
    points_mm = disc.placed_mm(disc.pattern.core_points_mm)
    cores = core_geometries(points_mm)
    findings: list[Finding] = []
    for feature in disc.movement.disc.features:
        for angle_deg in feature.angles_deg:
            core, round_mm = feature_core_mm(feature, math.radians(angle_deg))
            findings += _webs_to_feature(disc, cores, feature, (core, round_mm + disc.pattern.core_round_mm))
    return findings[:MOST_FINDINGS]


def _webs_to_feature(
    disc: Disc, cores: np.ndarray, feature: Feature, grown: tuple[BaseGeometry, float]
) -> list[Finding]:
    limit_mm = disc.cutter.min_web_mm
    webs_mm = shapely.distance(cores, grown[0]) - grown[1]
    return [
        Finding(
            code=Code.WEB_TO_FEATURE,
            level=Level.ERROR,
            message=(
                f"An opening on track {int(disc.track_index[index]) + 1} leaves {webs_mm[index]:.3f} mm to a "
                f"{feature.purpose} {feature.shape}; {disc.cutter.id} needs {limit_mm:.3f} mm."
            ),
            measured=float(webs_mm[index]),
            limit=limit_mm,
            unit="mm",
            at=Place(
                tracks=(int(disc.track_index[index]) + 1,),
                projections=(int(index),),
                radius_mm=float(disc.radius_mm[index]),
                angle_deg=math.degrees(disc.edge_angle_rad[index]),
            ),
            remedy="Leave the note out or put it on another track, or correct the feature in the movement document.",
        )
        for index in np.flatnonzero(webs_mm < limit_mm - GRAIN_MM)
    ]
