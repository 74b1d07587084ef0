"""Leads: short lines from where the laser pierces, in the scrap, to where it comes to a closed outline."""

import math
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from layout.cut.plan import Circles, Entity, Outlines
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.lead import clear_of_lines_mm, fits_in_circle, pierced_inside_mm


def with_leads(entity: Entity, cutter: Cutter) -> Iterator[Entity]:
    """What is cut, each closed outline by itself with its lead before it, where the cutter wants leads.

    Inner outlines are pierced inside themselves, the rim outside: in the middle of its longest arc, or
    beside every bridge. An outline without room for its lead goes without; so do open slits.

    Args:
        entity: Seen from the label side, as it is drawn.
        cutter: Its lead_in; without one the entity is given back as it is.
    """
    if cutter.lead_in is None or not isinstance(entity, Outlines | Circles):
        yield entity
    elif isinstance(entity, Circles):
        yield from _circles_with_leads(entity, cutter, cutter.lead_in.length_mm)
    elif entity.layer == "RIM":
        yield from (_rim_with_lead if entity.closed else _open_rim_with_lead)(entity, cutter.lead_in.length_mm)
    elif not entity.closed:
        yield entity
    else:
        yield from _outlines_with_leads(entity, cutter, cutter.lead_in.length_mm)


def _lead(from_mm: FloatArray, to_mm: FloatArray) -> Outlines:
    points_mm = frozen_floats(np.stack([from_mm, to_mm])[None])
    return Outlines(layer="LEADS", points_mm=points_mm, bulges=frozen_floats([0.0, 0.0]), closed=False)


def _circles_with_leads(circles: Circles, cutter: Cutter, length_mm: float) -> Iterator[Entity]:
    inwards = -1 if circles.layer == "RIM" else 1
    for centre_mm, radius_mm in zip(circles.centres_mm, circles.radius_mm.tolist(), strict=True):
        begun_mm = centre_mm + np.array([radius_mm, 0.0])
        room = fits_in_circle(radius_mm, length_mm=length_mm, clear_mm=clear_of_lines_mm(cutter))
        if inwards < 0 or room:
            yield _lead(begun_mm - np.array([inwards * length_mm, 0.0]), begun_mm)
        yield replace(circles, centres_mm=frozen_floats(centre_mm[None]), radius_mm=frozen_floats([radius_mm]))


def _outlines_with_leads(outlines: Outlines, cutter: Cutter, length_mm: float) -> Iterator[Entity]:
    """All outlines of one make have one lead, turned with them."""
    first_mm = outlines.points_mm[0]
    pierced_mm = pierced_inside_mm(first_mm, outlines.bulges, length_mm=length_mm, clear_mm=clear_of_lines_mm(cutter))
    if pierced_mm is None:
        yield outlines
        return
    side = complex(*(first_mm[1] - first_mm[0]))
    lead = complex(*(pierced_mm - first_mm[0]))
    for points_mm in outlines.points_mm:
        turned = lead * complex(*(points_mm[1] - points_mm[0])) / side
        yield _lead(points_mm[0] + np.array([turned.real, turned.imag]), points_mm[0])
        yield replace(outlines, points_mm=frozen_floats(points_mm[None]))


def _rim_with_lead(rim: Outlines, length_mm: float) -> Iterator[Entity]:
    """The rim begun in the middle of its longest arc, or longest side where it has none, led in from outside."""
    points_mm, bulges = rim.points_mm[0], rim.bulges
    chords_mm = np.hypot(*(np.roll(points_mm, -1, axis=0) - points_mm).T)
    piece = int(np.where((bulges != 0) | ~bulges.any(), chords_mm, 0.0).argmax())
    start, end = complex(*points_mm[piece]), complex(*points_mm[(piece + 1) % len(points_mm)])
    # Anticlockwise, so outside is to the right of the chord; an arc's height is bulge·chord/2 (DXF reference).
    outwards = -1j * (end - start) / abs(end - start)
    middle = (start + end) / 2 + outwards * float(bulges[piece]) * abs(end - start) / 2
    half_bulge = math.tan(math.atan(bulges[piece]) / 2)
    begun_mm, pierced = np.array([middle.real, middle.imag]), middle + outwards * length_mm
    yield _lead(np.array([pierced.real, pierced.imag]), begun_mm)
    around_mm = np.concatenate([begun_mm[None], np.roll(points_mm, -piece - 1, axis=0)])
    around = [half_bulge, *np.roll(bulges, -piece - 1)]
    around[-1] = half_bulge
    yield replace(rim, points_mm=frozen_floats(around_mm[None]), bulges=frozen_floats(around))


def _open_rim_with_lead(rim: Outlines, length_mm: float) -> Iterator[Entity]:
    """A stretch of the rim between two bridges, led in from outside straight to its first end."""
    begun_mm = rim.points_mm[0, 0]
    yield _lead(begun_mm * (1 + length_mm / float(np.hypot(*begun_mm))), begun_mm)
    yield rim
