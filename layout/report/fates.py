"""What became of every note: played or not, moved, nudged, covered, and why not."""

from collections import Counter
from dataclasses import dataclass

import numpy as np

from layout.arrange.arrangement import Arrangement, LeftOutReason
from layout.mechanics.arrays import BoolArray, FloatArray, end_to_end

NUDGED_FROM_MS = 1e-3  # ms; a microsecond, a hundredth of a micrometre on a disc: less is rounding, not music
NANOSECOND_MS_DECIMALS = 6  # nudges are found in whole nanoseconds: the rest is rounding of seconds


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fates:
    """What became of the notes of a score, by their index.

    Attributes:
        asked: Shape (notes,). Which were asked for.
        kept: Shape (notes,). Which are played.
        moved: Shape (notes,). Which are played moved by octaves.
        covered: Shape (notes,). Which share a pluck with a note before them.
        nudge_ms: Shape (notes,). Size of the nudge of each note played; 0.0 where there is none.
        reasons: Length notes. Why each note is not played; None for those played.
    """

    asked: BoolArray
    kept: BoolArray
    moved: BoolArray
    covered: BoolArray
    nudge_ms: FloatArray
    reasons: tuple[LeftOutReason | None, ...]

    def reasons_of(self, which: BoolArray) -> tuple[tuple[LeftOutReason, int], ...]:
        """How many of the notes marked are not played, by reason, in the order of the reasons' names."""
        found = (self.reasons[note] for note in np.flatnonzero(which & ~self.kept).tolist())
        return tuple(sorted(Counter(reason for reason in found if reason is not None).items()))


def nudges_ms(arrangement: Arrangement) -> FloatArray:
    """Shape (plucks,). |planned − asked| to a nanosecond; 0.0 up to NUDGED_FROM_MS. Empty for no plucks."""
    size_ms = np.round(np.abs(arrangement.planned_s - arrangement.asked_s) * 1000, NANOSECOND_MS_DECIMALS)
    return np.where(size_ms > NUDGED_FROM_MS, size_ms, 0.0)


def fates_of(arrangement: Arrangement) -> Fates:
    """The fate of every note of the score the arrangement was made of; empty for no notes."""
    count = len(arrangement.note_weight)
    kept, moved, covered = (np.zeros(count, dtype=np.bool_) for _ in range(3))
    nudge_ms = np.zeros(count)
    pluck_nudge_ms = nudges_ms(arrangement)
    pluck, note = end_to_end(arrangement.notes)
    kept[note] = True
    moved[note] = arrangement.octave_semitones[pluck] != 0
    covered[note[np.diff(pluck, prepend=-1) == 0]] = True
    nudge_ms[note] = pluck_nudge_ms[pluck]
    reasons: list[LeftOutReason | None] = [None] * count
    for left in arrangement.left_out:
        reasons[left.note] = left.reason
    return Fates(
        asked=arrangement.note_weight > 0,
        kept=kept,
        moved=moved,
        covered=covered,
        nudge_ms=nudge_ms,
        reasons=tuple(reasons),
    )
