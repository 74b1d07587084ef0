from itertools import chain, combinations, product
from typing import Any

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from layout.arrange import Arrangement, arrange
from layout.errors import RulingError
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
    score_of,
    spacing_for,
)
from tests.thorough import tried

AS_WRITTEN = {"mode": "fixed", "semitones": 0}
C4_TWICE: list[Note] = [(0.0, "C4", 127), (0.5, "C4", 1)]  # track 1 repeats after 1 s: only one can sound


def ruled(notes: list[Note], *rulings: dict[str, Any], **fields: Any) -> Arrangement:
    return arranged(notes, rulings=list(rulings), **fields)


def refusal(notes: list[Note], *rulings: dict[str, Any], **fields: Any) -> RulingError:
    with pytest.raises(RulingError) as caught:
        ruled(notes, *rulings, **fields)
    return caught.value


def told(error: RulingError) -> list[tuple[str, str]]:
    return [(problem.pointer, problem.message) for problem in error.problems]


def must(note: int) -> dict[str, Any]:
    return {"note": note, "do": "must-sound"}


def place(note: int, track: int) -> dict[str, Any]:
    return {"note": note, "do": "place", "track": track}


def leave_out(note: int) -> dict[str, Any]:
    return {"note": note, "do": "leave-out"}


# Rulings that are kept.


def test_a_note_ruled_out_leaves_its_room_to_another() -> None:
    arrangement = ruled(C4_TWICE, leave_out(0))

    assert played(arrangement) == [(0.5, 1)]
    assert left_out(arrangement) == {0: "ruled-out"}
    # The other alone: 1000 · 2 · 0.753 · 0.95 = 1430.7; what is ruled out is in no bound.
    assert (arrangement.worth.kept, arrangement.worth.bound) == (1430, 1430)


def test_a_note_that_must_sound_takes_the_room_of_a_heavier_one() -> None:
    arrangement = ruled(C4_TWICE, must(1))

    assert played(arrangement) == [(0.5, 1)]
    assert left_out(arrangement) == {0: "wheel-still-stepping"}


def test_a_note_placed_by_hand_stays_on_its_track() -> None:
    # Left alone the first E4 goes to track 4, the second to track 3.
    arrangement = ruled([(0.0, "E4"), (2.0, "E4"), (4.0, "E4")], place(0, 3), place(1, 3))

    assert played(arrangement) == [(0.0, 3), (2.0, 3), (4.0, 4)]


def test_a_note_placed_by_hand_in_another_octave_goes_there_though_no_others_may_be_moved() -> None:
    notes: list[Note] = [(0.0, "E5"), (4.0, "G5"), (8.0, "E3")]

    arrangement = ruled(notes, place(0, 4), place(2, 3), octave_moves="none", transpose=AS_WRITTEN)

    assert played(arrangement) == [(0.0, 4), (8.0, 3)]
    assert left_out(arrangement) == {1: "no-such-pitch"}
    assert arrangement.octave_semitones.tolist() == [-12, 12]
    assert arrangement.worth.kept == arrangement.worth.bound


def test_a_note_placed_by_hand_in_another_octave_keeps_the_share_that_octave_moves_keep() -> None:
    there = ruled([(0.0, "E4")], place(0, 4), octave_fit=0.6, transpose=AS_WRITTEN)
    moved = ruled([(0.0, "E5")], place(0, 4), octave_fit=0.6, transpose=AS_WRITTEN)

    # Alone and of one weight: 6 tenths, each rounded down to a whole grain.
    assert moved.worth.kept == there.worth.kept * 600 // 1000


def test_the_best_transposition_counts_what_a_ruling_moves_by_an_octave() -> None:
    # As written both sound, E5 for 6 tenths; an octave lower E5 fits whole, and G4 has no tooth.
    arrangement = ruled([(0.0, "E5", 127), (4.0, "G4", 1)], place(0, 4), transpose={"mode": "best", "range": 12})

    assert arrangement.transposed_semitones == 0
    assert played(arrangement) == [(0.0, 4), (4.0, 5)]


def test_a_note_placed_on_a_track_of_another_pitch_is_refused_in_every_octave() -> None:
    error = refusal([(0.0, "E5")], place(0, 5), transpose=AS_WRITTEN)

    assert told(error) == [
        ("/rulings/0", "transposed by +0: note 0 would be E5, which no usable tooth of the comb has")
    ]


def test_a_note_placed_by_hand_takes_the_room_of_a_heavier_one() -> None:
    # Track 4 repeats after 0.5 s, track 3 after 0.6: of three E4 within 0.4 s two can sound.
    arrangement = ruled([(0.0, "E4", 127), (0.2, "E4", 1), (0.4, "E4", 127)], place(1, 4))

    assert (0.2, 4) in played(arrangement)
    assert len(left_out(arrangement)) == 1


def test_the_ruling_of_one_note_forces_the_pluck_it_shares() -> None:
    notes: list[Note] = [(0.0, "C4", 127), (0.5, "C4", 1, 1), (0.5, "C4", 1, 2)]

    arrangement = ruled(notes, must(2))

    assert arrangement.notes == ((1, 2),)


def test_of_two_equal_notes_the_ruling_that_names_a_track_decides() -> None:
    arrangement = ruled([(0.0, "E4", 64, 1), (0.0, "E4", 64, 2)], must(0), place(1, 3))

    assert played(arrangement) == [(0.0, 3)]


def test_leaving_out_one_of_two_equal_notes_keeps_the_other() -> None:
    arrangement = ruled([(0.0, "C4", 64, 1), (0.0, "C4", 64, 2)], leave_out(0))

    assert arrangement.notes == ((1,),)
    assert left_out(arrangement) == {0: "ruled-out"}


def test_rulings_that_say_the_same_or_more_of_one_note_agree() -> None:
    notes: list[Note] = [(0.0, "E4"), (2.0, "G4")]

    arrangement = ruled(notes, must(0), place(0, 3), must(0), place(0, 3), leave_out(1), leave_out(1))

    assert played(arrangement) == [(0.0, 3)]


def test_the_transposition_is_one_that_satisfies_all_rulings() -> None:
    # E4 up to G4: +3. At 0 all notes would sound; at +3 the C4s are off the comb.
    notes: list[Note] = [(0.0, "E4"), (2.0, "C4"), (4.0, "C4")]

    arrangement = ruled(notes, place(0, 5), transpose={"mode": "best", "range": 4})

    assert arrangement.transposed_semitones == 3
    assert played(arrangement) == [(0.0, 5)]


def test_notes_that_must_sound_are_tried_on_every_track_before_they_are_refused() -> None:
    # Track 4 repeats after 0.5 s, track 3 after 0.6 s. Three that must sound at 0, 0.3 and 0.55 s:
    # the third fits track 4 only if the first stands there and the second on track 3.
    arrangement = ruled([(0.0, "E4"), (0.3, "E4"), (0.55, "E4")], must(0), must(1), must(2))

    assert played(arrangement) == [(0.0, 4), (0.3, 3), (0.55, 4)]


def test_going_back_over_several_notes_finds_the_one_way_that_is_left() -> None:
    # A note placed on track 4 at 1.3 s bars it from 0.8 to 1.8 s, so the one at 0.85 s needs track
    # 3, and so does not the one at 0.3 s (0.55 s before), which needs 4, and the one at 0 s needs 3.
    notes: list[Note] = [(0.0, "E4"), (0.3, "E4"), (0.85, "E4"), (1.3, "E4")]

    arrangement = ruled(notes, must(0), must(1), must(2), place(3, 4))

    assert played(arrangement) == [(0.0, 3), (0.3, 4), (0.85, 3), (1.3, 4)]


# E4 on tracks 1, 3 and 5 and G4 on 2 and 4, where 1 and 2, and 3 and 4, come too near side by side.
TWO_OF_A_KIND = {
    **CLOSE_TRACKS,
    **NEARLY_NO_REST,
    "teeth": [{"tooth": t, "track": t, "pitch": "G4" if t in {2, 4} else "E4"} for t in (1, 2, 3, 4, 5)],
}
TRACKS = {"E4": [0, 2, 4], "G4": [1, 3]}
CROWDED = comb_with(TWO_OF_A_KIND)
CROWDED_SPACING = spacing_for(CROWDED, min_web_mm=1.0)
A_STEP = st.tuples(st.integers(-4, 12), st.sampled_from(["E4", "E4", "G4"]), st.sampled_from([False] * 3 + [True]))


@settings(max_examples=tried(150), deadline=None)
@given(st.lists(A_STEP, min_size=2, max_size=7, unique_by=lambda note: note[:2]), st.integers(0, 2))
# Two that need going back twice, and over both keys; random tunes seldom do.
@example([(1, "E4", False), (2, "E4", True), (3, "E4", False), (3, "G4", False), (-4, "E4", False)], 0)
@example(
    [(4, "G4", True), (6, "E4", False), (6, "G4", False), (7, "E4", False), (8, "G4", False), (-3, "E4", False)], 1
)
def test_notes_that_must_sound_are_refused_only_where_no_way_exists(
    steps: list[tuple[int, str, bool]], hand: int
) -> None:
    # A step is 0.15 s; below 0 it lies at the end of the turn, which is 59.8 s long.
    movement, spacing = CROWDED, CROWDED_SPACING
    notes = sorted((step * 0.15 + (0.0 if step >= 0 else 59.8), pitch, by_hand) for step, pitch, by_hand in steps)
    tracks = [[TRACKS[pitch][hand % len(TRACKS[pitch])]] if by_hand else TRACKS[pitch] for _, pitch, by_hand in notes]
    rulings = [place(n, tracks[n][0] + 1) if by_hand else must(n) for n, (*_, by_hand) in enumerate(notes)]
    places = [[(onset_s, track) for track in ours] for (onset_s, _, _), ours in zip(notes, tracks, strict=True)]
    too_near = {pair for pair in combinations(chain(*places), 2) if broken_rules(pair, movement, spacing)}
    possible = any(too_near.isdisjoint(combinations(way, 2)) for way in product(*places))

    try:
        arrangement = arrange(
            score_of([note[:2] for note in notes]),
            movement,
            asking(rulings=rulings, passage={"from_s": 0}),
            spacing,
        )
    except RulingError:
        assert not possible
    else:
        assert left_out(arrangement) == {}


def test_the_last_note_moves_the_first_without_trying_all_between() -> None:
    # Track 3 is taken by hand at 59.4 s, so 59.7 s needs track 4, and so does not the first note, 0.3 s
    # later in the next turn. The 40 notes between have 2^40 ways, and none of them matters.
    row: list[Note] = [*((float(second), "E4") for second in range(41)), (59.4, "E4"), (59.7, "E4")]
    hands = [place(41, 3), *(must(note) for note in range(43) if note != 41)]

    arrangement = ruled(row, *hands, movement=comb_with(NEARLY_NO_REST))

    assert left_out(arrangement) == {}
    assert played(arrangement)[0] == (0.0, 3)
    assert played(arrangement)[-2:] == [(59.4, 3), (59.7, 4)]


# Rulings that cannot be kept.


def test_a_note_that_does_not_exist_is_refused() -> None:
    error = refusal(C4_TWICE, must(0), leave_out(2))

    assert told(error) == [("/rulings/1", "there is no note 2; the tune has notes 0 to 1")]
    assert str(error) == "settings: /rulings/1: there is no note 2; the tune has notes 0 to 1"


def test_a_ruling_on_a_tune_without_notes_is_refused() -> None:
    assert told(refusal([], must(0))) == [("/rulings/0", "there is no note 0; the tune has no notes")]


def test_a_track_that_does_not_exist_is_refused() -> None:
    error = refusal(C4_TWICE, place(0, 7))

    assert told(error) == [("/rulings/0", "there is no track 7; the movement has tracks 1 to 6")]


def test_a_track_without_a_usable_tooth_is_refused() -> None:
    error = refusal([(0.0, "A4")], place(0, 6))

    message = "track 6 has no usable tooth; choose another track or drop the ruling"
    assert told(error) == [("/rulings/0", message)]


@pytest.mark.parametrize(
    ("first", "second", "said"),
    [
        (leave_out(1), must(1), "'must-sound' here and 'leave-out' in /rulings/0"),
        (must(1), leave_out(1), "'leave-out' here and 'must-sound' in /rulings/0"),
        (place(1, 3), leave_out(1), "'leave-out' here and 'place on track 3' in /rulings/0"),
        (place(1, 3), place(1, 4), "'place on track 4' here and 'place on track 3' in /rulings/0"),
    ],
)
def test_two_rulings_for_one_note_that_disagree_are_refused(
    first: dict[str, Any], second: dict[str, Any], said: str
) -> None:
    error = refusal([(0.0, "C4"), (0.0, "E4")], first, second)

    assert told(error) == [("/rulings/1", f"note 1: {said} disagree; keep one of them")]


def test_a_place_after_a_must_sound_still_disagrees_with_a_later_place() -> None:
    error = refusal([(0.0, "E4")], must(0), place(0, 3), place(0, 4))

    [(pointer, message)] = told(error)
    assert pointer == "/rulings/2"
    assert "in /rulings/1 disagree" in message


def test_every_fault_is_told_in_the_order_of_the_settings() -> None:
    error = refusal(C4_TWICE, must(9), place(0, 1), place(0, 99), leave_out(0))

    assert [problem.pointer for problem in error.problems] == ["/rulings/0", "/rulings/2", "/rulings/3"]


@pytest.mark.parametrize(
    ("fields", "why"),
    [
        ({"passage": {"to_s": 3.0}}, "lies outside the passage; widen the passage or drop the ruling"),
        (
            {"channels": {"leave_out": [2]}},
            "is on a channel that /channels/leave_out leaves out; keep the channel or drop the ruling",
        ),
        (
            {},
            "is asked for after the free part of the turn; play faster, start later or drop the ruling",
        ),
    ],
)
@pytest.mark.parametrize("ruling", [must(1), place(1, 1)])
def test_a_note_that_must_sound_but_is_out_is_refused(ruling: dict[str, Any], fields: dict[str, Any], why: str) -> None:
    error = refusal([(0.0, "C4"), (70.0, "C4", 64, 2)], leave_out(0), ruling, **fields)

    assert told(error) == [("/rulings/1", f"note 1 must sound, but {why}")]


def test_a_track_of_another_pitch_is_refused_with_the_tracks_of_its_own() -> None:
    error = refusal([(0.0, "E4")], place(0, 1))

    message = "transposed by +0: note 0 would be E4, but track 1 has C4; E4 is on track 3, 4"
    assert told(error) == [("/rulings/0", message)]


@pytest.mark.parametrize(("pitch", "name"), [("C#4", "C#4"), ("A4", "A4")])
def test_a_note_that_must_sound_on_a_pitch_no_usable_tooth_has_is_refused(pitch: str, name: str) -> None:
    error = refusal([(0.0, pitch)], must(0))

    message = f"transposed by +0: note 0 would be {name}, which no usable tooth of the comb has"
    assert told(error) == [("/rulings/0", message)]


def test_a_note_moved_out_of_the_midi_keys_is_named_by_number() -> None:
    error = refusal([(0.0, "C9")], must(0), transpose={"mode": "fixed", "semitones": 12})

    # C9 is key 120.
    assert "note 0 would be key 132, which no usable tooth" in str(error)


def test_where_no_transposition_satisfies_all_rulings_the_nearest_is_told() -> None:
    # E4 on track 5 (G4) needs +3, C4 on track 1 needs 0.
    notes: list[Note] = [(0.0, "C4"), (0.0, "E4")]

    error = refusal(notes, place(0, 1), place(1, 5), transpose={"mode": "best", "range": 5})

    start = "no transposition within ±5 semitones satisfies all rulings; transposed by +0: "
    assert told(error) == [("/rulings/1", f"{start}note 1 would be E4, but track 5 has G4; E4 is on track 3, 4")]


@pytest.mark.parametrize("rulings", [(must(0), must(1)), (place(0, 1), place(1, 1)), (must(0), place(1, 1))])
def test_two_forced_notes_too_near_on_one_track_are_both_named(rulings: tuple[dict[str, Any], ...]) -> None:
    error = refusal(C4_TWICE, *rulings)

    [(pointer, message)] = told(error)
    assert pointer == "/rulings/1"
    assert "(/rulings/1) and note 0" in message
    assert "(/rulings/0) cannot both sound: on track 1 they are 0.500 s apart and need 1.000 s" in message
    assert message.endswith("(wheel-still-stepping); drop one of the two")


def test_the_later_of_two_clashing_rulings_is_pointed_at_whatever_their_notes() -> None:
    error = refusal(C4_TWICE, must(1), must(0))

    [(pointer, message)] = told(error)
    assert pointer == "/rulings/1"
    assert "note 0 (/rulings/1) and note 1 (/rulings/0) cannot both sound" in message


def test_forced_notes_too_near_over_the_end_of_the_turn_are_refused() -> None:
    error = refusal([(0.0, "C4"), (59.2, "C4")], must(0), must(1), movement=comb_with(NEARLY_NO_REST))

    assert "on track 1 they are 0.800 s apart and need 1.000 s" in str(error)


def test_three_notes_that_must_sound_on_two_tracks_are_refused() -> None:
    error = refusal([(0.0, "E4"), (0.2, "E4"), (0.4, "E4")], must(0), must(1), must(2))

    # No two of them clash: there are two tracks. All three are named.
    assert "note 2 (/rulings/2), note 1 (/rulings/1) and note 0 (/rulings/0) cannot all sound" in str(error)


def test_forced_notes_too_near_on_two_tracks_are_refused() -> None:
    movement = comb_with(CLOSE_TRACKS)
    settings = asking(rulings=[must(0), must(1)])

    with pytest.raises(RulingError, match=r"note 1 .* and note 0 .*: tracks 2 and 1 would leave too little web"):
        arrange(score_of([(0.0, "C4"), (0.0, "D4")]), movement, settings, spacing_for(movement, min_web_mm=1.0))


def test_a_forced_note_that_needs_more_than_a_turn_is_refused() -> None:
    with pytest.raises(RulingError, match=r"note 0 \(/rulings/0\) cannot sound: track 1 needs more than a turn"):
        ruled([(0.0, "C4")], must(0), movement=comb_with({"damper_recovery_s": 61}))


def test_equal_notes_placed_on_two_tracks_are_refused() -> None:
    error = refusal([(0.0, "E4", 64, 1), (0.0, "E4", 64, 2)], place(1, 3), place(0, 4))

    message = (
        "note 0 on track 4 (/rulings/1) and note 1 on track 3 (/rulings/0) have one pitch at one onset "
        "and so are one pluck; put both on one track, or leave one note out"
    )
    assert told(error) == [("/rulings/1", message)]
