"""Hear: what a disc sounds like on its comb, from its plucks alone; and beside it the tune as it was written."""

from dataclasses import replace

import numpy as np

from layout.documents.movement import Movement
from layout.hear.defaults import DEFAULTS
from layout.hear.hearing import Hearing, Ring, Voice
from layout.hear.performance import Asked, Performance
from layout.hear.ringing import rung_as_written, rung_by_disc
from layout.hear.timeline import timeline_of
from layout.mechanics.turning import FULL_TURN_RAD, turning_of

__all__ = ["Asked", "Hearing", "Performance", "hear"]


def hear(performance: Performance, movement: Movement, asked: Asked) -> Hearing:
    """A disc as it sounds, from the moment it begins to move; silence for one without projections.

    Args:
        performance: What is played.
        movement: The movement it is played on.
        asked: The disc or the tune as written, and which turn.

    Raises:
        DocumentError: A turn of a winding is asked for, and the movement states no winding.
    """
    turning = turning_of(movement)
    timeline = timeline_of(movement, turning, performance.plucks, asked.turn)
    rung_of = rung_by_disc if asked.of == "disc" else rung_as_written
    rung = rung_of(performance, movement, turning, timeline)
    turn_s = float(timeline.moment_s(np.array([min(FULL_TURN_RAD, timeline.stops_rad)]))[0])
    last_s = max([turn_s, *(ring.starts_s for ring in rung.rings)])
    still = DEFAULTS.still_ratio * max((float(v.level_ratio.max(initial=0)) for v in rung.voices), default=0.0)
    ends_s = [_rings_until_s(ring, rung.voices[ring.voice], still) for ring in rung.rings]
    length_s = min(max([turn_s, *ends_s]), last_s + DEFAULTS.last_ring_s)
    return Hearing(
        title=performance.title,
        asked=asked,
        voices=rung.voices,
        rings=tuple(_ended(*one, length_s) for one in zip(rung.rings, ends_s, strict=True)),
        still_ratio=still,
        length_s=length_s,
        turning_table=timeline.table,
    )


def _rings_until_s(ring: Ring, voice: Voice, still_ratio: float) -> float:
    """When a ring is over: silenced, or all its partials below the level."""
    lasts_s = voice.decay_s * np.log(np.maximum(voice.level_ratio / still_ratio, 1.0))
    return min(ring.starts_s + float(lasts_s.max(initial=0.0)), ring.held_s + ring.fade_s)


def _ended(ring: Ring, until_s: float, length_s: float) -> Ring:
    """A ring that ends within the sound: where nothing else silences it in time, it is faded out."""
    if ring.held_s + ring.fade_s <= length_s:
        return ring
    if until_s <= length_s:
        return replace(ring, held_s=length_s)
    return replace(ring, held_s=max(length_s - DEFAULTS.last_fade_s, ring.starts_s), fade_s=DEFAULTS.last_fade_s)
