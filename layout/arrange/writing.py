"""Music as makers write it: what the settings add to the plucks of a tune, or ask of them.

Plucks of one more tooth, or of the same note again, are extra plucks: they belong to a pluck, sound
only where it does, and are worth a share of it. All of it is part of the problem that is solved, so
an extra pluck never costs a note that is worth more.
"""

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from layout.arrange.ornaments import ornaments
from layout.arrange.plucks import Wanted
from layout.arrange.problem import NS_PER_MS, NS_PER_S
from layout.arrange.weights import FADED_S, Weighed
from layout.documents.settings import Settings
from layout.documents.settings_writing import Writing
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats, frozen_ints
from layout.read.score import Score

# Thousandths of the weight of the pluck, as far as two extra plucks are worth less than the least pluck asked for:
# a long note of the melody is not repeated at the cost of a soft inner note.
AGAIN_SHARE = 200  # plucked again: the note is heard already
SECOND_TOOTH_SHARE = 250  # on a second tooth: louder where the tune is

# A tooth of an ornament is not plucked again before the next note of its pitch is past; and this much more, so that
# nudges cannot bring the two together.
APART_NS = NS_PER_MS
ORNAMENT_SPAN_S = 0.6  # a note of the same pitch later than this is no part of the ornament

_ROUNDING = 1e-6  # of an interval: a note of just one and a half intervals is plucked again, wherever it begins
_CHORD_S = 0.25  # seconds; notes that begin within this of a new bass note make its harmony
_SEMITONES = 12  # of an octave


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Played:
    """The notes asked for, as writing looks at them.

    Attributes:
        score: The tune.
        notes: Shape (n,). Their indices, rising.
        weighed: Their worth and voices.
        speed_factor: The speed.
        free_turn_s: The last moment of music on the disc.
    """

    score: Score
    notes: IntArray
    weighed: Weighed
    speed_factor: float
    free_turn_s: float


def as_written(wanted: Wanted, played: Played, settings: Settings) -> Wanted:
    """The plucks with all that `settings.writing` asks for; the same where it asks for nothing.

    Args:
        wanted: The plucks of the notes, no extra ones among them.
        played: The notes.
        settings: Writing is used.
    """
    writing = settings.writing
    if writing.chords == "bass-first":
        wanted = _bass_first(wanted, played.free_turn_s)
    if writing.ornaments == "over-doubled-teeth":
        wanted = _over_doubled_teeth(wanted, played)
    if writing.ringing_bass_cost:
        wanted = replace(wanted, foreign=_foreign(wanted, played))
    extra = _again(wanted, played, writing) + _second_teeth(wanted, played, writing)
    return _with_extra(wanted, extra) if extra else wanted


@dataclass(frozen=True, slots=True, kw_only=True)
class _Extra:
    parent: int
    asked_s: float
    weight: int
    alternates_ns: int


def _bass_first(wanted: Wanted, free_turn_s: float) -> Wanted:
    """Every pluck's place in its chord: evenly from as early as the lowest may be to as late as the highest may.

    None leaves its own nudge; none comes before a lower one, and only where that leaves no room between do two come
    together.
    """
    chord = np.cumsum(np.diff(wanted.asked_s, prepend=-1.0) > 0)
    asked_ns = np.rint(wanted.asked_s * NS_PER_S).astype(np.int64)
    early_ns = -np.minimum(wanted.nudge_ns, asked_ns)
    late_ns = np.minimum(wanted.nudge_ns, np.maximum(round(free_turn_s * NS_PER_S) - asked_ns, 0))
    shift_ns = np.zeros(len(chord), dtype=np.int64)
    starts = np.flatnonzero(np.diff(chord, prepend=0, append=len(chord) + 1))
    for first, stop in pairwise(starts.tolist()):
        if stop - first > 1:
            early, late = early_ns[first:stop], late_ns[first:stop]
            even = early[0] + (late[-1] - early[0]) * np.arange(stop - first) // (stop - first - 1)
            not_before, not_after = np.maximum.accumulate(early), np.minimum.accumulate(late[::-1])[::-1]
            shift_ns[first:stop] = np.clip(even, not_before, not_after)
    return replace(wanted, shift_ns=frozen_ints(shift_ns))


def _over_doubled_teeth(wanted: Wanted, played: Played) -> Wanted:
    """A tooth that plays in an ornament rests until the next note of its pitch in it has another."""
    marked = np.zeros(played.score.note_count, dtype=np.bool_)
    marked[played.notes] = ornaments(played.score, played.notes, played.speed_factor)
    rest_ns = wanted.rest_ns.copy()
    for pluck, next_pluck in _next_of_pitch(wanted):
        apart_s = wanted.asked_s[next_pluck] - wanted.asked_s[pluck]
        if apart_s <= ORNAMENT_SPAN_S and any(marked[note] for note in wanted.notes[pluck]):
            rest_ns[pluck] = _longer_than(float(apart_s), wanted, pluck, next_pluck)
    return replace(wanted, rest_ns=frozen_ints(rest_ns))


def _longer_than(apart_s: float, wanted: Wanted, one: int, two: int) -> int:
    """A rest that no nudging of the two plucks makes up for."""
    return round(apart_s * NS_PER_S) + int(wanted.nudge_ns[one] + wanted.nudge_ns[two]) + APART_NS


def _next_of_pitch(wanted: Wanted) -> list[tuple[int, int]]:
    """Each pluck with the next one of its pitch."""
    order = np.lexsort((wanted.asked_s, wanted.pitch))
    same = np.flatnonzero(np.diff(wanted.pitch[order]) == 0)
    return list(zip(order[same].tolist(), order[same + 1].tolist(), strict=True))


def _again(wanted: Wanted, played: Played, writing: Writing) -> list[_Extra]:
    """Long notes plucked again, up to half an interval before they end or their pitch comes again."""
    interval_s = writing.pluck_again_s
    if interval_s is None:
        return []
    ends_s = np.minimum(_ends_s(wanted, played), played.free_turn_s + interval_s)
    for pluck, next_pluck in _next_of_pitch(wanted):
        ends_s[pluck] = min(ends_s[pluck], wanted.asked_s[next_pluck])
    alternates_ns = round(interval_s * NS_PER_S) + 2 * int(wanted.nudge_ns.max(initial=0)) + APART_NS
    shares = _shares(wanted, AGAIN_SHARE)
    found = []
    for pluck, end_s in enumerate(ends_s.tolist()):
        asked_s = float(wanted.asked_s[pluck])
        times = int(max((end_s - asked_s) / interval_s - 0.5 + _ROUNDING, 0.0))
        found += [
            _Extra(parent=pluck, asked_s=moment_s, weight=shares[pluck], alternates_ns=alternates_ns)
            for time in range(1, times + 1)
            if (moment_s := asked_s + time * interval_s) <= played.free_turn_s
        ]
    return found


def _shares(wanted: Wanted, thousandths: int) -> list[int]:
    """What an extra pluck of each pluck is worth."""
    less_than_half = (min(wanted.weight.tolist(), default=0) - 1) // 2
    return [max(min(weight * thousandths // 1000, less_than_half), 1) for weight in wanted.weight.tolist()]


def _ends_s(wanted: Wanted, played: Played) -> FloatArray:
    """When the last note of each pluck ends, on the disc."""
    duration_s = played.score.duration_s / played.speed_factor
    return np.array(
        [at_s + max(duration_s[list(notes)]) for at_s, notes in zip(wanted.asked_s.tolist(), wanted.notes, strict=True)]
    )


def _second_teeth(wanted: Wanted, played: Played, writing: Writing) -> list[_Extra]:
    least = writing.two_teeth_from_velocity
    if least is None:
        return []
    shares = _shares(wanted, SECOND_TOOTH_SHARE)
    return [
        _Extra(
            parent=pluck,
            asked_s=float(wanted.asked_s[pluck]),
            weight=shares[pluck],
            alternates_ns=0,
        )
        for pluck, notes in enumerate(wanted.notes)
        if played.score.velocity[list(notes)].max() >= least
    ]


def _foreign(wanted: Wanted, played: Played) -> BoolArray:
    """Bass plucks that may still ring when the bass has gone on to a harmony they are no part of."""
    in_bass = np.zeros(played.score.note_count, dtype=np.bool_)
    in_bass[played.notes] = played.weighed.lowest & ~played.weighed.highest  # a melody alone is no bass
    bass = [pluck for pluck, notes in enumerate(wanted.notes) if in_bass[list(notes)].any()]
    foreign = np.zeros(len(wanted.pitch), dtype=np.bool_)
    for pluck, after in pairwise(bass):
        at_s = float(wanted.asked_s[after])
        if at_s - wanted.asked_s[pluck] >= FADED_S:
            continue
        first, last = np.searchsorted(wanted.asked_s, (at_s, at_s + _CHORD_S))
        foreign[pluck] = wanted.pitch[pluck] % _SEMITONES not in wanted.pitch[first:last] % _SEMITONES
    return foreign


def _with_extra(wanted: Wanted, extra: list[_Extra]) -> Wanted:
    """The plucks with extra ones in their places; those that have some are not moved by octaves."""
    count = len(wanted.asked_s)
    parents = np.array([one.parent for one in extra], dtype=np.int64)
    of = np.concatenate([np.arange(count), parents])  # the pluck each takes its pitch and shift from
    is_extra = np.arange(len(of)) >= count
    asked_s = np.concatenate([wanted.asked_s, [one.asked_s for one in extra]])
    order = np.lexsort((is_extra, wanted.pitch[of], asked_s))
    place = np.empty(len(order), dtype=np.int64)
    place[order] = np.arange(len(order))
    alternates_ns = wanted.alternates_ns.copy()
    np.maximum.at(alternates_ns, parents, [one.alternates_ns for one in extra])
    fixed = np.zeros(count, dtype=np.bool_)
    fixed[parents] = True
    same_moment = asked_s == wanted.asked_s[of]

    def merged(kept: IntArray, added: IntArray) -> IntArray:
        return frozen_ints(np.concatenate([kept, added])[order])

    first_note = np.array([notes[0] for notes in wanted.notes], dtype=np.int64)
    return Wanted(
        asked_s=frozen_floats(asked_s[order]),
        pitch=frozen_ints(wanted.pitch[of][order]),
        weight=merged(wanted.weight, np.array([one.weight for one in extra])),
        notes=tuple(() if is_extra[one] else wanted.notes[one] for one in order.tolist()),
        must_sound=(np.concatenate([wanted.must_sound, np.zeros(len(extra), dtype=np.bool_)]))[order],
        on_track=merged(wanted.on_track, np.full(len(extra), -1)),
        outer=wanted.outer[of][order],
        fixed=(np.concatenate([wanted.fixed | fixed, np.ones(len(extra), dtype=np.bool_)]))[order],
        nudge_ns=frozen_ints(wanted.nudge_ns[of][order]),
        shift_ns=frozen_ints(np.where(same_moment, wanted.shift_ns[of], 0)[order]),
        rest_ns=frozen_ints(wanted.rest_ns[of][order]),
        alternates_ns=merged(alternates_ns, np.array([one.alternates_ns for one in extra])),
        foreign=wanted.foreign[of][order],
        parent=merged(wanted.parent, place[parents]),
        again_of=merged(wanted.again_of, first_note[parents]),
    )
