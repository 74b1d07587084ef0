import numpy as np
import pytest

from layout.arrange import by_time
from layout.arrange.budget import Budget
from layout.arrange.by_time import Best, Stuck, TooCrowded, best_by_time
from layout.arrange.problem import Problem
from layout.arrange.steps import Steps
from tests.layout.arrange.random_problems import problem_of


def found_of(problem: Problem) -> tuple[Best | Stuck | TooCrowded, int]:
    """What is found of all plucks as one part, and the states looked at."""
    plucks, budget = np.arange(problem.pluck_count), Budget()
    found = best_by_time(Steps(problem, plucks), plucks, budget)
    return found, Budget().states_left - budget.states_left


def test_states_held_against_each_other_one_by_one_or_at_once_leave_the_same(monkeypatch: pytest.MonkeyPatch) -> None:
    problems = [problem_of(seed) for seed in range(300)]

    monkeypatch.setattr(by_time, "_FEW", 10**9)
    one_by_one = [found_of(problem) for problem in problems]
    monkeypatch.setattr(by_time, "_FEW", 0)
    at_once = [found_of(problem) for problem in problems]
    monkeypatch.setattr(by_time, "_unbeaten", lambda states: states)
    all_kept = [found_of(problem) for problem in problems]

    assert at_once == one_by_one
    fewer = [kept > left for (_, left), (_, kept) in zip(one_by_one, all_kept, strict=True)]
    assert sum(fewer) >= 50
