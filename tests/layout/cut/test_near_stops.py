"""The near neighbours that a round trip is made of, against all distances; and the trip it begins with."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.cut.first_trip import first_trip
from layout.cut.near_stops import NEAR_STOPS, near_stops

NO_PAIRS = np.zeros((0, 2), dtype=np.int64)
# Few places, so that stops fall together and many are equally far; the spread makes crowds and strays.
PLACES = st.lists(
    st.tuples(st.integers(-9, 9), st.integers(-9, 9)).map(lambda at: (at[0] * abs(at[0]), at[1] * 0.5)),
    min_size=2,
    max_size=60,
)


@given(places=PLACES, seed=st.integers(0, 99))
def test_the_near_stops_are_the_nearest_of_all_that_may_follow(places: list[tuple[float, float]], seed: int) -> None:
    places_mm, pairs = np.array(places), np.random.default_rng(seed).integers(0, len(places), (len(places), 2))
    apart = {(one, other) for pair in pairs.tolist() for one, other in (pair, pair[::-1])}

    near = near_stops(places_mm, pairs).by_stop()

    away_mm = np.sqrt(((places_mm[:, None] - places_mm[None]) ** 2).sum(axis=2))
    for one in range(len(places)):
        others = [other for other in range(len(places)) if other != one and (one, other) not in apart]
        ranked = sorted((float(away_mm[one, other]), other) for other in others)
        assert [(other, far) for far, other in ranked[:NEAR_STOPS]] == near[one]


@pytest.mark.parametrize("kind", ["anywhere", "grid", "crowds"])
def test_of_many_stops_the_near_ones_are_the_first_in_the_order_of_all_distances(kind: str) -> None:
    dice = np.random.default_rng(4)
    grid = np.stack(np.meshgrid(np.arange(20.0), np.arange(20.0)), axis=-1).reshape(-1, 2)
    crowds = dice.integers(0, 5, (400, 2)) * 50 + dice.normal(0, 1, (400, 2))
    places_mm = {"anywhere": dice.uniform(0, 100, (400, 2)), "grid": dice.permutation(grid), "crowds": crowds}[kind]

    near = near_stops(places_mm, NO_PAIRS)

    dx_mm, dy_mm = (places_mm[:, None] - places_mm[None]).transpose(2, 0, 1)
    away_mm = np.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)
    np.fill_diagonal(away_mm, np.inf)
    nearest = np.argsort(away_mm, axis=1, kind="stable")[:, :NEAR_STOPS]  # the lower index first where as far
    assert near.other.tolist() == nearest.tolist()
    assert near.away_mm.tolist() == np.take_along_axis(away_mm, nearest, axis=1).tolist()


@given(places=PLACES)
def test_the_first_trip_goes_to_every_stop_once(places: list[tuple[float, float]]) -> None:
    places_mm = np.array(places)

    trip = first_trip(places_mm, near_stops(places_mm, NO_PAIRS))

    assert sorted(trip) == list(range(len(places)))


def test_the_first_trip_takes_the_shortest_ways_first() -> None:
    # On a line at 0, 2, 5, 9 and 14 mm, home the last: ways of 2, 3, 4 and 5 mm make one piece.
    places_mm = np.array([(5.0, 0.0), (0.0, 0.0), (9.0, 0.0), (2.0, 0.0), (14.0, 0.0)])

    trip = first_trip(places_mm, near_stops(places_mm, NO_PAIRS))

    assert trip in ([1, 3, 0, 2, 4], [4, 2, 0, 3, 1])


def test_the_first_trip_goes_from_piece_to_nearest_piece() -> None:
    # Three pairs of stops 1 mm off each other, kept apart from all others: pieces at 0, 100 and 30 mm, and home at 300.
    at_mm = [0.0, 1.0, 100.0, 101.0, 30.0, 31.0, 300.0]
    places_mm = np.column_stack([at_mm, np.zeros(7)])
    pairs = np.array([(one, other) for one in range(7) for other in range(one) if one // 2 != other // 2])

    trip = first_trip(places_mm, near_stops(places_mm, pairs))

    assert trip == [0, 1, 4, 5, 2, 3, 6]
