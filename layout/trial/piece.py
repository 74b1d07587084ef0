"""What a trial piece is: a drawing to cut, and what to measure on it."""

from dataclasses import dataclass
from typing import Literal

from layout.cut.plan import Drawing
from layout.mechanics.arrays import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One step of a ladder.

    Attributes:
        mark: As it is engraved beside the step: the ladder's letter and the step's number.
        nominal_mm: What it must measure if nothing needs correcting.
        document: "movement" or "cutter": where a value may need correcting.
        field: That value's place in the document, as a JSON pointer (RFC 6901).
    """

    mark: str
    nominal_mm: float
    document: Literal["movement", "cutter"]
    field: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Ladder:
    """Steps that try one thing: most in a row of their own, some on the tracks' projections.

    Attributes:
        name: "kerf", "tab-width", "depth", "slot-width", "slot-length", "web" or "tracks".
        steps: The steps, in the order of their numbers.
        measure: What to measure on each step.
        how: How the corrected value comes from what was measured.
        tool: The press tool that strikes it; "" where none does.
    """

    name: str
    steps: tuple[Step, ...]
    measure: str
    how: str
    tool: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class NotTried:
    """Something of the disc that the piece does not have, and why."""

    what: str
    why: str


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Hits:
    """Where one tool strikes, as drawn and in the order of the drawing. at_mm: shape (n, 2)."""

    tool: str
    at_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TrialPiece:
    """A sector of a movement's disc that tries what can go wrong before a blank is spent.

    Attributes:
        movement_id: The movement it is for, which it can be put on.
        movement_revision: Of that movement.
        cutter_id: The cutter that makes it.
        material: Of the sheet.
        thickness_mm: Of the sheet.
        drawn_from: The side the drawing shows.
        edges: What the drawing's outlines are: finished edges, or the beam's own lines.
        drawing: What is cut and marked, in cutting order, the outline last.
        web_mm: Metal left at least between everything cut, but for the web ladder's own steps.
        ladders: What to measure, in the order of the sheet.
        hits: Where a press strikes, in order; None on a laser.
        not_tried: What the piece does not have.
        cautions: What to mind when it is cut, bent and tried.
    """

    movement_id: str
    movement_revision: int
    cutter_id: str
    material: str
    thickness_mm: float
    drawn_from: Literal["label-side", "star-side"]
    edges: str
    drawing: Drawing
    web_mm: float
    ladders: tuple[Ladder, ...]
    hits: Hits | None
    not_tried: tuple[NotTried, ...]
    cautions: tuple[str, ...]
