"""Projections as they are cut, and how they look after forming."""

import numpy as np

from layout.cut.plan import Circles, Entity, LayerName, Outlines, Points
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.projection import Shape
from layout.place.disc import Disc


def struck_at_mm(disc: Disc, order: IntArray) -> FloatArray:
    """Shape (n, 2). Where the tool strikes; on a laser, the middle of the working edge."""
    point_mm = np.array([[disc.pattern.strike_u_mm, 0.0]])
    return frozen_floats(_placed_mm(disc, order, point_mm)[:, 0, :])


def cut_projections(disc: Disc, order: IntArray) -> tuple[Entity, ...]:
    """What is cut of the projections: slits or slots of a laser, hits of a press.

    Nothing for a disc without projections, nor where a laser cannot make them.
    """
    pattern = disc.pattern
    if not len(order):
        return ()
    if disc.cutter.kind == "punch-press":
        return (Points(layer="HITS", points_mm=struck_at_mm(disc, order)),)
    if pattern.cut is None:
        return ()
    return (_outlines("SLITS" if pattern.making == "fold" else "SLOTS", pattern.cut, disc, order),)


def formed_projections(disc: Disc, order: IntArray) -> tuple[Entity, ...]:
    """For reading only: tracks, fold lines, and the holes that remain after forming."""
    radius_mm = disc.turning.radius_mm
    tracks = Circles(layer="TRACKS", centres_mm=frozen_floats(np.zeros((len(radius_mm), 2))), radius_mm=radius_mm)
    if not len(order):
        return (tracks,)
    openings = _outlines("AFTER_FORMING", disc.pattern.opening, disc, order)
    if disc.pattern.fold_line_mm is None:
        return tracks, openings
    fold = Shape(points_mm=disc.pattern.fold_line_mm, bulges=frozen_floats([0.0, 0.0]), closed=False)
    return tracks, _outlines("FOLDS", fold, disc, order), openings


def _outlines(layer: LayerName, shape: Shape, disc: Disc, order: IntArray) -> Outlines:
    # The flat frame is right-handed on a clockwise disc and left-handed on the other, where arcs turn over.
    return Outlines(
        layer=layer,
        points_mm=frozen_floats(_placed_mm(disc, order, shape.points_mm)),
        bulges=frozen_floats(shape.bulges if disc.turning.direction > 0 else 0.0 - shape.bulges),
        closed=shape.closed,
    )


def _placed_mm(disc: Disc, order: IntArray, points_mm: FloatArray) -> FloatArray:
    return disc.placed_mm(points_mm)[order]
