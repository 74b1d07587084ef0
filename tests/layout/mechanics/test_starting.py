"""The start, held against numerical integration of its equation of motion and against the shipped drive by hand."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import shipped_movement
from layout.mechanics.starting import inertia_at_disc_kg_m2, starting_of
from tests.layout.examples import PLAIN, movement_with

# One turn in 60 s is 0.10472 rad/s.
DRIVEN = {
    "drive/surplus_torque_nmm": 50,
    "drive/disc_inertia_kg_m2": 0.02,
    "drive/train": [{"inertia_kg_m2": 2e-7, "ratio": 1000}, {"inertia_kg_m2": 5e-5, "ratio": 40}],
}
STEPS = 4000


def integrated(inertia_kg_m2: float, torque_nm: float, full_rad_per_s: float, for_s: float) -> tuple[float, float]:
    """Speed and angle after so long from rest, by the classical Runge-Kutta rule of fourth order."""
    step_s = for_s / STEPS

    def accelerated(speed: float) -> float:
        return torque_nm * (1 - (speed / full_rad_per_s) ** 2) / inertia_kg_m2

    speed = angle = 0.0
    for _ in range(STEPS):
        first = accelerated(speed)
        second = accelerated(speed + step_s / 2 * first)
        third = accelerated(speed + step_s / 2 * second)
        fourth = accelerated(speed + step_s * third)
        # The angle's slopes are the speeds at the same four places.
        angle += step_s * speed + step_s**2 / 6 * (first + second + third)
        speed += step_s / 6 * (first + 2 * second + 2 * third + fourth)
    return speed, angle


def test_the_shipped_drive_starts_as_worked_out_by_hand() -> None:
    movement = shipped_movement("mossbrook-67")

    starting = starting_of(movement, movement.revolution_s)

    assert starting is not None
    assert starting.inertia_kg_m2 == pytest.approx(0.6555)  # 0.0155 + 1.6e-7 · 2000²
    assert starting.time_constant_s == pytest.approx(0.38135, abs=1e-5)  # 0.6555 · (2π/90) / 0.120
    assert starting.to_speed_s == pytest.approx(2.6467 * 0.38135, abs=1e-4)  # atanh 0.99 = 2.64665
    assert math.degrees(starting.to_speed_rad) == pytest.approx(1.95852 * 4 * 0.38135, abs=1e-4)  # −½·ln(1 − 0.99²)
    assert not starting.at_least


@given(
    torque_nmm=st.floats(1, 5000),
    disc_kg_m2=st.floats(1e-4, 2),
    part_kg_m2=st.floats(1e-9, 1e-4),
    turn=st.floats(5, 300),
)
def test_the_start_is_what_integrating_its_equation_gives(
    torque_nmm: float, disc_kg_m2: float, part_kg_m2: float, turn: float
) -> None:
    movement = movement_with(
        {
            "drive/surplus_torque_nmm": torque_nmm,
            "drive/disc_inertia_kg_m2": disc_kg_m2,
            "drive/train": [{"inertia_kg_m2": part_kg_m2, "ratio": 300}],
        }
    )

    starting = starting_of(movement, turn)

    assert starting is not None
    full = 2 * math.pi / turn
    speed, angle = integrated(disc_kg_m2 + part_kg_m2 * 90_000, torque_nmm / 1000, full, starting.to_speed_s)
    assert speed == pytest.approx(0.99 * full, rel=1e-6)
    assert angle == pytest.approx(starting.to_speed_rad, rel=1e-6)


def test_twice_the_speed_takes_twice_the_time_and_four_times_the_angle() -> None:
    movement = movement_with(DRIVEN)

    slow, fast = starting_of(movement, 60.0), starting_of(movement, 30.0)

    assert slow is not None
    assert fast is not None
    assert fast.to_speed_s == pytest.approx(2 * slow.to_speed_s)
    assert fast.to_speed_rad == pytest.approx(4 * slow.to_speed_rad)


def test_every_part_of_the_train_counts_with_the_square_of_its_ratio() -> None:
    # 0.02 + 2e-7 · 1000² + 5e-5 · 40² = 0.02 + 0.2 + 0.08
    assert inertia_at_disc_kg_m2(movement_with(DRIVEN)) == pytest.approx(0.3)


@pytest.mark.parametrize(
    ("unstated", "inertia_kg_m2"), [({"drive/train": None}, 0.02), ({"drive/disc_inertia_kg_m2": None}, 0.28)]
)
def test_what_is_not_stated_of_the_inertia_makes_it_a_least(unstated: dict[str, None], inertia_kg_m2: float) -> None:
    starting = starting_of(movement_with(DRIVEN | unstated), 60.0)

    assert starting is not None
    assert starting.inertia_kg_m2 == pytest.approx(inertia_kg_m2)
    assert starting.at_least


@pytest.mark.parametrize(
    "changes",
    [
        DRIVEN | {"drive/surplus_torque_nmm": None},
        DRIVEN | {"drive/disc_inertia_kg_m2": None, "drive/train": None},
    ],
)
def test_without_torque_or_any_inertia_the_start_is_not_known(changes: dict[str, object]) -> None:
    assert starting_of(movement_with(changes), 60.0) is None


def test_without_a_drive_the_start_is_not_known() -> None:
    assert starting_of(PLAIN, 60.0) is None
    assert inertia_at_disc_kg_m2(PLAIN) is None
