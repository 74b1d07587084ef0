"""A round trip mended stop by stop, and shaken where that may help.

Stretches reversed (2-opt, G. A. Croes, 1958) and up to three stops moved elsewhere (Or-opt, I. Or, 1976), both among
near stops only. Two neighbouring stretches are exchanged on trial and all mended round about, kept where the trip is
shorter for it (iterated local search, H. R. Lourenço, O. C. Martin, T. Stützle, 2003).
"""

import math
from collections import deque
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import chain

from layout.cut.three_opt import LEAST_GAIN_MM
from layout.cut.trip import Trip
from layout.cut.ways import WaysMm

MOST_MOVED = 3  # stops moved together at once; as in Or's own work
LONGEST_STRETCH = 100  # stops that two exchanged stretches hold together; with 20 the trips come out 0.6 % longer
_GOLDEN = (math.sqrt(5) - 1) / 2  # its multiples spread evenly over a turn (H. Weyl, 1916)


@dataclass(slots=True, eq=False, kw_only=True)
class MendedTrip(Trip):
    """A round trip that is being shortened.

    A way round, `ahead`, is what added to a stop's place gives the place of the next stop that way: 1 − n along the
    order, for a list of n counts from its end below 0, and −1 against it.
    """

    ways_mm: Sequence[WaysMm]
    apart: list[set[int]]
    near_mm: list[list[tuple[int, float]]]
    gained_mm: float = 0.0

    def mend(self, stops: list[int]) -> None:
        """Shorten the trip round some stops, and round all that this changes, till nothing more helps."""
        waiting, queued = deque(stops), set(stops)
        while waiting:
            stop = waiting.popleft()
            queued.discard(stop)
            while changed := self._reverse_a_stretch(stop) or self._move_a_few(stop):
                waiting.extend([one for one in changed if one not in queued])
                queued.update(changed)

    def exchange(self, number: int) -> None:
        """Exchange two neighbouring stretches and mend; go back where the trip is no shorter for it."""
        count = len(self.order)
        longest = min(LONGEST_STRETCH, count - 2)
        first = 1 + int(longest / 2 * (number * math.sqrt(2) % 1))
        second = 1 + int(longest / 2 * (number * math.sqrt(3) % 1))
        begin = int(count * (number * _GOLDEN % 1))
        if first + second + 1 >= count:
            return
        steps = (0, 1, first, first + 1, first + second, first + second + 1)
        a, b, c, d, e, last = ends = [self.order[(begin + step) % count] for step in steps]
        before = self.order.copy(), self.place.copy()
        self.gained_mm = 0.0
        self.join(a, b, e, last)  # a [b … c] [d … e] last becomes a e … d c … b last
        self.join(a, e, d, c)  # a d … e c … b last
        self.join(e, c, b, last)  # a d … e b … c last
        self.mend(list(dict.fromkeys(ends)))
        if self.gained_mm <= LEAST_GAIN_MM:
            self.order, self.place = before

    def _reverse_a_stretch(self, a: int) -> tuple[int, ...]:
        """2-opt at a stop: a–b and c–d become a–c and b–d. The stops it changes; none where nothing helps."""
        order, place, ways_mm = self.order, self.place, self.ways_mm
        at, from_a_mm, near_mm = place[a], ways_mm[a], self.near_mm[a]
        nearest_mm = near_mm[0][1] if near_mm else math.inf
        for ahead in (1 - len(order), -1):
            b = order[at + ahead]
            ab_mm, from_b_mm = from_a_mm[b] - LEAST_GAIN_MM, ways_mm[b]
            if ab_mm <= nearest_mm:
                continue
            for c, ac_mm in self._all_for(a) if b in self.apart[a] else near_mm:
                if ab_mm <= ac_mm:
                    break
                d = order[place[c] + ahead]
                if a == d or b == c:
                    continue
                if ab_mm - ac_mm + ways_mm[c][d] > from_b_mm[d]:
                    self.join(a, b, c, d)
                    return a, b, c, d
        return ()

    def _all_for(self, a: int) -> Iterable[tuple[int, float]]:
        """All stops that may come to stand beside a, the near ones first: for where what stands there must not stay."""
        others = ((c, self.ways_mm[a][c]) for c in range(len(self.order)) if c != a and c not in self.apart[a])
        return chain(self.near_mm[a], others)

    def _move_a_few(self, a: int) -> tuple[int, ...]:
        """Or-opt at a stop: a and up to two stops beside it move to where a stands beside a near stop."""
        ways_mm, near_mm = self.ways_mm, self.near_mm[a]
        before, after = self._beside(a)
        if not near_mm or not before:
            return ()
        nearest_mm = near_mm[0][1]
        along, against = 1 - len(self.order), -1
        for p, following, ahead in ((before[0], after, along), (after[0], before, against)):
            e, from_p_mm, from_e_mm = a, ways_mm[p], ways_mm[a]
            pa_mm = from_e_mm[p]
            for moved, q in enumerate(following, start=1):
                gain_mm = pa_mm + from_e_mm[q] - from_p_mm[q] - LEAST_GAIN_MM
                if gain_mm > nearest_mm:
                    found = self._place_for([a, *following[: moved - 1]], q, gain_mm, ahead)
                    if found:
                        c, d, turned = found
                        self._move((p, a, e, q), c, d, turned=turned)
                        return p, a, e, q, c, d
                e, from_e_mm = q, ways_mm[q]
        return ()

    def _beside(self, a: int) -> tuple[list[int], list[int]]:
        """The MOST_MOVED stops before a stop and after it, the next ones first; fewer or none on a trip of very few."""
        order, at, count = self.order, self.place[a], len(self.order)
        if MOST_MOVED <= at < count - MOST_MOVED:
            before, after = order[at - MOST_MOVED : at], order[at + 1 : at + MOST_MOVED + 1]
            before.reverse()
            return before, after
        steps = range(1, min(MOST_MOVED, count - 3) + 1)
        return [order[at - step] for step in steps], [order[at + step - count] for step in steps]

    def _place_for(self, moved: list[int], q: int, gain_mm: float, ahead: int) -> tuple[int, int, bool] | None:
        """Two stops beside each other between which the moved ones cost less than `gain_mm`; None where none are.

        Args:
            moved: From the first, which is to stand beside the first of the two, to the last, before q.
            q: The stop after them.
            gain_mm: What is gained where they are taken out.
            ahead: The way round from the first to q.

        Returns:
            The two stops, and whether the second is ahead of the first.
        """
        order, place, ways_mm = self.order, self.place, self.ways_mm
        a, from_e_mm = moved[0], ways_mm[moved[-1]]
        behind = -len(order) - ahead
        for c, ca_mm in self.near_mm[a]:
            if gain_mm <= ca_mm:
                break
            if c in moved:
                continue
            for side in (ahead, behind):
                d = order[place[c] + side]
                if d not in moved and gain_mm - ca_mm > from_e_mm[d] - ways_mm[c][d]:
                    return c, d, side == ahead
        return None

    def _move(self, run: tuple[int, int, int, int], c: int, d: int, *, turned: bool) -> None:
        """Move the stops from a to e, which stand between p and q, between c and d, so that a stands beside c."""
        p, a, e, q = run
        if not turned:
            c, d = d, c
        self.join(p, a, c, d)  # p a … e q … c d becomes p c … q e … a d
        self.join(p, c, q, e)  # p q … c e … a d
        if turned:
            self.join(c, e, a, d)  # p q … c a … e d

    def join(self, a: int, b: int, c: int, d: int) -> None:
        """As any trip's, and count what is gained."""
        from_a_mm, from_d_mm = self.ways_mm[a], self.ways_mm[d]
        self.gained_mm += from_a_mm[b] + from_d_mm[c] - from_a_mm[c] - from_d_mm[b]
        Trip.join(self, a, b, c, d)
