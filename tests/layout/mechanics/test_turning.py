import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import Movement
from layout.mechanics.turning import turning_of
from tests.layout.examples import SHIPPED, movement_with


def edge_deg(movement: Movement, sounds_s: float, track: int) -> float:
    angle = turning_of(movement).edge_angle_rad(np.array([sounds_s]), np.array([track - 1]))
    return math.degrees(float(angle[0]))


# The plain movement turns 6 deg a second from 30 deg. At 10 s it has turned 30 + 60 = 90 deg: a quarter turn.
@pytest.mark.parametrize(
    ("changes", "expected_deg"),
    [
        # clockwise, released on the row: the edge that is at +X after 90 deg clockwise lies at +90 deg
        ({}, 90.0),
        # anticlockwise: it lies at -90 deg
        ({"turns": "anticlockwise"}, 270.0),
        # released at R sin 30 deg = 1.6 mm past the row; clockwise travel is downwards, y = -1.6 on radius 100:
        # asin(-1.6/100) = -0.91677 deg
        ({"star_wheel/release_angle_deg": 30}, 90.0 - 0.9167735),
        # the same anticlockwise: travel is upwards, y = +1.6
        ({"star_wheel/release_angle_deg": 30, "turns": "anticlockwise"}, 270.0 + 0.9167735),
        # the row 5 mm above the centre: asin(5/100) = 2.86598 deg, for both directions
        ({"gantry_offset_mm": 5}, 90.0 + 2.8659840),
        ({"gantry_offset_mm": 5, "turns": "anticlockwise"}, 270.0 + 2.8659840),
        # both: y = 5 - 1.6 = 3.4 clockwise, asin 0.034 = 1.94845 deg; y = 5 + 1.6 = 6.6, asin 0.066 = 3.78427 deg
        ({"gantry_offset_mm": 5, "star_wheel/release_angle_deg": 30}, 90.0 + 1.9484323),
        (
            {"gantry_offset_mm": 5, "star_wheel/release_angle_deg": 30, "turns": "anticlockwise"},
            270.0 + 3.7842722,
        ),
    ],
)
def test_a_note_at_a_quarter_turn_lies_where_the_closed_form_says(changes: dict[str, Any], expected_deg: float) -> None:
    assert edge_deg(movement_with(changes), 10.0, track=3) == pytest.approx(expected_deg, abs=2e-6)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("sounds_s", [0.0, 7.3, 29.99])
def test_a_turning_disc_brings_the_edge_to_its_release_at_its_moment(movement: Movement, sounds_s: float) -> None:
    # A small simulation: turn the disc as a person would see it, and note when the edge's y crosses the
    # release line on the side of the star wheels. It knows nothing of asin or of alpha's formula.
    turning = turning_of(movement)
    for index in range(0, len(movement.tracks), 5):
        alpha = float(turning.edge_angle_rad(np.array([sounds_s]), np.array([index]))[0])
        radius_mm = movement.tracks[index].radius_mm
        sign = 1 if movement.turns == "clockwise" else -1
        line_y_mm = movement.gantry_offset_mm - sign * float(turning.release_arc_mm[index])

        def edge(time_s: float, alpha: float = alpha, radius_mm: float = radius_mm, sign: int = sign) -> complex:
            turned = math.radians(movement.before_music_deg) + 2 * math.pi * time_s / movement.revolution_s
            return radius_mm * complex(math.cos(alpha), math.sin(alpha)) * complex(np.exp(-1j * sign * turned))

        early, late = sounds_s - 0.5, sounds_s + 0.5
        assert edge(sounds_s).real > 0
        for _ in range(60):
            middle = (early + late) / 2
            not_yet = sign * (edge(middle).imag - line_y_mm) > 0
            early, late = (middle, late) if not_yet else (early, middle)
        assert late == pytest.approx(sounds_s, abs=1e-9)


@given(
    movement=st.sampled_from(SHIPPED),
    share=st.floats(0, 1),
    track_share=st.floats(0, 0.999),
    later_s=st.floats(0, 5),
)
def test_moving_a_note_turns_its_projection_by_its_share_of_the_turn(
    movement: Movement, share: float, track_share: float, later_s: float
) -> None:
    turning = turning_of(movement)
    sounds_s = share * (turning.free_turn_s - later_s)
    track = np.array([int(track_share * len(movement.tracks))])

    first = turning.edge_angle_rad(np.array([sounds_s]), track)
    second = turning.edge_angle_rad(np.array([sounds_s + later_s]), track)

    # A note moved by dt turns its projection by 2 pi dt / T, against the travel.
    turned = np.angle(np.exp(1j * (second - first - turning.direction * 2 * math.pi * later_s / movement.revolution_s)))
    assert abs(float(turned[0])) < 1e-12


@given(movement=st.sampled_from(SHIPPED), shares=st.lists(st.floats(0, 1), max_size=20), seed=st.integers(0, 2**20))
def test_the_time_of_an_edge_is_the_inverse_of_its_angle(movement: Movement, shares: list[float], seed: int) -> None:
    turning = turning_of(movement)
    sounds_s = np.array(shares) * turning.free_turn_s
    tracks = np.random.default_rng(seed).integers(0, len(movement.tracks), len(shares))

    back_s = turning.sounds_s(turning.edge_angle_rad(sounds_s, tracks), tracks)

    np.testing.assert_allclose(back_s, sounds_s, atol=1e-9)


@pytest.mark.parametrize(
    ("movement", "free_s"),
    # T * (360 - before - after) / 360: 66 * 336/360, 90 * 334/360, 40 * 326/360
    [(SHIPPED[0], 61.6), (SHIPPED[1], 83.5), (SHIPPED[2], 36.2222222)],
)
def test_the_free_part_of_the_turn_is_what_is_left_between_the_rests(movement: Movement, free_s: float) -> None:
    assert turning_of(movement).free_turn_s == pytest.approx(free_s, abs=1e-6)


def test_measured_arcs_of_a_track_win_over_the_wheel() -> None:
    movement = movement_with({"tracks/1/engagement_arc_mm": 3.3, "tracks/1/release_arc_mm": 0.2})

    turning = turning_of(movement)

    # 2 * 3.2 * sin 30 deg = 3.2 mm on the others
    np.testing.assert_allclose(turning.engagement_arc_mm, [3.2, 3.3, 3.2])
    np.testing.assert_allclose(turning.release_arc_mm, [0, 0.2, 0])


def test_an_edge_in_the_rest_sector_sounds_just_before_the_music_or_just_after_it() -> None:
    turning = turning_of(movement_with({"before_music_deg": 30, "after_music_deg": 30}))
    # 60 degrees of rest, 6 a second: the music lasts 50 s, and half of the rest, 5 s, counts to either end of it.
    asked_s = np.array([-4.9, -0.5, 0.0, 50.0, 50.5, 54.9])
    track = np.zeros(6, dtype=np.int64)

    assert turning.free_turn_s == pytest.approx(50.0)
    assert turning.sounds_s(turning.edge_angle_rad(asked_s, track), track) == pytest.approx(asked_s, abs=1e-9)
