from layout.arrange.moments_kept import Moments, Overrun, moments_kept
from tests.layout.arrange.by_hand import MS, Asked, beside, problem_with


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
