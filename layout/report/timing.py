"""Timing error per track, from what the cutter states of itself.

A point at radius r passes 2πr in a turn of T, so a position error e along the track is a timing
error e·T/(2πr); an angle error is the same share of a turn on every track, (angle/360)·T. Derived
here; elementary geometry. 0.1 mm at a 60 s turn is 24 ms at 40 mm and 5 ms at 190 mm; 0.05° is 8 ms.
"""

import numpy as np

from layout.arrange.arrangement import Arrangement
from layout.mechanics.turning import FULL_TURN_RAD
from layout.place.disc import Disc
from layout.report.fates import nudges_ms
from layout.report.report import TrackTiming


def timing_of(disc: Disc, arrangement: Arrangement) -> tuple[TrackTiming, ...]:
    """The timing error of every track that is used, the innermost first; () for a disc without projections.

    Args:
        disc: Its movement's turn and its cutter's tolerances are used.
        arrangement: What the disc was placed from: pluck i is projection i.
    """
    turn_ms = disc.movement.revolution_s * 1000
    angle_ms = disc.cutter.angle_tolerance_deg / 360 * turn_ms
    nudge_ms = nudges_ms(arrangement)
    tracks = []
    for index in disc.used_tracks:
        radius_mm = float(disc.turning.radius_mm[index])
        position_ms = disc.cutter.position_tolerance_mm * turn_ms / (FULL_TURN_RAD * radius_mm)
        on_track = disc.track_index == index
        tracks.append(
            TrackTiming(
                track=index + 1,
                radius_mm=radius_mm,
                pluck_count=int(np.count_nonzero(on_track)),
                position_ms=position_ms,
                angle_ms=angle_ms,
                together_ms=position_ms + angle_ms,
                largest_nudge_ms=float(nudge_ms[on_track].max()),
            )
        )
    return tuple(tracks)
