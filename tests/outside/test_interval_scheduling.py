"""One pitch on equal tracks is interval scheduling; the textbook's greedy ways are the second opinion.

Kleinberg and Tardos, Algorithm Design (2005, from memory), ch. 4.1: on one machine, taking always the
interval that ends first keeps the most; any number of intervals at once never more than k fit k machines.
For k machines the same rule, each interval on the machine that came free last of those that are free, keeps
the most (Carlisle and Lloyd, On the k-coloring of intervals, Discrete Applied Mathematics 59, 1995,
from memory). A pluck of a track that repeats after `least_ns` is an interval [asked, asked + least).
"""

from collections.abc import Sequence

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.arrange.budget import Budget
from layout.arrange.problem import NO_PLUCK, Problem
from layout.arrange.solving import Solved, Solving
from layout.mechanics.arrays import frozen_ints

TURN_NS = 1_000_000


def one_pitch(asked_ns: Sequence[int], *, tracks: int, least_ns: int) -> Problem:
    """Every pluck on every track, each worth one, nothing nudged, the end of the turn far away."""
    count = len(asked_ns)
    spots = np.arange(count * tracks)
    pluck = spots // tracks
    asked = np.array(asked_ns, dtype=np.int64)[pluck]
    nothing = frozen_ints(np.zeros(len(spots), dtype=np.int64))
    return Problem(
        must_sound=np.zeros(count, dtype=np.bool_),
        parent=frozen_ints([NO_PLUCK] * count),
        first_spot=frozen_ints(np.arange(count + 1) * tracks),
        pluck=frozen_ints(pluck),
        track=frozen_ints(spots % tracks),
        worth=frozen_ints(np.ones(len(spots), dtype=np.int64)),
        asked_ns=frozen_ints(asked),
        earliest_ns=frozen_ints(asked),
        latest_ns=frozen_ints(asked),
        least_ns=frozen_ints(np.full(len(spots), least_ns)),
        chord=frozen_ints(range(count)),
        spread=nothing,
        ringing_cost=nothing,
        ringing_ns=frozen_ints([0] * tracks),
        turn_ns=TURN_NS,
        besides=(),
        drive=None,
    )


def solved(problem: Problem) -> Solved:
    found = Solving(problem).together(Budget())
    assert isinstance(found, Solved)
    return found


def earliest_finish_first(asked_ns: Sequence[int], *, machines: int, least_ns: int) -> int:
    """How many intervals the greedy way keeps. Of equal length, those that end first also begin first."""
    free_ns = [0] * machines
    kept = 0
    for begin_ns in sorted(asked_ns):
        free = [machine for machine in range(machines) if free_ns[machine] <= begin_ns]
        if free:
            free_ns[max(free, key=lambda machine: free_ns[machine])] = begin_ns + least_ns
            kept += 1
    return kept


def depth(asked_ns: Sequence[int], least_ns: int) -> int:
    """The most intervals that hold one moment."""
    return max((sum(one <= at < one + least_ns for one in asked_ns) for at in asked_ns), default=0)


# Small numbers, so that plucks often stand exactly one repeat apart.
MOMENTS = st.lists(st.integers(0, 60), min_size=0, max_size=40, unique=True).map(sorted)


@given(asked_ns=MOMENTS, least_ns=st.integers(1, 12))
def test_on_one_track_as_many_plucks_sound_as_intervals_end_first(asked_ns: list[int], least_ns: int) -> None:
    found = solved(one_pitch(asked_ns, tracks=1, least_ns=least_ns))

    assert found.worth == found.bound == earliest_finish_first(asked_ns, machines=1, least_ns=least_ns)


@given(asked_ns=MOMENTS, least_ns=st.integers(1, 24), tracks=st.integers(2, 4))
def test_on_equal_tracks_as_many_plucks_sound_as_the_greedy_way_keeps(
    asked_ns: list[int], least_ns: int, tracks: int
) -> None:
    found = solved(one_pitch(asked_ns, tracks=tracks, least_ns=least_ns))

    assert found.worth == found.bound == earliest_finish_first(asked_ns, machines=tracks, least_ns=least_ns)


@given(asked_ns=MOMENTS, least_ns=st.integers(1, 8))
def test_as_many_tracks_as_intervals_overlap_play_everything_and_one_fewer_does_not(
    asked_ns: list[int], least_ns: int
) -> None:
    # Interval partitioning: as many machines are needed as the depth, and that many are enough.
    needed = max(depth(asked_ns, least_ns), 1)

    enough = solved(one_pitch(asked_ns, tracks=needed, least_ns=least_ns))

    assert enough.worth == len(asked_ns)
    if needed > 1:
        assert solved(one_pitch(asked_ns, tracks=needed - 1, least_ns=least_ns)).worth < len(asked_ns)


@pytest.mark.parametrize(("tracks", "kept"), [(1, 2), (2, 4), (3, 5)])
def test_five_plucks_within_two_repeats(tracks: int, kept: int) -> None:
    # A repeat of 10 from 0, 4, 8, 12, 16: one track 0 and 12; two 0 12 and 4 16; three all.
    assert solved(one_pitch([0, 4, 8, 12, 16], tracks=tracks, least_ns=10)).worth == kept
