"""The search for where most is covered, against plain ways that work everything out."""

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.most_covered import SLIVER, Over, most_covered, stretches_between
from tests.thorough import tried

TURN_RAD = 2 * math.pi
GRAIN = 1e-3

# A box lies over [from, from + length] and covers [low, low + width] of every line there.
Box = tuple[float, float, float, float]
BOXES = st.lists(
    st.tuples(st.floats(0, 50), st.floats(0.01, 9), st.floats(-3, 7), st.floats(0.01, 4)), min_size=1, max_size=25
)


def covered(lengths: list[tuple[float, float]], *, is_ring: bool) -> float:
    """What lengths cover together, one after the other; on a ring what reaches past the turn begins it again."""
    if is_ring:
        begun = [(low % TURN_RAD, low % TURN_RAD + high - low) for low, high in lengths]
        lengths = [(low, min(high, TURN_RAD)) for low, high in begun]
        lengths += [(0.0, high - TURN_RAD) for _, high in begun if high > TURN_RAD]
    total, reach = 0.0, -math.inf
    for low, high in sorted(lengths):
        total += max(high - max(low, reach), 0.0)
        reach = max(reach, high)
    return total


def covered_at(boxes: list[Box], at: float, *, is_ring: bool) -> float:
    over = [(low, low + width) for begin, length, low, width in boxes if begin < at < begin + length]
    return covered(over, is_ring=is_ring)


@dataclass(frozen=True)
class Boxes:
    """Boxes as a cover."""

    boxes: FloatArray
    is_ring: bool
    whole: tuple[float, float] = (0.0, 60.0)

    def stretches(self) -> tuple[FloatArray, FloatArray]:
        begin, length, _, width = self.boxes.T
        return stretches_between(np.stack([begin, begin + length], axis=1), width, self.whole)

    def over(self, stretch: FloatArray) -> Over:
        middle = stretch.mean(axis=1)[:, None]
        begin, length, low, width = self.boxes.T
        which, box = np.nonzero((begin < middle) & (middle < begin + length))
        lows, highs = np.stack([low[box]] * 2), np.stack([(low + width)[box]] * 2)
        return over_of(len(stretch), which, lows, highs, is_ring=self.is_ring)


def over_of(count: int, which: IntArray, low: FloatArray, high: FloatArray, *, is_ring: bool) -> Over:
    """Strips over so many stretches, whose widths rise or fall throughout."""
    one_way = np.ones(len(which), dtype=np.bool_)
    return Over(count=count, which=which, low=low, high=high, one_way=one_way, is_ring=is_ring)


@settings(max_examples=tried(60), deadline=None)
@given(boxes=BOXES, is_ring=st.booleans())
def test_the_most_found_is_the_most_of_all_stretches_and_is_where_it_is_told(
    *, boxes: list[Box], is_ring: bool
) -> None:
    corners = sorted({end for begin, length, _, _ in boxes for end in (begin, begin + length)})
    middles = [(one + two) / 2 for one, two in pairwise(corners) if two - one > SLIVER]
    most = max(covered_at(boxes, at, is_ring=is_ring) for at in middles)

    best, place = most_covered(Boxes(np.array(boxes), is_ring), GRAIN)

    assert most - GRAIN - 1e-9 <= best <= most + 1e-9
    # a box ends at the place told, so it is met on one of the two sides
    beside = [place + step for step in (-1e-7, -1e-10, 1e-10, 1e-7)]
    assert best == pytest.approx(max(covered_at(boxes, at, is_ring=is_ring) for at in beside), abs=1e-9)


def test_of_more_stretches_than_are_looked_at_in_one_go_none_is_forgotten() -> None:
    # 700 pairs of boxes: each pair lies on top of each other but the last, which has its two side by side. Their
    # sums of widths grow the other way, so that it is the last that is looked at.
    boxes = [box for pair in range(699) for box in [(float(2 * pair), 1.0, 0.0, 3.0 - pair / 1000)] * 2]
    boxes += [(1398.0, 1.0, 0.0, 2.2), (1398.0, 1.0, 3.0, 1.2)]

    best, place = most_covered(Boxes(np.array(boxes), is_ring=False, whole=(0.0, 1400.0)), GRAIN)

    assert best == pytest.approx(2.2 + 1.2)
    assert place in (1398.0, 1399.0)


def test_of_stretches_alike_the_first_is_told() -> None:
    boxes = [(float(2 * place), 1.0, 0.0, 2.0 + 1e-12 * (place % 3)) for place in range(400)]

    best, place = most_covered(Boxes(np.array(boxes), is_ring=False, whole=(0.0, 800.0)), GRAIN)

    assert best == pytest.approx(2.0)
    assert place == 0.0


def test_a_cover_of_nothing_covers_nothing_at_the_beginning() -> None:
    assert most_covered(Boxes(np.array([(3.0, 1.0, 0.0, 0.0)]), is_ring=False), GRAIN) == (0.0, 0.0)


LENGTHS = st.lists(st.tuples(st.integers(0, 7), st.floats(-4, 9), st.floats(0, 4), st.floats(0, 4)), max_size=40)


@settings(max_examples=tried(100), deadline=None)
@given(lengths=LENGTHS, is_ring=st.booleans(), best=st.sampled_from([0.0, 2.0, 5.0, 8.0]))
def test_the_most_at_an_end_is_what_working_out_every_stretch_gives(
    *, lengths: list[tuple[int, float, float, float]], is_ring: bool, best: float
) -> None:
    which, low, first, last = np.array(sorted(lengths), dtype=np.float64).reshape(-1, 4).T
    lows, highs = np.stack([low, low]), np.stack([low + first, low + last])
    over = over_of(8, which.astype(np.int64), lows, highs, is_ring=is_ring)
    for end in (0, 1):
        each = [
            covered([(lows[end, e], highs[end, e]) for e in np.flatnonzero(which == line)], is_ring=is_ring)
            for line in range(8)
        ]

        most, where = over.most_at(end, best)

        if max(each) > best + 1e-8:
            assert most == pytest.approx(max(each), abs=1e-9)
            assert where == next(line for line in range(8) if each[line] > max(each) - SLIVER)
        else:
            assert most <= best + 1e-8


@settings(max_examples=tried(100), deadline=None)
@given(lengths=LENGTHS, is_ring=st.booleans(), limit=st.floats(0, 12))
def test_a_bound_above_the_limit_is_the_less_of_the_sum_and_of_what_is_covered_together(
    *, lengths: list[tuple[int, float, float, float]], is_ring: bool, limit: float
) -> None:
    which, low, first, last = np.array(sorted(lengths), dtype=np.float64).reshape(-1, 4).T
    lows, highs = np.stack([low, low]), np.stack([low + first, low + last])

    bounds = over_of(8, which.astype(np.int64), lows, highs, is_ring=is_ring).bounds(limit)

    for line, bound in enumerate(bounds.tolist()):
        here = [(low[e], low[e] + max(first[e], last[e])) for e in np.flatnonzero(which == line)]
        exact = min(sum(high - low for low, high in here), covered(here, is_ring=is_ring))
        assert bound == pytest.approx(exact, abs=1e-9) if bound > limit else exact <= limit + 1e-9


def test_a_strip_that_slants_is_bounded_by_its_width_where_that_rises_or_falls_throughout_and_else_by_its_reach() -> (
    None
):
    low, high = np.array([[0.0, 0.0], [1.0, 1.0]]), np.array([[2.0, 2.0], [3.5, 3.5]])
    one_way = np.array([True, False])
    over = Over(count=2, which=np.array([0, 1]), low=low, high=high, one_way=one_way, is_ring=False)

    # 2 wide at one end and 2.5 at the other; from the least beginning to the greatest end it is 3.5
    assert over.bounds(0.0).tolist() == [2.5, 3.5]
