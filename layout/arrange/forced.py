"""Forced plucks first: those that rulings put on a track, then those that must sound somewhere."""

from collections import defaultdict

import numpy as np

from layout.arrange.asked import NO_TRACK, Asked, Clash, Conflict
from layout.arrange.board import Board

# Steps back, per group of tracks. A search that needs more is given up as a clash; it goes back
# over the plucks of the last few repeats only, so tens are usual.
MOST_STEPS_BACK = 20_000


def put_forced(board: Board, asked: Asked) -> Clash | None:
    """Put every forced pluck on the empty board, or say which two have no room together.

    Plucks that must sound are tried on all tracks of their key, in time, going back where one
    finds none left; tracks that may come too near to each other are settled together. Short of
    MOST_STEPS_BACK a clash means that no way exists.

    Args:
        board: Nothing on it yet.
        asked: Every forced pluck has a track.
    """
    for pluck in np.flatnonzero(asked.on_track != NO_TRACK).tolist():
        track = int(asked.on_track[pluck])
        conflict = board.conflict(pluck, track)
        if conflict is not None:
            return Clash(pluck=pluck, conflict=conflict)
        board.put(pluck, track)
    group_of = _group_of_track(board, asked)
    groups: dict[int, list[int]] = defaultdict(list)
    for pluck in np.flatnonzero(asked.must_sound & (asked.on_track == NO_TRACK)).tolist():
        groups[group_of[asked.tracks(pluck)[0]]].append(pluck)
    for plucks in groups.values():
        clash = _put_all(board, asked, plucks)
        if clash is not None:
            return clash
    return None


def _group_of_track(board: Board, asked: Asked) -> list[int]:
    """A number per track, the same for tracks of one key and for tracks that may come too near."""
    group = list(range(len(board.least_rad)))
    joins = [(tracks[0], track) for tracks in asked.tracks_of_key.values() for track in tracks]
    for one, two in [*joins, *board.pairs]:
        low, high = sorted((group[one], group[two]))
        group = [low if number == high else number for number in group]
    return group


def _put_all(board: Board, asked: Asked, plucks: list[int]) -> Clash | None:
    """Put plucks on their tracks in turn; where one finds no room go back to the last that is in its way.

    Conflict-directed backjumping (P. Prosser, "Hybrid algorithms for the constraint satisfaction
    problem", Computational Intelligence 9, 1993; from memory): plucks far away are not tried again.
    """
    place_of = {pluck: place for place, pluck in enumerate(plucks)}
    untried = [list(asked.tracks(pluck)) for pluck in plucks]
    in_the_way: list[set[int]] = [set() for _ in plucks]
    clash: Clash | None = None
    depth, farthest, steps_back = 0, -1, 0
    while depth < len(plucks):
        pluck = plucks[depth]
        conflicts = _put_on_next(board, pluck, untried[depth])
        in_the_way[depth] |= {place_of.get(conflict.other, depth) for conflict in conflicts} - {depth}
        if board.track_of(pluck) != NO_TRACK:
            depth += 1
            continue
        if depth > farthest:
            nearest = min(conflicts, key=lambda conflict: conflict.apart_rad)
            farthest, clash = depth, Clash(pluck=pluck, conflict=nearest)
        if not in_the_way[depth] or steps_back == MOST_STEPS_BACK:
            return clash
        steps_back += 1
        back = max(in_the_way[depth])
        in_the_way[back] |= in_the_way[depth] - {back}
        for place in range(back + 1, depth + 1):
            untried[place], in_the_way[place] = list(asked.tracks(plucks[place])), set()
        for place in range(back, depth):
            board.take(plucks[place])
        depth = back
    return None


def _put_on_next(board: Board, pluck: int, untried: list[int]) -> list[Conflict]:
    """Put a pluck on the next untried track with room, outermost first; what stood in the way on others."""
    conflicts = []
    while untried:
        track = untried.pop()
        conflict = board.conflict(pluck, track)
        if conflict is None:
            board.put(pluck, track)
            break
        conflicts.append(conflict)
    return conflicts
