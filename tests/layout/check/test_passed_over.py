"""Most conditions hold by far, and are passed over before words are made for them: none that has something to tell."""

import json
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import blank, check, feature_sizes, repeats, sideways
from layout.check.margin import not_surely_held
from layout.documents import Cutter, Movement, read_movement
from layout.mechanics.arrays import BoolArray, FloatArray
from tests.fuzz.random_machines import cutters, movements, numbers
from tests.layout.examples import disc_of
from tests.thorough import tried

PASSING_OVER = (blank, feature_sizes, repeats, sideways)


def none_passed_over(margin: FloatArray, unsure: FloatArray | float) -> BoolArray:
    del unsure
    return np.ones(len(margin), dtype=np.bool_)


@st.composite
def measured_movements(draw: st.DrawFn) -> Movement:
    """Movements that are tight in places, and of which some numbers are known closely, some not."""
    document: dict[str, Any] = draw(movements()).model_dump(mode="json", exclude_none=True)
    tracks, blank_of = document["tracks"], document["disc"]
    first_mm, pitch_mm = draw(numbers(24, 40, 0.5)), draw(numbers(1.2, 3, 0.1))
    for place, track in enumerate(tracks):
        track["radius_mm"] = round(first_mm + place * pitch_mm, 6)
    blank_of["outer_diameter_mm"] = round(2 * tracks[-1]["radius_mm"] + draw(numbers(1.5, 6, 0.1)), 6)
    blank_of["centre_hole_mm"] = round(2 * first_mm - draw(st.sampled_from([2.5, 3, 4, 5, 20])), 6)
    blank_of["run_out_mm"] = draw(numbers(0, 0.4, 0.05))
    blank_of["features"], document["keep_out"] = [], []
    document["projection"]["width_mm"] = draw(numbers(0.8, 1.8, 0.1))
    if draw(st.booleans()):
        ring_mm = draw(numbers(first_mm, first_mm + 10, 0.5))
        document["keep_out"] = [{"from_radius_mm": ring_mm, "to_radius_mm": ring_mm + 3, "why": "clamped"}]
    places = [(blank_of, "outer_diameter_mm"), (blank_of, "thickness_mm"), (document, "gantry_offset_mm")]
    places += [(document["projection"], "width_mm"), *((track, "radius_mm") for track in tracks)]
    for part, name in places:
        off = draw(st.sampled_from([0, 0, 0.01, 0.3, 0.8]))
        if off:
            part[name] = {"value": part[name], "plus_minus": off, "basis": "measured"}
    return read_movement(json.dumps(document))


@settings(max_examples=tried(60), deadline=None)
@given(
    movement=measured_movements(),
    cutter=cutters(),
    plucks=st.lists(st.tuples(st.integers(1, 16), st.floats(0, 20)), min_size=1, max_size=25),
)
def test_with_nothing_passed_over_the_findings_are_the_same(
    movement: Movement, cutter: Cutter, plucks: list[tuple[int, float]]
) -> None:
    count = len(movement.tracks)
    disc = disc_of(movement, [((track - 1) % count + 1, at_s) for track, at_s in plucks], cutter)

    findings = check(disc)

    with pytest.MonkeyPatch.context() as patch:
        for module in PASSING_OVER:
            patch.setattr(module, "not_surely_held", none_passed_over)
        assert check(replace(disc)) == findings


def test_what_may_fail_or_holds_by_no_more_than_its_worth_is_not_passed_over() -> None:
    margin, unsure = np.array([-1.0, 0.0, 0.2, 0.2, 5.0]), np.array([0.0, 0.0, 0.2, 0.1, 1.0])

    assert not_surely_held(margin, unsure).tolist() == [True, True, True, False, False]
