import numpy as np
import pytest

from layout.mechanics.near_strikes import FIRST_WINDOW, NEIGHBOURS, NO_STRIKE, near_strikes
from layout.mechanics.table import Table

FULL_TURN_TICKS = 10_000
MANY = 4 * FIRST_WINDOW  # more than are looked at at first


def table_of_ticks(turn_ticks: list[int], slide_ticks: list[int], take_up_ticks: int = 25) -> Table:
    return Table(
        turn_ticks=np.array(turn_ticks, dtype=np.int64),
        slide_ticks=np.array(slide_ticks, dtype=np.int64),
        full_turn_ticks=FULL_TURN_TICKS,
        take_up_ticks=take_up_ticks,
    )


def scattered(count: int, turn_below: int, slide_below: int, grain: int = 1) -> Table:
    random = np.random.default_rng(count + turn_below + slide_below)
    turn = random.integers(0, turn_below, count) // grain * grain
    return table_of_ticks(turn.tolist(), random.integers(0, slide_below, count).tolist())


def cost_by_hand(table: Table, one: int, two: int) -> int:
    """The longer of turning and sliding a thousand times, and the shorter; back takes the backlash up twice."""
    forward = int(table.turn_ticks[two] - table.turn_ticks[one]) % FULL_TURN_TICKS
    turn = forward if 2 * forward <= FULL_TURN_TICKS else FULL_TURN_TICKS - forward + 2 * table.take_up_ticks
    slide = abs(int(table.slide_ticks[two] - table.slide_ticks[one]))
    return 1000 * max(turn, slide) + min(turn, slide)


@pytest.mark.parametrize(
    "table",
    [
        scattered(2, FULL_TURN_TICKS, 100),
        scattered(NEIGHBOURS + 1, FULL_TURN_TICKS, 100),
        scattered(2 * FIRST_WINDOW + 1, FULL_TURN_TICKS, 100),
        scattered(2 * FIRST_WINDOW + 2, FULL_TURN_TICKS, 100),
        scattered(MANY, FULL_TURN_TICKS, 300),
        scattered(MANY, FULL_TURN_TICKS, 9_000),  # sliding far: the nearest by cost are not the nearest by angle
        scattered(MANY, 200, 3_000),  # a cluster
        scattered(MANY, FULL_TURN_TICKS, 40, grain=500),  # many equals
        scattered(MANY, 1, 1),  # all at one place
    ],
    ids=["two", "just enough", "one window", "one more", "rings", "long slides", "cluster", "equals", "one place"],
)
def test_the_near_strikes_are_the_best_of_all_strikes_by_cost_then_by_index(table: Table) -> None:
    count = len(table.turn_ticks)
    near = near_strikes(table)

    for two in range(count):
        every = sorted((cost_by_hand(table, one, two), one) for one in range(count) if one != two)[:NEIGHBOURS]
        assert near.strike[two].tolist() == [*(one for _, one in every), NO_STRIKE]
        assert near.cost[two].tolist() == [*(cost for cost, _ in every), 0]
