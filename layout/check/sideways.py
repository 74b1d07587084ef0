"""Checks that a projection touches its own star wheel, over its whole thickness, and no other.

What can shift it sideways: the cutter's position tolerance, the disc's run-out, and the slide along the axle while
a point may be touched.
"""

from layout.check.finding import Code, Finding, Place
from layout.check.margin import Condition, judged
from layout.mechanics import star_wheel as formulas
from layout.place.disc import Disc


def neighbours_are_not_fouled(disc: Disc) -> list[Finding]:
    """On each used track, half the width and its errors must end before the neighbour's star begins."""
    movement = disc.movement
    findings: list[Finding] = []
    for index in disc.used_tracks:
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
    for index in disc.used_tracks:
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
