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
    best_nmm, best_s, best_plucks = -1.0, 0.0, np.zeros(0, dtype=np.int64)
    for moment_s in np.unique(at_s).tolist():
        before_s = np.mod(at_s - moment_s, turning.revolution_s)
        lifted = before_s < window_s
        load_nmm = float((peak_nmm * (1 - before_s / window_s))[lifted].sum())
        if load_nmm > best_nmm:
            best_nmm, best_s, best_plucks = load_nmm, moment_s, np.unique(plucks[lifted])
    limit_nmm = movement.drive.torque_limit_nmm if movement.drive is not None else None
    return Load(peak_nmm=best_nmm, at_s=best_s, plucks=tuple(best_plucks.tolist()), limit_nmm=limit_nmm)
