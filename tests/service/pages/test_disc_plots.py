"""Plots of a report: what stands in them is what the report says, and their axes hold it."""

import re
from itertools import pairwise
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.pages.disc_plots import plots_of
from service.pages.plot_shapes import BOTTOM, HEIGHT, LEAST_SHOWN, MOST_NAMED, MOST_TICKS, NoPlot, Plot, scale
from tests.service.pages.discs_shown import shown

FOOT = HEIGHT - BOTTOM


def _plots(movement: str, **changes: Any) -> dict[str, Plot | NoPlot]:
    disc = shown(movement)
    report = {**disc.report, **changes}
    made = plots_of(report, before_music_deg=disc.movement.before_music_deg, revolution_s=disc.movement.revolution_s)
    return {plot.name: plot for plot in made}


@given(st.floats(min_value=0, max_value=1e7))
def test_an_axis_holds_what_is_shown_on_it_with_few_round_numbers(most: float) -> None:
    top, ticks = scale(most)

    assert top >= most
    assert top < 1.5 * most or most < LEAST_SHOWN
    assert 2 <= len(ticks) <= MOST_TICKS + 1
    assert ticks[0].words == "0"
    assert [tick.at for tick in ticks] == sorted((tick.at for tick in ticks), reverse=True)


def test_the_torque_rises_to_its_peak_and_no_higher_and_the_drives_limit_stands_above_it_with_its_name() -> None:
    torque = shown("mossbrook-67").report["drive"]["torque"]

    plot = _plots("mossbrook-67")["torque"]

    assert isinstance(plot, Plot)
    heights = [float(y) for _, y in re.findall(r"([\d.]+) ([\d.]+)", plot.line)]
    assert len(heights) == len(torque["over_the_turn"]["at_s"])
    assert plot.limit is not None
    assert plot.limit.words == "the drive has 500 N mm"
    # Both on one scale: the share of the peak in the limit is that of their heights, to a tenth of a unit.
    drawn = (FOOT - min(heights)) / (FOOT - plot.limit.at)
    assert drawn == pytest.approx(torque["peak_nmm"] / torque["limit_nmm"], abs=0.002)
    assert plot.words == (
        "The teeth load the disc with 207 N mm at most, 58.75 s into the music at 251°; 4 N mm on average. "
        "That is 41 % of what the drive has, 500 N mm."  # 16° + 360°·58.753774 s/90 s = 251.02°; 206.8/500 = 0.414
    )


def test_the_table_of_torques_has_the_greatest_of_every_sector_of_the_turn() -> None:
    # Up from 90 N mm at 10° to 150 at 40°, so 130 at 30°; then 0. A turn of 360 s: a degree a second.
    curve = {"at_s": [10.0, 40.0, 40.0, 360.0], "torque_nmm": [90.0, 150.0, 0.0, 0.0]}
    torque = {"peak_nmm": 150.0, "limit_nmm": None, "at_s": 40.0, "mean_nmm": 10.0, "over_the_turn": curve}
    report = {**shown("fernhollow-31").report, "drive": {"torque": torque, "not_stated": []}}

    plot = plots_of(report, before_music_deg=0.0, revolution_s=360.0)[0]

    assert isinstance(plot, Plot)
    assert plot.rows[:3] == (("0–30", "130"), ("30–60", "150"), ("60–90", "0"))
    assert len(plot.rows) == 12
    assert plot.limit is None
    assert "states no limit of its drive" in plot.words


def test_a_torque_that_is_not_known_names_what_the_movement_does_not_state() -> None:
    plot = _plots("fernhollow-31")["torque"]

    assert plot == NoPlot(
        name="torque",
        words="Not known. The movement does not state: drive, teeth.stiffness_n_per_mm, teeth.lift_mm.",
    )


def test_each_track_that_is_used_has_its_timing_error_as_bars_and_as_a_figure_beside_what_is_heard() -> None:
    tracks = shown("fernhollow-31").report["tracks"]

    plot = _plots("fernhollow-31")["timing"]

    assert isinstance(plot, Plot)
    together, roots = plot.bars[: len(tracks)], plot.bars[len(tracks) :]
    assert {bar.drawn for bar in together} == {"most"}
    assert {bar.drawn for bar in roots} == {"full"}
    assert len(together) == len(roots) == len(plot.rows) == len(tracks)
    assert plot.rows[0] == ("1", "36", "15.0", "18.3", "6.0")  # root sum of squares, together, largest nudge, in ms
    assert all(strong.height <= most.height for strong, most in zip(roots, together, strict=True))
    assert "18.3 ms early or late, 15.0 ms by root sum of squares: on track 1, 36 mm" in plot.words
    assert plot.limit is not None
    # 20 ms and 18.3 ms on one scale, each to a tenth of a unit.
    assert together[0].height / (FOOT - plot.limit.at) == pytest.approx(tracks[0]["together_ms"] / 20, abs=0.002)
    assert plot.limit.words.startswith("20 ms")


def test_every_transposition_searched_stands_in_the_order_of_its_pitch_and_the_chosen_one_is_pointed_at() -> None:
    plot = _plots("mossbrook-67")["worth"]

    assert isinstance(plot, Plot)
    assert [row[0] for row in plot.rows] == [_name(semitones) for semitones in range(-12, 13)]
    assert "0" in [tick.words for tick in plot.x_ticks]
    assert "All 25 transpositions" in plot.words
    assert "Chosen: −5 semitones" in plot.words
    place = [row[0] for row in plot.rows].index("−5")
    assert plot.rows[place] == ("−5", "100.0", "100.0", "proof")
    assert plot.mark is not None
    assert plot.mark.at == pytest.approx(plot.bars[place].x + plot.bars[place].width / 2, abs=0.02)


def test_what_is_proved_found_and_only_bounded_are_drawn_apart_and_explained() -> None:
    transpositions = [
        {"semitones": -1, "kept": None, "bound": 60},
        {"semitones": 0, "kept": 80, "bound": 80},
        {"semitones": 2, "kept": 40, "bound": 70},
    ]

    plot = _plots("fernhollow-31", transpositions=transpositions)["worth"]

    assert isinstance(plot, Plot)
    whole = plot.bars[1].height  # 80, the most of all, is the whole height
    assert [(bar.drawn, bar.height / whole) for bar in plot.bars] == [
        ("most", pytest.approx(0.75, abs=0.001)),
        ("full", 1.0),
        ("most", pytest.approx(0.875, abs=0.001)),
        ("part", pytest.approx(0.5, abs=0.001)),
    ]
    assert plot.rows == (
        ("−1", "–", "75.0", "bound alone"),
        ("0", "100.0", "100.0", "proof"),
        ("+2", "50.0", "87.5", "search"),
    )
    assert [how for how, _ in plot.key] == ["full", "part", "most"]


def test_as_many_transpositions_as_may_be_asked_for_are_drawn_apart_and_named_as_far_as_there_is_room() -> None:
    transpositions = [{"semitones": semitones, "kept": None, "bound": 9} for semitones in range(-48, 49)]

    plot = _plots("fernhollow-31", transpositions=transpositions)["worth"]

    assert isinstance(plot, Plot)
    assert all(one.x + one.width < other.x for one, other in pairwise(plot.bars))
    assert len(plot.x_ticks) <= MOST_NAMED
    assert "0" in [tick.words for tick in plot.x_ticks]


def test_a_report_from_before_every_transposition_was_told_shows_the_best_of_them() -> None:
    report = {name: value for name, value in shown("fernhollow-31").report.items() if name != "transpositions"}

    plot = plots_of(report, before_music_deg=10.0, revolution_s=60.0)[2]

    assert isinstance(plot, Plot)
    assert [row[0] for row in plot.rows] == ["−5", "0", "+2", "+7", "+9"]


def test_a_disc_of_a_set_says_that_its_transpositions_are_of_all_discs_together() -> None:
    assert "All discs" not in _plots("fernhollow-31")["worth"].words
    assert "All discs" in _plots("fernhollow-31", disc={"number": 2, "of": 3})["worth"].words


def test_a_disc_without_plucks_has_words_in_place_of_plots() -> None:
    plots = _plots("fernhollow-31", tracks=[], tried=[], transpositions=[])

    assert [plot.name for plot in plots.values() if isinstance(plot, NoPlot)] == ["torque", "timing", "worth"]


def _name(semitones: int) -> str:
    return "0" if not semitones else f"{'+' if semitones > 0 else '−'}{abs(semitones)}"
