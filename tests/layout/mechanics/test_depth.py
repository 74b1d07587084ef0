"""The flatness a movement bears, by hand and against the checks of the star wheel."""

from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import Level
from layout.check.star_wheel import (
    depth_stays_off_the_root,
    star_clears_the_disc,
    star_is_reached,
    step_ends_at_the_next_point,
    step_reaches_the_next_point,
    tip_clears_the_bend,
    tooth_is_released,
)
from layout.mechanics.depth import depth_band
from tests.layout.examples import LASER, PLAIN, SHIPPED, disc_of, movement_with
from tests.thorough import tried

CHECKS = (
    star_clears_the_disc,
    star_is_reached,
    step_reaches_the_next_point,
    step_ends_at_the_next_point,
    tip_clears_the_bend,
    depth_stays_off_the_root,
    tooth_is_released,
)


def failing(changes: dict[str, Any]) -> set[str]:
    disc = disc_of(movement_with(changes), [(1, 10.0)], LASER)
    found = [finding for one_check in CHECKS for finding in one_check(disc)]
    return {finding.code.value for finding in found if finding.level is Level.ERROR}


def test_the_plain_movement_bears_the_flatness_reckoned_by_hand() -> None:
    band = depth_band(PLAIN, 0.4)

    # 1.41 ± (0.05 + 0.1). The tips come 3.75 − 3.2 = 0.55 under the sheet, the fold is round up to 0.4: 0.15 is left.
    assert band is not None
    assert (band.least_mm, band.most_mm) == pytest.approx((1.26, 1.56))
    assert band.flatness_limit_mm == pytest.approx(0.15)
    assert band.ended_by == "tip-in-bend"


def test_what_is_not_folded_is_ended_by_the_step() -> None:
    band = depth_band(PLAIN, None)

    # A step of 60°, half of it at 3.75 − 3.2·cos 30° = 0.978719: 1.41 − 0.05 − 0.978719.
    assert band is not None
    assert band.flatness_limit_mm == pytest.approx(0.381281)
    assert band.ended_by == "step-too-short"


def test_a_movement_that_fails_on_a_flat_sheet_has_no_room() -> None:
    band = depth_band(movement_with({"projection/depth_mm": 0.9}), None)

    assert band is not None
    assert band.flatness_limit_mm == pytest.approx(0.9 - 0.05 - 0.978719, abs=1e-6)


def test_slots_have_no_depth_and_measured_arcs_no_limit() -> None:
    arcs = {"star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.4}}

    measured = depth_band(movement_with(arcs), 0.4)

    assert depth_band(SHIPPED[2], 0.4) is None
    assert measured is not None
    assert (measured.flatness_limit_mm, measured.ended_by) == (None, None)
    assert (measured.least_mm, measured.most_mm) == pytest.approx((1.26, 1.56))


@settings(deadline=None, max_examples=tried(200))
@given(
    points=st.integers(4, 10),
    axis_mm=st.floats(3.3, 4.4),
    depth_mm=st.floats(0.6, 2.0),
    root_mm=st.floats(0.8, 2.4),
    release_deg=st.floats(-20, 40),
)
def test_no_condition_fails_below_the_limit_and_the_one_named_fails_above_it(
    points: int, axis_mm: float, depth_mm: float, root_mm: float, release_deg: float
) -> None:
    changes: dict[str, Any] = {
        "star_wheel/points": points,
        "star_wheel/axis_depth_mm": axis_mm,
        "star_wheel/root_radius_mm": root_mm,
        "star_wheel/release_angle_deg": release_deg,
        "projection/depth_mm": depth_mm,
    }
    band = depth_band(movement_with(changes), 0.4)
    assert band is not None
    assert band.flatness_limit_mm is not None
    limit_mm = band.flatness_limit_mm

    if limit_mm > 2e-6:
        assert failing(changes | {"disc/flatness_mm": limit_mm - 1e-6}) == set()
    if limit_mm > -1e-6:
        assert band.ended_by in failing(changes | {"disc/flatness_mm": limit_mm + 2e-6})
    else:
        assert failing(changes | {"disc/flatness_mm": 0.0})


@pytest.mark.parametrize("movement", SHIPPED[:2], ids=lambda movement: movement.id)
def test_a_shipped_movement_bears_more_than_the_flatness_it_states(movement: Any) -> None:
    band = depth_band(movement, 0.4)

    assert band is not None
    assert band.flatness_limit_mm is not None
    assert band.flatness_limit_mm > movement.disc.flatness_mm > 0
