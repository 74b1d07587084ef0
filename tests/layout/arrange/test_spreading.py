from dataclasses import replace

import numpy as np

from layout.arrange.broken import broken_by
from layout.arrange.budget import Budget
from layout.arrange.fitting import fitted
from layout.arrange.problem import Problem
from layout.arrange.solving import Impossible, Solving
from layout.arrange.spreading import SPREAD_STEPS_MS, narrowed, ranks_in_chords, spread_ns, with_spread_chords
from layout.mechanics.arrays import frozen_ints
from tests.layout.arrange.by_hand import MS, Asked, drive_of, problem_with
from tests.layout.arrange.random_problems import problem_of, spots_of

CHORD = tuple(Asked(at_ms=1000, tracks=(track,)) for track in range(3))


def chord_on(limit: int, *, window_ms: float = 15.0, more: tuple[Asked, ...] = ()) -> Problem:
    """Three notes at 1000 ms of load 100 each, lifted over a window; other plucks on track 3."""
    return problem_with([*CHORD, *more], least_ms=(50,) * 4, drive=drive_of((100,) * 4, window_ms, limit))


def asked_ms(problem: Problem, spread: int) -> list[float]:
    return [float(at_ns) / MS for at_ns in problem.asked_ns[problem.spread == spread]]


def test_a_chord_is_spread_evenly_the_lowest_first() -> None:
    rank, count = frozen_ints([0, 1, 2]), frozen_ints([3, 3, 3])

    assert spread_ns(rank, count, 6).tolist() == [-6, 0, 6]
    assert spread_ns(frozen_ints([0]), frozen_ints([1]), 6).tolist() == [-6]


def test_the_rank_of_a_pluck_is_its_place_in_its_chord() -> None:
    rank, count = ranks_in_chords(frozen_ints([0, 0, 1, 2, 2, 2]))

    assert rank.tolist() == [0, 1, 0, 0, 1, 2]
    assert count.tolist() == [2, 2, 1, 3, 3, 3]


def test_a_chord_too_heavy_gets_a_spot_for_every_step_within_the_nudge() -> None:
    problem = with_spread_chords(chord_on(limit=299))

    steps_ms = [step for step in SPREAD_STEPS_MS if step <= 20]
    assert asked_ms(problem, 0) == [1000, 1000, 1000]
    for spread, step_ms in enumerate(steps_ms, start=1):
        assert asked_ms(problem, spread) == [1000 - step_ms, 1000, 1000 + step_ms]
    assert problem.spread.max() == len(steps_ms)
    moved = problem.spread > 0
    assert (problem.earliest_ns[moved] == problem.asked_ns[moved]).all()
    assert (problem.latest_ns[moved] == problem.asked_ns[moved]).all()
    assert problem.first_spot.tolist() == [0, *np.cumsum([1 + len(steps_ms)] * 3).tolist()]


def test_a_note_goes_no_further_than_its_own_nudge() -> None:
    plucks = [*CHORD[:2], Asked(at_ms=1000, tracks=(2,), nudge_ms=4)]

    problem = with_spread_chords(problem_with(plucks, least_ms=(50,) * 3, drive=drive_of((100,) * 3, 15, 299)))

    assert asked_ms(problem, 1) == [1000 - SPREAD_STEPS_MS[0], 1000, 1004]


def test_chords_the_drive_carries_and_single_notes_are_left_alone() -> None:
    carried = chord_on(limit=300)
    single = problem_with([Asked(at_ms=1000)], drive=drive_of((100,), 15, 50))
    no_drive = problem_with(CHORD, least_ms=(50,) * 3)

    assert with_spread_chords(carried) is carried
    assert with_spread_chords(single) is single
    assert with_spread_chords(no_drive) is no_drive


def test_without_a_nudge_nothing_is_spread() -> None:
    plucks = [Asked(at_ms=1000, tracks=(track,), nudge_ms=0) for track in range(3)]
    problem = problem_with(plucks, least_ms=(50,) * 3, drive=drive_of((100,) * 3, 15, 299))

    assert with_spread_chords(problem) is problem


def solved_ms(problem: Problem) -> list[float]:
    solving = Solving(problem)
    solved = solving.together(Budget())
    assert not isinstance(solved, Impossible)
    assert solved.worth == solved.bound
    return [float(solving.problem.asked_ns[spot]) / MS for spot in solved.spots]


def test_a_chord_too_heavy_is_spread_before_a_note_is_dropped() -> None:
    # Window 15 ms. Spread by 10 either way: at the first release 100 + 100/3 from the second, none from the
    # third; so from 134 on all three sound, and below only what is carried.
    assert solved_ms(chord_on(limit=300)) == [1000, 1000, 1000]
    spread_ms = solved_ms(chord_on(limit=134))
    assert len(spread_ms) == 3
    assert spread_ms == sorted(spread_ms)
    assert spread_ms[0] < 1000 < spread_ms[2]


def test_what_no_step_makes_light_enough_is_dropped() -> None:
    # 40 ms of window: spread by 20 either way the second still weighs 50 at the first's release, the third nothing.
    assert len(solved_ms(chord_on(limit=149, window_ms=40))) == 2
    assert len(solved_ms(chord_on(limit=150, window_ms=40))) == 3


def test_the_notes_of_one_chord_are_spread_by_one_step() -> None:
    solving = Solving(chord_on(limit=134, more=(Asked(at_ms=1500, tracks=(3,)),)))

    solved = solving.together(Budget())

    assert not isinstance(solved, Impossible)
    steps = solving.problem.spread[list(solved.spots)].tolist()
    assert len(set(steps[:3])) == 1
    assert steps[3] == 0


def narrowed_steps(problem: Problem) -> set[int]:
    """The steps of the first chord once a choice of it spread by the widest, and all other plucks, is narrowed."""
    problem = with_spread_chords(problem)
    widest = np.flatnonzero(problem.spread == problem.spread.max())
    others = np.flatnonzero(~np.isin(problem.chord[problem.pluck], problem.chord[problem.pluck[widest]]))
    spots = narrowed(problem, sorted([*widest.tolist(), *others.tolist()]))
    return {int(problem.spread[spot]) for spot in spots if problem.chord[problem.pluck[spot]] == 0}


def test_a_chord_is_spread_no_wider_than_it_must_be() -> None:
    # By 10 ms either way: 100 + 100/3, rounded up.
    assert narrowed_steps(chord_on(limit=134)) == {1}
    assert narrowed_steps(chord_on(limit=133)) == {2}


def test_a_chord_stays_as_wide_as_a_pluck_beside_it_on_another_track_needs() -> None:
    # The third at 1010 would meet a tooth released at 1012: 100 + 100 · 13/15 = 187. At 1020 it is that one's
    # release that meets the third: 100 + 100 · 7/15 = 147.
    fourth = Asked(at_ms=1012, tracks=(3,), nudge_ms=0)

    assert narrowed_steps(chord_on(limit=150)) == {1}
    assert narrowed_steps(chord_on(limit=150, more=(fourth,))) == {2}


def test_a_chord_stays_as_wide_as_the_far_end_of_its_track_needs() -> None:
    # From the first at 980 on three repeats of 100 end at 1280, which may not be nudged; from 990 on 10 ms too late.
    run = (Asked(at_ms=1080), Asked(at_ms=1180), Asked(at_ms=1280, nudge_ms=0))
    problem = problem_with([*CHORD, *run], least_ms=(100,) * 4, drive=drive_of((100,) * 4, 15, 150))

    assert narrowed_steps(problem) == {2}


def narrowed_one_by_one(problem: Problem, spots: tuple[int, ...]) -> tuple[int, ...]:
    """The same, every try held against all that is chosen."""
    of_pluck = {int(problem.pluck[spot]): spot for spot in spots}
    for chord in sorted({int(problem.chord[pluck]) for pluck, spot in of_pluck.items() if problem.spread[spot]}):
        mine = {pluck: spot for pluck, spot in of_pluck.items() if problem.chord[pluck] == chord}
        for spread in range(max(int(problem.spread[spot]) for spot in mine.values())):
            narrower = {
                pluck: one.index
                for pluck, spot in mine.items()
                for one in spots_of(problem, pluck)
                if (one.spread, one.track) == (spread, problem.track[spot])
            }
            together = of_pluck | narrower
            if len(narrower) == len(mine) and not broken_by(problem, sorted(together.values())):
                of_pluck = together
                break
    return tuple(sorted(of_pluck.values()))


def test_a_spread_held_against_what_is_near_is_narrowed_as_far_as_one_held_against_all() -> None:
    narrower, spread = 0, 0
    for seed in range(2_000):
        problem = problem_of(seed)
        problem = with_spread_chords(replace(problem, must_sound=np.zeros_like(problem.must_sound)))
        widest = np.flatnonzero(problem.spread == problem.spread.max(initial=0)).tolist()
        spots = fitted(problem, np.arange(problem.pluck_count), widest)
        if spots is None or not problem.spread[list(spots)].any():
            continue

        found = narrowed(problem, spots)

        assert found == narrowed_one_by_one(problem, spots)
        narrower, spread = narrower + (found != spots), spread + 1
    assert 10 <= narrower <= spread - 10
