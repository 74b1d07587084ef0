"""The chooser: which plucks sound, and on which track. Good, quick, and not proved best.

Per key, fastest track first, the heaviest set of plucks that one track can hold is found exactly
and the next track is given what is left. Of several tracks together this is not always the best,
nor where tracks come too near to each other or the end of a turn too near to its start; there
the heavier pluck goes first. Then plucks are spread, so that teeth of one pitch take turns, and
what still finds room is filled in.
"""

from collections.abc import Iterator
from itertools import pairwise

import numpy as np

from layout.arrange.asked import NO_TRACK, Asked, Chosen, Clash
from layout.arrange.board import Board
from layout.arrange.forced import put_forced
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning


def choose(asked: Asked, turning: Turning, spacing: Spacing) -> Chosen | Clash:
    """A choice for these plucks; see `Chosen` for what it promises.

    Args:
        asked: The plucks; none give a choice of none.
        turning: The movement's turning.
        spacing: The rules of nearness.

    Returns:
        The choice, or the first two forced plucks found to have no room together.
    """
    board = Board(asked, turning, spacing)
    clash = put_forced(board, asked)
    if clash is not None:
        return clash
    keys = list(_plucks_by_key(asked, board))
    planned = [place for plucks, tracks in keys for place in _layers(board, asked, plucks, tracks)]
    for pluck, track in sorted(planned, key=lambda place: (-asked.weight[place[0]], place[0])):
        if board.conflict(pluck, track) is None:
            board.put(pluck, track)
    _spread(board, asked)
    _fill(board, asked, keys)
    bound = sum(_bound(board, asked, plucks, tracks) for plucks, tracks in keys)
    return Chosen(track_index=board.track_index, bound=bound)


def heaviest_apart(turned_rad: FloatArray, weight: IntArray, least_rad: float) -> tuple[IntArray, int]:
    """The heaviest of all sets of angles that keep a distance, on a line: weighted interval scheduling.

    best(i) = max(best(i − 1), weight(i) + best(last j with angle(j) ≤ angle(i) − least)).

    Args:
        turned_rad: Shape (n,). Angles in rising order.
        weight: Shape (n,). Above 0.
        least_rad: Least angle between two that are kept.

    Returns:
        The places of those kept, in rising order, and their weight; none and 0 for no angles.
    """
    if np.all(np.diff(turned_rad) >= least_rad):
        return np.arange(len(turned_rad)), int(weight.sum())
    reaches = np.searchsorted(turned_rad, turned_rad - least_rad, side="right").tolist()
    best = [0]
    for reach, one in zip(reaches, weight.tolist(), strict=True):
        best.append(max(best[-1], best[reach] + one))
    kept = []
    end = len(reaches)
    while end:
        if best[end] == best[end - 1]:
            end -= 1
        else:
            kept.append(end - 1)
            end = reaches[end - 1]
    return np.array(kept[::-1], dtype=np.int64), best[-1]


def _plucks_by_key(asked: Asked, board: Board) -> Iterator[tuple[IntArray, list[int]]]:
    """The plucks of each key that has tracks, in time, and its tracks, fastest first."""
    by_key = np.argsort(asked.key, kind="stable")
    keys, starts = np.unique(asked.key[by_key], return_index=True)
    for key, (start, stop) in zip(keys.tolist(), pairwise([*starts.tolist(), len(by_key)]), strict=True):
        tracks = asked.tracks_of_key.get(key, ())
        if tracks:
            yield by_key[start:stop], sorted(tracks, key=lambda track: (board.least_rad[track], -track))


def _layers(board: Board, asked: Asked, plucks: IntArray, tracks: list[int]) -> Iterator[tuple[int, int]]:
    left = plucks[board.track_index[plucks] == NO_TRACK]
    for track in tracks:
        fitting = left[board.has_room(left, track)]
        kept, _ = heaviest_apart(board.turned_rad[fitting], asked.weight[fitting], board.least_rad[track])
        for pluck in fitting[kept].tolist():
            yield pluck, track
        left = np.setdiff1d(left, fitting[kept], assume_unique=True)


def _spread(board: Board, asked: Asked) -> None:
    for pluck in np.flatnonzero(board.track_index != NO_TRACK).tolist():
        tracks = asked.tracks(pluck)
        if len(tracks) > 1:
            here = board.track_of(pluck)
            board.take(pluck)
            rested = board.most_rested(pluck, tracks)
            board.put(pluck, here if rested is None else rested)


def _fill(board: Board, asked: Asked, keys: list[tuple[IntArray, list[int]]]) -> None:
    placed = board.track_index
    hopeful: list[int] = []
    for plucks, tracks in keys:
        left = plucks[placed[plucks] == NO_TRACK]
        room = np.zeros(len(left), dtype=np.bool_)
        for track in tracks:
            room |= board.has_room(left, track)
        hopeful += left[room].tolist()
    for pluck in sorted(hopeful, key=lambda pluck: (-asked.weight[pluck], pluck)):
        rested = board.most_rested(pluck, asked.tracks(pluck))
        if rested is not None:
            board.put(pluck, rested)


def _bound(board: Board, asked: Asked, plucks: IntArray, tracks: list[int]) -> int:
    """No choice keeps more of one key: all of it, or so many times what its fastest track alone can hold."""
    weight = asked.weight[plucks]
    _, alone = heaviest_apart(board.turned_rad[plucks], weight, board.least_rad[tracks[0]])
    return min(int(weight.sum()), alone * len(tracks))
