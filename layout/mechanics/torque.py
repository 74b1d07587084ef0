"""The torque of the lifted teeth on the disc, over one whole turn.

Every tooth loads the disc with a torque that rises evenly from its first touch to its release and is
then gone (layout.mechanics.drive). Their sum is straight between those moments and drops at releases,
so it is known exactly from its values at them. The greatest always stands just before a release.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, counted_out, frozen_floats
from layout.mechanics.drive import ToothLift, lifts_of
from layout.mechanics.turning import FULL_TURN_RAD, Turning

_MOMENT_DECIMALS = 9  # of a second: releases nearer than a nanosecond are one, as when arranging


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TurnTorque:
    """The teeth's torque on the disc from rest to rest. Moments count from the start of the music.

    Attributes:
        at_s: Shape (k,). Moments, rising, from the start of the turn to its end; a moment of a release
            stands twice, just before it and just after.
        torque_nmm: Shape (k,). The torque at each; straight lines between them.
        peak_nmm: The greatest; 0.0 for no plucks.
        peak_at_s: Its moment; 0.0 for no plucks.
        peak_plucks: Whose teeth are lifted then, rising.
        mean_nmm: Mean over the turn: the work ½·k·q² of every tooth over 2π.
    """

    at_s: FloatArray
    torque_nmm: FloatArray
    peak_nmm: float
    peak_at_s: float
    peak_plucks: tuple[int, ...]
    mean_nmm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Lifted:
    """Every lifted tooth of a turn, one entry each. Moments count from rest.

    Attributes:
        pluck: Its pluck.
        released_s: Its release, in [0, T).
        window_s: From its first touch to its release; at most a turn.
        peak_nmm: Its torque at the release.
    """

    pluck: IntArray
    released_s: FloatArray
    window_s: FloatArray
    peak_nmm: FloatArray


def torque_over_turn(
    movement: Movement, turning: Turning, track_index: IntArray, sounds_s: FloatArray
) -> TurnTorque | None:
    """The torque of the teeth that these plucks lift, over the whole turn; 0 throughout for no plucks.

    Args:
        movement: For its teeth.
        turning: The movement's turning.
        track_index: Shape (n,). The track of each pluck, from 0.
        sounds_s: Shape (n,). When each sounds, from the start of the music; the turn's end is its beginning.

    Returns:
        None where not every usable tooth states stiffness and lift.
    """
    lifts = lifts_of(movement, turning)
    if lifts is None:
        return None
    turn_s = turning.revolution_s
    rest_s = turning.start_rad / FULL_TURN_RAD * turn_s
    from_rest_s = np.mod(np.round(np.asarray(sounds_s) + rest_s, _MOMENT_DECIMALS), turn_s)
    lifted = _lifted(lifts, track_index, from_rest_s, turn_s)
    touched_s = np.mod(lifted.released_s - lifted.window_s, turn_s)
    moments_s = np.unique(np.concatenate([[0.0, turn_s], touched_s, lifted.released_s]))
    before_nmm, after_nmm = _torques_nmm(lifted, moments_s, turn_s)
    peak = int(np.argmax(before_nmm))
    until_s = np.mod(lifted.released_s - moments_s[peak], turn_s)
    drops = np.isin(moments_s, lifted.released_s)
    at_s = np.repeat(moments_s, 1 + drops)
    torque_nmm = np.repeat(before_nmm, 1 + drops)
    torque_nmm[np.flatnonzero(np.diff(at_s, append=math.inf) == 0) + 1] = after_nmm[drops]
    return TurnTorque(
        at_s=frozen_floats(at_s - rest_s),
        torque_nmm=frozen_floats(torque_nmm),
        peak_nmm=float(before_nmm[peak]),
        peak_at_s=float(moments_s[peak]) - rest_s if len(lifted.pluck) else 0.0,
        peak_plucks=tuple(np.unique(lifted.pluck[until_s < lifted.window_s]).tolist()),
        mean_nmm=math.fsum((lifted.peak_nmm * lifted.window_s / 2).tolist()) / turn_s,
    )


def _lifted(
    lifts: Sequence[Sequence[ToothLift]], track_index: IntArray, from_rest_s: FloatArray, turn_s: float
) -> _Lifted:
    """Every tooth of every pluck's track, in the order of the plucks."""
    count = np.array([len(teeth) for teeth in lifts], dtype=np.int64)
    begin = np.cumsum(count) - count
    window_s = np.array([min(lift.window_s, turn_s) for teeth in lifts for lift in teeth], dtype=np.float64)
    peak_nmm = np.array([lift.peak_nmm for teeth in lifts for lift in teeth], dtype=np.float64)
    pluck, lift = counted_out(begin[track_index], count[track_index])
    return _Lifted(pluck=pluck, released_s=from_rest_s[pluck], window_s=window_s[lift], peak_nmm=peak_nmm[lift])


def _torques_nmm(lifted: _Lifted, moments_s: FloatArray, turn_s: float) -> tuple[FloatArray, FloatArray]:
    """The torque just before and just after each moment, both shape (moments,)."""
    # A tooth released early in the turn may be touched before the end of the one before.
    end_s = np.column_stack([lifted.released_s, lifted.released_s + turn_s]).ravel()
    window_s, peak_nmm = np.repeat(lifted.window_s, 2), np.repeat(lifted.peak_nmm, 2)
    first = np.searchsorted(moments_s, end_s - window_s)
    length = np.searchsorted(moments_s, end_s, side="right") - first
    tooth, moment = counted_out(first, length)
    share = np.maximum(1 - (end_s[tooth] - moments_s[moment]) / window_s[tooth], 0.0)
    before_nmm = _summed(moment, peak_nmm[tooth] * share, len(moments_s))
    dropped_nmm = _summed(np.searchsorted(moments_s, lifted.released_s), lifted.peak_nmm, len(moments_s))
    return before_nmm, np.maximum(before_nmm - dropped_nmm, 0.0)


def _summed(place: IntArray, parts: FloatArray, count: int) -> FloatArray:
    """Shape (count,). The parts of each place, summed in their order."""
    return np.asarray(np.bincount(place, weights=parts, minlength=count), dtype=np.float64)
