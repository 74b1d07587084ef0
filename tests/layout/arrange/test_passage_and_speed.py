from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.arrange import Arrangement, arrange
from layout.arrange.moments import MOST_FACTORS, Moments, moments_of, speed_factors
from layout.errors import DocumentError
from layout.mechanics.arrays import frozen_floats
from layout.read import Score
from tests.layout.arrange.small_comb import (
    Note,
    arranged,
    asking,
    comb_with,
    left_out,
    played,
    score_of,
    spacing_for,
)

FREE_S = 58.0  # 60 s · (360 − 6 − 6)/360

# Tunes of the small comb stand in 4/4 at 120: bar n begins at 2·(n − 1) s, its beats 0.5 s apart.


def moments(score: Score, **fields: Any) -> Moments:
    return moments_of(score, asking(**fields), frozenset(), FREE_S)


def inside(found: Moments) -> list[int]:
    """The notes that are not outside the passage."""
    return [note for note in range(len(found.asked_s)) if found.out.get(note) != "outside-passage"]


def notes_every(step_s: float, count: int) -> list[Note]:
    return [(step_s * place, "C4") for place in range(count)]


def test_the_music_starts_at_the_first_onset() -> None:
    arrangement = arranged([(3.0, "C4"), (5.0, "C4")])

    assert arrangement.from_s == 3.0
    assert played(arrangement) == [(0.0, 1), (2.0, 1)]
    assert arrangement.length_s == 2.0


def test_the_first_onset_counts_also_on_a_channel_that_is_left_out() -> None:
    arrangement = arranged([(3.0, "D4", 64, 2), (5.0, "C4")], channels={"leave_out": [2]})

    assert arrangement.from_s == 3.0
    assert played(arrangement) == [(2.0, 1)]
    assert left_out(arrangement) == {0: "ruled-out"}


def test_a_passage_holds_its_first_moment_and_not_its_last() -> None:
    notes = [(1.0, "C4"), (2.0, "C4"), (3.0, "C4"), (4.0, "C4")]

    arrangement = arranged(notes, passage={"from_s": 2.0, "to_s": 4.0})

    assert arrangement.from_s == 2.0
    assert played(arrangement) == [(0.0, 1), (1.0, 1)]
    assert left_out(arrangement) == {0: "outside-passage", 3: "outside-passage"}
    assert arrangement.length_s == 1.0


def test_a_passage_may_start_before_the_tune_and_end_after_it() -> None:
    arrangement = arranged([(1.0, "C4")], passage={"from_s": 0.25, "to_s": 900.0})

    assert played(arrangement) == [(0.75, 1)]


def test_outside_the_passage_goes_before_ruled_out_and_that_before_past_the_turn() -> None:
    notes = [(0.0, "C4", 64, 2), (1.0, "C4"), (80.0, "C4", 64, 2), (81.0, "C4")]

    arrangement = arranged(notes, passage={"from_s": 1.0}, channels={"leave_out": [2]})

    assert left_out(arrangement) == {0: "outside-passage", 2: "ruled-out", 3: "past-the-turn"}


def test_a_note_at_the_end_of_the_free_part_is_played_and_one_after_it_is_not() -> None:
    arrangement = arranged([(0.0, "C4"), (FREE_S, "D4"), (FREE_S + 1e-6, "E4")])

    assert played(arrangement) == [(0.0, 1), (FREE_S, 2)]
    assert left_out(arrangement) == {2: "past-the-turn"}
    assert arrangement.length_s == FREE_S + 1e-6


def test_a_factor_above_one_is_faster() -> None:
    arrangement = arranged([(1.0, "C4"), (5.0, "C4")], speed={"mode": "factor", "factor": 2})

    # (5 − 1)/2 = 2 s
    assert played(arrangement) == [(0.0, 1), (2.0, 1)]
    assert arrangement.speed_factor == 2.0


@pytest.mark.parametrize("last_s", [47.0, 58.0, 61.0, 72.3])
def test_fit_puts_the_last_onset_at_the_end_of_the_free_part(last_s: float) -> None:
    arrangement = arranged([(0.0, "C4"), (last_s, "D4")], speed={"mode": "fit"})

    assert arrangement.speed_factor == pytest.approx(last_s / FREE_S, rel=1e-12)
    assert played(arrangement) == [(0.0, 1), (FREE_S, 2)]


@pytest.mark.parametrize(("last_s", "factor"), [(10.0, 0.9), (100.0, 1.1)])
def test_fit_stays_within_the_bounds_stated(last_s: float, factor: float) -> None:
    arrangement = arranged([(0.0, "C4"), (last_s, "D4")], speed={"mode": "fit", "least": 0.9, "most": 1.1})

    assert arrangement.speed_factor == factor
    assert arrangement.length_s == pytest.approx(last_s / factor)


def test_fit_does_not_count_what_is_ruled_out_or_outside_the_passage() -> None:
    notes = [(0.0, "C4"), (50.0, "D4"), (55.0, "C4", 64, 2), (70.0, "C4"), (56.0, "G4")]

    arrangement = arranged(
        notes,
        speed={"mode": "fit"},
        passage={"to_s": 60.0},
        channels={"leave_out": [2]},
        rulings=[{"note": 3, "do": "leave-out"}],
    )

    assert arrangement.speed_factor == 50.0 / FREE_S
    assert left_out(arrangement) == {2: "ruled-out", 3: "ruled-out", 4: "outside-passage"}


@pytest.mark.parametrize(("bounds", "factor"), [((0.8, 1.25), 1.0), ((1.1, 1.25), 1.1), ((0.5, 0.9), 0.9)])
def test_fit_plays_one_single_onset_as_near_to_written_as_the_bounds_let(
    bounds: tuple[float, float], factor: float
) -> None:
    arrangement = arranged([(4.0, "C4")], speed={"mode": "fit", "least": bounds[0], "most": bounds[1]})

    assert arrangement.speed_factor == factor
    assert played(arrangement) == [(0.0, 1)]


def assert_silent(arrangement: Arrangement) -> None:
    assert arrangement.track_index.shape == arrangement.key.shape == (0,)
    assert arrangement.asked_s.shape == arrangement.planned_s.shape == (0,)
    assert arrangement.notes == ()
    assert arrangement.length_s == 0.0
    assert (arrangement.worth.kept, arrangement.worth.bound, arrangement.worth.proved) == (0, 0, True)


@pytest.mark.parametrize("mode", ["as-written", "fit"])
def test_a_tune_without_notes_gives_an_arrangement_without_plucks(mode: str) -> None:
    arrangement = arranged([], speed={"mode": mode}, transpose={"mode": "best"})

    assert_silent(arrangement)
    assert arrangement.left_out == ()
    assert (arrangement.transposed_semitones, arrangement.speed_factor, arrangement.from_s) == (0, 1.0, 0.0)


def test_a_passage_without_notes_leaves_all_notes_outside() -> None:
    arrangement = arranged([(1.0, "C4"), (2.0, "C4")], passage={"from_s": 5.0})

    assert_silent(arrangement)
    assert left_out(arrangement) == {0: "outside-passage", 1: "outside-passage"}
    assert arrangement.from_s == 5.0


def test_the_stage_gives_arrays_that_cannot_be_written_to() -> None:
    movement = comb_with()

    arrangement = arrange(score_of([(0.0, "C4")]), movement, asking(), spacing_for(movement))

    with pytest.raises(ValueError, match="read-only"):
        arrangement.planned_s[0] = 1.0


def test_a_passage_in_bars_holds_its_first_bar_line_and_not_its_last() -> None:
    # A note on every beat of six bars; bars 3 and 4 are notes 8 to 15, 4 s to 8 s.
    found = moments(score_of(notes_every(0.5, 24)), passage={"from_bar": 3, "to_bar": 5})

    assert found.from_s == 4.0
    assert inside(found) == list(range(8, 16))
    assert found.asked_s[8] == 0.0
    assert found.length_s == 3.5


def test_a_passage_in_beats_counts_from_one() -> None:
    found = moments(score_of(notes_every(0.5, 24)), passage={"from_bar": 2, "from_beat": 3, "to_bar": 4, "to_beat": 2})

    # Bar 2, beat 3 is 2 + 2 · 0.5 = 3 s, note 6; bar 4, beat 2 is 6.5 s, note 13, which is left out.
    assert (found.from_s, inside(found)) == (3.0, list(range(6, 13)))


def test_one_past_the_last_beat_is_the_end_of_the_bar() -> None:
    found = moments(score_of(notes_every(0.5, 24)), passage={"from_bar": 2, "to_bar": 2, "to_beat": 5})

    assert inside(found) == [4, 5, 6, 7]


def test_a_fraction_of_a_beat_is_taken_from_the_time_to_the_next() -> None:
    # Beats of 1 s and then 0.5 s: the tempo changes at 1 s.
    beat_s = [0.0, 1.0, 1.5, 2.0, 2.5]
    score = replace(score_of([(0.1, "C4")]), beat_s=frozen_floats(beat_s), bar_s=frozen_floats(beat_s[::4]))

    found = [moments(score, passage={"from_bar": 1, "from_beat": beat}).from_s for beat in (1.25, 2.5, 4.75)]

    assert found == [0.25, 1.25, 2.375]


@pytest.mark.parametrize("beat", [1.667, 1.6667, 1.66666666])
def test_a_note_on_a_third_of_a_beat_is_met_as_people_write_it(beat: float) -> None:
    # Triplets of 0.5/3 s from bar 1 on: note 2 is two thirds into beat 1.
    score = score_of([(place * 0.5 / 3, "C4") for place in range(9)])

    begins = moments(score, passage={"from_bar": 1, "from_beat": beat})
    ends = moments(score, passage={"to_bar": 1, "to_beat": beat})

    assert (inside(begins), begins.asked_s[2]) == ([2, 3, 4, 5, 6, 7, 8], 0.0)
    assert inside(ends) == [0, 1]


def test_a_note_beside_a_stated_fraction_is_not_taken_for_it() -> None:
    # Half a beat is 0.25 s; a note 0.0006 beats, 0.3 ms, before it is outside.
    found = moments(score_of([(0.2497, "C4"), (0.3, "C4")]), passage={"from_bar": 1, "from_beat": 1.5})

    assert (found.from_s, inside(found)) == (0.25, [1])


def test_each_end_has_its_own_measure() -> None:
    score = score_of(notes_every(0.5, 24))

    assert inside(moments(score, passage={"from_s": 3.9, "to_bar": 4})) == list(range(8, 12))
    assert inside(moments(score, passage={"from_bar": 3, "to_s": 4.6})) == [8, 9]


def test_the_bars_are_those_of_the_tune() -> None:
    # 3/4 at 60: a bar every 3 s.
    score = replace(
        score_of(notes_every(1.0, 12)),
        beat_s=frozen_floats(range(16)),
        bar_s=frozen_floats(range(0, 16, 3)),
    )

    assert inside(moments(score, passage={"from_bar": 2, "to_bar": 3, "to_beat": 2})) == [3, 4, 5, 6]


def test_past_the_end_bars_go_on_as_long_as_the_last() -> None:
    # The last onset, 3.5 s, is in bar 2; bar 3 begins at 4 s and bar 31 at 4 + 28 · 2 = 60 s.
    score = score_of(notes_every(0.5, 8))

    found = moments(score, passage={"from_bar": 31, "from_beat": 1.5, "to_bar": 40})

    assert found.from_s == 60.25
    assert inside(found) == []
    assert moments(score, passage={"to_bar": 90}).out == {}


def test_a_tune_without_notes_has_bars_all_the_same() -> None:
    # 4/4 at 120: bar 3, beat 2.5 is 4 + 1.5 · 0.5 s.
    assert moments(score_of([]), passage={"from_bar": 3, "from_beat": 2.5}).from_s == 4.75


@pytest.mark.parametrize(
    ("passage", "message"),
    [
        (
            {"from_bar": 3, "to_s": 4},
            r"settings: /passage: the passage begins at bar 3, beat 1 \(4 s\) and ends at 4 s; move its end past",
        ),
        (
            {"from_s": 9, "to_bar": 2, "to_beat": 1.5},
            r"the passage begins at 9 s and ends at bar 2, beat 1.5 \(2.25 s\)",
        ),
        ({"from_bar": 2, "from_beat": 5, "to_bar": 3}, r"begins at bar 2, beat 5 \(4 s\) and ends at bar 3, beat 1"),
        ({"from_bar": 2, "from_beat": 6}, r"/passage/from_beat: bar 2 has 4 beats, so its .* 1 to 5 .*, got 6"),
        ({"to_bar": 99, "to_beat": 5.5}, r"/passage/to_beat: bar 99 has 4 beats, so its beat may be 1 to 5 .*got 5.5"),
    ],
)
def test_a_passage_the_tune_does_not_have_is_refused(passage: dict[str, Any], message: str) -> None:
    score = score_of(notes_every(0.5, 24))

    with pytest.raises(DocumentError, match=message):
        moments(score, passage=passage)


def test_a_bar_of_one_beat_is_told_so() -> None:
    score = replace(score_of([(0.0, "C4")]), beat_s=frozen_floats([0, 1]), bar_s=frozen_floats([0, 1]))

    with pytest.raises(DocumentError, match=r"bar 1 has 1 beat, so its beat may be 1 to 2 \(its end\), got 3"):
        moments(score, passage={"from_bar": 1, "from_beat": 3})


def test_only_the_channels_kept_are_played() -> None:
    notes = [(0.0, "C4", 64, 1), (1.0, "D4", 64, 2), (2.0, "E4", 64, 3), (3.0, "G4", 64, 4)]

    found = moments(score_of(notes), channels={"keep_only": [2, 3]})

    assert found.out == {0: "ruled-out", 3: "ruled-out"}
    # The music still starts at the first onset of all; the length is to the last note kept.
    assert (found.from_s, found.length_s) == (0.0, 2.0)


def test_channels_left_out_and_kept_add_up() -> None:
    notes = [(0.0, "C4", 64, 1), (1.0, "D4", 64, 2), (2.0, "E4", 64, 3)]

    found = moments(score_of(notes), channels={"keep_only": [2], "leave_out": [3]})

    assert found.out == {0: "ruled-out", 2: "ruled-out"}


def test_a_factor_given_goes_before_the_settings() -> None:
    score = score_of([(0.0, "C4"), (10.0, "C4")])

    found = moments_of(score, asking(speed={"mode": "factor", "factor": 2}), frozenset(), FREE_S, 4.0)

    assert (found.speed_factor, found.length_s, found.asked_s[1]) == (4.0, 2.5, 2.5)


@pytest.mark.parametrize(("bounds", "factor"), [((0.8, 1.25), 1.0), ((1.1, 1.25), 1.1), ((0.5, 0.9), 0.9)])
def test_best_without_a_factor_is_as_near_to_written_as_its_bounds_let(
    bounds: tuple[float, float], factor: float
) -> None:
    speed = {"mode": "best", "least": bounds[0], "most": bounds[1]}

    assert moments(score_of([(0.0, "C4"), (60.0, "C4")]), speed=speed).speed_factor == factor


def factors(last_s: float, **speed: Any) -> tuple[float, ...]:
    return speed_factors(score_of([(0.0, "C4"), (last_s, "C4")]), asking(speed=speed), frozenset(), FREE_S)


def test_every_mode_but_best_searches_one_speed() -> None:
    assert factors(10.0, mode="as-written") == (1.0,)
    assert factors(10.0, mode="factor", factor=0.3) == (0.3,)
    assert factors(61.0, mode="fit") == (61.0 / FREE_S,)


def test_best_searches_the_hundredths_between_its_bounds() -> None:
    # The tune of 100 s fits at 100/58, outside.
    assert factors(100.0, mode="best", least=0.97, most=1.03) == (0.97, 0.98, 0.99, 1.0, 1.01, 1.02, 1.03)


def test_best_searches_its_bounds_and_the_fitting_speed_too() -> None:
    # 58.29 s fit at 1.005; no hundredth but 1 lies between the bounds.
    found = factors(58.29, mode="best", least=0.995, most=1.0075)

    assert found == (0.995, 1.0, pytest.approx(1.005), 1.0075)
    assert found[2] == 58.29 / FREE_S


def test_best_between_equal_bounds_searches_one_speed() -> None:
    assert factors(58.0, mode="best", least=1.17, most=1.17) == (1.17,)


def test_the_fitting_speed_counts_only_what_is_asked_for() -> None:
    score = score_of([(0.0, "C4"), (60.95, "D4", 64, 2), (70.0, "C4"), (80.0, "C4", 64, 3)])
    settings = asking(speed={"mode": "best"}, channels={"leave_out": [3]})

    found = speed_factors(score, settings, frozenset({2}), FREE_S)

    # No hundredth: 1.05086. The others would fit at 70/58 = 1.20690.
    assert 60.95 / FREE_S in found
    assert 70.0 / FREE_S not in found


def test_wide_bounds_are_searched_on_a_coarser_grid() -> None:
    found = factors(61.0, mode="best", least=0.01, most=100)

    # 10,000 hundredths in at most 196 places: every 52nd, from 0.01 on; beside them 1, 100 and 61/58.
    assert found[:3] == (0.01, 0.53, 1.0)
    assert {0.01, 1.0, 61.0 / FREE_S, 1.05, 1.57, 100.0} <= set(found)
    assert len(found) <= MOST_FACTORS


@given(st.floats(0.01, 100), st.floats(0.01, 100), st.floats(0, 1000))
def test_the_speeds_searched_rise_within_the_bounds(one: float, other: float, last_s: float) -> None:
    least, most = sorted((one, other))

    found = factors(last_s, mode="best", least=least, most=most)

    assert (found[0], found[-1]) == (least, most)
    assert sorted(set(found)) == list(found)
    assert len(found) <= MOST_FACTORS
    assert (1.0 in found) == (least <= 1 <= most)


def test_no_notes_have_speeds_to_search() -> None:
    assert speed_factors(score_of([]), asking(speed={"mode": "best"}), frozenset(), FREE_S)[0] == 0.8


@given(st.integers(1, 12), st.integers(1, 5), st.integers(1, 12), st.integers(1, 5), st.lists(st.integers(0, 100)))
def test_a_passage_in_bars_is_the_same_passage_in_seconds(
    from_bar: int, from_beat: int, to_bar: int, to_beat: int, quarters: list[int]
) -> None:
    # 4/4 at 120: a beat every half second. Notes on quarters of a second.
    score = score_of([(quarter / 4, "C4") for quarter in quarters])
    from_s, to_s = (2.0 * (bar - 1) + 0.5 * (beat - 1) for bar, beat in ((from_bar, from_beat), (to_bar, to_beat)))
    in_bars = {"from_bar": from_bar, "from_beat": from_beat, "to_bar": to_bar, "to_beat": to_beat}

    if to_s <= from_s:
        with pytest.raises(DocumentError, match="passage"):
            moments(score, passage=in_bars)
        return
    bars, seconds = moments(score, passage=in_bars), moments(score, passage={"from_s": from_s, "to_s": to_s})

    assert (bars.from_s, bars.out, bars.length_s) == (seconds.from_s, seconds.out, seconds.length_s)
    assert bars.asked_s.tolist() == seconds.asked_s.tolist()
