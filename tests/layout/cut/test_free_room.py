"""Room for letters, found by numbers first: against a plain look at every place."""

import math

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from shapely.geometry.base import BaseGeometry

from layout.cut.free_room import FIRST_PLACES, free_room
from layout.mechanics.arrays import FloatArray
from tests.thorough import tried

# A disc of 60 mm whose tracks take the ring from 30 to 45 mm, with a hole for a pin; and what is left with a notch.
RINGS = (
    shapely.Point(0, 0)
    .buffer(60)
    .difference(shapely.Point(0, 0).buffer(45))
    .union(shapely.Point(0, 0).buffer(30).difference(shapely.Point(0, 0).buffer(5)))
    .difference(shapely.Point(18, 3).buffer(4))
)
ROOMS = [RINGS, RINGS.difference(shapely.box(-70, -70, -40, 70)), shapely.Point(50, 0).buffer(9), shapely.Polygon()]


def boxes_of(sizes_mm: list[tuple[float, float]]) -> tuple[FloatArray, FloatArray]:
    """Boxes under one another, each about x = 0: their lower left and upper right corners."""
    top_mm = -np.cumsum([0.0, *(height_mm for _, height_mm in sizes_mm)])
    half_mm = np.array([width_mm for width_mm, _ in sizes_mm]) / 2
    return np.column_stack([-half_mm, top_mm[1:]]), np.column_stack([half_mm, top_mm[:-1]])


def plain_first_fit_mm(
    room: BaseGeometry, centres_mm: FloatArray, low_mm: FloatArray, high_mm: FloatArray
) -> list[float] | None:
    fits = shapely.contains_xy(room, centres_mm)
    for low, high in zip(low_mm, high_mm, strict=True):
        fits &= shapely.covers(room, shapely.box(*(centres_mm + low).T, *(centres_mm + high).T))
    return centres_mm[fits].tolist()[0] if fits.any() else None


@pytest.mark.parametrize("shape", ROOMS, ids=["two rings", "two rings cut", "a piece off the centre", "none"])
@settings(max_examples=tried(25), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    sizes_mm=st.lists(st.tuples(st.floats(0.5, 20), st.floats(0.5, 6)), min_size=1, max_size=4),
    turn_rad=st.sampled_from([0.0, 0.4, -2.0]),
)
def test_the_first_place_with_room_is_the_first_that_a_plain_look_finds(
    shape: BaseGeometry, seed: int, sizes_mm: list[tuple[float, float]], turn_rad: float
) -> None:
    centres_mm = np.random.default_rng(seed).uniform(-60, 60, (FIRST_PLACES + 30, 2))
    low_mm, high_mm = boxes_of(sizes_mm)

    room = free_room(shape).turned(turn_rad)
    found_mm = room.first_fit_mm(room.centres_within_mm(centres_mm), low_mm, high_mm)

    plain_mm = plain_first_fit_mm(room.shape, centres_mm, low_mm, high_mm)
    assert (None if found_mm is None else found_mm.tolist()) == plain_mm


def test_a_box_that_just_touches_both_edges_of_a_ring_has_room() -> None:
    # A square room about the centre, its corners 10·√2 from it: a box as large as the room touches all its edges.
    room = free_room(shapely.box(-10, -10, 10, 10))

    fits_mm = room.first_fit_mm(np.zeros((1, 2)), np.array([[-10.0, -10.0]]), np.array([[10.0, 10.0]]))

    assert fits_mm is not None
    assert room.rings_mm.tolist() == [[0.0, math.hypot(10, 10)]]


def test_no_box_lies_across_two_pieces_though_each_end_lies_in_one() -> None:
    across, beside = np.array([[1.0, 10.0]]), np.array([[1.0, 5.0]])
    room = free_room(RINGS)

    assert room.first_fit_mm(np.array([[0.0, 37.0]]), -across, across) is None
    assert room.first_fit_mm(np.array([[0.0, 52.0]]), -beside, beside) is not None


def test_a_box_whose_corners_alone_lie_in_the_room_has_none() -> None:
    # The hole of 4 mm about (18, 3) reaches into the lower side of a box from (13, 5) to (23, 9), past no corner.
    half_mm = np.array([[5.0, 2.0]])

    assert free_room(RINGS).first_fit_mm(np.array([[18.0, 7.0]]), -half_mm, half_mm) is None
    assert free_room(RINGS).first_fit_mm(np.array([[18.0, 9.5]]), -half_mm, half_mm) is not None


def test_boxes_above_and_below_a_hole_have_no_room_where_their_centre_is_in_it() -> None:
    low_mm, high_mm = np.array([[-2.0, 5.0], [-2.0, -7.0]]), np.array([[2.0, 7.0], [2.0, -5.0]])

    assert free_room(RINGS).first_fit_mm(np.array([[18.0, 3.0]]), low_mm, high_mm) is None
    assert free_room(RINGS).first_fit_mm(np.array([[-18.0, 3.0]]), low_mm, high_mm) is not None


@pytest.mark.parametrize("only", [0, FIRST_PLACES - 1, FIRST_PLACES, FIRST_PLACES + 1, 5 * FIRST_PLACES])
def test_the_only_place_with_room_is_found_wherever_it_stands_in_the_row(only: int) -> None:
    centres_mm = np.full((5 * FIRST_PLACES + 1, 2), 0.0)
    centres_mm[only] = (-18.0, 0.0)
    half_mm = np.array([[1.0, 1.0]])

    found_mm = free_room(RINGS).first_fit_mm(centres_mm, -half_mm, half_mm)

    assert found_mm is not None
    assert found_mm.tolist() == [-18.0, 0.0]
