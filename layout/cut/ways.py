"""How far it is from stop to stop: a table for few stops; for many each way once it is asked for."""

import math
from collections.abc import Sequence
from typing import Protocol

import numpy as np

from layout.mechanics.arrays import FloatArray

NOT_NEXT_MM = 1e7  # mm; added where two stops must not follow one another: more than any trip could save
MOST_IN_A_TABLE = 400  # stops; for more, a table of all ways takes longer to make than the ways that are asked for


class WaysMm(Protocol):
    """How far it is from one stop to each other one, by its index."""

    def __getitem__(self, other: int, /) -> float: ...


def away_mm(dx_mm: FloatArray, dy_mm: FloatArray) -> FloatArray:
    """How far it is, of the shape of both: rounded the same by every processor, which hypot is not."""
    return np.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)


def ways_mm(
    places_mm: FloatArray, apart: Sequence[set[int]], near_mm: Sequence[list[tuple[int, float]]]
) -> Sequence[WaysMm]:
    """For every stop how far it is to each other one.

    Args:
        places_mm: Shape (n, 2).
        apart: For each stop those that must not follow it: NOT_NEXT_MM is added to the ways between them.
        near_mm: For each stop some that may follow it and how far they are: what is asked for most.
    """
    if len(places_mm) <= MOST_IN_A_TABLE:
        return _table_mm(places_mm, apart)
    x_mm, y_mm = places_mm.T.tolist()
    ways = [_Ways(stop, x_mm, y_mm, partners) for stop, partners in enumerate(apart)]
    for known, near in zip(ways, near_mm, strict=True):
        known.update(near)
    return ways


def _table_mm(places_mm: FloatArray, apart: Sequence[set[int]]) -> list[list[float]]:
    table_mm: list[list[float]] = away_mm(*(places_mm[:, None] - places_mm).transpose(2, 0, 1)).tolist()
    for row_mm, partners in zip(table_mm, apart, strict=True):
        for other in partners:
            row_mm[other] += NOT_NEXT_MM
    return table_mm


class _Ways(dict[int, float]):
    """How far it is from one stop to any other, each worked out when it is first asked for."""

    __slots__ = ("_apart", "_one", "_x_mm", "_y_mm")

    def __init__(self, one: int, x_mm: list[float], y_mm: list[float], apart: set[int]) -> None:
        self._one, self._x_mm, self._y_mm, self._apart = one, x_mm, y_mm, apart

    def __missing__(self, other: int) -> float:
        dx_mm, dy_mm = self._x_mm[self._one] - self._x_mm[other], self._y_mm[self._one] - self._y_mm[other]
        way_mm = math.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)  # as `away_mm` tells it
        self[other] = way_mm + NOT_NEXT_MM if other in self._apart else way_mm
        return self[other]
