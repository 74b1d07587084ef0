"""The search over transpositions and speeds, and what ends it early."""

import weakref
from collections.abc import Callable, Iterator
from itertools import count

import numpy as np
import pytest

from layout.arrange import Arrangement, arrange
from layout.arrange.arrangement import Worth
from layout.arrange.budget import Budget
from layout.arrange.problem import Problem
from layout.arrange.searching import MOST_TOLD, Found, NoWay, Way, search
from layout.read import Score
from tests.layout.arrange.by_hand import Asked, problem_with
from tests.layout.arrange.small_comb import (
    CLOSE_TRACKS,
    NEARLY_NO_REST,
    Note,
    arranged,
    asking,
    broken_rules,
    comb_with,
    left_out,
    played,
    plucks_of,
    score_of,
    spacing_for,
)
from tests.layout.arrange.test_laws_of_arranging import loosened

ANY = 10**9  # a bound that says nothing


def way(semitones: int, speed_factor: float = 1.0) -> Way:
    return Way(semitones=semitones, speed_factor=speed_factor)


def searched(worths: dict[Way, int]) -> Found:
    """The search over ways each of which plays one pluck of this worth."""
    found = search(
        dict.fromkeys(worths, ANY), lambda one: [problem_with([Asked(at_ms=0, worth=worths[one])])], Budget()
    )
    assert isinstance(found, Found)
    return found


@pytest.mark.parametrize(
    ("worths", "best"),
    [
        ({way(0): 10, way(5): 11}, way(5)),
        ({way(2, 0.9): 10, way(-3, 1.05): 10}, way(-3, 1.05)),  # speed before transposition
        ({way(2): 10, way(-3): 10}, way(2)),
        ({way(2): 10, way(-2): 10}, way(-2)),
        ({way(0): 10, way(0, 0.5): 11}, way(0, 0.5)),
    ],
)
def test_the_way_that_keeps_most_wins_and_of_equals_the_nearest_to_as_written(
    worths: dict[Way, int], best: Way
) -> None:
    found = searched(worths)

    assert found.way == best
    assert (found.kept, found.bound, found.stopped) == (max(worths.values()), max(worths.values()), None)


@pytest.mark.parametrize(
    ("ways", "best"),  # of each way its bound and what it keeps
    [
        ({way(semitones): (100 - semitones, 100 - semitones) for semitones in range(MOST_TOLD)}, 0),
        # the second is the same transposition at the slowest speed, so it is solved at once too, and is better
        ({way(0): (140, 100), way(0, 0.9): (120, 110), way(1): (105, 105)}, 1),
    ],
    ids=["falling", "rising"],
)
def test_of_ways_that_are_solved_only_the_best_is_held_with_its_problems(
    ways: dict[Way, tuple[int, int]], best: int
) -> None:
    posed: list[weakref.ref[Problem]] = []
    held: list[int] = []  # when each is posed

    def pose(one: Way) -> list[Problem]:
        held.append(sum(known() is not None for known in posed))
        problem = problem_with([Asked(at_ms=0, worth=ways[one][1])])
        posed.append(weakref.ref(problem))
        return [problem]

    found = search({one: bound for one, (bound, _) in ways.items()}, pose, Budget())

    assert isinstance(found, Found)
    assert found.way == list(ways)[best]
    assert held == [0] + [1] * (len(ways) - 1)
    assert [known() is not None for known in posed] == [place == best for place in range(len(ways))]


def test_each_transposition_is_told_once_at_its_best_speed_best_first() -> None:
    worths = {
        way(semitones, speed): 100 + semitones + round(10 * speed) for semitones in range(8) for speed in (1.0, 1.2)
    }

    found = searched(worths)

    assert [(one.semitones, one.speed_factor, one.kept) for one in found.tried] == [
        (semitones, 1.2, 112 + semitones) for semitones in (7, 6, 5, 4, 3)
    ]
    assert len(found.tried) == MOST_TOLD


def test_every_transposition_is_told_with_the_most_of_all_its_speeds_the_lowest_first() -> None:
    worths = {
        way(semitones, speed): 100 + 10 * semitones - (speed != 1.0)
        for semitones in range(-6, 2)
        for speed in (1.0, 1.2)
    }

    found = searched(worths)

    assert [one.semitones for one in found.transpositions] == list(range(-6, 2))
    for one in found.transpositions:
        best = 100 + 10 * one.semitones
        assert one.kept in (None, best)
        assert one.bound >= best
    assert {one.semitones: one.kept for one in found.transpositions}[1] == 110
    assert sum(one.kept is not None for one in found.transpositions) >= MOST_TOLD


def test_a_speed_that_was_never_come_to_leaves_its_transposition_open() -> None:
    # At 0 two speeds are solved for 60 each; the quick one might keep 80, which five others beat with 100.
    bounds = {way(0): 200, way(0, 0.9): 70, way(0, 1.2): 80} | {way(semitones): 100 for semitones in range(1, 6)}

    found = search(bounds, lambda one: [problem_with([Asked(at_ms=0, worth=100 if one.semitones else 60)])], Budget())

    assert isinstance(found, Found)
    told = {one.semitones: (one.kept, one.bound) for one in found.transpositions}
    assert told == {0: (60, 80)} | dict.fromkeys(range(1, 6), (100, 100))


def test_a_transposition_that_is_impossible_is_not_told() -> None:
    two = [Asked(at_ms=0, must_sound=True, nudge_ms=0), Asked(at_ms=1, must_sound=True, nudge_ms=0, worth=9000)]

    found = search({way(0): ANY, way(1): ANY}, lambda one: [problem_with(two[: 2 - one.semitones])], Budget())

    assert isinstance(found, Found)
    assert [(one.semitones, one.kept) for one in found.transpositions] == [(1, 1000)]


def test_ways_that_are_impossible_are_told_with_what_shows_it() -> None:
    two = [Asked(at_ms=0, must_sound=True, nudge_ms=0), Asked(at_ms=1, must_sound=True, nudge_ms=0)]

    found = search({way(0): ANY, way(1): ANY}, lambda _: [problem_with(two)], Budget())

    assert isinstance(found, NoWay)
    assert set(found.shown_by) == {way(0), way(1)}
    disc, _, impossible = found.shown_by[way(0)]
    assert (disc, impossible.plucks.tolist()) == (0, [0, 1])


def test_an_impossible_way_does_not_hide_a_possible_one() -> None:
    two = [Asked(at_ms=0, must_sound=True, nudge_ms=0), Asked(at_ms=1, must_sound=True, nudge_ms=0, worth=9000)]

    found = search({way(0): ANY, way(1): ANY}, lambda one: [problem_with(two[: 2 - one.semitones])], Budget())

    assert isinstance(found, Found)
    assert (found.way, found.kept, found.bound) == (way(1), 1000, 1000)


def test_the_worth_of_several_discs_counts_together() -> None:
    discs = {way(0): [10, 10], way(1): [1, 18]}

    found = search(
        dict.fromkeys(discs, ANY),
        lambda one: [problem_with([Asked(at_ms=0, worth=worth)]) for worth in discs[one]],
        Budget(),
    )

    assert isinstance(found, Found)
    assert (found.way, found.kept, [solved.worth for solved in found.solved]) == (way(0), 20, [10, 10])


def test_one_disc_is_arranged_alone_however_many_the_settings_ask_for() -> None:
    notes: list[Note] = [(0.0, "C4"), (10.0, "D4"), (20.0, "C4")]

    alone = arranged(notes, discs=2)

    assert played(alone) == played(arranged(notes)) == [(0.0, 1), (10.0, 2), (20.0, 1)]


# A budget that ends.

CROWDED = comb_with(
    {
        **CLOSE_TRACKS,
        **NEARLY_NO_REST,
        "teeth": [
            {"tooth": n, "track": n, "pitch": pitch, "stiffness_n_per_mm": 0.5, "lift_mm": 0.4}
            for n, pitch in enumerate(("E4", "G4", "E4", "G4", "E4"), start=1)
        ],
        "drive": {"torque_limit_nmm": 27.3},
    }
)
CROWDED_SPACING = spacing_for(CROWDED, min_web_mm=1.0)


def crowded_tune() -> Score:
    notes: list[Note] = [
        (0.13 * step + shift, pitch, 30 + 37 * step % 90)
        for step in range(14)
        for shift, pitch in ((0.0, "E4"), (0.01, "G4"))
    ]
    return score_of(notes)


def arranged_with(clock: Callable[[], float] | None, **fields: object) -> Arrangement:
    asked = asking(transpose={"mode": "best", "range": 3}, largest_nudge_ms=20, **fields)
    return arrange(crowded_tune(), CROWDED, asked, CROWDED_SPACING, clock)


def assert_valid(arrangement: Arrangement, best: Worth) -> None:
    notes = [note for pluck in arrangement.notes for note in pluck] + list(left_out(arrangement))
    assert sorted(notes) == list(range(crowded_tune().note_count))
    assert np.abs(arrangement.planned_s - arrangement.asked_s).max() <= 0.020 + 1e-9
    assert broken_rules(plucks_of(arrangement), CROWDED, loosened(CROWDED_SPACING)) == []
    assert arrangement.load is not None
    assert arrangement.load.peak_nmm <= 27.3 + 0.01
    assert arrangement.worth.kept <= best.kept <= best.bound
    assert best.kept <= arrangement.worth.bound
    assert arrangement.worth.proved == (arrangement.worth.kept == arrangement.worth.bound)


def jumping(after: int) -> Iterator[float]:
    """0 s for so many looks at the clock, then an hour."""
    return (0.0 if look < after else 3600.0 for look in count())


@pytest.mark.parametrize("looks", [1, 2, 5, 20, 30])
def test_a_search_out_of_time_gives_a_sound_arrangement_and_says_so(looks: int) -> None:
    best = arranged_with(None).worth
    times_s = jumping(looks)

    stopped = arranged_with(lambda: next(times_s), time_limit_s=5)

    assert_valid(stopped, best)
    assert (stopped.worth.stopped, stopped.worth.proved) == ("time", False)


def test_with_time_enough_the_answer_is_that_without_a_limit() -> None:
    free, limited = arranged_with(None), arranged_with(lambda: 7.0, time_limit_s=5)

    assert free.worth == limited.worth
    assert free.worth.proved
    assert plucks_of(free) == plucks_of(limited)


def test_a_time_limit_without_a_clock_is_none() -> None:
    assert arranged_with(None, time_limit_s=0.001).worth == arranged_with(None).worth


def test_time_is_told_before_nodes() -> None:
    times_s = iter([0.0, 9.0, 9.0, 9.0])
    budget = Budget(nodes=1, time_limit_s=5, clock=lambda: next(times_s))

    budget.spend(3)

    assert (budget.nodes_left, budget.stopped, budget.spent) == (0, "time", True)


def test_nodes_are_spent_until_none_are_left() -> None:
    budget = Budget(nodes=5)

    budget.spend(4)

    assert (budget.nodes_left, budget.stopped, budget.spent, budget.seconds_left()) == (1, None, False, None)
    budget.spend(1)
    assert (budget.stopped, budget.spent) == ("nodes", True)


# Speed "best".

# Track 1 repeats after 1 s. As written two C4 are 0.9 s apart: only a disc at 0.9 of the speed or slower has both.
C4_TOO_SOON: list[Note] = [(0.0, "C4"), (0.9, "C4")]


def test_a_slower_disc_that_keeps_more_is_taken_at_the_speed_nearest_to_as_written() -> None:
    arrangement = arranged(C4_TOO_SOON, speed={"mode": "best", "least": 0.8, "most": 1.2})

    assert arrangement.speed_factor == 0.9
    assert played(arrangement) == [(0.0, 1), (1.0, 1)]
    assert left_out(arrangement) == {}


def test_of_speeds_that_keep_as_much_the_one_as_written_is_taken() -> None:
    arrangement = arranged([(0.0, "C4"), (1.5, "C4")], speed={"mode": "best", "least": 0.8, "most": 1.2})

    assert arrangement.speed_factor == 1.0


def test_a_faster_disc_is_taken_where_the_tune_is_too_long_as_written() -> None:
    # 60.9 s at 1.05 are 58 s, the free part of the turn; 1.06 has room to spare.
    arrangement = arranged([(0.0, "C4"), (60.9, "G4")], speed={"mode": "best", "least": 0.8, "most": 1.2})

    assert arrangement.speed_factor == pytest.approx(1.05)
    assert left_out(arrangement) == {}


def test_the_speeds_tried_stay_within_their_bounds() -> None:
    arrangement = arranged(C4_TOO_SOON, speed={"mode": "best", "least": 0.95, "most": 1.2})

    assert arrangement.speed_factor == 1.0
    assert left_out(arrangement) == {1: "wheel-still-stepping"}


def test_speed_and_transposition_are_searched_together() -> None:
    # B3 is off the comb as written; a semitone higher it is C4, and again only a slower disc has both.
    arrangement = arranged(
        [(onset_s, "B3") for onset_s, _ in C4_TOO_SOON],
        speed={"mode": "best", "least": 0.8, "most": 1.2},
        transpose={"mode": "best", "range": 1},
    )

    assert (arrangement.transposed_semitones, arrangement.speed_factor) == (1, 0.9)
