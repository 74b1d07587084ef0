"""Where the marks of a disc stand: the index mark, and the room it leaves for letters."""

from dataclasses import dataclass

import shapely

from layout.cut.marks import index_mark
from layout.cut.plan import Outlines
from layout.cut.room import FreeMetal, Rooms
from layout.place.disc import Disc


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Marking:
    """What all drawings of a disc share of their marks.

    Attributes:
        mark: The index mark, seen from the label side; None where it has no room.
        rooms: The room beside it, as drawn.
        mirror: −1 where drawings show the star side, else +1.
    """

    mark: Outlines | None
    rooms: Rooms
    mirror: int


def marking_of(disc: Disc) -> Marking:
    """The index mark of a disc, and the room for letters on the side its cutter draws."""
    mirror = -1 if disc.cutter.drawn_from == "star-side" else 1
    metal = FreeMetal(disc=disc)
    mark = index_mark(metal, rim_mm=disc.movement.disc.outer_diameter_mm / 2, direction=disc.turning.direction)
    taken = () if mark is None else (shapely.LineString(mark.points_mm[0]),)
    return Marking(mark=mark, rooms=Rooms(metal=metal, taken=taken, mirror=mirror), mirror=mirror)
