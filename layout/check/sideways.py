"""Checks that a projection touches its own star wheel, over its whole thickness, and no other.

What can shift it sideways: the cutter's position tolerance, the disc's run-out, and the slide along the axle while
a point may be touched.
"""

import numpy as np

from layout.check.finding import Code, Finding, Place
from layout.check.margin import Condition, judged, not_surely_held
from layout.check.worth import WIDTH, of_tracks, radius_pointer
from layout.mechanics import star_wheel as formulas
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc


def neighbours_are_not_fouled(disc: Disc) -> list[Finding]:
    """On each used track, half the width and its errors must end before the neighbour's star begins.

    Of two neighbours the one at fault is told, the nearer first.
    """
    findings: list[Finding] = []
    for index in _may_foul(disc):
        told = (judged(_beside(disc, index, other), disc.movement) for other in _neighbours(disc, index))
        findings += next((found for found in told if found), [])
    return findings


def _may_foul(disc: Disc) -> list[int]:
    """The used tracks that do not surely keep clear of both tracks beside them."""
    radius_mm, star_mm = disc.turning.radius_mm, disc.movement.star_wheel.thickness_mm
    radius_unsure_mm = of_tracks(disc, "radius_mm")
    room_mm = np.abs(np.diff(radius_mm)) - star_mm / 2
    both_unsure_mm = radius_unsure_mm[1:] + radius_unsure_mm[:-1]
    # Of the tracks beside, the first and the last one have one alone.
    margin_mm = np.minimum(
        np.append(room_mm - both_unsure_mm, np.inf), np.concatenate([[np.inf], room_mm - both_unsure_mm])
    )
    reach_mm = disc.movement.projection.width_mm / 2 + _all_sideways_mm(disc)
    told = not_surely_held(margin_mm - reach_mm, _all_unsure_mm(disc))
    return [index for index in disc.used_tracks if told[index]]


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
    half_mm, star_mm = movement.projection.width_mm / 2, movement.star_wheel.thickness_mm
    margin_mm = half_mm - star_mm / 2 - _all_sideways_mm(disc)
    told = not_surely_held(margin_mm, of_tracks(disc, "radius_mm") + _all_unsure_mm(disc))
    findings: list[Finding] = []
    for index in (used for used in disc.used_tracks if told[used]):
        needed_mm = movement.star_wheel.thickness_mm / 2 + _sideways_mm(disc, index)
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


def _all_sideways_mm(disc: Disc) -> FloatArray:
    """Shape (tracks,). `_sideways_mm` of every track."""
    movement = disc.movement
    slide_mm = _all_slides_mm(disc, movement.gantry_offset_mm)
    return disc.cutter.position_tolerance_mm + movement.disc.run_out_mm + slide_mm


def _all_slides_mm(disc: Disc, row_mm: float) -> FloatArray:
    """Shape (tracks,). `axle_slide_mm` of every track: most at an end of the zone, or at its place nearest to y = 0."""
    radius_mm = disc.turning.radius_mm[:, None]
    zone_mm = np.sort(row_mm - disc.turning.direction * disc.touch_zones_mm, axis=1)
    nearest_mm = np.clip(0.0, zone_mm[:, :1], zone_mm[:, 1:])
    out_mm = np.sqrt(np.maximum(radius_mm**2 - np.hstack([zone_mm, nearest_mm]) ** 2, 0.0))
    return np.asarray(np.abs(out_mm - np.sqrt(radius_mm**2 - row_mm**2)).max(axis=1))


def _all_unsure_mm(disc: Disc) -> FloatArray:
    """Shape (tracks,). How far what lies sideways of every track may be off, all but the tracks' own radii."""
    unsure_mm = _halves_unsure_mm(disc) + disc.movement.plus_minus("/disc/run_out_mm")
    slides_mm = np.array([_slide_unsure_mm(disc, index) for index in range(len(disc.turning.radius_mm))])
    return unsure_mm + slides_mm


def _slide_mm(disc: Disc, index: int, row_mm: float) -> float:
    near_mm, far_mm = (row_mm - disc.turning.direction * place_mm for place_mm in disc.touch_zones_mm[index].tolist())
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
