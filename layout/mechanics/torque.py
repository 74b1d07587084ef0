"""The torque of the lifted teeth on the disc, over one whole turn.

Every tooth loads the disc with a torque that rises evenly from its first touch to its release and is
then gone (layout.mechanics.drive). Their sum is straight between those moments and drops at releases,
so it is known exactly from its values at them. The greatest always stands just before a release.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.drive import lifts_of
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
    rows = [
        (pluck, float(from_rest_s[pluck]), min(lift.window_s, turn_s), lift.peak_nmm)
        for pluck, track in enumerate(track_index.tolist())
        for lift in lifts[track]
    ]
    columns = [np.array([row[column] for row in rows]) for column in range(4)]
    lifted = _Lifted(pluck=columns[0].astype(np.int64), released_s=columns[1], window_s=columns[2], peak_nmm=columns[3])
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
        peak_at_s=float(moments_s[peak]) - rest_s if rows else 0.0,
        peak_plucks=tuple(np.unique(lifted.pluck[until_s < lifted.window_s]).tolist()),
        mean_nmm=math.fsum((lifted.peak_nmm * lifted.window_s / 2).tolist()) / turn_s,
    )


def _torques_nmm(lifted: _Lifted, moments_s: FloatArray, turn_s: float) -> tuple[FloatArray, FloatArray]:
    """The torque just before and just after each moment, both shape (moments,)."""
    before_nmm = np.zeros(len(moments_s))
    dropped_nmm = np.zeros(len(moments_s))
    for released_s, window_s, peak_nmm in zip(
        lifted.released_s.tolist(), lifted.window_s.tolist(), lifted.peak_nmm.tolist(), strict=True
    ):
        # A tooth released early in the turn may be touched before the end of the one before.
        for end_s in (released_s, released_s + turn_s):
            first = int(np.searchsorted(moments_s, end_s - window_s))
            last = int(np.searchsorted(moments_s, end_s, side="right"))
            before_nmm[first:last] += peak_nmm * np.maximum(1 - (end_s - moments_s[first:last]) / window_s, 0.0)
        dropped_nmm[int(np.searchsorted(moments_s, released_s))] += peak_nmm
    return before_nmm, np.maximum(before_nmm - dropped_nmm, 0.0)
