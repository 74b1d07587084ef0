"""What of the marks on a disc finds no room."""

from layout.cut.inscribing import without_room
from layout.cut.marking import marking_of
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
    marking, rim_mm = marking_of(disc), disc.movement.disc.outer_diameter_mm / 2
    left_out = without_room(marking.rooms, inscriptions(disc, words), rim_mm=rim_mm)
    return (*([INDEX_MARK] if marking.mark is None else []), *(line.name for line in left_out))
