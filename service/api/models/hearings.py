"""How a hearing is asked for."""

from typing import Annotated, Literal

from pydantic import Field

from layout.documents.reading import Part

Of = Annotated[
    Literal["disc", "written"],
    Field(description="disc: what the disc plays. written: every note as it is asked for, on the same comb"),
]
Turn = Annotated[
    Literal["steady", "first", "middle", "last"],
    Field(description="at the stated turn; or which turn of a winding, with its sag, where the movement states one"),
]


class PlucksQuery(Part):
    """How the plucks of a disc are asked for."""

    of: Of = "disc"
    turn: Turn = "steady"


class SoundQuery(PlucksQuery):
    """How the sound of a disc is asked for."""

    bits: Literal["16", "24"] = Field(default="16", description="bits of a sample")
