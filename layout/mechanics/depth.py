"""How deep projections stand, and how far out of flat a sheet may be before a star wheel is no longer served.

A sheet out of flat carries its projections up or down with it: the depth that meets the star wheel is the stated one
give or take its own tolerance and the sheet's flatness (`star_wheel.depth_band_mm`).
"""

import math
from dataclasses import dataclass
from typing import Literal

from layout.documents.movement import Movement, StarWheel
from layout.mechanics.star_wheel import depth_band_mm

EndedBy = Literal[
    "star-hits-disc",
    "star-not-reached",
    "step-too-short",
    "step-too-long",
    "tooth-left-hanging",
    "depth-at-root",
    "tip-in-bend",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class DepthBand:
    """The depth of a movement's standing projections.

    Attributes:
        depth_mm: As it is stated.
        plus_minus_mm: By which forming may miss it.
        flatness_mm: By which the sheet may be out of flat.
        least_mm: The least depth at a star wheel, by both.
        most_mm: The greatest.
        flatness_limit_mm: The flatness at which the first condition of the star wheel ends; at or below zero where one
            does not hold on a flat sheet. None for measured arcs, which do not say.
        ended_by: Which it is, by the code of its finding; None where there is no limit.
    """

    depth_mm: float
    plus_minus_mm: float
    flatness_mm: float
    least_mm: float
    most_mm: float
    flatness_limit_mm: float | None
    ended_by: EndedBy | None


def depth_band(movement: Movement, bend_radius_mm: float | None) -> DepthBand | None:
    """The depth of the projections and what flatness does to it; None for slots, which have no depth.

    Args:
        movement: Its projection, star wheel and sheet.
        bend_radius_mm: Inside radius of the fold; None where nothing is folded.
    """
    projection = movement.projection
    if projection.depth_mm is None:
        return None
    least_mm, most_mm = depth_band_mm(movement)
    limit_mm: float | None = None
    ended_by: EndedBy | None = None
    if isinstance(movement.star_wheel, StarWheel):
        room_mm = _room_mm(movement.star_wheel, projection.depth_mm, projection.depth_plus_minus_mm, bend_radius_mm)
        limit_mm, ended_by = min((room, name) for name, room in room_mm.items())
    return DepthBand(
        depth_mm=projection.depth_mm,
        plus_minus_mm=projection.depth_plus_minus_mm,
        flatness_mm=movement.disc.flatness_mm,
        least_mm=least_mm,
        most_mm=most_mm,
        flatness_limit_mm=limit_mm,
        ended_by=ended_by,
    )


def _room_mm(
    wheel: StarWheel, depth_mm: float, plus_minus_mm: float, bend_radius_mm: float | None
) -> dict[EndedBy, float]:
    """For each condition the flatness at which it ends.

    A face of depth p lets a tip go at α_e = acos((H − p)/R), so α_e is an angle a at p = H − R·cos a.
    """

    def depth_at_mm(angle_rad: float) -> float:
        return wheel.axis_depth_mm - wheel.tip_radius_mm * math.cos(min(max(angle_rad, 0.0), math.pi))

    gap_mm = wheel.axis_depth_mm - wheel.tip_radius_mm
    shallow_mm, deep_mm = depth_mm - plus_minus_mm, depth_mm + plus_minus_mm
    step_rad, release_rad = 2 * math.pi / wheel.points, math.radians(wheel.release_angle_deg)
    room_mm: dict[EndedBy, float] = {
        "star-hits-disc": gap_mm,
        "star-not-reached": shallow_mm - gap_mm,
        "step-too-short": shallow_mm - depth_at_mm(step_rad / 2),
        "step-too-long": depth_at_mm(step_rad) - deep_mm,
        "tooth-left-hanging": min(shallow_mm - depth_at_mm(release_rad), depth_at_mm(release_rad + step_rad) - deep_mm),
        "depth-at-root": wheel.axis_depth_mm - wheel.root_radius_mm - deep_mm,
    }
    if bend_radius_mm is not None:
        room_mm["tip-in-bend"] = gap_mm - bend_radius_mm
    return room_mm
