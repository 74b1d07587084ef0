"""Webs, edges, neighbours and repeats that hold or fail by less than the plus_minus they stand on say so."""

import math
from typing import Any

import pytest

from layout.check import Code, Finding, Level
from layout.check.blank import (
    keep_outs_are_clear,
    webs_to_features_hold,
    webs_to_the_centre_hole_hold,
    webs_to_the_rim_hold,
)
from layout.check.repeats import dampers_recover, rest_is_clear, star_wheels_keep_up
from layout.check.sideways import neighbours_are_not_fouled, own_star_is_met
from layout.check.webs import webs_between_openings_hold
from tests.layout.examples import disc_of, movement_with

STANDS_ON = "of the numbers it stands on."
RIM = {"disc/outer_diameter_mm": 203.5}  # an opening of track 3 reaches to 101.038: 0.712 mm are left of 101.75
HOLE = {"disc/centre_hole_mm": 96.56}  # an opening of track 1 begins at 48.98: 0.70 mm are left to 48.28


def worth(value: float, plus_minus: float) -> dict[str, float]:
    return {"value": value, "plus_minus": plus_minus}


def webs(changes: dict[str, Any], plucks: list[tuple[int, float]]) -> list[Finding]:
    return webs_between_openings_hold(disc_of(movement_with(changes), plucks))


@pytest.mark.parametrize(
    ("changes", "unsure"),
    [
        ({"disc/outer_diameter_mm": worth(203.5, 0.6)}, "0.300"),  # half of a diameter
        ({"disc/outer_diameter_mm": worth(203.5, 0.4)}, None),  # 0.2 < 0.212
        ({**RIM, "disc/centre_hole_mm": worth(10, 5)}, None),  # the other edge
        ({**RIM, "tracks/2/radius_mm": worth(100, 0.25)}, "0.250"),
        ({**RIM, "projection/width_mm": worth(1.2, 0.5)}, "0.250"),
    ],
)
def test_a_web_to_the_rim_stands_on_its_track_half_the_rim_and_half_the_width(
    changes: dict[str, Any], unsure: str | None
) -> None:
    found = webs_to_the_rim_hold(disc_of(movement_with(changes), [(3, 10.0)]))

    assert [(finding.code, finding.level) for finding in found] == [(Code.MARGIN_UNSURE, Level.WARNING)] * bool(unsure)
    assert all(f"less than the ±{unsure} mm {STANDS_ON}" in finding.message for finding in found)


def test_a_web_to_the_centre_hole_stands_on_half_the_hole_and_not_on_the_rim() -> None:
    other = disc_of(movement_with({**HOLE, "disc/outer_diameter_mm": worth(240, 5)}), [(1, 10.0)])
    own = disc_of(movement_with({"disc/centre_hole_mm": worth(96.56, 0.5)}), [(1, 10.0)])

    assert webs_to_the_centre_hole_hold(other) == []
    [finding] = webs_to_the_centre_hole_hold(own)
    assert f"less than the ±0.250 mm {STANDS_ON}" in finding.message


def test_a_ring_stands_on_the_edge_that_is_near_and_on_the_track() -> None:
    def told(ring: dict[str, Any], changes: dict[str, Any]) -> list[Finding]:
        movement = movement_with({"keep_out": [{"why": "pressed by a roller", **ring}], **changes})
        return keep_outs_are_clear(disc_of(movement, [(1, 10.0)]))

    # The ring ends 0.08 mm inside the opening's 48.98.
    assert told({"from_radius_mm": worth(40, 1), "to_radius_mm": 48.9}, {}) == []
    [edge] = told({"from_radius_mm": 40, "to_radius_mm": worth(48.9, 0.1)}, {})
    [track] = told({"from_radius_mm": 40, "to_radius_mm": 48.9}, {"tracks/0/radius_mm": worth(50, 0.2)})
    assert f"It holds by 0.080 mm, less than the ±0.100 mm {STANDS_ON}" in edge.message
    assert f"less than the ±0.200 mm {STANDS_ON}" in track.message


def test_a_web_between_tracks_that_misses_by_less_than_it_is_worth_says_so() -> None:
    # 2.4 mm apart, openings of 2.04 mm: 0.360 mm are left, 0.140 too little; 0.05 + 0.06 + 0.08 is 0.19.
    changes = {
        "tracks/0/radius_mm": worth(50, 0.05),
        "tracks/1/radius_mm": worth(52.4, 0.06),
        "projection/width_mm": worth(1.2, 0.08),
    }

    [finding] = webs(changes, [(1, 10.0), (2, 10.0)])
    [sure] = webs({"tracks/1/radius_mm": worth(52.4, 0.13)}, [(1, 10.0), (2, 10.0)])

    assert (finding.code, finding.level) == (Code.WEB_TOO_THIN, Level.ERROR)
    assert finding.message.endswith(f" It fails by 0.140 mm, less than the ±0.190 mm {STANDS_ON}")
    assert sure.message.endswith("needs 0.500 mm.")


def test_webs_that_hold_by_less_than_they_are_worth_are_one_advice_for_the_least_sure() -> None:
    # Tracks 2.6 mm apart leave 0.56 mm ten times over: 0.06 more than asked, and the pitch is worth 0.1.
    plucks = [(track, 3.0 * time) for time in range(1, 11) for track in (1, 2)]

    [finding] = webs({"tracks/1/radius_mm": worth(52.6, 0.1)}, plucks)

    assert (finding.code, finding.level) == (Code.MARGIN_UNSURE, Level.ADVICE)
    assert finding.at.tracks == (1, 2)
    assert "leave 0.560 mm of metal between them; fibre-laser needs 0.500 mm." in finding.message
    assert finding.message.endswith(f" It holds by 0.060 mm, less than the ±0.100 mm {STANDS_ON}")
    assert finding.remedy.startswith("Measure again to be sure; if it then fails: Leave one of the two notes out")
    assert webs({"tracks/1/radius_mm": worth(52.6, 0.05)}, plucks) == []
    assert webs({"tracks/1/radius_mm": 52.6}, plucks) == []


def test_a_web_along_a_track_stands_on_the_depth_and_not_on_the_radius() -> None:
    # Openings of u from -1.8945 to 0.4: 2.7145 mm long with their slits; at 3.3 mm apart some 0.6 mm are left.
    apart_s = 3.3 / (2 * math.pi * 50 / 60)
    plucks = [(1, 10.0), (1, 10.0 + apart_s)]

    [finding] = webs({"projection/depth_mm": worth(1.41, 0.6)}, plucks)

    assert (finding.code, finding.at.tracks) == (Code.MARGIN_UNSURE, (1, 1))
    assert finding.message.endswith(f"less than the ±0.600 mm {STANDS_ON}")
    assert webs({"tracks/0/radius_mm": worth(50, 0.6)}, plucks) == []


def test_each_kind_of_web_has_its_own_advice_and_errors_stay_errors() -> None:
    apart_s = 3.3 / (2 * math.pi * 50 / 60)
    changes: dict[str, Any] = {"projection/depth_mm": worth(1.41, 0.6), "tracks/1/radius_mm": worth(52.6, 0.1)}
    changes["tracks/2/radius_mm"] = 55.0  # 0.36 mm beside track 2: too thin by 0.14, more than the 0.1 of its radius

    found = webs(changes, [(1, 10.0), (1, 10.0 + apart_s), (2, 10.0), (3, 10.0)])

    assert [finding.code for finding in found] == [Code.WEB_TOO_THIN, Code.MARGIN_UNSURE, Code.MARGIN_UNSURE]
    assert [finding.at.tracks for finding in found] == [(2, 3), (1, 1), (1, 2)]


def test_a_web_to_a_feature_says_what_it_is_worth() -> None:
    hole = {"purpose": "drive", "shape": "hole", "first_at_deg": 90, "count": 2, "width_mm": 4, "length_mm": 4}

    def told(radius: Any) -> list[Finding]:
        movement = movement_with({"disc/features": [{**hole, "radius_mm": radius}]})
        return webs_to_features_hold(disc_of(movement, [(1, 10.0), (1, 40.0)]))

    # The opening begins at 48.98, with a straight side: a hole of 4 at 46.4 leaves 0.58, at 46.6 0.38 mm.
    advice = told(worth(46.4, 0.2))
    errors = told(worth(46.6, 0.2))
    assert [(finding.code, finding.level) for finding in advice] == [(Code.MARGIN_UNSURE, Level.ADVICE)]
    assert advice[0].message.endswith(f" It holds by 0.080 mm, less than the ±0.200 mm {STANDS_ON}")
    assert [finding.code for finding in errors] == [Code.WEB_TO_FEATURE] * 2
    assert all(finding.message.endswith(f"less than the ±0.200 mm {STANDS_ON}") for finding in errors)
    assert told(worth(46.4, 0.05)) == told(46.4) == []


def test_a_web_to_a_feature_stands_on_half_its_width() -> None:
    # As above, 0.58 mm: 0.08 more than are needed; of a width of 4 ± 0.2 mm half lies towards the opening.
    def told(plus_minus: float) -> list[Finding]:
        hole = {"purpose": "drive", "shape": "hole", "first_at_deg": 90, "count": 2, "radius_mm": 46.4}
        hole |= {"width_mm": worth(4, plus_minus), "length_mm": 4}
        return webs_to_features_hold(disc_of(movement_with({"disc/features": [hole]}), [(1, 10.0)]))

    [advice] = told(0.2)
    assert advice.message.endswith(f" It holds by 0.080 mm, less than the ±0.100 mm {STANDS_ON}")
    assert told(0.15) == []


# Reach 0.6 + 0.05 + 0.05 + 0.0545 of slide = 0.7545; a star 1.2 mm away begins at 0.95: a margin of 0.1955 mm.
NEAR = {"tracks/1/radius_mm": 51.2}


@pytest.mark.parametrize(
    ("changes", "unsure"),
    [
        ({"tracks/1/radius_mm": worth(51.2, 0.3)}, "0.300"),  # the neighbour's radius
        ({**NEAR, "tracks/0/radius_mm": worth(50, 0.3)}, "0.300"),
        ({**NEAR, "projection/width_mm": worth(1.2, 0.5)}, "0.250"),  # half of it reaches to this side
        ({**NEAR, "projection/width_mm": worth(1.2, 0.3)}, None),
        ({**NEAR, "star_wheel/thickness_mm": worth(0.5, 0.5)}, "0.250"),
        ({**NEAR, "star_wheel/thickness_mm": worth(0.5, 0.3)}, None),
        ({**NEAR, "disc/run_out_mm": worth(0.05, 0.2)}, "0.200"),
        # The row moves by 4 mm, and the slide by the 2.3333 mm of reach times 4/50: about 0.187, and 0.191 in full.
        ({**NEAR, "gantry_offset_mm": worth(0, 4)}, None),
        # By 4.5 mm: √(50² − 4.5²) − √(50² − 6.8333²) = 0.2662 of slide, 0.2117 more than at 0.
        ({**NEAR, "gantry_offset_mm": worth(0, 4.5)}, "0.212"),
    ],
)
def test_a_neighbour_stands_on_both_radii_and_halves_of_width_and_star(
    changes: dict[str, Any], unsure: str | None
) -> None:
    found = neighbours_are_not_fouled(disc_of(movement_with(changes), [(1, 10.0)]))

    assert [finding.code for finding in found] == [Code.MARGIN_UNSURE] * bool(unsure)
    assert all(f"less than the ±{unsure} mm {STANDS_ON}" in finding.message for finding in found)


def test_the_farther_neighbour_is_told_where_it_is_the_one_unsure() -> None:
    # Track 2 lies at 51.2, track 1 1.2 and track 3 1.5 mm from it; that of track 3 was measured to half a millimetre.
    changes = {**NEAR, "tracks/2/radius_mm": worth(52.7, 0.55)}

    [finding] = neighbours_are_not_fouled(disc_of(movement_with(changes), [(2, 10.0)]))

    assert finding.code is Code.MARGIN_UNSURE
    assert "the neighbouring star wheel begins at 1.250 mm" in finding.message


def test_the_own_star_stands_on_halves_of_width_and_star() -> None:
    # 0.6 of half width against the 0.4045 mm needed: 0.1955 mm.
    def told(changes: dict[str, Any]) -> list[Finding]:
        return own_star_is_met(disc_of(movement_with(changes), [(1, 10.0)]))

    assert told({"projection/width_mm": worth(1.2, 0.3)}) == []
    [finding] = told({"projection/width_mm": worth(1.2, 0.3), "star_wheel/thickness_mm": worth(0.5, 0.2)})
    assert f"less than the ±0.250 mm {STANDS_ON}" in finding.message


def test_a_step_of_a_computed_wheel_stands_on_its_tip_radius() -> None:
    # The arc is 2·R·sin 30° = R·1: 3.2 ± 0.3 mm. 0.65 s at 5.235988 mm/s are 3.403 mm.
    def told(plus_minus: float) -> list[Finding]:
        movement = movement_with({"star_wheel/tip_radius_mm": worth(3.2, plus_minus)})
        return star_wheels_keep_up(disc_of(movement, [(1, 10.0), (1, 10.65)]))

    [finding] = told(0.3)
    assert finding.code is Code.MARGIN_UNSURE
    assert f"It holds by 0.203 mm, less than the ±0.300 mm {STANDS_ON}" in finding.message
    assert told(0.2) == []


def test_a_step_of_a_measured_arc_does_not_stand_on_the_wheel_it_was_not_computed_from() -> None:
    arcs = {"tracks/0/engagement_arc_mm": 3.2, "tracks/0/release_arc_mm": 0.0}
    movement = movement_with({**arcs, "star_wheel/tip_radius_mm": worth(3.2, 0.3)})

    assert star_wheels_keep_up(disc_of(movement, [(1, 10.0), (1, 10.65)])) == []


def test_a_step_stands_on_the_radius_by_the_angle_between_its_plucks() -> None:
    # 0.65 s are 3.9 degrees, 0.0681 rad: a radius worth 4 mm moves the travel by 0.272 mm.
    movement = movement_with({"tracks/0/radius_mm": worth(50, 4)})

    [finding] = star_wheels_keep_up(disc_of(movement, [(1, 10.0), (1, 10.65)]))

    assert f"It holds by 0.203 mm, less than the ±0.272 mm {STANDS_ON}" in finding.message


@pytest.mark.parametrize(
    ("changes", "unsure"),
    [
        ({"damper_recovery_s": worth(0.75, 0.1)}, "0.100"),
        # 0.8 s of a turn of 60 s: 0.8 · 4.5 / 60 = 0.06.
        ({"damper_recovery_s": 0.75, "fastest_revolution_s": worth(60, 4.5)}, "0.060"),
        ({"damper_recovery_s": worth(0.75, 0.04)}, None),
    ],
)
def test_a_damper_stands_on_its_recovery_and_on_the_fastest_turn(changes: dict[str, Any], unsure: str | None) -> None:
    found = dampers_recover(disc_of(movement_with(changes), [(1, 10.0), (1, 10.8)]))

    assert [finding.code for finding in found] == [Code.MARGIN_UNSURE] * bool(unsure)
    assert all(f"It holds by 0.050 s, less than the ±{unsure} s {STANDS_ON}" in finding.message for finding in found)


def test_a_rest_stands_on_how_far_a_point_reaches() -> None:
    # The reach is √(3.2² − (3.75 − 1.56)²) = 2.3332 mm, 2.3340 round a radius of 50 mm, where
    # 3° are 2.6180: clear by 0.284 mm.
    def told(before_deg: float, **changes: Any) -> list[Finding]:
        movement = movement_with({"before_music_deg": before_deg, **changes})
        return rest_is_clear(disc_of(movement, [(1, 0.0), (3, 0.0), (1, 5.0)]))

    # With a tip of 2.95 mm it is √(2.95² − 2.19²) = 1.9765, 0.357 less; with one of 3.45 it is 0.333 more.
    [tip] = told(3.0, **{"star_wheel/tip_radius_mm": worth(3.2, 0.25)})
    # 0.3 mm nearer the axis: √(3.2² − 1.89²) − 2.3332 = 0.249; further off it is 2.0100, 0.323 less.
    [depth] = told(3.0, **{"projection/depth_mm": worth(1.41, 0.3)})
    # 2.6° are 2.2689 mm: it stands 0.065 mm on its wheel.
    [fails] = told(2.6, **{"star_wheel/axis_depth_mm": worth(3.75, 0.1)})

    assert (tip.code, tip.level, tip.at.projections) == (Code.MARGIN_UNSURE, Level.ADVICE, (0,))
    assert tip.message.endswith(f" It holds by 0.284 mm, less than the ±0.357 mm {STANDS_ON}")
    assert depth.message.endswith(f"less than the ±0.323 mm {STANDS_ON}")
    assert fails.code is Code.REST_NOT_CLEAR
    assert " It fails by 0.065 mm, less than the ±0.09" in fails.message
    assert told(3.0, **{"star_wheel/tip_radius_mm": worth(3.2, 0.1)}) == told(3.0) == []


def test_a_rest_of_measured_arcs_stands_on_both() -> None:
    arcs = {"tracks/0/engagement_arc_mm": worth(3.2, 0.3), "tracks/0/release_arc_mm": worth(0.0, 0.2)}
    # The edge may touch from 3.2 mm before the row; 4° on a radius of 50 mm are 3.491.
    movement = movement_with({"before_music_deg": 4.0, **arcs})

    [finding] = rest_is_clear(disc_of(movement, [(1, 0.0)]))

    assert finding.code is Code.MARGIN_UNSURE
    assert f"less than the ±0.500 mm {STANDS_ON}" in finding.message
