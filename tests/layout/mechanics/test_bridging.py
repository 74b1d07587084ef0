"""How bridges are shared out over the arcs of a rim, and where those arcs lie between notches; by hand."""

import math

import pytest

from layout.documents import Movement
from layout.mechanics.bridging import Gap, arcs_of_rim_rad, gap_mm, gaps_in
from tests.layout.examples import cutter_with, movement_with

FULL_TURN_RAD = 2 * math.pi


def notched(**changes: float) -> Movement:
    """A disc of radius 50 with a row of notches: 20 wide about a radius of 50, so that their floors lie at 40 mm."""
    notch = {
        "shape": "notch",
        "purpose": "drive",
        "radius_mm": 50,
        "width_mm": 20,
        "length_mm": 100,
        "first_at_deg": 90,
        "count": 2,
    }
    sizes = {"disc/outer_diameter_mm": 100, "tracks": [{"track": 1, "radius_mm": 30}]}
    teeth = {"teeth": [{"tooth": 1, "track": 1, "pitch": "C5"}]}
    return movement_with({**sizes, **teeth, "disc/features": [{**notch, **changes}]})


def middles(gaps: list[Gap]) -> list[float]:
    return [(gap.from_rad + gap.to_rad) / 2 for gap in gaps]


def test_a_rim_without_notches_is_one_arc_of_a_full_turn() -> None:
    assert arcs_of_rim_rad(movement_with()) == [(0.0, FULL_TURN_RAD)]


def test_a_notch_longer_than_its_floor_takes_what_the_floor_takes_of_the_rim() -> None:
    # The floor at 40 mm cuts the rim of 50 mm at 30 mm beside the notch's middle: 3-4-5, so asin(3/5) either way.
    half_rad = math.asin(3 / 5)

    arcs = arcs_of_rim_rad(notched())

    right, left = math.pi / 2, 3 * math.pi / 2
    assert arcs == [
        pytest.approx((right + half_rad, left - half_rad)),
        pytest.approx((left + half_rad, FULL_TURN_RAD + right - half_rad)),
    ]


def test_a_notch_with_sides_takes_its_length_of_the_rim() -> None:
    half_rad = math.asin(10 / 50)

    arcs = arcs_of_rim_rad(notched(length_mm=20, count=1))

    assert arcs == [pytest.approx((math.pi / 2 + half_rad, math.pi / 2 + FULL_TURN_RAD - half_rad))]


def test_arcs_come_round_the_rim_whatever_the_first_angle_is() -> None:
    half_rad = math.asin(10 / 50)

    arcs = arcs_of_rim_rad(notched(length_mm=20, first_at_deg=270))

    assert [first for first, _ in arcs] == [
        pytest.approx(math.pi / 2 + half_rad),
        pytest.approx(3 * math.pi / 2 + half_rad),
    ]


def test_a_gap_in_the_drawn_line_is_a_bridge_and_a_kerf_long() -> None:
    cutter = cutter_with({"kerf_mm": 0.2, "bridges": {"count": 4, "width_mm": 0.8}})
    assert cutter.bridges is not None

    assert gap_mm(cutter, cutter.bridges) == pytest.approx(0.8 + 0.2)


def test_bridges_go_to_the_arc_whose_stretches_are_then_longest() -> None:
    # Arcs of 1 and 3: 3, 3/2, then 1 and 3/3 are alike and the first arc has it, then 3/3.
    one, three = (0.0, 1.0), (2.0, 5.0)

    shared = [gaps_in([one, three], count=count, width_rad=0.1) for count in (1, 2, 3, 4)]

    assert [[len(gaps) for gaps in each or []] for each in shared] == [[0, 1], [0, 2], [1, 2], [1, 3]]


def test_gaps_stand_in_the_middles_of_equal_stretches_of_their_arc() -> None:
    [first, second] = gaps_in([(0.0, 1.0), (2.0, 5.0)], count=4, width_rad=0.1) or []

    assert middles(first) == [pytest.approx(0.5)]
    assert middles(second) == [pytest.approx(2.5), pytest.approx(3.5), pytest.approx(4.5)]
    assert [gap.to_rad - gap.from_rad for gap in first + second] == [pytest.approx(0.1)] * 4


def test_an_arc_may_be_half_bridge_and_no_more() -> None:
    assert gaps_in([(0.0, 1.0)], count=2, width_rad=0.25) is not None
    assert gaps_in([(0.0, 1.0)], count=2, width_rad=0.2501) is None


def test_a_short_arc_that_gets_no_bridge_is_in_no_bridges_way() -> None:
    assert gaps_in([(0.0, 0.001), (1.0, 3.0)], count=2, width_rad=0.1) is not None


def test_where_there_is_no_arc_there_is_no_room() -> None:
    assert gaps_in([], count=1, width_rad=0.1) is None
