"""How far it is from stop to stop, in a table or worked out one by one: against the formula."""

import math

import numpy as np
import pytest

from layout.cut.ways import MOST_IN_A_TABLE, NOT_NEXT_MM, ways_mm


@pytest.mark.parametrize("count", [2, 40, MOST_IN_A_TABLE, MOST_IN_A_TABLE + 1])
def test_ways_are_as_long_as_between_two_places_and_longer_than_any_trip_where_stops_are_kept_apart(count: int) -> None:
    dice = np.random.default_rng(count)
    places_mm = dice.uniform(-100, 100, (count, 2)).round(6)
    apart: list[set[int]] = [set() for _ in range(count)]
    for one, other in dice.integers(0, count, (count, 2)).tolist():
        if one != other:
            apart[one].add(other)
            apart[other].add(one)
    # Of each stop one near it is told beforehand.
    (x_mm, y_mm), nexts = places_mm.T.tolist(), [(one + 1) % count for one in range(count)]

    def plain_mm(one: int, other: int) -> float:
        dx_mm, dy_mm = x_mm[one] - x_mm[other], y_mm[one] - y_mm[other]
        return math.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)

    told = [[] if other in apart[one] else [(other, plain_mm(one, other))] for one, other in enumerate(nexts)]
    ways = ways_mm(places_mm, apart, told)

    for one in range(count):
        plain = [plain_mm(one, other) + NOT_NEXT_MM * (other in apart[one]) for other in range(count)]
        assert [ways[one][other] for other in range(count)] == plain
