"""A star wheel whose points' tips alone touch, pushed by a face that passes straight by.

    sheet, star side  ────────────────┬──────────── 0
                                      │ face, depth p
                         tip, radius R  ╲
                                         ● axis, H under the sheet

A face at x (0 on the row line, positive past it) holds a tip at sin β = x / R while the tip
reaches above the face's free edge: R·cos β > H − p. Elementary geometry; no published source.
Lengths mm, angles radians.
"""

import math

from layout.documents.movement import MeasuredStarWheel, Movement, StarWheel


def leaving_angle_rad(wheel: StarWheel, depth_mm: float) -> float:
    """The wheel angle at which a face of this depth lets its tip go, α_e = acos((H − p)/R).

    Raises:
        ValueError: The face does not reach the tips, or reaches the axis; acos has no value.
    """
    cosine = (wheel.axis_depth_mm - depth_mm) / wheel.tip_radius_mm
    if not 0 < cosine < 1:
        raise ValueError(f"depth {depth_mm:g} mm: (H - p)/R is {cosine:g}, not between 0 and 1")
    return math.acos(cosine)


def contact_mm(wheel: StarWheel, depth_mm: float) -> tuple[float, float]:
    """Where, in steady running, a face meets the next tip and lets it go: (x₁, x₂).

    x₁ = −R·sin(2π/n − α_e), x₂ = R·sin α_e; between them the wheel turns one exact step.

    Raises:
        ValueError: As leaving_angle_rad.
    """
    leaving = leaving_angle_rad(wheel, depth_mm)
    step = 2 * math.pi / wheel.points
    return -wheel.tip_radius_mm * math.sin(step - leaving), wheel.tip_radius_mm * math.sin(leaving)


def depth_band_mm(movement: Movement) -> tuple[float, float]:
    """Least and greatest depth: p ± (depth_plus_minus_mm + the disc's flatness_mm).

    (0, 0) for slots, which have no depth.
    """
    projection = movement.projection
    if projection.depth_mm is None:
        return 0.0, 0.0
    spread_mm = projection.depth_plus_minus_mm + movement.disc.flatness_mm
    return projection.depth_mm - spread_mm, projection.depth_mm + spread_mm


def touch_zone_mm(movement: Movement, track_index: int) -> tuple[float, float]:
    """The stretch past the row line in which a working edge can touch a point, worst case.

    For a computed wheel: ± R·sin α_e at the greatest depth, since a wheel may stand part-turned;
    the whole tip radius where the depth is impossible. For measured arcs: from the engagement arc
    before the release to the release, or to half the arc if that is later.

    Args:
        movement: The movement.
        track_index: Place in movement.tracks, from 0.
    """
    track, wheel = movement.tracks[track_index], movement.star_wheel
    if track.engagement_arc_mm is not None or isinstance(wheel, MeasuredStarWheel):
        engagement_mm, release_mm = movement.arcs_mm(track_index)
        return release_mm - engagement_mm, max(release_mm, engagement_mm / 2)
    try:
        reach_mm = contact_mm(wheel, depth_band_mm(movement)[1])[1]
    except ValueError:
        reach_mm = wheel.tip_radius_mm
    return -reach_mm, reach_mm


def axle_slide_mm(radius_mm: float, row_y_mm: float, zone_y_mm: tuple[float, float]) -> float:
    """How far a projection slides along the axle while it may touch: max |√(r² − y²) − √(r² − d²)|.

    Args:
        radius_mm: The track's radius r.
        row_y_mm: The row line's y, d.
        zone_y_mm: y of the working edge where it may first and last touch, in either order.
    """
    at_row = math.sqrt(radius_mm**2 - row_y_mm**2)
    low, high = min(zone_y_mm), max(zone_y_mm)
    places = [low, high, min(max(0.0, low), high)]
    return max(abs(math.sqrt(max(radius_mm**2 - y * y, 0.0)) - at_row) for y in places)
