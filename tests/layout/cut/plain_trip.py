"""A round trip by the steps of layout/cut, told plainly: one stop or way at a time, nothing remembered."""

import math
from collections import deque
from itertools import chain

import numpy as np

from layout.cut.first_trip import first_trip
from layout.cut.mending import LONGEST_STRETCH, MOST_MOVED
from layout.cut.near_stops import near_stops
from layout.cut.three_opt import LEAST_GAIN_MM, NONE
from layout.cut.touring import EXCHANGES_PER_STOP, MOST_EXCHANGES, MOST_STOPS_SHAKEN
from layout.mechanics.arrays import FloatArray, IntArray

_NOT_NEXT_MM = 1e7
_GOLDEN = (math.sqrt(5) - 1) / 2


def plain_round_trip(stops_mm: FloatArray, pairs: IntArray) -> list[int]:
    """The order of two stops or more, as `short_round_trip` gives it."""
    stops_mm = np.round(stops_mm, 6)
    count = len(stops_mm)
    places_mm = np.concatenate([stops_mm, np.zeros((1, 2))])
    near = near_stops(places_mm, pairs)
    trip = _PlainTrip(places_mm.tolist(), pairs, near.by_stop(), first_trip(places_mm, near))
    trip.shorten()
    trip.order = [count, *trip.from_home()]
    trip.mend([one for one in trip.order if (one, trip.beside(one, 1)) in trip.apart])
    if count <= MOST_STOPS_SHAKEN:
        for number in range(min(EXCHANGES_PER_STOP * count, MOST_EXCHANGES)):
            trip.exchange(number)
    return trip.from_home()


class _PlainTrip:
    def __init__(
        self, places_mm: list[list[float]], pairs: IntArray, near: list[list[tuple[int, float]]], order: list[int]
    ) -> None:
        self.places_mm, self.near, self.order, self.gained_mm = places_mm, near, order, 0.0
        self.apart = {(one, other) for pair in pairs.tolist() for one, other in (pair, pair[::-1])}

    def way_mm(self, one: int, other: int) -> float:
        (x1, y1), (x2, y2) = self.places_mm[one], self.places_mm[other]
        away_mm = math.sqrt((x1 - x2) * (x1 - x2) + (y1 - y2) * (y1 - y2))
        return away_mm + _NOT_NEXT_MM if (one, other) in self.apart else away_mm

    def beside(self, stop: int, steps: int) -> int:
        return self.order[(self.order.index(stop) + steps) % len(self.order)]

    def from_home(self) -> list[int]:
        at = self.order.index(len(self.order) - 1)
        order = self.order[at + 1 :] + self.order[:at]
        return order if order[0] <= order[-1] else order[::-1]

    def shorten(self) -> None:
        looked_at = set(self.order)
        while looked_at:
            best = [max(moves) for a in looked_at if (moves := self.moves_from(a))]
            looked_at = set()
            for _, negated in sorted(best, reverse=True):
                move = tuple(-stop for stop in negated if stop != -NONE)
                after = self.after(move)
                looked_at.update(move if after else move[:1])
                self.order = after or self.order

    def moves_from(self, a: int) -> list[tuple[float, tuple[int, ...]]]:
        """Gains and moves: a–b, c–d to b–c, d–a, or a–b, c–d, e–f to b–c, d–e, f–a. Negated: the least is the most."""
        found = []
        for b in {self.beside(a, 1), self.beside(a, -1)}:
            for c, bc_mm in self.near[b]:
                for d in {self.beside(c, 1), self.beside(c, -1)} - {a} if bc_mm < self.way_mm(a, b) else ():
                    gain_mm = self.way_mm(a, b) - bc_mm + self.way_mm(c, d)
                    found.append((gain_mm - self.way_mm(d, a), (a, b, c, d)))
                    for e, de_mm in self.near[d]:
                        if de_mm < gain_mm - LEAST_GAIN_MM:
                            for f in {self.beside(e, 1), self.beside(e, -1)}:
                                longer_mm = gain_mm - de_mm + self.way_mm(e, f)
                                found.append((longer_mm - self.way_mm(f, a), (a, b, c, d, e, f)))
        return [
            (gain_mm, tuple(-stop for stop in (*move, NONE, NONE)[:6]))
            for gain_mm, move in found
            if gain_mm > LEAST_GAIN_MM and self.after(move)
        ]

    def after(self, move: tuple[int, ...]) -> list[int] | None:
        """The trip after a move; None where its ways are not there, or what comes is no round trip."""
        begins, ends = move[::2], move[1::2]
        gone = [frozenset(way) for way in zip(begins, ends, strict=True)]
        come = [frozenset(way) for way in zip(ends, begins[1:] + begins[:1], strict=True)]
        ways = [frozenset((one, self.beside(one, 1))) for one in self.order]
        are_others = len({*gone, *come}) == len(move) and all(len(way) > 1 for way in come)
        if not are_others or not set(gone) <= set(ways) or set(come) & set(ways):
            return None
        beside: dict[int, list[int]] = {stop: [] for stop in self.order}
        for one, other in [tuple(way) for way in ways if way not in gone] + [tuple(way) for way in come]:
            beside[one].append(other)
            beside[other].append(one)
        walked = [self.order[0]]
        while onward := [stop for stop in beside[walked[-1]] if stop not in walked]:
            walked.append(onward[0])
        return walked if len(walked) == len(self.order) else None

    def mend(self, stops: list[int]) -> None:
        waiting, queued = deque(stops), set(stops)
        while waiting:
            stop = waiting.popleft()
            queued.discard(stop)
            while changed := self.reverse_a_stretch(stop) or self.move_a_few(stop):
                waiting.extend(one for one in changed if one not in queued)
                queued.update(changed)

    def exchange(self, number: int) -> None:
        count = len(self.order)
        longest = min(LONGEST_STRETCH, count - 2)
        first = 1 + int(longest / 2 * (number * math.sqrt(2) % 1))
        second = 1 + int(longest / 2 * (number * math.sqrt(3) % 1))
        begin = int(count * (number * _GOLDEN % 1))
        if first + second + 1 >= count:
            return
        steps = (0, 1, first, first + 1, first + second, first + second + 1)
        a, b, c, d, e, last = ends = [self.order[(begin + step) % count] for step in steps]
        before, self.gained_mm = list(self.order), 0.0
        self.join(a, b, e, last)
        self.join(a, e, d, c)
        self.join(e, c, b, last)
        self.mend(list(dict.fromkeys(ends)))
        if self.gained_mm <= LEAST_GAIN_MM:
            self.order = before

    def reverse_a_stretch(self, a: int) -> tuple[int, ...]:
        for ahead in (1, -1):
            b = self.beside(a, ahead)
            others = [(c, self.way_mm(a, c)) for c in range(len(self.order)) if c != a and (a, c) not in self.apart]
            for c, ac_mm in chain(self.near[a], others if (a, b) in self.apart else []):
                if self.way_mm(a, b) - LEAST_GAIN_MM <= ac_mm:
                    break
                d = self.beside(c, ahead)
                gain_mm = self.way_mm(a, b) - LEAST_GAIN_MM - ac_mm + self.way_mm(c, d)
                if a != d and b != c and gain_mm > self.way_mm(b, d):
                    self.join(a, b, c, d)
                    return a, b, c, d
        return ()

    def move_a_few(self, a: int) -> tuple[int, ...]:
        for ahead in (1, -1):
            p = self.beside(a, -ahead)
            for moved in range(1, min(MOST_MOVED, len(self.order) - 3) + 1):
                run = [self.beside(a, ahead * step) for step in range(moved)]
                e, q = run[-1], self.beside(a, ahead * moved)
                gain_mm = self.way_mm(p, a) + self.way_mm(e, q) - self.way_mm(p, q) - LEAST_GAIN_MM
                for c, ca_mm in self.near[a]:
                    if gain_mm <= ca_mm:
                        break
                    for side in (ahead, -ahead) if c not in run else ():
                        d = self.beside(c, side)
                        if d not in run and gain_mm - ca_mm > self.way_mm(e, d) - self.way_mm(c, d):
                            one, other = (c, d) if side == ahead else (d, c)
                            self.join(p, a, one, other)
                            self.join(p, one, q, e)
                            if side == ahead:
                                self.join(one, e, a, other)
                            return p, a, e, q, c, d
        return ()

    def join(self, a: int, b: int, c: int, d: int) -> None:
        self.gained_mm += self.way_mm(a, b) + self.way_mm(c, d) - self.way_mm(a, c) - self.way_mm(b, d)
        begin, end = (b, c) if self.beside(a, 1) == b else (a, d)
        self.turn_round(self.order.index(begin), self.order.index(end))

    def turn_round(self, begin: int, end: int) -> None:
        count = len(self.order)
        inside = (end - begin) % count + 1
        if 2 * inside > count:
            begin, end, inside = end + 1, begin - 1, count - inside
        for step in range(inside // 2):
            one, other = (begin + step) % count, (end - step) % count
            self.order[one], self.order[other] = self.order[other], self.order[one]
