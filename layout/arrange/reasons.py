"""Why plucks are left out: the rule by which the nearest thing forbids them."""

from layout.arrange.arrangement import LeftOutReason
from layout.arrange.asked import NO_TRACK, Asked, Chosen
from layout.arrange.board import Board
from layout.arrange.comb import Comb
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning


def reasons_of(
    asked: Asked, chosen: Chosen, comb: Comb, turning: Turning, spacing: Spacing
) -> dict[int, LeftOutReason]:
    """The reason of every pluck left out, by pluck.

    Over all tracks of its key, the least angle to something that forbids it decides.
    """
    board = Board(asked, turning, spacing)
    tracks = chosen.track_index.tolist()
    for pluck, track in enumerate(tracks):
        if track != NO_TRACK:
            board.put(pluck, track)
    return {pluck: _reason(asked, board, pluck, comb) for pluck, track in enumerate(tracks) if track == NO_TRACK}


def _reason(asked: Asked, board: Board, pluck: int, comb: Comb) -> LeftOutReason:
    tracks = asked.tracks(pluck)
    if not tracks:
        return "unusable-tooth" if int(asked.key[pluck]) in comb.unusable_keys else "no-such-pitch"
    found = [conflict for track in tracks if (conflict := board.conflict(pluck, track)) is not None]
    return min(found, key=lambda conflict: conflict.apart_rad).reason
