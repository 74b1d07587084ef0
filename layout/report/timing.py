"""Timing error per track, from what cutter and movement state of themselves: layout.mechanics.tolerances."""

import numpy as np

from layout.arrange.arrangement import Arrangement
from layout.mechanics.tolerances import place_error
from layout.place.disc import Disc
from layout.report.fates import nudges_ms
from layout.report.report import TrackTiming


def timing_of(disc: Disc, arrangement: Arrangement) -> tuple[TrackTiming, ...]:
    """The timing error of every track that is used, the innermost first; () for a disc without projections.

    Args:
        disc: Its movement's turn and play and its cutter's tolerances are used.
        arrangement: What the disc was placed from: pluck i is projection i.
    """
    nudge_ms = nudges_ms(arrangement)
    tracks = []
    for index in disc.used_tracks:
        on_track = disc.track_index == index
        tracks.append(
            TrackTiming(
                track=index + 1,
                radius_mm=float(disc.turning.radius_mm[index]),
                pluck_count=int(np.count_nonzero(on_track)),
                error=place_error(disc.movement, disc.cutter, index),
                largest_nudge_ms=float(nudge_ms[on_track].max()),
            )
        )
    return tuple(tracks)
