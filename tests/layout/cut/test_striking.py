import math
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from layout.cut.striking import StrikePath, hit_order, strike_path, struck_holes
from layout.documents import Settings
from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from layout.walk import lay_out
from tests.layout.examples import PRESS, SHIPPED, cutter_with, disc_of, movement_with

DEMO_TUNE = Path(__file__).parents[3] / "service" / "demo" / "tune.mid"
every_shipped = pytest.mark.parametrize("name", [movement.id for movement in SHIPPED])


@cache
def demo_disc(name: str) -> Disc:
    """The demo tune as the shipped press would make it for a shipped movement."""
    [movement] = [movement for movement in SHIPPED if movement.id == name]
    return lay_out(DEMO_TUNE.read_bytes(), movement, PRESS, Settings()).disc


def seconds(path: StrikePath) -> float:
    """Turning and sliding one after the other, at the shipped press's speeds: more than both at once."""
    assert PRESS.feeds is not None
    assert PRESS.feeds.turn_deg_per_s is not None
    assert PRESS.feeds.slide_mm_per_s is not None
    return math.degrees(path.turned_rad) / PRESS.feeds.turn_deg_per_s + path.slid_mm / PRESS.feeds.slide_mm_per_s


@every_shipped
def test_a_demo_disc_is_struck_with_less_than_a_third_of_the_moving_by_track_and_angle(name: str) -> None:
    disc = demo_disc(name)

    order = hit_order(disc)

    by_track = np.lexsort((disc.edge_angle_rad, disc.track_index))
    assert sorted(order.tolist()) == list(range(disc.projection_count))
    # measured: between a fifth and an eighth of the time where both move at once
    holes = struck_holes(disc)
    assert seconds(strike_path(disc, order, holes)) < seconds(strike_path(disc, by_track, holes)) / 3


@every_shipped
def test_no_foot_stands_on_formed_metal_of_a_demo_disc(name: str) -> None:
    disc = demo_disc(name)
    place = np.argsort(hit_order(disc))

    standing, struck = disc.hits.feet_on_formed().T

    assert (place[standing] > place[struck]).all()


def test_angles_that_round_the_last_bit_apart_give_the_same_order() -> None:
    disc = demo_disc("tarnlight-17")
    other = replace(disc, edge_angle_rad=frozen_floats(np.nextafter(disc.edge_angle_rad, 7.0)))

    assert hit_order(disc).tolist() == hit_order(other).tolist()


def test_the_path_is_what_table_and_slide_move() -> None:
    # a tool that strikes on the working edge itself; clockwise, so forward angles are those of the label side
    tool = {"tools/0/edge_ahead_mm": 0, "press/turns_one_way": True}
    movement = movement_with()
    disc = disc_of(movement, [(1, 0.0), (2, 5.0), (3, 3.0)], cutter_with(tool, PRESS))

    path = strike_path(disc, np.array([0, 1, 2]), struck_holes(disc))

    # 6 degrees a second: 30 on, 12 back, and a degree too far and on again; 50 to 60 to 100 mm
    assert math.degrees(path.turned_rad) == pytest.approx(30 + 12 + 2 * 1.0)
    assert path.slid_mm == pytest.approx(10 + 40)
    assert path.tool_change_count == 0


def test_holes_are_struck_first_and_what_they_move_and_change_counts() -> None:
    # a tool that strikes on the working edge; three tools: R5 at 90 and 270 degrees, R9 in the middle, L12 at 30
    row = {"purpose": "drive", "shape": "hole", "radius_mm": 20, "first_at_deg": 90, "count": 2}
    row |= {"width_mm": 5, "length_mm": 5}
    movement = movement_with({"disc/features": [row], "disc/centre_hole_mm": 9, "before_music_deg": 30})
    disc = disc_of(movement, [(1, 0.0)], cutter_with({"tools/0/edge_ahead_mm": 0}, PRESS))

    holes = struck_holes(disc)
    path = strike_path(disc, hit_order(disc), struck_holes(disc))

    assert [(hits.tool.tool, len(hits.at_mm)) for hits in holes] == [("R5", 2), ("R9", 1)]
    assert (path.hit_count, path.tool_change_count) == (4, 2)
    # 20 to 20 to 0 to 50 mm; from 90 to 270, then the 120 on to 30 before the centre hole, which needs no turn itself,
    # or from 270 to 90 and 60 back, a degree too far and on again
    assert path.slid_mm == pytest.approx(0 + 20 + 50)
    assert math.degrees(path.turned_rad) in (pytest.approx(180 + 120), pytest.approx(180 + 60 + 2))


def test_projections_without_a_tool_are_not_struck() -> None:
    disc = disc_of(movement_with({"disc/centre_hole_mm": 9, "projection/width_mm": 2}), [(1, 0.0), (2, 1.0)], PRESS)

    path = strike_path(disc, hit_order(disc), struck_holes(disc))

    assert (path.hit_count, path.turned_rad, path.slid_mm, path.tool_change_count) == (1, 0.0, 0.0, 0)


@pytest.mark.parametrize("plucks", [[], [(1, 0.0)]], ids=["none", "one"])
def test_fewer_than_two_hits_move_nothing(plucks: list[tuple[int, float]]) -> None:
    disc = disc_of(movement_with(), plucks, PRESS)

    path = strike_path(disc, hit_order(disc), struck_holes(disc))

    assert (path.turned_rad, path.slid_mm) == (0.0, 0.0)


@pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])
def test_of_two_near_each_other_on_a_track_the_one_ahead_is_struck_first(turns: str) -> None:
    # 3.5 mm apart; a foot 7 mm long reaches 3.5 mm from the strike point, which lies 0.7 mm behind the working edge.
    # The tab ahead stands from 3.5 + 0.7 - 0.5 (the sheet) = 3.7 mm ahead of the strike behind it: clear.
    # The tab behind stands from 3.5 - 0.7 = 2.8 mm behind the strike ahead: under it.
    movement = movement_with({"turns": turns})
    apart_s = 60 * 3.5 / (2 * math.pi * 50)
    cutter = cutter_with({"tools/0/foot": {"length_mm": 7, "width_mm": 2}}, PRESS)
    disc = disc_of(movement, [(1, 10.0), (1, 10.0 + apart_s)], cutter)

    pairs = disc.hits.feet_on_formed().tolist()
    order = hit_order(disc).tolist()

    # The one ahead passes the row of star wheels first, so it sounds first: projection 0.
    assert pairs == [[1, 0]]
    assert order == [0, 1]


@pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])
@pytest.mark.parametrize("side", ["label-side", "star-side"])
def test_forward_is_against_the_travel_so_what_sounds_later_comes_later(turns: str, side: str) -> None:
    cutter = cutter_with({"drawn_from": side}, PRESS)

    disc = disc_of(movement_with({"turns": turns}), [(1, 10.0), (1, 12.0), (1, 14.0)], cutter)

    # 6 degrees a second: 12 degrees from one to the next
    np.testing.assert_allclose(np.diff(disc.hits.forward_rad), math.radians(12), atol=1e-12)
    assert hit_order(disc).tolist() == [0, 1, 2]
