"""Where the marks of a disc stand: the index mark, and the room it leaves for letters."""

from dataclasses import dataclass, field

import shapely

from layout.cut.inscribing import Lettered, lettering
from layout.cut.marks import index_mark
from layout.cut.plan import Outlines
from layout.cut.room import FreeMetal, Rooms
from layout.cut.wording import Inscription
from layout.place.disc import Disc


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Marking:
    """What all drawings of a disc share of their marks.

    Attributes:
        mark: The index mark, seen from the label side; None where it has no room.
        rooms: The room beside it, as drawn.
    """

    mark: Outlines | None
    rooms: Rooms
    _lettered: dict[tuple[Inscription, ...], Lettered] = field(default_factory=dict, init=False, repr=False)

    @property
    def mirror(self) -> int:
        """−1 where drawings show the star side, else +1."""
        return self.rooms.mirror

    def lettered(self, lines: tuple[Inscription, ...]) -> Lettered:
        """Lines of letters beside the mark: their places are sought once, for layout and drawing alike."""
        if lines not in self._lettered:
            self._lettered[lines] = lettering(self.rooms, lines)
        return self._lettered[lines]


def marking_of(disc: Disc) -> Marking:
    """The index mark of a disc, and the room for letters on the side its cutter draws; found once."""
    return disc.once(_marking_of)


def _marking_of(disc: Disc) -> Marking:
    mirror = -1 if disc.cutter.drawn_from == "star-side" else 1
    metal = FreeMetal.of(disc)
    mark = index_mark(metal)
    taken = () if mark is None else (shapely.LineString(mark.points_mm[0]),)
    return Marking(mark=mark, rooms=Rooms(metal=metal, taken=taken, mirror=mirror))
