"""What holds for every tune: random small tunes on small combs, checked from the arrangement alone."""

from dataclasses import replace
from itertools import product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange import Arrangement, arrange
from layout.arrange.weights import weigh
from layout.documents import Movement, Settings, shipped_cutter, shipped_movement, shipped_movement_ids
from layout.documents.pitch import key_of, pitch_of
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import turning_of
from layout.read import Score, read_score
from service.demo.compose import demo_tune
from tests.layout.arrange.small_comb import (
    CLOSE_TRACKS,
    NEARLY_NO_REST,
    asking,
    broken_rules,
    comb_with,
    left_out,
    plucks_of,
    score_of,
    spacing_for,
)

ROUNDING = 1e-9  # s; the stage lets edges be 1e-9 rad nearer than stated

COMBS: dict[str, dict[str, Any]] = {
    "plain": {},
    "anticlockwise, nearly no rest": {"turns": "anticlockwise", **NEARLY_NO_REST},
    "close tracks": {**CLOSE_TRACKS, **NEARLY_NO_REST},
    "close tracks, anticlockwise": {**CLOSE_TRACKS, "turns": "anticlockwise"},
    "slow dampers": {"damper_recovery_s": 1.3, "fastest_revolution_s": 50, **NEARLY_NO_REST},
}
MOVEMENTS = {name: comb_with(changes) for name, changes in COMBS.items()}
SPACINGS = {name: spacing_for(movement, min_web_mm=1.0) for name, movement in MOVEMENTS.items()}
A_COMB = st.sampled_from(sorted(COMBS))

# Crowded at both ends of the turn and once in the middle, so that repeats and wrap-around collide.
ONSETS_S = st.one_of(
    st.integers(0, 40).map(lambda step: step * 0.05),
    st.integers(0, 40).map(lambda step: 57.9 + step * 0.05),
    st.integers(0, 1200).map(lambda step: step * 0.05),
)


def notes_of(pitches: tuple[int, int], most: int) -> st.SearchStrategy[list[Any]]:
    pitch = st.integers(*pitches).map(pitch_of)
    return st.lists(st.tuples(ONSETS_S, pitch, st.integers(1, 127), st.integers(1, 3)), max_size=most)


@st.composite
def asked_settings(draw: st.DrawFn) -> Settings:
    fields: dict[str, Any] = {
        "speed": draw(st.sampled_from([{"mode": "as-written"}, {"mode": "fit"}, {"mode": "factor", "factor": 1.01}])),
        "transpose": draw(
            st.sampled_from([{"mode": "best", "range": 3}, {"mode": "fixed", "semitones": 0}, {"mode": "best"}])
        ),
        "channels": draw(st.sampled_from([{}, {"leave_out": [2]}, {"lead": 3}])),
        "passage": draw(st.sampled_from([{}, {"from_s": 0.4}, {"from_s": 0.2, "to_s": 58.5}, {"to_s": 1.0}])),
    }
    return asking(**fields)


def assert_sound(
    arrangement: Arrangement, score: Score, movement: Movement, spacing: Spacing, nudge_s: float = 0.0
) -> None:
    """Everything that can be told from the arrangement without knowing how it was found."""
    notes = [note for pluck in arrangement.notes for note in pluck] + [one.note for one in arrangement.left_out]
    assert sorted(notes) == list(range(score.note_count))
    assert [one.note for one in arrangement.left_out] == sorted(left_out(arrangement))
    keys = {(tooth.track - 1, key_of(tooth.pitch)) for tooth in movement.teeth if tooth.usable}
    assert set(zip(arrangement.track_index.tolist(), arrangement.key.tolist(), strict=True)) <= keys
    free_s = turning_of(movement).free_turn_s
    for notes_played, key, asked_s in zip(arrangement.notes, arrangement.key, arrangement.asked_s, strict=True):
        assert list(notes_played) == sorted(notes_played) != []
        for note in notes_played:
            assert score.pitch[note] + arrangement.transposed_semitones == key
            assert (score.onset_s[note] - arrangement.from_s) / arrangement.speed_factor == asked_s
        assert 0 <= asked_s <= free_s + ROUNDING
    assert np.abs(arrangement.planned_s - arrangement.asked_s).max(initial=0.0) <= nudge_s + ROUNDING
    assert plucks_of(arrangement) == sorted(plucks_of(arrangement))
    assert broken_rules(plucks_of(arrangement), movement, loosened(spacing)) == []


def loosened(spacing: Spacing, by_rad: float = 1.001e-9) -> Spacing:
    """The same rules less the rounding that the stage allows."""
    return replace(
        spacing,
        wheel_rad=spacing.wheel_rad - by_rad,
        damper_rad=spacing.damper_rad - by_rad,
        web_rad=spacing.web_rad - by_rad,
        between=tuple(
            replace(pair, from_rad=pair.from_rad + by_rad, to_rad=pair.to_rad - by_rad) for pair in spacing.between
        ),
    )


def test_some_of_the_combs_have_tracks_too_near_to_each_other() -> None:
    assert {name for name, spacing in SPACINGS.items() if spacing.between} == {
        "close tracks",
        "close tracks, anticlockwise",
    }


@given(A_COMB, notes_of((57, 72), 40), asked_settings())
def test_every_note_is_accounted_for_and_no_rule_is_broken(comb: str, notes: list[Any], asked: Settings) -> None:
    score, movement, spacing = score_of(notes), MOVEMENTS[comb], SPACINGS[comb]

    arrangement = arrange(score, movement, asked, spacing)

    assert_sound(arrangement, score, movement, spacing)


@given(A_COMB, notes_of((59, 68), 40), asked_settings())
def test_nothing_that_would_still_fit_is_left_out(comb: str, notes: list[Any], asked: Settings) -> None:
    score, movement, spacing = score_of(notes), MOVEMENTS[comb], SPACINGS[comb]

    arrangement = arrange(score, movement, asked, spacing)

    on_disc = plucks_of(arrangement)
    for one in arrangement.left_out:
        if one.reason in {"wheel-still-stepping", "damper-not-recovered", "web"}:
            sounds_s = (score.onset_s[one.note] - arrangement.from_s) / arrangement.speed_factor
            for track in tracks_of(movement, score.pitch[one.note] + arrangement.transposed_semitones):
                with_it = [*on_disc, (float(sounds_s), track)]
                assert broken_rules(with_it, movement, spacing) != []


@given(A_COMB, notes_of((57, 72), 30), asked_settings())
def test_the_same_tune_gives_the_same_arrangement_again(comb: str, notes: list[Any], asked: Settings) -> None:
    first = arrange(score_of(notes), MOVEMENTS[comb], asked, SPACINGS[comb])
    second = arrange(score_of(notes), MOVEMENTS[comb], asked, SPACINGS[comb])

    assert plucks_of(first) == plucks_of(second)
    assert first.notes == second.notes
    assert first.left_out == second.left_out
    assert first.worth == second.worth


@given(A_COMB, notes_of((57, 72), 40), asked_settings())
def test_the_worth_kept_is_that_of_the_notes_played(comb: str, notes: list[Any], asked: Settings) -> None:
    score = score_of(notes)

    arrangement = arrange(score, MOVEMENTS[comb], asked, SPACINGS[comb])

    gone = {"outside-passage", "ruled-out", "past-the-turn"}
    wanted = [note for note in range(score.note_count) if left_out(arrangement).get(note) not in gone]
    weighed = weigh(score, np.array(wanted, dtype=int), asked.channels.lead)
    worth = dict(zip(wanted, weighed.weight.tolist(), strict=True))
    assert arrangement.worth.kept == sum(worth[note] for pluck in arrangement.notes for note in pluck)
    assert arrangement.worth.kept <= arrangement.worth.bound <= sum(worth.values())
    assert arrangement.worth.proved == (arrangement.worth.kept == arrangement.worth.bound)


def tracks_of(movement: Movement, key: int) -> list[int]:
    return sorted({tooth.track - 1 for tooth in movement.teeth if tooth.usable and key_of(tooth.pitch) == key})


def optimum(score: Score, movement: Movement, spacing: Spacing, semitones: int) -> int:
    """The most weight any way of putting the notes on tracks keeps, by trying them all."""
    worth = weigh(score, np.arange(score.note_count), None).weight.tolist()
    merged: dict[tuple[float, int], int] = {}
    for onset_s, pitch, one in zip(score.onset_s.tolist(), score.pitch.tolist(), worth, strict=True):
        merged[onset_s - score.onset_s[0], pitch] = merged.get((onset_s - score.onset_s[0], pitch), 0) + one
    free_s = turning_of(movement).free_turn_s
    places = [
        [None, *(tracks_of(movement, pitch + semitones) if sounds_s <= free_s + ROUNDING else [])]
        for sounds_s, pitch in merged
    ]
    best = 0
    for tracks in product(*places):
        kept = sum(one for one, track in zip(merged.values(), tracks, strict=True) if track is not None)
        plucks = [(pluck[0], track) for pluck, track in zip(merged, tracks, strict=True) if track is not None]
        if kept > best and not broken_rules(plucks, movement, loosened(spacing, 1e-9)):
            best = kept
    return best


@settings(deadline=None)  # the trial of all ways is slow, and nobody waits for it
@given(A_COMB, notes_of((60, 65), 6), st.sampled_from([-2, 0]))
def test_the_worth_kept_is_never_above_the_optimum_nor_the_bound_below_it(
    comb: str, notes: list[Any], semitones: int
) -> None:
    score, movement, spacing = score_of(notes), MOVEMENTS[comb], SPACINGS[comb]

    arrangement = arrange(score, movement, asking(transpose={"mode": "fixed", "semitones": semitones}), spacing)

    best = optimum(score, movement, spacing, semitones) if notes else 0
    assert arrangement.worth.kept <= best <= arrangement.worth.bound


@settings(deadline=None)
@given(notes_of((59, 63), 7))
def test_where_every_pitch_has_one_track_and_the_turns_lie_apart_the_worth_is_the_optimum(notes: list[Any]) -> None:
    # C4 and D4 have one track each; E4, with two, cannot be reached by these pitches.
    score, movement, spacing = score_of(notes), MOVEMENTS["plain"], SPACINGS["plain"]

    arrangement = arrange(score, movement, asking(), spacing)

    assert arrangement.worth.kept == (optimum(score, movement, spacing, 0) if notes else 0)
    assert arrangement.worth.proved


@given(A_COMB, notes_of((57, 72), 25))
def test_the_search_finds_what_trying_every_transposition_finds(comb: str, notes: list[Any]) -> None:
    score, movement, spacing = score_of(notes), MOVEMENTS[comb], SPACINGS[comb]
    fixed = {
        semitones: arrange(score, movement, asking(transpose={"mode": "fixed", "semitones": semitones}), spacing)
        for semitones in range(-5, 6)
    }

    best = arrange(score, movement, asking(transpose={"mode": "best", "range": 5}), spacing)

    expected = max(fixed, key=lambda one: (fixed[one].worth.kept, -abs(one), -one))
    assert best.transposed_semitones == expected
    assert plucks_of(best) == plucks_of(fixed[expected])
    # Higher than needed at no transposition, and true for all of them.
    assert max(one.worth.kept for one in fixed.values()) <= best.worth.bound
    assert best.worth.bound <= max(one.worth.bound for one in fixed.values())


@given(A_COMB, notes_of((60, 67), 25), st.data())
def test_what_sounds_by_itself_may_be_demanded_and_then_sounds(
    comb: str, notes: list[Any], data: st.DataObject
) -> None:
    score, movement, spacing = score_of(notes), MOVEMENTS[comb], SPACINGS[comb]
    free = arrange(score, movement, asking(), spacing)
    demanded: list[dict[str, Any]] = [
        {"note": pluck[0], "do": "must-sound"}
        if data.draw(st.booleans())
        else {"note": pluck[0], "do": "place", "track": int(track) + 1}
        for pluck, track in zip(free.notes, free.track_index, strict=True)
    ]

    ruled = arrange(score, movement, asking(rulings=demanded), spacing)

    assert_sound(ruled, score, movement, spacing)
    assert set(free.notes) <= set(ruled.notes)
    placed = {one["note"]: one["track"] - 1 for one in demanded if "track" in one}
    for notes_played, track in zip(ruled.notes, ruled.track_index.tolist(), strict=True):
        assert placed.get(notes_played[0], track) == track


@pytest.mark.parametrize("cutter_id", ["fibre-laser", "turn-press"])
@pytest.mark.parametrize("movement_id", shipped_movement_ids())
def test_the_demo_tune_on_a_shipped_movement_breaks_no_rule(movement_id: str, cutter_id: str) -> None:
    score, movement = read_score(demo_tune()), shipped_movement(movement_id)
    spacing = spacing_for(movement, cutter=shipped_cutter(cutter_id))

    arrangement = arrange(score, movement, Settings(), spacing)

    assert_sound(arrangement, score, movement, spacing, nudge_s=0.020)
    # What its makers composed it for: most of the tune is on the comb, and some repeats are too fast.
    in_time = [one for one in arrangement.left_out if one.reason != "past-the-turn"]
    assert 0 < len(in_time) < score.note_count / 5
    assert arrangement.worth.bound * 0.98 < arrangement.worth.kept
