"""A short round trip over many stops, some of which must not follow one another.

A travelling salesman's round trip by well-known steps: the shortest ways first, then two or three ways at a time taken
out and the stretches joined anew, then, of few stops, stretches exchanged on trial. No dice and no clock: the same
stops always give the same trip.
"""

import numpy as np

from layout.cut.first_trip import first_trip
from layout.cut.mending import MendedTrip
from layout.cut.near_stops import near_stops
from layout.cut.three_opt import Stops, shorten, stops_followed_by_what_must_not
from layout.cut.trip import Trip
from layout.cut.ways import ways_mm
from layout.mechanics.arrays import FloatArray, IntArray, frozen_ints

MOST_EXCHANGES = 40  # stretches exchanged on trial, 7 ms; with none trips of 300 stops are 0.4 % longer, 150 gain 0.9 %
EXCHANGES_PER_STOP = 3  # at most; with 1 trips of few stops come out longer, with 5 not shorter
MOST_STOPS_SHAKEN = 1_000  # on 2,000, fifteen exchanges gain 0.04 %
_GRAIN_DIGITS = 6  # of a stop's place in mm: what processors round apart decides nothing


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
    near = near_stops(places_mm, apart)
    trip = Trip(order=first_trip(places_mm, near))
    stops = Stops.of(places_mm, near, apart)
    shorten(trip, stops)
    trip = Trip(order=[home, *_from(home, trip)])
    unkept = stops_followed_by_what_must_not(trip, stops)
    exchanges = min(EXCHANGES_PER_STOP * count, MOST_EXCHANGES) if count <= MOST_STOPS_SHAKEN else 0
    if unkept or exchanges:
        partners, near_mm = _partners(apart, count + 1), near.by_stop()
        ways = ways_mm(places_mm, partners, near_mm)
        trip = MendedTrip(order=trip.order, ways_mm=ways, apart=partners, near_mm=near_mm)
        trip.mend(unkept)
        for number in range(exchanges):
            trip.exchange(number)
    return frozen_ints(_from(home, trip))


def _from(home: int, trip: Trip) -> list[int]:
    """The stops from home on, the way round that begins with the lower of those beside it."""
    at = trip.order.index(home)
    order = trip.order[at + 1 :] + trip.order[:at]
    return order if order[0] <= order[-1] else order[::-1]


def _partners(apart: IntArray, count: int) -> list[set[int]]:
    partners: list[set[int]] = [set() for _ in range(count)]
    for one, other in apart.tolist():
        partners[one].add(other)
        partners[other].add(one)
    return partners
