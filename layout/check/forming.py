"""Checks of what is bent: how tightly, and how it lies to the direction the sheet was rolled in."""

import math

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, GRAIN_RAD, told_worth
from layout.mechanics.arrays import BoolArray, FloatArray
from layout.place.disc import Disc

# Degrees between a bend's line and the rolling direction. Common practice, from memory: lines across it bend best,
# and shops ask for 30 to 45 degrees at least; the lesser is held here.
LEAST_TO_ROLLING_DEG = 30.0
_HALF_TURN_DEG = 180  # a line has no head: turned by half a turn it is the same


def bends_are_wide_enough(disc: Disc) -> list[Finding]:
    """An error where the fold's inside radius is below the least this cutter's shop bends without cracks."""
    fold = disc.cutter.fold
    if disc.pattern.making != "fold" or fold is None or fold.least_inside_radius_mm is None:
        return []
    radius_mm, least_mm = fold.inside_radius_mm, fold.least_inside_radius_mm
    if radius_mm >= least_mm - GRAIN_MM:
        return []
    return [
        Finding(
            code=Code.BEND_TOO_TIGHT,
            level=Level.ERROR,
            message=(
                f"The folds have an inside radius of {radius_mm:.3f} mm; {disc.cutter.id} folds none below "
                f"{least_mm:.3f} mm: the metal cracks on the outside of the bend."
            ),
            measured=radius_mm,
            limit=least_mm,
            unit="mm",
            at=Place(),
            remedy="Fold over a rounder anvil and raise fold.inside_radius_mm of the cutter document.",
        )
    ]


def bends_lie_across_the_rolling(disc: Disc) -> list[Finding]:
    """One advice where tabs are bent nearly along the direction the sheet was rolled in: they crack more easily.

    A tab's bend lies along the radius where its frame is square to it: at the working edge of a fold, and at the
    strike point of a lance. Not checked where the movement does not state `disc.rolled_along_deg`.
    """
    rolled_deg = disc.movement.disc.rolled_along_deg
    if disc.pattern.making == "slot" or rolled_deg is None or not disc.projection_count:
        return []
    to_rolling_deg = _between_lines_deg(_bends_deg(disc), rolled_deg)
    along = _is_along(to_rolling_deg)
    if not along.any():
        return []
    nearest = int(np.argmin(to_rolling_deg))
    bend = "folds" if disc.pattern.making == "fold" else "lanced tabs"
    return [
        Finding(
            code=Code.FOLDS_ALONG_ROLLING,
            level=Level.ADVICE,
            message=(
                f"{int(along.sum())} of {disc.projection_count} {bend} lie less than {LEAST_TO_ROLLING_DEG:g} degrees "
                f"from the direction the sheet is rolled in: those {_sectors(rolled_deg)} on the disc; the nearest "
                f"lies {to_rolling_deg[nearest]:.1f} degrees from it. Bent along the rolling, metal cracks more easily."
                + told_worth(
                    float(to_rolling_deg[nearest]) - LEAST_TO_ROLLING_DEG,
                    disc.movement.plus_minus("/disc/rolled_along_deg"),
                    "deg",
                    fails=True,
                )
            ),
            measured=float(to_rolling_deg[nearest]),
            limit=LEAST_TO_ROLLING_DEG,
            unit="deg",
            at=Place(
                tracks=(int(disc.track_index[nearest]) + 1,),
                projections=(nearest,),
                radius_mm=float(disc.radius_mm[nearest]),
                angle_deg=math.degrees(disc.edge_angle_rad[nearest]),
            ),
            remedy=_remedy(disc, int(along.sum())),
        )
    ]


def _bends_deg(disc: Disc) -> FloatArray:
    """Shape (n,). The direction of each bend: α − s·asin(w/r) where the frame is square to the radius at u = w."""
    behind_rad = disc.turning.direction * np.arcsin(np.clip(disc.pattern.strike_u_mm / disc.radius_mm, -1, 1))
    return np.asarray(np.degrees(disc.edge_angle_rad - behind_rad))


def _between_lines_deg(angle_deg: FloatArray, line_deg: float) -> FloatArray:
    """The angles between lines, in [0, 90]."""
    turned = np.mod(angle_deg - line_deg, _HALF_TURN_DEG)
    return np.asarray(np.minimum(turned, _HALF_TURN_DEG - turned))


def _is_along(to_rolling_deg: FloatArray) -> BoolArray:
    return np.asarray(to_rolling_deg < LEAST_TO_ROLLING_DEG - math.degrees(GRAIN_RAD))


def _sectors(rolled_deg: float) -> str:
    ends = [(rolled_deg + half + side * LEAST_TO_ROLLING_DEG) % 360 for half in (0, 180) for side in (-1, 1)]
    return f"from {ends[0]:g} to {ends[1]:g} and from {ends[2]:g} to {ends[3]:g} degrees"


def _remedy(disc: Disc, along_count: int) -> str:
    """Where another way of laying the blank on the sheet leaves fewer such bends, the best one to a degree."""
    bends_deg = _bends_deg(disc)
    counts = [int(_is_along(_between_lines_deg(bends_deg, line_deg)).sum()) for line_deg in range(_HALF_TURN_DEG)]
    fewest_deg = int(np.argmin(counts))
    turn = (
        f"Lay the blank so that it is rolled along {fewest_deg} degrees ({counts[fewest_deg]} such bends); or try"
        if counts[fewest_deg] < along_count
        else "Try"
    )
    return f"{turn} one on a scrap of the same sheet first; or use a rounder bend or a softer sheet."
