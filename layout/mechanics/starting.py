"""How a movement comes up to speed against its air brake.

The brake's drag grows with the square of the speed, so a surplus torque τ that carries the brake at
ω_T gives I·dω/dt = τ·(1 − (ω/ω_T)²), and from rest

    ω(t) = ω_T·tanh(t/t₀)        angle(t) = ω_T·t₀·ln cosh(t/t₀)        t₀ = I·ω_T/τ

with I the disc and every part of its train, each as its own inertia times the square of its turns per
turn of the disc. The fall of a body with drag as the square of its speed is the same equation; the
solution stands in textbooks of mechanics and is held against numerical integration in the tests.
"""

import math
from dataclasses import dataclass

from layout.documents.movement import Movement
from layout.mechanics.turning import FULL_TURN_RAD

AT_SPEED_RATIO = 0.99  # share of the speed that counts as all of it: 1 % is below the 2.5 % that is just heard
NMM_PER_NM = 1000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Starting:
    """From rest to AT_SPEED_RATIO of the speed.

    Attributes:
        inertia_kg_m2: I, at the disc.
        time_constant_s: t₀.
        to_speed_s: Until the speed is reached, atanh(0.99)·t₀ = 2.6467·t₀.
        to_speed_rad: What the disc turns until then, ln cosh(atanh 0.99)·ω_T·t₀ = 1.9585·ω_T·t₀.
        at_least: Whether disc or train is not stated, so that it takes longer than told here.
    """

    inertia_kg_m2: float
    time_constant_s: float
    to_speed_s: float
    to_speed_rad: float
    at_least: bool


def starting_of(movement: Movement, revolution_s: float) -> Starting | None:
    """How the movement starts where it is set to turn once in revolution_s.

    The torque is the stated surplus, whatever the turn; so the angle grows with the square of the speed.

    Args:
        movement: For its drive.
        revolution_s: Seconds a turn at full speed, above 0.

    Returns:
        None where the drive states no surplus torque, or neither the disc's inertia nor a train.
    """
    drive = movement.drive
    inertia_kg_m2 = inertia_at_disc_kg_m2(movement)
    if drive is None or drive.surplus_torque_nmm is None or inertia_kg_m2 is None:
        return None
    speed_rad_per_s = FULL_TURN_RAD / revolution_s
    constant_s = inertia_kg_m2 * speed_rad_per_s / (drive.surplus_torque_nmm / NMM_PER_NM)
    constants = math.atanh(AT_SPEED_RATIO)
    return Starting(
        inertia_kg_m2=inertia_kg_m2,
        time_constant_s=constant_s,
        to_speed_s=constants * constant_s,
        to_speed_rad=math.log(math.cosh(constants)) * speed_rad_per_s * constant_s,
        at_least=drive.disc_inertia_kg_m2 is None or not drive.train,
    )


def inertia_at_disc_kg_m2(movement: Movement) -> float | None:
    """I = I_disc + Σ J·ratio², of the parts that are stated; None where none is."""
    drive = movement.drive
    if drive is None or (drive.disc_inertia_kg_m2 is None and not drive.train):
        return None
    train = (part.inertia_kg_m2 * part.ratio * part.ratio for part in drive.train)
    return (drive.disc_inertia_kg_m2 or 0.0) + math.fsum(train)
