"""Checks that star wheel and projection fit: one exact step a pass, at both ends of the depth band.

They speak of a movement's sizes, so each gives at most one finding. A movement that states measured
arcs instead of sizes has nothing for them to check.
"""

import math
from itertools import product

from layout.check.finding import Code, Finding, Place
from layout.check.margin import Condition, judged
from layout.documents.movement import StarWheel
from layout.mechanics import star_wheel as formulas
from layout.place.disc import Disc

HALF_TURN_DEG = 180.0
_H, _R, _ROOT = "/star_wheel/axis_depth_mm", "/star_wheel/tip_radius_mm", "/star_wheel/root_radius_mm"
_P, _BAND, _FLAT = "/projection/depth_mm", "/projection/depth_plus_minus_mm", "/disc/flatness_mm"


def _sizes(disc: Disc) -> tuple[StarWheel, float, float] | None:
    """The wheel and the least and greatest depth, where the movement states them."""
    wheel = disc.movement.star_wheel
    if not isinstance(wheel, StarWheel) or disc.movement.projection.depth_mm is None:
        return None
    low_mm, high_mm = formulas.depth_band_mm(disc.movement)
    return wheel, low_mm, high_mm


def star_clears_the_disc(disc: Disc) -> list[Finding]:
    """The star must not touch the sheet between projections: H − R above the disc's flatness."""
    sizes = _sizes(disc)
    if sizes is None:
        return []
    gap_mm, flatness_mm = sizes[0].axis_depth_mm - sizes[0].tip_radius_mm, disc.movement.disc.flatness_mm
    condition = Condition(
        code=Code.STAR_HITS_DISC,
        says=f"The star's tips come {gap_mm:.3f} mm under the disc, which may be out of flat by {flatness_mm:.3f} mm",
        so="the star may touch the sheet between projections",
        measured=gap_mm,
        limit=flatness_mm,
        unit="mm",
        margin=gap_mm - flatness_mm,
        rests_on=(_H, _R, _FLAT),
        at=Place(),
        holds_at_limit=False,
        remedy="Set the star's axis deeper (axis_depth_mm), or use a flatter sheet (flatness_mm).",
    )
    return judged(condition, disc.movement)


def star_is_reached(disc: Disc) -> list[Finding]:
    """The shallowest projection must reach the tips: H − p below R."""
    sizes = _sizes(disc)
    if sizes is None:
        return []
    wheel, low_mm, _ = sizes
    gap_mm = wheel.axis_depth_mm - low_mm
    condition = Condition(
        code=Code.STAR_NOT_REACHED,
        says=(
            f"A projection {low_mm:.3f} mm deep, the least of its band, ends {gap_mm:.3f} mm from the star's axis; "
            f"the tips reach {wheel.tip_radius_mm:.3f} mm"
        ),
        so="it passes without turning the star",
        measured=gap_mm,
        limit=wheel.tip_radius_mm,
        unit="mm",
        margin=wheel.tip_radius_mm - gap_mm,
        rests_on=(_H, _R, _P, _BAND, _FLAT),
        at=Place(),
        holds_at_limit=False,
        remedy="Make the projection deeper (depth_mm), or hold its depth and the sheet's flatness closer.",
    )
    return judged(condition, disc.movement)


def step_reaches_the_next_point(disc: Disc) -> list[Finding]:
    """A whole step a pass: the leaving angle at or above π/n at the least depth."""
    sizes = _sizes(disc)
    leaving_deg = None if sizes is None else _leaving_deg(sizes[0], sizes[1])
    if sizes is None or leaving_deg is None:  # the star is not reached at all: another check says so
        return []
    wheel, low_mm, _ = sizes
    half_deg = HALF_TURN_DEG / wheel.points
    condition = Condition(
        code=Code.STEP_TOO_SHORT,
        says=(
            f"At a depth of {low_mm:.3f} mm, the least of its band, the tip is let go at {leaving_deg:.2f}°; "
            f"half a step is {half_deg:.2f}°"
        ),
        so="the star does not come round to the next point",
        measured=leaving_deg,
        limit=half_deg,
        unit="deg",
        margin=leaving_deg - half_deg,
        rests_on=(),
        also_unsure=_leaving_unsure_deg(disc, low_mm),
        at=Place(),
        remedy="Make the projection deeper (depth_mm), or hold its depth closer (depth_plus_minus_mm).",
    )
    return judged(condition, disc.movement)


def step_ends_at_the_next_point(disc: Disc) -> list[Finding]:
    """No more than a whole step a pass: the leaving angle below 2π/n at the greatest depth."""
    sizes = _sizes(disc)
    leaving_deg = None if sizes is None else _leaving_deg(sizes[0], sizes[2])
    if sizes is None or leaving_deg is None:  # the projection reaches the axis: the check of the root says so
        return []
    wheel, _, high_mm = sizes
    step_deg = 2 * HALF_TURN_DEG / wheel.points
    condition = Condition(
        code=Code.STEP_TOO_LONG,
        says=(
            f"At a depth of {high_mm:.3f} mm, the most of its band, the tip is held until {leaving_deg:.2f}°; "
            f"a whole step is {step_deg:.2f}°"
        ),
        so="the star is turned by two points in one pass",
        measured=leaving_deg,
        limit=step_deg,
        unit="deg",
        margin=step_deg - leaving_deg,
        rests_on=(),
        also_unsure=_leaving_unsure_deg(disc, high_mm),
        at=Place(),
        holds_at_limit=False,
        remedy="Make the projection shallower (depth_mm), or hold its depth closer (depth_plus_minus_mm).",
    )
    return judged(condition, disc.movement)


def _leaving_deg(wheel: StarWheel, depth_mm: float) -> float | None:
    try:
        return math.degrees(formulas.leaving_angle_rad(wheel, depth_mm))
    except ValueError:
        return None


def _leaving_unsure_deg(disc: Disc, depth_mm: float) -> float:
    """How far the leaving angle may be off, the worst of every way the wheel's and the depth's numbers may be."""
    wheel, movement = disc.movement.star_wheel, disc.movement
    if not isinstance(wheel, StarWheel):
        return 0.0
    gap_off_mm = sum(movement.plus_minus(pointer) for pointer in (_H, _P, _BAND, _FLAT))
    tip_off_mm = movement.plus_minus(_R)
    angle_deg = _leaving_deg(wheel, depth_mm)
    worst_deg = 0.0
    for gap_mm, tip_mm in product((-gap_off_mm, gap_off_mm), (-tip_off_mm, tip_off_mm)):
        moved = wheel.model_copy(update={"tip_radius_mm": wheel.tip_radius_mm + tip_mm})
        moved_deg = _leaving_deg(moved, depth_mm + gap_mm)
        if angle_deg is None or moved_deg is None:
            return HALF_TURN_DEG
        worst_deg = max(worst_deg, abs(moved_deg - angle_deg))
    return worst_deg


def tip_clears_the_bend(disc: Disc) -> list[Finding]:
    """The tip must meet the flat leg, not the fold: H − R above the fold's inside radius and the flatness."""
    sizes, fold = _sizes(disc), disc.cutter.fold
    if sizes is None or fold is None or disc.pattern.making != "fold":
        return []
    gap_mm = sizes[0].axis_depth_mm - sizes[0].tip_radius_mm - disc.movement.disc.flatness_mm
    condition = Condition(
        code=Code.TIP_IN_BEND,
        says=(
            f"The star's tips come to {gap_mm:.3f} mm under the disc at its most out of flat; "
            f"the fold is round up to {fold.inside_radius_mm:.3f} mm"
        ),
        so="the tips ride in the bend",
        measured=gap_mm,
        limit=fold.inside_radius_mm,
        unit="mm",
        margin=gap_mm - fold.inside_radius_mm,
        rests_on=(_H, _R, _FLAT),
        at=Place(),
        remedy="Fold sharper (the cutter's inside_radius_mm), or set the star's axis deeper (axis_depth_mm).",
    )
    return judged(condition, disc.movement)


def depth_stays_off_the_root(disc: Disc) -> list[Finding]:
    """The deepest projection must pass over the star's root: H − p above the root radius."""
    sizes = _sizes(disc)
    if sizes is None:
        return []
    wheel, _, high_mm = sizes
    gap_mm = wheel.axis_depth_mm - high_mm
    condition = Condition(
        code=Code.DEPTH_AT_ROOT,
        says=(
            f"A projection {high_mm:.3f} mm deep, the most of its band, comes to {gap_mm:.3f} mm from the star's "
            f"axis; the star is solid up to {wheel.root_radius_mm:.3f} mm"
        ),
        so="it runs onto the star's body",
        measured=gap_mm,
        limit=wheel.root_radius_mm,
        unit="mm",
        margin=gap_mm - wheel.root_radius_mm,
        rests_on=(_H, _ROOT, _P, _BAND, _FLAT),
        at=Place(),
        holds_at_limit=False,
        remedy="Make the projection shallower (depth_mm), or hold its depth and the sheet's flatness closer.",
    )
    return judged(condition, disc.movement)


def tooth_is_released(disc: Disc) -> list[Finding]:
    """The tooth must be released while the tip is pushed: β_r between α_e − 2π/n and α_e, at every depth."""
    sizes = _sizes(disc)
    if sizes is None:
        return []
    wheel, low_mm, high_mm = sizes
    least_deg, most_deg = _leaving_deg(wheel, low_mm), _leaving_deg(wheel, high_mm)
    if least_deg is None or most_deg is None:
        return []
    earliest_deg = most_deg - 2 * HALF_TURN_DEG / wheel.points
    release_deg = wheel.release_angle_deg
    late = release_deg > (earliest_deg + least_deg) / 2
    limit_deg = least_deg if late else earliest_deg
    condition = Condition(
        code=Code.TOOTH_LEFT_HANGING,
        says=(
            f"The tooth is released at {release_deg:.2f}° of the star wheel; over the whole depth band the tip is "
            f"pushed from {earliest_deg:.2f}° to {least_deg:.2f}°"
        ),
        so="the tooth may be lifted and left hanging",
        measured=release_deg,
        limit=limit_deg,
        unit="deg",
        margin=min(least_deg - release_deg, release_deg - earliest_deg),
        rests_on=("/star_wheel/release_angle_deg",),
        also_unsure=max(_leaving_unsure_deg(disc, low_mm), _leaving_unsure_deg(disc, high_mm)),
        at=Place(),
        holds_at_limit=False,
        remedy="Set comb and star wheel so that the tooth is released nearer the row, or make the projection deeper.",
    )
    return judged(condition, disc.movement)
