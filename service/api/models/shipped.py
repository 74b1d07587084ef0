"""Movements and cutters as lists tell them."""

from pydantic import Field

from layout.documents.reading import Part

KEPT_BY = 'whose it is: "own", "shop", or "shipped" with the program'


class MovementLine(Part):
    """A movement, in short."""

    id: str
    title: str
    revision: int
    turns: str
    revolution_s: float
    free_turn_s: float = Field(description="seconds of music that one turn has room for")
    track_count: int
    outer_diameter_mm: float
    thickness_mm: float
    material: str
    projection: str
    kept_by: str = Field(description=KEPT_BY)


class MovementsAnswer(Part):
    """The movements there are."""

    movements: list[MovementLine]


class CutterLine(Part):
    """A cutter, in short."""

    id: str
    title: str
    kind: str
    drawn_from: str
    kerf_mm: float
    min_web_mm: float
    is_default: bool
    revision: int
    kept_by: str = Field(description=KEPT_BY)


class CuttersAnswer(Part):
    """The cutters there are."""

    cutters: list[CutterLine]
