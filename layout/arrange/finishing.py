"""From the best choice to the arrangement: moments, teeth that take turns, reasons, worth and load."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from layout.arrange.arrangement import Arrangement, LeftOut, LeftOutReason, Worth
from layout.arrange.asking import Asked
from layout.arrange.comb import Comb
from layout.arrange.loading import greatest_load
from layout.arrange.problem import NS_PER_S, Problem
from layout.arrange.reasons import reasons_of
from layout.arrange.searching import Found
from layout.arrange.solving import Solved
from layout.documents.movement import Movement
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning
from layout.read.score import Score


@dataclass(frozen=True, slots=True, kw_only=True)
class Finishing:
    """What all discs of a search have in common."""

    score: Score
    movement: Movement
    turning: Turning
    spacing: Spacing
    comb: Comb
    found: Found

    def arrangement(self, asked: Asked, problem: Problem, solved: Solved) -> Arrangement:
        """The arrangement of one disc."""
        wanted, semitones = asked.wanted, self.found.way.semitones
        with_moments = solved.playing.played
        spots = np.array(with_moments.spots, dtype=np.int64)
        pluck, track = problem.pluck[spots], problem.track[spots]
        asked_s = wanted.asked_s[pluck]
        planned_s = _planned_s(spots, asked_s, with_moments.at_ns)
        order = np.lexsort((track, planned_s))
        pluck, track, planned_s = pluck[order], track[order], planned_s[order]
        key = np.array([self.comb.key_of_track[one] for one in track.tolist()], dtype=np.int64)
        asked_key = wanted.pitch + semitones
        reasons = reasons_of(problem, with_moments.spots, asked_key.tolist(), self.comb, self.spacing)
        return Arrangement(
            track_index=frozen_ints(track),
            key=frozen_ints(key),
            asked_s=frozen_floats(wanted.asked_s[pluck]),
            planned_s=frozen_floats(planned_s),
            notes=tuple(wanted.notes[one] for one in pluck.tolist()),
            again_of=frozen_ints(wanted.again_of[pluck]),
            octave_semitones=frozen_ints(key - asked_key[pluck]),
            left_out=_left_out(asked, reasons),
            transposed_semitones=semitones,
            speed_factor=asked.moments.speed_factor,
            from_s=asked.moments.from_s,
            length_s=asked.moments.length_s,
            worth=self._worth(solved, int(wanted.weight.sum())),
            note_weight=_of_all(asked.notes, asked.weighed.weight, self.score.note_count),
            highest=_marked(asked.notes, asked.weighed.highest, self.score.note_count),
            lowest=_marked(asked.notes, asked.weighed.lowest, self.score.note_count),
            melody=_marked(asked.notes, asked.weighed.melody, self.score.note_count),
            tried=self.found.tried,
            transpositions=self.found.transpositions,
            load=greatest_load(self.movement, self.turning, track, planned_s),
        )

    def _worth(self, solved: Solved, asked: int) -> Worth:
        """Of one disc: its bound is what was found and could be won on all discs, and no more than is asked of it."""
        bound = min(solved.worth + self.found.bound - sum(one.worth for one in self.found.solved), asked)
        return Worth(kept=solved.worth, bound=bound, proved=solved.worth == bound, stopped=self.found.stopped)


def _planned_s(spots: IntArray, asked_s: FloatArray, planned_ns: Mapping[int, int]) -> FloatArray:
    """The moments in seconds; exactly those asked for where nothing moved them."""
    at_ns = np.array([planned_ns[spot] for spot in spots.tolist()], dtype=np.int64)
    return np.where(at_ns == np.rint(asked_s * NS_PER_S).astype(np.int64), asked_s, at_ns / NS_PER_S)


def _left_out(asked: Asked, reasons: Mapping[int, LeftOutReason]) -> tuple[LeftOut, ...]:
    out = dict(asked.moments.out)
    out.update((note, reason) for pluck, reason in reasons.items() for note in asked.wanted.notes[pluck])
    return tuple(LeftOut(note=note, reason=out[note]) for note in sorted(out))


def _of_all(notes: IntArray, values: IntArray, count: int) -> IntArray:
    """Values of some notes, and 0 for all others of the score."""
    spread = np.zeros(count, dtype=np.int64)
    spread[notes] = values
    return frozen_ints(spread)


def _marked(notes: IntArray, marks: BoolArray, count: int) -> BoolArray:
    marked = np.zeros(count, dtype=np.bool_)
    marked[notes] = marks
    marked.setflags(write=False)
    return marked
