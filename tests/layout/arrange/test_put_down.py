from dataclasses import replace
from random import Random

import pytest

from layout.arrange.problem import Problem
from layout.arrange.put_down import MomentsStanding
from tests.layout.arrange.by_hand import Asked, beside, problem_with
from tests.layout.arrange.random_problems import chosen, keeps_the_rules, problem_of


def put_one_by_one(problem: Problem, spots: list[int]) -> list[bool]:
    standing = MomentsStanding(problem)
    return [not standing.is_in_the_way(spot) and standing.put(spot) for spot in spots]


@pytest.mark.parametrize("order", [[0, 1, 2], [2, 1, 0], [1, 2, 0]])
def test_over_the_end_of_the_turn_tracks_too_close_push_each_other(order: list[int]) -> None:
    # 5 to 40 ms after the inner one is forbidden; from 59,970 to the next turn's 15 are 45 ms. The inner one is pushed
    # to 59,990 by the one before it, so the outer one sounds at 30 or not at all.
    def asked(nudge_ms: float) -> Problem:
        outer = Asked(at_ms=15, tracks=(1,), nudge_ms=nudge_ms)
        inners = Asked(at_ms=59_890, nudge_ms=0), Asked(at_ms=59_970, nudge_ms=20)
        return problem_with([outer, *inners], least_ms=(100, 100), besides=(beside(5, 40),))

    assert put_one_by_one(asked(15), order) == [True, True, True]
    assert put_one_by_one(asked(14), order) == [True, True, False]


def test_one_more_is_put_down_just_where_every_rule_of_time_and_web_can_be_kept() -> None:
    put, refused, near = 0, 0, 0
    for seed in range(1_000):
        chance, problem = Random(seed), replace(problem_of(seed), drive=None)
        spots = [
            chance.choice(mine)
            for pluck in range(problem.pluck_count)
            if (mine := range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])))
        ]
        chance.shuffle(spots)
        standing, there = MomentsStanding(problem), list[int]()
        for spot in spots:
            in_the_way = standing.is_in_the_way(spot)
            stands = not in_the_way and standing.put(spot)

            assert stands == keeps_the_rules(problem, chosen(problem, sorted([*there, spot])))
            there += [spot] * stands
            put, refused, near = put + stands, refused + (not stands and not in_the_way), near + in_the_way
    assert min(put, refused, near) >= 50
