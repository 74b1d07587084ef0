from layout.arrange.parts import parts_of
from layout.arrange.problem import Problem
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with


def parts(problem: Problem) -> tuple[list[int], list[list[int]]]:
    """The plucks alone, and those of every other part."""
    found = parts_of(problem)
    return found.alone.tolist(), [part.tolist() for part in found.together]


def test_plucks_that_may_push_each_other_directly_or_by_a_chain_are_one_part() -> None:
    # Nudged by 20 ms either way and 100 apart: asked 140 after another a pluck may just stand clear of it.
    times_ms = (0, 1000, 1139, 1278, 1418, 3000)

    assert parts(problem_with([Asked(at_ms=at_ms) for at_ms in times_ms])) == ([0, 4, 5], [[1, 2, 3]])


def test_tracks_webs_loads_and_the_end_of_the_turn_join_nothing() -> None:
    plucks = [Asked(at_ms=0), Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,)), Asked(at_ms=59_990)]
    problem = problem_with(plucks, least_ms=(100, 100), besides=(beside(-1, 1),), drive=drive_of((60, 60), 10, 100))

    assert parts(problem) == ([0, 1, 2, 3], [])


def test_a_pluck_of_two_tracks_joins_what_is_on_either() -> None:
    plucks = [Asked(at_ms=1000), Asked(at_ms=1050, tracks=(0, 1)), Asked(at_ms=1100, tracks=(1,))]

    assert parts(problem_with(plucks, least_ms=(60, 60))) == ([], [[0, 1, 2]])


def test_an_extra_pluck_is_with_its_own_however_far_away() -> None:
    plucks = [Asked(at_ms=0), Asked(at_ms=1000), Asked(at_ms=5000, parent=0)]

    assert parts(problem_with(plucks)) == ([1], [[0, 2]])


def test_a_pluck_that_would_still_ring_into_another_touches_it() -> None:
    plucks = [Asked(at_ms=0), Asked(at_ms=500)]

    assert parts(problem_with(plucks)) == ([0, 1], [])
    assert parts(problem_with(plucks, ringing_ms=600)) == ([], [[0, 1]])


def test_plucks_without_spots_are_in_no_part() -> None:
    assert parts(problem_with([Asked(at_ms=0, tracks=()), Asked(at_ms=1000)])) == ([1], [])
    assert parts(problem_with([])) == ([], [])
