import numpy as np
import pytest

from layout.arrange.weights import weights
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.read import Score
from tests.layout.arrange.small_comb import arranged, left_out, score_of


def weigh(score: Score, *, lead: int | None = None) -> list[int]:
    return [int(one) for one in weights(score, np.arange(score.note_count), lead)]


def with_durations(score: Score, *durations_s: float) -> Score:
    fields = {name: getattr(score, name) for name in Score.__slots__}
    return Score(**{**fields, "duration_s": frozen_floats(durations_s)})


def test_an_inner_voice_of_velocity_64_and_half_a_second_weighs_1000() -> None:
    chord = score_of([(0.0, "C4"), (0.0, "E4"), (0.0, "G4")], duration_s=0.5)

    # Lowest 1.4, inner 1, highest 2, of a plain note of 1000.
    assert weigh(chord) == [1400, 1000, 2000]


def test_stress_and_duration_multiply_the_voice() -> None:
    alone = score_of([(0.0, "C4", 127)], duration_s=3.0)

    # 1000 · 2 · (750 + 500·127 // 128 = 1246)/1000 · 1.1 = 2741.2
    assert weigh(alone) == [2741]


@pytest.mark.parametrize(("velocity", "weight"), [(1, 1506), (64, 2000), (127, 2492)])
def test_stress_counts_by_velocity(velocity: int, weight: int) -> None:
    # 2000 · (750 + 500·v // 128)/1000: 753, 1000, 1246 thousandths.
    assert weigh(score_of([(0.0, "C4", velocity)], duration_s=0.5)) == [weight]


@pytest.mark.parametrize(("duration_s", "weight"), [(0.0, 1800), (0.5, 2000), (1.0, 2200), (9.0, 2200)])
def test_duration_counts_up_to_one_second(duration_s: float, weight: int) -> None:
    assert weigh(score_of([(0.0, "C4")], duration_s=duration_s)) == [weight]


def test_the_lead_channel_weighs_more_than_the_highest_voice() -> None:
    chord = score_of([(0.0, "C4"), (0.0, "E4", 64, 2), (0.0, "G4")], duration_s=0.5)

    # Inner 1000 · 2.5 against highest 1000 · 2.
    assert weigh(chord, lead=2) == [1400, 2500, 2000]


def test_a_note_under_one_still_held_is_not_the_highest() -> None:
    # G4 is held for 1 s; E4 enters under it at 0.5 s, C4 at 0.9 s as the lowest.
    score = with_durations(score_of([(0.0, "G4"), (0.5, "E4"), (0.9, "C4")]), 1.0, 1.0, 0.5)

    # G4: 2 · 1.1. E4: lowest of the two heard, 1.4 · 1.1. C4: lowest, 1.4.
    assert weigh(score) == [2200, 1540, 1400]


def test_a_note_that_only_laps_over_the_next_in_legato_does_not_take_its_voice() -> None:
    score = with_durations(score_of([(0.0, "G4"), (0.5, "E4")]), 0.54, 0.5)

    # 40 ms into the next, below 50 ms: 2 · (900 + round(200·0.54) = 1008)/1000, and 2.
    assert weigh(score) == [2016, 2000]


def test_a_note_held_for_ever_has_faded_after_two_seconds() -> None:
    score = with_durations(score_of([(0.0, "G6"), (1.9, "E4"), (2.0, "C4")]), 900.0, 0.05, 0.5)

    # E4 at 1.9 s is under G6, the lowest: 1.4 · (900 + 10). C4 at 2 s is alone.
    assert weigh(score) == [2200, 1274, 2000]


def test_only_notes_asked_for_make_voices() -> None:
    score = score_of([(0.0, "C4"), (0.0, "E4"), (0.0, "G4")], duration_s=0.5)

    assert weights(score, frozen_ints([0, 1]), None).tolist() == [1400, 2000]


def test_no_notes_have_no_weights() -> None:
    assert weigh(score_of([])) == []


def test_weights_stay_whole_numbers_above_zero_at_both_ends() -> None:
    soft = score_of([(0.0, "C4"), (0.0, "E4", 1), (0.0, "G4")], duration_s=0.0)
    loud = score_of([(0.0, "C4", 127, 3)], duration_s=60.0)

    # 1000 · 0.753 · 0.9 = 677.7; 1000 · 2 · 1.246 · 1.1 · 2.5 = 6853
    assert weigh(soft)[1] == 677
    assert weigh(loud, lead=3) == [6853]


def test_the_worth_kept_is_the_sum_of_the_weights_of_the_notes_kept() -> None:
    # C4 repeats after 1 s: the second, softer one, 0.5 s later, is left out.
    arrangement = arranged([(0.0, "C4", 127), (0.5, "C4"), (2.0, "D4", 1)])

    assert left_out(arrangement) == {1: "wheel-still-stepping"}
    # 0.25 s: 0.95. 1000 · 2 · 1.246 · 0.95 = 2367.4; 1000 · 2 · 0.753 · 0.95 = 1430.7
    assert arrangement.worth.kept == 2367 + 1430
    assert arrangement.worth.bound == 2367 + 1430
    assert arrangement.worth.proved


def test_two_parts_in_unison_are_one_pluck_that_weighs_both() -> None:
    arrangement = arranged([(1.0, "C4", 64, 1), (1.0, "C4", 64, 2)])

    # Both highest, 0.25 s: 2 · (2000 · 0.95 = 1900)
    assert arrangement.notes == ((0, 1),)
    assert arrangement.worth.kept == 3800
