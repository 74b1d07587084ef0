"""The budget's count of all work that no program counts: what runs out of it is sound, and the same every time."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange import coupled, solving
from layout.arrange.budget import LOOKS_TO_BEGIN, LOOKS_TO_WRITE, Budget
from layout.arrange.coupled import best_coupled
from layout.arrange.playing import played
from layout.arrange.problem import Problem
from layout.arrange.solving import Solved, Solving
from tests.layout.arrange.by_hand import Asked, drive_of, problem_with
from tests.layout.arrange.random_problems import best_worth, chosen, is_complete, keeps_the_rules, worth_of_choice
from tests.layout.arrange.test_wild_teeth import wild_problems
from tests.thorough import tried


def solved_with(problem: Problem, looks: int) -> tuple[Solved, Problem, Budget]:
    solving_, budget = Solving(problem), Budget(looks=looks)
    found = solving_.together(budget)
    assert isinstance(found, Solved)
    return found, solving_.problem, budget


def test_looks_are_spent_until_none_are_left() -> None:
    budget = Budget(looks=5)

    budget.spend_looks(4)

    assert (budget.looks_left, budget.looks_spent, budget.stopped) == (1, 4, None)
    budget.spend_looks(4)
    assert (budget.looks_left, budget.looks_spent, budget.stopped) == (0, 8, "nodes")


def test_a_program_takes_looks_for_its_beginning_its_loads_and_its_entries() -> None:
    # One row at one moment, of both spots: 2 lifted, 2 entries. Once begun to be written, once solved.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((60, 60), 10, 100))
    budget = Budget()

    best_coupled(problem, np.arange(2), budget)

    assert budget.looks_spent == 2 * LOOKS_TO_BEGIN + LOOKS_TO_WRITE * (2 + 2)


def test_a_program_with_more_lifted_than_is_looked_at_is_not_begun(monkeypatch: pytest.MonkeyPatch) -> None:
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((60, 60), 10, 100))
    monkeypatch.setattr(coupled, "MOST_LIFTED", 1)

    found = best_coupled(problem, np.arange(2), Budget())

    assert (found.spots, found.bound) == (None, 2000)


def test_a_choice_that_lifts_too_many_to_be_judged_is_put_down_by_hand(monkeypatch: pytest.MonkeyPatch) -> None:
    plucks = [Asked(at_ms=1000, nudge_ms=0), Asked(at_ms=1000, tracks=(1,), nudge_ms=0)]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((60, 60), 10, 100))
    proved = solved_with(problem, 10**6)[0]
    monkeypatch.setattr(solving, "MOST_LIFTED", 1)

    found = solved_with(problem, 10**6)[0]

    assert (proved.worth, proved.bound) == (1000, 1000)
    assert (found.worth, found.bound) == (1000, 2000)


def test_chords_are_not_spread_where_looking_for_them_takes_too_long(monkeypatch: pytest.MonkeyPatch) -> None:
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((60, 60), 10, 100))

    spread = solved_with(problem, 10**6)[0]
    monkeypatch.setattr(solving, "MOST_LIFTED", 1)
    as_asked = solved_with(problem, 10**6)[0]

    # 20 ms either way takes the two out of each other's 10 ms; unspread one is left out, and that is not proved.
    assert (spread.worth, spread.bound) == (2000, 2000)
    assert (as_asked.worth, as_asked.bound) == (1000, 2000)


@settings(max_examples=tried(150), deadline=None, derandomize=True)
@given(wild_problems(), st.sampled_from((0, 50, 4_000, 12_000)))
def test_out_of_looks_a_choice_is_sound_below_its_bound_and_the_same_again(problem: Problem, looks: int) -> None:
    problem = replace(problem, must_sound=np.zeros(problem.pluck_count, dtype=np.bool_))

    found, widened, budget = solved_with(problem, looks)

    spots = chosen(widened, found.spots)
    assert is_complete(widened, spots)
    assert keeps_the_rules(widened, spots)
    assert worth_of_choice(widened, spots) == found.worth <= found.bound
    best = best_worth(problem)
    assert best is not None
    assert best <= found.bound
    assert not played(widened, found.spots).too_heavy
    again, _, budget_again = solved_with(problem, looks)
    assert (again.spots, again.bound, budget_again.looks_left) == (found.spots, found.bound, budget.looks_left)


def test_a_pluck_that_comes_later_for_want_of_time_keeps_its_window_and_its_track() -> None:
    # The second is asked 10 ms too soon after the first: in haste it alone is moved, by those 10 ms.
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1090)], least_ms=(100,))

    found = played(problem, (0, 1), in_haste=True)

    assert (found.spots, dict(found.at_ns), found.too_heavy) == ((0, 1), {0: 1_000_000_000, 1: 1_100_000_000}, ())


def test_a_large_choice_is_played_in_haste_once_time_is_over(monkeypatch: pytest.MonkeyPatch) -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1090, worth=9000)], least_ms=(100,))
    times_s = iter([0.0])
    hasty, unhurried = (Budget(time_limit_s=1, clock=lambda: next(times_s, 9.0)) for _ in range(2))

    unhurried_ns = Solving(problem).together(unhurried)
    monkeypatch.setattr(solving, "MOST_AT_LEISURE", 1)
    hasty_ns = Solving(problem).together(hasty)

    assert isinstance(unhurried_ns, Solved)
    assert isinstance(hasty_ns, Solved)
    # With care the lighter gives way, and to the earlier side; in haste the later one.
    assert unhurried_ns.playing.played.at_ns[0] == pytest.approx(990_000_000, abs=5)
    assert hasty_ns.playing.played.at_ns == {0: 1_000_000_000, 1: 1_100_000_000}
