"""The order of a press's strikes: little moving from one to the next that keeps what must come first.

Finding the shortest way through many places is the travelling salesman's problem, here open at both
ends. A way of rings is laid first: the band of tracks is cut into some rings, and each is struck round
one turn, the table turning on all the while. Then it is made shorter by moves that gain, till none is
left (layout.mechanics.strike_way). Everything is whole numbers, so the same disc gives the same order on
every machine.
"""

import numpy as np

from layout.mechanics.arrays import IntArray, frozen_ints
from layout.mechanics.near_strikes import near_strikes
from layout.mechanics.strike_way import StrikeWay, kept
from layout.mechanics.table import Table

MOST_PASSES = 60  # passes over all strikes; shipped discs are done within thirty
MOST_BEGINNINGS = 6  # orders by rings that are made shorter, of which the best is taken
BEGINNINGS_FOR = 3000  # strikes; with more of them there are fewer beginnings, so that none waits long


def shortest_order(table: Table, first: IntArray) -> IntArray:
    """Shape (n,). Indices of the strikes in a good order.

    Args:
        table: The strikes; none give an empty order.
        first: Shape (m, 2). Pairs of strikes of which the first must come before the second. Where they
            go round in a circle, one of them is not kept.
    """
    count = len(table.turn_ticks)
    if count < 2:  # noqa: PLR2004 - one strike has one order
        return frozen_ints(range(count))
    before: list[list[int]] = [[] for _ in range(count)]
    for one, two in first.tolist():
        before[two].append(one)
    near = near_strikes(table)
    begun = sorted((length(table, order), order.tolist()) for order in _ring_orders(table))
    ways = []
    for _, rings in begun[: max(1, min(MOST_BEGINNINGS, BEGINNINGS_FOR // count))]:
        order = _with_first_things_first(rings, before)
        # Where some go round in a circle, only what the beginning keeps can be kept on.
        way = StrikeWay(table, order, first[kept(np.array(order), first)])
        for _ in range(MOST_PASSES):
            if not way.improve(near):
                break
        ways.append((length(table, way.order), way.order.tolist()))
    return frozen_ints(min(ways)[1])


def length(table: Table, order: IntArray) -> int:
    """What going through the strikes in this order costs; 0 for fewer than two."""
    return int(table.cost(order[:-1], order[1:]).sum())


def _ring_orders(table: Table) -> list[IntArray]:
    """One order for every number of rings, from one to the number of distinct radii."""
    turned = np.sort(table.turn_ticks)
    gaps = np.diff(np.append(turned, turned[0] + table.full_turn_ticks))
    start = turned[(int(np.argmax(gaps)) + 1) % len(turned)]  # begins after the longest stretch without strikes
    turn = np.mod(table.turn_ticks - start, table.full_turn_ticks)
    slide = table.slide_ticks
    width = int(np.ptp(slide)) + 1
    orders = []
    for rings in range(1, min(len(np.unique(slide)), len(slide)) + 1):
        ring = (slide - slide.min()) * rings // width
        orders += [np.lexsort((slide, turn, ring)), np.lexsort((slide, turn, -ring))]
    return orders


def _with_first_things_first(order: list[int], before: list[list[int]]) -> list[int]:
    """The order with every strike that must come before another drawn forward to just before it."""
    placed: dict[int, None] = {}
    opened: set[int] = set()
    for strike in order:
        stack = [strike]
        while stack:
            top = stack[-1]
            wanted = [] if top in opened else [one for one in before[top] if one not in placed and one not in opened]
            opened.add(top)
            if wanted:
                stack += reversed(wanted)
                continue
            stack.pop()
            placed.setdefault(top)
    return list(placed)
