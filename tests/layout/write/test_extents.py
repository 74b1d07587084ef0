import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.mechanics.arrays import frozen_floats
from layout.write.extents import extents_mm

small = st.floats(-100, 100)


def of(*entities: Entity) -> list[list[float]]:
    return np.round(extents_mm(Drawing(entities=entities, comments=())), 9).tolist()


def arc(bulge: float, *, closed: bool = False) -> Outlines:
    points_mm = np.array([[(-1.0, 0.0), (1.0, 0.0)]])
    return Outlines(layer="SLOTS", points_mm=points_mm, bulges=frozen_floats([bulge, 0.0]), closed=closed)


def test_an_empty_drawing_has_no_extent() -> None:
    assert of() == [[0, 0], [0, 0]]


def test_straight_lines_points_and_letters_reach_as_far_as_their_vertices() -> None:
    line = Outlines(
        layer="FOLDS", points_mm=np.array([[(0.0, 0.0), (5.0, 1.0)]]), bulges=frozen_floats([0.0, 0.0]), closed=False
    )
    points = Points(layer="HITS", points_mm=np.array([(-3.0, 2.0)]))
    letter = Lettering(layer="MARKS", text="I", strokes_mm=(np.array([(0.0, -7.0), (0.0, 8.0)]),))

    assert of(line, points, letter) == [[-3, -7], [5, 8]]


def test_circles_reach_a_radius_from_their_centres() -> None:
    circles = Circles(layer="HOLES", centres_mm=np.array([(1.0, 2.0), (4.0, 2.0)]), radius_mm=frozen_floats([3.0, 0.5]))

    assert of(circles) == [[-2, -1], [4.5, 5]]


@pytest.mark.parametrize(
    ("bulge", "extent"),
    [
        # From (-1, 0) to (1, 0). Bulge 1: half a turn anticlockwise, so below the chord, radius 1.
        (1.0, [[-1, -1], [1, 0]]),
        (-1.0, [[-1, 0], [1, 1]]),
        # 90 degrees, tan(90/4): radius sqrt(2), sagitta sqrt(2) - 1; its ends reach farthest sideways.
        (math.tan(math.radians(90) / 4), [[-1, round(1 - math.sqrt(2), 9)], [1, 0]]),
        # 270 degrees, tan(270/4): radius sqrt(2), centre (0, -1).
        (
            math.tan(math.radians(270) / 4),
            [[round(-math.sqrt(2), 9), round(-1 - math.sqrt(2), 9)], [round(math.sqrt(2), 9), 0]],
        ),
    ],
    ids=["half", "half, clockwise", "quarter", "three quarters"],
)
def test_an_arc_reaches_as_far_as_its_bulge_says(bulge: float, extent: list[list[float]]) -> None:
    assert of(arc(bulge)) == extent


def test_the_last_bulge_of_an_open_line_draws_nothing() -> None:
    points_mm = np.array([[(-1.0, 0.0), (1.0, 0.0)]])
    open_line = Outlines(layer="SLITS", points_mm=points_mm, bulges=frozen_floats([0.0, 1.0]), closed=False)

    assert of(open_line) == [[-1, 0], [1, 0]]


@given(a=st.tuples(small, small), b=st.tuples(small, small), bulge=st.floats(-4, 4).filter(lambda b: abs(b) > 0.01))
def test_points_walked_along_an_arc_fill_its_extent(
    a: tuple[float, float], b: tuple[float, float], bulge: float
) -> None:
    outline = Outlines(layer="SLOTS", points_mm=np.array([[a, b]]), bulges=frozen_floats([bulge, 0.0]), closed=False)
    # The DXF reference's angle, 4 atan(bulge), turned little by little about the centre.
    start, end = complex(*a), complex(*b)
    centre = (start + end) / 2 + (end - start) * 1j * (1 - bulge**2) / (4 * bulge)
    walked = centre + (start - centre) * np.exp(1j * 4 * math.atan(bulge) * np.linspace(0, 1, 20001))

    low, high = extents_mm(Drawing(entities=(outline,), comments=()))

    tolerance_mm = 1e-6 * (1 + abs(start - centre))
    assert (low[0], high[0]) == pytest.approx((walked.real.min(), walked.real.max()), abs=tolerance_mm)
    assert (low[1], high[1]) == pytest.approx((walked.imag.min(), walked.imag.max()), abs=tolerance_mm)
