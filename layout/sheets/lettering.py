"""Which disc is which, lettered beside each in the metal that is left, where nothing is cut."""

import math
from collections.abc import Sequence
from functools import cache

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.mechanics.arrays import BoolArray, FloatArray, frozen_floats
from layout.mechanics.lettering import strokes_mm
from layout.sheets.plan import Label

HEIGHTS_MM = (5.0, 3.5, 2.5, 1.8)  # of capitals, tried in this order; the series of ISO 3098
# mm; common practice: an engraved line is 0.1 to 0.2 mm wide, within 0.1 mm of its place, and a kerf may lie between.
CLEAR_MM = 1.0
_WAYS = 48  # directions from a disc in which its label is tried, every 7.5 degrees, the upper right first
_FIRST_RAD = math.pi / 4
_HALVINGS = 40  # of a distance; to a billionth of a millimetre
_NEARER_MM = 0.5  # by so much a label is nearer to its own disc than to any other, so that none is taken for another's
_ROUND_SEGMENTS = 32  # of a quarter of a disc, where a polygon round it stands for it
_OUTSIDE = 1.001  # of its radius: that polygon's corners lie within 1/cos(π/128) of it, 0.03 % outside


def labels_beside(
    texts: Sequence[str], centres_mm: FloatArray, radius_mm: FloatArray, free: BaseGeometry
) -> tuple[Label | None, ...]:
    """A label for each disc, in the largest letters that find room; None where none do.

    A label stands upright and as near to its disc as it may, nearer than to any other. Labels keep off every rim,
    each other, and the edges of what is free by CLEAR_MM.

    Args:
        texts: What to letter, in printable ASCII, disc by disc.
        centres_mm: Shape (n, 2).
        radius_mm: Shape (n,). What is cut round each centre at most, leads included.
        free: Where letters may stand at all: the sheet without openings and clamp zones.
    """
    bounds = (radius_mm + CLEAR_MM) / math.cos(math.pi / (4 * _ROUND_SEGMENTS))
    discs = shapely.STRtree(shapely.buffer(shapely.points(centres_mm), bounds, quad_segs=_ROUND_SEGMENTS))
    inside = free.buffer(-CLEAR_MM)
    shapely.prepare(inside)
    found: list[Label | None] = [None] * len(texts)
    taken = _Taken()
    for height_mm in HEIGHTS_MM:
        left = [place for place, label in enumerate(found) if label is None]
        if not left:
            break
        boxes = _boxes([texts[place] for place in left], height_mm, centres_mm[left], radius_mm[left])
        fits = _fitting(boxes, inside, discs)
        for row in np.flatnonzero(fits.any(axis=1)).tolist():
            place, ways = left[row], boxes[row]
            for way in np.flatnonzero(fits[row] & _nearest(ways, place, centres_mm, radius_mm)).tolist():
                if taken.take(ways[way]):
                    middle_mm = ways[way].reshape(2, 2).mean(axis=0) - np.array([0.0, height_mm / 2])
                    found[place] = Label(text=texts[place], at_mm=frozen_floats(middle_mm), height_mm=height_mm)
                    break
    return tuple(found)


def _fitting(boxes: FloatArray, inside: BaseGeometry, discs: shapely.STRtree) -> BoolArray:
    """Shape (m, w). Whether each box lies inside and off every disc; what is left is few, and looked at one by one."""
    shapes = np.asarray(shapely.box(*boxes.reshape(-1, 4).T), dtype=np.object_)
    fits = np.asarray(shapely.contains(inside, shapes))
    tried = np.flatnonzero(fits)
    met, _ = discs.query(shapes[tried], predicate="intersects")
    fits[tried[met]] = False
    return fits.reshape(boxes.shape[:2])


def _nearest(boxes: FloatArray, place: int, centres_mm: FloatArray, radius_mm: FloatArray) -> BoolArray:
    """Shape (w,). Whether each box is nearer to its own disc than to any other, by _NEARER_MM."""
    away_mm = np.hypot(*(centres_mm - centres_mm[place]).T) - radius_mm
    reach_mm = radius_mm[place] + 2 * np.hypot(*np.ptp(boxes.reshape(-1, 2, 2), axis=1).T).max() + CLEAR_MM
    others = np.flatnonzero(away_mm < reach_mm + _NEARER_MM)
    apart_mm = _to_rims_mm(boxes, centres_mm[others], radius_mm[others])
    own = others == place
    others_mm = np.where(own, np.inf, apart_mm).min(axis=1, initial=np.inf)
    return np.asarray(others_mm > apart_mm[:, own].ravel() + _NEARER_MM)


def _to_rims_mm(boxes: FloatArray, centres_mm: FloatArray, radius_mm: FloatArray) -> FloatArray:
    """Shape (w, k). From each box to each rim."""
    low, high = boxes[:, None, :2], boxes[:, None, 2:]
    outside = np.maximum(np.maximum(low - centres_mm, centres_mm - high), 0.0)
    return np.asarray(np.hypot(outside[..., 0], outside[..., 1]) - radius_mm)


def _boxes(texts: Sequence[str], height_mm: float, centres_mm: FloatArray, radius_mm: FloatArray) -> FloatArray:
    """Shape (m, w, 4). Least x and y, greatest x and y of each label in every direction, just clear of its disc."""
    half = np.array([_half_size_mm(text, height_mm) for text in texts])[:, None, :]
    turn_rad = _FIRST_RAD + np.arange(_WAYS) * 2 * math.pi / _WAYS
    way = np.column_stack([np.cos(turn_rad), np.sin(turn_rad)])
    clear_mm = ((radius_mm + CLEAR_MM) * _OUTSIDE)[:, None]
    # From too near to far enough: a box whose middle is clear by half its diagonal is clear.
    far_mm = np.repeat(clear_mm + np.hypot(half[..., 0], half[..., 1]), _WAYS, axis=1)
    near_mm = np.zeros_like(far_mm)
    for _ in range(_HALVINGS):
        middle_mm = (near_mm + far_mm) / 2
        apart = np.maximum(np.abs(way * middle_mm[..., None]) - half, 0.0)
        is_clear = np.hypot(apart[..., 0], apart[..., 1]) >= clear_mm
        near_mm, far_mm = np.where(is_clear, near_mm, middle_mm), np.where(is_clear, middle_mm, far_mm)
    at_mm = centres_mm[:, None, :] + way * far_mm[..., None]
    return np.concatenate([at_mm - half, at_mm + half], axis=-1)


@cache
def _half_size_mm(text: str, height_mm: float) -> tuple[float, float]:
    strokes = strokes_mm(text, height_mm)
    wide_mm = max((float(np.abs(stroke[:, 0]).max()) for stroke in strokes), default=0.0)
    return wide_mm, height_mm / 2


class _Taken:
    """Where labels stand already."""

    def __init__(self) -> None:
        self._boxes = np.zeros((0, 4))

    def take(self, box: FloatArray) -> bool:
        """Take a place, unless another label stands there or within CLEAR_MM."""
        apart = np.maximum(self._boxes[:, :2] - box[2:], box[:2] - self._boxes[:, 2:]).max(axis=1)
        if (apart < CLEAR_MM).any():
            return False
        self._boxes = np.vstack([self._boxes, box])
        return True
