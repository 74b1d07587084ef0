"""A number held against its limit, and what the number is worth.

A condition is met while its margin is above zero, or at it where the trade allows. The margin rests on numbers of the
movement that may have been measured; where they may be off by more than the margin, met or not,
that is said.
"""

from dataclasses import dataclass, replace

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.movement import Movement
from layout.mechanics.arrays import BoolArray, FloatArray

GRAIN_MM = 1e-6  # mm; a nanometre: what writing a place into a drawing and reading it back may leave
GRAIN_RAD = 1e-7  # rad; the same as an angle: GRAIN_MM at the smallest radius a track has, 10 mm
MOST_FINDINGS = 200  # findings of one check; a disc with more is wrong as a whole, and is told so


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """What must hold, and how to tell that it does not.

    Attributes:
        code: Of the finding where it fails.
        says: What was found and what it is held against: true whether the condition holds or not; no full stop.
        so: What follows where it fails.
        measured: The number found.
        limit: The number it is held against.
        unit: Of both.
        margin: Above zero where the condition holds, in `unit`.
        holds_at_limit: Whether a margin of exactly zero holds too.
        rests_on: JSON pointers of the movement's numbers the margin rests on, all in `unit`.
        also_unsure: What numbers in other units may shift the margin by, in `unit`.
        at: Where.
        remedy: What a person can do.
    """

    code: Code
    says: str
    so: str
    measured: float
    limit: float
    unit: str
    margin: float
    rests_on: tuple[str, ...]
    at: Place
    remedy: str
    holds_at_limit: bool = True
    also_unsure: float = 0.0


def told_worth(margin: float, unsure: float, unit: str, *, fails: bool) -> str:
    """A sentence, after a space, where a margin is smaller than what the numbers it stands on are worth; else "".

    Args:
        margin: Above zero where a condition holds, in `unit`.
        unsure: How far the numbers may shift it, either way.
        unit: Of both.
        fails: Whether the condition fails; a margin of zero may mean either.
    """
    if abs(margin) >= unsure:
        return ""
    how = "fails" if fails else "holds"
    return f" It {how} by {abs(margin):.3f} {unit}, less than the ±{unsure:.3f} {unit} of the numbers it stands on."


def judged(condition: Condition, movement: Movement) -> list[Finding]:
    """An error where the condition fails, a warning where it holds by less than its numbers are worth."""
    unsure = condition.also_unsure + sum(movement.plus_minus(pointer) for pointer in condition.rests_on)
    fails = condition.margin < 0 or (condition.margin == 0 and not condition.holds_at_limit)
    if not fails and condition.margin >= unsure:
        return []
    says = f"{condition.says}: {condition.so}." if fails else f"{condition.says}."
    says += told_worth(condition.margin, unsure, condition.unit, fails=fails)
    return [
        Finding(
            code=condition.code if fails else Code.MARGIN_UNSURE,
            level=Level.ERROR if fails else Level.WARNING,
            message=says,
            measured=condition.measured,
            limit=condition.limit,
            unit=condition.unit,
            at=condition.at,
            remedy=condition.remedy if fails else f"Measure again to be sure; if it then fails: {condition.remedy}",
        )
    ]


def not_surely_held(margin: FloatArray, unsure: FloatArray | float) -> BoolArray:
    """Of many conditions at once, the few that may fail or hold by less than their numbers are worth.

    All others have nothing to tell, so that no words need be made for them. `judged` says which of these few have:
    here a grain more is let through, so that the last digit of a sum leaves none out.

    Args:
        margin: Shape (n,). Above zero where a condition holds.
        unsure: Shape (n,) or one for all. How far its numbers may shift it.
    """
    return np.asarray(margin < unsure + 10 * GRAIN_MM)


def unsure_advice(finding: Finding) -> Finding:
    """The advice to measure again, of a finding whose limit is kept by less than its numbers are worth."""
    return replace(
        finding,
        code=Code.MARGIN_UNSURE,
        level=Level.ADVICE,
        remedy=f"Measure again to be sure; if it then fails: {finding.remedy}",
    )
