"""The torque over the turn: by hand, by plain summing at random moments, and by the work done."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange.loading import greatest_load
from layout.documents import Movement
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.torque import TurnTorque, torque_over_turn
from layout.mechanics.turning import turning_of
from tests.layout.examples import PLAIN, movement_with

# 2 N/mm · 0.5 mm is 1 N at the release: 50, 60 and 100 N mm on the three tracks. A turn of 60 s passes 2π·r/60 mm a
# second, so a tooth is lifted for 0.5 · 60 / (2π·r) = 4.7746/r s: 95.493, 79.577 and 47.746 ms.
LIFTED = {
    f"teeth/{index}/{name}": value
    for index in range(3)
    for name, value in {"stiffness_n_per_mm": 2.0, "lift_mm": 0.5}.items()
}
SPRUNG = movement_with(LIFTED)
BESIDE = movement_with({**LIFTED, "gantry_offset_mm": 30.0, "turns": "anticlockwise", "teeth/0/lift_mm": 3.0})


def torque_of(plucks: list[tuple[int, float]], movement: Movement = SPRUNG) -> TurnTorque:
    torque = torque_over_turn(
        movement,
        turning_of(movement),
        frozen_ints(track - 1 for track, _ in plucks),
        frozen_floats(sounds for _, sounds in plucks),
    )
    assert torque is not None
    return torque


def summed_nmm(plucks: list[tuple[int, float]], movement: Movement, at_s: float) -> float:
    """Torque at a moment, tooth by tooth: k·u·r·cos δ, u what is lifted when so much travel is left to the release."""
    total_nmm = 0.0
    for track, sounds_s in plucks:
        arm_mm = math.sqrt(movement.tracks[track - 1].radius_mm ** 2 - movement.gantry_offset_mm**2)
        left_mm = ((sounds_s - at_s) % movement.revolution_s) * 2 * math.pi * arm_mm / movement.revolution_s
        for tooth in movement.teeth:
            if tooth.track == track and tooth.lift_mm is not None and left_mm < tooth.lift_mm:
                total_nmm += (tooth.stiffness_n_per_mm or 0.0) * (tooth.lift_mm - left_mm) * arm_mm
    return total_nmm


def test_one_tooth_rises_evenly_and_drops_at_its_release() -> None:
    torque = torque_of([(1, 10.0)])

    # 30° before the music is 5 s: the turn goes from −5 to 55 s.
    assert torque.at_s.tolist() == pytest.approx([-5, 10 - 0.0954930, 10, 10, 55])
    assert torque.torque_nmm.tolist() == pytest.approx([0, 0, 50, 0, 0])
    assert (torque.peak_nmm, torque.peak_at_s, torque.peak_plucks) == (pytest.approx(50), pytest.approx(10), (0,))
    # ½·k·q² = 0.25 N mm over 2π
    assert torque.mean_nmm == pytest.approx(0.25 / (2 * math.pi))


def test_teeth_lifted_together_add_up_at_the_first_release() -> None:
    # 20 ms before its release the tooth of track 3 has come 1 − 20/47.7465 of its 100 N mm: 58.1121.
    torque = torque_of([(1, 10.0), (3, 10.02), (2, 40.0)])

    assert torque.peak_nmm == pytest.approx(50 + 58.1121, abs=1e-4)
    assert (torque.peak_at_s, torque.peak_plucks) == (pytest.approx(10), (0, 1))
    at_s, torque_nmm = torque.at_s.tolist(), torque.torque_nmm.tolist()
    after = at_s.index(pytest.approx(10)) + 1
    assert torque_nmm[after] == pytest.approx(58.1121, abs=1e-4)
    assert torque_nmm[after + 1 : after + 3] == pytest.approx([100, 0])


def test_a_chord_drops_all_at_once() -> None:
    torque = torque_of([(1, 10.0), (2, 10.0), (3, 10.0)])

    assert torque.peak_nmm == pytest.approx(210)
    assert torque.peak_plucks == (0, 1, 2)
    assert np.count_nonzero(np.diff(torque.at_s) == 0) == 1


def test_releases_less_than_a_nanosecond_apart_are_one() -> None:
    torque = torque_of([(1, 10.0), (2, 10.0 + 2e-10)])

    assert torque.peak_nmm == pytest.approx(110)
    assert np.count_nonzero(np.diff(torque.at_s) == 0) == 1


def test_a_tooth_released_as_the_turn_begins_is_lifted_as_it_ends() -> None:
    # Released 0.04 s into the turn, it is in touch from 0.0555 s before the turn's end.
    torque = torque_of([(1, -4.96)])

    assert torque.at_s.tolist() == pytest.approx([-5, -4.96, -4.96, 55 - 0.055493, 55])
    carried = 50 * (1 - 0.04 / 0.0954930)
    assert torque.torque_nmm.tolist() == pytest.approx([carried, 50, 0, 0, carried], abs=1e-4)


def test_a_disc_without_plucks_has_no_torque() -> None:
    torque = torque_of([])

    assert torque.torque_nmm.tolist() == [0, 0]
    assert torque.at_s.tolist() == [-5, 55]
    assert (torque.peak_nmm, torque.peak_at_s, torque.peak_plucks, torque.mean_nmm) == (0, 0, (), 0)


def test_a_tooth_whose_stiffness_is_not_stated_leaves_the_torque_unknown() -> None:
    track_index, sounds_s = frozen_ints([0]), frozen_floats([1.0])

    assert torque_over_turn(PLAIN, turning_of(PLAIN), track_index, sounds_s) is None


PLUCKS = st.lists(st.tuples(st.integers(1, 3), st.floats(-4.9, 54.9) | st.floats(10, 10.2)), min_size=1, max_size=12)


@settings(deadline=None)
@given(plucks=PLUCKS, moments=st.lists(st.floats(-5, 55) | st.floats(9.9, 10.2), max_size=20))
@pytest.mark.parametrize("movement", [SPRUNG, BESIDE], ids=["in line", "beside the centre"])
def test_between_its_moments_the_torque_is_straight(
    movement: Movement, plucks: list[tuple[int, float]], moments: list[float]
) -> None:
    torque = torque_of(plucks, movement)

    for at_s in moments:
        place = int(np.searchsorted(torque.at_s, at_s, side="right"))
        if not 0 < place < len(torque.at_s) or np.abs(torque.at_s - at_s).min() < 1e-7:
            continue
        along = (at_s - torque.at_s[place - 1]) / (torque.at_s[place] - torque.at_s[place - 1])
        told = torque.torque_nmm[place - 1] * (1 - along) + torque.torque_nmm[place] * along
        assert told == pytest.approx(summed_nmm(plucks, movement, at_s), abs=1e-3)


@settings(deadline=None)
@given(plucks=PLUCKS)
def test_the_mean_of_the_curve_is_the_work_of_the_teeth(plucks: list[tuple[int, float]]) -> None:
    torque = torque_of(plucks, BESIDE)

    assert np.trapezoid(torque.torque_nmm, torque.at_s) / 60 == pytest.approx(torque.mean_nmm, abs=1e-6)
    stored_nmm = sum(0.5 * 2.0 * (3.0 if track == 1 else 0.5) ** 2 for track, _ in plucks)  # Hooke: ½·k·q²
    assert torque.mean_nmm * 2 * math.pi == pytest.approx(stored_nmm)


@settings(deadline=None)
@given(plucks=PLUCKS)
def test_the_peak_is_the_greatest_of_the_curve_and_what_arranging_counts(plucks: list[tuple[int, float]]) -> None:
    torque = torque_of(plucks, BESIDE)

    assert torque.peak_nmm == torque.torque_nmm.max()
    load = greatest_load(
        BESIDE,
        turning_of(BESIDE),
        frozen_ints(track - 1 for track, _ in plucks),
        frozen_floats(round(sounds, 9) for _, sounds in plucks),
    )
    assert load is not None
    assert torque.peak_nmm == pytest.approx(load.peak_nmm, abs=1e-4)
