"""Teeth of wildly uneven stiffness and lift: windows longer than a turn, loads a million times others."""

from dataclasses import replace

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange.budget import Budget
from layout.arrange.coupled import best_coupled
from layout.arrange.fitting import fitted
from layout.arrange.loads import hard_moments, heavy_moments, lifted_count, overloads
from layout.arrange.problem import Drive, Lift, Problem
from layout.arrange.solving import Solved, Solving
from tests.layout.arrange.by_hand import MS, Asked, drive_of, problem_with
from tests.layout.arrange.random_problems import (
    best_worth,
    chosen,
    is_complete,
    keeps_the_rules,
    problems,
    spots_of,
    worth_of_choice,
)
from tests.thorough import tried

WILD_LOADS = (1, 40, 10**6, 10**12)  # thousandths of a N mm; the last is 2000 N/mm lifted by 2000 mm on a large disc
WILD_WINDOWS_MS = (0.01, 20, 70_000, 3 * 10**6)  # of turns of some seconds to a minute


@st.composite
def wild_problems(draw: st.DrawFn) -> Problem:
    """Small problems whose teeth are drawn from the ends of what a movement may state."""
    problem = draw(problems())
    lift = st.builds(
        lambda load, window_ms: Lift(load=load, window_ns=max(round(window_ms * MS), 1)),
        st.sampled_from(WILD_LOADS),
        st.sampled_from(WILD_WINDOWS_MS),
    )
    tracks = len(problem.ringing_ns)
    lifts = draw(st.lists(st.lists(lift, max_size=2).map(tuple), min_size=tracks, max_size=tracks))
    limit = draw(st.sampled_from((0, 41, 500_000, 2 * 10**6, 10**12)))
    return replace(problem, drive=Drive(lifts=tuple(lifts), limit=limit))


def test_a_tooth_lifted_for_this_turn_and_the_next_loads_the_disc_with_both() -> None:
    # One turn is 1 s, the window 1.5 s: at its release 100 stand, and for the next one 100 · 0.5/1.5, rounded up to 34.
    plucks = [Asked(at_ms=500)]
    too_weak = problem_with(plucks, least_ms=(1,), turn_ms=1000, drive=drive_of((100,), 1500, 133))
    enough = problem_with(plucks, least_ms=(1,), turn_ms=1000, drive=drive_of((100,), 1500, 134))

    assert overloads(too_weak, np.arange(1)) == [(0,)]
    assert list(hard_moments(too_weak, np.arange(1))) == [([0], [134])]
    assert overloads(enough, np.arange(1)) == []


def test_the_program_leaves_out_what_is_too_heavy_by_both_its_turns() -> None:
    problem = problem_with([Asked(at_ms=500)], least_ms=(1,), turn_ms=1000, drive=drive_of((100,), 1500, 133))

    found = best_coupled(problem, np.arange(1), Budget())

    assert (found.spots, found.bound) == ((), 0)


def test_a_light_tooth_is_not_lost_beside_one_a_million_million_times_as_heavy() -> None:
    # The heavy one can never sound; of the light ones only two of three can, 2 · 50 against 149.
    plucks = [Asked(at_ms=1000, tracks=(track,)) for track in range(4)]
    problem = problem_with(plucks, least_ms=(1,) * 4, drive=drive_of((10**12, 50, 50, 50), 10, 149))

    found = best_coupled(problem, np.arange(4), Budget())

    assert (found.worth, found.bound) == (2000, 2000)


@settings(max_examples=tried(200), deadline=None, derandomize=True)
@given(wild_problems())
def test_loads_are_counted_as_one_by_one(problem: Problem) -> None:
    drive = problem.drive
    assert drive is not None
    spots = np.arange(problem.spot_count)

    counted = []
    for at_ns in sorted(set(problem.asked_ns.tolist())):
        loads = {
            spot: sum(drive.load(int(problem.track[spot]), asked_ns - at_ns) for asked_ns in (now_ns, now_ns + turn_ns))
            for spot, now_ns in enumerate(problem.asked_ns.tolist())
            for turn_ns in (problem.turn_ns,)
        }
        heaviest = {
            pluck: max(load for spot, load in loads.items() if problem.pluck[spot] == pluck)
            for pluck in problem.pluck.tolist()
        }
        if sum(heaviest.values()) > drive.limit:
            counted.append({spot: load for spot, load in loads.items() if load})

    found = [dict(zip(*moment, strict=True)) for moment in heavy_moments(problem, spots)]
    assert found == counted
    assert sum(map(len, found)) <= lifted_count(problem, spots)


@settings(max_examples=tried(150), deadline=None, derandomize=True)
@given(wild_problems())
def test_the_best_choice_is_found_and_kept_within_the_rules_whatever_the_teeth(problem: Problem) -> None:
    problem = replace(problem, must_sound=np.zeros(problem.pluck_count, dtype=np.bool_))
    solving = Solving(problem)

    solved = solving.together(Budget())

    assert isinstance(solved, Solved)
    spots = chosen(solving.problem, solved.spots)
    assert keeps_the_rules(solving.problem, spots)
    assert worth_of_choice(solving.problem, spots) == solved.worth <= solved.bound
    if not solving.problem.piled:
        assert solved.worth == best_worth(solving.problem)


@settings(max_examples=tried(100), deadline=None, derandomize=True)
@given(wild_problems())
def test_what_is_put_down_by_hand_keeps_the_rules_whatever_the_teeth(problem: Problem) -> None:
    problem = replace(problem, must_sound=np.zeros(problem.pluck_count, dtype=np.bool_))

    spots = fitted(problem, np.arange(problem.pluck_count), ())

    assert spots is not None
    standing = chosen(problem, spots)
    assert keeps_the_rules(problem, standing)
    taken = {spot.pluck for spot in standing}
    for pluck in set(range(problem.pluck_count)) - taken:
        for spot in spots_of(problem, pluck):
            one_more = sorted([*standing, spot], key=lambda one: one.pluck)
            assert not (is_complete(problem, one_more) and keeps_the_rules(problem, one_more))
