"""From which strikes a press goes to each at the least cost: what its order is made shorter by."""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import BoolArray, IntArray
from layout.mechanics.table import SHARES, Table

NEIGHBOURS = 16  # nearest strikes after which a run is tried
NO_STRIKE = -1  # where a way begins or ends
FIRST_WINDOW = 48  # strikes looked at before and behind each; most of a large disc find theirs among them
_CHUNK = 512  # rows of a table of costs held at once, so that memory stays small


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NearStrikes:
    """For each strike, where a way may come from: the strikes that cost least, the best first, then NO_STRIKE.

    Attributes:
        strike: Shape (n, k + 1).
        cost: Shape (n, k + 1). Of going from there to it; from NO_STRIKE 0.
    """

    strike: IntArray
    cost: IntArray


def near_strikes(table: Table) -> NearStrikes:
    """The NEIGHBOURS strikes from which each is reached at the least cost, the lower index first between equals.

    Only a window of strikes at angles round about is looked at. What lies outside it costs at least the turn to the
    window's nearer end; where that does not settle it, the window is doubled.

    Args:
        table: Two strikes or more.
    """
    count = len(table.turn_ticks)
    kept = min(NEIGHBOURS, count - 1)
    by_angle = np.argsort(table.turn_ticks, kind="stable")
    keys = np.empty((count, kept), dtype=np.int64)
    left, window = np.arange(count), max(FIRST_WINDOW, kept)
    while len(left):
        unsettled = []
        for begin in range(0, len(left), _CHUNK):
            some = left[begin : begin + _CHUNK]
            best, settled = _best_in_window(table, by_angle, some, window, kept)
            keys[by_angle[some]] = best
            unsettled.append(some[~settled])
        left, window = np.concatenate(unsettled), 2 * window
    nowhere = np.full((count, 1), NO_STRIKE)
    return NearStrikes(
        strike=np.concatenate([keys % count, nowhere], axis=1),
        cost=np.concatenate([keys // count, np.zeros_like(nowhere)], axis=1),
    )


def _best_in_window(
    table: Table, by_angle: IntArray, some: IntArray, window: int, kept: int
) -> tuple[IntArray, BoolArray]:
    """The best of each window: shape (m, k), cost · n + strike, rising; and shape (m,), whether none outside is better.

    Args:
        table: The strikes.
        by_angle: Shape (n,). The strikes in order of their angles.
        some: Shape (m,). Places in that order of the strikes to be reached.
        window: Strikes looked at before and behind each.
        kept: How many of them are wanted.
    """
    count = len(by_angle)
    sees_all = 2 * window + 1 >= count
    steps = np.arange(1, count) if sees_all else np.delete(np.arange(-window, window + 1), window)
    reached = by_angle[some]
    others = by_angle[(some[:, None] + steps) % count]
    # One whole number holds both the cost and the strike, so that no two are equal and the lower strike comes first.
    keys = table.cost(others, reached[:, None]) * count + others
    best = np.sort(np.partition(keys, kept - 1, axis=1)[:, :kept], axis=1)
    if sees_all:
        return best, np.ones(len(some), dtype=np.bool_)
    ends = table.turn_ticks[others[:, [0, -1]]]
    turned = np.mod((ends - table.turn_ticks[reached][:, None]) * (-1, 1), table.full_turn_ticks).min(axis=1)
    return best, best[:, -1] // count < SHARES * turned
