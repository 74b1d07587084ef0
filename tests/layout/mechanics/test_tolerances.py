"""Tolerance classes against published rows, and timing errors against worked examples."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents.making import ToleranceClass
from layout.mechanics.tolerances import limit_deviation_mm, place_error
from tests.layout.examples import LASER, cutter_with, movement_with


@pytest.mark.parametrize(
    ("tolerance_class", "thickness_mm", "row_mm"),
    [
        # modulusmetal.com, ISO 9013 thermal cutting dimensional tolerances; sizes 2, 5, 20, 80, 200 and 500 mm
        ("iso-9013-1", 0.5, (0.075, 0.10, 0.10, 0.20, 0.20, 0.30)),
        ("iso-9013-1", 1.0, (0.075, 0.10, 0.10, 0.20, 0.20, 0.30)),
        ("iso-9013-1", 1.5, (0.10, 0.15, 0.20, 0.25, 0.25, 0.35)),
        ("iso-9013-2", 0.8, (0.5, 0.6, 0.6, 0.7, 0.7, 0.8)),
        ("iso-9013-2", 3.15, (0.6, 0.6, 0.7, 0.7, 0.8, 0.9)),
        # ISO 2768-1:1989 table 1, as several shop copies print it; the same sizes
        ("iso-2768-f", 0.3, (0.05, 0.05, 0.1, 0.15, 0.2, 0.3)),
        ("iso-2768-m", 0.3, (0.1, 0.1, 0.2, 0.3, 0.5, 0.8)),
        ("iso-2768-c", 0.3, (0.2, 0.3, 0.5, 0.8, 1.2, 2.0)),
        ("iso-2768-v", 0.3, (None, 0.5, 1.0, 1.5, 2.5, 4.0)),
    ],
)
def test_a_class_gives_the_published_row(
    tolerance_class: ToleranceClass, thickness_mm: float, row_mm: tuple[float | None, ...]
) -> None:
    found = tuple(
        limit_deviation_mm(tolerance_class, nominal_mm, thickness_mm).deviation_mm
        for nominal_mm in (2.0, 5.0, 20.0, 80.0, 200.0, 500.0)
    )

    assert found == row_mm


def test_a_size_on_a_bound_is_of_the_larger_row_in_thermal_cutting_and_of_the_smaller_in_general() -> None:
    # ISO 9013: "3 up to but not including 10"; ISO 2768-1: "over 3 up to 6"
    assert limit_deviation_mm("iso-9013-1", 3.0, 0.5).deviation_mm == 0.10
    assert limit_deviation_mm("iso-9013-1", 35.0, 0.5).deviation_mm == 0.20
    assert limit_deviation_mm("iso-2768-m", 6.0, 0.5).deviation_mm == 0.1
    assert limit_deviation_mm("iso-2768-m", 30.0, 0.5).deviation_mm == 0.2
    assert limit_deviation_mm("iso-2768-m", 0.5, 0.5).deviation_mm == 0.1


@pytest.mark.parametrize(
    ("tolerance_class", "nominal_mm", "thickness_mm", "why"),
    [
        # iteh.ai catalogue, ISO 9013:2017: laser cuts of 0.5 to 32 mm
        ("iso-9013-1", 40.0, 0.49, "ISO 9013 covers laser cuts in sheet from 0.5 mm, not of 0.49 mm"),
        ("iso-9013-2", 40.0, 3.2, "ISO 9013 is held here for sheet up to 3.15 mm, not of 3.2 mm"),
        ("iso-9013-1", 1000.0, 0.5, "ISO 9013 is held here for sizes below 1000 mm, not for 1000 mm"),
        ("iso-2768-f", 0.4, 0.5, "ISO 2768-1 is held here for sizes from 0.5 to 1000 mm, not for 0.4 mm"),
        ("iso-2768-m", 1000.5, 0.5, "ISO 2768-1 is held here for sizes from 0.5 to 1000 mm, not for 1000.5 mm"),
        ("iso-2768-v", 3.0, 0.5, "ISO 2768-1 gives class v no value for 3 mm"),
    ],
)
def test_outside_its_scope_a_class_gives_no_number_and_says_why(
    tolerance_class: ToleranceClass, nominal_mm: float, thickness_mm: float, why: str
) -> None:
    found = limit_deviation_mm(tolerance_class, nominal_mm, thickness_mm)

    assert (found.deviation_mm, found.outside) == (None, why)


@given(
    classes=st.sampled_from([("iso-9013-1", "iso-9013-2"), ("iso-2768-f", "iso-2768-m"), ("iso-2768-m", "iso-2768-c")]),
    smaller_mm=st.floats(0.5, 999),
    larger_mm=st.floats(0.5, 999),
    thickness_mm=st.floats(0.5, 3.15),
)
def test_a_coarser_class_and_a_larger_size_are_never_held_closer(
    classes: tuple[ToleranceClass, ToleranceClass], smaller_mm: float, larger_mm: float, thickness_mm: float
) -> None:
    smaller_mm, larger_mm = sorted((smaller_mm, larger_mm))
    finer, coarser = (limit_deviation_mm(name, smaller_mm, thickness_mm).deviation_mm for name in classes)
    larger = limit_deviation_mm(classes[0], larger_mm, thickness_mm).deviation_mm

    assert finer is not None
    assert coarser is not None
    assert larger is not None
    assert finer <= coarser
    assert finer <= larger


def test_a_class_goes_by_the_radius_of_the_track() -> None:
    # 0.1 mm of class 1 below 35 mm, 0.2 above; at 60 s and 100 mm a track passes 10.472 mm a second
    movement = movement_with({"tracks/0/radius_mm": 34})
    cutter = cutter_with({"tolerance_class": "iso-9013-1"})

    inner, outer = place_error(movement, cutter, 0), place_error(movement, cutter, 2)

    assert (inner.position_mm, inner.placed_by) == (0.1, "iso-9013-1")
    assert (outer.position_mm, outer.placed_by, outer.class_outside) == (0.2, "iso-9013-1", None)
    assert inner.position_ms == pytest.approx(0.1 / (2 * math.pi * 34) * 60_000)
    assert outer.position_ms == pytest.approx(1000 * 0.2 / 10.471976, abs=1e-3)


def test_without_a_class_or_outside_it_the_position_tolerance_counts() -> None:
    thin = movement_with({"disc/thickness_mm": 0.4})

    plain = place_error(thin, LASER, 0)
    outside = place_error(thin, cutter_with({"tolerance_class": "iso-9013-1"}), 0)

    assert (plain.position_mm, plain.placed_by, plain.class_outside) == (0.05, "position_tolerance_mm", None)
    assert (outside.position_mm, outside.placed_by) == (0.05, "position_tolerance_mm")
    assert outside.class_outside == "ISO 9013 covers laser cuts in sheet from 0.5 mm, not of 0.4 mm"


def test_the_parts_of_the_error_add_up_in_the_worst_case_and_by_their_squares() -> None:
    # the hole is 0.2 wider than the spindle, so the disc lies up to 0.1 off: as much as a position error of 0.1
    movement = movement_with({"tracks/0/radius_mm": 40, "disc/centre_hole_play_mm": 0.2})
    cutter = cutter_with({"position_tolerance_mm": 0.1, "angle_tolerance_deg": 0.05})

    error = place_error(movement, cutter, 0)

    # 100 · 60 / (2π · 40) = 23.873 ms each; 60 000 / 7200 = 8.333 ms
    assert (error.position_ms, error.play_ms, error.angle_ms) == pytest.approx((23.873, 23.873, 8.333), abs=0.001)
    assert error.cut_ms == pytest.approx(32.207, abs=0.001)
    assert error.together_ms == pytest.approx(56.080, abs=0.001)
    # √(2 · 23.873² + 8.333²) = √(1139.84 + 69.44)
    assert error.root_square_ms == pytest.approx(34.775, abs=0.001)


def test_a_play_that_is_not_stated_is_not_counted() -> None:
    error = place_error(movement_with(), LASER, 0)

    assert error.play_ms is None
    assert error.together_ms == error.cut_ms


def test_the_play_moves_a_release_as_an_off_centre_disc_does() -> None:
    """The opponent: a disc turned about a point beside its centre, its release found by bisection."""
    radius_mm, turn_s, off_mm, past_mm = 40.0, 60.0, 0.1, 0.77
    movement = movement_with({"tracks/0/radius_mm": radius_mm, "disc/centre_hole_play_mm": 2 * off_mm})

    def released_at_s(off_rad: float | None) -> float:
        # a working edge at 180 degrees of a disc that turns clockwise; released where y falls to −past_mm
        low_s, high_s = turn_s / 4, turn_s * 3 / 4
        for _ in range(60):
            middle_s = (low_s + high_s) / 2
            turned = 2 * math.pi * middle_s / turn_s
            shift_mm = 0.0 if off_rad is None else off_mm * math.sin(off_rad - turned)
            above = radius_mm * math.sin(math.pi - turned) + shift_mm > -past_mm
            low_s, high_s = (middle_s, high_s) if above else (low_s, middle_s)
        return low_s

    true_s = released_at_s(None)
    worst_ms = max(abs(released_at_s(2 * math.pi * step / 360) - true_s) for step in range(360)) * 1000

    # to two parts in a thousand: the release lies 0.77/40 rad past the row, and the centre itself goes round
    assert worst_ms == pytest.approx(place_error(movement, LASER, 0).play_ms, rel=4e-3)


def test_depth_moves_no_release_but_takes_from_the_engagement() -> None:
    """The opponent: the passing face is moved by hand, at every depth, until it lets go of tooth and tip."""
    movement = movement_with({"star_wheel/release_angle_deg": 14})
    wheel_mm, axis_mm, step_rad, release_rad = 3.2, 3.75, math.pi / 3, math.radians(14)
    released_mm, met_mm, let_go_mm = [], [], []
    for depth_mm in (1.26, 1.36, 1.46, 1.56):  # 1.41 ± (0.05 of depth + 0.1 of flatness)
        places = [-3.2 + 0.0001 * step for step in range(64001)]
        held = [x for x in places if wheel_mm * math.cos(math.asin(min(x / wheel_mm, 1.0))) > axis_mm - depth_mm]
        let_go_mm.append(max(held))
        rests_rad = math.asin(max(held) / wheel_mm) - step_rad  # where the pass before left the next tip
        met_mm.append(wheel_mm * math.sin(rests_rad))
        released_mm.append(next(x for x in places if x >= met_mm[-1] and math.asin(x / wheel_mm) >= release_rad))

    error = place_error(movement, LASER, 0)

    assert max(released_mm) == min(released_mm) == pytest.approx(3.2 * math.sin(release_rad), abs=1e-4)
    assert error.depth_ms == 0.0
    worst_mm = min(min(let_go_mm) - released_mm[0], released_mm[0] - max(met_mm))
    assert error.engagement_mm == pytest.approx(worst_mm, abs=3e-4)
    # by hand: at 1.26 the tip is let go at acos(2.49/3.2) = 38.9 degrees, 3.2 · (sin 38.9° − sin 14°) = 1.236
    assert error.engagement_mm == pytest.approx(1.236, abs=0.002)


def test_measured_arcs_do_not_say_what_depth_does() -> None:
    measured = movement_with({"tracks/0/engagement_arc_mm": 3.2, "tracks/0/release_arc_mm": 0.5})

    error = place_error(measured, LASER, 0)

    assert (error.depth_ms, error.engagement_mm) == (None, None)


def test_a_depth_that_cannot_be_has_no_engagement() -> None:
    assert place_error(movement_with({"projection/depth_mm": 0.6}), LASER, 0).engagement_mm is None
