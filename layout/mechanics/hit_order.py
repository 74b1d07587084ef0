"""The order of a press's strikes: little moving from one to the next that keeps what must come first.

Finding the shortest way through many places is the travelling salesman's problem, here open at both
ends. A way of rings is laid first: the band of tracks is cut into some rings, and each is struck round
one turn, the table turning on all the while. Then short runs of strikes are moved to where they cost
less, and runs of any length turned round where that costs less, till no such move is left (I. Or, 1976;
G. A. Croes, 1958; both from memory). Everything is whole numbers, so the same disc
gives the same order on every machine.
"""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import BoolArray, IntArray, frozen_ints
from layout.mechanics.table import Table

# Measured on the demo tune's discs: runs up to 16 gain 1 to 2 % of the moving and take nearly twice as long to find.
LONGEST_RUN = 8  # strikes moved together
NEIGHBOURS = 16  # nearest strikes after which a run is tried
MOST_PASSES = 60  # passes over all strikes; shipped discs are done within thirty
MOST_BEGINNINGS = 6  # orders by rings that are made shorter, of which the best is taken
BEGINNINGS_FOR = 3000  # strikes; with more of them there are fewer beginnings, so that none waits long
NO_STRIKE = -1  # where a way begins or ends
_CHUNK = 512  # rows of the cost table held at once, so that memory stays small


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
    near = _nearest_before(table)
    begun = sorted((length(table, order), order.tolist()) for order in _ring_orders(table))
    ways = []
    for _, rings in begun[: max(1, min(MOST_BEGINNINGS, BEGINNINGS_FOR // count))]:
        order = _with_first_things_first(rings, before)
        # Where some go round in a circle, only what the beginning keeps can be kept on.
        way = _Way(table, order, first[_kept(order, first)])
        for _ in range(MOST_PASSES):
            if not way.improve(near):
                break
        ways.append((length(table, np.array(way.order)), way.order))
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


def _nearest_before(table: Table) -> IntArray:
    """Shape (n, k). For each strike, those from which going to it costs least."""
    count = len(table.turn_ticks)
    kept = min(NEIGHBOURS, count - 1)
    every = np.arange(count)
    rows = []
    for at in range(0, count, _CHUNK):
        some = every[at : at + _CHUNK]
        cost = table.cost(every[None, :], some[:, None])
        cost[np.arange(len(some)), some] = np.iinfo(np.int64).max
        rows.append(np.argsort(cost, axis=1, kind="stable")[:, :kept])
    return np.concatenate(rows)


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class _Move:
    """A run of strikes that goes elsewhere, or turns round where it is.

    Attributes:
        loss: What the way gets longer by; below zero for a move worth making.
        head: Its first strike, as the order stands.
        run: How many strikes it has.
        target: The strike it goes after; NO_STRIKE for before all others, `head` itself where it stays.
        turned: Whether it is then struck the other way round.
    """

    loss: int
    head: int
    run: int
    target: int
    turned: bool


class _Way:
    """An order that is being made shorter."""

    def __init__(self, table: Table, order: list[int], first: IntArray) -> None:
        self.table, self.order, self.first = table, order, first

    def improve(self, near: IntArray) -> bool:
        """Make the moves that gain, the greatest gains first; False where none is left."""
        touched: set[int] = set()
        moved = False
        for move in sorted(self._runs_elsewhere(near) + self._runs_turned(near)):
            moved |= self._made(move, touched)
        return moved

    def _legs(self, one: IntArray, two: IntArray) -> IntArray:
        """Costs from strikes to strikes, where NO_STRIKE costs nothing."""
        return np.asarray(self.table.cost(one, two) * ((one >= 0) & (two >= 0)), dtype=np.int64)

    def _runs_elsewhere(self, near: IntArray) -> list[_Move]:
        order, place, around, turning = self._laid_out()
        count = len(order)
        moves: list[_Move] = []
        for run in range(1, min(LONGEST_RUN, count - 1) + 1):
            start = np.arange(count - run + 1)
            head, tail = order[start], order[start + run - 1]
            previous, following = around[start], around[start + run + 1]
            left = self._legs(previous, head) + self._legs(tail, following) - self._legs(previous, following)
            for turned, one, two in ((False, head, tail), (True, tail, head)):
                targets = np.concatenate([near[one], np.full((len(one), 1), NO_STRIKE)], axis=1)
                at = np.where(targets >= 0, place[targets], NO_STRIKE)
                stays = (at >= start[:, None] - 1) & (at < start[:, None] + run)
                next_to = around[at + 2]
                taken = self._legs(targets, one[:, None]) + self._legs(two[:, None], next_to)
                taken += turned * (turning[start + run - 1] - turning[start])[:, None]
                loss = np.where(stays, 0, taken - self._legs(targets, next_to) - left[:, None])
                best = np.argmin(loss, axis=1)
                moves += [
                    _Move(
                        loss=int(loss[place, best[place]]),
                        head=int(head[place]),
                        run=run,
                        target=int(targets[place, best[place]]),
                        turned=turned,
                    )
                    for place in np.flatnonzero(loss[start, best] < 0).tolist()
                ]
        return moves

    def _runs_turned(self, near: IntArray) -> list[_Move]:
        order, place, around, turning = self._laid_out()
        # Once turned, a run's last strike follows what stood before it: its near ones say where runs may begin.
        end = np.repeat(np.arange(len(order)), near.shape[1] + 1)
        begins = np.concatenate([place[near[order]] + 1, np.zeros((len(order), 1), dtype=np.int64)], axis=1)
        start = begins.ravel()
        start, end = start[start < end], end[start < end]
        previous, head, tail, following = around[start], order[start], order[end], around[end + 2]
        loss = self._legs(previous, tail) + self._legs(head, following) + turning[end] - turning[start]
        loss -= self._legs(previous, head) + self._legs(tail, following)
        return [
            _Move(
                loss=int(loss[place]),
                head=int(head[place]),
                run=int(end[place] - start[place] + 1),
                target=int(head[place]),
                turned=True,
            )
            for place in np.flatnonzero(loss < 0).tolist()
        ]

    def _laid_out(self) -> tuple[IntArray, IntArray, IntArray, IntArray]:
        """The order; each strike's place in it; the order between two NO_STRIKE; what turning a stretch costs.

        The last is a running sum: from place i to place k, turned round, costs sum[k] − sum[i] more.
        """
        order = np.array(self.order)
        more = self.table.cost(order[1:], order[:-1]) - self.table.cost(order[:-1], order[1:])
        around = np.concatenate([[NO_STRIKE], order, [NO_STRIKE]])
        return order, np.argsort(order), around, np.concatenate([[0], np.cumsum(more)])

    def _made(self, move: _Move, touched: set[int]) -> bool:
        """Make a move, unless one made before it in this pass changed what it was reckoned on."""
        order = self.order
        start = order.index(move.head)
        stop = start + move.run
        run = order[start:stop]
        if len(run) < move.run:
            return False
        stays = move.target == move.head
        at = NO_STRIKE if move.target == NO_STRIKE else order.index(move.target)
        reckoned_on = {*run, *order[max(start - 1, 0) : stop + 1]}
        if not stays:
            reckoned_on |= {move.target, *order[at + 1 : at + 2]} - {NO_STRIKE}
        if reckoned_on & touched or (not stays and start - 1 <= at < stop):
            return False
        rest = order[:start] + order[stop:]
        into = start if stays else at + 1 - (0 if at < start else move.run)
        changed = rest[:into] + (run[::-1] if move.turned else run) + rest[into:]
        if not _kept(changed, self.first).all():
            return False
        self.order = changed
        touched |= reckoned_on
        return True


def _kept(order: list[int], first: IntArray) -> BoolArray:
    """Shape (m,). Which of the pairs stand in the order asked for."""
    place = np.argsort(np.array(order))
    return np.asarray(place[first[:, 0]] < place[first[:, 1]])
