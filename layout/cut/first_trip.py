"""A round trip to begin with: the shortest ways first, then piece to piece."""

import numpy as np

from layout.cut.near_stops import NearStops
from layout.mechanics.arrays import FloatArray

_WAYS = 2  # of a stop on a round trip: one comes, one goes


def first_trip(places_mm: FloatArray, near: NearStops) -> list[int]:
    """All stops once, in the order of a round trip.

    The shortest way between two near stops is taken first, then the next, wherever both ends still want one and no
    round is closed (the greedy start, J. L. Bentley, 1992). What pieces that leaves are walked from end to nearest end.

    Args:
        places_mm: Shape (n, 2); the last is home.
        near: The near neighbours of each.
    """
    pieces = _pieces(_joined(near))
    first_mm = places_mm[[piece[0] for piece in pieces]]
    last_mm = places_mm[[piece[-1] for piece in pieces]]
    ends_mm = np.concatenate([first_mm, last_mm])
    free = np.ones(len(ends_mm), dtype=bool)
    trip, end = list(pieces[0]), len(pieces)
    for _ in pieces[1:]:
        free[[end % len(pieces), end % len(pieces) + len(pieces)]] = False
        away_mm2 = np.where(free, ((ends_mm - ends_mm[end]) ** 2).sum(axis=1), np.inf)
        begin = int(np.argmin(away_mm2))
        piece = pieces[begin % len(pieces)]
        trip += piece if begin < len(pieces) else piece[::-1]
        end = (begin + len(pieces)) % len(ends_mm)
    return trip


def _joined(near: NearStops) -> list[list[int]]:
    """For each stop those that it is joined to: two, one or none, and nowhere a closed round."""
    count = len(near.other)
    one, rank = np.nonzero(np.isfinite(near.away_mm))
    other, away_mm = near.other[one, rank], near.away_mm[one, rank]
    low, high = np.minimum(one, other), np.maximum(one, other)
    _, once = np.unique(low * count + high, return_index=True)
    best = once[np.lexsort((high[once], low[once], away_mm[once]))]
    joined: list[list[int]] = [[] for _ in range(count)]
    far_end = list(range(count))
    for one, other in zip(low[best].tolist(), high[best].tolist(), strict=True):
        if far_end[one] != other and len(joined[one]) < _WAYS and len(joined[other]) < _WAYS:
            joined[one].append(other)
            joined[other].append(one)
            begin, end = far_end[one], far_end[other]
            far_end[begin], far_end[end] = end, begin
    return joined


def _pieces(joined: list[list[int]]) -> list[list[int]]:
    """The stops piece by piece, each from its end with the lower index."""
    pieces = []
    walked = [False] * len(joined)
    for begin, ways in enumerate(joined):
        if walked[begin] or len(ways) == _WAYS:
            continue
        piece = [begin]
        walked[begin] = True
        while onward := [stop for stop in joined[piece[-1]] if not walked[stop]]:
            piece += onward
            walked[onward[0]] = True
        pieces.append(piece)
    return pieces
