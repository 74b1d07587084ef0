"""The solver against the trial of every choice, on random small problems."""

from collections import Counter
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings

from layout.arrange.budget import Budget
from layout.arrange.problem import NO_PLUCK, Problem
from layout.arrange.solving import Impossible, Solving
from layout.arrange.spreading import with_spread_chords
from layout.mechanics.arrays import frozen_ints
from tests.layout.arrange.random_problems import (
    best_worth,
    chosen,
    is_complete,
    keeps_the_rules,
    problem_of,
    problems,
    worth_of_choice,
)
from tests.thorough import tried

SEEDS = 800  # the first of them; tens of thousands were run while this was written


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


@settings(max_examples=tried(200), deadline=None, derandomize=True)
@given(problems())
def test_the_choice_is_the_best_of_all_and_proved(problem: Problem) -> None:
    assert_best(problem)


@pytest.mark.parametrize("hundred", range(SEEDS // 100))
def test_the_choice_is_the_best_of_all_and_proved_on_crowded_problems(hundred: int) -> None:
    for seed in range(100 * hundred, 100 * hundred + 100):
        assert_best(problem_of(seed))


@pytest.mark.parametrize(("nodes", "states"), [(0, 0), (1, 1), (2, 20)])
def test_a_solver_out_of_budget_keeps_the_rules_and_a_true_bound(nodes: int, states: int) -> None:
    for seed in range(200):
        problem = problem_of(seed)
        best = best_worth(with_spread_chords(problem))
        solving = Solving(problem)

        solved = solving.together(Budget(nodes=nodes, states=states))

        if isinstance(solved, Impossible):
            # Out of budget it may fail to find room for what must sound; else there is always a choice.
            assert problem.must_sound.any()
            continue
        spots = chosen(solving.problem, solved.spots)
        assert best is not None
        assert solved.worth <= best <= solved.bound
        assert is_complete(solving.problem, spots)
        assert keeps_the_rules(solving.problem, spots)
        assert worth_of_choice(solving.problem, spots) == solved.worth


def test_every_rule_decides_some_of_the_crowded_problems() -> None:
    # Each rule left aside lets more be kept on some of them: so none is there for nothing.
    decided: Counter[str] = Counter()
    for seed in range(200):
        problem = problem_of(seed)
        best = best_worth(problem) or 0
        count = problem.pluck_count
        for name, freer in {
            "besides": replace(problem, besides=()),
            "drive": replace(problem, drive=None),
            "turn": replace(problem, turn_ns=10**10),
            "parent": replace(problem, parent=frozen_ints([NO_PLUCK] * count)),
            "must_sound": replace(problem, must_sound=np.zeros(count, dtype=np.bool_)),
            "ringing": replace(problem, ringing_ns=problem.ringing_ns * 0),
        }.items():
            decided[name] += (best_worth(freer) or 0) > best
        fixed = replace(problem, earliest_ns=problem.asked_ns, latest_ns=problem.asked_ns)
        decided["nudge"] += (best_worth(fixed) or 0) < best
        decided["spread"] += (best_worth(with_spread_chords(problem)) or 0) > best

    assert {name for name, count in decided.items() if count} == {
        "besides", "drive", "turn", "parent", "must_sound", "ringing", "nudge", "spread",
    }  # fmt: skip
