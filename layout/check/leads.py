"""Checks that what a laser cuts has room for the leads and bridges its shop wants."""

import math

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray
from layout.mechanics.bridging import MOST_SHARE, arcs_of_rim_rad, gap_mm, gaps_in
from layout.mechanics.lead import clear_of_lines_mm, fits_in_circle, pierced_inside_mm
from layout.mechanics.obround import obround_mm
from layout.mechanics.offset import moved_outlines
from layout.place.disc import Disc


def leads_have_room(disc: Disc) -> list[Finding]:
    """A warning for each kind of inner outline without room for a lead; it is then pierced on its line.

    The rim is led in from outside, where the sheet's scrap is; open slits have no lead.
    """
    cutter = disc.cutter
    if cutter.lead_in is None:
        return []
    blank, cut = disc.movement.disc, disc.pattern.cut
    without = []
    if cut is not None and cut.closed and not _fits(cut.points_mm, cut.bulges, cutter):
        without.append("cuts of the projections have")
    if not _fits_round(blank.centre_hole_mm, cutter):
        without.append("centre hole has")
    for one in blank.features:
        if one.shape == "notch":
            continue
        if one.length_mm == one.width_mm:
            fits = _fits_round(one.width_mm, cutter)
        else:
            fits = _fits(*obround_mm(one.length_mm, one.width_mm), cutter)
        if not fits:
            without.append(f"{one.purpose} {one.shape} has")
    return [_no_room(cutter, what, cutter.lead_in.length_mm) for what in dict.fromkeys(without)]


def bridges_have_room(disc: Disc) -> list[Finding]:
    """A warning where the rim's arcs are too short for the cutter's bridges; the rim is then cut whole."""
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


def _fits(points_mm: FloatArray, bulges: FloatArray, cutter: Cutter) -> bool:
    if cutter.lead_in is None:
        return True
    if cutter.kerf_compensated:
        moved = moved_outlines(np.asarray(points_mm)[None], bulges, -cutter.kerf_mm / 2)
        points_mm, bulges = (points_mm, bulges) if moved is None else (moved[0][0], moved[1])
    clear_mm = clear_of_lines_mm(cutter)
    return pierced_inside_mm(points_mm, bulges, length_mm=cutter.lead_in.length_mm, clear_mm=clear_mm) is not None


def _fits_round(diameter_mm: float, cutter: Cutter) -> bool:
    if cutter.lead_in is None:
        return True
    smaller_mm = cutter.kerf_mm if cutter.kerf_compensated and diameter_mm > cutter.kerf_mm else 0.0
    radius_mm, clear_mm = (diameter_mm - smaller_mm) / 2, clear_of_lines_mm(cutter)
    return fits_in_circle(radius_mm, length_mm=cutter.lead_in.length_mm, clear_mm=clear_mm)


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
