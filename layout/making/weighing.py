"""What the blank and the finished disc weigh: area × thickness × density, areas in closed form."""

import math
from collections.abc import Iterator

import numpy as np

from layout.documents.feature import Feature
from layout.documents.movement import DiscBlank
from layout.mechanics.blank import features_once
from layout.mechanics.projection import Pattern, Shape
from layout.place.disc import Disc

_MM3_PER_M3 = 1e9


def blank_mass_kg(disc: Disc) -> float | None:
    """The round blank, rim to rim, before anything is cut in it; None where the density is not stated."""
    return _mass_kg(disc.movement.disc, _circle_mm2(disc.movement.disc.outer_diameter_mm))


def disc_mass_kg(disc: Disc) -> float | None:
    """The disc as it is played; None where the density is not stated.

    What falls out is taken off: centre hole, features, slits with their reliefs, slots. A folded or lanced tab stays
    on the disc, so a lance takes nothing off and a fold only its slit. Openings that run into each other, which
    is an error of the disc, are taken off each in full.
    """
    blank = disc.movement.disc
    gone_mm2 = _circle_mm2(blank.centre_hole_mm) + sum(_feature_areas_mm2(blank))
    gone_mm2 += disc.projection_count * lost_mm2(disc.pattern, disc.movement.projection.width_mm)
    return _mass_kg(blank, _circle_mm2(blank.outer_diameter_mm) - gone_mm2)


def lost_mm2(pattern: Pattern, tab_width_mm: float) -> float:
    """How much of the sheet falls out for one projection: its opening less the tab folded out of it, or nothing."""
    if pattern.making == "lance":
        return 0.0
    tab_mm2 = pattern.blank_length_mm * tab_width_mm if pattern.making == "fold" else 0.0
    return area_mm2(pattern.opening) - tab_mm2


def area_mm2(shape: Shape) -> float:
    """The area of a closed outline of straight pieces and arcs, anticlockwise.

    Corners by the trapezoid sum; each arc adds the segment between it and its chord, r²·(θ − sin θ)/2, with
    θ = 4·atan(bulge) and chord = 2·r·sin(θ/2).
    """
    from_mm, to_mm = shape.points_mm, np.roll(shape.points_mm, -1, axis=0)
    corners_mm2 = float(np.sum(from_mm[:, 0] * to_mm[:, 1] - to_mm[:, 0] * from_mm[:, 1])) / 2
    chords_mm = np.hypot(*(to_mm - from_mm).T)
    return corners_mm2 + sum(
        _segment_mm2(float(chord_mm), float(bulge))
        for chord_mm, bulge in zip(chords_mm, shape.bulges, strict=True)
        if bulge != 0
    )


def _segment_mm2(chord_mm: float, bulge: float) -> float:
    turn_rad = 4 * math.atan(bulge)
    radius_mm = chord_mm / (2 * math.sin(turn_rad / 2))
    return radius_mm**2 * (turn_rad - math.sin(turn_rad)) / 2


def _mass_kg(blank: DiscBlank, area: float) -> float | None:
    if blank.density_kg_m3 is None:
        return None
    return area * blank.thickness_mm / _MM3_PER_M3 * blank.density_kg_m3


def _circle_mm2(diameter_mm: float) -> float:
    return math.pi / 4 * diameter_mm**2


def _feature_areas_mm2(blank: DiscBlank) -> Iterator[float]:
    """The area of every feature; a hole, slot or notch that two rows share counts once, as it is cut once."""
    return (_feature_mm2(feature, blank.outer_diameter_mm / 2) for feature, _ in features_once(blank))


def _feature_mm2(feature: Feature, rim_mm: float) -> float:
    if feature.shape != "notch":
        end_mm, long_mm = sorted((feature.width_mm, feature.length_mm))
        return _circle_mm2(end_mm) + (long_mm - end_mm) * end_mm
    floor_mm = feature.radius_mm - feature.width_mm / 2
    half_mm = min(feature.length_mm / 2, math.sqrt(rim_mm**2 - floor_mm**2))
    # Between the rim and the notch's floor: twice the integral of √(R² − y²) from 0 to its half length, less the floor.
    to_rim_mm2 = half_mm * math.sqrt(rim_mm**2 - half_mm**2) + rim_mm**2 * math.asin(half_mm / rim_mm)
    return to_rim_mm2 - 2 * half_mm * floor_mm
