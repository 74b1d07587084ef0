"""The report stage: Score, Arrangement and Disc to Report."""

import numpy as np

from layout.arrange.arrangement import NO_NOTE, Arrangement
from layout.documents.pitch import pitch_of
from layout.mechanics.depth import depth_band
from layout.place.disc import Disc
from layout.read.score import Score
from layout.report.bars import worst_bars
from layout.report.driving import driving_of
from layout.report.fates import fates_of
from layout.report.report import Loaded, PeakLoad, Report
from layout.report.timing import timing_of
from layout.report.voices import melody_tally, tally

NOTHING_PLUCKED = "nothing is plucked"
NO_STIFFNESS = "the movement does not state the stiffness and lift of every usable tooth"


def report_on(score: Score, arrangement: Arrangement, disc: Disc) -> Report:
    """What the disc keeps of the tune, and what that cost.

    An arrangement without plucks gives zeros and no tracks; a score without notes as well.

    Args:
        score: The tune.
        arrangement: What was made of it.
        disc: Placed from the arrangement: projection i is pluck i.
    """
    fates = fates_of(arrangement)
    highest, lowest = arrangement.highest, arrangement.lowest & ~arrangement.highest
    load = _peak_load(arrangement)
    return Report(
        total=tally(arrangement, fates, fates.asked),
        highest=tally(arrangement, fates, highest),
        lowest=tally(arrangement, fates, lowest),
        inner=tally(arrangement, fates, ~highest & ~lowest),
        melody=melody_tally(arrangement, fates),
        not_asked=fates.reasons_of(~fates.asked),
        projection_count=disc.projection_count,
        extra_pluck_count=int(np.count_nonzero(arrangement.again_of != NO_NOTE)),
        worth=arrangement.worth,
        tried=arrangement.tried,
        transpositions=arrangement.transpositions,
        worst_bars=worst_bars(score, arrangement, fates),
        tracks=timing_of(disc, arrangement),
        metal_left=disc.metal_left,
        load=load,
        no_load_because=None if load else NO_STIFFNESS if disc.projection_count else NOTHING_PLUCKED,
        drive=driving_of(disc),
        depth=depth_band(disc.movement, _bend_radius_mm(disc)),
    )


def _bend_radius_mm(disc: Disc) -> float | None:
    fold = disc.cutter.fold
    return None if fold is None or disc.pattern.making != "fold" else fold.inside_radius_mm


def _peak_load(arrangement: Arrangement) -> PeakLoad | None:
    load = arrangement.load
    if load is None:
        return None
    return PeakLoad(
        peak_nmm=load.peak_nmm,
        limit_nmm=load.limit_nmm,
        at_s=load.at_s,
        chord=tuple(
            Loaded(track=int(arrangement.track_index[pluck]) + 1, pitch=pitch_of(int(arrangement.key[pluck])))
            for pluck in load.plucks
        ),
    )
