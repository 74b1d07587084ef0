from dataclasses import replace

from layout.arrange.problem import Problem
from layout.arrange.taking_turns import taking_turns
from layout.mechanics.arrays import frozen_ints
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with

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


def test_nothing_takes_no_turns() -> None:
    assert taking_turns(problem_with([]), [], {}) == ()
