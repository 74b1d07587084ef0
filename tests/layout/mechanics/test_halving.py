"""Where something comes to be enough, against plain halving that looks at every middle."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import Cutter, Movement
from layout.mechanics import spacing
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.halving import HALVINGS, least_enough
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from tests.layout.examples import LASER, PRESS, SHIPPED

MOST = math.pi


def plainly(missing_till: list[float]) -> list[float]:
    """Of things for which enough is there from a value on."""
    ends = []
    for crossing in missing_till:
        low, high = 0.0, MOST
        for _ in range(HALVINGS):
            middle = (low + high) / 2
            low, high = (low, middle) if middle >= crossing else (middle, high)
        ends.append(high)
    return ends


@given(
    things=st.lists(st.tuples(st.floats(0, 4), st.floats(0.01, 100), st.sampled_from([1.0, 3.0, 0.2])), min_size=1),
    guess=st.floats(0, MOST),
)
def test_the_end_is_that_of_halving_wherever_the_secants_begin(
    things: list[tuple[float, float, float]], guess: float
) -> None:
    crossing, steep, bent = np.array(things).T

    def spare(rows: IntArray, at: FloatArray) -> FloatArray:
        away = at - crossing[rows]
        return np.asarray(np.sign(away) * steep[rows] * np.abs(away) ** bent[rows])

    most = np.full(len(things), MOST)
    found = least_enough(spare, most, (np.full(len(things), guess), most - guess / 2))

    assert found.tolist() == plainly(crossing.tolist())


def test_where_nothing_is_enough_the_end_of_the_interval_is_given() -> None:
    most = np.array([1.0, 2.0])

    found = least_enough(lambda rows, at: at - np.array([0.5, 9.0])[rows], most, (most / 2, most))

    assert found[0] == pytest.approx(0.5, abs=1e-12)
    assert found[1] == 2.0


def test_nothing_is_looked_at_where_there_is_nothing() -> None:
    nothing = np.zeros(0)

    assert least_enough(lambda _rows, at: at, nothing, (nothing, nothing)).tolist() == []


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_few_webs_are_looked_at_to_find_the_least_angles(
    movement: Movement, cutter: Cutter, monkeypatch: pytest.MonkeyPatch
) -> None:
    turning, pattern = turning_of(movement), pattern_of(movement, cutter)
    looked_at: list[int] = []
    between_mm = spacing._between_mm
    monkeypatch.setattr(spacing, "_between_mm", lambda *given: looked_at.append(len(given[1])) or between_mm(*given))

    web_rad = spacing._web_angles_rad(turning, pattern, cutter.min_web_mm)

    looks = sum(looked_at)
    here, there = (np.column_stack([turning.radius_mm, at_rad]) for at_rad in (0 * web_rad, web_rad))
    assert spacing.webs_mm(turning, pattern, here, there) == pytest.approx(cutter.min_web_mm, abs=1e-9)
    # Secants look eight times, two looks beside the end, and few middles stay unsure; halving alone looks at 50.
    assert looks < 15 * len(web_rad)
