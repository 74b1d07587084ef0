"""Checks that what a laser cuts has room for the leads and bridges its shop wants."""

import math

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.check.slugs import slugs_are_held
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray
from layout.mechanics.bridging import MOST_SHARE, arcs_of_rim_rad, gap_mm, gaps_in
from layout.mechanics.lead import clear_of_lines_mm, fits_in_circle, pierced_inside_mm
from layout.mechanics.obround import obround_mm
from layout.mechanics.offset import moved_outlines
from layout.mechanics.slugs import HeldOpening, OutlineGap, begun_after, held_openings, where_on_feature
from layout.place.disc import Disc


def leads_have_room(disc: Disc) -> list[Finding]:
    """A warning for each kind of inner outline without room for a lead; it is then pierced on its line.

    The rim is led in from outside, where the sheet's scrap is; open slits have no lead.
    """
    cutter = disc.cutter
    if cutter.lead_in is None:
        return []
    blank, cut = disc.movement.disc, disc.pattern.cut
    held = {(each.where, each.size_mm): each for each in held_openings(disc.pattern, disc.movement, cutter)}
    without = []
    if cut is not None and cut.closed:
        slot_mm = disc.movement.projection.length_mm or 0.0, disc.movement.projection.width_mm
        slot = held.get(("slot", slot_mm)) if disc.pattern.making == "slot" else None
        if not _fits(cut.points_mm, cut.bulges, cutter, slot):
            without.append("cuts of the projections have")
    if not _fits_round(blank.centre_hole_mm, cutter, held.get(("anywhere", (blank.centre_hole_mm,) * 2))):
        without.append("centre hole has")
    for one in blank.features:
        if one.shape == "notch":
            continue
        size_mm = one.length_mm, one.width_mm
        opening = held.get((where_on_feature(one), size_mm))
        if one.length_mm == one.width_mm:
            fits = _fits_round(one.width_mm, cutter, opening)
        else:
            fits = _fits(*obround_mm(*size_mm), cutter, opening)
        if not fits:
            without.append(f"{one.purpose} {one.shape} has")
    return [_no_room(cutter, what, cutter.lead_in.length_mm) for what in dict.fromkeys(without)]


def bridges_have_room(disc: Disc) -> list[Finding]:
    """A warning where the rim's arcs are too short for the cutter's bridges: the rim is then cut whole.

    What is found of the bridges of slugs: see slugs_are_held.
    """
    return [*_rim_has_room(disc), *slugs_are_held(disc)]


def _rim_has_room(disc: Disc) -> list[Finding]:
    bridges, rim_mm = disc.cutter.bridges, disc.movement.disc.outer_diameter_mm / 2
    if bridges is None:
        return []
    width_rad = 2 * math.asin(min(gap_mm(disc.cutter, bridges) / (2 * rim_mm), 1.0))
    if gaps_in(arcs_of_rim_rad(disc.movement), count=bridges.count, width_rad=width_rad) is not None:
        return []
    return [
        Finding(
            code=Code.BRIDGE_HAS_NO_ROOM,
            level=Level.WARNING,
            message=(
                f"The rim has no room for {bridges.count} bridges of {bridges.width_mm:.3f} mm: they would take more "
                f"than {MOST_SHARE:.0%} of an arc between its notches. None is left, and nothing holds the disc."
            ),
            measured=None,
            limit=100 * MOST_SHARE,
            unit="%",
            at=Place(radius_mm=rim_mm),
            remedy="State fewer or narrower bridges in the cutter document.",
        )
    ]


def _fits(points_mm: FloatArray, bulges: FloatArray, cutter: Cutter, held: HeldOpening | None) -> bool:
    if cutter.lead_in is None:
        return True
    if held is not None and held.gaps is not None:
        return _fits_beside_gaps(held, held.gaps, cutter)
    if cutter.kerf_compensated:
        moved = moved_outlines(np.asarray(points_mm)[None], bulges, -cutter.kerf_mm / 2)
        points_mm, bulges = (points_mm, bulges) if moved is None else (moved[0][0], moved[1])
    clear_mm = clear_of_lines_mm(cutter)
    return pierced_inside_mm(points_mm, bulges, length_mm=cutter.lead_in.length_mm, clear_mm=clear_mm) is not None


def _fits_round(diameter_mm: float, cutter: Cutter, held: HeldOpening | None) -> bool:
    if cutter.lead_in is None:
        return True
    if held is not None and held.gaps is not None:
        return _fits_beside_gaps(held, held.gaps, cutter)
    smaller_mm = cutter.kerf_mm if cutter.kerf_compensated and diameter_mm > cutter.kerf_mm else 0.0
    radius_mm, clear_mm = (diameter_mm - smaller_mm) / 2, clear_of_lines_mm(cutter)
    return fits_in_circle(radius_mm, length_mm=cutter.lead_in.length_mm, clear_mm=clear_mm)


def _fits_beside_gaps(held: HeldOpening, gaps: tuple[OutlineGap, ...], cutter: Cutter) -> bool:
    """Whether every line between two bridges of a slug has room for its lead."""
    length_mm = 0.0 if cutter.lead_in is None else cutter.lead_in.length_mm
    begun = [begun_after(gap, held.points_mm, held.bulge_ratio) for gap in gaps]
    clear_mm = clear_of_lines_mm(cutter)
    leads = [pierced_inside_mm(*each, length_mm=length_mm, clear_mm=clear_mm, forwards_only=True) for each in begun]
    return all(lead is not None for lead in leads)


def _no_room(cutter: Cutter, what: str, length_mm: float) -> Finding:
    return Finding(
        code=Code.LEAD_HAS_NO_ROOM,
        level=Level.WARNING,
        message=(
            f"The {what} no room inside for a lead of {length_mm:.3f} mm with the kerf of {cutter.kerf_mm:.3f} mm of "
            f"{cutter.id}, and no lead is drawn: the beam pierces on the line."
        ),
        measured=None,
        limit=length_mm,
        unit="mm",
        at=Place(),
        remedy="Shorten lead_in.length_mm in the cutter document, or widen what is cut.",
    )
