"""Where the most is covered: along which ray, or along which ring, openings take most away.

Every opening is cut into strips between two pieces of its outline, each rising or falling throughout, so that over a
stretch without a corner an opening covers no less than what lies between the ends there and no more than the
least and the greatest of them. Stretches that may hold the most cut are halved until no more can be hidden in
them than a grain. Openings that overlap are counted once: what they cover together is at most the sum of their
widths, and only where that sum may matter is it worked out.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray
from layout.mechanics.turning import FULL_TURN_RAD

SLIVER = 1e-9  # mm or rad; a stretch between two corners below it is rounding
_ROUNDING = 1e-6  # mm or rad; far above what sums of some thousand lengths leave, far below every grain
_AT_ONCE = 256  # stretches looked at in one go: bounds the memory


class Cover(Protocol):
    """What is cut away along lines of one kind; a stretch is one of places where such lines lie."""

    @property
    def whole(self) -> tuple[float, float]:
        """The stretch of all lines."""

    def stretches(self) -> tuple[FloatArray, FloatArray]:
        """The stretches between corners, shape (k, 2), and what is covered in each at most, shape (k,)."""

    def over(self, stretch: FloatArray) -> "Over":
        """What lies over stretches without a corner inside, shape (k, 2)."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Over:
    """The strips over some stretches, and where each begins and ends on the line at either end of its stretch.

    Attributes:
        count: How many stretches there are.
        which: Shape (e,). The stretch that each strip lies over, rising.
        low: Shape (2, e). Where it begins, at the beginning of the stretch and at its end.
        high: Shape (2, e). Where it ends.
        one_way: Shape (e,). Whether the width of a strip rises or falls throughout the stretch.
        is_ring: Whether the lines are rings, along which angles begin again after a turn.
    """

    count: int
    which: IntArray
    low: FloatArray
    high: FloatArray
    one_way: BoolArray
    is_ring: bool

    def most_at(self, end: int, best: float) -> tuple[float, int]:
        """The most that is covered at one end (0, 1) of any stretch, if more than the best, and the first such stretch.

        The widths tell where that may be: a sum of widths is never below what they cover together.
        """
        lengths = self._lengths(self.low[end], self.high[end])
        widths = self._sums(self.high[end] - self.low[end])
        widest = int(np.argmax(widths))
        if widths[widest] < best - _ROUNDING:
            return 0.0, 0
        least = max(best, lengths.together(np.arange(self.count) == widest)[widest])
        covered = lengths.together(widths >= least - _ROUNDING)
        top = int(np.argmax(covered > covered.max() - SLIVER))
        return float(covered[top]), top

    def bounds(self, limit: float) -> FloatArray:
        """Shape (count,). What is covered inside each stretch at most; exactly so where that is above the limit."""
        low, high = self.low.min(axis=0), self.high.max(axis=0)
        # Where a width rises or falls throughout, it is at most what it is at an end.
        widths = np.where(self.one_way, (self.high - self.low).max(axis=0), high - low)
        most = self._sums(widths)
        above = most > limit
        if above.any():
            most[above] = np.minimum(most, self._lengths(low, high).together(above))[above]
        return most

    def _sums(self, widths: FloatArray) -> FloatArray:
        return np.asarray(np.bincount(self.which, widths, self.count), dtype=np.float64)

    def _lengths(self, low: FloatArray, high: FloatArray) -> "_Lengths":
        if not self.is_ring:
            return _Lengths(count=self.count, which=self.which, low=low, high=high)
        start = np.mod(low, FULL_TURN_RAD)
        past = start + (high - low) - FULL_TURN_RAD
        again = past > 0
        return _Lengths(
            count=self.count,
            which=np.concatenate([self.which, self.which[again]]),
            low=np.concatenate([start, np.zeros(np.count_nonzero(again))]),
            high=np.concatenate([np.minimum(past, 0.0) + FULL_TURN_RAD, past[again]]),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Lengths:
    """Lengths on several lines.

    Attributes:
        count: How many lines there are.
        which: Shape (e,). The line of each length.
        low: Shape (e,). Where it begins.
        high: Shape (e,). Where it ends.
    """

    count: int
    which: IntArray
    low: FloatArray
    high: FloatArray

    def together(self, wanted: BoolArray) -> FloatArray:
        """Shape (count,). What the lengths of each wanted line cover, what lies in several counted once; else 0."""
        if not len(self.which):
            return np.zeros(self.count)
        # The lines are moved apart, so that one running maximum serves them all.
        apart = float(self.high.max() - self.low.min()) + 1.0
        chosen = wanted[self.which]
        which, low, high = self.which[chosen], self.low[chosen], self.high[chosen]
        order = np.lexsort((low, which))
        which, low, high = which[order], low[order], high[order]
        moved = which * apart
        reach = np.maximum.accumulate(high + moved)
        before = np.concatenate([[-np.inf], reach[:-1]])
        added = np.maximum(reach - np.maximum(low + moved, before), 0.0)
        return np.asarray(np.bincount(which, added, self.count), dtype=np.float64)


def most_covered(cover: Cover, grain: float) -> tuple[float, float]:
    """The most that is covered anywhere, within the grain, and where."""
    stretch, most = cover.stretches()
    best, place = 0.0, cover.whole[0]
    while True:
        live = np.flatnonzero((most > best + grain) & (stretch[:, 1] - stretch[:, 0] > SLIVER))
        if not len(live):
            return best, place
        now = live[_first(most[live], grain)]
        looked_at = stretch[now]
        over = cover.over(looked_at)
        for end in (0, 1):
            covered, which = over.most_at(end, best)
            if covered > best + SLIVER:
                best, place = covered, float(looked_at[which, end])
        most[now] = 0.0  # their halves stand for them from now on
        later = live[most[live] > best + grain]
        bound = over.bounds(best + grain)
        middle = looked_at.mean(axis=1)
        halves = [np.stack([looked_at[:, 0], middle], axis=1), np.stack([middle, looked_at[:, 1]], axis=1)]
        stretch = np.concatenate([stretch[later], *halves])
        most = np.concatenate([most[later], bound, bound])


def _first(most: FloatArray, grain: float) -> IntArray:
    """The places of the stretches to look at first: at most _AT_ONCE, the most covered first.

    Rounded, so that of places alike but for the last digit the first is told on every machine.
    """
    rank = -np.rint(most / grain)
    if len(rank) > _AT_ONCE:
        last = np.partition(rank, _AT_ONCE - 1)[_AT_ONCE - 1]
        before = np.flatnonzero(rank < last)
        at_last = np.flatnonzero(rank == last)[: _AT_ONCE - len(before)]
        among = np.concatenate([before, at_last])
        return among[np.argsort(rank[among], kind="stable")]
    return np.argsort(rank, kind="stable")


def stretches_between(
    from_to: FloatArray, most: FloatArray, whole: tuple[float, float]
) -> tuple[FloatArray, FloatArray]:
    """The stretches between the ends of strips, and what is covered in each at most: every strip there at its most.

    Args:
        from_to: Shape (n, 2). From where to where each strip lies.
        most: Shape (n,). What it covers at most.
        whole: From where to where lines lie.
    """
    within = np.clip(from_to, *whole)
    stops, place = np.unique(within, return_inverse=True)
    place = place.reshape(within.shape)
    change = np.bincount(place[:, 0], most, len(stops)) - np.bincount(place[:, 1], most, len(stops))
    # Sums and differences of some thousand lengths leave rounding far below the grain.
    return np.stack([stops[:-1], stops[1:]], axis=1), np.cumsum(change)[:-1]
