import time
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from layout.arrange import arrange
from layout.arrange.asked import Asked, Chosen, Clash
from layout.arrange.choose import choose
from layout.arrange.comb import comb_of
from layout.arrange.plucks import Wanted
from layout.arrange.rulings import Rulings
from layout.arrange.transposing import Rules, best_transposed
from layout.documents import read_settings, shipped_movement
from layout.documents.pitch import key_of
from layout.documents.settings import Transpose
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning, turning_of
from layout.read import Score
from tests.layout.arrange.small_comb import arranged, comb_with, left_out, played, spacing_for

BEST = {"mode": "best"}


def plucks(pitches: Sequence[str]) -> Wanted:
    """One pluck of weight 1000 every 2 s."""
    count = len(pitches)
    return Wanted(
        asked_s=frozen_floats(2.0 * place for place in range(count)),
        pitch=frozen_ints(key_of(pitch) for pitch in pitches),
        weight=frozen_ints([1000] * count),
        notes=tuple((place,) for place in range(count)),
        must_sound=np.zeros(count, dtype=np.bool_),
        on_track=frozen_ints([-1] * count),
    )


def small_rules() -> Rules:
    movement = comb_with()
    return Rules(
        comb=comb_of(movement),
        turning=turning_of(movement),
        spacing=spacing_for(movement),
        rulings=Rulings(left_out=frozenset(), forced={}),
    )


def test_a_fixed_transposition_is_kept_whatever_it_loses() -> None:
    arrangement = arranged([(0.0, "C4"), (2.0, "D4")], transpose={"mode": "fixed", "semitones": 2})

    # C4 + 2 is D4, track 2; D4 + 2 is E4, on the two tracks 3 and 4.
    assert arrangement.transposed_semitones == 2
    assert arrangement.key.tolist() == [62, 64]
    assert played(arrangement) == [(0.0, 2), (2.0, 4)]


def test_the_best_transposition_keeps_the_most_weight() -> None:
    # Bb3 C4 D4 F4: on a comb of C D E G all four are there at +2.
    arrangement = arranged([(0.0, "Bb3"), (1.0, "C4"), (2.0, "D4"), (3.0, "F4")], transpose=BEST)

    assert arrangement.transposed_semitones == 2
    assert left_out(arrangement) == {}
    assert arrangement.worth.proved


def test_weight_counts_and_not_the_number_of_notes() -> None:
    # At 0 three soft notes sound (2 · 1573 + 1430), at +1 the two-part unison on F#4 (2 · 2604) and no other.
    notes = [(0.0, "C4", 1), (2.0, "C4", 1), (3.0, "G4", 1), (4.0, "F#4", 127, 1), (4.0, "F#4", 127, 2)]

    arrangement = arranged(notes, transpose=BEST)

    assert arrangement.transposed_semitones == 1
    assert arrangement.worth.kept == 2 * 2604


@pytest.mark.parametrize(("pitch", "semitones"), [("C4", 0), ("B3", 1), ("C#4", -1), ("F4", -1), ("F#4", 1)])
def test_of_equal_transpositions_the_smallest_is_taken_and_of_two_the_lower(pitch: str, semitones: int) -> None:
    # The comb has C D E G: C#4 could go to C (−1) or D (+1), F4 to E (−1) or G (+2), F#4 to G (+1) or E (−2).
    assert arranged([(0.0, pitch)], transpose=BEST).transposed_semitones == semitones


def test_nothing_beyond_the_range_is_searched() -> None:
    arrangement = arranged([(0.0, "C5")], transpose={"mode": "best", "range": 4})

    # G4 is 5 below C5.
    assert arrangement.transposed_semitones == 0
    assert left_out(arrangement) == {0: "no-such-pitch"}
    assert arranged([(0.0, "C5")], transpose={"mode": "best", "range": 5}).transposed_semitones == -5


def test_a_transposition_whose_bound_cannot_win_is_not_tried() -> None:
    tried: list[int] = []

    def spy(asked: Asked, turning: Turning, spacing: Spacing) -> Chosen | Clash:
        tried.append(int(asked.key[0]) - key_of("C4"))
        return choose(asked, turning, spacing)

    best = best_transposed(plucks(["C4", "D4", "E4", "G4"]), small_rules(), Transpose(), spy)

    # At 0 all four are on the comb; no other transposition has so many.
    assert tried == [0]
    assert (best.semitones, best.kept, best.bound) == (0, 4000, 4000)


def test_another_chooser_takes_the_place_of_ours_and_its_bound_is_reported() -> None:
    def never(asked: Asked, turning: Turning, spacing: Spacing) -> Chosen | Clash:
        return Chosen(track_index=frozen_ints([-1] * len(asked.key)), bound=1500)

    best = best_transposed(plucks(["C4"]), small_rules(), Transpose(mode="fixed", semitones=0), never)

    # The chooser says 1500 and one pluck weighs 1000: the lower of the two true bounds holds.
    assert (best.kept, best.bound) == (0, 1000)


def test_the_bound_holds_for_every_transposition_tried_and_not_only_the_last() -> None:
    def none(asked: Asked, turning: Turning, spacing: Spacing) -> Chosen | Clash:
        return Chosen(track_index=frozen_ints([-1] * len(asked.key)), bound=99_000)

    best = best_transposed(plucks(["C4", "D4", "C#4"]), small_rules(), Transpose(), none)

    # C and D are on the comb at 0 and E alone at +3; this chooser lets no transposition win.
    assert (best.kept, best.bound) == (0, 2000)


def test_the_bound_counts_repeats_at_exactly_their_least_time() -> None:
    def none(asked: Asked, turning: Turning, spacing: Spacing) -> Chosen | Clash:
        return Chosen(track_index=frozen_ints([-1] * len(asked.key)), bound=99_000)

    # C4 repeats after 1 s: 0, 1 and 2 s are all in order.
    exact = replace(plucks(["C4"] * 3), asked_s=frozen_floats([0.0, 1.0, 2.0]))

    best = best_transposed(exact, small_rules(), Transpose(mode="fixed", semitones=0), none)

    assert best.bound == 3000


def test_of_two_tracks_the_chooser_bounds_twice_what_the_faster_can_hold() -> None:
    asked_s, weight = frozen_floats([0.0, 0.1, 0.2, 0.3]), frozen_ints([1000, 3000, 2000, 2000])
    close = replace(plucks(["E4"] * 4), asked_s=asked_s, weight=weight)
    rules = small_rules()

    chosen = choose(close.transposed(0, rules.comb.tracks_of_key), rules.turning, rules.spacing)

    # One track holds one pluck in 0.3 s, the heaviest 3000; two tracks at most 6000, and here 5000.
    assert isinstance(chosen, Chosen)
    assert chosen.bound == 6000
    assert [int(close.weight[pluck]) for pluck in np.flatnonzero(chosen.track_index >= 0)] == [3000, 2000]


def crowded_score(count: int, length_s: float, pitches: tuple[int, int]) -> Score:
    # Seed 7: any tune will do, the same on every run.
    random = np.random.default_rng(7)
    onset_s = np.sort(random.uniform(0, length_s, count).round(2))
    return Score(
        onset_s=frozen_floats(onset_s),
        duration_s=frozen_floats(random.uniform(0.05, 1.0, count)),
        pitch=frozen_ints(random.integers(*pitches, count)),
        velocity=frozen_ints(random.integers(1, 128, count)),
        channel=frozen_ints([1] * count),
        bar_s=frozen_floats([0.0]),
        beat_s=frozen_floats([0.0]),
        title="",
        midi_format=0,
        sequence=1,
        sequence_count=1,
        percussion_count=0,
        warnings=(),
    )


# Measured on one core: 0.4 s and 4 s. The limits leave room for a slow machine.
@pytest.mark.parametrize(("count", "most_s"), [(2_000, 5.0), (50_000, 30.0)])
def test_the_longest_tunes_are_answered_within_seconds(count: int, most_s: float) -> None:
    movement = shipped_movement("mossbrook-67")
    score, spacing = crowded_score(count, 83.0, (48, 97)), spacing_for(movement)

    start_s = time.perf_counter()
    arrangement = arrange(score, movement, read_settings("{}"), spacing)
    took_s = time.perf_counter() - start_s

    assert len(arrangement.left_out) + sum(map(len, arrangement.notes)) == count
    assert took_s < most_s
