import math
from itertools import combinations, pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.mechanics.filling import Filled, least_turn_s, turns_filled

# 1024ths of a second, so that sums are exact; fine enough that a search which skips a hundredth misses some
ONSETS = st.lists(st.integers(0, 400), min_size=1, max_size=8, unique=True).map(
    lambda ticks: sorted(tick / 1024 for tick in ticks)
)


def test_each_turn_takes_all_it_can_and_the_next_begins_with_the_first_onset_left() -> None:
    # from 0: 0, 1, 2; from 5: 5, 7; from 8: 8. One onset more: 5 - 0, or 8 - 5.
    filled = turns_filled([0.0, 1.0, 2.0, 5.0, 7.0, 8.0], 0.0, 2.0)

    assert filled == Filled(turn_count=3, longest_s=2.0, next_s=3.0)


def test_silence_before_the_first_onset_counts() -> None:
    assert turns_filled([1.0, 2.0], 0.0, 1.0) == Filled(turn_count=2, longest_s=1.0, next_s=2.0)


def test_no_onsets_fill_no_turn() -> None:
    assert turns_filled([], 0.0, 1.0) == Filled(turn_count=0, longest_s=0.0, next_s=math.inf)
    assert least_turn_s([], 0.0, 3) == 0.0


def test_a_turn_that_does_not_reach_the_first_onset_is_refused() -> None:
    with pytest.raises(ValueError, match=r"a turn of 1 s from 0 s on does not reach the onset at 1\.5 s"):
        turns_filled([1.5], 0.0, 1.0)


@given(onset_s=ONSETS, turn_count=st.integers(1, 5), earlier_s=st.sampled_from([0.0, 0.5]))
def test_no_way_to_part_the_onsets_needs_less(onset_s: list[float], turn_count: int, earlier_s: float) -> None:
    from_s = onset_s[0] - earlier_s
    parts = min(turn_count, len(onset_s))

    least_s = least_turn_s(onset_s, from_s, turn_count)

    ways = [list(pairwise([0, *cuts, len(onset_s)])) for cuts in combinations(range(1, len(onset_s)), parts - 1)]
    longest = [max(onset_s[after - 1] - (onset_s[first] if first else from_s) for first, after in way) for way in ways]
    assert least_s == min(longest)
    assert turns_filled(onset_s, from_s, least_s).turn_count <= turn_count
