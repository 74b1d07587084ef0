import numpy as np
import pytest
from hypothesis import given, settings

from layout.arrange import crowding
from layout.arrange.crowding import crowded_ns
from layout.arrange.problem import Problem
from layout.mechanics.arrays import IntArray
from tests.layout.arrange.by_hand import MS, Asked, drive_of, problem_with
from tests.layout.arrange.random_problems import problem_of
from tests.layout.arrange.test_wild_teeth import wild_problems
from tests.thorough import tried


def in_time(problem: Problem) -> IntArray:
    return np.argsort(problem.asked_ns, kind="stable")


def crowded_one_by_one_ns(problem: Problem) -> list[int]:
    """The same moments, told from every spot of every track at every moment."""
    drive = problem.drive
    assert drive is not None
    found = []
    for moment_ns in sorted(set(problem.asked_ns.tolist())):
        most = 0.0
        for track, lifts in enumerate(drive.lifts):
            asked_ns = problem.asked_ns[problem.track == track].tolist()
            for lift in lifts:
                for turn_ns in (0, problem.turn_ns):
                    before_ns = [one_ns + turn_ns - moment_ns for one_ns in asked_ns]
                    lifted_ns = [one_ns for one_ns in before_ns if 0 <= one_ns < lift.window_ns]
                    if lifted_ns:
                        left_ns = len(lifted_ns) * float(lift.window_ns) - float(sum(lifted_ns)) + 4.0
                        most += lift.load * (left_ns / lift.window_ns) + len(lifted_ns)
        if most * (1 + 1e-6) > drive.limit:
            found.append(moment_ns)
    return found


def test_a_moment_is_crowded_where_all_that_is_lifted_may_be_too_much() -> None:
    # 100 at its own release and 60 of the tooth released 4 of 10 ms later, each rounded up by one: 162 at most.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1004, tracks=(1,)), Asked(at_ms=5000)]
    crowded = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 160))
    carried = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 163))

    assert [crowded_ns(one, one.drive, in_time(one)).tolist() for one in (crowded, carried) if one.drive] == [
        [1000 * MS],
        [],
    ]


def test_the_first_plucks_of_the_next_turn_crowd_the_end_of_this_one() -> None:
    # From 59,998 to the next turn's 2 are 4 ms: 100 + 60 again, each rounded up by one.
    plucks = [Asked(at_ms=2), Asked(at_ms=59_998, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 160))

    assert problem.drive is not None
    assert crowded_ns(problem, problem.drive, in_time(problem)).tolist() == [59_998 * MS]


def test_no_spots_crowd_nothing() -> None:
    problem = problem_with([Asked(at_ms=1000)], drive=drive_of((100,), 10, 1))

    assert problem.drive is not None
    assert crowded_ns(problem, problem.drive, np.zeros(0, dtype=np.int64)).tolist() == []


@pytest.mark.parametrize("cells_at_a_time", [1, 1 << 19])
def test_moments_told_row_by_row_are_those_told_spot_by_spot(
    monkeypatch: pytest.MonkeyPatch, cells_at_a_time: int
) -> None:
    monkeypatch.setattr(crowding, "_CELLS_AT_A_TIME", cells_at_a_time)
    crowded, asked = 0, 0
    for problem in map(problem_of, range(400)):
        if problem.drive is None:
            continue

        found = crowded_ns(problem, problem.drive, in_time(problem)).tolist()

        assert found == crowded_one_by_one_ns(problem)
        crowded, asked = crowded + len(found), asked + len(set(problem.asked_ns.tolist()))
    assert 50 <= crowded <= asked - 50


@settings(max_examples=tried(300), deadline=None, derandomize=True)
@given(wild_problems())
def test_they_are_those_told_spot_by_spot_whatever_the_teeth(problem: Problem) -> None:
    assert problem.drive is not None
    assert crowded_ns(problem, problem.drive, in_time(problem)).tolist() == crowded_one_by_one_ns(problem)
