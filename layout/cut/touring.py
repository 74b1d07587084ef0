"""A short round trip over many stops, some of which must not follow one another.

A travelling salesman's round trip by well-known steps: a start along a Hilbert curve, stretches reversed (2-opt,
G. A. Croes, 1958), up to three stops moved elsewhere (Or-opt, I. Or, 1976), both among near stops only; then two
neighbouring stretches exchanged here and there and all mended round about, kept where that is shorter (iterated
local search, H. R. Lourenço, O. C. Martin, T. Stützle, 2003). No dice and no clock: the same stops always give the
same trip.
"""

import math
from collections import deque
from collections.abc import Iterable
from dataclasses import dataclass, field
from itertools import chain

import numpy as np
import shapely

from layout.mechanics.arrays import FloatArray, IntArray, frozen_ints

NEAR_STOPS = 8  # stops looked at round each; with 5 the trips come out 1 % longer, with 12 not shorter
MOST_MOVED = 3  # stops moved together at once; as in Or's own work
EXCHANGES_PER_STOP = 3  # stretches exchanged on trial; with 2 some trips come out 0.3 % longer
MOST_EXCHANGES = 800  # stretches exchanged on trial; 0.15 s, and ten times as many gain 0.5 %
LONGEST_STRETCH = 20  # stops that two exchanged stretches hold together; longer ones take more time than they gain
LEAST_GAIN_MM = 1e-6  # mm; a nanometre, the grain of the stops
_GRAIN_DIGITS = 6  # of a stop's place in mm: what processors round apart decides nothing
_NOT_NEXT_MM = 1e7  # mm; added where two stops must not follow one another: more than any trip could save
_CURVE_BITS = 16  # a Hilbert curve of 65,536 places each way: 0.03 mm apart on the largest disc
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
    trip = _Trip(
        x_mm=places_mm[:, 0].tolist(),
        y_mm=places_mm[:, 1].tolist(),
        apart=_partners(apart, count + 1),
        order=_along_a_hilbert_curve(places_mm).tolist(),
    )
    trip.near_mm = _near(places_mm, trip)
    trip.mend(list(trip.order))
    for number in range(min(EXCHANGES_PER_STOP * count, MOST_EXCHANGES)):
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


def _along_a_hilbert_curve(places_mm: FloatArray) -> IntArray:
    """Shape (n,). The order of places along the curve (D. Hilbert, 1891), quadrant by quadrant."""
    low_mm, most = places_mm.min(axis=0), (1 << _CURVE_BITS) - 1
    size_mm = float((places_mm.max(axis=0) - low_mm).max()) or 1.0
    x, y = ((places_mm - low_mm) / size_mm * most).astype(np.int64).T
    along = np.zeros(len(places_mm), dtype=np.int64)
    for bit in reversed(range(_CURVE_BITS)):
        half = 1 << bit
        right, up = (x & half) > 0, (y & half) > 0
        along += half * half * ((3 * right) ^ up)
        x, y = x & (half - 1), y & (half - 1)
        # The lower quadrants are walked along their diagonals, the right one from the other end.
        x, y = np.where(right & ~up, half - 1 - x, x), np.where(right & ~up, half - 1 - y, y)
        x, y = np.where(up, x, y), np.where(up, y, x)
    return np.argsort(along, kind="stable")


def _near(places_mm: FloatArray, trip: "_Trip") -> list[list[tuple[int, float]]]:
    """For each place the nearest that may follow it, and how far they are, the nearest first."""
    count = len(places_mm)
    points = np.asarray(shapely.points(places_mm), dtype=np.object_)
    tree = shapely.STRtree(points)
    span_mm = np.ptp(places_mm, axis=0)
    reach_mm = max(math.hypot(*span_mm) / math.sqrt(count), LEAST_GAIN_MM)
    near: list[list[tuple[int, float]]] = [[] for _ in range(count)]
    left = np.arange(count)
    while len(left):
        source, target = tree.query(points[left], predicate="dwithin", distance=reach_mm)
        found: dict[int, list[int]] = {place: [] for place in left.tolist()}
        for one, other in zip(left[source].tolist(), target.tolist(), strict=True):
            if other != one and other not in trip.apart[one]:
                found[one].append(other)
        whole = reach_mm > math.hypot(*span_mm)
        for place, others in found.items():
            if len(others) >= NEAR_STOPS or whole:
                ranked = sorted((trip.plain_mm(place, other), other) for other in others)
                near[place] = [(other, away_mm) for away_mm, other in ranked[:NEAR_STOPS]]
        left = np.array([place for place in left.tolist() if not near[place] and not whole], dtype=np.int64)
        reach_mm *= 2
    return near


@dataclass(slots=True, eq=False)
class _Trip:
    """A round trip that is being shortened. A way round, `ahead`, is 1 along the order or -1 against it."""

    x_mm: list[float]
    y_mm: list[float]
    apart: list[set[int]]
    order: list[int]
    place: list[int] = field(default_factory=list)
    near_mm: list[list[tuple[int, float]]] = field(default_factory=list)
    reversals: list[tuple[int, int]] = field(default_factory=list)
    gained_mm: float = 0.0

    def __post_init__(self) -> None:
        self.place = [0] * len(self.order)
        for place, stop in enumerate(self.order):
            self.place[stop] = place

    def plain_mm(self, one: int, other: int) -> float:
        dx, dy = self.x_mm[one] - self.x_mm[other], self.y_mm[one] - self.y_mm[other]
        return math.sqrt(dx * dx + dy * dy)  # rounded the same by every processor, which hypot is not

    def cost_mm(self, one: int, other: int) -> float:
        dx, dy = self.x_mm[one] - self.x_mm[other], self.y_mm[one] - self.y_mm[other]
        away_mm = math.sqrt(dx * dx + dy * dy)
        return away_mm + _NOT_NEXT_MM if other in self.apart[one] else away_mm

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
        order, place, cost_mm, count = self.order, self.place, self.cost_mm, len(self.order)
        for ahead in (1, -1):
            b = order[(place[a] + ahead) % count]
            ab_mm = cost_mm(a, b) - LEAST_GAIN_MM
            for c, ac_mm in self._candidates(a, b):
                if ab_mm <= ac_mm:
                    break
                d = order[(place[c] + ahead) % count]
                if a == d or b == c:
                    continue
                if ab_mm - ac_mm + cost_mm(c, d) > cost_mm(b, d):
                    self._join(a, b, c, d)
                    return a, b, c, d
        return ()

    def _candidates(self, a: int, b: int) -> Iterable[tuple[int, float]]:
        """The stops that may come to stand beside a: the near ones, then all where b must not stay there."""
        if b not in self.apart[a]:
            return self.near_mm[a]
        others = ((c, self.plain_mm(a, c)) for c in range(len(self.order)) if c != a and c not in self.apart[a])
        return chain(self.near_mm[a], others)

    def _move_a_few(self, a: int) -> tuple[int, ...]:
        """Or-opt at a stop: a and up to two stops beside it move to where a stands beside a near stop."""
        order, place, cost_mm = self.order, self.place, self.cost_mm
        count, near_mm = len(order), self.near_mm[a]
        most = min(MOST_MOVED, count - 3)
        if not near_mm:
            return ()
        nearest_mm = near_mm[0][1]
        for ahead in (1, -1):
            p, e, moved = order[(place[a] - ahead) % count], a, [a]
            pa_mm = cost_mm(p, a)
            while len(moved) <= most:
                q = order[(place[e] + ahead) % count]
                gain_mm = pa_mm + cost_mm(e, q) - cost_mm(p, q) - LEAST_GAIN_MM
                if gain_mm > nearest_mm:
                    for c, ca_mm in near_mm:
                        if gain_mm <= ca_mm:
                            break
                        if c in moved:
                            continue
                        for side in (ahead, -ahead):
                            d = order[(place[c] + side) % count]
                            if d not in moved and gain_mm - ca_mm > cost_mm(e, d) - cost_mm(c, d):
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
        self.gained_mm += self.cost_mm(a, b) + self.cost_mm(c, d) - self.cost_mm(a, c) - self.cost_mm(b, d)
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
