"""What of the marks on a disc finds no room."""

import shapely

from layout.cut.inscribing import without_room
from layout.cut.marks import index_mark
from layout.cut.room import Rooms
from layout.cut.wording import Words, inscriptions
from layout.place.disc import Disc

INDEX_MARK = "index mark"


def marks_without_room(disc: Disc, words: Words) -> tuple[str, ...]:
    """What is to be marked on a disc and fits nowhere, by its names: the index mark first, then the labels.

    Args:
        disc: The disc.
        words: What its drawing must say.

    Returns:
        Names such as "index mark", "title", "order number"; none where all stand on the disc.
    """
    rooms, rim_mm = Rooms(disc=disc), disc.movement.disc.outer_diameter_mm / 2
    mark = index_mark(rooms, rim_mm=rim_mm, direction=disc.turning.direction)
    taken = () if mark is None else (shapely.LineString(mark.points_mm[0]),)
    mirror = -1 if disc.cutter.drawn_from == "star-side" else 1
    left_out = without_room(Rooms(disc=disc, taken=taken, mirror=mirror), inscriptions(disc, words), rim_mm=rim_mm)
    return (*([INDEX_MARK] if mark is None else []), *(line.name for line in left_out))
