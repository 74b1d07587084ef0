"""All openings of one disc, and which of them come near each other: what several checks ask of the same shapes."""

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import Pattern
from layout.mechanics.spacing import core_geometries
from layout.mechanics.turning import Turning

_SPARE_MM = 1e-6  # mm; boxes are taken so much larger, so that the last bit of a corner loses no pair


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Openings:
    """The holes that remain once the tabs are formed.

    Attributes:
        points_mm: Shape (n, k, 2). The corners of each opening's core.
        cores: Shape (n,). The cores; an opening is its core grown by `round_mm` on all sides, so that the distance
            of two cores less twice that is the metal between them, exactly.
        round_mm: The rounding.
        tree: Of the cores, by their places.
    """

    points_mm: FloatArray
    cores: NDArray[np.object_]
    round_mm: float
    tree: shapely.STRtree

    def webs_within(self, most_mm: float) -> tuple[IntArray, IntArray, FloatArray]:
        """Every pair of openings with no more than this between them.

        The tree is asked for boxes alone. Most openings have no neighbour so near, and are done with by that; the
        tree's own search by distance would prepare the shape of every one of them for it.

        Returns:
            The lower place and the higher of each pair, and the metal between, 0 − 2·`round_mm` where the cores run
            into each other; shape (m,) each, by the lower place. None for fewer than two openings.
        """
        apart_mm = most_mm + 2 * self.round_mm
        around_mm = apart_mm + _SPARE_MM
        # A tree looks at the box of what it is asked for: a box's diagonal stands for it, with fewest corners to make.
        corners_mm = [self.points_mm.min(axis=1) - around_mm, self.points_mm.max(axis=1) + around_mm]
        one, two = self.tree.query(shapely.linestrings(np.stack(corners_mm, axis=1)))
        one, two = one[one < two], two[one < two]
        distance_mm = shapely.distance(self.cores[one], self.cores[two])
        near = distance_mm <= apart_mm
        return one[near], two[near], distance_mm[near] - 2 * self.round_mm

    def distances_to(self, shapes: NDArray[np.object_], most_mm: float) -> tuple[IntArray, IntArray, FloatArray]:
        """Every core that comes no farther than this from one of some shapes.

        Returns:
            The place of the shape, that of the core, and the distance between; shape (m,) each, by the shape's place.
        """
        shape, core = self.tree.query(shapes, predicate="dwithin", distance=most_mm)
        return shape, core, shapely.distance(shapes[shape], self.cores[core])


def openings_at(points_mm: FloatArray, round_mm: float) -> Openings:
    """Openings whose cores have these corners, shape (n, k, 2); k = 2 for lines."""
    cores = core_geometries(points_mm)
    return Openings(points_mm=points_mm, cores=cores, round_mm=round_mm, tree=shapely.STRtree(cores))


def radial_reach_mm(turning: Turning, pattern: Pattern) -> list[tuple[float, float]]:
    """For every track the least and greatest distance of its openings from the centre: the same for all of them."""
    radius_mm, angle_rad = turning.radius_mm, np.zeros(len(turning.radius_mm))
    points_mm = on_disc_mm(pattern.core_points_mm, radius_mm, angle_rad, turning.direction, pattern.strike_u_mm)
    nearest_mm = shapely.distance(core_geometries(points_mm), shapely.Point(0.0, 0.0)) - pattern.core_round_mm
    farthest_mm = np.hypot(points_mm[..., 0], points_mm[..., 1]).max(axis=1) + pattern.core_round_mm
    return list(zip(nearest_mm.tolist(), farthest_mm.tolist(), strict=True))
