"""The metal of a trial piece: a sector of the disc on a hub with the centre hole and what drives it."""

import math
from dataclasses import dataclass

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.cut.plan import Outlines
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.blank import feature_core_mm

# mm; common practice: corners of sheet that is handled are rounded, 3 mm is the usual least.
CORNER_MM = 3.0
CORNER_SHARE = 0.05  # of the disc's radius, where that is less
HUB_MARGIN_MM = 3.0  # mm of metal round the hub's holes and clamp; common practice: six times a sheet of 0.5 mm
WIDEST_ARC_RAD = math.pi / 2  # rad; a bulge of nearly a whole circle is ill-conditioned, tan(θ/4) runs to infinity
_QUARTER_PIECES = 64  # of a circle's quarter, where a polygon stands for the metal


@dataclass(frozen=True, slots=True, kw_only=True)
class Sector:
    """A sector about the disc's centre, joined to a round hub. Angles as drawn.

    Attributes:
        hub_mm: The hub's radius.
        rim_mm: The sector's radius, the disc's own.
        middle_rad: Where the sector's middle lies.
        half_rad: From its middle to each side.
    """

    hub_mm: float
    rim_mm: float
    middle_rad: float
    half_rad: float


def hub_features(movement: Movement, within_mm: float) -> tuple[Feature, ...]:
    """The rows of holes and slots that lie wholly inside a radius: they drive the piece as they drive the disc."""
    return tuple(
        feature
        for feature in movement.disc.features
        if feature.shape != "notch" and _reach_mm(feature) + HUB_MARGIN_MM <= within_mm
    )


def hub_radius_mm(movement: Movement, features: tuple[Feature, ...], within_mm: float) -> float:
    """A hub that holds the centre hole, these features and the clamp, HUB_MARGIN_MM round them."""
    clamped = [ring.to_radius_mm for ring in movement.keep_out if ring.to_radius_mm + HUB_MARGIN_MM <= within_mm]
    reached = [movement.disc.centre_hole_mm / 2, *clamped, *map(_reach_mm, features)]
    return min(max(reached) + HUB_MARGIN_MM, movement.disc.outer_diameter_mm / 2)


def feature_metal_mm(feature: Feature, mirror: int) -> list[tuple[BaseGeometry, float]]:
    """Each hole, slot or notch of a row, as drawn: a core and the radius it is grown by."""
    return [feature_core_mm(feature, mirror * math.radians(angle_deg)) for angle_deg in feature.angles_deg]


def outline(sector: Sector) -> Outlines:
    """The piece's edge as one closed outline, anticlockwise: rim, side, hub, side, its outer corners rounded."""
    rim_mm, half_rad, turn_rad = sector.rim_mm, sector.half_rad, sector.middle_rad
    corner_mm = min(CORNER_MM, CORNER_SHARE * rim_mm)
    lean_rad = math.asin(corner_mm / (rim_mm - corner_mm))
    side_mm = (rim_mm - corner_mm) * math.cos(lean_rad)  # along the side, where its corner's arc begins
    corner_bulge = math.tan((math.pi / 2 + lean_rad) / 4)
    rim = _arc(rim_mm, lean_rad - half_rad, half_rad - lean_rad)
    hub = _arc(sector.hub_mm, half_rad, 2 * math.pi - half_rad)
    corners = [(rim_mm, half_rad - lean_rad, corner_bulge), (side_mm, half_rad, 0.0)]
    last = [(sector.hub_mm, 2 * math.pi - half_rad, 0.0), (side_mm, -half_rad, corner_bulge)]
    vertices = [*rim, *corners, *hub, *last]
    points = [(r * math.cos(turn_rad + angle), r * math.sin(turn_rad + angle)) for r, angle, _ in vertices]
    return Outlines(
        layer="RIM",
        points_mm=frozen_floats(np.array([points])),
        bulges=frozen_floats(bulge for *_, bulge in vertices),
        closed=True,
    )


def fan_mm(sector: Sector, margin_mm: float) -> BaseGeometry:
    """The sector without its hub as a polygon, grown by a margin on all sides."""
    angles = sector.middle_rad + np.linspace(-sector.half_rad, sector.half_rad, 4 * _QUARTER_PIECES)
    rim_mm = sector.rim_mm * np.column_stack([np.cos(angles), np.sin(angles)])
    fan = shapely.Polygon(np.vstack([np.zeros((1, 2)), rim_mm]))
    hub = shapely.Point(0, 0).buffer(sector.hub_mm, quad_segs=_QUARTER_PIECES)
    grown: BaseGeometry = fan.difference(hub).buffer(margin_mm)
    return grown


def _reach_mm(feature: Feature) -> float:
    return math.hypot(feature.radius_mm + feature.width_mm / 2, feature.length_mm / 2)


def _arc(radius_mm: float, from_rad: float, to_rad: float) -> list[tuple[float, float, float]]:
    """Radius, angle and bulge where each piece of an arc starts; its end is left to what follows."""
    pieces = max(math.ceil((to_rad - from_rad) / WIDEST_ARC_RAD), 1)
    step_rad = (to_rad - from_rad) / pieces
    return [(radius_mm, from_rad + place * step_rad, math.tan(step_rad / 4)) for place in range(pieces)]
