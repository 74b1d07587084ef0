"""The greatest load of an arrangement, at the moments it is to sound."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layout.arrange.arrangement import Load
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, counted_out
from layout.mechanics.drive import ToothLift, lifts_of
from layout.mechanics.turning import Turning

_PAIRS_AT_A_TIME = 1 << 20  # teeth at moments looked at together: some tens of megabytes
_ROUNDING = 1e-9  # far more than sums of some thousand loads differ by with the order they are added in


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
    teeth = _Teeth.of(lifts, track_index)
    at_s = planned_s[teeth.pluck]
    order = np.argsort(at_s, kind="stable")
    teeth, at_s = teeth.chosen(order), at_s[order]
    # The first of the next turn stand behind the last of this one: their teeth may be lifted already.
    widest_s = min(float(teeth.window_s.max()), turning.revolution_s)
    ahead = int(np.searchsorted(at_s, at_s[-1] + widest_s - turning.revolution_s))
    released_s = np.concatenate([at_s, at_s[:ahead] + turning.revolution_s])
    teeth = teeth.chosen(np.concatenate([np.arange(len(at_s)), np.arange(ahead)]))
    moments_s = np.unique(at_s)
    firsts, lasts = np.searchsorted(released_s, moments_s), np.searchsorted(released_s, moments_s + widest_s)
    best_nmm, best_s, best_plucks = -1.0, 0.0, np.zeros(0, dtype=np.int64)
    for moment in _heaviest(teeth, released_s, moments_s, (firsts, lasts)).tolist():
        near = slice(firsts[moment], lasts[moment])
        before_s = released_s[near] - moments_s[moment]
        lifted = before_s < teeth.window_s[near]
        load_nmm = float(teeth.load_nmm(near, before_s)[lifted].sum())
        if load_nmm > best_nmm:
            best_nmm, best_s, best_plucks = load_nmm, float(moments_s[moment]), np.unique(teeth.pluck[near][lifted])
    limit_nmm = movement.drive.torque_limit_nmm if movement.drive is not None else None
    return Load(peak_nmm=best_nmm, at_s=best_s, plucks=tuple(best_plucks.tolist()), limit_nmm=limit_nmm)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Teeth:
    """Every tooth that is lifted, shape (n,) each: of which pluck, its greatest load, and how long it is lifted."""

    pluck: IntArray
    peak_nmm: FloatArray
    window_s: FloatArray

    @classmethod
    def of(cls, lifts: Sequence[Sequence[ToothLift]], track_index: IntArray) -> "_Teeth":
        """Those of plucks on these tracks, pluck by pluck."""
        counts = np.array([len(track) for track in lifts], dtype=np.int64)
        pluck, place = counted_out((np.cumsum(counts) - counts)[track_index], counts[track_index])
        peak_nmm, window_s = (
            np.array([getattr(lift, name) for track in lifts for lift in track], dtype=np.float64)
            for name in ("peak_nmm", "window_s")
        )
        return cls(pluck=pluck, peak_nmm=peak_nmm[place], window_s=window_s[place])

    def chosen(self, places: IntArray) -> "_Teeth":
        """Some of them, or all in another order."""
        return _Teeth(pluck=self.pluck[places], peak_nmm=self.peak_nmm[places], window_s=self.window_s[places])

    def load_nmm(self, places: IntArray | slice, before_s: FloatArray) -> FloatArray:
        """The load of some of them so long before their releases; below 0 where they are not lifted yet."""
        return np.asarray(self.peak_nmm[places] * (1 - before_s / self.window_s[places]))


def _heaviest(
    teeth: _Teeth, released_s: FloatArray, moments_s: FloatArray, near: tuple[IntArray, IntArray]
) -> IntArray:
    """The moments, rising, at which the load is the greatest but for the rounding of a sum, as places."""
    firsts, lasts = near
    pairs = np.cumsum(lasts - firsts)
    cuts = np.searchsorted(pairs, np.arange(_PAIRS_AT_A_TIME, pairs[-1], _PAIRS_AT_A_TIME))
    load_nmm = np.zeros(len(moments_s))
    for moments in np.split(np.arange(len(moments_s)), np.unique(cuts)):
        run, place = counted_out(firsts[moments], (lasts - firsts)[moments])
        before_s = released_s[place] - moments_s[moments][run]
        loads_nmm = np.maximum(teeth.load_nmm(place, before_s), 0.0)
        load_nmm[moments] = np.bincount(run, weights=loads_nmm, minlength=len(moments))
    return np.flatnonzero(load_nmm >= load_nmm.max() * (1 - _ROUNDING))
