from collections import Counter
from itertools import product

import numpy as np

from layout.arrange.nearness import near_pairs
from layout.arrange.problem import Problem
from tests.layout.arrange.by_hand import Asked, beside, problem_with
from tests.layout.arrange.random_problems import problem_of


def pairs_of(problem: Problem) -> list[tuple[int, int]]:
    return list(near_pairs(problem, np.arange(problem.spot_count)))


def pairs_one_by_one(problem: Problem) -> list[tuple[int, int]]:
    """Straight from rule 3 of problem.py: every pair, stretch and turn."""
    found = []
    for pair, turn_ns in product(problem.besides, (-problem.turn_ns, 0, problem.turn_ns)):
        inners, outers = (np.flatnonzero(problem.track == track) for track in (pair.inner_index, pair.outer_index))
        for inner, outer in product(inners.tolist(), outers.tolist()):
            apart_ns = int(problem.asked_ns[outer] - problem.asked_ns[inner]) + turn_ns
            if problem.pluck[inner] != problem.pluck[outer] and pair.from_ns < apart_ns < pair.to_ns:
                found.append((inner, outer))
    return found


def test_spots_within_a_forbidden_stretch_are_a_pair_and_those_at_its_ends_are_not() -> None:
    # 5 to 40 ms after the inner one is forbidden.
    inner = Asked(at_ms=1000)
    outers = [Asked(at_ms=at_ms, tracks=(1,)) for at_ms in (1004, 1005, 1006, 1039, 1040, 1041)]

    problem = problem_with([inner, *outers], least_ms=(1, 1), besides=(beside(5, 40),))

    assert pairs_of(problem) == [(0, 3), (0, 4)]


def test_a_stretch_of_tracks_that_have_no_spots_hides_no_other() -> None:
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    nobody_there = beside(-1, 1, inner=1, outer=2)

    problem = problem_with(plucks, least_ms=(1, 1, 1), besides=(nobody_there, beside(-1, 1)))

    assert pairs_of(problem) == [(0, 1)]


def test_spots_are_near_over_the_end_of_the_turn_whichever_comes_first() -> None:
    # From 59,990 to the next turn's 10 are 20 ms.
    plucks = [Asked(at_ms=10, tracks=(0, 1)), Asked(at_ms=59_990, tracks=(0, 1))]

    outer_later = problem_with(plucks, least_ms=(1, 1), besides=(beside(19, 21),))
    inner_later = problem_with(plucks, least_ms=(1, 1), besides=(beside(-21, -19),))

    # Spots 0 and 1 are those of 10 ms on the inner and the outer track, 2 and 3 those of 59,990.
    assert pairs_of(outer_later) == [(2, 1)]
    assert pairs_of(inner_later) == [(0, 3)]


def test_two_spots_of_one_pluck_are_no_pair() -> None:
    problem = problem_with([Asked(at_ms=1000, tracks=(0, 1))], least_ms=(1, 1), besides=(beside(-1, 1),))

    assert pairs_of(problem) == []


def test_pairs_found_by_moment_are_those_found_one_by_one() -> None:
    pairs = 0
    for problem in map(problem_of, range(200)):
        assert Counter(pairs_of(problem)) == Counter(pairs_one_by_one(problem))
        pairs += len(pairs_of(problem))
    assert pairs >= 50
