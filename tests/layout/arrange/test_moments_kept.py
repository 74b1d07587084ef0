from collections import Counter
from itertools import pairwise, product
from random import Random

import pytest

from layout.arrange import moments_kept as module
from layout.arrange.moments_kept import Moments, Overrun, Push, kept_as_asked, moments_kept, pushes_of
from layout.arrange.problem import Problem
from tests.layout.arrange.by_hand import MS, Asked, beside, problem_with
from tests.layout.arrange.random_problems import problem_of


def test_plucks_far_apart_may_sound_as_early_as_their_windows_begin() -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=2000)])

    assert moments_kept(problem, [0, 1]) == Moments(earliest_ns={0: 980 * MS, 1: 1980 * MS})


def test_a_pluck_pushes_the_next_and_that_the_one_after() -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1070), Asked(at_ms=1160)])

    assert moments_kept(problem, [0, 1, 2]) == Moments(earliest_ns={0: 980 * MS, 1: 1080 * MS, 2: 1180 * MS})


def test_none_sounds_before_what_is_stated() -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1090)])

    kept = moments_kept(problem, [0, 1], {0: 1005 * MS, 1: 0})

    assert kept == Moments(earliest_ns={0: 1005 * MS, 1: 1105 * MS})


def test_an_overrun_names_the_plucks_that_push_and_no_others() -> None:
    # 50 ms is played by itself; from 980 on two repeats of 100 end at 1180, past 1125 + 20.
    times_ms = (50, 1000, 1070, 1125, 3000)
    problem = problem_with([Asked(at_ms=at_ms) for at_ms in times_ms])

    assert moments_kept(problem, range(5)) == Overrun(spots=(1, 2, 3), on_one_track=True, wraps=False)


def test_an_overrun_over_the_end_of_the_turn_says_so() -> None:
    # From 59,960 to the next turn's 30 are 70 ms; with nudges of 10 each 90 of the 100 needed.
    problem = problem_with([Asked(at_ms=30, nudge_ms=10), Asked(at_ms=59_960, nudge_ms=10)])

    assert moments_kept(problem, [0, 1]) == Overrun(spots=(1, 0), on_one_track=True, wraps=True)


def test_a_track_that_needs_more_than_a_turn_plays_nothing() -> None:
    problem = problem_with([Asked(at_ms=30)], least_ms=(61_000,))

    assert moments_kept(problem, [0]) == Overrun(spots=(0,), on_one_track=True, wraps=True)


def test_a_track_that_needs_exactly_a_turn_plays_once() -> None:
    problem = problem_with([Asked(at_ms=30)], least_ms=(60_000,))

    assert moments_kept(problem, [0]) == Moments(earliest_ns={0: 10 * MS})


def test_close_tracks_push_each_other_to_either_side() -> None:
    # 5 to 40 ms after the inner is forbidden. The outer is asked 42 after and stays after; one asked 3 after
    # stays before: the inner may then sound no earlier than 5 before it.
    after = problem_with([Asked(at_ms=1000), Asked(at_ms=1042, tracks=(1,))], least_ms=(1, 1), besides=(beside(5, 40),))
    before = problem_with(
        [Asked(at_ms=1000), Asked(at_ms=1003, tracks=(1,))], least_ms=(1, 1), besides=(beside(5, 40),)
    )

    assert moments_kept(after, [0, 1], {0: 1000 * MS, 1: 0}) == Moments(earliest_ns={0: 1000 * MS, 1: 1040 * MS})
    assert moments_kept(before, [0, 1], {0: 0, 1: 1003 * MS}) == Moments(earliest_ns={0: 998 * MS, 1: 1003 * MS})


def test_close_tracks_push_each_other_where_the_stretch_lies_before_the_inner_one() -> None:
    # The outer one may sound 40 ms before the inner or earlier, or from 5 before on; each is asked 2 ms clear of that.
    def asked(outer_ms: float) -> Problem:
        outer, inner = Asked(at_ms=outer_ms, tracks=(1,)), Asked(at_ms=1000)
        return problem_with([outer, inner], least_ms=(1, 1), besides=(beside(-40, -5),))

    before = moments_kept(asked(958), [0, 1], {0: 958 * MS, 1: 0})
    after = moments_kept(asked(997), [0, 1], {0: 0, 1: 1000 * MS})

    assert before == Moments(earliest_ns={0: 958 * MS, 1: 998 * MS})
    assert after == Moments(earliest_ns={0: 995 * MS, 1: 1000 * MS})


def test_an_overrun_over_two_tracks_says_so() -> None:
    # Track 0 pushes its second pluck to 1000, and that pushes the outer one, asked 42 after 978, to 1040: past 1030.
    problem = problem_with(
        [Asked(at_ms=900, nudge_ms=0), Asked(at_ms=978, nudge_ms=30), Asked(at_ms=1020, tracks=(1,), nudge_ms=10)],
        least_ms=(100, 100),
        besides=(beside(5, 40),),
    )

    assert moments_kept(problem, [0, 1, 2]) == Overrun(spots=(0, 1, 2), on_one_track=False, wraps=False)


def test_no_plucks_are_kept() -> None:
    assert moments_kept(problem_with([]), []) == Moments(earliest_ns={})


def some_choice(problem: Problem, seed: int) -> list[int]:
    """A spot of most plucks, whatever it breaks."""
    chance, spots = Random(seed), []
    for pluck in range(problem.pluck_count):
        mine = range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1]))
        if mine and chance.random() < 0.9:
            spots.append(chance.choice(mine))
    return spots


def pushes_one_by_one(problem: Problem, spots: list[int]) -> list[Push]:
    """Straight from the text of problem.py, less the stretches that no nudge reaches."""
    found = []
    of_track = {track: [one for one in spots if problem.track[one] == track] for track in range(3)}
    for row in of_track.values():
        found += [Push(earlier=one, later=two, least_ns=int(problem.least_ns[one])) for one, two in pairwise(row)]
        if row:
            round_ns = int(problem.least_ns[row[-1]]) - problem.turn_ns
            found.append(Push(earlier=row[-1], later=row[0], least_ns=round_ns, wraps=True))
    for pair, turn_ns in product(problem.besides, (-problem.turn_ns, 0, problem.turn_ns)):
        inners, outers = of_track[pair.inner_index], of_track[pair.outer_index]
        for inner, outer in product(inners, outers):
            apart_ns = int(problem.asked_ns[outer] - problem.asked_ns[inner]) + turn_ns
            reach_ns = int(problem.reach_ns[inners].max() + problem.reach_ns[outers].max())
            if pair.from_ns - reach_ns <= apart_ns <= pair.from_ns:
                found.append(Push(earlier=outer, later=inner, least_ns=turn_ns - pair.from_ns))
            elif pair.from_ns < apart_ns <= pair.to_ns + reach_ns:
                found.append(Push(earlier=inner, later=outer, least_ns=pair.to_ns - turn_ns))
    return found


def test_pushes_found_track_by_track_at_once_are_those_found_one_by_one() -> None:
    beside_each_other = 0
    for seed in range(500):
        problem = problem_of(seed)
        spots = some_choice(problem, seed)

        pushes = pushes_of(problem, spots).listed()

        assert Counter(pushes) == Counter(pushes_one_by_one(problem, spots))
        beside_each_other += sum(problem.track[push.earlier] != problem.track[push.later] for push in pushes)
    assert beside_each_other >= 50


def test_all_pushed_at_once_come_to_the_moments_they_come_to_one_by_one(monkeypatch: pytest.MonkeyPatch) -> None:
    cases = [(problem_of(seed), some_choice(problem_of(seed), seed)) for seed in range(700)]
    # From somewhere in each window on, so that pushes begin here and there.
    begins = [
        {spot: Random(spot).randint(int(problem.earliest_ns[spot]), int(problem.asked_ns[spot])) for spot in spots}
        for problem, spots in cases
    ]

    at_once = [moments_kept(*case, begin) for case, begin in zip(cases, begins, strict=True)]
    monkeypatch.setattr(module, "_MOST_ROUNDS", 0)
    one_by_one = [moments_kept(*case, begin) for case, begin in zip(cases, begins, strict=True)]

    assert at_once == one_by_one
    pushed = [one.earliest_ns != begin for one, begin in zip(at_once, begins, strict=True) if isinstance(one, Moments)]
    assert min(sum(pushed), sum(isinstance(one, Overrun) for one in at_once)) >= 50


def test_what_is_kept_as_asked_has_moments_and_keeps_every_push_at_those_asked_for() -> None:
    kept = 0
    for seed in range(500):
        problem = problem_of(seed)
        spots = some_choice(problem, seed)

        as_asked = kept_as_asked(problem, spots)

        asked_ns = problem.asked_ns.tolist()
        pushes = pushes_one_by_one(problem, spots)
        assert as_asked == all(asked_ns[one.later] - asked_ns[one.earlier] >= one.least_ns for one in pushes)
        assert not as_asked or isinstance(moments_kept(problem, spots), Moments)
        kept += as_asked
    assert 50 <= kept <= 450
