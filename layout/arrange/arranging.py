"""The arrange stage: Score to Arrangement."""

from collections.abc import Mapping

import numpy as np

from layout.arrange.arrangement import NO_NOTE, Arrangement, LeftOut, LeftOutReason, Worth
from layout.arrange.asked import NO_TRACK
from layout.arrange.choose import choose
from layout.arrange.comb import comb_of
from layout.arrange.moments import Moments, moments_of
from layout.arrange.plucks import Wanted, wanted_plucks
from layout.arrange.reasons import reasons_of
from layout.arrange.rulings import check_in_time, read_rulings
from layout.arrange.transposing import Rules, Transposed, best_transposed
from layout.arrange.weights import weigh
from layout.documents.movement import Movement
from layout.documents.settings import Settings
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import turning_of
from layout.read.score import Score


def arrange(score: Score, movement: Movement, settings: Settings, spacing: Spacing) -> Arrangement:
    """Which notes are plucked on which tracks, when, and why the others are not.

    Every pluck of the result keeps `spacing`, the end of the turn and its start included. No
    onset is nudged yet: planned_s is asked_s. A tune with no notes, or none the comb can play, gives an
    arrangement without plucks and every note in `left_out`.

    Args:
        score: The tune.
        movement: What the disc is for.
        settings: What the maker asks for.
        spacing: The rules of nearness, from layout.mechanics.spacing for this movement and a cutter.

    Raises:
        RulingError: The settings' rulings contradict each other, the tune, the passage or the comb.
    """
    comb, turning = comb_of(movement), turning_of(movement)
    rulings = read_rulings(settings.rulings, score, comb)
    moments = moments_of(score, settings, rulings.left_out, turning.free_turn_s)
    check_in_time(rulings, moments.out)
    notes = np.setdiff1d(np.arange(score.note_count), np.fromiter(moments.out, dtype=np.int64), assume_unique=True)
    weight = weigh(score, notes, settings.channels.lead).weight
    wanted = wanted_plucks(score, notes, moments.asked_s, weight, rulings)
    rules = Rules(comb=comb, turning=turning, spacing=spacing, rulings=rulings)
    transposed = best_transposed(wanted, rules, settings.transpose, choose)
    reasons = reasons_of(transposed.asked, transposed.chosen, comb, turning, spacing)
    return _arrangement(wanted, moments, transposed, reasons)


def _arrangement(
    wanted: Wanted, moments: Moments, transposed: Transposed, reasons: Mapping[int, LeftOutReason]
) -> Arrangement:
    track_index = transposed.chosen.track_index
    played = np.flatnonzero(track_index != NO_TRACK)
    order = played[np.lexsort((track_index[played], wanted.asked_s[played]))]
    out = dict(moments.out)
    out.update((note, reason) for pluck, reason in reasons.items() for note in wanted.notes[pluck])
    kept, bound = transposed.kept, transposed.bound
    asked_s = frozen_floats(wanted.asked_s[order])
    return Arrangement(
        track_index=frozen_ints(track_index[order]),
        key=frozen_ints(transposed.asked.key[order]),
        asked_s=asked_s,
        planned_s=asked_s,
        notes=tuple(wanted.notes[pluck] for pluck in order.tolist()),
        again_of=frozen_ints(NO_NOTE for _ in order),
        octave_semitones=frozen_ints(0 for _ in order),
        left_out=tuple(LeftOut(note=note, reason=out[note]) for note in sorted(out)),
        transposed_semitones=transposed.semitones,
        speed_factor=moments.speed_factor,
        from_s=moments.from_s,
        length_s=moments.length_s,
        worth=Worth(kept=kept, bound=bound, proved=kept == bound),
        note_weight=frozen_ints([]),
        highest=np.zeros(0, dtype=np.bool_),
        lowest=np.zeros(0, dtype=np.bool_),
        melody=np.zeros(0, dtype=np.bool_),
        tried=(),
        load=None,
    )
