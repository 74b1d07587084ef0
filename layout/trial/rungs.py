"""What is cut for one step of a ladder, in a flat frame of its own.

The frame is that of a projection, u along the travel and v outwards, with u = 0 in the middle of
what is cut, so that steps of one ladder stand on one radius at even distances.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.cut.plan import LayerName
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.projection import Pattern, Shape
from layout.trial.lettering import LETTER_HEIGHT_MM, half_width_mm
from layout.trial.piece import Ladder

LETTERS_APART_MM = 1.5  # mm from one mark to the next; nearer ones read as one word
WEB_GAP_FACTOR = 2.0  # times the widest web of a ladder: so far apart are its pairs, to be seen as pairs
LABEL_CLEAR_MM = 0.8  # mm; common practice: an engraved line is 0.1 to 0.2 mm wide and lies within 0.1 mm of its place


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rung:
    """One step as it is cut: one opening, or two with a web between them; or only a line of letters.

    Attributes:
        text: Engraved outside of it.
        layer: Of what is cut.
        shape: What a laser cuts; None where a press strikes, and for letters alone.
        strike_u_mm: Where a press strikes; None on a laser.
        core_mm: Shape (k, 2). The opening is this polygon or line grown by round_mm; (0, 2) for letters alone.
        round_mm: Radius of the growing.
        web_mm: Metal between two such openings one behind the other; None for one opening.
    """

    text: str
    layer: LayerName = "SLOTS"
    shape: Shape | None = None
    strike_u_mm: float | None = None
    core_mm: FloatArray
    round_mm: float = 0.0
    web_mm: float | None = None

    @property
    def from_mm(self) -> float:
        """The least v of what is cut."""
        return float(self.core_mm[:, 1].min()) - self.round_mm if len(self.core_mm) else 0.0

    @property
    def cut_to_mm(self) -> float:
        """The greatest v of what is cut."""
        return float(self.core_mm[:, 1].max()) + self.round_mm if len(self.core_mm) else 0.0

    @property
    def half_mm(self) -> float:
        """Half of what one opening measures along u."""
        return float(np.abs(self.core_mm[:, 0]).max()) + self.round_mm if len(self.core_mm) else 0.0

    def apart_rad(self, radius_mm: float) -> float:
        """Half of the angle between the two openings of a web on this radius; 0 for one opening."""
        if self.web_mm is None:
            return 0.0
        core_half_mm, core_from_mm = float(np.abs(self.core_mm[:, 0]).max()), float(self.core_mm[:, 1].min())
        return clear_rad(radius_mm + core_from_mm, core_half_mm, self.web_mm / 2 + self.round_mm)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Row:
    """A ladder and its rungs; lines of letters have no ladder."""

    ladder: Ladder | None
    rungs: tuple[Rung, ...]

    @property
    def from_mm(self) -> float:
        """The least v of the row."""
        return min(rung.from_mm for rung in self.rungs)

    @property
    def label_mm(self) -> float:
        """The v of the letters' base line, one for all rungs."""
        return max(rung.cut_to_mm for rung in self.rungs) + (LABEL_CLEAR_MM if self.ladder else 0.0)

    @property
    def to_mm(self) -> float:
        """The greatest v of the row, letters included."""
        return self.label_mm + LETTER_HEIGHT_MM

    @property
    def reach_mm(self) -> float:
        """Half of the widest single thing in the row along u."""
        return max(max(rung.half_mm, half_width_mm(rung.text)) for rung in self.rungs)

    def half_rad(self, radius_mm: float, gap_mm: float) -> float:
        """Half of the angle that each rung of the row takes up on a radius, half a gap on each side included."""
        inner_mm = radius_mm + self.from_mm
        gap_mm = max([gap_mm, *(WEB_GAP_FACTOR * rung.web_mm for rung in self.rungs if rung.web_mm is not None)])
        letters_gap_mm = max(gap_mm, LETTERS_APART_MM)
        return max(
            max(
                rung.apart_rad(radius_mm) + clear_rad(inner_mm, rung.half_mm, gap_mm / 2),
                clear_rad(radius_mm + self.label_mm, half_width_mm(rung.text), letters_gap_mm / 2),
            )
            for rung in self.rungs
        )


def clear_rad(radius_mm: float, half_mm: float, clear_mm: float) -> float:
    """The angle at which a ray through the centre clears a straight piece of metal by a distance.

    The piece stands square to its radius and reaches half_mm to each side of it; its near corner
    lies at (radius_mm, half_mm), x beside a ray at angle x: r·sin x − h·cos x = d, so
    x = asin(d/√(r² + h²)) + atan(h/r). Elementary geometry. A quarter turn where no angle does.
    """
    reach_mm = math.hypot(radius_mm, half_mm)
    if radius_mm <= 0 or clear_mm >= reach_mm:
        return math.pi / 2
    return math.asin(clear_mm / reach_mm) + math.atan2(half_mm, radius_mm)


def rung_of(pattern: Pattern, text: str) -> Rung:
    """A projection's pattern as a rung: cut as on a disc, or struck where a press makes it."""
    middle = np.array([(pattern.core_points_mm[:, 0].min() + pattern.core_points_mm[:, 0].max()) / 2, 0.0])
    cut = pattern.cut
    moved = None
    if cut is not None:
        moved = Shape(points_mm=frozen_floats(cut.points_mm - middle), bulges=cut.bulges, closed=cut.closed)
    return Rung(
        text=text,
        layer="HITS" if cut is None else "SLITS" if pattern.making == "fold" else "SLOTS",
        shape=moved,
        strike_u_mm=pattern.strike_u_mm - float(middle[0]) if cut is None else None,
        core_mm=frozen_floats(pattern.core_points_mm - middle),
        round_mm=pattern.core_round_mm,
    )


def opening_of(length_mm: float, width_mm: float, text: str) -> Rung:
    """A plain rectangular opening that a laser cuts out, length along the travel."""
    half_u, half_v = length_mm / 2, width_mm / 2
    corners = frozen_floats(np.array([(half_u, half_v), (-half_u, half_v), (-half_u, -half_v), (half_u, -half_v)]))
    return Rung(
        text=text,
        shape=Shape(points_mm=corners, bulges=frozen_floats([0.0] * 4), closed=True),
        core_mm=corners,
    )


def letters_of(text: str) -> Rung:
    """A line of letters alone."""
    return Rung(text=text, layer="MARKS", core_mm=frozen_floats(np.zeros((0, 2))))
