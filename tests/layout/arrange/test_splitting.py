import math
import time
from dataclasses import replace
from itertools import combinations, pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange.moments import moments_of
from layout.arrange.splitting import disc_passages, fitting_factor
from layout.documents import Settings
from layout.errors import DocumentError
from layout.mechanics.arrays import frozen_floats
from layout.read import Score
from tests.layout.arrange.small_comb import Note, asking, score_of
from tests.thorough import tried

NONE_RULED_OUT: frozenset[int] = frozenset()
# Bars of 2 s, beats of 0.5 s, notes of 0.25 s: score_of.


def passages(notes: list[Note], *, turn_s: float, factor: float = 1.0, **fields: object) -> list[tuple[float, float]]:
    score = score_of(notes, duration_s=0.25)
    return list(disc_passages(score, asking(**fields), NONE_RULED_OUT, turn_s, factor))


def every(step_s: float, count: int) -> list[Note]:
    return [(place * step_s, "C4") for place in range(count)]


def lost(score: Score, asked: list[int], cut: list[tuple[float, float]], turn_s: float, factor: float = 1.0) -> int:
    """Notes asked for that lie past the turn of the disc whose passage holds them."""
    return sum(
        (score.onset_s[note] - from_s) / factor > turn_s + 1e-9
        for note in asked
        for from_s, to_s in cut
        if from_s <= score.onset_s[note] < to_s
    )


def points(score: Score, asked: list[int], cut: list[tuple[float, float]]) -> int:
    """The cost of a cut, note by note, as the module's text and constants say it."""
    total: int = 0
    for from_s, _ in cut[1:]:
        before = [note for note in asked if score.onset_s[note] < from_s]
        ends_s = [score.onset_s[note] + min(score.duration_s[note], 2.0) for note in before]
        total += 1_000_000 * sum(end_s - 0.05 > from_s for end_s in ends_s)
        if not min(abs(score.bar_s - from_s)) <= 0.02:
            total += 600_000 if min(abs(score.beat_s - from_s)) <= 0.02 else 1_500_000
        rest_s = min(max(from_s - max(ends_s), 0.0), 1.0)
        total += 800_000 - round(800_000 * rest_s)
    begin_s, end_s = cut[0][0], max(score.onset_s[note] for note in asked)
    marks: list[int] = [round(1000 * len(cut) * (from_s - begin_s) / (end_s - begin_s)) for from_s, _ in cut] + [
        1000 * len(cut)
    ]
    return total + sum((after - before - 1000) ** 2 for before, after in pairwise(marks))


def all_ways(score: Score, asked: list[int], whole: tuple[float, float], discs: int) -> list[list[tuple[float, float]]]:
    later = sorted({float(score.onset_s[note]) for note in asked})[1:]
    return [list(pairwise([whole[0], *chosen, whole[1]])) for chosen in combinations(later, discs - 1)]


@st.composite
def small_tunes(draw: st.DrawFn) -> Score:
    count = draw(st.integers(1, 9))
    onsets = draw(st.lists(st.integers(0, 40), min_size=count, max_size=count))
    score = score_of([(onset / 8, "C4") for onset in onsets])
    lengths = draw(st.lists(st.sampled_from([0.0, 0.04, 0.1, 0.27, 0.3, 1.0, 3.0]), min_size=count, max_size=count))
    return replace(score, duration_s=frozen_floats(lengths))


@settings(max_examples=tried(400), deadline=None)
@given(
    score=small_tunes(),
    discs=st.integers(2, 5),
    turn_s=st.sampled_from([0.2, 0.5, 1.0, 2.0, 5.0]),
    factor=st.sampled_from([0.5, 1.0, 1.3]),
    begin=st.sampled_from([{}, {"from_s": 0.0}, {"from_s": 0.4, "to_s": 4.2}]),
    ruled_out=st.frozensets(st.integers(0, 8), max_size=2),
)
def test_no_other_cut_loses_less_or_costs_less(
    score: Score, discs: int, turn_s: float, factor: float, begin: dict[str, float], ruled_out: frozenset[int]
) -> None:
    ruled_out = frozenset(note for note in ruled_out if note < score.note_count)
    wanted = asking(discs=discs, passage=begin)
    whole = (begin.get("from_s", float(score.onset_s[0])), begin.get("to_s", math.inf))
    asked = [n for n in range(score.note_count) if whole[0] <= score.onset_s[n] < whole[1] and n not in ruled_out]
    if len({float(score.onset_s[note]) for note in asked}) < discs:
        with pytest.raises(DocumentError, match="need a note each"):
            disc_passages(score, wanted, ruled_out, turn_s, factor)
        return

    cut = list(disc_passages(score, wanted, ruled_out, turn_s, factor))

    ways = all_ways(score, asked, whole, discs)
    assert cut in ways
    best = min((lost(score, asked, way, turn_s, factor), points(score, asked, way)) for way in ways)
    assert (lost(score, asked, cut, turn_s, factor), points(score, asked, cut)) == best


def test_the_passages_follow_each_other_and_hold_the_whole_tune() -> None:
    cut = passages(every(0.5, 40), turn_s=100.0, discs=4)

    assert cut[0][0] == 0.0
    assert cut[-1][1] == math.inf
    assert [to_s for _, to_s in cut[:-1]] == [from_s for from_s, _ in cut[1:]]


def test_equal_places_to_cut_give_even_discs() -> None:
    # 16 bars of 2 s, alike: 31.5 s to the last onset, a third of it 10.5 s; bars begin at 10 s and 20 s
    assert passages(every(0.5, 64), turn_s=100.0, discs=3) == [(0.0, 10.0), (10.0, 20.0), (20.0, math.inf)]


def test_a_rest_draws_the_cut_away_from_the_middle() -> None:
    # Silence from 4.25 s to 6.0 s, a bar line; 12.0 s of music, the middle at 6.5 s
    notes = [note for note in every(0.5, 27) if not 4.0 < note[0] < 6.0]

    assert passages(notes, turn_s=100.0, discs=2)[1][0] == 6.0


def test_a_note_held_over_a_bar_line_moves_the_cut_to_another_bar_line() -> None:
    score = score_of(every(0.5, 25))  # to 12.0 s; the middle, 6.0 s, is a bar line
    duration_s = np.full(25, 0.25)
    duration_s[11] = 1.0  # from 5.5 s to 6.5 s
    held = replace(score, duration_s=frozen_floats(duration_s))

    cut = disc_passages(held, asking(discs=2), NONE_RULED_OUT, 100.0, 1.0)

    # 6.0 s holds a note, 1,000,000; 4.0 s and 8.0 s are a third of a share of 6 s off, 2 · 333² = 221,778; the earlier
    assert cut[1][0] == 4.0


def test_a_cut_that_loses_no_note_goes_before_any_good_place() -> None:
    # Turns of 1.25 s hold three onsets 0.5 s apart: three discs hold nine only if every third begins one.
    assert [from_s for from_s, _ in passages(every(0.5, 9), turn_s=1.25, discs=3)] == [0.0, 1.5, 3.0]


def test_a_disc_begins_with_its_first_note_asked_for() -> None:
    notes = [(0.0, "C4"), (1.0, "C4"), (4.0, "C4", 64, 2), (6.5, "C4"), (7.5, "C4")]

    cut = passages(notes, turn_s=2.0, discs=2, channels={"leave_out": [2]})

    assert cut == [(0.0, 6.5), (6.5, math.inf)]


def test_the_first_disc_begins_and_the_last_ends_where_the_passage_does() -> None:
    passage = {"from_s": 0.75, "to_bar": 4}

    # bar 4 begins at 6.0 s
    cut = passages(every(0.5, 40), turn_s=3.0, discs=2, passage=passage)

    assert (cut[0][0], cut[1][1]) == (0.75, 6.0)


def test_a_quicker_tune_needs_fewer_turns() -> None:
    notes = every(0.5, 9)  # 4.0 s; at twice the speed 2.0 s
    score, asked = score_of(notes), list(range(9))

    as_written = passages(notes, turn_s=0.75, discs=2)
    twice = passages(notes, turn_s=0.75, factor=2.0, discs=2)

    # turns of 0.75 s hold 2 onsets of nine as written, 4 at twice the speed
    assert lost(score, asked, as_written, 0.75) == 9 - 2 * 2
    assert lost(score, asked, twice, 0.75, 2.0) == 9 - 2 * 4


def test_one_disc_has_the_whole_passage_with_notes_or_without() -> None:
    assert passages([], turn_s=3.0, discs=1) == [(0.0, math.inf)]
    assert passages(every(0.5, 40), turn_s=3.0, discs=1, passage={"to_s": 9}) == [(0.0, 9.0)]


@pytest.mark.parametrize(
    ("notes", "message"),
    [
        ([(0.0, "C4"), (0.0, "E4")], "3 discs need a note each, and the notes asked for begin at 1 moment; ask for 1"),
        (every(0.5, 2), "the notes asked for begin at 2 moments; ask for 2, or for a longer passage"),
        ([], "begin at 0 moments; ask for 1"),
    ],
)
def test_more_discs_than_moments_are_refused(notes: list[Note], message: str) -> None:
    with pytest.raises(DocumentError, match=message) as refusal:
        passages(notes, turn_s=3.0, discs=3)

    assert [problem.pointer for problem in refusal.value.problems] == ["/discs"]


@settings(max_examples=tried(200), deadline=None)
@given(score=small_tunes(), turn_s=st.sampled_from([0.2, 0.5, 1.0, 2.0]))
def test_more_discs_never_lose_more_notes(score: Score, turn_s: float) -> None:
    asked = list(range(score.note_count))
    most = len(np.unique(score.onset_s))

    losses = [
        lost(score, asked, list(disc_passages(score, asking(discs=discs), NONE_RULED_OUT, turn_s, 1.0)), turn_s)
        for discs in range(1, min(most, 8) + 1)
    ]

    assert losses == sorted(losses, reverse=True)


def fitting(**bounds: float) -> dict[str, object]:
    return {"speed": {"mode": "fit", "least": 0.01, "most": 100.0, **bounds}}


@settings(max_examples=tried(300), deadline=None)
@given(score=small_tunes(), turn_s=st.sampled_from([0.3, 0.7, 1.0, 36.2]), from_s=st.sampled_from([None, 0.0, 0.3]))
def test_one_disc_fits_at_the_speed_that_fits_the_tune(score: Score, turn_s: float, from_s: float | None) -> None:
    wanted = asking(**fitting(), passage={"from_s": from_s})

    factor = fitting_factor(score, wanted, NONE_RULED_OUT, turn_s)

    assert factor == moments_of(score, wanted, NONE_RULED_OUT, turn_s).speed_factor


@settings(max_examples=tried(300), deadline=None)
@given(score=small_tunes(), discs=st.integers(2, 4), turn_s=st.sampled_from([0.3, 0.7, 1.0]))
def test_at_the_fitting_speed_nothing_is_lost_and_any_slower_something_is(
    score: Score, discs: int, turn_s: float
) -> None:
    asked = list(range(score.note_count))
    if len(np.unique(score.onset_s)) <= discs:
        assert fitting_factor(score, asking(discs=discs, **fitting()), NONE_RULED_OUT, turn_s) == 1.0
        return
    wanted = asking(discs=discs, **fitting())

    factor = fitting_factor(score, wanted, NONE_RULED_OUT, turn_s)

    at_it = list(disc_passages(score, wanted, NONE_RULED_OUT, turn_s, factor))
    slower = list(disc_passages(score, wanted, NONE_RULED_OUT, turn_s, factor * 0.999))
    assert lost(score, asked, at_it, turn_s, factor) == 0
    assert lost(score, asked, slower, turn_s, factor * 0.999) > 0


@pytest.mark.parametrize(("bounds", "expected"), [({"most": 1.5}, 1.5), ({"least": 2.5}, 2.5), ({}, 2.0)])
def test_the_fitting_speed_keeps_its_bounds(bounds: dict[str, float], expected: float) -> None:
    # 0, 1, 2, 3 s on two discs of 0.5 s: 1 s in half a second
    score = score_of(every(1.0, 4))

    assert fitting_factor(score, asking(discs=2, **fitting(**bounds)), NONE_RULED_OUT, 0.5) == expected


def test_no_note_fits_at_the_speed_as_written() -> None:
    assert fitting_factor(score_of([]), asking(discs=2, **fitting()), NONE_RULED_OUT, 0.5) == 1.0


@pytest.mark.parametrize("turn_s", [5.0, 100.0], ids=["too long a tune", "room enough"])
def test_four_thousand_notes_are_cut_over_24_discs_within_a_second(turn_s: float) -> None:
    score = score_of([(place * 0.13 + (place % 7) * 0.01, "C4") for place in range(4000)])
    wanted = Settings(discs=24)

    begin_s = time.perf_counter()
    cut = disc_passages(score, wanted, NONE_RULED_OUT, turn_s, 1.0)

    assert time.perf_counter() - begin_s < 1.0  # 0.04 s on one core
    assert len(cut) == 24
