"""Discs as they are being placed on one sheet: what the ways of placing hand to each other."""

from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wanted:
    """What is to be placed, largest radius first.

    Attributes:
        radius_mm: Shape (k,). Falling.
        count: Shape (k,). How many of each.
        gap_mm: Least distance of two rims.
    """

    radius_mm: FloatArray
    count: IntArray
    gap_mm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Placed:
    """Discs on a sheet.

    Attributes:
        centres_mm: Shape (n, 2).
        size: Shape (n,). Index into the radii wanted.
        way: How they were found.
    """

    centres_mm: FloatArray
    size: IntArray
    way: str


NOTHING = Placed(centres_mm=np.zeros((0, 2)), size=np.zeros(0, dtype=np.int64), way="")


def left_of(wanted: Wanted, placed: Placed) -> IntArray:
    """How many of each size are still to be placed; shape (k,)."""
    return np.asarray(wanted.count - np.bincount(placed.size, minlength=len(wanted.count)))


def worth_of(wanted: Wanted, placed: Placed) -> tuple[float, int, float]:
    """What tells the better of two placings: more area, then more discs, then the smaller rectangle taken up."""
    radius_mm = wanted.radius_mm[placed.size]
    if not len(radius_mm):
        return 0.0, 0, 0.0
    reach = np.concatenate([placed.centres_mm - radius_mm[:, None], placed.centres_mm + radius_mm[:, None]])
    width_mm, height_mm = np.ptp(reach, axis=0)
    return round(float((radius_mm**2).sum()), 6), len(radius_mm), -round(float(width_mm * height_mm), 6)
