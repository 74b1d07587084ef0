"""From the label side to the side drawn: mirroring in Y, and what it does to arcs."""

from dataclasses import replace

from layout.cut.plan import Circles, Entity, Lettering, Outlines, Points
from layout.mechanics.arrays import FloatArray, frozen_floats


def mirrored_points_mm(points_mm: FloatArray) -> FloatArray:
    """(x, −y) of points of any shape (…, 2)."""
    flipped = points_mm.copy()
    flipped[..., 1] = 0.0 - flipped[..., 1]  # not −y, which would write a zero as -0.0
    return frozen_floats(flipped)


def mirrored(entity: Entity) -> Entity:
    """The entity seen from the other side. Arcs turn the other way, so bulges change their sign."""
    match entity:
        case Outlines():
            return replace(
                entity, points_mm=mirrored_points_mm(entity.points_mm), bulges=frozen_floats(0.0 - entity.bulges)
            )
        case Circles():
            return replace(entity, centres_mm=mirrored_points_mm(entity.centres_mm))
        case Points():
            return replace(entity, points_mm=mirrored_points_mm(entity.points_mm))
        case Lettering():
            return replace(entity, strokes_mm=tuple(mirrored_points_mm(stroke) for stroke in entity.strokes_mm))
