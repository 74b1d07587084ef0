"""The rectangle a drawing fills, arcs included."""

import numpy as np

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.mechanics.arrays import FloatArray

_QUARTERS = np.array([(1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0)])  # where an arc may reach farthest


def extents_mm(drawing: Drawing) -> FloatArray:
    """Lower left and upper right corner of all that is drawn.

    Returns:
        Shape (2, 2). ((x, y) least, (x, y) greatest); zeros for an empty drawing.
    """
    reached = [np.zeros((0, 2)), *(_reached_mm(entity) for entity in drawing.entities)]
    points_mm = np.concatenate(reached)
    if not len(points_mm):
        return np.zeros((2, 2))
    return np.array([points_mm.min(axis=0), points_mm.max(axis=0)])


def _reached_mm(entity: Entity) -> FloatArray:
    match entity:
        case Outlines():
            return np.concatenate([entity.points_mm.reshape(-1, 2), _arcs_reach_mm(entity)])
        case Circles():
            around = entity.centres_mm[:, None, :] + entity.radius_mm[:, None, None] * _QUARTERS
            return np.asarray(around.reshape(-1, 2))
        case Points():
            return entity.points_mm
        case Lettering():
            return np.concatenate([np.zeros((0, 2)), *entity.strokes_mm])


def _arcs_reach_mm(outlines: Outlines) -> FloatArray:
    """Where arcs of the outlines reach farthest right, up, left or down between their ends.

    From the DXF reference: bulge b = tan(angle/4), so on a chord c the radius is c(1 + b²)/(4|b|)
    and the centre stands (1 − b²)/(4b) chords to the left of the chord's middle. A point of the
    circle is on the arc if it lies to the right of the chord for b > 0, to the left for b < 0.
    """
    pieces = np.flatnonzero(outlines.bulges if outlines.closed else outlines.bulges[:-1])
    bulge = outlines.bulges[pieces]
    start = outlines.points_mm[:, pieces]
    chord = outlines.points_mm[:, (pieces + 1) % len(outlines.bulges)] - start
    left = np.stack([-chord[..., 1], chord[..., 0]], axis=-1)
    centre = start + chord / 2 + left * ((1 - bulge**2) / (4 * bulge))[:, None]
    radius = np.hypot(chord[..., 0], chord[..., 1]) * (1 + bulge**2) / (4 * np.abs(bulge))
    far = centre[..., None, :] + radius[..., None, None] * _QUARTERS
    from_start = far - start[..., None, :]
    side = chord[..., None, 0] * from_start[..., 1] - chord[..., None, 1] * from_start[..., 0]
    return np.asarray(far[side * bulge[:, None] < 0])
