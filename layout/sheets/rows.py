"""Rows of equal discs: square, staggered, and staggered as far as the width allows, both ways round."""

from collections.abc import Iterator

import numpy as np

from layout.mechanics.arrays import FloatArray
from layout.sheets.placing import Placed, Wanted
from layout.sheets.room import GRAIN_MM, Room, fitting

_SHIFTS = np.arange(6) / 6  # shares of a pitch; where rows may begin on a sheet that is no plain rectangle
_MOST_IN_ROW = 200  # discs of a row, and rows; 40,000 spots are far more than the discs of a job
_SIDES = 4


def rows_on(room: Room, wanted: Wanted, size: int) -> list[Placed]:
    """Discs of one size in rows, every pattern that places any, each cut down to how many are wanted.

    Args:
        room: The sheet's.
        wanted: What may be placed.
        size: Which of its sizes is laid in rows.
    """
    radius_mm, most = float(wanted.radius_mm[size]), int(wanted.count[size])
    pitch_mm = 2 * radius_mm + wanted.gap_mm
    least, greatest = room.start_mm.min(axis=0), room.start_mm.max(axis=0)
    inset = radius_mm + float(room.keep_mm[0])
    free = np.minimum(greatest - least - 2 * inset, _MOST_IN_ROW * pitch_mm)
    found: list[Placed] = []
    if (free < -GRAIN_MM).any():
        return found
    plain = len(room.start_mm) == _SIDES and np.isclose(room.inside.area, np.prod(greatest - least))
    for turned in (False, True):
        extent = free[::-1] if turned else free
        for spots in _patterns(extent, pitch_mm, shifted=not plain):
            for mirrored in _mirrored(spots, extent) if not plain else [spots]:
                at = (mirrored[:, ::-1] if turned else mirrored) + least + inset
                kept = fitting(room, at, radius_mm)[:most]
                if len(kept):
                    found.append(Placed(centres_mm=kept, size=np.full(len(kept), size), way="rows"))
    return found


def _mirrored(spots: FloatArray, extent: FloatArray) -> Iterator[FloatArray]:
    """The pattern begun at each corner; what starts at the far side comes first there."""
    for x in (False, True):
        for y in (False, True):
            flip = np.array([x, y])
            yield np.where(flip, extent - spots, spots)


def _patterns(extent: FloatArray, pitch: float, *, shifted: bool) -> Iterator[FloatArray]:
    """Patterns of rows along x that fill a rectangle of centres from its lower left corner, row by row.

    Two rows that stand a stagger s apart may come as near as √(pitch² − s²), and every second row as
    near as half a pitch. So of a width that is no whole number of half pitches nothing need be wasted:
    the stagger takes what is left over, or the pitch grows until the rows fill the width.

    Args:
        extent: Shape (2,). Width and height of where centres may lie.
        pitch: Least distance of two centres.
        shifted: Whether patterns that begin elsewhere are given too.
    """
    width = max(0.0, float(extent[0]))
    whole = int((width + GRAIN_MM) / pitch)  # pitches; one disc more than that
    rest = width - whole * pitch
    yield _rows(extent, pitch, 0.0, pitch)
    yield _rows(extent, pitch, pitch / 2, pitch)
    if 0 < rest < pitch / 2:
        yield _rows(extent, pitch, rest, pitch)
    if whole > 0:
        yield _rows(extent, width / whole, width / whole / 2, pitch)
        yield _rows(extent, width / (whole + 0.5), width / (whole + 0.5) / 2, pitch)
    if shifted:
        for x in _SHIFTS:
            for y in _SHIFTS[1:]:
                yield _rows(extent, pitch, pitch / 2, pitch) + np.array([x * pitch, y * pitch])


def _rows(extent: FloatArray, along: float, stagger: float, pitch: float) -> FloatArray:
    """Rows whose discs stand `along` apart, every second row moved on by `stagger`; those outside left out."""
    if along < pitch - GRAIN_MM:
        return np.zeros((0, 2))
    nearest = min(stagger, along - stagger)
    up = max(np.sqrt(max(0.0, pitch**2 - nearest**2)), pitch / 2 if stagger else pitch)
    width, height = np.maximum(extent, 0.0)
    y = np.arange(int((height + GRAIN_MM) / up) + 1) * up
    rows = []
    for place, at in enumerate(y.tolist()):
        begin = stagger if place % 2 else 0.0
        count = int((width - begin + GRAIN_MM) / along) + 1 if width - begin > -GRAIN_MM else 0
        rows.append(np.column_stack([begin + np.arange(count) * along, np.full(count, at)]))
    return np.concatenate(rows)
