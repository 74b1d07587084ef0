"""Openings near each other, found by boxes first, are those that a plain look at all of them finds."""

import math

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import Cutter, Movement
from layout.mechanics.arrays import FloatArray
from layout.mechanics.openings import Openings, openings_at, radial_reach_mm
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import core_geometries
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, disc_of

QUARTER_STEPS = 256  # straight pieces to a quarter: a circle so drawn is off by 5e-6 of its radius


def crowded(movement: Movement, cutter: Cutter, count: int) -> Disc:
    """Openings anywhere on a disc, so that many are near each other and some run into each other."""
    dice = np.random.default_rng(count)
    seconds = dice.uniform(0, 0.2 * movement.revolution_s, count).tolist()
    tracks = dice.integers(1, len(movement.tracks) + 1, count).tolist()
    return disc_of(movement, list(zip(tracks, seconds, strict=True)), cutter)


def boxes(at_mm: FloatArray, half_mm: float) -> FloatArray:
    """Shape (n, 4, 2). Squares about places of shape (n, 2)."""
    corners = np.array([(-1, -1), (1, -1), (1, 1), (-1, 1)])
    return np.asarray(at_mm[:, None] + half_mm * corners)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("most_mm", [0.0, 0.5, 3.0])
def test_webs_are_the_distances_of_all_pairs_that_are_no_farther_apart(
    movement: Movement, cutter: Cutter, most_mm: float
) -> None:
    disc = crowded(movement, cutter, 150)
    cores, round_mm = core_geometries(disc.placed_mm(disc.pattern.core_points_mm)), disc.pattern.core_round_mm
    every = [(one, two) for one in range(150) for two in range(one + 1, 150)]
    plain = {(one, two): float(shapely.distance(cores[one], cores[two])) - 2 * round_mm for one, two in every}

    one, two, webs_mm = disc.openings.webs_within(most_mm)

    found = dict(zip(zip(one.tolist(), two.tolist(), strict=True), webs_mm.tolist(), strict=True))
    assert found == {pair: web_mm for pair, web_mm in plain.items() if web_mm <= most_mm}
    assert 0 < len(found) < len(every)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_pairs_come_in_the_order_in_which_the_tree_finds_them_by_distance(movement: Movement) -> None:
    openings = crowded(movement, LASER, 400).openings
    apart_mm = 2.0 + 2 * openings.round_mm
    plain = openings.tree.query(openings.cores, predicate="dwithin", distance=apart_mm)

    one, two, _ = openings.webs_within(2.0)

    assert np.array_equal([one, two], plain[:, plain[0] < plain[1]])


@given(st.floats(0.0, 5.0), st.floats(0.0, 2 * math.pi), st.floats(0.0, 1.0))
def test_two_squares_are_a_pair_where_their_distance_says_so(away_mm: float, way_rad: float, round_mm: float) -> None:
    at_mm = np.array([(0.0, 0.0), (away_mm * math.cos(way_rad), away_mm * math.sin(way_rad))])
    cores = core_geometries(boxes(at_mm, 0.5))
    web_mm = float(shapely.distance(cores[0], cores[1])) - 2 * round_mm

    openings = openings_at(boxes(at_mm, 0.5), round_mm)

    assert len(openings.webs_within(web_mm + 1e-9)[0]) == 1
    assert len(openings.webs_within(web_mm - 1e-9)[0]) == 0


def test_openings_that_touch_at_just_the_limit_are_a_pair() -> None:
    side_by_side = boxes(np.array([(0.0, 0.0), (1.5, 0.0)]), 0.5)

    assert [found.tolist() for found in openings_at(side_by_side, 0.0).webs_within(0.5)] == [[0], [1], [0.5]]


@pytest.mark.parametrize("count", [0, 1])
def test_fewer_than_two_openings_have_no_web(count: int) -> None:
    openings = openings_at(boxes(np.zeros((count, 2)), 0.5), 0.0)

    assert [len(found) for found in openings.webs_within(10.0)] == [0, 0, 0]


def test_shapes_find_the_cores_they_come_near() -> None:
    openings = openings_at(boxes(np.array([(0.0, 0.0), (4.0, 0.0), (9.0, 0.0)]), 0.5), 0.0)
    shapes = np.array([shapely.Point(9.0, 2.0), shapely.Point(2.0, 0.0)], dtype=np.object_)

    shape, core, distance_mm = openings.distances_to(shapes, 1.5)

    # 2 − 0.5 above the third; 2 − 0.5 from either of the first two
    assert sorted(zip(shape.tolist(), core.tolist(), distance_mm.tolist(), strict=True)) == [
        (0, 2, 1.5),
        (1, 0, 1.5),
        (1, 1, 1.5),
    ]


def test_the_openings_of_a_disc_are_made_once(monkeypatch: pytest.MonkeyPatch) -> None:
    made: list[Openings] = []

    def making(points_mm: FloatArray, round_mm: float) -> Openings:
        made.append(openings_at(points_mm, round_mm))
        return made[-1]

    monkeypatch.setattr("layout.place.disc.openings_at", making)
    disc, other = (disc_of(PLAIN, [(1, 10.0), (2, at_s)]) for at_s in (20.0, 25.0))

    looked_at = [disc.openings, disc.openings, other.openings]

    assert looked_at == [made[0], made[0], made[1]]
    assert disc.openings.round_mm == disc.pattern.core_round_mm


@pytest.mark.parametrize("corners", [3, 4, 8])
@pytest.mark.parametrize("count", [0, 1, 50])
def test_polygons_of_one_run_of_numbers_are_those_made_one_by_one(count: int, corners: int) -> None:
    turn_rad = np.linspace(0, 2 * np.pi, corners, endpoint=False)
    middles = np.random.default_rng(corners).uniform(-100, 100, (count, 1, 2))
    points_mm = middles + np.stack([np.cos(turn_rad), np.sin(turn_rad)], axis=-1)

    made = core_geometries(points_mm)

    assert shapely.to_wkb(made).tolist() == [shapely.to_wkb(shapely.Polygon(each)) for each in points_mm]


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
def test_how_far_a_track_reaches_is_that_of_any_opening_on_it(cutter: Cutter) -> None:
    movement = SHIPPED[0]
    reach_mm = radial_reach_mm(turning_of(movement), pattern_of(movement, cutter))
    disc = disc_of(movement, [(track, 3.0 * track) for track in range(1, 6)], cutter)

    for index, core in enumerate(disc.openings.cores):
        drawn = (
            shapely.buffer(core, disc.openings.round_mm, quad_segs=QUARTER_STEPS) if disc.openings.round_mm else core
        )
        corners_mm = np.hypot(*shapely.get_coordinates(drawn).T)
        assert reach_mm[index][0] == pytest.approx(shapely.distance(drawn, shapely.Point(0, 0)), abs=1e-5)
        assert reach_mm[index][1] == pytest.approx(corners_mm.max(), abs=1e-5)
