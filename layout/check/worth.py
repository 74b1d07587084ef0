"""How far sizes of metal on a disc may be off, by what the movement states of its numbers' worth."""

import math
from itertools import product

import numpy as np

from layout.documents.movement import StarWheel
from layout.mechanics.arrays import FloatArray
from layout.mechanics.star_wheel import depth_band_mm
from layout.place.disc import Disc

WIDTH = "/projection/width_mm"


def radius_pointer(track_index: int) -> str:
    """The JSON pointer of a track's radius, by its place from 0."""
    return f"/tracks/{track_index}/radius_mm"


def of_tracks(disc: Disc, name: str) -> FloatArray:
    """Shape (tracks,). How far one number of every track, by its name, may be off in its unit; 0 where not stated."""
    stated, count = disc.movement.stated, len(disc.movement.tracks)
    if not stated:
        return np.zeros(count)
    worths = (stated.get(f"/tracks/{index}/{name}") for index in range(count))
    return np.array([0.0 if worth is None else worth.plus_minus for worth in worths])


def edges_unsure_mm(disc: Disc) -> FloatArray:
    """Shape (tracks,). `edge_unsure_mm` of every track."""
    return of_tracks(disc, "radius_mm") + disc.movement.plus_minus(WIDTH) / 2


def edge_unsure_mm(disc: Disc, track_index: int) -> float:
    """How far the openings of a track may reach further out or in: its radius, and half a width."""
    worth = disc.movement.plus_minus
    return worth(radius_pointer(track_index)) + worth(WIDTH) / 2


def feature_unsure_mm(disc: Disc, row: int) -> float:
    """How far the edge of a feature towards centre or rim may be off: its radius, and half a width."""
    at = f"/disc/features/{row}"
    return disc.movement.plus_minus(f"{at}/radius_mm") + disc.movement.plus_minus(f"{at}/width_mm") / 2


def along_unsure_mm(disc: Disc) -> float:
    """How far an opening's length along the travel may be off: that of a slot, or what a tab of a depth leaves."""
    return disc.movement.plus_minus(
        "/projection/length_mm" if disc.pattern.making == "slot" else "/projection/depth_mm"
    )


def web_unsure_mm(disc: Disc, one: int, other: int) -> float:
    """How far a web between two openings may be off: across the tracks by radii and a width, along one by a length.

    On one track the web lies along the travel, where openings stand as they are cut, not as the movement is measured.

    Args:
        disc: The disc.
        one: Index of a projection.
        other: Index of another.
    """
    tracks, worth = disc.track_index[[one, other]].tolist(), disc.movement.plus_minus
    if tracks[0] == tracks[1]:
        return along_unsure_mm(disc)
    return worth(radius_pointer(tracks[0])) + worth(radius_pointer(tracks[1])) + worth(WIDTH)


def most_web_unsure_mm(disc: Disc) -> float:
    """How far any web between two openings of a disc may be off at most."""
    worth = disc.movement.plus_minus
    radius_mm = float(of_tracks(disc, "radius_mm")[disc.used_tracks].max(initial=0.0))
    return max(2 * radius_mm + worth(WIDTH), along_unsure_mm(disc))


def reaches_unsure_mm(disc: Disc) -> FloatArray:
    """Shape (tracks,). `reach_unsure_mm` of every used track; 0 for the others."""
    unsure_mm = np.zeros(len(disc.movement.tracks))
    if disc.movement.stated:
        unsure_mm[disc.used_tracks] = [reach_unsure_mm(disc, index) for index in disc.used_tracks]
    return unsure_mm


def reach_unsure_mm(disc: Disc, track_index: int) -> float:
    """How far the ends of the stretch in which a working edge can touch a point may be off, on a track.

    Measured arcs by their own worth; of a computed wheel √(R² − (H − p)²), at the greatest depth, by the worst of
    every way its numbers may be off.
    """
    movement, worth = disc.movement, disc.movement.plus_minus
    wheel, of_track = movement.star_wheel, f"/tracks/{track_index}"
    if movement.tracks[track_index].engagement_arc_mm is not None:
        return worth(f"{of_track}/engagement_arc_mm") + worth(f"{of_track}/release_arc_mm")
    if not isinstance(wheel, StarWheel):
        return worth("/star_wheel/engagement_arc_mm") + worth("/star_wheel/release_arc_mm")
    depths = ("/projection/depth_mm", "/projection/depth_plus_minus_mm", "/disc/flatness_mm")
    gap_off_mm = worth("/star_wheel/axis_depth_mm") + sum(map(worth, depths))
    tip_off_mm, gap_mm = worth("/star_wheel/tip_radius_mm"), wheel.axis_depth_mm - depth_band_mm(movement)[1]

    def reach_mm(tip_mm: float, gap_mm: float) -> float:
        return math.sqrt(max(tip_mm**2 - max(gap_mm, 0.0) ** 2, 0.0))

    return max(
        abs(reach_mm(wheel.tip_radius_mm + tip, gap_mm + gap) - reach_mm(wheel.tip_radius_mm, gap_mm))
        for tip, gap in product((-tip_off_mm, tip_off_mm), (-gap_off_mm, gap_off_mm))
    )
