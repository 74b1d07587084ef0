"""Cases that shipped movements and tunes seldom bring, each by hand."""

from typing import Any

import numpy as np
import pytest

from layout.mechanics.bridging import gaps_in
from layout.mechanics.drive import lifts_of
from layout.mechanics.hole_hits import not_struck
from layout.mechanics.lettering import strokes_mm
from layout.mechanics.offset import moved_outlines
from layout.mechanics.openings import radial_reach_mm
from layout.mechanics.plain_letters import plain_ascii
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import MOST_TRACKS_APART, spacing_of
from layout.mechanics.star_wheel import depth_band_mm
from layout.mechanics.turning import turning_of
from tests.layout.arrange.small_comb import SMALL_COMB, comb_with
from tests.layout.examples import LASER, PRESS, movement_with

# A slot 2 mm along the travel and 1.2 mm across it: a straight core, grown by 0.6 mm all round.
SLOTTED: dict[str, Any] = {
    "projection": {"kind": "slot", "width_mm": 1.2, "length_mm": 2.0},
    "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 1.0, "thickness_mm": 0.5},
}


def test_the_teeth_after_one_that_is_not_usable_lift_as_well() -> None:
    teeth = [{**tooth, "stiffness_n_per_mm": 1.0, "lift_mm": 0.2, "usable": True} for tooth in SMALL_COMB["teeth"]]
    movement = comb_with({"teeth": [{**teeth[0], "usable": False}, *teeth[1:]]})

    lifts = lifts_of(movement, turning_of(movement))

    assert lifts is not None
    assert [len(track) for track in lifts] == [0, 1, 1, 1, 1, 1]


def test_of_two_arcs_the_longer_has_the_bridge_though_both_are_nearly_one_radian() -> None:
    [first, second] = gaps_in([(0.0, 1.0), (2.0, 3.4)], count=1, width_rad=0.1) or []
    assert (len(first), len(second)) == (0, 1)


def test_a_row_that_is_not_struck_is_told_as_one_or_as_many() -> None:
    odd = {"purpose": "drive", "radius_mm": 20, "width_mm": 4.5}  # no tool of the shipped press is so wide
    rows = [
        {**odd, "shape": "hole", "length_mm": 4.5},
        {**odd, "shape": "hole", "radius_mm": 30, "length_mm": 4.5, "count": 3},
        {**odd, "shape": "slot", "radius_mm": 40, "length_mm": 9, "count": 2},
        {**odd, "shape": "notch", "radius_mm": 119, "length_mm": 9, "count": 4},
    ]

    left = not_struck(movement_with({"disc/features": rows, "disc/centre_hole_mm": 9}), PRESS)

    assert [told.partition(" (")[0] for told in left] == [
        "drive hole 4.5 mm",
        "3 drive holes 4.5 mm",
        "2 drive slots 9 x 4.5 mm",
        "4 drive notches 9 x 4.5 mm",
        "rim",
    ]


def test_slots_reach_half_their_width_in_and_out_of_their_track() -> None:
    movement = movement_with(SLOTTED)
    turning = turning_of(movement)

    reach_mm = radial_reach_mm(turning, pattern_of(movement, LASER))

    # The core's ends stand up to 2 - 0.6 mm along the tangent from the radius through the middle, so
    # √(50² + 1.4²) - 50 = 0.02 mm farther out at most; its nearest point keeps the radius.
    for (nearest_mm, farthest_mm), radius_mm in zip(reach_mm, (50, 60, 100), strict=True):
        assert nearest_mm == pytest.approx(radius_mm - 0.6, abs=0.021)
        assert farthest_mm == pytest.approx(radius_mm + 0.6, abs=0.021)
        assert farthest_mm - nearest_mm >= 1.2


def test_openings_that_reach_past_many_tracks_are_kept_from_the_six_next_ones() -> None:
    # 0.1 mm from track to track and projections 1.2 mm wide: each is in the way of all others.
    tracks = [{"track": number, "radius_mm": 50 + 0.1 * number} for number in range(1, 9)]
    teeth = [{"tooth": number, "track": number, "pitch": "C5"} for number in range(1, 9)]
    movement = movement_with({"tracks": tracks, "teeth": teeth})
    turning = turning_of(movement)

    between = spacing_of(movement, turning, pattern_of(movement, LASER), 0.5).between

    assert MOST_TRACKS_APART == 6
    assert {(pair.inner_index, pair.outer_index) for pair in between} == {
        (inner, outer) for outer in range(8) for inner in range(max(outer - 6, 0), outer)
    }


def test_a_ring_round_a_letter_is_dropped_like_an_accent() -> None:
    assert plain_ascii("A\N{COMBINING ENCLOSING CIRCLE}b") == "Ab"


def test_slots_have_no_depth() -> None:
    assert depth_band_mm(movement_with(SLOTTED)) == (0.0, 0.0)


@pytest.mark.parametrize("text", ["", " ", "   "])
def test_a_text_of_blanks_has_no_strokes(text: str) -> None:
    assert strokes_mm(text, 3.0) == ()


@pytest.mark.parametrize(("inwards_mm", "is_left"), [(0.9, True), (1.0, False), (1.1, False)])
def test_an_outline_moved_inwards_by_the_radius_of_its_ends_is_gone(inwards_mm: float, *, is_left: bool) -> None:
    # Two half circles of 1 mm, 2 mm apart: an obround 4 mm long and 2 mm wide (DXF bulge of a half circle: 1).
    points_mm = np.array([[[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]]])

    moved = moved_outlines(points_mm, np.array([0.0, 1.0, 0.0, 1.0]), -inwards_mm)

    assert (moved is not None) is is_left
