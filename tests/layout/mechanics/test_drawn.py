"""How far what is drawn reaches, held against points of its arcs that another library works out."""

import math

import numpy as np
import pytest
from ezdxf.math import bulge_center, bulge_radius, bulge_to_arc
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import frozen_floats
from layout.mechanics.drawn import DrawnArc, DrawnCircle, DrawnLine, DrawnPoint, places_mm, reach_mm

STEPS = 20_000  # points of an arc; of radius r they come as near to the farthest as r·(π/STEPS)²/2


def line(*vertices: tuple[float, float, float], closed: bool = False) -> DrawnLine:
    array = np.array(vertices, dtype=np.float64)
    points_mm, bulge_ratio = frozen_floats(array[:, :2]), frozen_floats(array[:, 2])
    return DrawnLine(layer="SLITS", points_mm=points_mm, bulge_ratio=bulge_ratio, closed=closed)


@pytest.mark.parametrize(
    ("entity", "far_mm"),
    [
        (DrawnPoint(layer="HITS", at_mm=frozen_floats([3, 4])), 5),
        (DrawnCircle(layer="RIM", centre_mm=frozen_floats([3, 4]), radius_mm=7), 12),
        (line((3, 4, 0)), 5),
        (line((0, 0, 0), (6, 8, 0)), 10),
        (line((-5, 0, 1), (5, 0, 0)), 5),  # a half-circle about the origin
        (line((-5, -10, 1), (5, -10, 0)), 15),  # one that bulges away from it, to the right of its chord
        (line((-5, -10, -1), (5, -10, 0)), math.hypot(5, 10)),  # one that bulges towards it
        (line((10, 0, 1), (-10, 0, 1), closed=True), 10),  # a rim in two halves
        (line((0, 0, 1e-310), (6, 8, 0)), 10),  # as good as straight
        (line((1, 1, 1), (1, 1, 1), closed=True), math.sqrt(2)),  # without length
    ],
)
def test_the_reach_of_what_can_be_worked_out_by_hand(
    entity: DrawnLine | DrawnCircle | DrawnPoint, far_mm: float
) -> None:
    assert reach_mm(entity) == pytest.approx(far_mm, abs=1e-12)


places = st.tuples(st.floats(-100, 100), st.floats(-100, 100))


@pytest.mark.parametrize(("ends", "far_mm", "places"), [("closed", 15, 3), ("open", math.hypot(5, 10), 2)])
def test_the_bulge_of_the_last_vertex_is_of_the_way_back_which_an_open_line_has_not(
    ends: str, far_mm: float, places: int
) -> None:
    # From (5, -10) back to (-5, -10) by half a circle of radius 5, which reaches (0, -15) for a bulge of -1.
    drawn = line((-5, -10, 0), (5, -10, -1), closed=ends == "closed")

    assert reach_mm(drawn) == pytest.approx(far_mm)
    assert len(places_mm(drawn)) == places  # the vertices, and the middle of the arc


@given(places, places, st.floats(-3, 3).filter(lambda bulge: abs(bulge) > 0.01))
def test_the_reach_of_an_arc_is_that_of_its_farthest_point(
    start: tuple[float, float], end: tuple[float, float], bulge: float
) -> None:
    if math.dist(start, end) < 0.01:
        return
    centre, from_rad, to_rad, radius_mm = bulge_to_arc(start, end, bulge)
    turn_rad = from_rad + (to_rad - from_rad) % (2 * math.pi) * np.arange(STEPS + 1) / STEPS
    around = np.column_stack([centre.x + radius_mm * np.cos(turn_rad), centre.y + radius_mm * np.sin(turn_rad)])

    far_mm = reach_mm(line((*start, bulge), (*end, 0)))

    assert far_mm == pytest.approx(np.hypot(*around.T).max(), abs=1e-7 + radius_mm * (math.pi / STEPS) ** 2)


@given(places, places, st.floats(-3, 3).filter(lambda bulge: abs(bulge) > 0.01))
def test_the_middle_of_an_arc_lies_on_it_and_halfway(
    start: tuple[float, float], end: tuple[float, float], bulge: float
) -> None:
    if math.dist(start, end) < 0.01:
        return
    centre, radius_mm = bulge_center(start, end, bulge), bulge_radius(start, end, bulge)

    shown = places_mm(line((*start, bulge), (*end, 0)))

    assert shown[:2].tolist() == [list(start), list(end)]
    middle = shown[2].tolist()
    assert math.dist(middle, (centre.x, centre.y)) == pytest.approx(radius_mm, abs=1e-9)
    assert math.dist(middle, start) == pytest.approx(math.dist(middle, end), abs=1e-9)


def test_the_quarters_of_a_circle_show_where_it_lies() -> None:
    circle = DrawnCircle(layer="RIM", centre_mm=frozen_floats([1, 2]), radius_mm=3)

    assert places_mm(circle).tolist() == [[4, 2], [1, 5], [-2, 2], [1, -1]]


@given(places, st.floats(0.1, 100), st.floats(-720, 720), st.floats(-720, 720))
def test_the_reach_and_the_places_of_an_arc_by_its_angles_are_those_of_its_points(
    centre: tuple[float, float], radius_mm: float, from_deg: float, to_deg: float
) -> None:
    arc = DrawnArc(layer="RIM", centre_mm=frozen_floats(centre), radius_mm=radius_mm, from_deg=from_deg, to_deg=to_deg)
    turned_deg = (to_deg - from_deg) % 360 or 360  # DXF reference: anticlockwise from the first
    angle_rad = np.radians(from_deg + turned_deg * np.arange(STEPS + 1) / STEPS)
    around = np.array(centre) + radius_mm * np.column_stack([np.cos(angle_rad), np.sin(angle_rad)])

    assert reach_mm(arc) == pytest.approx(np.hypot(*around.T).max(), abs=1e-7 + radius_mm * (math.pi / STEPS) ** 2)
    assert places_mm(arc) == pytest.approx(around[:: STEPS // 8], abs=1e-9)
