import numpy as np
from hypothesis import given, settings

from layout.arrange.budget import LOOKS_TO_FIT, Budget
from layout.arrange.fitting import fitted
from layout.arrange.problem import Problem
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with
from tests.layout.arrange.random_problems import best_worth, chosen, is_complete, keeps_the_rules, problems, spots_of
from tests.thorough import tried


def put_down(problem: Problem, preferred: tuple[int, ...] = ()) -> list[int] | None:
    found = fitted(problem, np.arange(problem.pluck_count), preferred)
    return None if found is None else list(found)


def test_the_heavier_of_two_that_exclude_each_other_is_put_down() -> None:
    problem = problem_with([Asked(at_ms=1000, worth=10), Asked(at_ms=1030, worth=11), Asked(at_ms=2000)])

    assert put_down(problem) == [1, 2]


def test_a_preferred_spot_comes_before_a_heavier_one() -> None:
    problem = problem_with([Asked(at_ms=1000, worth=10), Asked(at_ms=1030, worth=11)])

    assert put_down(problem, (0,)) == [0]


def test_what_must_sound_comes_before_all() -> None:
    problem = problem_with([Asked(at_ms=1000, worth=10, must_sound=True), Asked(at_ms=1030, worth=11)])

    assert put_down(problem, (1,)) == [0]


def test_two_that_must_sound_and_exclude_each_other_have_no_room() -> None:
    plucks = [Asked(at_ms=1000, must_sound=True), Asked(at_ms=1030, must_sound=True)]

    assert put_down(problem_with(plucks)) is None


def test_an_extra_pluck_is_put_down_only_with_its_own() -> None:
    # The first is pushed out by the heavier one beside it, so its extra pluck stays out too.
    plucks = [Asked(at_ms=1000, worth=10), Asked(at_ms=1030, worth=11), Asked(at_ms=2000, worth=50, parent=0)]

    assert put_down(problem_with(plucks)) == [1]


def test_every_pluck_tried_takes_its_looks_and_the_drive_more_for_what_it_looks_at() -> None:
    plucks = [Asked(at_ms=1000 * place, nudge_ms=0) for place in range(3)] + [Asked(at_ms=2010, nudge_ms=0)]
    alone, driven = (problem_with(plucks, drive=drive) for drive in (None, drive_of((60,), 10, 100)))
    budgets = [Budget(), Budget()]

    for problem, budget in zip((alone, driven), budgets, strict=True):
        # The last is tried too, and has no room.
        assert fitted(problem, np.arange(4), (), budget) == (0, 1, 2)

    assert [budget.looks_spent for budget in budgets] == [4 * LOOKS_TO_FIT] * 2  # a few loads are less than a look


def test_webs_and_loads_are_kept() -> None:
    plucks = [Asked(at_ms=1000, worth=10), Asked(at_ms=1000, tracks=(1,), worth=11)]
    both = problem_with(plucks, least_ms=(50, 50))
    web = problem_with(plucks, least_ms=(50, 50), besides=(beside(-1, 1),))
    heavy = problem_with(plucks, least_ms=(50, 50), drive=drive_of((60, 60), 10, 100))

    assert put_down(both) == [0, 1]
    assert put_down(web) == [1]
    assert put_down(heavy) == [1]


@settings(max_examples=tried(100), deadline=None, derandomize=True)
@given(problems())
def test_what_is_put_down_keeps_every_rule_and_leaves_no_room(problem: Problem) -> None:
    found = put_down(problem)

    if found is None:
        # It need not find room where there is some; but it never refuses where nothing must sound.
        assert problem.must_sound.any()
        return
    spots = chosen(problem, found)
    assert is_complete(problem, spots)
    assert keeps_the_rules(problem, spots)
    taken = {spot.pluck for spot in spots}
    assert best_worth(problem) is not None
    for pluck in set(range(problem.pluck_count)) - taken:
        for spot in spots_of(problem, pluck):
            one_more = sorted([*spots, spot], key=lambda one: one.pluck)
            assert not (is_complete(problem, one_more) and keeps_the_rules(problem, one_more))
