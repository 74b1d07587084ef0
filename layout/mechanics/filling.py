"""Turns filled with onsets one after the other, each as far as it goes: how many a tune takes."""

import math
from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Filled:
    """Turns filled one after the other.

    Attributes:
        turn_count: How many; 0 for no onsets. No fewer hold them.
        longest_s: From the beginning of a turn to its last onset, the most of all turns.
        next_s: How long a turn would have to be for one of them to take another onset; infinite where
            none is left to take.
    """

    turn_count: int
    longest_s: float
    next_s: float


def turns_filled(onset_s: Sequence[float], from_s: float, turn_s: float) -> Filled:
    """Onsets put on turns: the first turn begins at from_s, each other with the first onset left.

    Args:
        onset_s: Rising, none before from_s.
        from_s: Where the first turn begins.
        turn_s: From a turn's beginning to the last moment on it; the first onset must lie within.

    Raises:
        ValueError: The first onset lies past the first turn.
    """
    if onset_s and onset_s[0] - from_s > turn_s:
        raise ValueError(f"a turn of {turn_s:g} s from {from_s:g} s on does not reach the onset at {onset_s[0]:g} s")
    begin_s, after, turn_count, longest_s, next_s = from_s, 0, 0, 0.0, math.inf
    while after < len(onset_s):
        after = bisect_right(onset_s, turn_s, lo=after, key=lambda moment_s: moment_s - begin_s)
        turn_count, longest_s = turn_count + 1, max(longest_s, onset_s[after - 1] - begin_s)
        if after < len(onset_s):
            next_s, begin_s = min(next_s, onset_s[after] - begin_s), onset_s[after]
    return Filled(turn_count=turn_count, longest_s=longest_s, next_s=next_s)


def least_turn_s(onset_s: Sequence[float], from_s: float, turn_count: int) -> float:
    """The least time that, given to every turn, holds these onsets on so many; 0.0 for no onsets.

    Exact: the time between a beginning and an onset. Halving the distance between a time that is too
    short and one that is enough, each step moves to the next time at which anything changes.

    Args:
        onset_s: Rising, none before from_s.
        from_s: Where the first turn begins.
        turn_count: At least 1.
    """
    if not onset_s:
        return 0.0
    short_s, enough_s = onset_s[0] - from_s, onset_s[-1] - from_s
    while short_s < enough_s:
        filled = turns_filled(onset_s, from_s, (short_s + enough_s) / 2)
        if filled.turn_count <= turn_count:
            enough_s = filled.longest_s
        else:
            short_s = filled.next_s
    return enough_s
