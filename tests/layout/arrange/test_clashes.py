import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from layout.arrange.clashes import clashing
from layout.arrange.problem import NO_PLUCK, Problem
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with
from tests.layout.arrange.random_problems import Spot, keeps_the_rules, problem_of, spots_of
from tests.thorough import tried


def forced(at_ms: float, tracks: tuple[int, ...] = (0,)) -> Asked:
    return Asked(at_ms=at_ms, tracks=tracks, must_sound=True, nudge_ms=0)


def clash(problem: Problem) -> tuple[int, ...]:
    return clashing(problem, np.arange(problem.pluck_count))


def test_two_too_near_on_one_track_are_named_and_nobody_else() -> None:
    problem = problem_with([forced(0), forced(500), forced(1000), forced(1050), forced(2000)])

    assert clash(problem) == (2, 3)


def test_plucks_that_need_not_sound_are_not_named() -> None:
    problem = problem_with([forced(1000), Asked(at_ms=1050, nudge_ms=0), forced(1090)])

    assert clash(problem) == (0, 2)


def test_three_on_two_tracks_are_all_named() -> None:
    problem = problem_with(
        [forced(0, (0, 1)), forced(1000, (0, 1)), forced(1030, (0, 1)), forced(1060, (0, 1))], least_ms=(100, 100)
    )

    assert clash(problem) == (1, 2, 3)


def test_the_first_and_the_last_of_a_turn_may_clash() -> None:
    assert clash(problem_with([forced(20), forced(30_000), forced(59_950)])) == (0, 2)


def test_tracks_too_close_and_teeth_too_heavy_clash() -> None:
    plucks = [forced(0), forced(1000), forced(1000, (1,)), forced(2000)]
    web = problem_with(plucks, least_ms=(50, 50), besides=(beside(-1, 1),))
    heavy = problem_with(plucks, least_ms=(50, 50), drive=drive_of((60, 60), 10, 100))

    assert clash(web) == (1, 2)
    assert clash(heavy) == (1, 2)


def test_a_pluck_may_clash_with_itself() -> None:
    assert clash(problem_with([forced(0), forced(1000, (1,))], least_ms=(100, 61_000))) == (1,)


def have_room(problem: Problem, plucks: list[int]) -> bool:
    """Whether all these plucks fit, by trying every assignment."""

    def go_on(left: list[int], spots: list[Spot]) -> bool:
        if not left:
            return True
        ways = ([*spots, spot] for spot in spots_of(problem, left[0]))
        return any(go_on(left[1:], one) for one in ways if keeps_the_rules(problem, one))

    return go_on(plucks, [])


@settings(max_examples=tried(100), deadline=None, derandomize=True)
@given(st.integers(0, 10**9))
def test_what_clashes_has_no_room_and_has_room_without_any_one(seed: int) -> None:
    problem = problem_of(seed)
    # Rulings name notes, so extra plucks are never demanded.
    problem.must_sound[:] = (np.diff(problem.first_spot) > 0) & (problem.parent == NO_PLUCK)
    demanded = np.flatnonzero(problem.must_sound)
    assume(not have_room(problem, demanded.tolist()))

    clash_of = list(clashing(problem, demanded))

    assert not have_room(problem, clash_of)
    for pluck in clash_of:
        assert have_room(problem, [one for one in clash_of if one != pluck])
