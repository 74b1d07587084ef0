"""The flat pattern against a small 3-D folding check and against numbers worked by hand."""

import math
from typing import Any

import numpy as np
import pytest
import shapely

from layout.mechanics.bending import bend_allowance_mm, neutral_fibre_factor
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import Pattern, Shape, pattern_of
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, movement_with

FERNHOLLOW, MOSSBROOK, TARNLIGHT = SHIPPED


def fold_flat_point(u_mm: float, tangent_mm: float, away: float, sizes: tuple[float, float]) -> tuple[float, float]:
    """Where a point of the tab's under face ends up, (u, z below the star side), after a 90 degree fold.

    The neutral fibre keeps its length; the sheet's star side is z = 0, the tab goes to z > 0.
    """
    radius_mm, thickness_mm = sizes
    allowance_mm = bend_allowance_mm(radius_mm, thickness_mm)
    along_mm = (u_mm - tangent_mm) * away
    if along_mm <= 0:
        return u_mm, 0.0
    bent = min(along_mm / allowance_mm, 1.0) * math.pi / 2
    # The centre of the bend lies one inside radius under the star side at the tangent line.
    straight_mm = max(along_mm - allowance_mm, 0.0)
    return (
        tangent_mm + away * radius_mm * math.sin(bent),
        radius_mm * (1 - math.cos(bent)) + straight_mm,
    )


@pytest.mark.parametrize("side", ["behind", "ahead"])
@pytest.mark.parametrize("movement", [FERNHOLLOW, MOSSBROOK, PLAIN], ids=lambda movement: movement.id)
def test_a_folded_tab_has_its_working_edge_at_zero_and_its_depth(movement: Any, side: str) -> None:
    cutter = cutter_with({"fold/fold_side": side})
    pattern = pattern_of(movement, cutter)
    radius_mm, thickness_mm = 0.4, movement.disc.thickness_mm
    away = -1.0 if side == "behind" else 1.0
    assert pattern.fold_line_mm is not None
    tangent_mm = float(pattern.fold_line_mm[0, 0]) - away * bend_allowance_mm(radius_mm, thickness_mm) / 2
    free_end_mm = tangent_mm + away * pattern.blank_length_mm

    inner_mm, depth_mm = fold_flat_point(free_end_mm, tangent_mm, away, (radius_mm, thickness_mm))

    # Folded behind, the inner face works; folded ahead, the outer face, one thickness further on.
    working_mm = inner_mm if side == "behind" else inner_mm + thickness_mm
    assert working_mm == pytest.approx(0.0, abs=1e-6)
    assert depth_mm == pytest.approx(movement.projection.depth_mm, abs=1e-6)


@pytest.mark.parametrize(
    ("movement", "along_mm", "across_mm", "free_end_mm"),
    [
        # k = 0.65 + 0.5 log10(0.4/0.5) = 0.60154; BA = pi/2 (0.4 + 0.60154 * 0.25) = 0.86455
        # L = 0.86455 + 1.41 - 0.4 = 1.87455; opening 1.87455 + 0.42 + 0.30 = 2.59455 by 1.2 + 2 * 0.42 = 2.04
        (FERNHOLLOW, 2.59455, 2.04, -1.47455),
        # k = 0.65 + 0.5 log10(0.4/0.6) = 0.56195; BA = pi/2 (0.4 + 0.56195 * 0.3) = 0.89313
        (MOSSBROOK, 2.76313, 1.94, -1.64313),
    ],
)
def test_the_opening_of_a_folded_projection_has_the_worked_size(
    movement: Any, along_mm: float, across_mm: float, free_end_mm: float
) -> None:
    pattern = pattern_of(movement, LASER)

    u_mm, v_mm = pattern.opening.points_mm.T
    assert np.ptp(u_mm) == pytest.approx(along_mm, abs=1e-5)
    assert np.ptp(v_mm) == pytest.approx(across_mm, abs=1e-9)
    assert u_mm.max() == pytest.approx(0.4 + 0.3)  # the relief runs 0.3 past the tangent line, at 0.4
    assert u_mm.min() == pytest.approx(free_end_mm - 0.42, abs=1e-5)


@pytest.mark.parametrize("side", ["behind", "ahead"])
@pytest.mark.parametrize("relief_width_mm", [None, 0.6])
@pytest.mark.parametrize("relief_mm", [0.0, 0.3])
def test_the_slit_is_the_opening_less_the_tab(side: str, relief_width_mm: float | None, relief_mm: float) -> None:
    changes = {"fold/fold_side": side, "fold/relief_width_mm": relief_width_mm, "fold/relief_mm": relief_mm}
    pattern = pattern_of(FERNHOLLOW, cutter_with(changes))
    assert pattern.cut is not None

    slit, opening = shapely.Polygon(pattern.cut.points_mm), shapely.Polygon(pattern.opening.points_mm)

    assert slit.is_valid
    assert opening.is_valid
    assert slit.exterior.is_ccw
    assert opening.exterior.is_ccw
    # the tab: 1.2 wide and 1.87455 long; it has that size whatever the slit
    tab = opening.difference(slit)
    assert tab.area == pytest.approx(1.2 * 1.8745447, abs=1e-6)
    assert slit.difference(opening).area == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("side", ["behind", "ahead"])
def test_an_open_slit_runs_half_a_kerf_outside_the_tab(side: str) -> None:
    cutter = cutter_with({"fold/slit": "centre-line", "fold/slit_width_mm": None, "fold/fold_side": side})
    pattern = pattern_of(FERNHOLLOW, cutter)
    assert pattern.cut is not None

    assert not pattern.cut.closed
    # the kerf is 0.12: the line at 0.6 + 0.06 to each side, the opening up to 0.6 + 0.12
    assert np.abs(pattern.cut.points_mm[:, 1]) == pytest.approx([0.66] * 4)
    assert np.abs(pattern.opening.points_mm[:, 1]).max() == pytest.approx(0.72)
    swept = shapely.LineString(pattern.cut.points_mm).buffer(0.06, cap_style="square", join_style="mitre")
    opening = shapely.Polygon(pattern.opening.points_mm)
    assert swept.difference(opening.buffer(1e-9)).area == pytest.approx(0.0, abs=1e-9)
    assert opening.difference(swept).area == pytest.approx(1.2 * 1.8745447, abs=1e-6)


def traced(points_mm: Any, bulges: Any) -> shapely.Polygon:
    """An outline with half circles, those in 2000 pieces, outwards of an anticlockwise outline."""
    ring: list[complex] = []
    corners = points_mm @ np.array([1, 1j])
    for start, end, bulge in zip(corners, np.roll(corners, -1), bulges, strict=True):
        steps = np.arange(2000 if bulge else 1) / 2000
        ring += list((start + end) / 2 + (start - end) / 2 * np.exp(1j * math.pi * steps) if bulge else [start])
    return shapely.Polygon([(z.real, z.imag) for z in ring])


ROUND = [{}, {"fold/relief_width_mm": 0.6}, {"fold/relief_mm": 0.0}, {"fold/relief_width_mm": 0.42}]


@pytest.mark.parametrize("side", ["behind", "ahead"])
@pytest.mark.parametrize("changes", ROUND, ids=["as wide as the slit", "wider", "of no length", "stated"])
def test_a_round_relief_runs_on_straight_and_ends_in_a_half_circle(side: str, changes: dict[str, Any]) -> None:
    changes = changes | {"fold/fold_side": side}
    square = pattern_of(FERNHOLLOW, cutter_with(changes))
    round_ended = pattern_of(FERNHOLLOW, cutter_with(changes | {"fold/relief_ends": "round"}))

    radius_mm = changes.get("fold/relief_width_mm", 0.42) / 2
    before, after = shapely.Polygon(square.opening.points_mm), traced(*corners_of(round_ended.opening))
    # Two half discs are cut beyond what square ends cut; they reach their radius farther past the tangent line.
    assert after.is_valid
    assert after.exterior.is_ccw
    assert after.area - before.area == pytest.approx(math.pi * radius_mm**2, abs=1e-6)
    assert before.difference(after.buffer(1e-9)).area == pytest.approx(0.0, abs=1e-9)
    (low, _, high, _), (round_low, _, round_high, _) = before.bounds, after.bounds
    grown = (round_high - high, low - round_low) if side == "behind" else (low - round_low, round_high - high)
    assert grown == pytest.approx((radius_mm, 0.0), abs=1e-6)
    # What is cut is still the opening less the tab, 1.2 by 1.8745447 folded behind.
    assert round_ended.cut is not None
    slit = traced(*corners_of(round_ended.cut))
    assert slit.is_valid
    assert slit.exterior.is_ccw
    assert after.difference(slit).area == pytest.approx(1.2 * 1.8745447, abs=1e-6)
    assert slit.difference(after.buffer(1e-9)).area == pytest.approx(0.0, abs=1e-9)
    assert round_ended.cut.points_mm[0] == pytest.approx(square.cut.points_mm[0] if square.cut else None)


def corners_of(shape: Shape) -> tuple[Any, Any]:
    return shape.points_mm, shape.bulges


@pytest.mark.parametrize("changes", ROUND, ids=["as wide as the slit", "wider", "of no length", "stated"])
def test_what_webs_are_measured_on_holds_the_round_reliefs_and_little_more(changes: dict[str, Any]) -> None:
    pattern = pattern_of(FERNHOLLOW, cutter_with(changes | {"fold/relief_ends": "round"}))

    core, opening = shapely.Polygon(pattern.core_points_mm), traced(*corners_of(pattern.opening))

    # Pieces of 22.5 degrees outside a circle reach 1/cos(11.25 deg) = 1.0196 of its radius.
    most_mm = 0.0196 * changes.get("fold/relief_width_mm", 0.42) / 2
    assert core.is_valid
    assert opening.difference(core).area == pytest.approx(0.0, abs=1e-9)
    assert 0 < shapely.hausdorff_distance(core, opening) <= most_mm + 1e-5


def test_square_reliefs_are_measured_as_they_are() -> None:
    pattern = pattern_of(FERNHOLLOW, LASER)

    assert np.array_equal(pattern.core_points_mm, pattern.opening.points_mm)


def test_an_open_slit_ends_as_round_as_its_beam() -> None:
    changes = {"fold/slit": "centre-line", "fold/slit_width_mm": None, "fold/relief_ends": "round"}
    pattern = pattern_of(FERNHOLLOW, cutter_with(changes))
    assert pattern.cut is not None

    # A beam of 0.12 along the line; corners are drawn sharp, its ends are half circles.
    line = shapely.LineString(pattern.cut.points_mm)
    swept = line.buffer(0.06, quad_segs=500, join_style="mitre")
    opening = traced(*corners_of(pattern.opening))
    assert opening.difference(swept).area == pytest.approx(1.2 * 1.8745447, abs=1e-6)
    assert swept.difference(opening).area == pytest.approx(0.0, abs=1e-6)


def test_a_cut_starts_as_far_from_the_working_edge_as_it_can() -> None:
    for pattern in (pattern_of(FERNHOLLOW, LASER), pattern_of(TARNLIGHT, LASER)):
        assert pattern.cut is not None
        distances = np.hypot(*pattern.cut.points_mm.T)
        assert distances[0] == pytest.approx(distances.max())


def test_a_slot_has_round_ends_and_its_trailing_end_is_the_working_edge() -> None:
    pattern = pattern_of(TARNLIGHT, LASER)

    # 2.2 long, 1.3 wide: centres of the ends at 0.65 and 1.55; a bulge of tan(180/4 deg) = 1 is a half circle
    assert sorted(pattern.core_points_mm[:, 0]) == pytest.approx([0.65, 1.55])
    assert pattern.core_round_mm == pytest.approx(0.65)
    assert sorted(pattern.opening.bulges) == pytest.approx([0, 0, 1, 1])
    assert outline_reach(pattern) == pytest.approx((0.0, 2.2))


def outline_reach(pattern: Pattern) -> tuple[float, float]:
    """Least and greatest u of a slot, from its vertices and the half circles between them."""
    core = pattern.core_points_mm[:, 0]
    return float(core.min() - pattern.core_round_mm), float(core.max() + pattern.core_round_mm)


def test_a_slot_as_long_as_wide_is_a_circle() -> None:
    movement = movement_with(
        {"star_wheel": {"engagement_arc_mm": 3, "release_arc_mm": 0.4, "thickness_mm": 0.4}}
        | {"projection": {"kind": "slot", "width_mm": 1.3, "length_mm": 1.3}}
    )

    pattern = pattern_of(movement, LASER)

    assert len(pattern.opening.points_mm) == 2
    assert pattern.opening.bulges == pytest.approx([1, 1])


@pytest.mark.parametrize(
    ("movement", "tool", "strike_mm"), [(FERNHOLLOW, "L12", -0.7), (MOSSBROOK, "L11", -0.8), (TARNLIGHT, "S22", 1.1)]
)
def test_a_press_strikes_with_the_tool_of_the_right_size(movement: Any, tool: str, strike_mm: float) -> None:
    pattern = pattern_of(movement, PRESS)

    assert pattern.tool == tool
    assert pattern.strike_u_mm == pytest.approx(strike_mm)
    assert pattern.cut is None


def test_a_lance_opens_its_footprint_round_the_strike_point() -> None:
    pattern = pattern_of(FERNHOLLOW, PRESS)

    # 2.3 by 1.6 centred at -0.7: from -1.85 to 0.45
    assert pattern.opening.points_mm.min(axis=0) == pytest.approx([-1.85, -0.8])
    assert pattern.opening.points_mm.max(axis=0) == pytest.approx([0.45, 0.8])


def test_the_frame_puts_u_along_the_travel_for_both_directions() -> None:
    points_mm = np.array([[1.0, 0.0], [0.0, 2.0]])  # one ahead, one outwards
    radius_mm, angle_rad = np.array([50.0]), np.array([0.0])

    clockwise = on_disc_mm(points_mm, radius_mm, angle_rad, 1)
    anticlockwise = on_disc_mm(points_mm, radius_mm, angle_rad, -1)

    # At +X a clockwise disc travels towards -Y, an anticlockwise one towards +Y; outwards is +X for both.
    np.testing.assert_allclose(clockwise[0], [[50, -1], [52, 0]])
    np.testing.assert_allclose(anticlockwise[0], [[50, 1], [52, 0]])


def test_a_factor_below_the_table_is_clamped_and_never_shortens_the_bend() -> None:
    assert neutral_fibre_factor(0.01, 1.0) == 0.0
    assert bend_allowance_mm(0.01, 1.0) == pytest.approx(math.pi / 2 * 0.01)


def test_standing_metal_reaches_as_far_behind_the_working_edge_as_leg_and_bend_are_thick() -> None:
    # Fernhollow: 0.5 mm sheet, folded round 0.4 mm. Behind its fold the leg alone trails the edge, its bend lies ahead;
    # ahead of it leg and bend do, 0.5 + 0.4 mm. A lance stands like the former, a slot does not stand.
    behind, ahead = (
        pattern_of(FERNHOLLOW, cutter_with({"fold/fold_side": side})).body_behind_mm for side in ("behind", "ahead")
    )

    assert (behind, ahead) == pytest.approx((0.5, 0.9))
    assert pattern_of(FERNHOLLOW, PRESS).body_behind_mm == 0.5
    assert pattern_of(TARNLIGHT, LASER).body_behind_mm == 0.0
