"""The kerf: outlines as the beam's middle runs, for a cutter whose files are compensated already."""

from dataclasses import replace

import numpy as np

from layout.cut.plan import Circles, Entity, Outlines
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.offset import moved_outlines


def as_the_beam_runs(entity: Entity, cutter: Cutter) -> Entity:
    """What is cut, moved by half a kerf into the scrap: the rim outwards, all else inwards.

    Only where the cutter wants it (`kerf_compensated`), and only closed outlines and circles: an open
    slit is the beam's own line already. What would vanish stays as it is finished; a check finds it,
    and keeps the cutting files back.
    """
    if not cutter.kerf_compensated:
        return entity
    outwards_mm = cutter.kerf_mm / 2 if entity.layer == "RIM" else -cutter.kerf_mm / 2
    match entity:
        case Circles():
            radius_mm = entity.radius_mm + outwards_mm
            return replace(entity, radius_mm=frozen_floats(np.where(radius_mm > 0, radius_mm, entity.radius_mm)))
        case Outlines(closed=True):
            moved = moved_outlines(entity.points_mm, entity.bulges, outwards_mm)
            return entity if moved is None else replace(entity, points_mm=moved[0], bulges=moved[1])
    return entity
