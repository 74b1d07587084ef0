"""The order in which the discs of a sheet are cut free.

The sheet is cut in strips across it, one strip after the other from one end to the other, to and fro
within a strip. So what is not cut yet stays one piece on one side, and no disc lies loose between discs
still to be cut. Where clamps hold the sheet, the far end is cut first. Of the orders that keep this rule the
one with the shortest travel is taken.
"""

from dataclasses import dataclass, replace
from itertools import product

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray
from layout.sheets.room import GRAIN_MM

_STRIPS = (0.5, 0.75, 1.0, 1.5, 2.0)  # widths tried, times the largest diameter
_ENDS = {"left": (0, 1.0), "right": (0, -1.0), "bottom": (1, 1.0), "top": (1, -1.0)}
_MOST_PASSES = 8  # over the whole order; few find anything after the third
_ALIKE = 6  # decimals of a millimetre to which two travels count as equal


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CuttingOrder:
    """An order of the discs, the end of the sheet it begins at, the width of its strips, and its travel."""

    order: IntArray
    begins_at: str
    strip_mm: float
    travel_mm: float


def cutting_order(centres_mm: FloatArray, radius_mm: FloatArray, held: str | None) -> CuttingOrder:
    """The shortest order in strips.

    Args:
        centres_mm: Shape (n, 2), one at least.
        radius_mm: Shape (n,).
        held: The end the clamps hold, "left", "right", "bottom" or "top"; None where there are none.
    """
    opposite = {"left": "right", "right": "left", "bottom": "top", "top": "bottom"}
    ends = list(_ENDS) if held is None else [opposite[held]]
    widest_mm = 2 * float(radius_mm.max())
    found = [
        _in_strips(centres_mm, end, times * widest_mm, first)
        for end, times, first in product(ends, _STRIPS, (1.0, -1.0))
    ]
    best = min(found, key=lambda each: round(each.travel_mm, _ALIKE))
    return _shortened(centres_mm, best)


def held_end(extent_mm: FloatArray, clamps_mm: FloatArray) -> str | None:
    """The end of a sheet that its clamps are nearest to on the whole; None where there are none.

    Args:
        extent_mm: Shape (2, 2). Lower left and upper right corner of the sheet.
        clamps_mm: Shape (c, 4). Least x and y, greatest x and y of each.
    """
    if not len(clamps_mm):
        return None
    middles = (clamps_mm[:, :2] + clamps_mm[:, 2:]) / 2
    off = middles.mean(axis=0) - extent_mm.mean(axis=0)
    share = off / np.ptp(extent_mm, axis=0)
    axis = int(np.argmax(np.abs(share)))
    return ("left", "right", "bottom", "top")[2 * axis + int(share[axis] > 0)]


def _in_strips(centres_mm: FloatArray, end: str, strip_mm: float, first: float) -> CuttingOrder:
    axis, sign = _ENDS[end]
    along = sign * centres_mm[:, axis]
    strip = _strips(centres_mm, end, strip_mm)
    way = np.where(strip % 2 == 0, first, -first)
    order = np.lexsort((along, way * centres_mm[:, 1 - axis], strip))
    return CuttingOrder(order=order, begins_at=end, strip_mm=strip_mm, travel_mm=travel_of(centres_mm[order]))


def _strips(centres_mm: FloatArray, end: str, strip_mm: float) -> IntArray:
    """The strip of each disc, counted without empty ones: they do not turn the way round."""
    axis, sign = _ENDS[end]
    along = sign * centres_mm[:, axis]
    strip = np.floor((along - along.min()) / strip_mm + GRAIN_MM)
    return np.asarray(np.unique(strip, return_inverse=True)[1], dtype=np.int64)


def _shortened(centres_mm: FloatArray, cutting: CuttingOrder) -> CuttingOrder:
    """The order with stretches inside a strip turned round as long as that shortens the travel."""
    order = cutting.order.copy()
    strip = _strips(centres_mm, cutting.begins_at, cutting.strip_mm)
    for _ in range(_MOST_PASSES):
        before = order.copy()
        for first in range(len(order) - 1):
            last = _best_turn(centres_mm[order], strip[order], first)
            order[first : last + 1] = order[first : last + 1][::-1]
        if (before == order).all():
            break
    return replace(cutting, order=order, travel_mm=travel_of(centres_mm[order]))


def _best_turn(path_mm: FloatArray, strip: IntArray, first: int) -> int:
    """The last disc of the stretch from `first` on that is best turned round; `first` itself for none."""
    lasts = np.arange(first, int(np.searchsorted(strip, strip[first], side="right")))
    saved = np.zeros(len(lasts))
    if first > 0:
        saved += _apart(path_mm[first - 1], path_mm[first]) - _apart(path_mm[first - 1], path_mm[lasts])
    inner = lasts + 1 < len(path_mm)
    after = path_mm[lasts[inner] + 1]
    saved[inner] += _apart(path_mm[lasts[inner]], after) - _apart(path_mm[first], after)
    best = int(np.argmax(np.round(saved, _ALIKE)))
    return int(lasts[best]) if saved[best] > GRAIN_MM else first


def _apart(one: FloatArray, other: FloatArray) -> FloatArray:
    return np.asarray(np.hypot(one[..., 0] - other[..., 0], one[..., 1] - other[..., 1]))


def travel_of(path_mm: FloatArray) -> float:
    """The length of the straight lines from point to point; 0 for one point."""
    steps = np.diff(path_mm, axis=0)
    return float(np.hypot(steps[:, 0], steps[:, 1]).sum())
