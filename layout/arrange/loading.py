"""The greatest load of an arrangement, at the moments it is to sound."""

import numpy as np

from layout.arrange.arrangement import Load
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.drive import lifts_of
from layout.mechanics.turning import Turning


def greatest_load(movement: Movement, turning: Turning, track_index: IntArray, planned_s: FloatArray) -> Load | None:
    """The moment of all releases at which the teeth load the disc most.

    Args:
        movement: For its teeth and its drive.
        turning: The movement's turning.
        track_index: Shape (n,). The track of each pluck, from 0.
        planned_s: Shape (n,). When each sounds.

    Returns:
        None for no plucks, and where not every usable tooth states stiffness and lift.
    """
    lifts = lifts_of(movement, turning)
    if lifts is None or not len(track_index):
        return None
    rows = [
        (pluck, float(planned_s[pluck]), lift.peak_nmm, lift.window_s)
        for pluck, track in enumerate(track_index.tolist())
        for lift in lifts[track]
    ]
    plucks = np.array([row[0] for row in rows], dtype=np.int64)
    at_s, peak_nmm, window_s = (np.array([row[column] for row in rows]) for column in (1, 2, 3))
    order = np.argsort(at_s, kind="stable")
    plucks, at_s, peak_nmm, window_s = plucks[order], at_s[order], peak_nmm[order], window_s[order]
    # The first of the next turn stand behind the last of this one: their teeth may be lifted already.
    widest_s = min(float(window_s.max()), turning.revolution_s)
    ahead = int(np.searchsorted(at_s, at_s[-1] + widest_s - turning.revolution_s))
    released_s = np.concatenate([at_s, at_s[:ahead] + turning.revolution_s])
    of = np.concatenate([np.arange(len(at_s)), np.arange(ahead)])
    moments_s = np.unique(at_s)
    firsts, lasts = np.searchsorted(released_s, moments_s), np.searchsorted(released_s, moments_s + widest_s)
    best_nmm, best_s, best_plucks = -1.0, 0.0, np.zeros(0, dtype=np.int64)
    for moment_s, first, last in zip(moments_s.tolist(), firsts.tolist(), lasts.tolist(), strict=True):
        near = of[first:last]
        before_s = released_s[first:last] - moment_s
        lifted = before_s < window_s[near]
        load_nmm = float((peak_nmm[near] * (1 - before_s / window_s[near]))[lifted].sum())
        if load_nmm > best_nmm:
            best_nmm, best_s, best_plucks = load_nmm, moment_s, np.unique(plucks[near[lifted]])
    limit_nmm = movement.drive.torque_limit_nmm if movement.drive is not None else None
    return Load(peak_nmm=best_nmm, at_s=best_s, plucks=tuple(best_plucks.tolist()), limit_nmm=limit_nmm)
