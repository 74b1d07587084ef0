"""Springs, trains and brakes against worked examples, and one winding run down by hand."""

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import shipped_movement
from layout.documents.drive import Spring, Winding
from layout.mechanics.winding import (
    DiscLoad,
    WoundDrive,
    braked_revolution_s,
    gear_ratio,
    run_down,
    spring_rate_nmm_per_rad,
    steady_turns,
    wound_drive_of,
)

# A spring of 100/2π N mm a radian is one of 100 N mm a turn: 1000 N mm at 10 turns, of which four are used. The disc
# turns twice for one of the barrel, at 80 %: 1000 · 0.8 / 2 = 400 N mm at the disc, and 40/2 = 20 N mm less every turn
# of the disc. After 4 · 2 = 8 turns 240 N mm are left.
EASY = WoundDrive(
    rate_nmm_per_rad=100 / (2 * math.pi),
    wound_count=10,
    usable_count=4,
    train_ratio=2,
    efficiency_factor=0.8,
    friction_nmm=30,
)
LIGHT = DiscLoad(peak_nmm=100, mean_nmm=10)


def winding_of(**changes: object) -> Winding:
    spring = Spring(
        elastic_modulus_n_per_mm2=206_000, width_mm=10, thickness_mm=0.4, length_mm=2000, wound_turns=8, usable_turns=5
    )
    return Winding.model_validate({"spring": spring, "barrel_to_disc": (2.0,), **changes})


def test_a_flat_spiral_spring_gives_the_torque_of_the_worked_example() -> None:
    # M = E·b·h³·φ/(12·L) (handbooks of spring design): E 206 000, b 10, h 0.4, L 2000 mm give 5.49333 N mm a radian,
    # 34.5156 N mm a turn, and 276.125 N mm at 8 turns.
    winding = winding_of()

    assert spring_rate_nmm_per_rad(winding) == pytest.approx(5.49333, abs=5e-6)
    assert wound_drive_of(winding).rate_nmm_per_rad * 2 * math.pi == pytest.approx(34.5156, abs=5e-5)
    full = replace(wound_drive_of(winding), train_ratio=1.0)
    assert full.at_disc_nmm(0.0) == pytest.approx(276.125, abs=5e-4)


def test_the_work_of_a_spring_is_half_its_torque_times_its_angle() -> None:
    # U = M·φ/2 = 6.940 J for 8 turns of the same example: what the disc gets, all turns of the spring summed.
    drive = replace(wound_drive_of(winding_of()), train_ratio=3.0)
    turns = [turn / 100 for turn in range(8 * 3 * 100)]

    work_nmm = sum(drive.at_disc_nmm(turn + 0.005) * 2 * math.pi / 100 for turn in turns)

    assert work_nmm / 1000 == pytest.approx(6.940, abs=5e-4)


@pytest.mark.parametrize(
    ("stages", "ratio"),
    [
        # The ratio of a train is the product of its stages (common practice).
        ((4, 4), 16),
        ((2.75, 5.75), 15.8125),
        ((2.75, 5.75, 6.3), 99.61875),
        ((2.75, 5.75, 6.3, 24), 2390.85),
        ((), 1),
    ],
)
def test_the_ratio_of_a_train_is_the_product_of_its_stages(stages: tuple[float, ...], ratio: float) -> None:
    assert gear_ratio(stages) == pytest.approx(ratio, rel=1e-12)


def test_an_air_brake_lets_the_speed_follow_the_root_of_the_torque() -> None:
    # An air brake's drag grows with ω² (fluid mechanics: ½·density·Cd·A·v²), so ω follows √torque: a tenth less torque
    # is 5.13 % less speed, half of it 29.3 %.
    free = replace(EASY, friction_nmm=0.0)
    nothing = DiscLoad(peak_nmm=0.0, mean_nmm=0.0)

    # Of 10 turns wound, 1 is a tenth of the torque and 5 are half of it.
    tenth = run_down(replace(free, usable_count=1), nothing, 60.0)
    half = run_down(replace(free, usable_count=5), nothing, 60.0)

    assert tenth.winding_slows_ratio == pytest.approx(0.0513, abs=5e-5)
    assert half.winding_slows_ratio == pytest.approx(0.293, abs=2e-4)


def test_a_winding_ends_with_the_turns_of_its_barrel() -> None:
    run = run_down(EASY, LIGHT, 60.0)

    assert (run.turn_count, run.ended_by) == (8, "barrel")
    assert (run.full_nmm, run.spent_nmm, run.needed_nmm) == (pytest.approx(400), pytest.approx(240), 130)
    # Left for the brake: 400 − 30 − 10 = 360 at first, 220 and 200 about the last turn, 280 in the middle.
    assert run.winding_slows_ratio == pytest.approx(1 - math.sqrt(200 / 360))
    assert run.last_turn_slows_ratio == pytest.approx(1 - math.sqrt(200 / 220))
    assert run.first_revolution_s == pytest.approx(60 * math.sqrt(280 / 360))
    assert run.last_revolution_s == pytest.approx(60 * math.sqrt(280 / 200))


def test_a_winding_ends_before_where_the_torque_no_longer_carries_the_heaviest_chord() -> None:
    # 30 + 290 = 320 N mm are reached after (400 − 320)/20 = 4 turns.
    run = run_down(EASY, DiscLoad(peak_nmm=290, mean_nmm=10), 60.0)

    assert run.turn_count == pytest.approx(4)
    assert run.ended_by == "load"
    assert run.spent_nmm == pytest.approx(run.needed_nmm) == pytest.approx(320)


def test_a_chord_that_a_full_spring_does_not_carry_leaves_no_turn() -> None:
    run = run_down(EASY, DiscLoad(peak_nmm=371, mean_nmm=10), 60.0)

    assert (run.turn_count, run.ended_by) == (0, "load")
    assert (run.last_turn_slows_ratio, run.winding_slows_ratio) == (0, 0)


def test_friction_above_all_torque_stops_the_disc_and_no_number_is_lost() -> None:
    run = run_down(replace(EASY, friction_nmm=500), LIGHT, 60.0)

    assert (run.turn_count, run.winding_slows_ratio, run.last_revolution_s) == (0, 0, None)


def test_a_part_of_a_turn_is_judged_as_the_last_where_there_is_no_whole_one() -> None:
    # Half a turn: from 360 to 350.
    run = run_down(replace(EASY, usable_count=0.25), LIGHT, 60.0)

    assert run.turn_count == pytest.approx(0.5)
    assert run.last_turn_slows_ratio == pytest.approx(1 - math.sqrt(350 / 360))


def test_the_last_whole_turn_counts_and_not_the_part_left_over() -> None:
    # 3.3 turns of the barrel are 6.6 of the disc; the sixth goes from 360 − 5 · 20 = 260 to 240.
    run = run_down(replace(EASY, usable_count=3.3), LIGHT, 60.0)

    assert run.last_turn_slows_ratio == pytest.approx(1 - math.sqrt(240 / 260))


@given(
    wound=st.floats(1, 30),
    used=st.floats(0.05, 1),
    ratio=st.floats(0.3, 20),
    friction=st.floats(0, 300),
    peak=st.floats(0, 300),
)
def test_at_the_end_of_a_winding_the_torque_still_carries_its_load(
    wound: float, used: float, ratio: float, friction: float, peak: float
) -> None:
    drive = replace(EASY, wound_count=wound, usable_count=wound * used, train_ratio=ratio, friction_nmm=friction)

    run = run_down(drive, DiscLoad(peak_nmm=peak, mean_nmm=peak / 10), 60.0)

    assert 0 <= run.turn_count <= wound * used * ratio * (1 + 1e-9)
    if run.turn_count:
        assert run.spent_nmm >= run.needed_nmm - 1e-6
    if run.ended_by == "load" and run.turn_count:
        assert run.spent_nmm == pytest.approx(run.needed_nmm, abs=1e-6)


def test_turns_that_hold_the_tempo_are_counted_from_the_full_spring() -> None:
    # Turn k goes from 360 − 20·(k − 1) to 20 less: √(1 − 20/260) loses 3.92 %, √(1 − 20/240) loses 4.26 %.
    lost = [1 - math.sqrt((360 - 20 * turn) / (380 - 20 * turn)) for turn in range(1, 9)]

    assert steady_turns(EASY, LIGHT, 0.04) == sum(share <= 0.04 for share in lost) == 6
    assert steady_turns(EASY, LIGHT, 0.01) == 0


def test_what_a_winding_does_not_state_is_left_aside() -> None:
    drive = wound_drive_of(winding_of())

    assert (drive.efficiency_factor, drive.friction_nmm, drive.train_ratio) == (1, 0, 2)
    stated = wound_drive_of(winding_of(efficiency=0.7, friction_nmm=12.0, barrel_to_disc=(2.0, 1.5)))
    assert (stated.efficiency_factor, stated.friction_nmm, stated.train_ratio) == (0.7, 12, 3)


def test_brake_and_train_give_the_turn() -> None:
    # 2390.85 turns of the brake a turn of the disc, at 26.565 a second: 90 s.
    winding = winding_of(disc_to_brake=(2.75, 5.75, 6.3, 24), brake_turns_per_s=26.565)

    assert braked_revolution_s(winding) == pytest.approx(90.0)


@pytest.mark.parametrize("changes", [{"brake_turns_per_s": 20}, {"disc_to_brake": (8.0, 10.0)}, {}])
def test_without_brake_or_train_to_it_the_turn_is_not_known(changes: dict[str, object]) -> None:
    assert braked_revolution_s(winding_of(**changes)) is None


def test_the_shipped_spring_is_one_that_can_be_made() -> None:
    # Its stress, 6·M/(b·h²) (handbooks of spring design), below 1500 N/mm²: spring strip holds more (from memory).
    movement = shipped_movement("mossbrook-67")
    assert movement.drive is not None
    assert movement.drive.winding is not None
    spring = movement.drive.winding.spring

    torque_nmm = spring_rate_nmm_per_rad(movement.drive.winding) * spring.wound_turns * 2 * math.pi
    assert 6 * torque_nmm / (spring.width_mm * spring.thickness_mm**2) < 1500
    # Run down it still carries friction, the torque limit and the surplus that starts the disc: 60 + 500 + 120.
    drive = wound_drive_of(movement.drive.winding)
    assert drive.at_disc_nmm(4 * 2.75) > 680
