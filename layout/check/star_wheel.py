"""Checks that star wheel and projection fit: one exact step a pass, at both ends of the depth band.

They speak of a movement's sizes, so each gives at most one finding, or one per track. A movement
that states measured arcs instead of sizes has nothing for the first seven to check.
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


def neighbours_are_not_fouled(disc: Disc) -> list[Finding]:
    """On each used track, half the width and its errors must end before the neighbour's star begins."""
    movement = disc.movement
    findings: list[Finding] = []
    for index in used_tracks(disc):
        pitch_mm = _nearest_track_mm(disc, index)
        if pitch_mm is None:
            continue
        reach_mm = movement.projection.width_mm / 2 + _sideways_mm(disc, index)
        room_mm = pitch_mm - movement.star_wheel.thickness_mm / 2
        condition = Condition(
            code=Code.NEIGHBOUR_FOULED,
            says=(
                f"A projection on track {index + 1} reaches {reach_mm:.3f} mm to the side; "
                f"the neighbouring star wheel begins at {room_mm:.3f} mm"
            ),
            so="it may turn the neighbour too",
            measured=reach_mm,
            limit=room_mm,
            unit="mm",
            margin=room_mm - reach_mm,
            rests_on=_side_pointers(index),
            at=_on_track(disc, index),
            remedy="Make the projections narrower (width_mm), or hold position and run-out closer.",
        )
        findings += judged(condition, movement)
    return findings


def own_star_is_met(disc: Disc) -> list[Finding]:
    """On each used track, half the width must cover half the star and every sideways error."""
    movement = disc.movement
    findings: list[Finding] = []
    for index in used_tracks(disc):
        needed_mm = movement.star_wheel.thickness_mm / 2 + _sideways_mm(disc, index)
        half_mm = movement.projection.width_mm / 2
        condition = Condition(
            code=Code.OWN_STAR_MISSED,
            says=(
                f"A projection on track {index + 1} reaches {half_mm:.3f} mm to each side; to meet its own star "
                f"wheel over its whole thickness in every case it needs {needed_mm:.3f} mm"
            ),
            so="it may slip past its own star",
            measured=half_mm,
            limit=needed_mm,
            unit="mm",
            margin=half_mm - needed_mm,
            rests_on=_side_pointers(index),
            at=_on_track(disc, index),
            remedy="Make the projections wider (width_mm), the row less offset, or hold position and run-out closer.",
        )
        findings += judged(condition, movement)
    return findings


def used_tracks(disc: Disc) -> list[int]:
    """Places of the tracks that carry a projection, in rising order."""
    return sorted({int(index) for index in disc.track_index})


def _on_track(disc: Disc, index: int) -> Place:
    return Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index]))


def _nearest_track_mm(disc: Disc, index: int) -> float | None:
    radii = disc.turning.radius_mm
    gaps = [abs(float(radii[other] - radii[index])) for other in (index - 1, index + 1) if 0 <= other < len(radii)]
    return min(gaps, default=None)


def _sideways_mm(disc: Disc, index: int) -> float:
    """Position tolerance, run-out, and the slide along the axle while a point may be touched."""
    movement = disc.movement
    row_mm = movement.gantry_offset_mm
    zone_mm = formulas.touch_zone_mm(movement, index)
    near_mm, far_mm = (row_mm - disc.turning.direction * place_mm for place_mm in zone_mm)
    slide_mm = formulas.axle_slide_mm(float(disc.turning.radius_mm[index]), row_mm, (near_mm, far_mm))
    return disc.cutter.position_tolerance_mm + movement.disc.run_out_mm + slide_mm


def _side_pointers(index: int) -> tuple[str, ...]:
    return (
        "/projection/width_mm",
        "/star_wheel/thickness_mm",
        "/disc/run_out_mm",
        "/gantry_offset_mm",
        f"/tracks/{index}/radius_mm",
    )
