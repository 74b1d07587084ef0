"""The blank's own features: the shape of each hole, slot or notch of a row."""

import math
from collections.abc import Iterator

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layout.documents.cutter import SAME_PLACE_MM
from layout.documents.feature import Feature
from layout.documents.movement import DiscBlank
from layout.mechanics.arrays import FloatArray


def feature_axes(angle_rad: float) -> tuple[FloatArray, FloatArray]:
    """Unit vectors outwards and anticlockwise along the circle at an angle."""
    cos, sin = math.cos(angle_rad), math.sin(angle_rad)
    return np.array([cos, sin]), np.array([-sin, cos])


def feature_core_mm(feature: Feature, angle_rad: float) -> tuple[BaseGeometry, float]:
    """One feature as a core and the radius it is grown by on all sides; distances are then exact.

    A hole is a point, a slot a straight line along its travel, a notch a rectangle, grown by 0.
    """
    out, along = feature_axes(angle_rad)
    centre = feature.radius_mm * out
    if feature.shape == "hole":
        return shapely.Point(*centre), feature.width_mm / 2
    if feature.shape == "slot" and feature.length_mm >= feature.width_mm:
        half = along * (feature.length_mm - feature.width_mm) / 2
        return shapely.LineString([centre - half, centre + half]), feature.width_mm / 2
    if feature.shape == "slot":  # longer across the radius than along the travel
        half = out * (feature.width_mm - feature.length_mm) / 2
        return shapely.LineString([centre - half, centre + half]), feature.length_mm / 2
    half_out, half_along = out * feature.width_mm / 2, along * feature.length_mm / 2
    corners = [centre - half_out - half_along, centre + half_out - half_along]
    return shapely.Polygon([*corners, centre + half_out + half_along, centre - half_out + half_along]), 0.0


def row_cores_mm(feature: Feature) -> tuple[NDArray[np.object_], float]:
    """The cores of a whole row, in the order of its angles, and the radius they are all grown by."""
    grown = [feature_core_mm(feature, math.radians(angle_deg)) for angle_deg in feature.angles_deg]
    return np.array([core for core, _ in grown], dtype=np.object_), grown[0][1]


def features_once(blank: DiscBlank) -> Iterator[tuple[Feature, float]]:
    """Every feature with its angle in degrees; one that two rows share comes once, as it is made once."""
    seen: set[tuple[bool | float, ...]] = set()
    for feature in blank.features:
        for angle_deg in feature.angles_deg:
            centre_mm = feature.radius_mm * feature_axes(math.radians(angle_deg))[0]
            place = (round(float(value) / SAME_PLACE_MM) for value in centre_mm)
            key = (feature.shape == "notch", feature.length_mm, feature.width_mm, *place)
            if key not in seen:
                seen.add(key)
                yield feature, angle_deg
