"""Problems with few plucks, put down by hand in milliseconds."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layout.arrange.problem import NO_PLUCK, Beside, Drive, Lift, Problem
from layout.mechanics.arrays import frozen_ints

MS = 1_000_000  # ns


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """A pluck and the tracks, from 0, that may play it; all its spots are alike."""

    at_ms: float
    tracks: tuple[int, ...] = (0,)
    worth: int = 1000
    nudge_ms: float = 20.0
    must_sound: bool = False
    parent: int = NO_PLUCK
    ringing_cost: int = 0


def problem_with(
    plucks: Sequence[Asked],
    *,
    least_ms: Sequence[float] = (100.0,),
    turn_ms: float = 60_000.0,
    besides: tuple[Beside, ...] = (),
    drive: Drive | None = None,
    ringing_ms: float = 0.0,
) -> Problem:
    """Plucks in the order of their moments; `least_ms` is the repeat of every track there is."""
    spots = [(pluck, track) for pluck, one in enumerate(plucks) for track in one.tracks]
    of = np.array([pluck for pluck, _ in spots], dtype=np.int64)
    track = np.array([track for _, track in spots], dtype=np.int64)
    pluck_ms = np.array([one.at_ms for one in plucks], dtype=np.float64)
    at_ms = pluck_ms[of]
    nudge_ms = np.array([one.nudge_ms for one in plucks], dtype=np.float64)[of]
    return Problem(
        must_sound=np.array([one.must_sound for one in plucks], dtype=np.bool_),
        parent=frozen_ints(one.parent for one in plucks),
        first_spot=frozen_ints(np.searchsorted(of, np.arange(len(plucks) + 1))),
        pluck=frozen_ints(of),
        track=frozen_ints(track),
        worth=frozen_ints(plucks[pluck].worth for pluck, _ in spots),
        asked_ns=frozen_ints(at_ms * MS),
        earliest_ns=frozen_ints(np.maximum(at_ms - nudge_ms, 0) * MS),
        latest_ns=frozen_ints((at_ms + nudge_ms) * MS),
        least_ns=frozen_ints(np.array(least_ms)[track] * MS),
        chord=frozen_ints(np.cumsum(np.diff(pluck_ms, prepend=-1) > 0) - 1),
        spread=frozen_ints(np.zeros(len(spots), dtype=np.int64)),
        ringing_cost=frozen_ints(plucks[pluck].ringing_cost for pluck, _ in spots),
        ringing_ns=frozen_ints(np.full(len(least_ms), ringing_ms * MS)),
        turn_ns=round(turn_ms * MS),
        besides=besides,
        drive=drive,
    )


def beside(from_ms: float, to_ms: float, inner: int = 0, outer: int = 1) -> Beside:
    return Beside(inner_index=inner, outer_index=outer, from_ns=round(from_ms * MS), to_ns=round(to_ms * MS))


def drive_of(loads: Sequence[int], window_ms: float, limit: int) -> Drive:
    """One tooth on every track, all with one window."""
    return Drive(lifts=tuple((Lift(load=load, window_ns=round(window_ms * MS)),) for load in loads), limit=limit)
