"""The board: which plucks stand on which tracks so far, and whether one more fits.

The board is the one place that knows the rules of nearness. All angles are turned angles
φ = 2π·asked/T, since on one track working edges are as far apart as their φ; for two tracks the
forbidden stretch of `Spacing` is moved from working-edge angles to φ once, with the direction of
turning and both tracks' release angles. A disc goes on turning, so all of it goes round.
"""

import math
from bisect import bisect_left, bisect_right
from collections.abc import Iterable, Iterator

import numpy as np

from layout.arrange.asked import NO_TRACK, Asked, Conflict
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import FULL_TURN_RAD, Turning

# Edges may be this much nearer than their least angle: a repeat asked exactly at its least time is
# in order, whatever rounding makes of it. At 210 mm it is 0.2 nm; far below any cutter.
ROUNDING_RAD = 1e-9

_Beside = tuple[int, float, float]  # another track, and where its φ − ours must not lie


class Board:
    """Plucks on tracks, kept sorted by angle; every change keeps the rules if `conflict` is asked first."""

    def __init__(self, asked: Asked, turning: Turning, spacing: Spacing) -> None:
        self._spacing = spacing
        self.turned_rad = FULL_TURN_RAD * asked.asked_s / turning.revolution_s
        self.least_rad: list[float] = (spacing.least_rad - ROUNDING_RAD).tolist()
        self._turned: list[float] = self.turned_rad.tolist()
        self._edges: list[list[float]] = [[] for _ in self.least_rad]
        self._plucks: list[list[int]] = [[] for _ in self.least_rad]
        self._track_of = [NO_TRACK] * len(self._turned)
        self._beside = _besides(turning, spacing)
        self.pairs = [(pair.inner_index, pair.outer_index) for pair in spacing.between]

    @property
    def track_index(self) -> IntArray:
        """Shape (n,). The track of each pluck, or NO_TRACK."""
        return frozen_ints(self._track_of)

    def track_of(self, pluck: int) -> int:
        """The track a pluck stands on, or NO_TRACK."""
        return self._track_of[pluck]

    def put(self, pluck: int, track: int) -> None:
        """Stand a pluck on a track."""
        at = bisect_left(self._edges[track], self._turned[pluck])
        self._edges[track].insert(at, self._turned[pluck])
        self._plucks[track].insert(at, pluck)
        self._track_of[pluck] = track

    def take(self, pluck: int) -> None:
        """Take a pluck off its track."""
        track = self._track_of[pluck]
        at = self._plucks[track].index(pluck)
        del self._edges[track][at], self._plucks[track][at]
        self._track_of[pluck] = NO_TRACK

    def conflict(self, pluck: int, track: int) -> Conflict | None:
        """The nearest thing that forbids a pluck, not yet on the board, on a track; None where it fits."""
        apart_rad, other = self._nearest(pluck, track)
        found = []
        if apart_rad < self.least_rad[track]:
            reason = self._spacing.reason(track, apart_rad)
            found.append(
                Conflict(track_index=track, other=other, other_track_index=track, apart_rad=apart_rad, reason=reason)
            )
        found += self._conflicts_beside(pluck, track)
        return min(found, key=lambda conflict: conflict.apart_rad, default=None)

    def most_rested(self, pluck: int, tracks: Iterable[int]) -> int | None:
        """Of the tracks a pluck fits on, the one that sounded longest ago; of unused ones the fastest.

        None where it fits on none.
        """
        fitting = [track for track in tracks if self.conflict(pluck, track) is None]
        return min(fitting, key=lambda t: (self._last_before(pluck, t), self.least_rad[t], -t), default=None)

    def has_room(self, plucks: IntArray, track: int) -> BoolArray:
        """Shape of plucks. Which of them, none yet on the board, fit on a track: `conflict` for many at once."""
        turned = self.turned_rad[plucks]
        edges = _thrice_round(self._edges[track])
        after = np.searchsorted(edges, turned)
        if len(edges):
            apart_rad = np.minimum(turned - edges[after - 1], edges[after] - turned)
        else:
            apart_rad = np.full(len(turned), FULL_TURN_RAD)
        room = apart_rad >= self.least_rad[track]
        for other_track, low, high in self._beside[track]:
            edges = _thrice_round(self._edges[other_track])
            before_low = np.searchsorted(edges, turned + low, side="right")
            room &= np.searchsorted(edges, turned + high) <= before_low
        return np.asarray(room)

    def _nearest(self, pluck: int, track: int) -> tuple[float, int]:
        edges, plucks, turned = self._edges[track], self._plucks[track], self._turned[pluck]
        if not edges:
            return FULL_TURN_RAD, pluck
        after = bisect_left(edges, turned)
        before_rad = turned - edges[after - 1] + (FULL_TURN_RAD if after == 0 else 0.0)
        wraps = after == len(edges)
        after_rad = edges[0] + FULL_TURN_RAD - turned if wraps else edges[after] - turned
        if before_rad <= after_rad:
            return before_rad, plucks[after - 1]
        return after_rad, plucks[0 if wraps else after]

    def _last_before(self, pluck: int, track: int) -> float:
        at = bisect_left(self._edges[track], self._turned[pluck])
        return self._edges[track][at - 1] if at else -math.inf

    def _conflicts_beside(self, pluck: int, track: int) -> Iterator[Conflict]:
        for other_track, low, high in self._beside[track]:
            edges = self._edges[other_track]
            for turn_rad in (-FULL_TURN_RAD, 0.0, FULL_TURN_RAD):
                here = self._turned[pluck] + turn_rad
                for at in range(bisect_right(edges, here + low), bisect_left(edges, here + high)):
                    yield Conflict(
                        track_index=track,
                        other=self._plucks[other_track][at],
                        other_track_index=other_track,
                        apart_rad=abs(edges[at] - here),
                        reason="web",
                    )


def _thrice_round(edges: list[float]) -> FloatArray:
    """The edges of the turn before, of this turn and of the next, so that every φ has both neighbours."""
    one_turn = np.array(edges)
    return np.concatenate([one_turn - FULL_TURN_RAD, one_turn, one_turn + FULL_TURN_RAD])


def _besides(turning: Turning, spacing: Spacing) -> list[list[_Beside]]:
    """For each track the tracks it may come too near to, with the forbidden stretch of φ.

    Forbidden is from < α_outer − α_inner < to with α = s·φ + release, so with Δ the difference of
    the releases φ_outer − φ_inner lies between s·(from − Δ) and s·(to − Δ).
    """
    besides: list[list[_Beside]] = [[] for _ in turning.radius_mm]
    for pair in spacing.between:
        inner, outer = pair.inner_index, pair.outer_index
        release_rad = float(turning.release_rad[outer] - turning.release_rad[inner])
        ends = (turning.direction * (end - release_rad) for end in (pair.from_rad, pair.to_rad))
        low, high = sorted(ends)
        besides[inner].append((outer, low + ROUNDING_RAD, high - ROUNDING_RAD))
        besides[outer].append((inner, -high + ROUNDING_RAD, -low - ROUNDING_RAD))
    return besides
