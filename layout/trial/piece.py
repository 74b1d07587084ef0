"""What a trial piece is: a drawing to cut, and what to measure on it."""

from dataclasses import dataclass, replace
from typing import Literal

from layout.cut.plan import Drawing, Points
from layout.documents.feature import Feature
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
        disc_diameter_mm: Of the disc it is a sector of.
        drawn_from: The side the drawing shows.
        edges: What the drawing's outlines are: finished edges, or the beam's own lines.
        drawing: What is cut and marked, the outline last.
        hub: Rows of holes and slots of the disc that the piece has too.
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
    disc_diameter_mm: float
    drawn_from: Literal["label-side", "star-side"]
    edges: str
    drawing: Drawing
    hub: tuple[Feature, ...]
    web_mm: float
    ladders: tuple[Ladder, ...]
    hits: Hits | None
    not_tried: tuple[NotTried, ...]
    cautions: tuple[str, ...]

    def as_cut(self, drawing: Drawing, *, held: bool) -> "TrialPiece":
        """The piece with its drawing as it is cut, and its hits in that order.

        Args:
            drawing: As it is cut.
            held: Whether it has the bridges that its cutter asks for.
        """
        struck_mm = [entity.points_mm for entity in drawing.entities if isinstance(entity, Points)]
        why = "its arcs have no room for them; hold the piece down, or it may tip when it is cut free"
        return replace(
            self,
            drawing=drawing,
            hits=self.hits if self.hits is None or not struck_mm else replace(self.hits, at_mm=struck_mm[0]),
            not_tried=self.not_tried if held else (*self.not_tried, NotTried(what="bridges", why=why)),
        )
