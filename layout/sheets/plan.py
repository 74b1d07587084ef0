"""What laying discs on sheets gives: where each disc lies, in cutting order, and what is left.

Coordinates are each sheet's own, in millimetres: the origin of a rectangle is its lower left
corner, an outline keeps the frame it was given in.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from layout.documents.cutter import Layer
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.drawn import DrawnDisc


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Piece:
    """A flat piece of sheet.

    Attributes:
        outline_mm: Shape (k, 2). Its corners once round, the last not repeated.
        openings_mm: The same of each opening in it.
        area_mm2: Openings taken off.
    """

    outline_mm: FloatArray
    openings_mm: tuple[FloatArray, ...]
    area_mm2: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Label:
    """A line of single-stroke letters.

    Attributes:
        text: In printable ASCII.
        at_mm: Shape (2,). The middle of its base line.
        height_mm: Of capitals.
    """

    text: str
    at_mm: FloatArray
    height_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class DiscKind:
    """Discs of one make.

    Attributes:
        id: What they are asked for by.
        diameter_mm: Of the rim.
        wanted_count: How many are asked for.
        placed_count: How many lie on sheets.
        drawing: What is cut and marked of each; None for a plain circle.
    """

    id: str
    diameter_mm: float
    wanted_count: int
    placed_count: int
    drawing: DrawnDisc | None = None

    @property
    def missing_count(self) -> int:
        """How many could not be placed."""
        return self.wanted_count - self.placed_count


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sheet:
    """One sheet and the discs on it, in the order they are cut.

    Attributes:
        stock: The id of its kind of stock.
        copy: Which sheet of this kind, from 1.
        lot: The name of its lot; "" where none is stated.
        piece: The sheet as it was.
        clamps_mm: Shape (c, 4). Zones that stay free: least x, least y, greatest x, greatest y.
        centres_mm: Shape (n, 2). Disc centres in cutting order.
        kind: Shape (n,). Index into the plan's kinds.
        radius_mm: Shape (n,).
        number: Shape (n,). Counts the discs of one kind over all sheets, from 1.
        labels: Which disc each is, lettered beside it; None where nothing is lettered or no letters find room.
        used_ratio: Area of the discs, as a share of the piece.
        travel_mm: Between the centres in cutting order, in straight lines.
        cut_from: The end at which cutting begins: "left", "right", "bottom" or "top".
        strip_mm: Width of the strips it goes by: discs of one strip are cut before those of the next.
        way: How the discs were found: "rows", "rows and corners", "corners" or "grown".
        remnants: What is worth keeping when the discs are out, largest first.
    """

    stock: str
    copy: int
    lot: str
    piece: Piece
    clamps_mm: FloatArray
    centres_mm: FloatArray
    kind: IntArray
    radius_mm: FloatArray
    number: IntArray
    labels: tuple[Label | None, ...]
    used_ratio: float
    travel_mm: float
    cut_from: str
    strip_mm: float
    way: str
    remnants: tuple[Piece, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SheetPlan:
    """All discs of a job on its sheets.

    Attributes:
        title: Of the job.
        fingerprint: Of the job, its drawings and the engine; the same always give the same.
        gap_mm: Least distance of two rims.
        layers: What the cutter calls our layers, where it has names of its own.
        kinds: What was asked for, in the job's order.
        sheets: The sheets that discs lie on, in the order they are used.
        untouched_count: Sheets of the job that are not needed, or hold no disc.
    """

    title: str
    fingerprint: str
    gap_mm: float
    layers: Mapping[str, Layer]
    kinds: tuple[DiscKind, ...]
    sheets: tuple[Sheet, ...]
    untouched_count: int

    @property
    def complete(self) -> bool:
        """Whether every disc asked for lies on a sheet."""
        return not any(kind.missing_count for kind in self.kinds)
