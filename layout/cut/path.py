"""The way of the machine over the disc: the order of the cuts, and what is travelled.

A laser goes from cut to cut on a short round trip from the disc centre, where the marks end and the centre hole
waits, and back. It keeps off heat by one rule: two openings with less than HOT_WEB_MM of metal between them are
never cut one directly after the other, as long as there is anything else to cut in between.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.cut.plan import Circles, CutPath, Drawing, Entity, Lettering, Outlines, Points
from layout.cut.striking import hit_order, strike_path
from layout.cut.touring import short_round_trip
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.hole_hits import HoleHits
from layout.place.disc import Disc

# mm; a web between two openings is heated from both, and loses its heat only along itself, L²/a for a length L: a
# tab 1.2 mm wide in steel with a = 14 mm²/s (handbook value for mild steel at room temperature, from memory) takes
# 0.1 s, about one cut with its piercing. Wider than twice a sheet of 0.5 mm, a web passes heat on across itself.
HOT_WEB_MM = 1.0
_SAME_PLACE_MM = 1e-6  # mm; a nanometre: a contour that starts where its lead ends is not pierced again


def cutting_order(disc: Disc) -> IntArray:
    """Shape (n,). Projection indices in cutting order: by the press's own rule, or by a laser's (see above)."""
    if disc.cutter.kind == "punch-press":
        return hit_order(disc)
    return short_round_trip(_begun_at_mm(disc), hot_pairs(disc))


def hot_pairs(disc: Disc) -> IntArray:
    """Shape (m, 2). Pairs of projections, the lower index first, with a web of less than HOT_WEB_MM between them."""
    lower, higher, _ = disc.openings.webs_within(HOT_WEB_MM)
    order = np.lexsort((higher, lower))
    return np.column_stack([lower[order], higher[order]])


def _begun_at_mm(disc: Disc) -> FloatArray:
    """Shape (n, 2). Where each cut begins; of an open slit, which ends elsewhere, the middle between both."""
    cut = disc.pattern.cut
    if cut is None:
        at_mm = np.zeros((1, 2))
    else:
        at_mm = cut.points_mm[:1] if cut.closed else (cut.points_mm[:1] + cut.points_mm[-1:]) / 2
    return disc.placed_mm(at_mm)[:, 0]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Strokes:
    """Lines the machine follows, in their order: starts and ends, shape (n, 2), and lengths, shape (n,)."""

    start_mm: FloatArray
    end_mm: FloatArray
    length_mm: FloatArray


def path_of(disc: Disc, drawing: Drawing, order: IntArray, struck: tuple[HoleHits, ...]) -> CutPath:
    """What the machine travels for a drawing.

    A circle is begun at its +X side. Of a press the marks and the strikes count: those on holes it
    has a tool for, and on projections; the rim is not struck.

    Args:
        disc: The disc.
        drawing: What is cut and marked, in cutting order.
        order: Shape (n,). Projection indices in cutting order.
        struck: What a press strikes of the blank's own holes; none on a laser.
    """
    strokes = [(entity.layer, stroke) for entity in drawing.entities for stroke in _strokes(entity)]
    marked = [stroke for layer, stroke in strokes if layer == "MARKS"]
    if disc.cutter.kind == "punch-press":
        travelled = strike_path(disc, order, struck)
        return CutPath(
            cut_length_mm=0.0,
            mark_length_mm=_length_mm(marked),
            rapid_length_mm=_rapid_mm(marked),
            pierce_count=0,
            hit_count=travelled.hit_count,
            turned_rad=travelled.turned_rad,
            slid_mm=travelled.slid_mm,
            tool_change_count=travelled.tool_change_count,
        )
    cut = [stroke for layer, stroke in strokes if layer != "MARKS"]
    return CutPath(
        cut_length_mm=_length_mm(cut),
        mark_length_mm=_length_mm(marked),
        rapid_length_mm=_rapid_mm([stroke for _, stroke in strokes]),
        pierce_count=_pierces(cut),
        hit_count=0,
        turned_rad=0.0,
        slid_mm=0.0,
        tool_change_count=0,
    )


def _length_mm(strokes: list[_Strokes]) -> float:
    return float(sum(part.length_mm.sum() for part in strokes))


def _rapid_mm(strokes: list[_Strokes]) -> float:
    """From the centre to the first start, from each end to the next start, and back to the centre."""
    centre_mm = np.zeros((1, 2))
    left_mm = np.concatenate([centre_mm, *(part.end_mm for part in strokes)])
    reached_mm = np.concatenate([*(part.start_mm for part in strokes), centre_mm])
    return float(np.hypot(*(reached_mm - left_mm).T).sum())


def _pierces(strokes: list[_Strokes]) -> int:
    """Starts that lie not where the cut before has ended."""
    if not strokes:
        return 0
    start_mm = np.concatenate([part.start_mm for part in strokes])
    end_mm = np.concatenate([part.end_mm for part in strokes])
    away_mm = np.hypot(*(start_mm[1:] - end_mm[:-1]).T)
    return 1 + int((away_mm > _SAME_PLACE_MM).sum())


def _strokes(entity: Entity) -> Iterator[_Strokes]:
    match entity:
        case Outlines():
            start_mm = entity.points_mm[:, 0]
            end_mm = start_mm if entity.closed else entity.points_mm[:, -1]
            yield _Strokes(start_mm=start_mm, end_mm=end_mm, length_mm=_around_mm(entity))
        case Circles():
            start_mm = entity.centres_mm + np.column_stack([entity.radius_mm, np.zeros(len(entity.radius_mm))])
            yield _Strokes(start_mm=start_mm, end_mm=start_mm, length_mm=2 * np.pi * entity.radius_mm)
        case Lettering() if entity.strokes_mm:
            last = np.cumsum([len(stroke) for stroke in entity.strokes_mm]) - 1
            first = np.concatenate([[0], last[:-1] + 1])
            points_mm = np.concatenate(entity.strokes_mm)
            along_mm = np.hypot(*np.diff(points_mm, axis=0, append=points_mm[-1:]).T)
            along_mm[last] = 0.0  # from one stroke to the next nothing is marked
            yield _Strokes(
                start_mm=points_mm[first], end_mm=points_mm[last], length_mm=np.add.reduceat(along_mm, first)
            )
        case Lettering() | Points():
            return


def _around_mm(outlines: Outlines) -> FloatArray:
    """Shape (n,). The length of each outline.

    DXF reference: bulge b = tan(θ/4). On a chord c the radius is c·(1 + b²)/(4b), so the arc is c·(1 + b²)·atan(b)/b.
    """
    following_mm = np.roll(outlines.points_mm, -1, axis=1)
    chord_mm = np.hypot(*np.moveaxis(following_mm - outlines.points_mm, -1, 0))
    bulge = np.abs(outlines.bulges)
    arc_of_chord = np.divide((1 + bulge**2) * np.arctan(bulge), bulge, out=np.ones_like(bulge), where=bulge > 0)
    pieces = chord_mm * arc_of_chord
    return np.asarray(pieces.sum(axis=1) if outlines.closed else pieces[:, :-1].sum(axis=1))
