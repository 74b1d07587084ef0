import itertools
import math
from typing import Any

import pytest

from layout.check import Code, Finding, Level, check
from layout.check.cutter import cutter_can_form, holes_are_large_enough, press_has_the_tool, slits_are_wide_enough
from layout.check.sideways import neighbours_are_not_fouled, own_star_is_met
from layout.check.star_wheel import (
    depth_stays_off_the_root,
    star_clears_the_disc,
    star_is_reached,
    step_ends_at_the_next_point,
    step_reaches_the_next_point,
    tip_clears_the_bend,
    tooth_is_released,
)
from layout.documents import Cutter, Movement
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with

# The plain movement: R 3.2, H 3.75, root 1.5, depth 1.41 +- (0.05 + 0.1 flatness) = 1.26 to 1.56.
PLUCKS = [(1, 10.0), (2, 20.0)]


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_a_shipped_movement_with_every_track_used_is_sound(movement: Movement, cutter: Cutter) -> None:
    plucks = [(track.track, 2.0 + 0.2 * track.track) for track in movement.tracks]

    found = [finding.code for finding in check(disc_of(movement, plucks, cutter))]

    assert found == ([Code.LABEL_HIDDEN] if cutter is PRESS else [])  # the shipped press marks the star side


@pytest.mark.parametrize(
    ("one_check", "changes", "code", "measured", "limit"),
    [
        # H - R = 0.05 against a flatness of 0.1
        (star_clears_the_disc, {"star_wheel/axis_depth_mm": 3.25}, Code.STAR_HITS_DISC, 0.05, 0.1),
        # least depth 0.65 - 0.15 = 0.5: H - p = 3.25, the tips reach 3.2
        (star_is_reached, {"projection/depth_mm": 0.65}, Code.STAR_NOT_REACHED, 3.25, 3.2),
        # least depth 1.1 - 0.15 = 0.95: acos(2.8 / 3.2) = 28.955 deg, half a step is 30
        (step_reaches_the_next_point, {"projection/depth_mm": 1.1}, Code.STEP_TOO_SHORT, 28.955, 30.0),
        # greatest depth 2.1 + 0.15 = 2.25: acos(1.5 / 3.2) = 62.046 deg, a step is 60
        (step_ends_at_the_next_point, {"projection/depth_mm": 2.1}, Code.STEP_TOO_LONG, 62.046, 60.0),
        # H - R - flatness = 3.65 - 3.2 - 0.1 = 0.35 against the fold's 0.4
        (tip_clears_the_bend, {"star_wheel/axis_depth_mm": 3.65}, Code.TIP_IN_BEND, 0.35, 0.4),
        # greatest depth 2.15 + 0.15 = 2.3: 1.45 over the axis, the star is solid up to 1.5
        (depth_stays_off_the_root, {"projection/depth_mm": 2.15}, Code.DEPTH_AT_ROOT, 1.45, 1.5),
        # least depth 1.26: acos(2.49 / 3.2) = 38.911 deg; greatest 1.56: acos(2.19 / 3.2) - 60 = -13.186 deg
        (tooth_is_released, {"star_wheel/release_angle_deg": 40}, Code.TOOTH_LEFT_HANGING, 40, 38.911),
        (tooth_is_released, {"star_wheel/release_angle_deg": -14}, Code.TOOTH_LEFT_HANGING, -14, -13.186),
    ],
)
def test_a_star_wheel_condition_that_fails_gives_its_numbers(
    one_check: Any, changes: dict[str, Any], code: Code, measured: float, limit: float
) -> None:
    [finding] = one_check(disc_of(movement_with(changes), PLUCKS))

    assert finding.code is code
    assert finding.level is Level.ERROR
    assert finding.measured == pytest.approx(measured, abs=0.001)
    assert finding.limit == pytest.approx(limit, abs=0.001)
    assert f"{abs(limit):.2f}"[:4] in finding.message
    assert finding.remedy


CONDITIONS = [
    star_clears_the_disc,
    star_is_reached,
    step_ends_at_the_next_point,
    step_reaches_the_next_point,
    tip_clears_the_bend,
    depth_stays_off_the_root,
    tooth_is_released,
    neighbours_are_not_fouled,
    own_star_is_met,
]


@pytest.mark.parametrize("one_check", CONDITIONS, ids=lambda one_check: one_check.__name__)
def test_the_plain_movement_meets_every_condition(one_check: Any) -> None:
    assert one_check(disc_of(PLAIN, PLUCKS)) == []


@pytest.mark.parametrize(
    ("one_check", "changes"),
    [
        (star_clears_the_disc, {"star_wheel/axis_depth_mm": 3.301}),
        (star_is_reached, {"projection/depth_mm": 0.701}),
        (step_reaches_the_next_point, {"projection/depth_mm": 1.13}),  # acos(2.77/3.2) = 30.04 deg
        (step_ends_at_the_next_point, {"projection/depth_mm": 1.999}),  # acos(1.601/3.2) = 59.98 deg
        (tip_clears_the_bend, {"star_wheel/axis_depth_mm": 3.701}),
        (depth_stays_off_the_root, {"projection/depth_mm": 2.099}),
        (tooth_is_released, {"star_wheel/release_angle_deg": 38.9}),
    ],
)
def test_a_star_wheel_condition_that_just_holds_passes(one_check: Any, changes: dict[str, Any]) -> None:
    assert one_check(disc_of(movement_with(changes), PLUCKS)) == []


def test_a_band_deeper_than_the_axis_is_at_the_root_and_nowhere_else_a_crash() -> None:
    movement = movement_with({"projection/depth_mm": 3.7})

    codes = [finding.code for finding in check(disc_of(movement, PLUCKS))]

    assert Code.DEPTH_AT_ROOT in codes


def test_a_projection_that_reaches_the_next_star_is_found() -> None:
    # half width 1.6, tolerance 0.05, run-out 0.05, slide 2.3333² / (2 * 50) = 0.05447: 1.7545 to the side;
    # the next track is 2 mm away, its star half of 0.5 thick: room 1.75
    movement = movement_with({"projection/width_mm": 3.2, "tracks/1/radius_mm": 52})

    [first, _] = neighbours_are_not_fouled(disc_of(movement, PLUCKS))

    assert first.code is Code.NEIGHBOUR_FOULED
    assert first.measured == pytest.approx(1.7545, abs=1e-4)
    assert first.limit == pytest.approx(1.75)
    assert "the neighbouring star wheel begins at 1.750 mm" in first.message


def test_a_projection_that_may_miss_its_own_star_is_found() -> None:
    # half width 0.4; needed: half of 0.5, tolerance 0.05, run-out 0.05, slide 0.0545: 0.4045
    [finding] = own_star_is_met(disc_of(movement_with({"projection/width_mm": 0.8}), [(1, 10.0)]))

    assert finding.code is Code.OWN_STAR_MISSED
    assert (finding.measured, finding.limit) == pytest.approx((0.4, 0.4045), abs=1e-4)


def test_a_row_too_far_from_the_centre_misses_its_star() -> None:
    # On the inner track of mossbrook, radius 45: at d = 1.5 the slide is about 0.165 and the margin about 0.03; at 5
    # the face meets the star 7.6 mm from the centre line and slides 0.37 mm.
    wide = movement_with({"gantry_offset_mm": 5}, SHIPPED[1].model_dump(mode="json", exclude_none=True))

    assert own_star_is_met(disc_of(SHIPPED[1], [(1, 10.0)])) == []
    [finding] = own_star_is_met(disc_of(wide, [(1, 10.0)]))
    assert finding.code is Code.OWN_STAR_MISSED


def test_a_projection_slides_most_where_it_crosses_the_radius_square_to_the_row() -> None:
    # Touched from the row, 5 mm off, to 9.8 mm past it: from y = 5 to -4.8. At both ends it stands nearly alike, and
    # at 0 by 50 - sqrt(50² - 5²) = 0.2506 further out: 0.25 + 0.05 + 0.05 + 0.2506 are needed.
    arcs = {"tracks/0/engagement_arc_mm": 9.8, "tracks/0/release_arc_mm": 9.8}
    movement = movement_with({"gantry_offset_mm": 5, **arcs})

    [finding] = own_star_is_met(disc_of(movement, [(1, 10.0)]))

    assert (finding.code, finding.measured) == (Code.OWN_STAR_MISSED, 0.6)
    assert finding.limit == pytest.approx(0.6006, abs=1e-4)


def test_a_failing_condition_says_when_its_numbers_are_worth_less_than_its_margin() -> None:
    stated = {"value": 3.25, "plus_minus": 0.08}

    [finding] = star_clears_the_disc(disc_of(movement_with({"star_wheel/axis_depth_mm": stated}), PLUCKS))

    assert finding.level is Level.ERROR
    assert finding.message == (
        "The star's tips come 0.050 mm under the disc, which may be out of flat by 0.100 mm: the star may touch the "
        "sheet between projections. It fails by 0.050 mm, less than the ±0.080 mm of the numbers it stands on."
    )


def test_a_condition_that_holds_by_less_than_its_numbers_are_worth_is_a_warning() -> None:
    stated = {"value": 3.35, "plus_minus": 0.06}

    [finding] = star_clears_the_disc(disc_of(movement_with({"star_wheel/axis_depth_mm": stated}), PLUCKS))

    assert finding.code is Code.MARGIN_UNSURE
    assert finding.level is Level.WARNING
    assert finding.message == (
        "The star's tips come 0.150 mm under the disc, which may be out of flat by 0.100 mm. "
        "It holds by 0.050 mm, less than the ±0.060 mm of the numbers it stands on."
    )
    assert finding.remedy.startswith("Measure again to be sure")


@pytest.mark.parametrize(
    ("movement", "cutter", "code", "message"),
    [
        (
            movement_with({"projection/forming": "lance"}),
            LASER,
            Code.CANNOT_FORM,
            "plain-3 needs lanced projections; fibre-laser is a laser.",
        ),
        (
            movement_with({"projection/forming": "fold"}),
            PRESS,
            Code.CANNOT_FORM,
            "plain-3 needs folded projections; turn-press is a punch press.",
        ),
        (
            movement_with(),
            cutter_with({"fold": None}),
            Code.CANNOT_FORM,
            "fibre-laser states no fold, and plain-3 needs standing metal.",
        ),
        (
            movement_with({"projection/width_mm": 2.0}),
            PRESS,
            Code.NO_TOOL,
            "turn-press has no tool for a lanced tab 2 mm wide and 1.41 mm deep; it has L12 (lance",
        ),
        (
            SHIPPED[2],
            cutter_with({"tools": []}, PRESS),
            Code.NO_TOOL,
            "turn-press has no tool for a slot 2.2 by 1.3 mm; it has none.",
        ),
    ],
)
def test_a_projection_the_cutter_cannot_make_is_found(
    movement: Movement, cutter: Cutter, code: Code, message: str
) -> None:
    disc = disc_of(movement, [(1, 10.0)], cutter)

    [finding] = press_has_the_tool(disc) if code is Code.NO_TOOL else cutter_can_form(disc)

    assert finding.code is code
    assert finding.message.startswith(message)


@pytest.mark.parametrize(("movement", "cutter"), list(itertools.product(SHIPPED, (LASER, PRESS))))
def test_the_shipped_cutters_can_make_the_shipped_movements(movement: Movement, cutter: Cutter) -> None:
    disc = disc_of(movement, [(1, 10.0)], cutter)

    assert cutter_can_form(disc) + press_has_the_tool(disc) + slits_are_wide_enough(disc) == []


@pytest.mark.parametrize(
    ("movement", "what"), [(SHIPPED[0], "slit (slit_width_mm) is 0.420"), (SHIPPED[2], "slot (width_mm) is 1.300")]
)
def test_a_slit_or_slot_below_the_cutters_least_is_found(movement: Movement, what: str) -> None:
    [finding] = slits_are_wide_enough(disc_of(movement, [(1, 10.0)], cutter_with({"min_slot_mm": 1.5})))

    assert (finding.code, finding.limit) == (Code.SLIT_TOO_NARROW, 1.5)
    assert what in finding.message


def test_a_relief_below_the_cutters_least_is_found() -> None:
    disc = disc_of(PLAIN, PLUCKS, cutter_with({"fold/relief_width_mm": 0.05}))

    [finding] = slits_are_wide_enough(disc)

    assert finding.message == "The relief (relief_width_mm) is 0.050 mm wide; fibre-laser cuts none below 0.400 mm."


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"disc/centre_hole_mm": 0.3}, "The centre hole is 0.300 mm wide"),
        (
            {"disc/features": [{"purpose": "stop", "shape": "slot", "radius_mm": 20, "width_mm": 3, "length_mm": 0.2}]},
            "The stop slot is 0.200 mm wide",
        ),
    ],
)
def test_a_hole_below_the_cutters_least_is_found(changes: dict[str, Any], message: str) -> None:
    [finding] = holes_are_large_enough(disc_of(movement_with(changes), PLUCKS))

    assert (finding.code, finding.limit) == (Code.HOLE_TOO_SMALL, 0.4)
    assert finding.message.startswith(message)


def test_holes_of_the_cutters_least_pass() -> None:
    assert holes_are_large_enough(disc_of(movement_with({"disc/centre_hole_mm": 0.4}), PLUCKS)) == []


# Round numbers at the very end of a condition that the trade excludes there.
@pytest.mark.parametrize(
    ("changes", "code"),
    [
        # H - p = 4 - 1 = 3 = R, no band
        ({"axis_depth_mm": 4, "tip_radius_mm": 3}, Code.STAR_NOT_REACHED),
        # the axis as deep as the tips are long
        ({"axis_depth_mm": 3, "tip_radius_mm": 3}, Code.STAR_HITS_DISC),
        # H - p = 2 = root
        ({"axis_depth_mm": 3, "tip_radius_mm": 2.5, "root_radius_mm": 2}, Code.DEPTH_AT_ROOT),
        # acos(2/4) = 60 deg = a whole step of six points (2/4 is exact, and so is its arccosine's degree to 1e-14)
        ({"axis_depth_mm": 3, "tip_radius_mm": 4}, Code.STEP_TOO_LONG),
    ],
)
def test_a_wheel_at_the_very_end_of_a_condition_fails_it(changes: dict[str, float], code: Code) -> None:
    sizes = {"projection/depth_mm": 1, "projection/depth_plus_minus_mm": 0, "disc/flatness_mm": 0}
    movement = movement_with(sizes | {f"star_wheel/{name}": value for name, value in changes.items()})

    assert code in [finding.code for finding in check(disc_of(movement, PLUCKS))]


def test_an_angle_says_when_the_lengths_behind_it_are_worth_less_than_its_margin() -> None:
    # at the least depth 1.26 the leaving angle is acos(2.49/3.2) = 38.91 deg, 8.91 over half a step;
    # an axis 0.5 deeper gives acos(2.99/3.2) = 20.88 deg: 18.03 less
    movement = movement_with({"star_wheel/axis_depth_mm": {"value": 3.75, "plus_minus": 0.5}})

    [finding] = step_reaches_the_next_point(disc_of(movement, PLUCKS))

    assert finding.code is Code.MARGIN_UNSURE
    assert "It holds by 8.911 deg, less than the ±18.0" in finding.message


def test_every_finding_has_a_place_or_speaks_of_the_whole_movement() -> None:
    movement = movement_with({"projection/width_mm": 3.2, "tracks/1/radius_mm": 52, "projection/depth_mm": 2.15})
    findings: tuple[Finding, ...] = check(disc_of(movement, [(1, 10.0), (2, 10.0), (1, 10.1)]))

    assert {finding.code for finding in findings} >= {Code.NEIGHBOUR_FOULED, Code.WEB_TOO_THIN, Code.REPEAT_TOO_SOON}
    for finding in findings:
        assert finding.message.endswith(".")
        assert finding.remedy
        assert all(math.isfinite(number) for number in (finding.measured, finding.limit) if number is not None)
