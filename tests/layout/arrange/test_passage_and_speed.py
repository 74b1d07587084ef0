import pytest

from layout.arrange import Arrangement, arrange
from tests.layout.arrange.small_comb import arranged, asking, comb_with, left_out, played, score_of, spacing_for

FREE_S = 58.0  # 60 s · (360 − 6 − 6)/360


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
