import math
from dataclasses import astuple
from itertools import product
from operator import itemgetter

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.arrays import IntArray
from layout.mechanics.hit_order import length, shortest_order
from layout.mechanics.near_strikes import NO_STRIKE, NearStrikes, near_strikes
from layout.mechanics.strike_way import LONGEST_RUN, StrikeWay
from layout.mechanics.table import Table, forward_angles_rad, table_moves, table_of

NOTHING_FIRST = np.zeros((0, 2), dtype=np.int64)
places = st.lists(st.tuples(st.floats(20, 200), st.floats(0, 6.2)), max_size=14)


DEGREE_RAD = math.radians(1)


def table_with(placed: list[tuple[float, float]], *, take_up_rad: float = DEGREE_RAD) -> Table:
    """Strikes at these (radius in mm, forward angle in radians); 90 degrees and 150 mm a second."""
    radius_mm, forward_rad = np.array(placed, dtype=float).reshape(-1, 2).T
    return table_of(radius_mm, forward_rad, take_up_rad=take_up_rad, turn_rad_per_s=math.pi / 2, slide_mm_per_s=150.0)


def least_by_trying_all(table: Table) -> int:
    """The least any order costs, by the dynamic program over sets of Held and Karp (1962)."""
    count = len(table.turn_ticks)
    every = np.arange(count)
    cost = table.cost(every[:, None], every[None, :]).tolist()
    least = {(1 << one, one): 0 for one in range(count)}
    for some in range(1, 1 << count):
        inside = [one for one in range(count) if some >> one & 1]
        if len(inside) > 1:
            for last in inside:
                rest = some ^ (1 << last)
                least[some, last] = min(least[rest, one] + cost[one][last] for one in inside if one != last)
    return min(least[(1 << count) - 1, last] for last in range(count))


@given(places)
def test_every_strike_is_struck_once(placed: list[tuple[float, float]]) -> None:
    order = shortest_order(table_with(placed), NOTHING_FIRST)

    assert sorted(order.tolist()) == list(range(len(placed)))


@given(places, st.data())
def test_what_must_come_first_comes_first(placed: list[tuple[float, float]], data: st.DataObject) -> None:
    # pairs that cannot go round in a circle: all follow one hidden order
    hidden = data.draw(st.permutations(range(len(placed))))
    two = st.tuples(*[st.integers(0, max(len(placed) - 1, 0))] * 2).filter(lambda pair: pair[0] < pair[1])
    pairs = data.draw(st.lists(two, max_size=10)) if len(placed) > 1 else []
    first = np.array([(hidden[one], hidden[other]) for one, other in pairs], dtype=np.int64).reshape(-1, 2)

    order = shortest_order(table_with(placed), first).tolist()

    assert all(order.index(one) < order.index(other) for one, other in first.tolist())


def test_a_circle_of_what_must_come_first_still_gives_an_order() -> None:
    circle = np.array([(0, 1), (1, 2), (2, 0)])

    order = shortest_order(table_with([(50, 0.1), (60, 0.2), (70, 0.3)]), circle)

    assert sorted(order.tolist()) == [0, 1, 2]


@pytest.mark.parametrize("spread_rad", [0.5, 2 * math.pi], ids=["a cluster", "a whole turn"])
@pytest.mark.parametrize("take_up_rad", [DEGREE_RAD, 0.0])
def test_small_cases_are_within_five_in_a_hundred_of_the_best_order_there_is(
    *, spread_rad: float, take_up_rad: float
) -> None:
    random = np.random.default_rng(31)
    over = []
    for _ in range(12):
        placed = list(zip(random.uniform(36, 115, 8), random.uniform(0, spread_rad, 8), strict=True))
        table = table_with(placed, take_up_rad=take_up_rad)
        over.append(length(table, shortest_order(table, NOTHING_FIRST)) / least_by_trying_all(table))

    assert min(over) == 1.0  # never below the best: both count the same
    assert max(over) < 1.05
    assert np.mean(over) < 1.005


def test_a_table_turns_on_over_the_end_of_the_turn() -> None:
    degrees = [350, 355, 2, 7]

    moves = table_moves(np.radians(degrees), take_up_rad=DEGREE_RAD)

    np.testing.assert_allclose(np.degrees(moves.to_rad), [350, 355, 362, 367])
    assert moves.taken_up.tolist() == [True, False, False, False]
    assert math.degrees(moves.turned_rad) == pytest.approx(17)


def test_a_move_back_goes_a_degree_too_far_and_comes_on_again() -> None:
    moves = table_moves(np.radians([10, 20, 16]), take_up_rad=DEGREE_RAD)

    assert moves.taken_up.tolist() == [True, False, True]
    assert math.degrees(moves.turned_rad) == pytest.approx(10 + 4 + 1 + 1)


def test_a_table_without_backlash_comes_from_either_side() -> None:
    moves = table_moves(np.radians([10, 20, 16]), take_up_rad=0.0)

    assert not moves.taken_up.any()
    assert math.degrees(moves.turned_rad) == pytest.approx(10 + 4)


def test_an_exact_half_turn_goes_forward_whatever_its_last_bit() -> None:
    moves = table_moves(np.array([0.0, np.nextafter(math.pi, 4), 0.0]), take_up_rad=DEGREE_RAD)

    assert moves.taken_up.tolist() == [True, False, False]
    np.testing.assert_allclose(moves.to_rad, [0, math.pi, 2 * math.pi])


def test_an_angle_that_is_less_by_rounding_is_the_same_angle_and_nothing_is_taken_up() -> None:
    moves = table_moves(np.array([2.0, 2.0 - 5e-13, 2.0]), take_up_rad=DEGREE_RAD)

    assert moves.taken_up.tolist() == [True, False, False]
    assert moves.turned_rad == pytest.approx(0.0, abs=1e-9)


def test_a_strike_in_the_middle_takes_the_angle_of_the_next_that_has_one() -> None:
    middle = (0.0, 0.0)
    at_mm = np.array([middle, (0, 5), middle, middle, (-5, 0), middle])

    forward_deg = np.degrees(forward_angles_rad(at_mm, 1))

    np.testing.assert_allclose(forward_deg, [90, 90, 180, 180, 180, 180])
    np.testing.assert_allclose(np.degrees(forward_angles_rad(at_mm, -1)), -forward_deg)


@pytest.mark.parametrize("count", [0, 1, 2])
def test_strikes_that_are_all_in_the_middle_have_no_angle(count: int) -> None:
    assert forward_angles_rad(np.zeros((count, 2)), 1).tolist() == [0.0] * count


@given(st.lists(st.floats(-20, 20), max_size=12))
def test_no_move_is_longer_than_half_a_turn_and_each_ends_on_its_angle(forward: list[float]) -> None:
    moves = table_moves(np.array(forward), take_up_rad=DEGREE_RAD)

    assert (np.abs(np.diff(moves.to_rad)) <= math.pi + 1e-9).all()
    np.testing.assert_allclose(np.cos(moves.to_rad - np.array(forward)), 1.0, atol=1e-12)


def test_without_speeds_a_turn_counts_as_the_way_along_the_outermost_circle() -> None:
    # from (100 mm, 0): 0.2 rad on at 100 mm is 20 mm; sliding in to 85 mm is 15 mm
    table = table_of(
        np.array([100.0, 100.0, 85.0]),
        np.array([0.0, 0.2, 0.0]),
        take_up_rad=DEGREE_RAD,
        turn_rad_per_s=None,
        slide_mm_per_s=None,
    )

    turned, slid = (int(table.cost(np.array(0), np.array(two))) for two in (1, 2))

    assert turned / slid == pytest.approx(20 / 15)


@pytest.mark.parametrize(("take_up_rad", "times"), [(DEGREE_RAD, 5 / 3), (0.0, 1.0)])
def test_going_back_costs_a_degree_too_far_and_on_again(*, take_up_rad: float, times: float) -> None:
    # three degrees on, three degrees back: 3 + 1 + 1 where the table comes from one side
    table = table_with([(50, 0.0), (50, math.radians(3))], take_up_rad=take_up_rad)

    on, back = int(table.cost(np.array(0), np.array(1))), int(table.cost(np.array(1), np.array(0)))

    assert back / on == pytest.approx(times, rel=1e-6)


def test_a_made_up_way_is_only_made_shorter() -> None:
    random = np.random.default_rng(17)
    for _ in range(10):
        table = table_with(list(zip(random.uniform(36, 115, 60), random.uniform(0, 6.2, 60), strict=True)))
        by_angle = np.lexsort((table.slide_ticks, table.turn_ticks))
        by_ring = min(length(table, order) for order in rings_of(table))
        assert length(table, shortest_order(table, NOTHING_FIRST)) < min(length(table, by_angle), by_ring)


def test_what_a_move_is_reckoned_to_gain_is_what_it_gains() -> None:
    random = np.random.default_rng(67)
    moves = []
    for _ in range(8):
        table = table_with(list(zip(random.uniform(36, 115, 12), random.uniform(0, 6.2, 12), strict=True)))
        order = random.permutation(12).tolist()
        way, near = StrikeWay(table, order, NOTHING_FIRST), near_strikes(table)
        for move in way.moves(near):
            alone = StrikeWay(table, order, NOTHING_FIRST)
            assert alone.made(move, set())
            assert sorted(alone.order.tolist()) == list(range(12))
            assert length(table, alone.order) - length(table, np.array(order)) == move.loss
            moves.append(move)

    # of every make: runs as they are, runs turned round, to another place, before all others, and where they stand
    assert {move.turned for move in moves} == {True, False}
    assert any(move.target == NO_STRIKE for move in moves)
    assert any(move.target == move.head for move in moves)


def test_the_moves_are_the_best_of_all_by_trying_each_and_measuring_the_whole_way() -> None:
    random = np.random.default_rng(41)
    count = 11
    for _ in range(6):
        table = table_with(list(zip(random.uniform(36, 115, count), random.uniform(0, 6.2, count), strict=True)))
        order = random.permutation(count).tolist()
        near = near_strikes(table)

        found = [astuple(move) for move in StrikeWay(table, order, NOTHING_FIRST).moves(near)]

        assert found == sorted(moves_by_trying_all(table, order, near))


def moves_by_trying_all(table: Table, order: list[int], near: NearStrikes) -> list[tuple[int, int, int, int, bool]]:
    """(loss, head, run, target, turned): every gaining run turned where it stands, each run's best place elsewhere."""
    now = length(table, np.array(order))
    moves = []
    for start, run in product(range(len(order)), range(1, len(order) + 1)):
        here = order[start : start + run]
        before, after = order[:start], order[start + run :]
        if len(here) < run:
            continue
        stands_after = before[-1] if before else NO_STRIKE
        if run > 1 and stands_after in near.strike[here[-1]]:
            turned_here = np.array(before + here[::-1] + after)
            moves.append((length(table, turned_here) - now, here[0], run, here[0], True))
        for turned in (False, True) if run <= min(LONGEST_RUN, len(order) - 1) else ():
            laid = here[::-1] if turned else here
            elsewhere = []
            for target in near.strike[laid[0]].tolist():
                if target not in here and target != stands_after:
                    at = 0 if target == NO_STRIKE else (before + after).index(target) + 1
                    tried = np.array((before + after)[:at] + laid + (before + after)[at:])
                    elsewhere.append((length(table, tried) - now, here[0], run, target, turned))
            moves += sorted(elsewhere, key=itemgetter(0))[:1]  # between equals the nearer one
    return [move for move in moves if move[0] < 0]


def rings_of(table: Table) -> list[IntArray]:
    """Struck ring by ring, each round one turn from angle 0, by every number of rings up to ten."""
    ranks = np.argsort(np.argsort(table.slide_ticks))
    return [np.lexsort((table.turn_ticks, ranks * rings // len(ranks))) for rings in range(1, 11)]


@pytest.mark.parametrize("speed", [1e-6, 1.0, 1e9])
def test_any_speed_gives_an_order(speed: float) -> None:
    radius_mm, forward_rad = np.array([30.0, 40.0, 50.0]), np.array([1.0, 2.0, 3.0])

    table = table_of(radius_mm, forward_rad, take_up_rad=DEGREE_RAD, turn_rad_per_s=speed, slide_mm_per_s=1 / speed)

    assert sorted(shortest_order(table, NOTHING_FIRST).tolist()) == [0, 1, 2]


@pytest.mark.parametrize("count", [0, 1])
def test_none_and_one_have_one_order(count: int) -> None:
    table = table_with([(50.0, 1.0)][:count])

    assert shortest_order(table, NOTHING_FIRST).tolist() == list(range(count))
