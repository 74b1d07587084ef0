"""Outlines seen from the centre: many at once, and each against what shapely measures of it."""

import math

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.mechanics.arrays import FloatArray
from layout.mechanics.polar import Outlines, outlines_of
from layout.mechanics.projection import HALF_CIRCLE_BULGE
from tests.thorough import tried

# A slit's channel: two legs about a tongue. Seen from near, a ray crosses both legs; from afar the tongue too.
CHANNEL = np.array([(-2, 1), (-2, -1), (0.7, -1), (0.7, -0.55), (0.4, -0.55), (0.4, 0.55), (0.7, 0.55), (0.7, 1)])
SLOT = np.array([(-1, 0.6), (-1, -0.6), (1, -0.6), (1, 0.6)])
ROUND_ENDS = np.array([HALF_CIRCLE_BULGE, 0.0, HALF_CIRCLE_BULGE, 0.0])
SHAPES = [(CHANNEL, np.zeros(8)), (SLOT, ROUND_ENDS)]


def at_radii(shape_mm: FloatArray, radii_mm: list[float], turned_rad: float = 0.0) -> FloatArray:
    """The shape's corners with its origin on the +X axis at each radius, turned about that point."""
    cos, sin = math.cos(turned_rad), math.sin(turned_rad)
    turned = shape_mm @ np.array([(cos, sin), (-sin, cos)])
    return np.array([turned + np.array([radius_mm, 0.0]) for radius_mm in radii_mm])


def made(points_mm: FloatArray, bulges: FloatArray) -> Outlines:
    outlines = outlines_of(points_mm, bulges)
    assert outlines is not None
    return outlines


@settings(max_examples=tried(40), deadline=None)
@given(
    shape=st.sampled_from(SHAPES),
    radii_mm=st.lists(st.floats(5, 400), min_size=1, max_size=6),
    turned_rad=st.floats(-math.pi, math.pi),
)
def test_outlines_made_at_once_are_those_made_one_by_one(
    shape: tuple[FloatArray, FloatArray], radii_mm: list[float], turned_rad: float
) -> None:
    points_mm = at_radii(shape[0], radii_mm, turned_rad)

    together = made(points_mm, shape[1])

    alone = Outlines.joined([made(points_mm[[place]], shape[1]) for place in range(len(radii_mm))])
    assert np.array_equal(together.reach_mm, alone.reach_mm)
    for name in ("distance_mm", "direction_rad", "round_mm", "far", "above"):
        assert np.array_equal(getattr(together.curves, name), getattr(alone.curves, name), equal_nan=name == "round_mm")
    for strips, others in ((together.by_angle, alone.by_angle), (together.by_radius, alone.by_radius)):
        for name in ("outline", "from_to", "low", "high"):
            assert np.array_equal(getattr(strips, name), getattr(others, name))


@settings(max_examples=tried(40), deadline=None)
@given(
    shape=st.sampled_from(SHAPES),
    radius_mm=st.floats(5, 200),
    turned_rad=st.floats(-math.pi, math.pi),
    share=st.floats(0.01, 0.99),
)
def test_the_strips_over_a_ray_leave_what_shapely_measures_on_it(
    shape: tuple[FloatArray, FloatArray], radius_mm: float, turned_rad: float, share: float
) -> None:
    [points_mm] = at_radii(shape[0], [radius_mm], turned_rad)
    outlines = made(points_mm[None], shape[1])
    strips = outlines.by_angle
    from_rad, to_rad = strips.from_to.min(), strips.from_to.max()
    ray_rad = from_rad + share * (to_rad - from_rad)

    over = np.flatnonzero((strips.from_to[:, 0] <= ray_rad) & (ray_rad < strips.from_to[:, 1]))
    at_rad = np.full(len(over), ray_rad)
    ends_mm = (outlines.curves.of(edge[over]).radius_mm(at_rad) for edge in (strips.high, strips.low))

    area = shapely.Polygon(points_mm)
    if shape[1].any():
        middles = shapely.LineString([points_mm[[0, 1]].mean(axis=0), points_mm[[2, 3]].mean(axis=0)])
        area = middles.buffer(0.6, quad_segs=400)
    ray = shapely.LineString([(0, 0), (300 * math.cos(ray_rad), 300 * math.sin(ray_rad))])
    measured_mm = shapely.length(shapely.intersection(ray, area))
    # where a ray runs along a straight side, or just touches a round end, the polygon's ray may do neither
    assert sum(next(ends_mm) - next(ends_mm)) == pytest.approx(measured_mm, abs=0.05 if shape[1].any() else 1e-5)


def test_a_square_reaches_from_its_middle_to_its_corners() -> None:
    square = np.array([(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)])

    outlines = made(at_radii(square, [10.0, 20.0]), np.zeros(4))

    assert outlines.reach_mm.tolist() == [[9.0, pytest.approx(math.hypot(11, 1))], [19.0, math.hypot(21, 1)]]
    # near and far side each have their foot at an angle of 0: six pieces, of which rays cross two at a time
    assert np.bincount(outlines.by_angle.outline).tolist() == [4, 4]


def test_one_outline_behind_the_centre_leaves_none() -> None:
    square = np.array([(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)])

    assert outlines_of(at_radii(square, [10.0, 0.5, 20.0]), np.zeros(4)) is None


def test_an_outline_of_no_size_leaves_none() -> None:
    assert outlines_of(np.full((1, 4, 2), 7.0), np.zeros(4)) is None
    assert outlines_of(np.full((1, 4, 2), 7.0), ROUND_ENDS) is None
