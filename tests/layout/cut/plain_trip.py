"""A round trip by the steps of layout/cut/touring.py, told plainly: one stop swapped at a time, nothing remembered."""

import math
from collections import deque
from itertools import chain

import numpy as np

from layout.cut.first_trip import first_trip
from layout.cut.near_stops import near_stops
from layout.cut.touring import (
    EXCHANGES_BY_STOPS,
    EXCHANGES_PER_STOP,
    LEAST_GAIN_MM,
    LONGEST_STRETCH,
    MOST_EXCHANGES,
    MOST_MOVED,
)
from layout.mechanics.arrays import FloatArray, IntArray

_NOT_NEXT_MM = 1e7
_GOLDEN = (math.sqrt(5) - 1) / 2


def plain_round_trip(stops_mm: FloatArray, pairs: IntArray) -> list[int]:
    """The order of two stops or more, as `short_round_trip` gives it."""
    stops_mm = np.round(stops_mm, 6)
    count = len(stops_mm)
    places_mm = np.concatenate([stops_mm, np.zeros((1, 2))])
    near = near_stops(places_mm, pairs)
    trip = _PlainTrip(places_mm.tolist(), pairs, near.by_stop(count + 1), first_trip(places_mm, near))
    trip.mend(list(trip.order))
    for number in range(min(EXCHANGES_PER_STOP * count, MOST_EXCHANGES, EXCHANGES_BY_STOPS // count)):
        trip.exchange(number)
    at = trip.order.index(count)
    order = trip.order[at + 1 :] + trip.order[:at]
    return order if order[0] <= order[-1] else order[::-1]


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
