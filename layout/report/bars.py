"""The bars that suffer most."""

import numpy as np

from layout.arrange.arrangement import Arrangement
from layout.mechanics.arrays import IntArray
from layout.read.score import Score
from layout.report.fates import Fates
from layout.report.report import BarLoss

MOST_BARS = 5  # bars; what a person looks at, bar by bar; layout.json has the others


def worst_bars(score: Score, arrangement: Arrangement, fates: Fates) -> tuple[BarLoss, ...]:
    """The bars that lose the most weight, the greatest loss first, of equals the earlier; () where none loses.

    A note belongs to the bar in which it starts.
    """
    bars = len(score.bar_s)
    bar = np.searchsorted(score.bar_s, score.onset_s, side="right") - 1
    lost = fates.asked & ~fates.kept
    asked_weight = _sums(bar[fates.asked], arrangement.note_weight[fates.asked], bars)
    lost_weight = _sums(bar[lost], arrangement.note_weight[lost], bars)
    asked_count = np.bincount(bar[fates.asked], minlength=bars)
    lost_count = np.bincount(bar[lost], minlength=bars)
    order = np.lexsort((np.arange(bars), -lost_weight))[:MOST_BARS]
    return tuple(
        BarLoss(
            bar=place + 1,
            start_s=float(score.bar_s[place]),
            note_count=int(asked_count[place]),
            lost_count=int(lost_count[place]),
            asked_weight=int(asked_weight[place]),
            lost_weight=int(lost_weight[place]),
        )
        for place in order.tolist()
        if lost_weight[place] > 0
    )


def _sums(bar: IntArray, weight: IntArray, bars: int) -> IntArray:
    # Not bincount, which would sum the weights as floats.
    sums = np.zeros(bars, dtype=np.int64)
    np.add.at(sums, bar, weight)
    return sums
