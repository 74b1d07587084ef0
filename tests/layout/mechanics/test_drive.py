"""Torque and window of lifted teeth, by hand and by the work they do."""

import math
from typing import Any

import pytest

from layout.mechanics.drive import lifts_of
from layout.mechanics.turning import turning_of
from tests.layout.arrange.small_comb import SMALL_COMB, comb_with


def comb_of_one(radius_mm: float = 45.0, offset_mm: float = 0.0, **tooth: Any) -> Any:
    return comb_with(
        {
            "gantry_offset_mm": offset_mm,
            "tracks": [{"track": 1, "radius_mm": radius_mm}],
            "teeth": [{"tooth": 1, "track": 1, "pitch": "C4", "stiffness_n_per_mm": 1.6, "lift_mm": 0.35, **tooth}],
        }
    )


def test_a_tooth_of_1_6_n_per_mm_lifted_0_35_mm_at_45_mm_loads_25_2_nmm() -> None:
    movement = comb_of_one()

    lifts = lifts_of(movement, turning_of(movement))

    assert lifts is not None
    [[lift]] = lifts
    assert lift.peak_nmm == pytest.approx(25.2)  # 1.6 · 0.35 · 45
    assert lift.window_s == pytest.approx(0.35 * 60 / (2 * math.pi * 45))  # q·T/(2πr) = 74.3 ms


def test_a_row_beside_the_centre_has_a_shorter_arm() -> None:
    # d = 27 at r = 45: cos δ = 0.8, so the arm is 36 mm: 1.6 · 0.35 · 36 = 20.16 N·mm, and a window by 1/0.8 longer.
    movement = comb_of_one(offset_mm=27.0)

    lifts = lifts_of(movement, turning_of(movement))

    assert lifts is not None
    [[lift]] = lifts
    assert lift.peak_nmm == pytest.approx(20.16)
    assert lift.window_s == pytest.approx(0.35 * 60 / (2 * math.pi * 36))


@pytest.mark.parametrize(("radius_mm", "offset_mm"), [(30.0, 0.0), (45.0, 27.0), (100.0, -40.0)])
def test_the_disc_does_the_work_the_spring_stores(radius_mm: float, offset_mm: float) -> None:
    # Torque rising evenly over the window at 2π/T: peak/2 · window · 2π/T = k·q²/2 (Hooke).
    movement = comb_of_one(radius_mm, offset_mm)

    lifts = lifts_of(movement, turning_of(movement))

    assert lifts is not None
    [[lift]] = lifts
    assert lift.peak_nmm / 2 * lift.window_s * 2 * math.pi / 60 == pytest.approx(1.6 * 0.35**2 / 2)


def test_teeth_that_are_not_usable_lift_nothing() -> None:
    teeth = [{**tooth, "stiffness_n_per_mm": 1.0, "lift_mm": 0.2} for tooth in SMALL_COMB["teeth"]]
    movement = comb_with({"teeth": teeth})

    lifts = lifts_of(movement, turning_of(movement))

    assert lifts is not None
    assert [len(track) for track in lifts] == [1, 1, 1, 1, 1, 0]


@pytest.mark.parametrize("unstated", [{"stiffness_n_per_mm": None}, {"lift_mm": None}])
def test_one_usable_tooth_without_a_number_leaves_the_load_unknown(unstated: dict[str, Any]) -> None:
    movement = comb_of_one(45.0, 0.0, **unstated)

    assert lifts_of(movement, turning_of(movement)) is None
