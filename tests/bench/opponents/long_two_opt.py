"""A long 2-opt run over the same stops: all pairs of stretches looked at, the best reversed, from several starts.

It shares no line with the program: costs are one matrix, every move is found by numpy over all pairs.
"""

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray

NEVER_NEXT_MM = 1e7  # mm; more than any round trip


def costs_mm(stops_mm: FloatArray, apart: IntArray) -> FloatArray:
    """Shape (n + 1, n + 1). What it takes from stop to stop; the last is the disc centre."""
    places = np.concatenate([stops_mm, np.zeros((1, 2))])
    costs: FloatArray = np.linalg.norm(places[:, None] - places[None, :], axis=-1)
    costs[apart[:, 0], apart[:, 1]] += NEVER_NEXT_MM
    costs[apart[:, 1], apart[:, 0]] += NEVER_NEXT_MM
    return costs


def trip_mm(costs: FloatArray, trip: IntArray) -> float:
    """The length of a closed round trip."""
    return float(costs[trip, np.roll(trip, -1)].sum())


def long_two_opt_mm(stops_mm: FloatArray, apart: IntArray, *, starts: int, seed: int = 1) -> float:
    """The shortest round trip found: from the nearest stop to the nearest, and from shuffled orders."""
    costs, dice = costs_mm(stops_mm, apart), np.random.default_rng(seed)
    trips = [_nearest_next(costs), *(dice.permutation(len(costs)) for _ in range(starts - 1))]
    return min(trip_mm(costs, _two_opt(costs, trip)) for trip in trips)


def _nearest_next(costs: FloatArray) -> IntArray:
    left, trip = set(range(len(costs) - 1)), [len(costs) - 1]
    while left:
        trip.append(min(left, key=lambda stop: costs[trip[-1], stop]))
        left.remove(trip[-1])
    return np.array(trip)


def _two_opt(costs: FloatArray, trip: IntArray) -> IntArray:
    count = len(trip)
    later = np.triu(np.ones((count, count), dtype=np.bool_), 1)
    while True:
        after = np.roll(trip, -1)
        steps = costs[trip, after]
        # Edges i and j: trip[i]–after[i] and trip[j]–after[j] become trip[i]–trip[j] and after[i]–after[j].
        gains = steps[:, None] + steps[None, :] - costs[np.ix_(trip, trip)] - costs[np.ix_(after, after)]
        gains[~later] = 0.0
        i, j = np.unravel_index(int(gains.argmax()), gains.shape)
        if gains[i, j] <= 1e-6:
            return trip
        trip = np.concatenate([trip[: i + 1], trip[i + 1 : j + 1][::-1], trip[j + 1 :]])
