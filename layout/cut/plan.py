"""What planning the cut gives: two drawings, as drawn, in cutting order.

Coordinates are the drawing's own: origin at the disc centre, millimetres, mirrored in Y where the
cutter draws from the star side.
"""

from dataclasses import dataclass
from typing import Literal

from layout.mechanics.arrays import FloatArray, IntArray

LayerName = Literal["SLITS", "SLOTS", "HITS", "HOLES", "RIM", "LEADS", "MARKS", "AFTER_FORMING", "FOLDS", "TRACKS"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outlines:
    """Polylines of one make, in cutting order.

    Attributes:
        layer: Our layer name.
        points_mm: Shape (n, k, 2). Vertices as drawn; the cut is pierced and starts at the first.
        bulges: Shape (k,). DXF bulge of the piece that starts at each vertex, as drawn.
        closed: Whether the last vertex joins the first.
    """

    layer: LayerName
    points_mm: FloatArray
    bulges: FloatArray
    closed: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Circles:
    """Circles. centres_mm: shape (n, 2); radius_mm: shape (n,)."""

    layer: LayerName
    centres_mm: FloatArray
    radius_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Points:
    """Points, in cutting order. points_mm: shape (n, 2)."""

    layer: LayerName
    points_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Lettering:
    """A line of single-stroke letters on MARKS: what it says, and its open strokes, each (k, 2)."""

    layer: LayerName
    text: str
    strokes_mm: tuple[FloatArray, ...]


Entity = Outlines | Circles | Points | Lettering


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drawing:
    """One drawing: entities in cutting order, the rim last of what is cut.

    Attributes:
        entities: What is drawn.
        comments: Lines for the file's head (DXF group 999, SVG description): what the drawing is,
            the side it is drawn from, and any warning.
    """

    entities: tuple[Entity, ...]
    comments: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CutPath:
    """What the machine travels to cut and mark one disc.

    Attributes:
        cut_length_mm: Along everything a laser cuts, leads included; 0 for what a press strikes.
        mark_length_mm: Along everything on MARKS.
        rapid_length_mm: Between the end of one cut or mark and the start of the next, in straight lines; from and
            back to the disc centre.
        pierce_count: Cuts begun; 0 on a press.
        hit_count: Strikes of a press; 0 on a laser.
        turned_rad: What a press's table turns from hit to hit.
        slid_mm: What its slide moves from hit to hit.
        tool_change_count: Tools taken up after the first.
    """

    cut_length_mm: float
    mark_length_mm: float
    rapid_length_mm: float
    pierce_count: int
    hit_count: int
    turned_rad: float
    slid_mm: float
    tool_change_count: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ToolHits:
    """Hits of one press tool on the blank's own holes, in the order struck. at_mm: shape (n, 2), as drawn."""

    tool: str
    at_mm: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CutPlan:
    """The disc as it is cut, and the record of it.

    Attributes:
        title: The tune's title.
        fingerprint: Of all inputs; the same inputs always give the same.
        drawn_from: The side the drawings show.
        not_good: The reason for which the cutting files are given although an error-level finding
            stands; None for a disc that is good to cut, or whose cutting files are kept back.
        disc: Only what is cut or marked.
        record: For reading, never for cutting: the same, and how it looks after forming.
        order: Shape (n,). Projection indices in cutting order.
        at_mm: Shape (n, 2). In that order, as drawn: the strike point (press) or the middle of the
            working edge (laser).
        tool: The press tool of every projection's hit; "" on a laser, and where no tool makes them.
        part: Which disc of a set it is, such as "disc 2 of 3"; "" for one alone.
        path: What the machine travels; None where it is not worked out.
        order_number: The shop's, as it is lettered; None for none.
        hole_hits: What a press strikes of the blank's own holes, tool by tool, before all projections; none
            on a laser. The drawing has them as outlines on HOLES, never as points on HITS.
        not_struck: What of the blank a press does not strike, each with the reason; none on a laser.
    """

    title: str
    fingerprint: str
    drawn_from: Literal["label-side", "star-side"]
    not_good: str | None
    disc: Drawing
    record: Drawing
    order: IntArray
    at_mm: FloatArray
    tool: str
    part: str = ""
    path: CutPath | None = None
    order_number: str | None = None
    hole_hits: tuple[ToolHits, ...] = ()
    not_struck: tuple[str, ...] = ()
