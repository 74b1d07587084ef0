"""What is cut, as the beam's middle runs, where a cutter wants its files compensated for the kerf."""

from dataclasses import replace

import numpy as np

from layout.cut.plan import Circles, Entity, Outlines
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.offset import moved_outlines


def along_the_beam(entity: Entity, cutter: Cutter) -> Entity:
    """Closed outlines and circles moved by half a kerf into the scrap: the rim outwards, all else inwards.

    Unchanged where the cutter compensates by itself, for open lines, which are the beam's own already, and
    for what is no wider than the kerf.
    """
    if not cutter.kerf_compensated:
        return entity
    outwards_mm = cutter.kerf_mm / 2 * (1 if entity.layer == "RIM" else -1)
    match entity:
        case Circles() if float(entity.radius_mm.min()) + outwards_mm > 0:
            return replace(entity, radius_mm=frozen_floats(np.add(entity.radius_mm, outwards_mm)))
        case Outlines(closed=True):
            moved = moved_outlines(entity.points_mm, entity.bulges, outwards_mm)
            return entity if moved is None else replace(entity, points_mm=moved[0], bulges=moved[1])
    return entity
