"""The laws of a trial piece on movements that nobody has drawn yet."""

import itertools
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.layout.examples import LASER, PRESS, cutter_with, movement_with
from tests.layout.trial.reading import at_mark, read_piece
from tests.thorough import tried

GRAIN_MM = 2e-5


@st.composite
def movements(draw: st.DrawFn) -> dict[str, Any]:
    """Changes of the plain movement: 1 to 12 tracks, other radii and sizes, either direction."""
    count = draw(st.integers(1, 12))
    first_mm = draw(st.floats(18, 60))
    pitch_mm = draw(st.floats(1.2, 6))
    last_mm = first_mm + pitch_mm * count
    holes = {"purpose": "drive", "shape": "hole", "radius_mm": 10, "count": draw(st.integers(1, 4))}
    return {
        "turns": draw(st.sampled_from(["clockwise", "anticlockwise"])),
        "gantry_offset_mm": draw(st.floats(-2, 2)),
        "disc/outer_diameter_mm": 2 * (last_mm + draw(st.floats(2, 10))),
        "disc/thickness_mm": draw(st.floats(0.4, 1.0)),
        "disc/features": [holes | {"width_mm": 3, "length_mm": 3}],
        "projection/width_mm": draw(st.floats(0.8, 1.8)),
        "projection/depth_mm": draw(st.floats(1.0, 2.0)),
        "tracks": [{"track": place + 1, "radius_mm": first_mm + place * pitch_mm} for place in range(count)],
        "teeth": [{"tooth": place + 1, "track": place + 1, "pitch": "C5"} for place in range(count)],
    }


@given(changes=movements(), side=st.sampled_from(["label-side", "star-side"]), kind=st.sampled_from(["laser", "press"]))
@settings(max_examples=tried(25))
def test_whatever_the_movement_what_is_cut_stays_apart_and_inside(
    changes: dict[str, Any], side: str, kind: str
) -> None:
    movement = movement_with(changes)
    depth_mm = movement.projection.depth_mm or 0.0
    lance = {
        "tool": "L1",
        "title": "a lance of this movement's own",
        "makes": "lance",
        "footprint_length_mm": depth_mm + 0.8,
        "footprint_width_mm": movement.projection.width_mm + 0.4,
        "edge_ahead_mm": 0.6,
        "tab_width_mm": movement.projection.width_mm,
        "tab_depth_mm": depth_mm,
    }
    cutter = (
        cutter_with({"drawn_from": side})
        if kind == "laser"
        else cutter_with({"drawn_from": side, "tools": [lance]}, PRESS)
    )

    piece, read = read_piece(movement, cutter)

    steps = [step.nominal_mm for ladder in piece.ladders if ladder.name == "web" for step in ladder.steps]
    cut = [*read.openings, *read.holes]
    webs = sorted(one.distance(two) for one, two in itertools.combinations(cut, 2))
    below = sorted(step for step in steps if step < piece.web_mm - GRAIN_MM)
    assert webs[: len(below)] == pytest.approx(below, abs=GRAIN_MM)
    assert webs[len(below)] >= piece.web_mm - GRAIN_MM
    assert all(read.outline.contains(shape) for shape in [*cut, *read.marks])
    told = {left.what for left in piece.not_tried}
    marks = {step.mark for ladder in piece.ladders for step in ladder.steps}
    assert marks <= set(read.letters)
    assert told or {mark[0] for mark in marks} == ({"K", "W", "D", "M", "T"} if kind == "laser" else {"M", "T"})


@given(min_web_mm=st.floats(0.2, 1.5), thickness_mm=st.floats(0.3, 1.2))
@settings(max_examples=tried(10))
def test_a_web_step_is_the_same_share_of_any_least_web(min_web_mm: float, thickness_mm: float) -> None:
    movement = movement_with({"disc/thickness_mm": thickness_mm})

    piece, read = read_piece(movement, cutter_with({"min_web_mm": min_web_mm}, LASER))

    [web] = [ladder for ladder in piece.ladders if ladder.name == "web"]
    measured = [one.distance(two) for one, two in (at_mark(read, step.mark, 2) for step in web.steps)]
    assert measured == pytest.approx(np.array([2.0, 1.5, 1.25, 1.0, 0.75, 0.5]) * min_web_mm, abs=GRAIN_MM)
