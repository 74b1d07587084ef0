from dataclasses import replace

import numpy as np
import pytest

from layout.arrange import taking_turns as module
from layout.arrange.fitting import fitted
from layout.arrange.loads import overloads
from layout.arrange.nudging import nudged
from layout.arrange.problem import Problem
from layout.arrange.taking_turns import taking_turns
from layout.mechanics.arrays import frozen_ints
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with
from tests.layout.arrange.random_problems import problem_of

BOTH = (0, 1)


def tracks_taken(problem: Problem, spots: list[int]) -> list[int]:
    """The tracks of these spots once they have taken turns, at the moments asked for."""
    turned = taking_turns(problem, spots, {spot: int(problem.asked_ns[spot]) for spot in spots})
    return [int(problem.track[spot]) for spot in turned]


def test_equal_teeth_take_turns_the_longest_quiet_first() -> None:
    problem = problem_with([Asked(at_ms=1000 * n, tracks=BOTH) for n in range(4)], least_ms=(100, 90))

    # Of two that never sounded the faster; all four stood on track 0.
    assert tracks_taken(problem, [0, 2, 4, 6]) == [1, 0, 1, 0]


def test_a_tooth_that_has_no_room_is_not_taken() -> None:
    # The middle one stays on track 0, which has rested 200 ms: track 1 is taken 50 ms later.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1200, tracks=BOTH), Asked(at_ms=1250, tracks=(1,))]

    assert tracks_taken(problem_with(plucks, least_ms=(100, 100)), [0, 1, 3]) == [0, 0, 1]


def test_the_end_of_the_turn_leaves_no_room_either() -> None:
    plucks = [Asked(at_ms=20, tracks=(1,)), Asked(at_ms=30_000), Asked(at_ms=59_950, tracks=BOTH)]

    assert tracks_taken(problem_with(plucks, least_ms=(100, 100)), [0, 1, 2]) == [1, 0, 0]


def test_a_tooth_that_sounds_worse_is_no_equal() -> None:
    problem = problem_with([Asked(at_ms=0, tracks=BOTH), Asked(at_ms=1000, tracks=BOTH)], least_ms=(100, 100))
    worse = replace(problem, worth=frozen_ints([1000, 600, 1000, 600]))

    assert tracks_taken(worse, [0, 2]) == [0, 0]


def test_teeth_beside_which_webs_are_thin_are_left_as_they_are() -> None:
    problem = problem_with(
        [Asked(at_ms=0, tracks=BOTH), Asked(at_ms=1000, tracks=BOTH)],
        least_ms=(100, 90, 100),
        besides=(beside(0, 1, inner=1, outer=2),),
    )

    assert tracks_taken(problem, [0, 2]) == [0, 0]


def test_nothing_changes_where_ringing_teeth_cost_something() -> None:
    plucks = [Asked(at_ms=1000 * n, tracks=BOTH, ringing_cost=10) for n in range(2)]

    assert tracks_taken(problem_with(plucks, least_ms=(100, 90), ringing_ms=10), [0, 2]) == [0, 0]


def test_a_tooth_that_loads_the_disc_too_much_is_not_taken() -> None:
    # Track 2 sounds with each pluck: 50 + 40 are carried, 50 + 60 are not.
    plucks = [Asked(at_ms=0, tracks=BOTH), Asked(at_ms=0, tracks=(2,))]
    problem = problem_with(plucks, least_ms=(100, 90, 100), drive=drive_of((40, 60, 50), 10, 100))
    carried = replace(problem, drive=drive_of((40, 60, 50), 10, 110))

    assert tracks_taken(problem, [0, 2]) == [0, 2]
    assert tracks_taken(carried, [0, 2]) == [1, 2]


def test_a_tooth_no_longer_taken_loads_the_disc_no_more() -> None:
    # All at once, 90 are carried: 45 + 20 + 10 once the first has moved, 45 + 25 + 10 then; with 60 for 10 no more.
    plucks = [Asked(at_ms=0, tracks=(0, 1)), Asked(at_ms=0, tracks=(2, 3)), Asked(at_ms=0, tracks=(4, 5))]
    problem = problem_with(plucks, least_ms=(100, 90) * 3, drive=drive_of((40, 45, 20, 25, 10, 60), 10, 90))

    assert tracks_taken(problem, [0, 2, 4]) == [1, 3, 4]


def test_nothing_takes_no_turns() -> None:
    assert taking_turns(problem_with([]), [], {}) == ()


def turned_one_by_one(problem: Problem, spots: tuple[int, ...], at_ns: dict[int, int]) -> tuple[int, ...]:
    """The same, every equal tooth with all that stands held against every rule."""
    beside_others = {track for pair in problem.besides for track in (pair.inner_index, pair.outer_index)}
    standing = {spot: at_ns[spot] for spot in spots}
    for spot in sorted(spots, key=lambda one: (at_ns[one], one)):
        moment_ns = standing.pop(spot)
        equals = [one for one in problem.equals(spot) if one != spot and problem.track[one] not in beside_others]
        free = [one for one in equals if has_room(problem, standing, one, moment_ns, spot)]
        best = min([spot, *free], key=lambda one: rest_of(problem, standing, one, moment_ns))
        standing[best] = moment_ns
    return tuple(sorted(standing))


def rest_of(problem: Problem, standing: dict[int, int], spot: int, at_ns: int) -> tuple[float, int, int]:
    before_ns = [
        moment_ns
        for one, moment_ns in standing.items()
        if problem.track[one] == problem.track[spot] and (moment_ns, one) < (at_ns, spot)
    ]
    return max(before_ns, default=-float("inf")), int(problem.least_ns[spot]), -int(problem.track[spot])


def has_room(problem: Problem, standing: dict[int, int], spot: int, at_ns: int, now: int) -> bool:
    row = {one: moment_ns for one, moment_ns in standing.items() if problem.track[one] == problem.track[spot]}
    row[spot] = at_ns
    in_order = sorted(row, key=lambda one: (row[one], one))
    if in_order != sorted(row):
        return False  # its plucks would change their order
    for one, two in zip(in_order, [*in_order[1:], in_order[0]], strict=True):
        apart_ns = row[two] - row[one] + (problem.turn_ns if two == in_order[0] else 0)
        if spot in (one, two) and apart_ns < problem.least_ns[one]:
            return False
    if problem.drive is None or problem.drive.lifts[problem.track[spot]] == problem.drive.lifts[problem.track[now]]:
        return True
    return not overloads(problem, np.array(sorted([*standing, spot]), dtype=np.int64))


@pytest.mark.parametrize("most_looked_at", [0, 200_000])
def test_teeth_looked_at_only_where_the_drive_may_be_overloaded_take_the_turns_they_take_looked_at_all(
    monkeypatch: pytest.MonkeyPatch, most_looked_at: int
) -> None:
    monkeypatch.setattr(module, "MOST_LOOKED_AT", most_looked_at)
    turned, heavy = 0, 0
    for seed in range(800):
        problem = with_free_tracks(problem_of(seed))
        spots = fitted(problem, np.arange(problem.pluck_count), ())
        assert spots is not None
        at_ns = nudged(problem, spots)

        found = taking_turns(problem, spots, at_ns)

        assert found == turned_one_by_one(problem, spots, at_ns)
        turned += found != spots
        heavy += turned_one_by_one(replace(problem, drive=None), spots, at_ns) != found
    assert min(turned, heavy) >= 10


def with_free_tracks(problem: Problem) -> Problem:
    """The same problem with nothing that must sound or rings, and webs at the third track alone."""
    return replace(
        problem,
        must_sound=np.zeros_like(problem.must_sound),
        ringing_cost=np.zeros_like(problem.ringing_cost),
        besides=tuple(pair for pair in problem.besides if pair.inner_index and pair.outer_index),
    )
