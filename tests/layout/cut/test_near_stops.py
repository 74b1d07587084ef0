"""The near neighbours that a round trip is made of, against all distances; and the trip it begins with."""

from itertools import pairwise

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from layout.cut.first_trip import first_trip
from layout.cut.near_stops import NEAR_STOPS, near_stops

# Few places, so that stops fall together and many are equally far; the spread makes crowds and strays.
PLACES = st.lists(
    st.tuples(st.integers(-9, 9), st.integers(-9, 9)).map(lambda at: (at[0] * abs(at[0]), at[1] * 0.5)),
    min_size=2,
    max_size=60,
)


@given(places=PLACES, seed=st.integers(0, 99))
def test_the_near_stops_are_the_nearest_of_all_that_may_follow(places: list[tuple[float, float]], seed: int) -> None:
    places_mm, dice = np.array(places), np.random.default_rng(seed)
    apart: list[set[int]] = [set() for _ in places]
    for one, other in dice.integers(0, len(places), (len(places), 2)).tolist():
        apart[one].add(other)
        apart[other].add(one)

    near = near_stops(places_mm, apart).by_stop(len(places))

    away_mm = np.sqrt(((places_mm[:, None] - places_mm[None]) ** 2).sum(axis=2))
    for one in range(len(places)):
        others = [other for other in range(len(places)) if other != one and other not in apart[one]]
        ranked = sorted((float(away_mm[one, other]), other) for other in others)
        assert [(other, far) for far, other in ranked[:NEAR_STOPS]] == near[one]


@given(places=PLACES)
def test_the_first_trip_goes_to_every_stop_once(places: list[tuple[float, float]]) -> None:
    places_mm = np.array(places)

    trip = first_trip(places_mm, near_stops(places_mm, [set() for _ in places]))

    assert sorted(trip) == list(range(len(places)))


def test_the_first_trip_goes_round_by_what_saves_most() -> None:
    # Home between two pairs of stops 10 mm off: a way within a pair saves 10 + 10 − 1 mm; one across saves nothing.
    places_mm = np.array([(-10.0, 0.0), (10.0, 0.0), (-10.0, 1.0), (10.0, 1.0), (0.0, 0.0)])

    trip = first_trip(places_mm, near_stops(places_mm, [set() for _ in places_mm]))

    beside = {frozenset(pair) for pair in pairwise(trip)}
    assert {frozenset((0, 2)), frozenset((1, 3))} <= beside
