"""The blank as it is cut: centre hole, features and rim."""

import math
from collections.abc import Iterator

import numpy as np

from layout.cut.plan import Circles, Entity, Outlines
from layout.documents.cutter import SAME_PLACE_MM
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.obround import obround_mm

WIDEST_ARC_RAD = math.pi / 2  # rad; a bulge of nearly a whole circle is ill-conditioned, tan(θ/4) runs to infinity
_DIGITS = -round(math.log10(SAME_PLACE_MM))


def turned_mm(points_mm: FloatArray, angle_rad: FloatArray) -> FloatArray:
    """Shape (n, k, 2). Points (x along the radius, y along the anticlockwise tangent), turned to each angle."""
    cos, sin = np.cos(angle_rad)[:, None], np.sin(angle_rad)[:, None]
    x, y = points_mm[None, :, 0], points_mm[None, :, 1]
    return np.stack([x * cos - y * sin, x * sin + y * cos], axis=-1)


def holes(movement: Movement) -> tuple[Entity, ...]:
    """Feature holes and slots from the innermost out, then the centre hole.

    A hole that two features share is cut once.
    """
    seen: set[tuple[float, ...]] = set()
    cut: list[Entity] = []
    for feature in sorted(movement.disc.features, key=lambda feature: feature.radius_mm):
        if feature.shape != "notch":
            cut += _feature_holes(feature, seen)
    centre_mm = movement.disc.centre_hole_mm / 2
    return (*cut, _circles(np.zeros((1, 2)), centre_mm))


def _feature_holes(feature: Feature, seen: set[tuple[float, ...]]) -> Iterator[Entity]:
    angle_rad = np.radians(feature.angles_deg)
    centres_mm = turned_mm(np.array([[feature.radius_mm, 0.0]]), angle_rad)[:, 0, :]
    size = (feature.length_mm, feature.width_mm)
    keys = [(*size, *(round(float(value), _DIGITS) + 0.0 for value in centre)) for centre in centres_mm]
    new = np.array([key not in seen for key in keys])
    seen.update(keys)
    if not new.any():
        return
    if feature.length_mm == feature.width_mm:
        yield _circles(centres_mm[new], feature.width_mm / 2)
    else:
        points_mm, bulges = obround_mm(feature.length_mm, feature.width_mm)
        placed_mm = frozen_floats(turned_mm(points_mm + np.array([feature.radius_mm, 0.0]), angle_rad[new]))
        yield Outlines(layer="HOLES", points_mm=placed_mm, bulges=bulges, closed=True)


def _circles(centres_mm: FloatArray, radius_mm: float) -> Circles:
    radii_mm = frozen_floats([radius_mm] * len(centres_mm))
    return Circles(layer="HOLES", centres_mm=frozen_floats(centres_mm), radius_mm=radii_mm)


def rim(movement: Movement) -> Entity:
    """The rim: a circle, or with notches one closed outline of arcs and straight sides, anticlockwise."""
    rim_mm = movement.disc.outer_diameter_mm / 2
    notches = sorted(_notches(movement), key=lambda notch: notch[0])
    if not notches:
        return Circles(layer="RIM", centres_mm=frozen_floats(np.zeros((1, 2))), radius_mm=frozen_floats([rim_mm]))
    vertices: list[FloatArray] = []
    bulges: list[float] = []
    for place, (angle_rad, corners_mm) in enumerate(notches):
        next_angle_rad, next_corners_mm = notches[(place + 1) % len(notches)]
        corners = turned_mm(corners_mm, np.array([angle_rad]))[0]
        from_rad = angle_rad + math.atan2(corners_mm[-1, 1], corners_mm[-1, 0])
        to_rad = next_angle_rad + math.atan2(next_corners_mm[0, 1], next_corners_mm[0, 0])
        turn_rad = (to_rad - from_rad) % (2 * math.pi)
        pieces = math.ceil(turn_rad / WIDEST_ARC_RAD)
        starts_rad = from_rad + turn_rad * np.arange(1, pieces) / pieces
        between = rim_mm * np.stack([np.cos(starts_rad), np.sin(starts_rad)], axis=-1)
        vertices += [*corners, *between]
        bulges += [0.0] * (len(corners) - 1) + [math.tan(turn_rad / pieces / 4)] * pieces
    points_mm = frozen_floats(np.array(vertices)[None])
    return Outlines(layer="RIM", points_mm=points_mm, bulges=frozen_floats(bulges), closed=True)


def _notches(movement: Movement) -> Iterator[tuple[float, FloatArray]]:
    """Angle of every notch, in [0, 2π), and its corners, anticlockwise, in the frame of its radius.

    A notch too shallow for its length has no sides: its floor is a chord of the rim.
    """
    rim_mm = movement.disc.outer_diameter_mm / 2
    for feature in movement.disc.features:
        if feature.shape != "notch":
            continue
        floor_mm, half_mm = feature.radius_mm - feature.width_mm / 2, feature.length_mm / 2
        chord_mm = math.sqrt(rim_mm**2 - floor_mm**2)
        if chord_mm <= half_mm:
            corners = [(floor_mm, -chord_mm), (floor_mm, chord_mm)]
        else:
            mouth_mm = math.sqrt(rim_mm**2 - half_mm**2)
            corners = [(mouth_mm, -half_mm), (floor_mm, -half_mm), (floor_mm, half_mm), (mouth_mm, half_mm)]
        for angle_rad in np.radians(feature.angles_deg):
            yield float(angle_rad) % (2 * math.pi), np.array(corners)
