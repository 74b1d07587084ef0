"""Which notes are ornaments: onsets in ms, pitches, durations in ms, all on channel 1 unless said."""

from dataclasses import replace

import numpy as np
import pytest

from layout.arrange.ornaments import ornaments
from layout.mechanics.arrays import frozen_floats
from tests.layout.arrange.small_comb import score_of

Timed = tuple[int, str, int]  # onset in ms, pitch, duration in ms


def marked(notes: list[Timed], *, channels: list[int] | None = None, speed_factor: float = 1.0) -> list[int]:
    """The places of the ornaments among the notes, which stand in the order of the score."""
    placed = zip(notes, channels or [1] * len(notes), strict=True)
    score = score_of([(onset_ms / 1000, pitch, 64, channel) for (onset_ms, pitch, _), channel in placed])
    score = replace(score, duration_s=frozen_floats(duration_ms / 1000 for *_, duration_ms in notes))
    return [int(place) for place in np.flatnonzero(ornaments(score, np.arange(len(notes)), speed_factor))]


def run_of(pitches: str, *, apart_ms: int = 100) -> list[Timed]:
    """Notes that follow each other at once, each as long as they are apart."""
    return [(place * apart_ms, pitch, apart_ms) for place, pitch in enumerate(pitches.split())]


def test_four_notes_to_and_fro_are_a_trill_and_three_are_none() -> None:
    assert marked(run_of("E4 F4 E4 F4")) == [0, 1, 2, 3]
    assert marked(run_of("E4 F4 E4")) == []


@pytest.mark.parametrize(("apart_ms", "found"), [(119, [0, 1, 2, 3]), (121, [])])
def test_a_trill_is_as_quick_as_120_ms(apart_ms: int, found: list[int]) -> None:
    assert marked(run_of("E4 F4 E4 F4", apart_ms=apart_ms)) == found


@pytest.mark.parametrize(("other", "found"), [("F#4", [0, 1, 2, 3]), ("G4", []), ("E4", [])])
def test_a_trill_goes_to_a_neighbour_of_one_or_two_semitones(other: str, found: list[int]) -> None:
    assert marked(run_of(f"E4 {other} E4 {other}")) == found


def test_a_trill_is_quick_as_the_disc_plays_it() -> None:
    slow = run_of("E4 F4 E4 F4", apart_ms=150)

    assert marked(slow) == []
    assert marked(slow, speed_factor=1.3) == [0, 1, 2, 3]  # 150 / 1.3 = 115 ms


def test_runs_of_a_scale_are_no_trills() -> None:
    assert marked(run_of("C4 D4 E4 F4 G4 F4 E4 D4 C4")) == []
    assert marked(run_of("C4 D4 E4 D4 C4 D4 E4 D4 C4")) == []


def test_the_last_note_of_a_run_or_a_trill_may_begin_a_trill() -> None:
    assert marked(run_of("C4 D4 E4 F4 E4 F4 G4 A4")) == [2, 3, 4, 5]
    assert marked(run_of("C4 D4 C4 D4 E4 D4 E4")) == [0, 1, 2, 3, 4, 5, 6]


def test_another_channel_neither_trills_along_nor_stands_in_the_way() -> None:
    notes: list[Timed] = [(0, "E4", 100), (100, "F4", 100), (150, "C4", 100), (200, "E4", 100), (300, "F4", 100)]

    assert marked(notes, channels=[1, 1, 2, 1, 1]) == [0, 1, 3, 4]
    assert marked(notes, channels=[1, 2, 1, 1, 2]) == []


def test_a_bass_note_struck_with_a_trill_of_its_channel_does_not_break_it() -> None:
    notes: list[Timed] = [(0, "E4", 100), (100, "F4", 100), (200, "C3", 100), (200, "E4", 100), (300, "F4", 100)]

    assert marked(notes) == [0, 1, 3, 4]


def test_a_short_note_a_step_before_a_longer_one_is_a_grace_note() -> None:
    assert marked([(0, "D4", 80), (80, "E4", 160)]) == [0]
    assert marked([(0, "D4", 80), (80, "E4", 159)]) == []  # below twice 80 ms
    assert marked([(0, "D4", 101), (101, "E4", 400)]) == []  # more than 100 ms before
    assert marked([(0, "C4", 80), (80, "E4", 160)]) == [0]  # four semitones
    assert marked([(0, "B3", 80), (80, "E4", 160)]) == []  # five
    assert marked([(0, "E4", 80), (80, "E4", 160)]) == []  # the same note


def test_the_notes_of_one_moment_are_no_grace_notes() -> None:
    assert marked([(0, "C4", 400), (0, "E4", 400)]) == []


def test_nothing_has_no_ornaments() -> None:
    assert marked([]) == []
