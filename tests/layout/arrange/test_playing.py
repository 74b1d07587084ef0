"""Nudges that pile up more than the drive carries: kept apart where that can be, else chosen anew, never dropped."""

from dataclasses import replace

import numpy as np
import pytest

from layout.arrange import solving
from layout.arrange.budget import Budget
from layout.arrange.coupled import best_coupled
from layout.arrange.loads import overloads
from layout.arrange.playing import Playing, played
from layout.arrange.problem import Problem
from layout.arrange.searching import Found, Way, search
from layout.arrange.solving import Solved, Solving
from layout.arrange.spreading import with_spread_chords
from tests.layout.arrange.by_hand import MS, Asked, beside, drive_of, problem_with
from tests.layout.arrange.random_problems import problem_of
from tests.layout.arrange.test_spreading import chord_on

# One tooth is all the drive carries, over 50 ms. Track 1 needs 100 ms, and its two plucks are 88 ms apart.
DRIVE = drive_of([1000, 1000], window_ms=50, limit=1000)
LEAST_MS = (100, 100)


def solved(problem: Problem) -> Solved:
    found = Solving(problem).together(Budget())
    assert isinstance(found, Solved)
    return found


def nudges_ms(problem: Problem, spots: tuple[int, ...]) -> list[float]:
    at_ns = played(problem, spots).at_ns
    return [(at_ns[spot] - int(problem.asked_ns[spot])) / MS for spot in spots]


def test_plucks_that_nudges_bring_too_near_for_the_drive_are_kept_as_far_apart_as_asked() -> None:
    # -6 and +6 would cost least, but bring the second to 46 ms before the third, whose tooth is lifted by then.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1088), Asked(at_ms=1140, tracks=(1,), nudge_ms=0)]
    problem = problem_with(plucks, least_ms=LEAST_MS, drive=DRIVE)

    found = solved(problem)

    assert (found.worth, found.bound) == (3000, 3000)
    assert played(problem, found.spots).too_heavy == ()
    assert nudges_ms(problem, found.spots) == pytest.approx([-12, 0, 0], abs=1e-5)


def crowded(*, must_sound: bool = False) -> list[Asked]:
    """The first may move by 6 ms only, so the second must: to 46 ms before the third."""
    first = Asked(at_ms=1000, nudge_ms=6, must_sound=must_sound)
    second = Asked(at_ms=1088, must_sound=must_sound)
    third = Asked(at_ms=1140, tracks=(1,), worth=400, nudge_ms=0, must_sound=must_sound)
    return [first, second, third]


def test_where_they_cannot_be_kept_apart_the_choice_is_made_anew_with_the_next_best() -> None:
    # Without the third there is room for one 60 ms later on its track, worth 300; the bound still counts on 400.
    fourth = Asked(at_ms=1200, tracks=(1,), worth=300, nudge_ms=0)
    problem = problem_with([*crowded(), fourth], least_ms=LEAST_MS, drive=DRIVE)

    found = solved(problem)

    assert found.spots == (0, 1, 3)
    assert (found.worth, found.bound) == (2300, 2400)


def test_a_lighter_equal_tooth_is_no_way_round_but_another_moment_is() -> None:
    # The third has a second tooth as heavy; the same pluck 10 ms later would not be lifted yet.
    twice = replace(crowded()[2], tracks=(1, 2))
    later = Asked(at_ms=1150, tracks=(1,), worth=390, nudge_ms=0)
    drive = drive_of([1000, 1000, 1000], window_ms=50, limit=1000)
    problem = problem_with([*crowded()[:2], twice, later], least_ms=(100, 100, 100), drive=drive)

    found = solved(problem)

    assert problem.pluck[list(found.spots)].tolist() == [0, 1, 3]
    assert (found.worth, found.bound) == (2390, 2400)


def test_rulings_too_heavy_only_once_they_are_nudged_are_followed_and_told() -> None:
    problem = problem_with(crowded(must_sound=True), least_ms=LEAST_MS, drive=DRIVE)

    found = solved(problem)

    assert found.spots == (0, 1, 2)
    assert played(problem, found.spots).too_heavy == ((1, 2),)


def test_a_search_not_proved_for_its_nudges_says_so() -> None:
    problem = problem_with(crowded(), least_ms=LEAST_MS, drive=DRIVE)

    found = search({Way(semitones=0, speed_factor=1.0): 10**9}, lambda _: [problem], Budget())

    assert isinstance(found, Found)
    assert (found.kept, found.bound, found.stopped) == (2000, 2400, "nudges")


def test_what_is_put_down_by_hand_when_nothing_may_be_spent_is_not_too_heavy_once_nudged_either() -> None:
    # The last two leave too little web, so the search would have to go on before it has looked at any nudges.
    close = [Asked(at_ms=5000, tracks=(2,)), Asked(at_ms=5000, tracks=(3,))]
    drive = drive_of([1000, 1000, 100, 100], window_ms=50, limit=1000)
    besides = (beside(-20, 20, inner=2, outer=3),)
    problem = problem_with([*crowded(), *close], least_ms=(100, 100, 100, 100), besides=besides, drive=drive)

    found = Solving(problem).together(Budget(nodes=0))

    assert isinstance(found, Solved)
    assert problem.pluck[list(found.spots)].tolist() in ([0, 1, 3], [0, 1, 4])
    assert (found.worth, found.bound) == (3000, 4400)
    assert played(problem, found.spots).too_heavy == ()


def test_without_a_limit_nothing_is_too_heavy() -> None:
    problem = problem_with(crowded(), least_ms=LEAST_MS)

    assert played(problem, (0, 1, 2)).too_heavy == ()
    assert overloads(problem, np.arange(3)) == []


def test_rulings_are_not_refused_because_their_program_would_be_too_large(monkeypatch: pytest.MonkeyPatch) -> None:
    # Put down one after the other, the first pluck takes the only track of the second. The third is too near to
    # the first on its other track, so all three come to one program, which is not begun here for its size.
    plucks = [
        Asked(at_ms=1000, tracks=(0, 1), nudge_ms=0, must_sound=True),
        Asked(at_ms=1010, tracks=(0,), nudge_ms=0, must_sound=True),
        Asked(at_ms=1010, tracks=(2,), nudge_ms=0),
    ]
    problem = problem_with(plucks, least_ms=(100, 100, 100), besides=(beside(-20, 20, inner=1, outer=2),))
    monkeypatch.setattr(solving, "best_coupled", _begun_only_without_a_limit)

    found = solved(problem)

    assert found.spots == (1, 2)
    assert (found.worth, found.bound) == (2000, 3000)


def _begun_only_without_a_limit(
    problem: Problem, plucks: np.ndarray, budget: Budget, *, most_entries: int | None = 0
) -> object:
    return best_coupled(problem, plucks, budget, most_entries=most_entries)


def test_a_choice_that_need_not_be_nudged_is_told_too_heavy_nowhere_and_so_it_plays() -> None:
    stood, moved = 0, 0
    for seed in range(600):
        solving_it = Solving(problem_of(seed))
        found = solving_it.together(Budget())
        problem = solving_it.problem  # its chords may have been spread
        if problem.drive is None or not isinstance(found, Solved):
            continue
        playing = Playing(problem=problem, spots=found.spots, in_haste=False)

        too_heavy = playing.too_heavy

        stood, moved = stood + ("played" not in vars(playing)), moved + ("played" in vars(playing))
        assert too_heavy == played(problem, found.spots).too_heavy
    assert min(stood, moved) >= 50


def test_a_chord_is_played_no_wider_than_it_must_be() -> None:
    # 100 + 100/3 where it is spread by 10 ms either way, rounded up: the second step, of 20, is not needed.
    problem = with_spread_chords(chord_on(limit=134))
    widest = tuple(np.flatnonzero(problem.spread == problem.spread.max()).tolist())

    found = played(problem, widest)

    assert problem.spread.max() == 2
    assert problem.spread[list(found.spots)].tolist() == [1, 1, 1]
    assert [found.at_ns[spot] for spot in found.spots] == [990 * MS, 1000 * MS, 1010 * MS]
    assert found.too_heavy == ()
