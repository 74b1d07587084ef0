"""What is heard: the plucks of a disc, and beside them the notes it was asked to play."""

from dataclasses import dataclass
from typing import Literal

from layout.mechanics.arrays import FloatArray, IntArray
from layout.play.plucks import Plucks

Of = Literal["disc", "written"]
Turn = Literal["steady", "first", "middle", "last"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """How a disc shall be heard.

    Attributes:
        of: "disc": what the disc plays. "written": every note asked for, at its own moment, on the same comb.
        turn: "steady": at the stated turn, after the start. The others: a turn of a winding, with its sag.
    """

    of: Of = "disc"
    turn: Turn = "steady"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Performance:
    """A disc's plucks, and the tune as it was asked for. Times count from the start of the music on the disc.

    Attributes:
        title: Of the tune.
        plucks: What the disc plays.
        written_key: Shape (n,). MIDI keys of the notes asked for, after transposition.
        written_s: Shape (n,). Their moments, at the speed of the disc.
    """

    title: str
    plucks: Plucks
    written_key: IntArray
    written_s: FloatArray
