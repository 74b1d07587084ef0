"""Checks that a projection touches its own star wheel, over its whole thickness, and no other.

What can shift it sideways: the cutter's position tolerance, the disc's run-out, and the slide along the axle while
a point may be touched.
"""

from layout.check.finding import Code, Finding, Place
from layout.check.margin import Condition, judged
from layout.check.worth import WIDTH, radius_pointer
from layout.mechanics import star_wheel as formulas
from layout.place.disc import Disc


def neighbours_are_not_fouled(disc: Disc) -> list[Finding]:
    """On each used track, half the width and its errors must end before the neighbour's star begins.

    Of two neighbours the one at fault is told, the nearer first.
    """
    findings: list[Finding] = []
    for index in disc.used_tracks:
        told = (judged(_beside(disc, index, other), disc.movement) for other in _neighbours(disc, index))
        findings += next((found for found in told if found), [])
    return findings


def _neighbours(disc: Disc, index: int) -> list[int]:
    """The tracks beside a track, the nearer first."""
    radii = disc.turning.radius_mm.tolist()
    apart_mm = {other: abs(radii[other] - radii[index]) for other in (index - 1, index + 1) if 0 <= other < len(radii)}
    return sorted(apart_mm, key=apart_mm.__getitem__)


def _beside(disc: Disc, index: int, other: int) -> Condition:
    movement = disc.movement
    apart_mm = abs(float(disc.turning.radius_mm[other] - disc.turning.radius_mm[index]))
    reach_mm = movement.projection.width_mm / 2 + _sideways_mm(disc, index)
    room_mm = apart_mm - movement.star_wheel.thickness_mm / 2
    return Condition(
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
        rests_on=("/disc/run_out_mm", radius_pointer(index), radius_pointer(other)),
        also_unsure=_halves_unsure_mm(disc) + _slide_unsure_mm(disc, index),
        at=_on_track(disc, index),
        remedy="Make the projections narrower (width_mm), or hold position and run-out closer.",
    )


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
            rests_on=("/disc/run_out_mm", radius_pointer(index)),
            also_unsure=_halves_unsure_mm(disc) + _slide_unsure_mm(disc, index),
            at=_on_track(disc, index),
            remedy="Make the projections wider (width_mm), the row less offset, or hold position and run-out closer.",
        )
        findings += judged(condition, movement)
    return findings


def _on_track(disc: Disc, index: int) -> Place:
    return Place(tracks=(index + 1,), radius_mm=float(disc.turning.radius_mm[index]))


def _sideways_mm(disc: Disc, index: int) -> float:
    """Position tolerance, run-out, and the slide along the axle while a point may be touched."""
    movement = disc.movement
    slide_mm = _slide_mm(disc, index, movement.gantry_offset_mm)
    return disc.cutter.position_tolerance_mm + movement.disc.run_out_mm + slide_mm


def _slide_mm(disc: Disc, index: int, row_mm: float) -> float:
    zone_mm = formulas.touch_zone_mm(disc.movement, index)
    near_mm, far_mm = (row_mm - disc.turning.direction * place_mm for place_mm in zone_mm)
    return formulas.axle_slide_mm(float(disc.turning.radius_mm[index]), row_mm, (near_mm, far_mm))


def _halves_unsure_mm(disc: Disc) -> float:
    """How far half the width and half the star may be off together."""
    return (disc.movement.plus_minus(WIDTH) + disc.movement.plus_minus("/star_wheel/thickness_mm")) / 2


def _slide_unsure_mm(disc: Disc, index: int) -> float:
    """How far the slide may be off by the row's offset: the more of both ways, short of the track's own radius."""
    row_mm, off_mm = disc.movement.gantry_offset_mm, disc.movement.plus_minus("/gantry_offset_mm")
    if not off_mm:
        return 0.0
    most_mm = float(disc.turning.radius_mm[index])
    moved_mm = (min(max(row_mm + way * off_mm, -most_mm), most_mm) for way in (-1, 1))
    return max(abs(_slide_mm(disc, index, each) - _slide_mm(disc, index, row_mm)) for each in moved_mm)
