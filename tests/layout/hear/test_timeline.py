"""The start and the sag of the winding, against numerical integration of the same physics."""

import math

import numpy as np
import pytest

from layout.documents import Movement, shipped_movement
from layout.errors import DocumentError
from layout.hear import Asked
from layout.hear.performance import Turn
from layout.hear.timeline import Timeline, timeline_of
from layout.mechanics.starting import starting_of
from layout.mechanics.turning import turning_of
from layout.mechanics.winding import DiscLoad, run_down, wound_drive_of
from tests.layout.examples import movement_with
from tests.layout.hear.sounds import hearing_of, onsets_s, performance_of, samples_of

WINDING = {
    "spring": {
        "elastic_modulus_n_per_mm2": 206_000,
        "width_mm": 10,
        "thickness_mm": 0.4,
        "length_mm": 2000,
        "wound_turns": 8,
        "usable_turns": 4,
    },
    "barrel_to_disc": [1.5],
}
MOSSBROOK = shipped_movement("mossbrook-67")


def line(movement: Movement, turn: Turn) -> Timeline:
    plucks = performance_of(movement, []).plucks
    return timeline_of(movement, turning_of(movement), plucks, turn)


def test_a_steady_disc_turns_evenly_from_the_first_moment_where_no_start_is_stated() -> None:
    # One turn in 60 s.
    timeline = line(movement_with({"drive/winding": WINDING}), "steady")

    assert timeline.moment_s(np.array([0.0, math.pi, 2 * math.pi])) == pytest.approx([0, 30, 60])


def test_the_start_is_late_as_numerical_integration_of_its_equation_says() -> None:
    starting = starting_of(MOSSBROOK, MOSSBROOK.revolution_s)
    assert starting is not None
    full, constant_s, step_s = 2 * math.pi / 90, starting.time_constant_s, 1e-4
    speed = angle = 0.0
    integrated = []
    for _ in range(int(6 * constant_s / step_s)):  # dω/dt = (ω_T/t₀)·(1 − (ω/ω_T)²), by midpoints
        middle = speed + step_s / 2 * full / constant_s * (1 - (speed / full) ** 2)
        angle += step_s * middle
        speed += step_s * full / constant_s * (1 - (middle / full) ** 2)
        integrated.append(angle)

    moments = line(MOSSBROOK, "steady").moment_s(np.array(integrated[99::100]))

    assert moments == pytest.approx(np.arange(100, len(integrated) + 1, 100) * step_s, abs=1e-5)


def test_onsets_are_heard_where_the_start_puts_them() -> None:
    # Music begins after 16° of 360 in 90 s, 4 s; the start comes late by t₀·ln 2, but for 2 ms.
    starting = starting_of(MOSSBROOK, MOSSBROOK.revolution_s)
    assert starting is not None
    moments = [0.0, 3.0, 6.5]

    found = onsets_s(samples_of(hearing_of(MOSSBROOK, [(40, moment) for moment in moments])))

    late_s = starting.time_constant_s * math.log(2)
    assert found == pytest.approx([4 + late_s + moment for moment in moments], abs=0.0025)


@pytest.mark.parametrize("turn", ["first", "middle", "last"])
def test_a_turn_of_a_winding_takes_as_long_as_its_torque_says(turn: Turn) -> None:
    movement = movement_with({"drive/winding": WINDING})
    drive = wound_drive_of(movement.drive.winding)  # type: ignore[union-attr, arg-type]  # stated just above
    # 4 turns of the barrel at 1.5 are 6 turns of the disc; the stated turn holds in their middle.
    begin = {"first": 0.0, "middle": 2.5, "last": 5.0}[turn]
    counts = begin + (np.arange(20_000) + 0.5) / 20_000
    speeds = np.sqrt([drive.at_disc_nmm(count) / drive.at_disc_nmm(3.0) for count in counts.tolist()])

    assert line(movement, turn).moment_s(np.array([2 * math.pi])) == pytest.approx([60 * np.mean(1 / speeds)])


def test_the_last_turn_ends_slower_than_it_began_by_what_the_winding_loses_in_it() -> None:
    movement = movement_with({"drive/winding": WINDING})
    run = run_down(wound_drive_of(movement.drive.winding), DiscLoad(peak_nmm=0, mean_nmm=0), 60)  # type: ignore[union-attr, arg-type]
    timeline = line(movement, "last")

    step = 1e-4
    first_s, last_s = (np.diff(timeline.moment_s(np.array([at, at + step])))[0] for at in (0.0, 2 * math.pi - step))

    assert 1 - first_s / last_s == pytest.approx(run.last_turn_slows_ratio, rel=1e-4)


def test_notes_of_the_last_turn_come_ever_later_than_in_a_steady_one() -> None:
    movement = movement_with({"drive/winding": WINDING})
    plucks = [(3, 5.0 * place) for place in range(10)]

    steady, first, last = (
        [ring.starts_s for ring in hearing_of(movement, plucks, Asked(turn=turn)).rings]
        for turn in ("steady", "first", "last")
    )

    assert np.all(np.diff(np.subtract(last, steady)) > 0)
    assert first[0] < steady[0] < last[0]


def test_the_teeth_the_disc_lifts_slow_it() -> None:
    stated = {"lift_mm": 0.3, "stiffness_n_per_mm": 1.0}
    teeth = {f"teeth/{place}/{name}": value for place in range(3) for name, value in stated.items()}
    movement = movement_with({"drive/winding": WINDING, **teeth})
    crowded = performance_of(movement, [(track, 0.7 * place) for place in range(60) for track in (1, 2, 3)]).plucks
    free = performance_of(movement, []).plucks
    turning = turning_of(movement)

    loses = [timeline_of(movement, turning, plucks, "last").falls_ratio for plucks in (crowded, free)]

    assert loses[0] > loses[1] > 0


def test_a_disc_that_stops_in_its_turn_plays_no_more() -> None:
    short = WINDING | {"spring": {**WINDING["spring"], "usable_turns": 0.4}}  # type: ignore[dict-item]
    movement = movement_with({"drive/winding": short})

    # 0.4 turns of the barrel at 1.5 are 0.6 of the disc: 216°, 186° after the music's begin at 30°, 31 s.
    hearing = hearing_of(movement, [(1, 10.0), (1, 30.0), (1, 32.0)], Asked(turn="first"))

    assert len(hearing.rings) == 2
    assert hearing.turning_table[-1, 1] == pytest.approx(math.radians(216), abs=1e-6)


def test_a_disc_too_heavy_to_move_is_silent() -> None:
    teeth = {f"teeth/0/{name}": value for name, value in (("lift_mm", 5), ("stiffness_n_per_mm", 50))}
    movement = movement_with({"drive/winding": WINDING, **teeth, "teeth/1/usable": False, "teeth/2/usable": False})

    assert hearing_of(movement, [(1, 10.0)], Asked(turn="first")).rings == ()


def test_a_turn_of_a_winding_that_is_not_stated_cannot_be_heard() -> None:
    with pytest.raises(DocumentError, match=r"last turn of a winding .* plain-3 states none") as caught:
        line(movement_with(), "last")

    assert caught.value.problems[0].pointer == "/drive/winding"


@pytest.mark.parametrize("turn", ["steady", "last"])
def test_between_the_rows_of_the_table_the_disc_may_be_taken_to_turn_evenly(turn: Turn) -> None:
    timeline = line(MOSSBROOK, turn)
    table = timeline.table

    turned = np.linspace(math.radians(2), 2 * math.pi, 5000)
    off_s = np.interp(turned, table[:, 1], table[:, 0]) - timeline.moment_s(turned)

    assert np.all(np.diff(table, axis=0) > 0)
    assert (table[0, 0], table[0, 1], table[-1, 1]) == (0, 0, pytest.approx(2 * math.pi))
    assert np.abs(off_s).max() < 0.001
