"""A tune cut into the passages of several discs, at the best places there are.

A cut lies just before an onset, and the next disc begins with it. Of all ways to cut, the one taken
loses the fewest notes past the ends of the turns; of those, the one of the fewest points:

    points = Σ over cuts   of layout.arrange.cut_costs
           + Σ over discs  of (thousandths of an even share by which the disc is too long or too short)²

A disc's share runs from its first onset to the next disc's, the last one's to the last onset. Every term
but the cut's own is a Monge array of (first onset, first onset of the next disc): what a disc loses and how
long it is. So the best beginning of a disc never moves back as its end moves on, and a search by halves
finds the best of all cuts exactly, in discs × onsets × log(onsets) steps (Aggarwal, Klawe, Moran, Shor &
Wilber 1987, Geometric applications of a matrix-searching algorithm, Algorithmica 2:195).
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.arrange.cut_costs import cut_costs
from layout.arrange.moments import ON_TIME_S, moments_of
from layout.arrange.passage import passage_of
from layout.documents.settings import Settings
from layout.errors import DocumentError, Problem
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.filling import least_turn_s
from layout.read.score import Score

EVEN = 1000  # thousandths; the share of an even disc
_NOT_ASKED = ("outside-passage", "ruled-out")


def disc_passages(
    score: Score, settings: Settings, ruled_out: frozenset[int], free_turn_s: float, factor: float
) -> tuple[tuple[float, float], ...]:
    """The passage [from_s, to_s) of each of settings.discs discs, in order, in the tune's own time.

    The first begins where the settings' passage does, each other with its first note asked for, where
    the one before it ends; the last ends where the settings' passage does, at infinity where that is open.
    One disc has the whole passage, notes or none.

    Args:
        score: The tune.
        settings: Discs, passage and channels are used.
        ruled_out: Notes that rulings leave out.
        free_turn_s: What of a turn music may fill.
        factor: The speed: the tune's time divided by this is the disc's.

    Raises:
        DocumentError: Of the settings: at /discs where fewer moments than discs have notes; else as
            layout.arrange.moments.
    """
    whole = passage_of(score, settings.passage)
    if settings.discs == 1:
        return ((whole.from_s, whole.to_s),)
    asked = _asked(score, settings, ruled_out)
    onset_s = score.onset_s[asked]
    at_s, starts = np.unique(onset_s, return_index=True)
    if len(at_s) < settings.discs:
        raise _too_few(settings.discs, len(at_s))
    tune = _Tune(at_s=at_s, first_note=np.append(starts, len(asked)), from_s=whole.from_s)
    reach = _reach(tune, free_turn_s, factor)
    discs = _discs(tune, reach, cut_costs(score, asked, starts), settings.discs)
    begins_s = [whole.from_s, *at_s[_best_cuts(discs)].tolist()]
    return tuple(zip(begins_s, [*begins_s[1:], whole.to_s], strict=True))


def fitting_factor(score: Score, settings: Settings, ruled_out: frozenset[int], free_turn_s: float) -> float:
    """The least speed, within the settings' bounds, at which settings.discs discs lose no note; else the most.

    For one disc it is what layout.arrange.moments takes for speed "fit". Where each moment has a disc of
    its own, or no note is asked for, any speed fits and the one as written, or the nearest, is taken.

    Args:
        score: The tune.
        settings: Discs, passage, channels and the bounds of the speed are used.
        ruled_out: Notes that rulings leave out.
        free_turn_s: What of a turn music may fill.

    Raises:
        DocumentError: As layout.arrange.moments.
    """
    from_s = passage_of(score, settings.passage).from_s
    onset_s = np.unique(score.onset_s[_asked(score, settings, ruled_out)]).tolist()
    longest_s = least_turn_s(onset_s, from_s, settings.discs)
    wanted = longest_s / free_turn_s if longest_s > 0 else 1.0
    return min(max(wanted, settings.speed.least), settings.speed.most)


def _asked(score: Score, settings: Settings, ruled_out: frozenset[int]) -> IntArray:
    """The notes asked for on any disc, rising; the speed and the turn decide nothing here."""
    out = moments_of(score, settings, ruled_out, math.inf, 1.0).out
    asked = np.ones(score.note_count, dtype=np.bool_)
    asked[[note for note, reason in out.items() if reason in _NOT_ASKED]] = False
    notes: IntArray = np.flatnonzero(asked)
    return notes


def _too_few(disc_count: int, moment_count: int) -> DocumentError:
    moments = "1 moment" if moment_count == 1 else f"{moment_count} moments"
    message = (
        f"{disc_count} discs need a note each, and the notes asked for begin at {moments}; "
        f"ask for {max(moment_count, 1)}, or for a longer passage"
    )
    return DocumentError(document="settings", problems=(Problem(pointer="/discs", message=message),))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Tune:
    """The notes asked for, by onset.

    Attributes:
        at_s: Shape (n,). Every moment at which notes begin, rising.
        first_note: Shape (n + 1,). How many notes begin before each, and at last how many there are.
        from_s: Where the first disc begins; not after at_s[0].
    """

    at_s: FloatArray
    first_note: IntArray
    from_s: float

    @property
    def begins_s(self) -> FloatArray:
        """Where a disc begins whose first onset is each: the first with the passage, others with the onset."""
        return np.append(self.from_s, self.at_s[1:])


def _reach(tune: _Tune, free_turn_s: float, factor: float) -> IntArray:
    """Shape (n,). For a disc that begins with each onset, the first onset past its turn; n where none is."""
    begins_s, count = tune.begins_s, len(tune.at_s)
    limit_s = free_turn_s + ON_TIME_S
    reach: IntArray = np.searchsorted(tune.at_s, begins_s + limit_s * factor, side="right")
    # The search rounds otherwise than the moments of layout.arrange.moments, which decide.
    while True:
        held = (tune.at_s[np.minimum(reach, count - 1)] - begins_s) / factor <= limit_s
        not_held = (tune.at_s[np.maximum(reach, 1) - 1] - begins_s) / factor > limit_s
        step = ((reach < count) & held).astype(np.int64) - ((reach > 0) & not_held)
        if not step.any():
            return reach
        reach = reach + step


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Discs:
    """The points of every disc that could be, and of every cut.

    Attributes:
        disc_count: How many discs there are to be.
        cut: Shape (n,). Points of a cut before each onset.
        share: Shape (n + 1,). Thousandths of an even share up to each onset, and up to the end.
        held_notes: Shape (n,). Notes before the first onset that a disc beginning with each does not reach.
        first_note: Shape (n + 1,). As in _Tune.
        lost_note: Points of a note past the turn: more than all else together can have.
    """

    disc_count: int
    cut: IntArray
    share: IntArray
    held_notes: IntArray
    first_note: IntArray
    lost_note: int

    def points(self, first: IntArray, after: IntArray) -> IntArray:
        """Points of the discs from an onset up to but without another, n for the end; broadcast."""
        lost = np.maximum(self.first_note[after] - np.maximum(self.held_notes[first], self.first_note[first]), 0)
        off = self.share[after] - self.share[first] - EVEN
        points: IntArray = self.lost_note * lost + off * off
        return points


def _discs(tune: _Tune, reach: IntArray, cut: IntArray, disc_count: int) -> _Discs:
    tune_s = float(tune.at_s[-1]) - tune.from_s
    share = np.rint(EVEN * disc_count * (tune.begins_s - tune.from_s) / tune_s).astype(np.int64)
    # At most 50,000 notes held past 23 cuts and 24 discs a whole tune too long: 1.2e12, times 50,000 notes 6e16.
    most_points = (disc_count - 1) * int(cut.max()) + disc_count * (EVEN * disc_count) ** 2
    return _Discs(
        disc_count=disc_count,
        cut=cut,
        share=np.append(share, EVEN * disc_count),
        held_notes=tune.first_note[reach],
        first_note=tune.first_note,
        lost_note=most_points + 1,
    )


def _best_cuts(discs: _Discs) -> list[int]:
    """The onsets before which to cut, rising; of equal ways the one that cuts earlier, seen from the end."""
    count = len(discs.cut)
    best = discs.points(np.zeros(1, dtype=np.int64), np.arange(count + 1))
    begins: list[IntArray] = []
    for number in range(2, discs.disc_count + 1):
        last = number == discs.disc_count
        after = np.arange(count, count + 1) if last else np.arange(number, count)
        points, first = _best_first(discs, best[:count] + discs.cut, after, number - 1)
        best, begin = np.zeros(count + 1, dtype=np.int64), np.zeros(count + 1, dtype=np.int64)
        best[after], begin[after] = points, first
        begins.append(begin)
    cuts, after_last = [], count
    for begin in reversed(begins):
        after_last = int(begin[after_last])
        cuts.append(after_last)
    return cuts[::-1]


def _best_first(discs: _Discs, before: IntArray, after: IntArray, least: int) -> tuple[IntArray, IntArray]:
    """For discs that end before each of these onsets: the least points so far, and the disc's first onset.

    Rows are taken by halves: the middle one first, then those between rows already known, whose
    own choices bound theirs.

    Args:
        discs: Points.
        before: Shape (n,). Points of all that comes before a disc that begins with each onset.
        after: Shape (m,). Rising by one, at least 1; m ≥ 1.
        least: The first onset a disc may begin with.
    """
    count = len(after)
    points, chosen = np.zeros(count, dtype=np.int64), np.zeros(count, dtype=np.int64)
    stride = 1 << (count.bit_length() - 1)
    while stride:
        rows = np.arange(stride - 1, count, 2 * stride)
        low = np.where(rows >= stride, chosen[np.maximum(rows - stride, 0)], least)
        above = np.where(rows + stride < count, chosen[np.minimum(rows + stride, count - 1)], after[rows] - 1)
        width = np.minimum(above, after[rows] - 1) - low + 1
        begin = np.cumsum(width) - width
        first = np.arange(int(width.sum())) - np.repeat(begin - low, width)
        every = before[first] + discs.points(first, np.repeat(after[rows], width))
        points[rows] = np.minimum.reduceat(every, begin)
        at_best = np.flatnonzero(every == np.repeat(points[rows], width))
        chosen[rows] = first[at_best[np.searchsorted(at_best, begin)]]
        stride //= 2
    return points, chosen
