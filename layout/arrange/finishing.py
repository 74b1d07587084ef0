"""From the best choice to the arrangement: moments, teeth that take turns, reasons, worth and load."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from layout.arrange.arrangement import Arrangement, LeftOut, LeftOutReason, Worth
from layout.arrange.asking import Asked
from layout.arrange.comb import Comb
from layout.arrange.coupled import worth_of
from layout.arrange.loading import greatest_load
from layout.arrange.loads import overloads
from layout.arrange.nudging import nudged
from layout.arrange.problem import NS_PER_S, Problem
from layout.arrange.reasons import reasons_of
from layout.arrange.searching import Found
from layout.arrange.solving import Solved
from layout.arrange.spreading import narrowed
from layout.arrange.taking_turns import taking_turns
from layout.documents.movement import Movement
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning
from layout.read.score import Score

_TRIALS = 2  # nudgings of one choice, each knowing what was too heavy in those before


@dataclass(frozen=True, slots=True, kw_only=True)
class _Played:
    """Spots and when they sound, and those left out at last for the drive."""

    spots: tuple[int, ...]
    at_ns: Mapping[int, int]
    dropped: tuple[int, ...]


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
        played = _played(problem, narrowed(problem, solved.spots))
        wanted, semitones = asked.wanted, self.found.way.semitones
        spots = np.array(played.spots, dtype=np.int64)
        pluck, track = problem.pluck[spots], problem.track[spots]
        asked_s = wanted.asked_s[pluck]
        planned_s = _planned_s(spots, asked_s, played)
        order = np.lexsort((track, planned_s))
        pluck, track, planned_s = pluck[order], track[order], planned_s[order]
        key = np.array([self.comb.key_of_track[one] for one in track.tolist()], dtype=np.int64)
        asked_key = wanted.pitch + semitones
        reasons = reasons_of(problem, played.spots, asked_key.tolist(), self.comb, self.spacing)
        reasons |= {int(problem.pluck[spot]): "drive-torque" for spot in played.dropped}
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
            worth=self._worth(solved, worth_of(problem, played.spots), int(wanted.weight.sum())),
            note_weight=_of_all(asked.notes, asked.weighed.weight, self.score.note_count),
            highest=_marked(asked.notes, asked.weighed.highest, self.score.note_count),
            lowest=_marked(asked.notes, asked.weighed.lowest, self.score.note_count),
            melody=_marked(asked.notes, asked.weighed.melody, self.score.note_count),
            tried=self.found.tried,
            load=greatest_load(self.movement, self.turning, track, planned_s),
        )

    def _worth(self, solved: Solved, kept: int, asked: int) -> Worth:
        """Of one disc: its bound is what was found and could be won on all discs, and no more than is asked of it."""
        bound = min(solved.worth + self.found.bound - sum(one.worth for one in self.found.solved), asked)
        return Worth(kept=kept, bound=bound, proved=kept == bound, stopped=self.found.stopped)


def _played(problem: Problem, spots: tuple[int, ...]) -> _Played:
    """The spots with their moments, equal teeth taking turns.

    The search counts loads at the moments asked for. Where nudges pile up more than the drive
    carries, the plucks at fault are kept as far apart as they are asked; where that is not enough,
    the lightest of them is left out, until the drive carries them.
    """
    dropped: list[int] = []
    turned = taking_turns(problem, spots, nudged(problem, spots))
    heavy: list[tuple[int, ...]] = []
    for _ in range(_TRIALS):
        at_ns = nudged(problem, turned, heavy)
        found = _too_heavy(problem, turned, at_ns)
        if not found:
            break
        heavy += found
    while found and (lightest := _lightest(problem, found)):
        dropped += lightest
        turned = tuple(spot for spot in turned if spot not in lightest)
        heavy = [group for group in heavy if not lightest & set(group)]
        at_ns = nudged(problem, turned, heavy)
        found = _too_heavy(problem, turned, at_ns)
    return _Played(spots=turned, at_ns=at_ns, dropped=tuple(dropped))


def _too_heavy(problem: Problem, spots: tuple[int, ...], at_ns: Mapping[int, int]) -> list[tuple[int, ...]]:
    """The spots that load the disc too much at their moments, for every moment at which they do."""
    planned_ns = problem.asked_ns.copy()
    planned_ns[list(spots)] = [at_ns[spot] for spot in spots]
    return overloads(replace(problem, asked_ns=planned_ns), np.array(spots, dtype=np.int64))


def _lightest(problem: Problem, heavy: Sequence[Sequence[int]]) -> set[int]:
    """Of each of these groups of spots the lightest that may go, one for all it is in; none where all must stay."""
    stays = set(problem.parent.tolist()) | set(np.flatnonzero(problem.must_sound).tolist())
    lightest: set[int] = set()
    for group in heavy:
        may_go = [spot for spot in group if int(problem.pluck[spot]) not in stays]
        if may_go and not lightest & set(group):
            lightest.add(min(may_go, key=lambda spot: (int(problem.worth[spot]), spot)))
    return lightest


def _planned_s(spots: IntArray, asked_s: FloatArray, played: _Played) -> FloatArray:
    """The moments in seconds; exactly those asked for where nothing moved them."""
    at_ns = np.array([played.at_ns[spot] for spot in spots.tolist()], dtype=np.int64)
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
