"""A round trip made shorter by taking two or three of its ways out and joining the stretches anew.

3-opt (S. Lin, 1965) among near stops, each way that comes shorter than what is gained so far (S. Lin and B. W.
Kernighan, 1973). A move is six stops: the ways a–b, c–d and e–f go, b–c, d–e and f–a come; or four, and d–a comes.
All moves of all stops are looked for at once, and done the best first.
"""

from dataclasses import dataclass

import numpy as np

from layout.cut.near_stops import NearStops
from layout.cut.trip import Trip
from layout.cut.ways import NOT_NEXT_MM, away_mm
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray

LEAST_GAIN_MM = 1e-6  # mm; a nanometre, the grain of the stops
NONE = -1  # for e and f of a move of four stops


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stops:
    """What a round trip goes to.

    Attributes:
        x_mm: Shape (n,).
        y_mm: Shape (n,).
        near: The near neighbours of each.
        apart: Shape (m,). Pairs that must not follow one another, as numbers that rise.
    """

    x_mm: FloatArray
    y_mm: FloatArray
    near: NearStops
    apart: IntArray

    @staticmethod
    def of(places_mm: FloatArray, near: NearStops, apart: IntArray) -> "Stops":
        """Stops by their places, shape (n, 2), and the pairs kept apart, shape (m, 2)."""
        x_mm, y_mm = np.ascontiguousarray(places_mm.T)
        return Stops(x_mm=x_mm, y_mm=y_mm, near=near, apart=np.unique(_number(apart[:, 0], apart[:, 1], len(x_mm))))

    def away_mm(self, one: IntArray, other: IntArray) -> FloatArray:
        """How far it is between stops."""
        return away_mm(self.x_mm[one] - self.x_mm[other], self.y_mm[one] - self.y_mm[other])

    def way_mm(self, one: IntArray, other: IntArray) -> FloatArray:
        """How far it is between stops, and NOT_NEXT_MM more where they must not follow one another."""
        return self.away_mm(one, other) + NOT_NEXT_MM * self.are_apart(one, other)

    def are_apart(self, one: IntArray, other: IntArray) -> BoolArray:
        """Whether stops must not follow one another."""
        if not len(self.apart):
            return np.zeros(len(one), dtype=np.bool_)
        number = _number(one, other, len(self.x_mm))
        place = np.minimum(np.searchsorted(self.apart, number), len(self.apart) - 1)
        return np.asarray(self.apart[place] == number)


def _number(one: IntArray, other: IntArray, count: int) -> IntArray:
    """A number for each pair of `count` stops, whichever is named first."""
    return np.minimum(one, other) * count + np.maximum(one, other)


def shorten(trip: Trip, stops: Stops) -> None:
    """Do all moves that shorten a trip, till none is left at any stop that a move has changed."""
    looked_at = np.arange(len(trip.order))
    while len(looked_at):
        changed = {NONE}
        for move in _moves(_Standing.of(trip, stops), stops, looked_at):
            # One not possible any more, for those done before it, is looked for anew.
            changed.update(move if _done(trip, move) else move[:1])
        looked_at = np.array(sorted(changed)[1:], dtype=np.int64)


def stops_followed_by_what_must_not(trip: Trip, stops: Stops) -> list[int]:
    """Those, in the order of the trip."""
    order = np.array(trip.order)
    found: list[int] = order[stops.are_apart(order, np.roll(order, -1))].tolist()
    return found


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Standing:
    """A trip as it stands.

    Attributes:
        place: Shape (n,). Where each stop is.
        beside: Shape (2, n). The stop before each, and the one after it.
        way_mm: Shape (2, n). How far it is to those, and more where they must not follow one another.
    """

    place: IntArray
    beside: IntArray
    way_mm: FloatArray

    @staticmethod
    def of(trip: Trip, stops: Stops) -> "_Standing":
        order, count = np.array(trip.order), len(trip.order)
        beside, way_mm = np.empty((2, count), dtype=np.int64), np.empty((2, count))
        after = np.roll(order, -1)
        beside[1, order], beside[0, after] = after, order
        along_mm = stops.way_mm(order, after)
        way_mm[1, order], way_mm[0, after] = along_mm, along_mm
        return _Standing(place=np.array(trip.place), beside=beside, way_mm=way_mm)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Begun:
    """Moves begun with a–b taken out, c joined to b and c–d taken out; shape (m,) each.

    Attributes:
        a, b, c, d: The stops.
        along: 1 where b comes after a, 0 where it comes before.
        c_at: How many steps c is from b, away from a.
        gain_mm: What is gained so far.
        is_ring: Whether d is beyond c, so that the stops from b to c are a ring by themselves.
    """

    a: IntArray
    b: IntArray
    c: IntArray
    d: IntArray
    along: IntArray
    c_at: IntArray
    gain_mm: FloatArray
    is_ring: BoolArray


def _moves(trip: _Standing, stops: Stops, looked_at: IntArray) -> list[list[int]]:
    """The best move of each stop, of those that gain anything; the best of all first.

    Args:
        trip: It.
        stops: What it goes to.
        looked_at: Shape (k,). The stops that moves begin with.
    """
    begun = _begun(trip, stops, looked_at)
    found = [_closed(begun, stops), _gone_on(begun, trip, stops)]
    gain_mm = np.concatenate([gain for _, gain in found])
    moves = np.concatenate([move for move, _ in found])
    order = np.lexsort((*moves.T[::-1], -gain_mm))
    moves = moves[order]
    _, first = np.unique(moves[:, 0], return_index=True)
    best: list[list[int]] = moves[np.sort(first)].tolist()
    return best


def _begun(trip: _Standing, stops: Stops, looked_at: IntArray) -> _Begun:
    a, along = np.tile(looked_at, 2), np.repeat([1, 0], len(looked_at))
    b, gain_mm = trip.beside[along, a], trip.way_mm[along, a]
    row, rank = np.nonzero(stops.near.away_mm[b] < gain_mm[:, None])
    a, b, along = a[row], b[row], along[row]
    c, gain_mm = stops.near.other[b, rank], gain_mm[row] - stops.near.away_mm[b, rank]
    count = len(trip.place)
    c_at = _steps(trip, b, c, along)
    # d is before c, and another stop than b; or beyond c, and another than a, while two ways at least lead to c.
    before, beyond = np.flatnonzero(c_at > 1), np.flatnonzero((c_at > 1) & (c_at < count - 2))
    row = np.concatenate([before, beyond])
    side = np.concatenate([1 - along[before], along[beyond]])
    c = c[row]
    return _Begun(
        a=a[row],
        b=b[row],
        c=c,
        d=trip.beside[side, c],
        along=along[row],
        c_at=c_at[row],
        gain_mm=gain_mm[row] + trip.way_mm[side, c],
        is_ring=np.arange(len(row)) >= len(before),
    )


def _steps(trip: _Standing, begin: IntArray, stop: IntArray, along: IntArray) -> IntArray:
    """How many steps stops are from others, along the trip or against it."""
    return (trip.place[stop] - trip.place[begin]) * (2 * along - 1) % len(trip.place)


def _closed(begun: _Begun, stops: Stops) -> tuple[IntArray, FloatArray]:
    """Moves of four stops that gain, shape (m, 6), and how much."""
    row = np.flatnonzero(~begun.is_ring)
    gains, gain_mm = _gains(begun.gain_mm[row], begun.d[row], begun.a[row], stops)
    row = row[gains]
    none = np.full(len(row), NONE)
    return np.column_stack([begun.a[row], begun.b[row], begun.c[row], begun.d[row], none, none]), gain_mm


def _gains(gain_mm: FloatArray, last: IntArray, a: IntArray, stops: Stops) -> tuple[IntArray, FloatArray]:
    """Which moves gain with the way from the last stop to a, and how much."""
    row = np.flatnonzero(gain_mm - stops.away_mm(last, a) > LEAST_GAIN_MM)
    with_it_mm = gain_mm[row] - stops.way_mm(last[row], a[row])
    is_gain = with_it_mm > LEAST_GAIN_MM
    return row[is_gain], with_it_mm[is_gain]


def _gone_on(begun: _Begun, trip: _Standing, stops: Stops) -> tuple[IntArray, FloatArray]:
    """Moves of six stops that gain, shape (m, 6), and how much."""
    row, rank = np.nonzero(stops.near.away_mm[begun.d] < (begun.gain_mm - LEAST_GAIN_MM)[:, None])
    d = begun.d[row]
    e, gain_mm = stops.near.other[d, rank], begun.gain_mm[row] - stops.near.away_mm[d, rank]
    c_at, along, is_ring = begun.c_at[row], begun.along[row], begun.is_ring[row]
    e_at = _steps(trip, begun.b[row], e, along)
    is_inside = e_at < c_at
    # Of a ring either way beside e can go. What is no ring is turned round from b to d: in there f comes before e.
    back = np.flatnonzero(np.where(is_ring, is_inside & (e_at > 1), (e_at > c_at) & (e_at < len(trip.place) - 1)))
    onward = np.flatnonzero(np.where(is_ring, is_inside, e_at < c_at - 2))
    chosen = np.concatenate([back, onward])
    side = np.concatenate([1 - along[back], along[onward]])
    row, e = row[chosen], e[chosen]
    a, f = begun.a[row], trip.beside[side, e]
    gains, gain_mm = _gains(gain_mm[chosen] + trip.way_mm[side, e], f, a, stops)
    row = row[gains]
    moves = np.column_stack([begun.a[row], begun.b[row], begun.c[row], begun.d[row], e[gains], f[gains]])
    return moves, gain_mm


def _done(trip: Trip, move: list[int]) -> bool:
    """Do a move, if all ways that it takes out are still there and run as they did."""
    a, b = move[:2]
    ahead = trip.steps(a, b)
    if ahead not in (1, len(trip.order) - 1):
        return False
    turn = 1 if ahead == 1 else -1
    joins = _joins(move, [turn * trip.steps(b, stop) % len(trip.order) for stop in move[2:] if stop != NONE])
    for join in joins:
        trip.join(*join)
    return bool(joins)


def _joins(move: list[int], places: list[int]) -> list[tuple[int, int, int, int]]:
    """What a move joins; nothing where it is not possible.

    Args:
        move: The stops.
        places: How many steps c and d, and e and f of a move of six, are from b, away from a.
    """
    a, b, c, d, e, f = move
    c_at, d_at, *others = places
    if not others:
        return [(a, b, d, c)] if d_at == c_at - 1 else []
    e_at, f_at = others
    if d_at == c_at - 1 and ((e_at > c_at and f_at == e_at - 1) or (e_at < d_at and f_at == e_at + 1)):
        return [(a, b, d, c), (a, d, f, e)]
    if d_at == c_at + 1 and e_at < c_at and f_at == e_at - 1:
        return [(a, b, f, e), (b, e, c, d)]
    if d_at == c_at + 1 and e_at < c_at and f_at == e_at + 1:
        # The two stretches change places, neither is turned round.
        return [(a, b, c, d), (a, c, f, e), (c, e, b, d)]
    return []
