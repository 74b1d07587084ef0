"""A short round trip over many stops, some of which must not follow one another.

A travelling salesman's round trip by well-known steps: a start along the ways that save most (G. Clarke and J. W.
Wright, 1964), stretches reversed (2-opt, G. A. Croes, 1958), up to three stops moved elsewhere (Or-opt, I. Or,
1976), both among near stops only; then two neighbouring stretches exchanged here and there and all mended round
about, kept where that is shorter (iterated local search, H. R. Lourenço, O. C. Martin, T. Stützle, 2003). No dice and
no clock: the same stops always give the same trip.
"""

import math
from collections import deque
from collections.abc import Iterable
from dataclasses import dataclass, field
from itertools import chain

import numpy as np

from layout.cut.first_trip import first_trip
from layout.cut.near_stops import near_stops
from layout.mechanics.arrays import FloatArray, IntArray, frozen_ints

MOST_MOVED = 3  # stops moved together at once; as in Or's own work
EXCHANGES_PER_STOP = 3  # stretches exchanged on trial; with 1 trips of few stops come out longer, with 5 not shorter
MOST_EXCHANGES = 150  # stretches exchanged on trial; 25 ms, and three times as many gain 0.6 %
EXCHANGES_BY_STOPS = 75_000  # over the stops: at 2,000 all 150 would gain 1 % and take half as long again
LONGEST_STRETCH = 100  # stops that two exchanged stretches hold together; with 20 the trips come out 0.6 % longer
LEAST_GAIN_MM = 1e-6  # mm; a nanometre, the grain of the stops
_GRAIN_DIGITS = 6  # of a stop's place in mm: what processors round apart decides nothing
_NOT_NEXT_MM = 1e7  # mm; added where two stops must not follow one another: more than any trip could save
_GOLDEN = (math.sqrt(5) - 1) / 2  # its multiples spread evenly over a turn (H. Weyl, 1916)


def short_round_trip(stops_mm: FloatArray, apart: IntArray) -> IntArray:
    """The order of stops on a short round trip from the origin and back to it.

    Args:
        stops_mm: Shape (n, 2).
        apart: Shape (m, 2). Pairs of stops that must not follow one another; they do so only where that cannot be
            helped. It can wherever no two stops have, together, as many such partners as there are stops.

    Returns:
        Shape (n,). Indices of the stops; empty without stops.
    """
    stops_mm = np.round(stops_mm, _GRAIN_DIGITS)
    count = len(stops_mm)
    if count <= 1:
        return frozen_ints(range(count))
    home = count
    places_mm = np.concatenate([stops_mm, np.zeros((1, 2))])
    partners = _partners(apart, count + 1)
    near = near_stops(places_mm, partners)
    x_mm, y_mm = places_mm.T.tolist()
    trip = _Trip(
        ways_mm=[_Ways(stop, x_mm, y_mm, partners[stop]) for stop in range(count + 1)],
        apart=partners,
        near_mm=near.by_stop(count + 1),
        order=first_trip(places_mm, near),
    )
    trip.mend(list(trip.order))
    for number in range(min(EXCHANGES_PER_STOP * count, MOST_EXCHANGES, EXCHANGES_BY_STOPS // count)):
        trip.exchange(number)
    at = trip.order.index(home)
    order = trip.order[at + 1 :] + trip.order[:at]
    return frozen_ints(order if order[0] <= order[-1] else order[::-1])


def _partners(apart: IntArray, count: int) -> list[set[int]]:
    partners: list[set[int]] = [set() for _ in range(count)]
    for one, other in apart.tolist():
        partners[one].add(other)
        partners[other].add(one)
    return partners


class _Ways(dict[int, float]):
    """How far it is from one stop to any other, each worked out when it is first asked for."""

    __slots__ = ("_apart", "_one", "_x_mm", "_y_mm")

    def __init__(self, one: int, x_mm: list[float], y_mm: list[float], apart: set[int]) -> None:
        self._one, self._x_mm, self._y_mm, self._apart = one, x_mm, y_mm, apart

    def __missing__(self, other: int) -> float:
        dx_mm, dy_mm = self._x_mm[self._one] - self._x_mm[other], self._y_mm[self._one] - self._y_mm[other]
        away_mm = math.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)  # rounded the same by every processor, which hypot is not
        self[other] = away_mm + _NOT_NEXT_MM if other in self._apart else away_mm
        return self[other]


@dataclass(slots=True, eq=False)
class _Trip:
    """A round trip that is being shortened. A way round, `ahead`, is 1 along the order or -1 against it."""

    ways_mm: list[_Ways]
    apart: list[set[int]]
    near_mm: list[list[tuple[int, float]]]
    order: list[int]
    place: list[int] = field(default_factory=list)
    reversals: list[tuple[int, int]] = field(default_factory=list)
    gained_mm: float = 0.0

    def __post_init__(self) -> None:
        self.place = [0] * len(self.order)
        for place, stop in enumerate(self.order):
            self.place[stop] = place

    def after(self, stop: int) -> int:
        return self.order[self.place[stop] + 1 - len(self.order)]

    def mend(self, stops: list[int]) -> None:
        """Shorten the trip round some stops, and round all that this changes, till nothing more helps."""
        waiting, queued = deque(stops), set(stops)
        while waiting:
            stop = waiting.popleft()
            queued.discard(stop)
            while changed := self._reverse_a_stretch(stop) or self._move_a_few(stop):
                waiting.extend(one for one in changed if one not in queued)
                queued.update(changed)

    def exchange(self, number: int) -> None:
        """Exchange two neighbouring stretches and mend; go back where the trip is no shorter for it."""
        count = len(self.order)
        longest = min(LONGEST_STRETCH, count - 2)
        first = 1 + int(longest / 2 * (number * math.sqrt(2) % 1))
        second = 1 + int(longest / 2 * (number * math.sqrt(3) % 1))
        begin = int(count * (number * _GOLDEN % 1))
        ends = [self.order[(begin + step) % count] for step in (0, 1, first, first + 1, first + second)]
        last = self.after(ends[-1])
        if first + second + 1 >= count:
            return
        a, b, c, d, e = ends
        self.reversals.clear()
        self.gained_mm = 0.0
        self._join(a, b, e, last)  # a [b … c] [d … e] last becomes a e … d c … b last
        self._join(a, e, d, c)  # a d … e c … b last
        self._join(e, c, b, last)  # a d … e b … c last
        self.mend(list(dict.fromkeys((*ends, last))))
        if self.gained_mm <= LEAST_GAIN_MM:
            for begin, end in reversed(self.reversals):
                self._turn_round(begin, end)

    def _reverse_a_stretch(self, a: int) -> tuple[int, ...]:
        """2-opt at a stop: a–b and c–d become a–c and b–d. The stops it changes; none where nothing helps."""
        order, place, ways_mm, count = self.order, self.place, self.ways_mm, len(self.order)
        for ahead in (1, -1):
            b = order[(place[a] + ahead) % count]
            ab_mm = ways_mm[a][b] - LEAST_GAIN_MM
            for c, ac_mm in self._candidates(a, b):
                if ab_mm <= ac_mm:
                    break
                d = order[(place[c] + ahead) % count]
                if a == d or b == c:
                    continue
                if ab_mm - ac_mm + ways_mm[c][d] > ways_mm[b][d]:
                    self._join(a, b, c, d)
                    return a, b, c, d
        return ()

    def _candidates(self, a: int, b: int) -> Iterable[tuple[int, float]]:
        """The stops that may come to stand beside a: the near ones, then all where b must not stay there."""
        if b not in self.apart[a]:
            return self.near_mm[a]
        others = ((c, self.ways_mm[a][c]) for c in range(len(self.order)) if c != a and c not in self.apart[a])
        return chain(self.near_mm[a], others)

    def _move_a_few(self, a: int) -> tuple[int, ...]:
        """Or-opt at a stop: a and up to two stops beside it move to where a stands beside a near stop."""
        order, place, ways_mm = self.order, self.place, self.ways_mm
        count, near_mm = len(order), self.near_mm[a]
        most = min(MOST_MOVED, count - 3)
        if not near_mm:
            return ()
        nearest_mm = near_mm[0][1]
        for ahead in (1, -1):
            p, e, moved = order[(place[a] - ahead) % count], a, [a]
            pa_mm = ways_mm[p][a]
            while len(moved) <= most:
                q = order[(place[e] + ahead) % count]
                gain_mm = pa_mm + ways_mm[e][q] - ways_mm[p][q] - LEAST_GAIN_MM
                if gain_mm > nearest_mm:
                    for c, ca_mm in near_mm:
                        if gain_mm <= ca_mm:
                            break
                        if c in moved:
                            continue
                        for side in (ahead, -ahead):
                            d = order[(place[c] + side) % count]
                            if d not in moved and gain_mm - ca_mm > ways_mm[e][d] - ways_mm[c][d]:
                                self._move((p, a, e, q), c, d, turned=side == ahead)
                                return p, a, e, q, c, d
                e = q
                moved.append(q)
        return ()

    def _move(self, run: tuple[int, int, int, int], c: int, d: int, *, turned: bool) -> None:
        """Move the stops from a to e, which stand between p and q, between c and d, so that a stands beside c."""
        p, a, e, q = run
        if not turned:
            c, d = d, c
        self._join(p, a, c, d)  # p a … e q … c d becomes p c … q e … a d
        self._join(p, c, q, e)  # p q … c e … a d
        if turned:
            self._join(c, e, a, d)  # p q … c a … e d

    def _join(self, a: int, b: int, c: int, d: int) -> None:
        """Turn a–b and c–d into a–c and b–d, where b comes after a and d after c, both one way round."""
        ways_mm = self.ways_mm
        self.gained_mm += ways_mm[a][b] + ways_mm[c][d] - ways_mm[a][c] - ways_mm[b][d]
        if self.after(a) == b:
            self._turn_round(self.place[b], self.place[c])
        else:
            self._turn_round(self.place[a], self.place[d])

    def _turn_round(self, begin: int, end: int) -> None:
        """Reverse the stops from one place of the order to another; or all others, which is the same round trip."""
        order, place, count = self.order, self.place, len(self.order)
        inside = (end - begin) % count + 1
        if 2 * inside > count:
            begin, end, inside = (end + 1) % count, (begin - 1) % count, count - inside
        self.reversals.append((begin, end))
        for _ in range(inside // 2):
            one, other = order[begin], order[end]
            order[begin], place[other] = other, begin
            order[end], place[one] = one, end
            begin = begin + 1 if begin + 1 < count else 0
            end = end - 1 if end else count - 1
