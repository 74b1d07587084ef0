"""By hand: a millisecond of nudge costs 1 up to 6 ms, 3 up to 10 ms and 10 beyond, each times the worth."""

import pytest
from hypothesis import given, settings

from layout.arrange.budget import Budget
from layout.arrange.moments_kept import pushes_of
from layout.arrange.nudging import nudged
from layout.arrange.problem import Problem
from layout.arrange.solving import Impossible, Solving
from tests.layout.arrange.by_hand import MS, Asked, beside, problem_with
from tests.layout.arrange.random_problems import problems
from tests.thorough import tried


def nudges_ms(problem: Problem) -> list[float]:
    """The nudge of every spot of a problem whose spots are all chosen."""
    at_ns = nudged(problem, range(problem.spot_count))
    return [(at_ns[spot] - int(problem.asked_ns[spot])) / MS for spot in range(problem.spot_count)]


def test_nothing_moves_where_nothing_must() -> None:
    problem = problem_with([Asked(at_ms=0), Asked(at_ms=100), Asked(at_ms=500)])

    assert nudges_ms(problem) == [0, 0, 0]


def test_no_plucks_have_no_moments() -> None:
    assert nudged(problem_with([]), []) == {}


def test_two_plucks_too_near_share_the_nudge_so_that_neither_is_heard() -> None:
    # 92 ms apart, 100 needed. Both within 6 ms cost 8; one alone would cost 6 + 2 · 3 = 12.
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1092)])

    first_ms, second_ms = nudges_ms(problem)

    assert second_ms - first_ms == pytest.approx(8, abs=1e-5)
    assert -6.00001 <= first_ms <= 0 <= second_ms <= 6.00001


def test_twelve_milliseconds_are_six_for_each() -> None:
    # 6 and 6 cost 12; 7 and 5 cost 6 + 3 + 5 = 14.
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1088)])

    assert nudges_ms(problem) == pytest.approx([-6, 6], abs=1e-5)


# 8 ms too near. A lighter pluck of worth 1 is moved up to 6 ms for 1 each, then 2 more for 3 each.
@pytest.mark.parametrize(
    ("heavier", "expected_ms"),
    [
        (2000, [-2, 6]),  # 2 more for 2 each on the heavier
        (4000, [0, 8]),  # 3 each on the lighter are less than 4
        (11000, [0, 8]),
    ],
)
def test_the_heavier_pluck_moves_less(heavier: int, expected_ms: list[float]) -> None:
    problem = problem_with([Asked(at_ms=1000, worth=heavier), Asked(at_ms=1092, worth=1000)])

    assert nudges_ms(problem) == pytest.approx(expected_ms, abs=1e-5)


def test_the_melody_stays_within_its_own_smaller_nudge() -> None:
    # 14 ms too near: the melody may move 6, so the other moves 8, though it weighs ten times as much.
    problem = problem_with([Asked(at_ms=1000, worth=10_000), Asked(at_ms=1086, worth=1000, nudge_ms=6)])

    assert nudges_ms(problem) == pytest.approx([-8, 6], abs=1e-5)


def test_of_a_chain_of_three_the_ends_give_way() -> None:
    # Twice 6 ms too near: the middle one would have to be paid beside what the ends pay.
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1094), Asked(at_ms=1188)])

    assert nudges_ms(problem) == pytest.approx([-6, 0, 6], abs=1e-5)


def test_a_run_that_fits_only_with_full_nudges_gets_them() -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1080), Asked(at_ms=1160)])

    assert nudges_ms(problem) == [-20, 0, 20]


def test_the_end_of_the_turn_pushes_too() -> None:
    # From 59,950 to the next turn's 30 are 80 ms, and 100 are needed: 20 in all, no ladder step above 10.
    problem = problem_with([Asked(at_ms=30), Asked(at_ms=59_950)])

    assert nudges_ms(problem) == pytest.approx([10, -10], abs=1e-5)


def test_a_note_of_the_same_chord_follows() -> None:
    # 8 ms too near. The last moves 6 for 6; the other 2 would cost it 6, and the chord of two 2 · 2 = 4.
    chord = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    problem = problem_with([*chord, Asked(at_ms=1092)], least_ms=(100, 100))

    assert nudges_ms(problem) == pytest.approx([-2, -2, 6], abs=1e-5)


def test_a_chord_breaks_where_one_of_its_notes_cannot_follow() -> None:
    # 26 ms too near, and the other note of the first one's chord may not be moved: a millisecond of the first
    # costs 1 + 5 for leaving its chord, from 6 on 3 + 5, from 10 on 10 + 5; of the last 1, 3, and from 10 on 10.
    chord = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,), nudge_ms=0)]
    problem = problem_with([*chord, Asked(at_ms=1074)], least_ms=(100, 100))

    assert nudges_ms(problem) == pytest.approx([-10, 0, 16], abs=1e-5)


# Two of one track are 25 ms too near, the first twenty times as heavy: the second would go all the way, to 1025.
@pytest.mark.parametrize(
    ("other_ms", "expected_ms"),
    [
        (1100, [0, 25]),
        (1021, [-5, 20]),  # 21 ms after the second as asked: heard as later, so the second goes to 1020 only
        (1015, [0, 25]),  # 15 ms after: no ear tells which was first
    ],
)
def test_notes_heard_one_after_the_other_keep_their_order(other_ms: float, expected_ms: list[float]) -> None:
    other = Asked(at_ms=other_ms, tracks=(1,), nudge_ms=0)
    pushed = [Asked(at_ms=950, worth=2000), Asked(at_ms=1000, worth=100, nudge_ms=30)]
    problem = problem_with([*pushed, other], least_ms=(75, 75))

    assert nudges_ms(problem) == pytest.approx([*expected_ms, 0], abs=1e-5)


def test_the_order_is_worth_more_than_any_nudge() -> None:
    # The first weighs twenty plain notes; still it moves 5 ms rather than let the second pass the third.
    pushed = [Asked(at_ms=950, worth=20_000), Asked(at_ms=1000, nudge_ms=30)]
    problem = problem_with([*pushed, Asked(at_ms=1021, tracks=(1,), nudge_ms=0)], least_ms=(75, 75))

    assert nudges_ms(problem) == pytest.approx([-5, 20, 0], abs=1e-5)


def test_a_note_that_nothing_pushes_gives_way_to_keep_the_order() -> None:
    # The second must go to 1025; the third, asked 21 ms after it, goes to 1026.
    pushed = [Asked(at_ms=950, nudge_ms=0), Asked(at_ms=1000, nudge_ms=30)]
    problem = problem_with([*pushed, Asked(at_ms=1021, tracks=(1,), nudge_ms=30)], least_ms=(75, 75))

    assert nudges_ms(problem) == pytest.approx([0, 25, 5], abs=1e-5)


def test_the_order_is_given_up_where_nothing_can_keep_it() -> None:
    pushed = [Asked(at_ms=950, nudge_ms=0), Asked(at_ms=1000, nudge_ms=30)]
    problem = problem_with([*pushed, Asked(at_ms=1021, tracks=(1,), nudge_ms=0)], least_ms=(75, 75))

    assert nudges_ms(problem) == pytest.approx([0, 25, 0], abs=1e-5)


def test_plucks_of_close_tracks_stay_on_their_side_of_the_forbidden_stretch() -> None:
    # The outer is asked 12 ms after the inner, and 5 to 10 after are forbidden. The inner is pushed 9 ms later,
    # so the outer has to stay 10 ms after it: at 1019, 7 later than asked.
    problem = problem_with(
        [Asked(at_ms=909, nudge_ms=0), Asked(at_ms=1000), Asked(at_ms=1012, tracks=(1,))],
        least_ms=(100, 100),
        besides=(beside(5, 10),),
    )

    assert nudges_ms(problem) == pytest.approx([0, 9, 7], abs=1e-5)


def test_a_choice_without_moments_is_a_fault_of_the_program() -> None:
    problem = problem_with([Asked(at_ms=1000, nudge_ms=0), Asked(at_ms=1050, nudge_ms=0)])

    with pytest.raises(ValueError, match="no moments that keep every rule"):
        nudged(problem, [0, 1])


@settings(max_examples=tried(150), deadline=None, derandomize=True)
@given(problems())
def test_the_moments_lie_in_their_windows_and_keep_every_rule(problem: Problem) -> None:
    solving = Solving(problem)
    solved = solving.together(Budget())
    if isinstance(solved, Impossible):
        return

    at_ns = nudged(solving.problem, solved.spots)

    assert sorted(at_ns) == list(solved.spots)
    for spot, moment_ns in at_ns.items():
        assert solving.problem.earliest_ns[spot] <= moment_ns <= solving.problem.latest_ns[spot]
    for push in pushes_of(solving.problem, solved.spots).listed():
        assert at_ns[push.later] - at_ns[push.earlier] >= push.least_ns
    if all(
        problem_push_kept(solving.problem, push.earlier, push.later, push.least_ns)
        for push in pushes_of(solving.problem, solved.spots).listed()
    ):
        assert all(moment_ns == solving.problem.asked_ns[spot] for spot, moment_ns in at_ns.items())


def problem_push_kept(problem: Problem, earlier: int, later: int, least_ns: int) -> bool:
    """Whether a rule is kept at the moments asked for."""
    return int(problem.asked_ns[later] - problem.asked_ns[earlier]) >= least_ns
