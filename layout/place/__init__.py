"""Place: from plucks at moments to working edges at angles."""

from layout.arrange.arrangement import Arrangement
from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc

__all__ = ["Disc", "place"]


def place(arrangement: Arrangement, movement: Movement, cutter: Cutter) -> Disc:
    """The disc that plays the arrangement's plucks at their planned moments.

    Projection i of the disc is pluck i of the arrangement. No plucks give a disc without projections.
    """
    turning = turning_of(movement)
    return Disc(
        movement=movement,
        cutter=cutter,
        turning=turning,
        pattern=pattern_of(movement, cutter),
        track_index=frozen_ints(arrangement.track_index),
        edge_angle_rad=frozen_floats(turning.edge_angle_rad(arrangement.planned_s, arrangement.track_index)),
    )
