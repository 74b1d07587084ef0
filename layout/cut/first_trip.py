"""A round trip to begin with: the ways that save most first, then piece to piece."""

import numpy as np

from layout.cut.near_stops import NearStops
from layout.mechanics.arrays import FloatArray

_WAYS = 2  # of a stop on a round trip: one comes, one goes


def first_trip(places_mm: FloatArray, near: NearStops) -> list[int]:
    """All stops once, in the order of a round trip that is short already.

    A way between two near stops saves what it would take to go home between them (G. Clarke and J. W. Wright, 1964).
    The way that saves most is taken first, then the next, wherever both ends still want one and no round is closed.
    What pieces that leaves are walked from end to nearest end.

    Args:
        places_mm: Shape (n, 2); the last is home.
        near: The near neighbours of each.
    """
    pieces = _pieces(_joined(near, _saved_mm(places_mm, near), len(places_mm)))
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


def _saved_mm(places_mm: FloatArray, near: NearStops) -> FloatArray:
    """Shape (m,). What each way saves; a way home saves nothing."""
    dx_mm, dy_mm = (places_mm - places_mm[-1]).T
    home_mm = np.sqrt(dx_mm * dx_mm + dy_mm * dy_mm)
    return np.asarray(home_mm[near.one] + home_mm[near.other] - near.away_mm)


def _joined(near: NearStops, saved_mm: FloatArray, count: int) -> list[list[int]]:
    """For each stop those that it is joined to: two, one or none, and nowhere a closed round."""
    low, high = np.minimum(near.one, near.other), np.maximum(near.one, near.other)
    _, once = np.unique(low * count + high, return_index=True)
    once = once[high[once] != count - 1]
    best = once[np.lexsort((high[once], low[once], -saved_mm[once]))]
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
