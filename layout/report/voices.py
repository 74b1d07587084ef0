"""The asked notes counted, voice by voice."""

import math

import numpy as np

from layout.arrange.arrangement import Arrangement
from layout.mechanics.arrays import BoolArray
from layout.report.fates import Fates
from layout.report.report import Tally


def tally(arrangement: Arrangement, fates: Fates, which: BoolArray) -> Tally:
    """What became of those notes asked for that are marked; zeros where none is.

    Args:
        arrangement: Its weights are used.
        fates: Of its notes.
        which: Shape (notes,). The notes of the voice; those not asked for do not count.
    """
    asked = which & fates.asked
    kept = asked & fates.kept
    nudges_ms = fates.nudge_ms[kept]
    nudged_ms = nudges_ms[nudges_ms > 0].tolist()
    return Tally(
        note_count=int(np.count_nonzero(asked)),
        kept_count=int(np.count_nonzero(kept)),
        asked_weight=int(arrangement.note_weight[asked].sum()),
        kept_weight=int(arrangement.note_weight[kept].sum()),
        octave_count=int(np.count_nonzero(kept & fates.moved)),
        nudged_count=len(nudged_ms),
        largest_nudge_ms=max(nudged_ms, default=0.0),
        mean_nudge_ms=math.fsum(nudged_ms) / max(len(nudged_ms), 1),
        covered_count=int(np.count_nonzero(kept & fates.covered)),
        left_out=fates.reasons_of(asked),
    )


def melody_tally(arrangement: Arrangement, fates: Fates) -> Tally | None:
    """What became of the melody; None where it is the top line, as where no lead channel is stated."""
    if np.array_equal(arrangement.melody, arrangement.highest):
        return None
    return tally(arrangement, fates, arrangement.melody)
