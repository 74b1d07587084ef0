"""From the bytes of a drawing to the disc that would be cut."""

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.projection import Pattern, pattern_of
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc
from layout.read_back.blank import compare_blank
from layout.read_back.bridges import without_bridges
from layout.read_back.file import read_drawing
from layout.read_back.limits import FARTHEST_MM
from layout.read_back.projections import Wanted, projections_of
from layout.read_back.reading import Reading
from layout.read_back.side import findings_on_the_side
from layout.read_back.slugs import findings_on_bridges, with_slugs_joined
from layout.read_back.whole_file import findings_on_the_file


def read_back(dxf: bytes, movement: Movement, cutter: Cutter) -> Reading:
    """The disc that a drawing would give, from what is cut alone.

    Only the cutter's layers for slits, slots, hits, holes and the rim are read; marks are not looked
    at. Tracks, fold lines and openings after forming make the drawing a record, which is never cut,
    and a head that says NOT GOOD TO CUT is believed; both are errors. Accepted on them are polylines, circles, points
    (hits), and lines and arcs that follow one another; vertices may start anywhere and run either
    way. Where the cutter's drawings are compensated for the kerf, outlines are taken for the beam's
    middle, half a kerf off the finished edges. The absolute place of every working edge is recovered
    from the shape of its cut. A drawing that fits only when mirrored is told once, by its outlines, its
    blank or its music.

    Args:
        dxf: An ASCII DXF file in millimetres, its origin at the disc's centre.
        movement: The movement the disc is for.
        cutter: The cutter it was drawn for.

    Returns:
        The disc, without what is out of shape, off its track or drawn a second time, and a finding
        for each of those, for what of the blank differs, and for a file that is not to be cut. A
        drawing without cuts gives a disc without projections, and findings for the missing blank.

    Raises:
        DrawingReadError: The bytes are no such file.
    """
    turning, pattern = turning_of(movement), pattern_of(movement, cutter)
    as_drawn = read_drawing(dxf, cutter, farthest_mm=_farthest_mm(movement, pattern))
    slugs = with_slugs_joined(without_bridges(as_drawn, movement, cutter), cutter)
    drawing = slugs.drawing
    wanted = Wanted(cutter=cutter, turning=turning, pattern=pattern)
    found = projections_of(drawing, wanted)
    disc = Disc(
        movement=movement,
        cutter=cutter,
        turning=turning,
        pattern=pattern,
        track_index=frozen_ints(found.edges.track_index),
        edge_angle_rad=frozen_floats(found.edges.edge_angle_rad),
    )
    of_the_file = findings_on_the_file(dxf, drawing, cutter)
    differs = compare_blank(drawing, movement, half_kerf_mm=wanted.half_kerf_mm)
    of_the_side = [] if found.shows_side else findings_on_the_side(drawing, found.edges, differs, wanted, movement)
    of_bridges = findings_on_bridges(slugs, disc)
    return Reading(disc=disc, findings=(*of_the_file, *of_the_side, *found.findings, *of_bridges, *differs))


def _farthest_mm(movement: Movement, pattern: Pattern) -> float:
    """How far from the centre a cut may lie: twice as far as this movement's own cuts, and never less than any disc's.

    A movement document may describe a disc of any size, and what we draw for it must read back.
    """
    tracks_mm = movement.tracks[-1].radius_mm + float(np.abs(pattern.opening.points_mm).sum(axis=1).max())
    return max(FARTHEST_MM, 2 * tracks_mm, movement.disc.outer_diameter_mm)
