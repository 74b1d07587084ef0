import time
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from layout.arrange import arrange
from layout.arrange.budget import Budget
from layout.arrange.comb import comb_of
from layout.arrange.plucks import NO_TRACK, Wanted
from layout.arrange.posing import Rules, most_kept, pose, rules_of
from layout.arrange.problem import Beside, Problem
from layout.arrange.searching import Found, Way, search
from layout.documents import read_settings, shipped_movement
from layout.documents.pitch import key_of
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.turning import turning_of
from layout.read import Score
from tests.layout.arrange.small_comb import arranged, asking, comb_with, left_out, played, spacing_for
from tests.thorough import THOROUGH

BEST = {"mode": "best"}


def plucks(pitches: Sequence[str]) -> Wanted:
    """One pluck of weight 1000 every 2 s."""
    count = len(pitches)
    nothing = frozen_ints([0] * count)
    return Wanted(
        asked_s=frozen_floats(2.0 * place for place in range(count)),
        pitch=frozen_ints(key_of(pitch) for pitch in pitches),
        weight=frozen_ints([1000] * count),
        notes=tuple((place,) for place in range(count)),
        must_sound=np.zeros(count, dtype=np.bool_),
        on_track=frozen_ints([-1] * count),
        outer=np.zeros(count, dtype=np.bool_),
        fixed=np.zeros(count, dtype=np.bool_),
        nudge_ns=nothing,
        shift_ns=nothing,
        rest_ns=nothing,
        alternates_ns=nothing,
        foreign=np.zeros(count, dtype=np.bool_),
        parent=frozen_ints([-1] * count),
        again_of=frozen_ints([-1] * count),
    )


def small_rules() -> Rules:
    movement = comb_with()
    return rules_of(movement, comb_of(movement), turning_of(movement), spacing_for(movement), asking())


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


def test_the_transpositions_told_are_the_best_five_with_what_they_keep() -> None:
    arrangement = arranged([(0.0, "C4"), (1.0, "D4"), (2.0, "E4"), (3.0, "G4")], transpose=BEST)

    # C D E G: all four at 0; by 2 up D E stand (on D and E), by 5 down G4 on D4, by 7 up C4 on G4; and so on.
    by_semitones = {one.semitones: one.kept for one in arrangement.tried}
    assert arrangement.tried[0].semitones == 0
    assert len(by_semitones) == 5
    for semitones, kept in by_semitones.items():
        fixed = arranged(
            [(0.0, "C4"), (1.0, "D4"), (2.0, "E4"), (3.0, "G4")],
            transpose={"mode": "fixed", "semitones": semitones},
        )
        assert fixed.worth.kept == kept
    keeps = [one.kept or 0 for one in arrangement.tried]
    assert keeps == sorted(keeps, reverse=True)


def test_every_transposition_of_the_range_is_told_with_a_bound_that_holds() -> None:
    notes = [(0.0, "C4"), (1.0, "D4"), (2.0, "E4"), (3.0, "G4")]

    told = arranged(notes, transpose=BEST).transpositions

    assert [one.semitones for one in told] == list(range(-12, 13))
    for one in told:
        kept = arranged(notes, transpose={"mode": "fixed", "semitones": one.semitones}).worth.kept
        assert one.kept in (None, kept)
        assert one.bound >= kept


def test_a_pluck_that_a_ruling_puts_into_another_octave_counts_among_what_a_transposition_may_keep() -> None:
    free = plucks(["C4", "E6", "A4"])
    ruled = replace(free, on_track=frozen_ints([NO_TRACK, 3, NO_TRACK]))  # E6 on the track of E4

    # C4 alone has a tooth; A4's cannot be used.
    assert (most_kept(free, 0, small_rules()), most_kept(ruled, 0, small_rules())) == (1000, 2000)


def test_a_hopeless_transposition_is_left_half_way() -> None:
    steps: list[int] = []

    def spied(way: Way) -> list[Problem]:
        return [pose(plucks(["C4", "D4", "E4", "G4"]), way.semitones, small_rules())]

    class Spy(Budget):
        """Counts how often it is asked whether anything is left."""

        @property
        def spent(self) -> bool:
            steps.append(1)
            return False

    ways = [Way(semitones=s, speed_factor=1.0) for s in range(-12, 13)]
    bounds = {way: most_kept(plucks(["C4", "D4", "E4", "G4"]), way.semitones, small_rules()) for way in ways}

    found = search(bounds, spied, Spy())

    # 25 transpositions of two steps each would be 50; five are told, and nothing else can be among them.
    assert isinstance(found, Found)
    assert (found.way.semitones, found.kept, found.bound) == (0, 4000, 4000)
    assert len(steps) < 25


def test_a_search_out_of_nodes_keeps_a_true_bound_and_says_so() -> None:
    class Empty(Budget):
        """Nothing left from the start."""

        def __init__(self) -> None:
            super().__init__(nodes=0)

    rules = replace(small_rules(), besides=(Beside(inner_index=0, outer_index=1, from_ns=-1000, to_ns=1000),))
    together = replace(plucks(["C4", "D4"]), asked_s=frozen_floats([0.0, 0.0]))

    found = search({Way(semitones=0, speed_factor=1.0): 2000}, lambda way: [pose(together, 0, rules)], Empty())

    # C and D stand beside each other: one of the two sounds. Each alone is 1000, so nothing keeps more than 2000.
    assert isinstance(found, Found)
    assert (found.kept, found.bound, found.stopped) == (1000, 2000, "nodes")


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


# Measured on a busy machine: 2 s and 45 s, the second at the end of its budget. The limits leave room for a slower
# one, and lie below the two minutes a worker of the service has. The longest takes half a minute of a quiet machine, so
# it is for TESTS=thorough.
@pytest.mark.parametrize(("count", "most_s"), [(2_000, 20.0), *([(50_000, 110.0)] if THOROUGH else [])])
def test_the_longest_tunes_are_answered_within_seconds(count: int, most_s: float) -> None:
    movement = shipped_movement("mossbrook-67")
    score, spacing = crowded_score(count, 83.0, (48, 97)), spacing_for(movement)

    start_s = time.perf_counter()
    arrangement = arrange(score, movement, read_settings("{}"), spacing)
    took_s = time.perf_counter() - start_s

    assert len(arrangement.left_out) + sum(map(len, arrangement.notes)) == count
    assert took_s < most_s
