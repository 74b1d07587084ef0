"""What is asked for at one speed, disc by disc: moments, voices and plucks."""

from dataclasses import dataclass

import numpy as np

from layout.arrange.moments import Moments, moments_of
from layout.arrange.plucks import Wanted, wanted_plucks
from layout.arrange.rulings import Rulings
from layout.arrange.splitting import disc_passages
from layout.arrange.weights import Weighed, weigh
from layout.arrange.writing import Played, as_written
from layout.documents.settings import Settings
from layout.documents.settings_passage import Passage
from layout.mechanics.arrays import IntArray, frozen_ints
from layout.read.score import Score


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Asked:
    """What one disc is asked to play.

    Attributes:
        moments: Of all notes of the score.
        notes: Shape (n,). Indices of the notes asked for, rising.
        weighed: Their worth and voices.
        wanted: Their plucks.
    """

    moments: Moments
    notes: IntArray
    weighed: Weighed
    wanted: Wanted


def asked_of_discs(
    score: Score, settings: Settings, rulings: Rulings, free_turn_s: float, factor: float
) -> tuple[Asked, ...]:
    """What each disc is asked to play at a speed; one disc or as many as the settings say.

    Args:
        score: The tune.
        settings: What the maker asks for.
        rulings: The maker's rulings.
        free_turn_s: What of a turn music may fill.
        factor: The speed.

    Raises:
        DocumentError: The passage of the settings cannot be.
        RulingError: Notes that become one pluck are ruled onto two tracks.
    """
    if settings.discs == 1:
        return (_asked(score, settings, rulings, free_turn_s, factor),)
    passages = disc_passages(score, settings, rulings.left_out, free_turn_s, factor)
    return tuple(
        _asked(score, _of_passage(settings, from_s, to_s), rulings, free_turn_s, factor) for from_s, to_s in passages
    )


def _of_passage(settings: Settings, from_s: float, to_s: float) -> Settings:
    passage = Passage(from_s=from_s, to_s=None if to_s == float("inf") else to_s)
    return settings.model_copy(update={"passage": passage, "discs": 1})


def _asked(score: Score, settings: Settings, rulings: Rulings, free_turn_s: float, factor: float) -> Asked:
    moments = moments_of(score, settings, rulings.left_out, free_turn_s, factor)
    notes = frozen_ints(
        np.setdiff1d(np.arange(score.note_count), np.fromiter(moments.out, dtype=np.int64), assume_unique=True)
    )
    weighed = weigh(score, notes, settings.channels.lead)
    plain = wanted_plucks(score, notes, moments.asked_s, weighed, rulings, settings)
    played = Played(
        score=score, notes=notes, weighed=weighed, speed_factor=moments.speed_factor, free_turn_s=free_turn_s
    )
    wanted = as_written(plain, played, settings)
    return Asked(moments=moments, notes=notes, weighed=weighed, wanted=wanted)
