from itertools import pairwise

import numpy as np
import pytest

from layout.arrange import loading
from layout.arrange.comb import comb_of
from layout.arrange.loading import greatest_load
from layout.arrange.loads import heavy_moments, overloads
from layout.arrange.posing import rules_of
from layout.arrange.problem import Drive, Lift
from layout.arrange.put_down import LoadsStanding
from layout.documents import Settings
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.drive import lifts_of
from layout.mechanics.turning import turning_of
from tests.layout.arrange.by_hand import MS, Asked, drive_of, problem_with
from tests.layout.arrange.random_problems import problem_of
from tests.layout.arrange.small_comb import SMALL_COMB, comb_with, spacing_for

ALL = np.arange(2)


def test_the_load_grows_in_proportion_up_to_the_release() -> None:
    drive = drive_of((100,), window_ms=10, limit=1000)

    # 10 ms before nothing, 7.5 before a quarter, 5 before half, all at the release; rounded up.
    loads = [drive.load(0, round(before_ms * MS)) for before_ms in (11, 10, 7.5, 5, 3.333, 0)]

    assert loads == [0, 0, 25, 50, 67, 100]


def test_the_teeth_of_one_track_add_up() -> None:
    drive = Drive(lifts=((Lift(load=100, window_ns=10), Lift(load=60, window_ns=4)), ()), limit=1)

    assert [drive.load(0, before_ns) for before_ns in (5, 2, 0)] == [50, 80 + 30, 160]
    assert drive.load(1, 0) == 0
    assert drive.widest_ns == 10


def test_plucks_of_one_track_looked_at_together_weigh_what_each_weighs() -> None:
    drive = Drive(lifts=((Lift(load=100, window_ns=10), Lift(load=60, window_ns=4)), ()), limit=1)
    before_ns = np.array([-1, 0, 1, 3, 4, 5, 9, 10, 11])

    # 100 and 60 less a tenth and a quarter of them by nanosecond; 0 before the window and after the release.
    assert drive.loads_of(0, before_ns).tolist() == [0, 160, 90 + 45, 70 + 15, 60, 50, 10, 0, 0]
    assert drive.loads(np.zeros(9, dtype=np.int64), before_ns).tolist() == drive.loads_of(0, before_ns).tolist()
    assert drive.loads_of(1, before_ns).tolist() == [0] * 9


def test_the_load_integrates_to_half_of_peak_and_window() -> None:
    # Work of a straight spring: ∫ u du = q²/2, so the mean over the window is half the peak.
    drive = drive_of((100_000,), window_ms=1, limit=1)
    at_ns = range(0, MS + 1, 1000)

    area = sum((drive.load(0, one) + drive.load(0, two)) / 2 * (two - one) for one, two in pairwise(at_ns))

    assert area == pytest.approx(100_000 * MS / 2, rel=1e-4)


def test_a_tooth_still_lifted_counts_at_the_release_of_an_earlier_one() -> None:
    # 4 ms before its release the second tooth has come to 60 of 100: 60 + 100 = 160.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1004, tracks=(1,))]
    too_weak = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 159))
    enough = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 160))

    assert overloads(too_weak, ALL) == [(0, 1)]
    assert overloads(enough, ALL) == []


def test_a_tooth_already_released_counts_no_more() -> None:
    # Each alone carries 100; the first is gone when the second is released, 10 ms later.
    problem = problem_with(
        [Asked(at_ms=1000), Asked(at_ms=1010, tracks=(1,))], least_ms=(1, 1), drive=drive_of((100, 100), 10, 100)
    )

    assert overloads(problem, ALL) == []


def test_the_first_plucks_of_the_next_turn_are_lifted_at_the_end_of_this_one() -> None:
    # From 59,998 to the next turn's 2 are 4 ms: 100 + 60 again.
    plucks = [Asked(at_ms=2), Asked(at_ms=59_998, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), drive=drive_of((100, 100), 10, 159))

    assert [sorted(group) for group in overloads(problem, ALL)] == [[0, 1]]


def test_of_each_pluck_only_the_heaviest_spot_could_be_too_much() -> None:
    # One pluck, three tracks: 250 together, 100 the heaviest. With a second pluck of 60 they could be 160.
    alone = [Asked(at_ms=1000, tracks=(0, 1, 2))]
    drive = drive_of((100, 80, 70, 60), 10, 159)
    one = problem_with(alone, least_ms=(1, 1, 1, 1), drive=drive)
    two = problem_with([*alone, Asked(at_ms=1000, tracks=(3,))], least_ms=(1, 1, 1, 1), drive=drive)

    assert list(heavy_moments(one, np.arange(3))) == []
    assert [(sorted(spots), sorted(loads)) for spots, loads in heavy_moments(two, np.arange(4))] == [
        ([0, 1, 2, 3], [60, 70, 80, 100])
    ]


def test_without_a_drive_nothing_is_too_heavy() -> None:
    problem = problem_with([Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))], least_ms=(1, 1))

    assert overloads(problem, ALL) == []


def test_heavy_moments_of_no_drive_are_a_fault_of_the_program() -> None:
    moments = heavy_moments(problem_with([Asked(at_ms=1000)]), np.arange(1))

    with pytest.raises(ValueError, match="no load limit is kept"):
        next(moments)


def heavy_comb(**changes: object) -> dict[str, object]:
    teeth = [{**tooth, "stiffness_n_per_mm": 1.6, "lift_mm": 0.35} for tooth in SMALL_COMB["teeth"]]
    return {"teeth": teeth, "drive": {"torque_limit_nmm": 40}, **changes}


def test_the_greatest_load_is_that_of_all_teeth_lifted_at_one_release() -> None:
    # Tracks 1 and 2 at 30 and 40 mm: 1.6 · 0.35 = 0.56 N; 16.8 and 22.4 N·mm. Windows 0.35 · 60/(2π·r):
    # 0.1114 s and 0.0836 s. Track 1 sounds at 1 s, track 2 0.02 s later: 16.8 + 22.4 · (1 − 0.02/0.0836) = 33.84.
    movement = comb_with(heavy_comb())

    load = greatest_load(movement, turning_of(movement), frozen_ints([0, 1, 0]), frozen_floats([1.0, 1.02, 9.0]))

    assert load is not None
    assert load.peak_nmm == pytest.approx(33.84, abs=0.005)
    assert (load.at_s, load.plucks, load.limit_nmm) == (1.0, (0, 1), 40)


def test_the_greatest_load_sees_over_the_end_of_the_turn() -> None:
    # Track 2 at 59.99 s is 0.02 s before track 1 in the next turn, at 0.01: 22.4 + 16.8 · (1 − 0.02/0.1114) = 36.18.
    movement = comb_with(heavy_comb(before_music_deg=0.01, after_music_deg=0.01))

    load = greatest_load(movement, turning_of(movement), frozen_ints([0, 1]), frozen_floats([0.01, 59.99]))

    assert load is not None
    assert load.peak_nmm == pytest.approx(36.18, abs=0.005)
    assert load.at_s == 59.99


def test_there_is_no_load_without_plucks_or_without_stated_teeth() -> None:
    stated, unstated = comb_with(heavy_comb()), comb_with()
    one = frozen_ints([0]), frozen_floats([1.0])

    assert greatest_load(stated, turning_of(stated), frozen_ints([]), frozen_floats([])) is None
    assert greatest_load(unstated, turning_of(unstated), *one) is None


@pytest.mark.parametrize("pairs_at_a_time", [1, 1 << 20])
def test_the_greatest_load_of_many_plucks_is_the_first_of_the_greatest_at_all_their_moments(
    monkeypatch: pytest.MonkeyPatch, pairs_at_a_time: int
) -> None:
    monkeypatch.setattr(loading, "_PAIRS_AT_A_TIME", pairs_at_a_time)
    movement = comb_with(heavy_comb(before_music_deg=0.01, after_music_deg=0.01))
    turning, lifts = turning_of(movement), lifts_of(movement, turning_of(movement))
    assert lifts is not None
    chance = np.random.default_rng(3)
    for _ in range(100):
        tracks, sounds_s = chance.integers(0, 3, 60), np.round(chance.uniform(0.1, 59.9, 60), 1)

        load = greatest_load(movement, turning, frozen_ints(tracks), frozen_floats(sounds_s))

        best: tuple[float, float, set[int]] = (-1.0, 0.0, set())
        for at_s in sorted(set(sounds_s.tolist())):
            total_nmm, plucks = 0.0, set()
            for pluck, (track, own_s) in enumerate(zip(tracks.tolist(), sounds_s.tolist(), strict=True)):
                for lift in lifts[track]:
                    for before_s in (own_s - at_s, own_s + turning.revolution_s - at_s):
                        if 0 <= before_s < lift.window_s:
                            total_nmm += lift.peak_nmm * (1 - before_s / lift.window_s)
                            plucks.add(pluck)
            # Alike but for the order they are added in are alike: the first of them is told.
            best = (total_nmm, at_s, plucks) if total_nmm > best[0] * (1 + 1e-12) else best
        assert load is not None
        assert (load.at_s, set(load.plucks)) == best[1:]
        assert load.peak_nmm == pytest.approx(best[0], rel=1e-12)


def test_a_limit_of_a_movement_is_kept_in_thousandths_never_above_it() -> None:
    movement = comb_with(heavy_comb(drive={"torque_limit_nmm": 40.0009}))
    turning = turning_of(movement)

    rules = rules_of(movement, comb_of(movement), turning, spacing_for(movement), Settings())

    assert rules.drive is not None
    assert rules.drive.limit == 40_000
    # Track 1: 16.8 N·mm; 0.35 · 60/(2π · 30) = 0.1114085 s.
    [lift] = rules.drive.lifts[0]
    assert lift.load in {16_800, 16_801}
    assert lift.window_ns == pytest.approx(111_408_460, abs=1000)


def test_no_limit_is_kept_where_the_settings_say_so() -> None:
    movement = comb_with(heavy_comb())
    spacing, comb, turning = spacing_for(movement), comb_of(movement), turning_of(movement)

    assert rules_of(movement, comb, turning, spacing, Settings(load_limit="ignore")).drive is None


def test_spots_load_the_disc_alike_worked_out_together_and_each_when_asked_for() -> None:
    judged = []
    for seed in range(300):
        problem = problem_of(seed)
        if problem.drive is None:
            continue
        spots = np.arange(problem.spot_count)
        together, one_by_one, fresh = (LoadsStanding(problem, problem.drive, spots) for _ in range(3))
        together.work_out(spots)
        for standing in (together, one_by_one):
            seen = []
            for spot in spots.tolist():
                seen.append((standing.fits(spot), standing.entries))
                standing.put(spot)
            judged.append(seen)
            for spot in spots.tolist():
                standing.take(spot)
            assert [standing.fits(spot) for spot in spots.tolist()] == [fresh.fits(spot) for spot in spots.tolist()]

    assert judged[::2] == judged[1::2]
    assert {fits for seen in judged for fits, _ in seen} == {True, False}


def test_spots_that_stand_leave_room_for_one_more_where_all_together_are_no_overload() -> None:
    for seed in range(300):
        problem = problem_of(seed)
        if problem.drive is None or not problem.spot_count:
            continue
        *others, last = range(problem.spot_count)
        standing = LoadsStanding(problem, problem.drive, np.arange(problem.spot_count))
        for spot in others:
            standing.put(spot)

        fits = standing.fits(last)

        if not overloads(problem, np.array(others, dtype=np.int64)):
            assert fits == (not overloads(problem, np.arange(problem.spot_count)))
