"""Music as makers write it, by hand on the small comb. Durations stand with the notes.

Weights are those of layout.arrange.weights, over 1e9: voice · stress · beat · duration with stress 1000 at velocity
64, 753 at 1, 1140 at 100 (750 + 500·100/128), 1246 at 127; beat 1100 on a bar (every 2 s), 1000 on another beat
(every 0.5 s), else 900; duration 950 for 0.25 s, 1100 from 1 s on. An extra pluck is worth 0.2 (again) or 0.25
(second tooth) of its pluck, at most (least weight asked for − 1)/2.
"""

from dataclasses import replace
from typing import Any

import pytest

from layout.arrange import Arrangement, arrange
from layout.documents import Movement
from layout.errors import RulingError
from layout.mechanics.arrays import frozen_floats
from layout.read import Score
from tests.layout.arrange.small_comb import (
    SMALL_COMB,
    arranged,
    asking,
    comb_with,
    left_out,
    played,
    score_of,
    spacing_for,
)

# The arc is a tenth: tracks repeat after 0.1, 0.075, 0.06, 0.05, 0.04 s. The slots are short: webs ask for
# 0.55 mm, 0.18 s at 30 mm, 0.13 s at 40 mm and 0.1 s at 50 mm.
WHEEL = SMALL_COMB["star_wheel"]
QUICK = {
    "star_wheel": {**WHEEL, "engagement_arc_mm": WHEEL["engagement_arc_mm"] / 10},
    "projection": {"kind": "slot", "width_mm": 0.5, "length_mm": 0.5},
}

Lasting = tuple[Any, ...]  # duration_s, then a note of score_of


def tune_of(notes: list[Lasting]) -> Score:
    """Notes in the order of the score, each after how long it lasts."""
    score = score_of([note[1:] for note in notes])
    return replace(score, duration_s=frozen_floats(note[0] for note in notes))


def written(
    notes: list[Lasting], writing: dict[str, Any], *, movement: Movement | None = None, **fields: Any
) -> Arrangement:
    on = movement or comb_with()
    return arrange(tune_of(notes), on, asking(writing=writing, **fields), spacing_for(on, min_web_mm=0.05))


def again_of(arrangement: Arrangement) -> list[int]:
    return [int(one) for one in arrangement.again_of]


def test_a_long_note_is_plucked_again_on_alternate_teeth() -> None:
    arrangement = written([(2.0, 0.0, "E4")], {"pluck_again_s": 0.5})

    # 0.5, 1.0, 1.5; 2.0 − 0.25 is past.
    assert played(arrangement) == [(0.0, 3), (0.5, 4), (1.0, 3), (1.5, 4)]
    assert arrangement.notes == ((0,), (), (), ())
    assert again_of(arrangement) == [-1, 0, 0, 0]
    assert arrangement.asked_s.tolist() == arrangement.planned_s.tolist() == [0.0, 0.5, 1.0, 1.5]
    # 2000·1.1·1.1 = 2420, three times a fifth of it, 484
    assert arrangement.worth.kept == 2420 + 3 * 484
    assert arrangement.worth.proved


@pytest.mark.parametrize(
    ("lasts_s", "times"),
    [(0.74, 0), (0.75, 1), (1.24, 1), (1.25, 2)],
)
def test_the_last_pluck_comes_half_an_interval_before_the_note_ends(lasts_s: float, times: int) -> None:
    arrangement = written([(lasts_s, 0.0, "E4")], {"pluck_again_s": 0.5})

    assert len(arrangement.notes) == 1 + times


@pytest.mark.parametrize("onset_s", [0.1, 0.7, 2.3, 5.3])
def test_a_note_of_just_one_and_a_half_intervals_is_plucked_again_wherever_it_begins(onset_s: float) -> None:
    # (0.1 + 0.15 − 0.1) / 0.1 is 1.4999…, (0.7 + 0.15 − 0.7) / 0.1 is 1.5000…
    notes: list[Lasting] = [(0.05, 0.0, "C4"), (0.15, onset_s, "E4")]

    assert again_of(written(notes, {"pluck_again_s": 0.1}, movement=comb_with(QUICK))) == [-1, -1, 1]


def test_the_last_pluck_comes_half_an_interval_before_the_pitch_comes_again() -> None:
    notes: list[Lasting] = [(4.0, 0.0, "E4"), (0.25, 1.25, "E4")]

    arrangement = written(notes, {"pluck_again_s": 0.5})

    assert [second for second, _ in played(arrangement)] == [0.0, 0.5, 1.0, 1.25]
    assert again_of(arrangement) == [-1, 0, 0, -1]


def test_nothing_is_plucked_again_past_the_free_turn() -> None:
    # The music ends at 58 s: 58.2 s is past it.
    notes: list[Lasting] = [(0.25, 0.0, "C4"), (5.0, 57.0, "E4")]

    arrangement = written(notes, {"pluck_again_s": 0.4})

    assert [second for second, _ in played(arrangement)] == [0.0, 57.0, 57.4, 57.8]


def test_as_fast_as_the_disc_plays_a_note_lasts_shorter() -> None:
    # 2.0 s at twice the speed is 1.0 s: one pluck more at 0.5, none at 1.0.
    arrangement = written([(2.0, 0.0, "E4")], {"pluck_again_s": 0.5}, speed={"mode": "factor", "factor": 2})

    assert [second for second, _ in played(arrangement)] == [0.0, 0.5]


def test_on_a_single_tooth_it_is_plucked_again_as_often_as_the_wheel_follows() -> None:
    # C4 follows after 1.0 s: of 0.5, 1.0 … 3.5 every other one.
    arrangement = written([(4.0, 0.0, "C4")], {"pluck_again_s": 0.5})

    assert played(arrangement) == [(0.0, 1), (1.0, 1), (2.0, 1), (3.0, 1)]
    assert arrangement.worth.kept == 2420 + 3 * 484


def test_where_the_other_tooth_is_needed_the_note_is_not_plucked_again() -> None:
    # At 0.5 track 3 has not rested 0.6 since the first E4, and track 4 would not have until the second at 0.9.
    notes: list[Lasting] = [(0.85, 0.0, "E4"), (0.25, 0.9, "E4")]
    rulings = [{"note": 0, "do": "place", "track": 3}, {"note": 1, "do": "place", "track": 4}]

    arrangement = written(notes, {"pluck_again_s": 0.5}, rulings=rulings)

    assert played(arrangement) == [(0.0, 3), (0.9, 4)]


def test_a_note_that_does_not_sound_is_not_plucked_again() -> None:
    # C4 at 0 is worth 2000·1.246·1.1·0.95 = 2604. C4 at 0.5 is too near to it, worth 2000·0.753·1.1 = 1656 and once
    # again at 2.5, where the tooth is free, 331: less.
    notes: list[Lasting] = [(0.25, 0.0, "C4", 127), (4.0, 0.5, "C4", 1)]

    arrangement = written(notes, {"pluck_again_s": 2.0})

    assert played(arrangement) == [(0.0, 1)]
    assert left_out(arrangement) == {1: "wheel-still-stepping"}
    assert arrangement.worth.kept == arrangement.worth.bound == 2604


def test_of_two_notes_that_cannot_both_sound_plucks_again_may_decide() -> None:
    # As above with an interval of 1 s: 1656 and three times 331 are 2649, more than 2604.
    notes: list[Lasting] = [(0.25, 0.0, "C4", 127), (4.0, 0.5, "C4", 1)]

    arrangement = written(notes, {"pluck_again_s": 1.0})

    assert played(arrangement) == [(0.5, 1), (1.5, 1), (2.5, 1), (3.5, 1)]
    assert arrangement.worth.kept == 2649


def test_a_pluck_again_costs_no_soft_inner_note() -> None:
    # The lead's C4 at 0 is worth 2000·1.1·1.1·2.5 = 6050; a fifth of it, 1210 at 1.0, would be more than the C4 at
    # 1.5, inner and soft: 753·0.95 = 715. But the least asked for is that, and (715 − 1)/2 = 357 is less.
    notes: list[Lasting] = [
        (2.0, 0.0, "C4", 64, 2),
        (0.25, 1.5, "B3"),
        (0.25, 1.5, "C4", 1),
        (0.25, 1.5, "G4"),
    ]

    arrangement = written(notes, {"pluck_again_s": 1.0}, channels={"lead": 2})

    assert left_out(arrangement) == {1: "no-such-pitch"}
    assert played(arrangement) == [(0.0, 1), (1.5, 1), (1.5, 5)]
    assert arrangement.worth.kept == 6050 + 715 + 1900  # G4: 2000·0.95


def test_a_loud_note_is_plucked_on_two_teeth_at_one_moment() -> None:
    arrangement = written([(0.25, 0.0, "E4", 100)], {"two_teeth_from_velocity": 100})

    assert played(arrangement) == [(0.0, 3), (0.0, 4)]
    assert sorted(again_of(arrangement)) == [-1, 0]
    assert arrangement.worth.kept == 2382 + 595  # 2000·1.14·1.1·0.95, and a quarter of it
    assert arrangement.worth.proved


def test_a_softer_note_is_plucked_on_one_tooth_and_a_loud_one_where_there_is_one() -> None:
    softer = written([(0.25, 0.0, "E4", 99)], {"two_teeth_from_velocity": 100})
    single = written([(0.25, 0.0, "C4", 127)], {"two_teeth_from_velocity": 100})

    assert again_of(softer) == again_of(single) == [-1]


def test_the_loudest_of_the_notes_of_a_pluck_counts() -> None:
    notes: list[Lasting] = [
        (0.25, at_s, "E4", velocity, 1 + velocity // 100) for at_s in (0.0, 1.0) for velocity in (20, 110)
    ]

    arrangement = written(notes, {"two_teeth_from_velocity": 100})

    assert sorted(arrangement.notes) == [(), (), (0, 1), (2, 3)]
    assert sorted(again_of(arrangement)) == [-1, -1, 0, 2]  # the first note of the pluck it belongs to


def test_a_second_tooth_is_not_plucked_where_a_note_needs_it() -> None:
    # Both tracks rest longer than 0.45 s. 2382 as above and 2000·0.9·0.95 = 1710; 595 would be less than that.
    notes: list[Lasting] = [(0.25, 0.0, "E4", 100), (0.25, 0.45, "E4")]

    arrangement = written(notes, {"two_teeth_from_velocity": 100})

    assert sorted(track for _, track in played(arrangement)) == [3, 4]
    assert again_of(arrangement) == [-1, -1]
    assert arrangement.worth.kept == 2382 + 1710


def test_a_second_tooth_moves_with_its_note() -> None:
    # A chord at 1.0 spread from the bass: E4 is the highest and comes 6 ms late, on both tracks.
    notes: list[Lasting] = [(0.25, 0.0, "G4"), (0.25, 1.0, "C4"), (0.25, 1.0, "E4", 100)]

    arrangement = written(
        notes, {"two_teeth_from_velocity": 100, "chords": "bass-first"}, largest_nudge_ms=20, largest_melody_nudge_ms=6
    )

    assert played(arrangement) == [(0.0, 5), (0.98, 1), (1.006, 3), (1.006, 4)]


TRILL: list[Lasting] = [(0.1, 0.1 * place, "ED"[place % 2] + "4") for place in range(6)]


def test_of_a_trill_single_teeth_leave_out_what_is_in_the_way_and_doubled_ones_alternate() -> None:
    plain = written(TRILL, {}, movement=comb_with(QUICK))
    arrangement = written(TRILL, {"ornaments": "over-doubled-teeth"}, movement=comb_with(QUICK))

    assert left_out(plain) == {}
    # D4 has one tooth: of 0.1, 0.3, 0.5 the middle one is in the way of both others.
    assert set(left_out(arrangement)) == {3}
    tracks = [track for _, track in played(arrangement) if track != 2]
    assert tracks in ([3, 4, 3], [4, 3, 4])
    # All are highest, and 920 for 0.1 s: E4 on the bar 2000·1.1·0.92 = 2024, D4 at 0.5 on a beat
    # 1840, the others 1656.
    assert plain.worth.kept == 2024 + 4 * 1656 + 1840
    assert arrangement.worth.kept == plain.worth.kept - 1656
    assert arrangement.worth.proved


def test_one_tooth_may_not_be_ruled_to_neighbours_of_a_trill() -> None:
    rulings = [{"note": note, "do": "place", "track": 4} for note in (0, 2)]

    plain = written(TRILL, {}, movement=comb_with(QUICK), rulings=rulings)

    assert len(plain.notes) == 6
    with pytest.raises(RulingError):
        written(TRILL, {"ornaments": "over-doubled-teeth"}, movement=comb_with(QUICK), rulings=rulings)


def test_no_nudge_lets_one_tooth_trill() -> None:
    arrangement = written(
        TRILL,
        {"ornaments": "over-doubled-teeth"},
        movement=comb_with(QUICK),
        largest_nudge_ms=50,
        largest_melody_nudge_ms=50,
    )

    assert set(left_out(arrangement)) == {3}


def test_a_run_of_a_scale_is_played_on_single_teeth() -> None:
    run: list[Lasting] = [(0.1, 0.1 * place, f"{pitch}4") for place, pitch in enumerate("CDEDCDED")]

    arrangement = written(run, {"ornaments": "over-doubled-teeth"}, movement=comb_with(QUICK))

    assert left_out(arrangement) == {}


def test_a_grace_note_and_the_next_of_its_pitch_are_not_played_on_one_tooth() -> None:
    # D4 at 0 before E4: 2000·1.1·0.916 = 2015; D4 at 0.5 is alone as well, on no bar: 2000·0.95 = 1900, the lesser.
    notes: list[Lasting] = [(0.08, 0.0, "D4"), (0.4, 0.08, "E4"), (0.25, 0.5, "D4")]

    arrangement = written(notes, {"ornaments": "over-doubled-teeth"}, movement=comb_with(QUICK))
    later = written([*notes[:2], (0.25, 0.61, "D4")], {"ornaments": "over-doubled-teeth"}, movement=comb_with(QUICK))

    assert set(left_out(arrangement)) == {2}
    assert left_out(later) == {}  # more than 0.6 s after the grace note


NUDGES: dict[str, Any] = {"largest_nudge_ms": 20, "largest_melody_nudge_ms": 6}
CHORD: list[Lasting] = [(0.25, 0.0, "D4"), *[(0.25, 1.0, pitch) for pitch in ("C4", "E4", "G4")]]


def test_a_chord_is_spread_from_the_bass_up_within_each_nudge() -> None:
    together = written(CHORD, {}, **NUDGES)
    arrangement = written(CHORD, {"chords": "bass-first"}, **NUDGES)

    # Evenly from 20 ms before to the 6 ms after that the melody may have.
    assert [second for second, _ in played(arrangement)] == [0.0, 0.98, 0.993, 1.006]
    assert [track for _, track in played(arrangement)][1::2] == [1, 5]
    assert {second for second, _ in played(together)} == {0.0, 1.0}
    assert arrangement.worth == together.worth


def test_no_note_of_a_chord_comes_before_a_lower_one_though_the_melody_may_not_wait() -> None:
    # 26 ms in three steps; evenly to 20 ms the third would come at 6.7, after the melody at 6.
    notes: list[Lasting] = [(0.25, 0.0, "D4"), *[(0.25, 1.0, pitch) for pitch in ("C4", "D4", "E4", "G4")]]

    arrangement = written(notes, {"chords": "bass-first"}, **NUDGES)

    assert played(arrangement)[1:] == [(0.98, 1), (0.989, 2), (0.997, 4), (1.006, 5)]


def test_a_melody_in_the_bass_keeps_its_own_nudge() -> None:
    notes: list[Lasting] = [(0.25, 0.0, "D4"), (0.25, 1.0, "C4", 64, 2), (0.25, 1.0, "G4")]

    arrangement = written(notes, {"chords": "bass-first"}, channels={"lead": 2}, **NUDGES)

    assert played(arrangement)[1:] == [(0.994, 1), (1.02, 5)]


def test_a_melody_in_the_middle_keeps_its_own_nudge_and_its_place() -> None:
    # Evenly −20, −6.7, 6.7, 20: the melody, second from below, may not be 6.7 early.
    notes: list[Lasting] = [
        (0.25, 0.0, "D4"),
        (0.25, 1.0, "C4"),
        (0.25, 1.0, "D4", 64, 2),
        (0.25, 1.0, "E4"),
        (0.25, 1.0, "G4"),
    ]

    arrangement = written(notes, {"chords": "bass-first"}, channels={"lead": 2}, **NUDGES)

    assert [second for second, _ in played(arrangement)][1:] == [0.98, 0.994, 1.007, 1.02]


def test_where_the_melody_leaves_no_room_two_notes_of_a_chord_come_together() -> None:
    # Nine notes, some without teeth, 5 ms apart from −20: E4, the third, would come at −10, before the melody at −6.
    pitches = ("C4", "D4", "E4", "F4", "F#4", "G4", "A#4", "B4", "C5")
    chord = [(0.25, 1.0, pitch, 64, 2 if pitch == "D4" else 1) for pitch in pitches]

    arrangement = written([(0.25, 0.0, "G4"), *chord], {"chords": "bass-first"}, channels={"lead": 2}, **NUDGES)

    assert [second for second, _ in played(arrangement)][1:] == [0.98, 0.994, 0.994, 1.005]


def test_a_chord_at_the_beginning_and_one_at_the_end_have_one_side_only() -> None:
    notes: list[Lasting] = [(0.25, at_s, pitch) for at_s in (0.0, 58.0) for pitch in ("C4", "E4", "G4")]

    arrangement = written(notes, {"chords": "bass-first"}, **NUDGES)

    assert [second for second, _ in played(arrangement)] == [0.0, 0.003, 0.006, 57.98, 57.99, 58.0]


def test_without_a_nudge_no_chord_is_spread() -> None:
    assert {second for second, _ in played(written(CHORD, {"chords": "bass-first"}))} == {0.0, 1.0}


def test_written_out_the_defaults_change_nothing() -> None:
    notes = [
        (0.0, "C4", 127),
        (0.0, "E4"),
        (0.1, "E4"),
        (0.2, "D4"),
        (0.3, "E4"),
        (0.7, "C4"),
        (1.0, "G4"),
        (57.9, "E4"),
    ]
    spelled = {
        "pluck_again_s": None,
        "ornaments": "as-any-note",
        "chords": "together",
        "two_teeth_from_velocity": None,
        "ringing_tooth_cost": 0,
        "ringing_bass_cost": 0,
    }

    plain, spelt = arranged(notes, largest_nudge_ms=20), arranged(notes, largest_nudge_ms=20, writing=spelled)

    assert played(plain) == played(spelt)
    assert plain.notes == spelt.notes
    assert plain.worth == spelt.worth
    assert again_of(plain) == [-1] * len(plain.notes)
    assert plain.worth.kept == sum(int(plain.note_weight[note]) for pluck in plain.notes for note in pluck)


def test_nothing_written_in_any_way_is_nothing() -> None:
    everything = {
        "pluck_again_s": 0.5,
        "ornaments": "over-doubled-teeth",
        "chords": "bass-first",
        "two_teeth_from_velocity": 1,
        "ringing_tooth_cost": 1,
        "ringing_bass_cost": 1,
    }

    assert written([], everything).notes == ()
