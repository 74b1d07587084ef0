"""Where something comes to be enough, found by halving an interval, with few looks at it."""

from collections.abc import Callable

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray

HALVINGS = 50  # of an interval under one turn: ends below 1e-14 rad, the grain of a double
_SECANT_STEPS = 6  # after the two guesses; with fewer, more middles are looked at, and the end is the same
_BESIDE = 1e-12  # of the unit looked along: so near the crossing both sides are looked at, then only what lies between


def least_enough(
    spare: Callable[[IntArray, FloatArray], FloatArray], most: FloatArray, near: tuple[FloatArray, FloatArray]
) -> FloatArray:
    """The least value from 0 on at which nothing is missing, for each of several things.

    The interval is halved HALVINGS times. Where a middle lies beyond a place looked at already, what is there is known,
    since more of the value leaves more to spare; so it is the same end as by looking at every middle, unless
    rounding alone decides between two. Secants find the crossing first.

    Args:
        spare: What is to spare of things, by their places, at values of theirs; below 0 something is missing.
        most: Shape (n,). The values that end the intervals; given back where even just below them something is missing.
        near: Shape (n,) each. Values to begin the secants with: if they are bad guesses, more is looked at.

    Returns:
        Shape (n,).
    """
    every = np.arange(len(most))
    missing, enough = np.zeros(len(most)), most.copy()

    def seen(at: FloatArray) -> FloatArray:
        nonlocal missing, enough
        left = spare(every, at)
        enough = np.where(left >= 0, np.minimum(enough, at), enough)
        missing = np.where(left < 0, np.maximum(missing, at), missing)
        return left

    before, at = near
    left_before, left = seen(before), seen(at)
    for _ in range(_SECANT_STEPS):
        rise = left - left_before
        step = np.divide(left * (at - before), rise, out=np.zeros_like(rise), where=rise != 0)
        before, left_before, at = at, left, np.clip(at - step, 0.0, most)
        left = seen(at)
    seen(np.maximum(at - _BESIDE, 0.0))
    seen(np.minimum(at + _BESIDE, most))
    low, high = np.zeros(len(most)), most
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        is_enough = middle >= enough
        unsure = np.flatnonzero(~is_enough & (middle > missing))
        if len(unsure):
            is_enough[unsure] = spare(unsure, middle[unsure]) >= 0
        high, low = np.where(is_enough, middle, high), np.where(is_enough, low, middle)
    return high
