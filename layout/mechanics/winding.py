"""What one winding of the spring gives, and how the speed falls while it runs down.

A flat spiral spring gives M = E·b·h³·φ/(12·L), φ being how far it is wound from its free shape: the bending
of a clamped strip of the section's inertia b·h³/12 (handbooks of spring design). A train whose disc
turns `ratio` times in a turn of the barrel brings M·efficiency/ratio to the disc.

What the disc needs is friction and its peak load. Not the mean: what turns so slowly stores little more than one
full chord takes, so it would be carried over a chord only at a loss of speed, and stops on the next. The rest goes
into the air brake, whose drag grows with the square of the speed: there the mean load counts, and the
speed follows the root of the surplus torque. Where friction, load or efficiency is not stated it is
left aside, and turns and torques are then upper bounds, the loss of speed a lower one.
"""

import math
from dataclasses import dataclass
from typing import Literal

from layout.documents.drive import Winding
from layout.mechanics.turning import FULL_TURN_RAD

_ROUNDING_COUNT = 1e-9  # turns; what products of ratios may fall short of a whole turn


@dataclass(frozen=True, slots=True, kw_only=True)
class WoundDrive:
    """A spring and its train, in numbers.

    Attributes:
        rate_nmm_per_rad: The spring's torque a radian wound, E·b·h³/(12·L).
        wound_count: Turns of the barrel from the free shape when full.
        usable_count: Of those, the turns the barrel gives.
        train_ratio: Turns of the disc per turn of the barrel.
        efficiency_factor: Of the train; 1 where not stated.
        friction_nmm: At the disc; 0 where not stated.
    """

    rate_nmm_per_rad: float
    wound_count: float
    usable_count: float
    train_ratio: float
    efficiency_factor: float
    friction_nmm: float

    @property
    def falls_nmm(self) -> float:
        """By how much the torque at the disc falls in one turn of the disc."""
        return self.rate_nmm_per_rad * FULL_TURN_RAD * self.efficiency_factor / self.train_ratio / self.train_ratio

    def at_disc_nmm(self, turned_count: float) -> float:
        """The torque at the disc after so many turns of the disc since the spring was full."""
        wound_rad = (self.wound_count - turned_count / self.train_ratio) * FULL_TURN_RAD
        return self.rate_nmm_per_rad * wound_rad * self.efficiency_factor / self.train_ratio


@dataclass(frozen=True, slots=True, kw_only=True)
class DiscLoad:
    """What a disc asks of its drive, 0 where not known: its teeth's peak and mean torque over a turn."""

    peak_nmm: float
    mean_nmm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class WindingRun:
    """One winding, run down with one disc on the movement.

    Attributes:
        full_nmm: Torque at the disc when the spring is full.
        spent_nmm: The same when the turns are over.
        needed_nmm: Friction and the disc's peak load.
        turn_count: Turns of the disc it plays, up to ended_by.
        ended_by: "barrel" where the barrel has no more turns, "load" where the torque falls below what is needed.
        last_turn_slows_ratio: Share of its speed that the disc loses in the last whole turn, in which it
            loses the most; in the part of a turn it plays where there is no whole one.
        winding_slows_ratio: Share of its speed that it loses from the full spring to the last turn's end.
        first_revolution_s: Seconds a turn at the full spring's speed.
        last_revolution_s: Seconds a turn at the end; None where nothing is left for the brake, so that it stops.
    """

    full_nmm: float
    spent_nmm: float
    needed_nmm: float
    turn_count: float
    ended_by: Literal["barrel", "load"]
    last_turn_slows_ratio: float
    winding_slows_ratio: float
    first_revolution_s: float
    last_revolution_s: float | None


def gear_ratio(stages: tuple[float, ...]) -> float:
    """The ratio of a train, the product of its stages (common practice); 1 for none."""
    return math.prod(stages)


def spring_rate_nmm_per_rad(winding: Winding) -> float:
    """Torque of the flat spiral spring per radian wound: E·b·h³/(12·L)."""
    spring = winding.spring
    cubed_mm3 = spring.thickness_mm * spring.thickness_mm * spring.thickness_mm
    return spring.elastic_modulus_n_per_mm2 * spring.width_mm * cubed_mm3 / (12 * spring.length_mm)


def wound_drive_of(winding: Winding) -> WoundDrive:
    """The document's winding in numbers; what it does not state is left aside."""
    return WoundDrive(
        rate_nmm_per_rad=spring_rate_nmm_per_rad(winding),
        wound_count=winding.spring.wound_turns,
        usable_count=winding.spring.usable_turns,
        train_ratio=gear_ratio(winding.barrel_to_disc),
        efficiency_factor=1.0 if winding.efficiency is None else winding.efficiency,
        friction_nmm=winding.friction_nmm or 0.0,
    )


def braked_revolution_s(winding: Winding) -> float | None:
    """Seconds a turn of the disc at the brake's stated speed; None where brake or train to it is not stated."""
    if winding.brake_turns_per_s is None or not winding.disc_to_brake:
        return None
    return gear_ratio(winding.disc_to_brake) / winding.brake_turns_per_s


def run_down(drive: WoundDrive, load: DiscLoad, revolution_s: float) -> WindingRun:
    """One winding run down, from the full spring.

    The stated turn is taken to hold in the middle of the turns played: who sets a brake so that the disc is as
    much too fast at first as too slow at last is never far off. Losses of speed do not depend on it.

    Args:
        drive: The spring and its train.
        load: What the disc asks for.
        revolution_s: The stated turn.
    """
    needed_nmm = drive.friction_nmm + load.peak_nmm
    full_nmm = drive.at_disc_nmm(0.0)
    barrel_count = drive.usable_count * drive.train_ratio
    # Straight, from full_nmm to nothing at the free shape after wound_count turns of the barrel.
    carried_count = drive.wound_count * drive.train_ratio * (1 - needed_nmm / full_nmm)
    turn_count = max(min(barrel_count, carried_count), 0.0)

    def speed(turned_count: float) -> float:
        return math.sqrt(max(drive.at_disc_nmm(turned_count) - drive.friction_nmm - load.mean_nmm, 0.0))

    last = math.floor(turn_count + _ROUNDING_COUNT) or turn_count
    middle, end = speed(turn_count / 2), speed(turn_count)
    return WindingRun(
        full_nmm=full_nmm,
        spent_nmm=drive.at_disc_nmm(turn_count),
        needed_nmm=needed_nmm,
        turn_count=turn_count,
        ended_by="barrel" if barrel_count <= carried_count else "load",
        last_turn_slows_ratio=_lost(speed(max(last - 1, 0.0)), speed(last)),
        winding_slows_ratio=_lost(speed(0.0), end),
        first_revolution_s=revolution_s * middle / speed(0.0) if middle > 0 else revolution_s,
        last_revolution_s=revolution_s * middle / end if end > 0 else None,
    )


def steady_turns(drive: WoundDrive, load: DiscLoad, slows_ratio: float) -> int:
    """How many whole turns from the full spring lose no more than this share of their speed each.

    The square of the speed, S, falls by s a turn: turn k keeps √(1 − s/(S₀ − s·(k − 1))) of it, which is at
    least 1 − x up to k = 1 + S₀/s − 1/(1 − (1 − x)²). Derived here. How far the barrel goes is not asked.

    Args:
        drive: The spring and its train.
        load: What the disc asks for.
        slows_ratio: x, above 0, below 1.
    """
    at_first_nmm = drive.at_disc_nmm(0.0) - drive.friction_nmm - load.mean_nmm
    most = 1 + at_first_nmm / drive.falls_nmm - 1 / (1 - (1 - slows_ratio) ** 2)
    return max(math.floor(most + _ROUNDING_COUNT), 0)


def _lost(from_speed: float, to_speed: float) -> float:
    return 1 - to_speed / from_speed if from_speed > 0 else 0.0
