import math
from dataclasses import replace

import numpy as np
import pytest

from layout.documents import Movement
from layout.mechanics.openings import radial_reach_mm
from layout.mechanics.star_wheel import touch_zone_mm
from layout.mechanics.torque import torque_over_turn
from layout.place import place
from layout.play import play
from tests.layout.examples import LASER, PLAIN, SHIPPED, arrangement_of, disc_of, movement_with

MEASURED = movement_with({"id": "measured", "tracks/1/engagement_arc_mm": 2.9, "tracks/1/release_arc_mm": 0.4})


def test_projection_i_is_pluck_i() -> None:
    arrangement = arrangement_of([(3, 10.0), (1, 0.0), (2, 20.0)])

    disc = place(arrangement, PLAIN, LASER)

    # 30 deg before the music, then 6 deg a second
    np.testing.assert_allclose(np.degrees(disc.edge_angle_rad), [90, 30, 150])
    assert disc.radius_mm.tolist() == [100, 50, 60]


def test_no_plucks_give_a_disc_without_projections() -> None:
    disc = place(arrangement_of([]), PLAIN, LASER)

    assert disc.projection_count == 0
    assert len(play(disc).sounds_s) == 0


def test_the_metal_left_of_a_disc_is_worked_out_once_and_of_another_disc_anew() -> None:
    one = disc_of(PLAIN, [(1, 1.0), (3, 20.0)])
    other = replace(one, edge_angle_rad=np.zeros(2))

    assert one.metal_left is one.metal_left
    assert one.metal_left is not None
    assert other.metal_left is not None
    # Both openings on one line leave less of it than one alone, and as much of the rings.
    assert other.metal_left.line_mm < one.metal_left.line_mm - 1
    assert other.metal_left.ring_mm == pytest.approx(one.metal_left.ring_mm, abs=1e-4)
    assert disc_of(PLAIN, []).metal_left is None


def test_the_torque_of_a_disc_is_worked_out_once_and_of_another_disc_anew() -> None:
    movement = SHIPPED[1]
    one = disc_of(movement, [(5, 1.0), (20, 20.0)])
    other = replace(one, edge_angle_rad=np.ones(2))

    assert one.torque is one.torque
    assert one.torque is not None
    assert other.torque is not None
    sounds_s = one.turning.sounds_s(one.edge_angle_rad, one.track_index)
    told = torque_over_turn(movement, one.turning, one.track_index, sounds_s)
    assert told is not None
    assert (one.torque.peak_nmm, one.torque.peak_at_s) == (told.peak_nmm, told.peak_at_s)
    assert other.torque.peak_at_s > told.peak_at_s + 1
    assert disc_of(PLAIN, [(1, 1.0)]).torque is None


@pytest.mark.parametrize("movement", [*SHIPPED, MEASURED], ids=lambda movement: movement.id)
def test_a_disc_knows_the_reach_and_the_touch_zone_of_every_track(movement: Movement) -> None:
    disc = disc_of(movement, [(1, 1.0)])

    assert disc.reach_mm is disc.reach_mm
    assert list(disc.reach_mm) == radial_reach_mm(disc.turning, disc.pattern)
    zones_mm = [touch_zone_mm(movement, index) for index in range(len(movement.tracks))]
    assert disc.touch_zones_mm.tolist() == [list(zone) for zone in zones_mm]


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_moving_one_note_moves_one_projection_and_nothing_else(movement: Movement) -> None:
    plucks = [(1, 2.0), (5, 2.0), (9, 11.5), (17, 30.0)]
    moved = [(1, 2.0), (5, 2.0), (9, 11.75), (17, 30.0)]

    before = place(arrangement_of(plucks), movement, LASER)
    after = place(arrangement_of(moved), movement, LASER)

    turned = np.angle(np.exp(1j * (after.edge_angle_rad - before.edge_angle_rad)))
    expected = after.turning.direction * 2 * math.pi * 0.25 / after.movement.revolution_s
    np.testing.assert_allclose(turned, [0, 0, expected, 0], atol=1e-12)


def test_a_damped_tooth_is_silent_while_its_damper_is_touched() -> None:
    # damper arc 1 mm on radius 50 at 60 s a turn: 60 / (2 pi 50) = 0.190986 s
    plucks = play(disc_of(PLAIN, [(1, 5.0)]))

    assert plucks.sounds_s[0] - plucks.silent_from_s[0] == pytest.approx(0.190986, abs=1e-6)


def test_an_undamped_tooth_is_never_silenced() -> None:
    plucks = play(disc_of(movement_with({"teeth/0/damped": False}), [(1, 5.0)]))

    assert plucks.silent_from_s[0] == plucks.sounds_s[0]
