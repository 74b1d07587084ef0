"""What of the marks on a disc finds no room."""

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
    marking = marking_of(disc)
    left_out = marking.lettered(inscriptions(disc, words)).left_out
    return (*([INDEX_MARK] if marking.mark is None else []), *(line.name for line in left_out))
