"""Plots of a report: what stands in them is what the report says, and their axes hold it."""

import re
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.pages.disc_plots import BOTTOM, HEIGHT, LEAST_SHOWN, MOST_TICKS, NoPlot, Plot, _scale, plots_of
from tests.service.pages.discs_shown import shown

FOOT = HEIGHT - BOTTOM


def _plots(movement: str, **changes: Any) -> dict[str, Plot | NoPlot]:
    disc = shown(movement)
    report = {**disc.report, **changes}
    made = plots_of(report, before_music_deg=disc.movement.before_music_deg, revolution_s=disc.movement.revolution_s)
    return {plot.name: plot for plot in made}


@given(st.floats(min_value=0, max_value=1e7))
def test_an_axis_holds_what_is_shown_on_it_with_few_round_numbers(most: float) -> None:
    top, ticks = _scale(most)

    assert top >= most
    assert top < 1.5 * most or most < LEAST_SHOWN
    assert 2 <= len(ticks) <= MOST_TICKS + 1
    assert ticks[0].words == "0"
    assert [tick.at for tick in ticks] == sorted((tick.at for tick in ticks), reverse=True)


def test_the_torque_rises_to_its_peak_and_no_higher_and_the_drives_limit_stands_above_it() -> None:
    torque = shown("mossbrook-67").report["drive"]["torque"]

    plot = _plots("mossbrook-67")["torque"]

    assert isinstance(plot, Plot)
    heights = [float(y) for _, y in re.findall(r"([\d.]+) ([\d.]+)", plot.line)]
    assert len(heights) == len(torque["over_the_turn"]["at_s"])
    assert plot.limit is not None
    # Both on one scale: the share of the peak in the limit is that of their heights, to a tenth of a unit.
    drawn = (FOOT - min(heights)) / (FOOT - plot.limit)
    assert drawn == pytest.approx(torque["peak_nmm"] / torque["limit_nmm"], abs=0.002)
    assert plot.words == (
        "The teeth load the disc with 207 N mm at most, 58.75 s into the music at 251°; 4 N mm on average. "
        "The drive has 500 N mm (dashed)."  # 16° + 360°·58.753774 s/90 s = 251.02°
    )


def test_a_torque_that_is_not_known_names_what_the_movement_does_not_state() -> None:
    plot = _plots("fernhollow-31")["torque"]

    assert plot == NoPlot(
        name="torque",
        words="Not known. The movement does not state: drive, teeth.stiffness_n_per_mm, teeth.lift_mm.",
    )


def test_each_track_that_is_used_has_its_timing_error_as_a_bar_and_as_a_figure() -> None:
    tracks = shown("fernhollow-31").report["tracks"]

    plot = _plots("fernhollow-31")["timing"]

    assert isinstance(plot, Plot)
    assert len(plot.bars) == len(plot.faint) == len(plot.rows) == len(tracks)
    assert plot.rows[0] == ("1", "36", "15.0", "18.3", "6.0")  # root of squares, together, largest nudge, in ms
    assert all(strong.height <= faint.height for strong, faint in zip(plot.bars, plot.faint, strict=True))
    assert "18.3 ms early or late, 15.0 ms by root of squares: on track 1, 36 mm" in plot.words


def test_transpositions_stand_in_the_order_of_their_pitch_and_the_chosen_one_is_named() -> None:
    plot = _plots("mossbrook-67")["worth"]

    assert isinstance(plot, Plot)
    assert [tick.words for tick in plot.x_ticks] == ["−7", "−5", "−2", "0", "+2"]
    assert "chosen: −5" in plot.words
    assert dict((row[0], row[1]) for row in plot.rows)["−5"] == "100.0"


def test_a_transposition_of_which_only_the_bound_is_known_has_no_strong_bar() -> None:
    tried = [
        {"semitones": 0, "speed_factor": 1.0, "kept": 80, "bound": 80},
        {"semitones": 2, "speed_factor": 1.1, "kept": None, "bound": 60},
    ]

    plot = _plots("fernhollow-31", tried=tried)["worth"]

    assert isinstance(plot, Plot)
    assert [bar.height > 0 for bar in plot.bars] == [True, False]
    assert plot.rows == (("0 × 1", "100.0", "100.0"), ("+2 × 1.1", "–", "75.0"))


def test_a_disc_without_plucks_has_words_in_place_of_plots() -> None:
    disc = replace(shown("fernhollow-31"))
    plots = _plots("fernhollow-31", tracks=[], tried=[])

    assert [plot.name for plot in plots.values() if isinstance(plot, NoPlot)] == ["torque", "timing", "worth"]
    assert disc.report["tracks"], "the disc itself has some"
