from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.arrange import weights
from layout.arrange.weights import ON_BEAT_S, PLAIN, Weighed, weigh
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.read import Score
from tests.layout.arrange.small_comb import arranged, left_out, score_of

# The tunes here stand in 4/4 at 120: a beat every 0.5 s, a bar every 2 s. A chord at 0.5 s is on a
# beat that begins no bar, so the beat counts for nothing.
ON_A_BEAT_S = 0.5


def weighed(score: Score, *, lead: int | None = None) -> Weighed:
    return weigh(score, np.arange(score.note_count), lead)


def worths(score: Score, *, lead: int | None = None) -> list[int]:
    return [int(one) for one in weighed(score, lead=lead).weight]


def one_note(onset_s: float = ON_A_BEAT_S, velocity: int = 64, duration_s: float = 0.5) -> Score:
    return score_of([(onset_s, "C4", velocity)], duration_s=duration_s)


def chord(*notes: tuple[object, ...], onset_s: float = ON_A_BEAT_S) -> Score:
    return score_of([(onset_s, *note) for note in notes], duration_s=0.5)


def test_an_inner_voice_of_velocity_64_and_half_a_second_on_a_beat_weighs_1000() -> None:
    # Lowest 1.4, inner 1, highest 2, of a plain note of 1000.
    assert worths(chord(("C4",), ("E4",), ("G4",))) == [1400, 1000, 2000]


def test_every_factor_multiplies_the_voice() -> None:
    # 1000 · 2 · (750 + 500·127 // 128 = 1246)/1000 · 1.1 for the bar's first beat · 1.1 for a long note = 3015.32
    assert worths(one_note(0.0, 127, 3.0)) == [3015]


@pytest.mark.parametrize(("velocity", "weight"), [(1, 1506), (64, 2000), (127, 2492)])
def test_stress_counts_by_velocity(velocity: int, weight: int) -> None:
    # 2000 · (750 + 500·v // 128)/1000: 753, 1000, 1246 thousandths.
    assert worths(one_note(velocity=velocity)) == [weight]


@pytest.mark.parametrize(
    ("onset_s", "weight"),
    [
        (2.0, 2200),  # the first beat of bar 2: 1.1
        (2.5, 2000),
        (2.75, 1800),  # between beats: 0.9
        (3.999, 2200),  # just before bar 3
        (2.5 + 0.9 * ON_BEAT_S, 2000),  # late by less than the ear can order
        (2.5 - 0.9 * ON_BEAT_S, 2000),
        (2.5 + 1.1 * ON_BEAT_S, 1800),
        (2.0 - 1.1 * ON_BEAT_S, 1800),
    ],
)
def test_stress_counts_by_beat(onset_s: float, weight: int) -> None:
    assert worths(one_note(onset_s)) == [weight]


def test_beats_are_those_of_the_tune() -> None:
    # 6/8 with a beat every 0.9 s and a bar every 1.8 s.
    beat_s = frozen_floats([0.0, 0.9, 1.8, 2.7, 3.6])
    notes = score_of([(0.9, "C4"), (1.8, "C4"), (2.0, "C4")], duration_s=0.5)
    score = replace(notes, beat_s=beat_s, bar_s=beat_s[::2])

    # All are highest: 2000 on a beat, 2200 on the bar's first, 1800 where 4/4 at 120 would have a bar.
    assert worths(score) == [2000, 2200, 1800]


@pytest.mark.parametrize(("duration_s", "weight"), [(0.0, 1800), (0.5, 2000), (1.0, 2200), (9.0, 2200)])
def test_duration_counts_up_to_one_second(duration_s: float, weight: int) -> None:
    assert worths(one_note(duration_s=duration_s)) == [weight]


def test_the_lead_channel_weighs_more_than_the_highest_voice() -> None:
    # Inner 1000 · 2.5 against highest 1000 · 2.
    assert worths(chord(("C4",), ("E4", 64, 2), ("G4",)), lead=2) == [1400, 2500, 2000]


def test_the_voices_are_told_and_the_highest_is_the_melody() -> None:
    found = weighed(chord(("C4",), ("E4",), ("G4",)))

    assert found.highest.tolist() == [False, False, True]
    assert found.lowest.tolist() == [True, False, False]
    assert found.melody.tolist() == [False, False, True]


def test_a_note_alone_is_highest_and_lowest() -> None:
    found = weighed(one_note())

    assert (found.highest.tolist(), found.lowest.tolist()) == ([True], [True])


def test_the_lead_channel_is_the_melody_where_one_is_stated() -> None:
    found = weighed(chord(("C4",), ("E4", 64, 2), ("G4",)), lead=2)

    assert found.melody.tolist() == [False, True, False]
    assert found.highest.tolist() == [False, False, True]


def test_a_lead_channel_without_notes_leaves_no_melody() -> None:
    assert weighed(chord(("C4",), ("G4",)), lead=3).melody.tolist() == [False, False]


def with_durations(score: Score, *durations_s: float) -> Score:
    return replace(score, duration_s=frozen_floats(durations_s))


def test_a_note_under_one_still_held_is_not_the_highest() -> None:
    # G4 is held for 1 s; E4 enters under it at 1 s, C4 at 1.4 s, between beats, as the lowest.
    score = with_durations(score_of([(0.5, "G4"), (1.0, "E4"), (1.4, "C4")]), 1.0, 1.0, 0.5)

    # G4: 2 · 1.1. E4: lowest of the two heard, 1.4 · 1.1. C4: lowest, 1.4 · 0.9.
    assert worths(score) == [2200, 1540, 1260]


def test_a_note_that_only_laps_over_the_next_in_legato_does_not_take_its_voice() -> None:
    score = with_durations(score_of([(0.5, "G4"), (1.0, "E4")]), 0.54, 0.5)

    # 40 ms into the next, below 50 ms: 2 · (900 + round(200·0.54) = 1008)/1000, and 2.
    assert worths(score) == [2016, 2000]


def test_a_note_held_for_ever_has_faded_after_two_seconds() -> None:
    score = with_durations(score_of([(0.5, "G6"), (2.4, "E4"), (2.5, "C4")]), 900.0, 0.05, 0.5)

    # E4 at 2.4 s, between beats, is under G6, the lowest: 1400 · 0.9 · 0.91 = 1146.6. C4 at 2.5 s is alone.
    assert worths(score) == [2200, 1146, 2000]


def test_only_notes_asked_for_make_voices() -> None:
    score = chord(("C4",), ("E4",), ("G4",))

    found = weigh(score, frozen_ints([0, 1]), None)

    assert found.weight.tolist() == [1400, 2000]
    assert found.melody.tolist() == [False, True]


def test_no_notes_have_no_weights() -> None:
    found = weighed(score_of([]), lead=1)

    assert found.weight.shape == found.highest.shape == found.lowest.shape == found.melody.shape == (0,)
    assert found.weight.dtype == np.int64


def test_weights_cannot_be_written_to() -> None:
    found = weighed(one_note())

    assert not any(array.flags.writeable for array in (found.weight, found.highest, found.lowest, found.melody))


def test_weights_stay_whole_numbers_above_zero_at_both_ends() -> None:
    soft = score_of([(0.3, "C4"), (0.3, "E4", 1), (0.3, "G4")], duration_s=0.0)
    loud = score_of([(0.0, "C4", 127, 3)], duration_s=60.0)

    # 1000 · 0.753 · 0.9 between beats · 0.9 of no length = 609.93
    assert worths(soft)[1] == 609
    # 1000 · 2 · 1.246 · 1.1 · 1.1 · 2.5 = 7538.3
    assert worths(loud, lead=3) == [7538]


@given(st.integers(1, 127), st.sampled_from([0.0, 0.5, 0.3]), st.floats(0, 5), st.sampled_from([None, 1, 2]))
def test_the_weight_is_the_exact_product_rounded_down(
    velocity: int, onset_s: float, duration_s: float, lead: int | None
) -> None:
    found = worths(one_note(onset_s, velocity, duration_s), lead=lead)

    # A second way to the formula, in exact fractions; a note alone is the highest.
    exact = Fraction(2 * PLAIN)
    exact *= Fraction(750 + velocity * 500 // 128, 1000)
    exact *= {0.0: Fraction(11, 10), 0.5: Fraction(1), 0.3: Fraction(9, 10)}[onset_s]
    exact *= Fraction(900 + round(200 * min(duration_s, 1.0)), 1000)
    exact *= Fraction(5, 2) if lead == 1 else 1
    assert found == [int(exact)]


def test_no_product_of_factors_passes_64_bits() -> None:
    greatest = [
        weights.HIGHEST_VOICE,
        weights.STRESS_LEAST + weights.STRESS_SPAN * 127 // 128,
        weights.FIRST_BEAT,
        weights.DURATION_LEAST + weights.DURATION_SPAN,
        weights.LEAD_CHANNEL,
    ]

    # Python's whole numbers have no size: the same product in them is what 64 bits must hold.
    product = int(np.prod([float(factor) for factor in greatest]))
    assert product < 2**63
    assert worths(one_note(0.0, 127, 1.0), lead=1) == [product // PLAIN**4]


def test_the_worth_kept_is_the_sum_of_the_weights_of_the_notes_kept() -> None:
    # C4 repeats after 1 s: the second, softer one, 0.5 s later, is left out.
    arrangement = arranged([(0.0, "C4", 127), (0.5, "C4"), (2.5, "D4", 1)])

    assert left_out(arrangement) == {1: "wheel-still-stepping"}
    # 0.25 s: 0.95. 1000 · 2 · 1.246 · 1.1 · 0.95 = 2604.1; 1000 · 2 · 0.753 · 0.95 = 1430.7
    assert arrangement.worth.kept == 2604 + 1430
    assert arrangement.worth.bound == 2604 + 1430
    assert arrangement.worth.proved


def test_two_parts_in_unison_are_one_pluck_that_weighs_both() -> None:
    arrangement = arranged([(1.0, "C4", 64, 1), (1.0, "C4", 64, 2)])

    # Both highest, 0.25 s: 2 · (2000 · 0.95 = 1900)
    assert arrangement.notes == ((0, 1),)
    assert arrangement.worth.kept == 3800
