"""What lifting teeth loads the disc with.

A tooth of tip stiffness k, lifted by q, is in touch only over the last q of travel before its
release. The lift u rises from 0 to q, and the torque on the disc is k·u·r·cos δ; its window in time
is q·T/(2πr·cos δ). Derived here: a straight spring, pushed square to the row.
"""

from collections import defaultdict
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.mechanics.turning import FULL_TURN_RAD, Turning


@dataclass(frozen=True, slots=True, kw_only=True)
class ToothLift:
    """One tooth on its star wheel.

    Attributes:
        peak_nmm: Torque on the disc just before the release.
        window_s: From the first touch to the release, at the movement's stated turn.
    """

    peak_nmm: float
    window_s: float


def lifts_of(movement: Movement, turning: Turning) -> tuple[tuple[ToothLift, ...], ...] | None:
    """The teeth that each track lifts, by track; None unless every usable tooth states stiffness and lift."""
    lifts: dict[int, list[ToothLift]] = defaultdict(list)
    reach_mm = turning.radius_mm * np.cos(turning.row_rad)
    for tooth in movement.teeth:
        if not tooth.usable:
            continue
        if tooth.stiffness_n_per_mm is None or tooth.lift_mm is None:
            return None
        arm_mm = float(reach_mm[tooth.track - 1])
        lifts[tooth.track - 1].append(
            ToothLift(
                peak_nmm=tooth.stiffness_n_per_mm * tooth.lift_mm * arm_mm,
                window_s=tooth.lift_mm * turning.revolution_s / (FULL_TURN_RAD * arm_mm),
            )
        )
    return tuple(tuple(lifts[index]) for index in range(len(movement.tracks)))
