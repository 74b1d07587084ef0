"""What the report says of the drive, and what it names as not stated."""

from typing import Any

import pytest

from layout.documents import shipped_movement
from layout.report.driving import driving_of
from layout.report.report import Driving, Loaded
from tests.layout.examples import PLAIN, disc_of, movement_with

# 2 N/mm · 0.5 mm is 1 N at the release: 50, 60 and 100 N mm on the three tracks.
LIFTED = {
    f"teeth/{index}/{name}": value
    for index in range(3)
    for name, value in {"stiffness_n_per_mm": 2.0, "lift_mm": 0.5}.items()
}
SPRING = {
    "elastic_modulus_n_per_mm2": 206_000,
    "width_mm": 20,
    "thickness_mm": 0.5,
    "length_mm": 2000,
    "wound_turns": 10,
    "usable_turns": 4,
}


def driven(changes: dict[str, Any], plucks: list[tuple[int, float]]) -> Driving:
    return driving_of(disc_of(movement_with(changes), plucks))


def test_a_shipped_drive_states_all_there_is_to_tell() -> None:
    driving = driving_of(disc_of(shipped_movement("mossbrook-67"), [(10, 5.0), (20, 5.0)]))

    assert driving.not_stated == ()
    assert not driving.upper_bound
    assert None not in (driving.starting, driving.starting_fastest, driving.torque, driving.winding)
    assert driving.peak_chord == (Loaded(track=10, pitch="C4"), Loaded(track=20, pitch="G4"))
    assert driving.clearing_count == 2


def test_a_movement_without_a_drive_has_its_absence_named_once() -> None:
    driving = driving_of(disc_of(PLAIN, [(1, 5.0)]))

    assert driving.not_stated == ("drive", "teeth.stiffness_n_per_mm", "teeth.lift_mm")
    assert (driving.starting, driving.torque, driving.winding, driving.braked_revolution_s) == (None,) * 4


@pytest.mark.parametrize(
    ("changes", "not_stated"),
    [
        (
            {"drive": {}},
            (
                *("drive.torque_limit_nmm", "drive.surplus_torque_nmm", "drive.disc_inertia_kg_m2"),
                *("drive.train", "drive.winding"),
            ),
        ),
        (
            {
                "drive": {
                    "torque_limit_nmm": 1,
                    "surplus_torque_nmm": 1,
                    "disc_inertia_kg_m2": 1,
                    "train": [{"inertia_kg_m2": 1, "ratio": 1}],
                    "winding": {"spring": SPRING, "barrel_to_disc": [2]},
                }
            },
            (
                *("drive.winding.efficiency", "drive.winding.friction_nmm"),
                *("drive.winding.disc_to_brake", "drive.winding.brake_turns_per_s"),
            ),
        ),
    ],
)
def test_every_field_left_out_is_named(changes: dict[str, Any], not_stated: tuple[str, ...]) -> None:
    assert driven(LIFTED | changes, [(1, 5.0)]).not_stated == not_stated


def test_a_tooth_that_is_not_usable_need_not_state_anything() -> None:
    changes = LIFTED | {"teeth/2/usable": False, "teeth/2/lift_mm": None}

    assert driven(changes, [(1, 5.0)]).not_stated == ("drive",)
    assert driven(LIFTED | {"teeth/2/lift_mm": None}, [(1, 5.0)]).not_stated == ("drive", "teeth.lift_mm")


@pytest.mark.parametrize("unstated", ["efficiency", "friction_nmm", "teeth"])
def test_a_winding_that_leaves_something_aside_is_an_upper_bound(unstated: str) -> None:
    winding = {"spring": SPRING, "barrel_to_disc": [2], "efficiency": 0.8, "friction_nmm": 10}
    changes = {name: value for name, value in LIFTED.items() if not name.startswith(unstated)}
    whole = driven(LIFTED | {"drive": {"winding": dict(winding)}}, [(1, 5.0)])
    winding.pop(unstated, None)

    part = driven(changes | {"drive": {"winding": winding}}, [(1, 5.0)])

    assert not whole.upper_bound
    assert part.upper_bound
    assert whole.winding is not None
    assert part.winding is not None
    surplus_nmm = [run.full_nmm - run.needed_nmm for run in (whole.winding, part.winding)]
    assert surplus_nmm[0] < surplus_nmm[1]


def test_a_disc_without_projections_has_no_torque_and_nothing_to_clear() -> None:
    driving = driven(LIFTED | {"drive": {"winding": {"spring": SPRING, "barrel_to_disc": [2]}}}, [])

    assert (driving.torque, driving.peak_chord, driving.clearing_count) == (None, (), 0)
    assert driving.winding is not None
    assert driving.winding.needed_nmm == 0
