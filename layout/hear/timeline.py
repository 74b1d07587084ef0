"""Where the disc stands at each moment: its start, and the sag of the winding over the turn that is heard.

With S the surplus torque, friction and the teeth's mean load taken off, the speed follows √S
(layout.mechanics.winding), and S falls evenly with the angle. Until φ, from a speed ω₀ at S₀, that takes

    t(φ) = 2·φ·√S₀ / (ω₀·(√S₀ + √S(φ)))

The start comes late by t₀·ln(1 + √(1 − e^(−2·φ/(ω₀·t₀)))), which is layout.mechanics.starting turned round; the sag
within the few degrees of the start is not counted in it.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.errors import DocumentError, Problem
from layout.hear.performance import Turn
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.starting import starting_of
from layout.mechanics.torque import torque_over_turn
from layout.mechanics.turning import FULL_TURN_RAD, Turning
from layout.mechanics.winding import DiscLoad, run_down, wound_drive_of
from layout.play.plucks import Plucks

_START_STEPS, _START_CONSTANTS = 120, 6.0  # of the table: every twentieth of t₀ up to 6·t₀, then 5°
_TURN_STEPS = 72
_ROUNDING_RAD = 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class Timeline:
    """How the disc turns from the moment it begins to move.

    Attributes:
        speed_rad_per_s: ω₀, at the beginning of the turn, the start aside.
        constant_s: t₀ of the start; 0 where it is not stated, so that the disc is at speed at once.
        falls_ratio: By which share of S₀ the surplus torque falls in a whole turn; 0 for a steady one.
        stops_rad: Where the winding ends and the disc stops; infinite where it does not.
    """

    speed_rad_per_s: float
    constant_s: float
    falls_ratio: float
    stops_rad: float

    def moment_s(self, turned_rad: FloatArray) -> FloatArray:
        """When the disc has turned so far, shape (n,); for angles it reaches, from 0."""
        turned = np.asarray(turned_rad, dtype=np.float64)
        left = np.maximum(1 - self.falls_ratio * turned / FULL_TURN_RAD, 0.0)
        moment = 2 * turned / (self.speed_rad_per_s * (1 + np.sqrt(left)))
        if self.constant_s > 0:
            constants = turned / (self.speed_rad_per_s * self.constant_s)
            moment = moment + self.constant_s * np.log1p(np.sqrt(-np.expm1(-2 * constants)))
        return moment

    @property
    def table(self) -> FloatArray:
        """Shape (k, 2). Moments in seconds and how far the disc has turned by then, for straight lines between."""
        end_rad = min(FULL_TURN_RAD, self.stops_rad)
        constants = np.linspace(0, _START_CONSTANTS, _START_STEPS + 1)
        start_rad = self.speed_rad_per_s * self.constant_s * np.log(np.cosh(constants))
        turned = np.concatenate([start_rad, np.linspace(0, end_rad, _TURN_STEPS + 1)])
        turned = np.unique(turned[turned <= end_rad])
        return frozen_floats(np.column_stack([self.moment_s(turned), turned]))


def timeline_of(movement: Movement, turning: Turning, plucks: Plucks, turn: Turn) -> Timeline:
    """How the disc turns in the turn asked for.

    Args:
        movement: For its drive.
        turning: The movement's turning.
        plucks: The disc's, whose lifted teeth the drive carries.
        turn: Which turn.

    Raises:
        DocumentError: A turn of a winding is asked for, and the movement states no winding.
    """
    if turn == "steady":
        return _started(movement, FULL_TURN_RAD / turning.revolution_s, 0.0, math.inf)
    winding = movement.drive.winding if movement.drive is not None else None
    if winding is None:
        message = f"the {turn} turn of a winding is asked for, and {movement.id} states none; ask for a steady turn"
        raise DocumentError(document="movement", problems=(Problem(pointer="/drive/winding", message=message),))
    drive = wound_drive_of(winding)
    torque = torque_over_turn(movement, turning, plucks.track_index, plucks.sounds_s)
    load = DiscLoad(
        peak_nmm=0.0 if torque is None else torque.peak_nmm, mean_nmm=0.0 if torque is None else torque.mean_nmm
    )
    turn_count = run_down(drive, load, turning.revolution_s).turn_count
    first = {"first": 0.0, "middle": (turn_count - 1) / 2, "last": math.floor(turn_count + _ROUNDING_RAD) - 1.0}[turn]
    first = max(first, 0.0)

    def surplus_nmm(count: float) -> float:
        return max(drive.at_disc_nmm(count) - drive.friction_nmm - load.mean_nmm, 0.0)

    begins_nmm, middle_nmm = surplus_nmm(first), surplus_nmm(turn_count / 2)
    if not turn_count or not begins_nmm or not middle_nmm:
        return _started(movement, FULL_TURN_RAD / turning.revolution_s, 0.0, 0.0)
    speed = FULL_TURN_RAD / turning.revolution_s * math.sqrt(begins_nmm / middle_nmm)
    return _started(movement, speed, drive.falls_nmm / begins_nmm, (turn_count - first) * FULL_TURN_RAD)


def _started(movement: Movement, speed_rad_per_s: float, falls_ratio: float, stops_rad: float) -> Timeline:
    starting = starting_of(movement, FULL_TURN_RAD / speed_rad_per_s)
    return Timeline(
        speed_rad_per_s=speed_rad_per_s,
        constant_s=0.0 if starting is None else starting.time_constant_s,
        falls_ratio=falls_ratio,
        stops_rad=stops_rad + _ROUNDING_RAD,
    )
