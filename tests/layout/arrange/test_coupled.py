import numpy as np

from layout.arrange.budget import Budget
from layout.arrange.coupled import Coupled, best_coupled, worth_of
from layout.arrange.problem import Problem
from tests.layout.arrange.by_hand import Asked, beside, problem_with


def coupled(problem: Problem, budget: Budget | None = None) -> Coupled:
    return best_coupled(problem, np.arange(problem.pluck_count), budget or Budget())


def test_the_heavier_of_two_tracks_too_close_is_chosen_and_proved() -> None:
    plucks = [Asked(at_ms=1000, worth=10), Asked(at_ms=1000, tracks=(1,), worth=11)]
    problem = problem_with(plucks, least_ms=(1, 1), besides=(beside(-1, 1),))

    assert coupled(problem) == Coupled(spots=(1,), worth=11, bound=11)


def test_what_must_sound_and_cannot_together_has_neither_choice_nor_bound() -> None:
    plucks = [Asked(at_ms=1000, must_sound=True), Asked(at_ms=1000, tracks=(1,), must_sound=True)]
    problem = problem_with(plucks, least_ms=(1, 1), besides=(beside(-1, 1),))

    assert coupled(problem) == Coupled(spots=None, worth=0, bound=None)


def test_a_program_is_given_no_more_time_than_is_left() -> None:
    # Of each of 30 pairs one can sound. The clock stands still, or is at the limit when it is next looked at.
    plucks = [Asked(at_ms=1000 * place, tracks=(track,), worth=10 + track) for place in range(30) for track in (0, 1)]
    problem = problem_with(plucks, least_ms=(1, 1), besides=(beside(-1, 1),))
    times_s = iter([0.0])

    too_late = coupled(problem, Budget(time_limit_s=60, clock=lambda: next(times_s, 60.0)))
    in_time = coupled(problem, Budget(time_limit_s=60, clock=lambda: 0.0))

    assert (too_late.spots, too_late.worth) == (None, 0)
    assert too_late.bound is not None
    assert too_late.bound >= 330
    assert (in_time.worth, in_time.bound) == (330, 330)


def test_a_program_larger_than_allowed_is_not_begun_and_all_of_it_is_the_bound() -> None:
    plucks = [Asked(at_ms=1000, worth=10), Asked(at_ms=1000, tracks=(1,), worth=11)]
    problem = problem_with(plucks, least_ms=(1, 1), besides=(beside(-1, 1),))

    # One row of two entries.
    assert best_coupled(problem, np.arange(2), Budget(), most_entries=1) == Coupled(spots=None, worth=0, bound=21)
    assert best_coupled(problem, np.arange(2), Budget(), most_entries=2).spots == (1,)


def test_a_choice_is_worth_its_plucks_less_what_ringing_teeth_cost() -> None:
    # Teeth ring for 150 ms: the second is plucked in the first one's ringing, the third just after the second one's.
    plucks = [Asked(at_ms=at_ms, worth=100, ringing_cost=cost) for at_ms, cost in ((1000, 1), (1100, 20), (1250, 30))]
    problem = problem_with(plucks, ringing_ms=150)

    assert worth_of(problem, [0, 1, 2]) == 100 + 80 + 100
    assert worth_of(problem, [0, 2]) == 200
    assert worth_of(problem, []) == 0


def test_plucks_that_no_track_plays_are_worth_nothing() -> None:
    found = coupled(problem_with([Asked(at_ms=1000, tracks=())]))

    assert (found.worth, found.bound) == (0, 0)
