"""The solver against the trial of every choice, on random small problems."""

import pytest
from hypothesis import given, settings

from layout.arrange.budget import Budget
from layout.arrange.problem import Problem
from layout.arrange.solving import Impossible, Solving
from layout.arrange.spreading import with_spread_chords
from tests.layout.arrange.random_problems import (
    best_worth,
    chosen,
    is_complete,
    keeps_the_rules,
    problem_of,
    problems,
    worth_of_choice,
)

SEEDS = 400  # the first of them; tens of thousands were run while this was written


def assert_best(problem: Problem) -> int | None:
    """The solver finds and proves what the trial of every choice finds; the worth, None for none."""
    spread = with_spread_chords(problem)
    best = best_worth(spread)
    solving = Solving(problem)

    solved = solving.together(Budget())

    if isinstance(solved, Impossible):
        assert best is None
        return None
    assert (solved.worth, solved.bound) == (best, best)
    assert list(solved.spots) == sorted(solved.spots)
    spots = chosen(solving.problem, solved.spots)
    assert is_complete(solving.problem, spots)
    assert keeps_the_rules(solving.problem, spots)
    assert worth_of_choice(solving.problem, spots) == solved.worth
    return solved.worth


@settings(max_examples=200, deadline=None, derandomize=True)
@given(problems())
def test_the_choice_is_the_best_of_all_and_proved(problem: Problem) -> None:
    assert_best(problem)


@pytest.mark.parametrize("hundred", range(SEEDS // 100))
def test_the_choice_is_the_best_of_all_and_proved_on_crowded_problems(hundred: int) -> None:
    for seed in range(100 * hundred, 100 * hundred + 100):
        assert_best(problem_of(seed))
