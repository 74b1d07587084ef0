"""An order of strikes that is being made shorter by moves that gain.

Short runs of strikes go to where they cost less, and runs of any length are turned round where that costs less
(I. Or, 1976; G. A. Croes, 1958; both from memory).
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import BoolArray, IntArray
from layout.mechanics.near_strikes import NO_STRIKE, NearStrikes
from layout.mechanics.table import Table

# Measured on the demo tune's discs: runs up to 16 gain 1 to 2 % of the moving and take nearly twice as long to find.
LONGEST_RUN = 8  # strikes moved together


@dataclass(frozen=True, slots=True, kw_only=True)
class Move:
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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _LaidOut:
    """An order as it stands, with what every move is reckoned from.

    Attributes:
        order: Shape (n,). The strikes.
        around: Shape (n + 2,). The same between two NO_STRIKE.
        place: Shape (n + 1,). Where each strike stands; of NO_STRIKE, which is the last entry too, −1.
        leg: Shape (n + 1,). What the leg before each place costs, and after the last; the ends cost nothing.
        turning: Shape (n,). A running sum: a stretch from place i to place k, turned round, costs
            turning[k] − turning[i] more within.
        opened: Shape (n, k + 1). What coming to the strike at each place from its near strikes costs, less the leg
            after each of them, which goes.
        least: Shape (n, k + 1). The same, and the least that coming to the strike after the near one can cost: where
            even that loses, the leg itself need not be worked out.
    """

    order: IntArray
    around: IntArray
    place: IntArray
    leg: IntArray
    turning: IntArray
    opened: IntArray
    least: IntArray


class StrikeWay:
    """An order of strikes that is being made shorter, and keeps what must come first first.

    Attributes:
        order: Shape (n,). The strikes as they stand.
    """

    def __init__(self, table: Table, order: list[int], first: IntArray) -> None:
        self.order = np.array(order, dtype=np.int64)
        self._table, self._first = table, first
        self._place = np.argsort(self.order)

    def improve(self, near: NearStrikes) -> bool:
        """Make the moves that gain, the greatest gains first; False where none is left."""
        touched: set[int] = set()
        moved = False
        for move in self.moves(near):
            if move.head not in touched and move.target not in touched:
                moved |= self.made(move, touched)
        return moved

    def moves(self, near: NearStrikes) -> Iterator[Move]:
        """The moves that gain, the greatest gains first."""
        laid = self._laid_out(near)
        found = [self._turned_where_they_stand(near, laid)]
        for run in range(1, min(LONGEST_RUN, len(self.order) - 1) + 1):
            found += [self._moved_elsewhere(near, laid, run, turned=turned) for turned in (False, True)]
        rows = np.concatenate(found)
        rows = rows[np.lexsort(rows.T[::-1])]
        for loss, head, run, target, turned in rows.tolist():
            yield Move(loss=loss, head=head, run=run, target=target, turned=bool(turned))

    def made(self, move: Move, touched: set[int]) -> bool:
        """Make a move, unless one made before it in this pass, by the strikes it touched, changed what it rests on.

        Nor is it made where something would no longer come first that must.
        """
        order, place = self.order, self._place
        start = int(place[move.head])
        stop = start + move.run
        if stop > len(order):
            return False
        stays = move.target == move.head
        at = NO_STRIKE if move.target == NO_STRIKE else int(place[move.target])
        reckoned_on = order[max(start - 1, 0) : stop + 1].tolist()
        if not stays:
            reckoned_on += [move.target, *order[at + 1 : at + 2].tolist()]
        if not touched.isdisjoint(reckoned_on) or (not stays and start - 1 <= at < stop):
            return False
        run = order[start:stop][:: -1 if move.turned else 1]
        if stays:
            begin, changed = start, run
        elif at < start:
            begin, changed = at + 1, np.concatenate([run, order[at + 1 : start]])
        else:
            begin, changed = start, np.concatenate([order[stop : at + 1], run])
        if not self._put(begin, changed.copy()):
            return False
        touched.update(reckoned_on)
        return True

    def _put(self, begin: int, changed: IntArray) -> bool:
        """Let strikes stand otherwise from a place on; as before, and False, where first things would not be first."""
        end = begin + len(changed)
        before = self.order[begin:end].copy()
        self._stand(begin, changed)
        if (self._place[self._first[:, 0]] < self._place[self._first[:, 1]]).all():
            return True
        self._stand(begin, before)
        return False

    def _stand(self, begin: int, strikes: IntArray) -> None:
        end = begin + len(strikes)
        self.order[begin:end] = strikes
        self._place[strikes] = np.arange(begin, end)

    def _legs(self, one: IntArray, two: IntArray) -> IntArray:
        """Costs from strikes to strikes, where NO_STRIKE costs nothing."""
        return np.asarray(self._table.cost(one, two) * ((one >= 0) & (two >= 0)), dtype=np.int64)

    def _laid_out(self, near: NearStrikes) -> _LaidOut:
        order = self.order.copy()
        more = self._table.cost(order[1:], order[:-1]) - self._table.cost(order[:-1], order[1:])
        around = np.concatenate([[NO_STRIKE], order, [NO_STRIKE]])
        place = np.append(self._place, NO_STRIKE)
        leg = self._legs(around[:-1], around[1:])
        near_place = place[near.strike]
        opened = near.cost - leg[near_place + 1]
        least_to = np.append(near.cost[:, 0], 0)
        return _LaidOut(
            order=order,
            around=around,
            place=place,
            leg=leg,
            turning=np.concatenate([[0], np.cumsum(more)]),
            opened=opened[order],
            least=(opened + least_to[around[near_place + 2]])[order],
        )

    def _moved_elsewhere(self, near: NearStrikes, laid: _LaidOut, run: int, *, turned: bool) -> IntArray:
        """Shape (m, 5). For every run of so many strikes the place it gains most by going to, as `Move` tells them."""
        start = np.arange(len(laid.order) - run + 1)
        tail_at = start + run - 1
        one_at, two_at = (tail_at, start) if turned else (start, tail_at)
        saved = laid.leg[start] + laid.leg[start + run] - self._legs(laid.around[start], laid.around[start + run + 1])
        if turned:
            saved -= laid.turning[tail_at] - laid.turning[start]
        moved, choice = np.nonzero(laid.least[one_at[0] : one_at[-1] + 1] < saved[:, None])
        target = near.strike[laid.order[one_at[moved]], choice]
        at = laid.place[target]
        goes = (at < start[moved] - 1) | (at >= start[moved] + run)
        moved, choice, target, at = moved[goes], choice[goes], target[goes], at[goes]
        loss = laid.opened[one_at[moved], choice] - saved[moved]
        loss += self._legs(laid.order[two_at[moved]], laid.around[at + 2])
        best = np.lexsort((choice, loss, moved))
        best = best[loss[best] < 0]
        best = best[np.diff(moved[best], prepend=-1) > 0]
        return _rows(loss[best], laid.order[start[moved[best]]], run, target[best], turned=turned)

    def _turned_where_they_stand(self, near: NearStrikes, laid: _LaidOut) -> IntArray:
        """Shape (m, 5). All runs that it gains to turn round, as `Move` tells them."""
        # Once turned, a run's last strike follows what stood before it: its near ones say where runs may begin.
        begins = laid.place[near.strike[laid.order]] + 1
        end, choice = np.nonzero(begins < np.arange(len(laid.order))[:, None])
        start = begins[end, choice]
        loss = laid.opened[end, choice] + laid.turning[end] - laid.turning[start] - laid.leg[end + 1]
        gains = loss < 0  # without the leg after the run, which costs something
        start, end, loss = start[gains], end[gains], loss[gains]
        head = laid.order[start]
        loss = loss + self._legs(head, laid.around[end + 2])
        gains = loss < 0
        return _rows(loss[gains], head[gains], (end - start + 1)[gains], head[gains], turned=True)


def _rows(loss: IntArray, head: IntArray, run: IntArray | int, target: IntArray, *, turned: bool) -> IntArray:
    """Shape (m, 5). Moves as rows, which sort as the moves do."""
    return np.column_stack(np.broadcast_arrays(loss, head, run, target, int(turned)))


def kept(order: IntArray, first: IntArray) -> BoolArray:
    """Shape (m,). Which of the pairs `first`, shape (m, 2), stand in the order asked for."""
    place = np.argsort(order)
    return np.asarray(place[first[:, 0]] < place[first[:, 1]])
