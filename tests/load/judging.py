"""Figures out of what was measured, and what must hold of them."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

S_PER_HOUR = 3600.0
MB = 1e6
LEAST_JUDGED = 100  # answers of a kind; the 99th percentile of fewer is their longest


@dataclass(frozen=True, slots=True, kw_only=True)
class Slope:
    """A straight line through measurements over time.

    Attributes:
        per_hour: How much they rise.
        noise_per_hour: Twice the standard error of that: what they would seem to rise by chance alone.
    """

    per_hour: float
    noise_per_hour: float

    @property
    def rises(self) -> bool:
        """Whether they rise by more than chance explains."""
        return self.per_hour > self.noise_per_hour


def slope_of(at_s: Sequence[float], values: Sequence[float]) -> Slope:
    """The line of least squares, and how sure it is.

    Neighbours in time are alike, so that there are fewer independent measurements than measurements: n(1 - r)/(1 + r),
    r the correlation of each remainder with the next (B. D. Santer and others, Journal of Geophysical Research 105
    (2000), page 7337, equation 6).

    Args:
        at_s: When, in seconds.
        values: What was measured, at least four.
    """
    count = len(at_s)
    mean_s, mean = sum(at_s) / count, sum(values) / count
    spread = sum((s - mean_s) ** 2 for s in at_s)
    slope = sum((s - mean_s) * (value - mean) for s, value in zip(at_s, values, strict=True)) / spread
    rests = [value - mean - slope * (s - mean_s) for s, value in zip(at_s, values, strict=True)]
    squares = sum(rest**2 for rest in rests)
    alike = sum(a * b for a, b in pairwise(rests)) / squares if squares else 0.0
    independent = max(count * (1 - max(alike, 0.0)) / (1 + max(alike, 0.0)), 3.0)
    error = math.sqrt(squares / (independent - 2) / spread)
    return Slope(per_hour=slope * S_PER_HOUR, noise_per_hour=2 * error * S_PER_HOUR)


def share(values: Sequence[float], of_hundred: float) -> float:
    """The value that so many of a hundred do not pass; the next that was measured, none between two.

    Args:
        values: At least one.
        of_hundred: Above 0, at most 100.
    """
    return sorted(values)[max(math.ceil(len(values) * of_hundred / 100), 1) - 1]
