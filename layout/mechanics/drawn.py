"""A disc's drawing entity by entity, as it stands in its file: what is read to be moved and written again."""

import math
from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import FloatArray

FULL_TURN_RAD = 2 * math.pi
_PLACES_OF_AN_ARC = 9  # no two farther apart than an eighth of the arc, as the quarters of a circle are of it and less
STRAIGHT_RATIO = 1e-9  # bulge; an arc on a chord of 2 m is then a nanometre high, and its radius could overflow


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DrawnLine:
    """A polyline.

    Attributes:
        layer: Our layer name.
        points_mm: Shape (k, 2), one vertex at least.
        bulge_ratio: Shape (k,). DXF bulge of the piece that starts at each vertex.
        closed: Whether the last vertex joins the first.
        words: What the lettering says that begins with it; "" for all else.
    """

    layer: str
    points_mm: FloatArray
    bulge_ratio: FloatArray
    closed: bool
    words: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DrawnCircle:
    """A circle. centre_mm: shape (2,)."""

    layer: str
    centre_mm: FloatArray
    radius_mm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DrawnArc:
    """An arc of a circle, anticlockwise. centre_mm: shape (2,); from_deg and to_deg as the file has them."""

    layer: str
    centre_mm: FloatArray
    radius_mm: float
    from_deg: float
    to_deg: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DrawnPoint:
    """A point. at_mm: shape (2,)."""

    layer: str
    at_mm: FloatArray


DrawnEntity = DrawnLine | DrawnCircle | DrawnArc | DrawnPoint


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DrawnDisc:
    """All that is cut or marked of one disc, its centre at the origin.

    Attributes:
        title: Of the tune, as the head of the file spells it; "" where it does not.
        fingerprint: Of the layout, as the head says; "" where it does not.
        blank: The head's line on the sheet it is cut from; "" where there is none.
        side: The head's line on the side it is drawn from; "" where there is none.
        kerf: The head's line on the kerf; "" where there is none.
        hits: The head's line on what strikes at its points, with the tool; "" where there is none.
        digest: SHA-256 of the file, in hex.
        release: Of the DXF format, "R12" or "R2010": what the shop's control reads.
        kerf_taken_mm: The kerf that the head says the outlines are compensated for; 0 where it says none.
        rim_diameter_mm: As drawn.
        lead_reach_mm: How far leads reach out of the rim; 0 without.
        entities: In the order of the file, which is the cutting order.
    """

    title: str
    fingerprint: str
    blank: str
    side: str
    kerf: str
    hits: str
    digest: str
    release: str
    kerf_taken_mm: float
    rim_diameter_mm: float
    lead_reach_mm: float
    entities: tuple[DrawnEntity, ...]

    @property
    def nominal_diameter_mm(self) -> float:
        """Of the disc once it is cut: a compensated rim is drawn half a kerf outside of it."""
        return self.rim_diameter_mm - self.kerf_taken_mm

    @property
    def vertex_count(self) -> int:
        """Vertices of all lines; a circle, an arc or a point counts as one."""
        return sum(len(each.points_mm) if isinstance(each, DrawnLine) else 1 for each in self.entities)


def reach_mm(entity: DrawnEntity) -> float:
    """The greatest distance from the origin of anything on an entity, arcs included.

    DXF reference: for a bulge b on a chord c the radius is c·(1 + b²)/(4|b|), and the centre stands
    (1 − b²)/(4b) chords to the left of the chord's middle. The farthest point of a circle lies beyond its centre;
    it is on the arc if it lies to the right of the chord for b > 0, to the left for b < 0.
    """
    match entity:
        case DrawnCircle():
            return float(np.hypot(*entity.centre_mm)) + entity.radius_mm
        case DrawnArc():
            away_mm = float(np.hypot(*entity.centre_mm))
            outwards_rad = math.atan2(entity.centre_mm[1], entity.centre_mm[0])
            past_rad = (outwards_rad - math.radians(entity.from_deg)) % FULL_TURN_RAD
            if past_rad <= _turned_rad(entity):
                return away_mm + entity.radius_mm
            return float(np.hypot(*_on_arc_mm(entity, [0.0, 1.0]).T).max())
        case DrawnPoint():
            return float(np.hypot(*entity.at_mm))
    at = entity.points_mm[:, 0] + 1j * entity.points_mm[:, 1]
    start, chord, bulge = _arcs(entity, at)
    centre = start + chord * (0.5 + 1j * (1 - bulge**2) / (4 * bulge))
    radius_mm = np.abs(chord) * (1 + bulge**2) / (4 * np.abs(bulge))
    outwards = np.divide(centre, np.abs(centre), out=np.ones_like(centre), where=np.abs(centre) > 0)
    from_start = centre + radius_mm * outwards - start
    on_arc = (np.conj(chord) * from_start).imag * bulge < 0
    return float(max(np.abs(at).max(), (np.abs(centre) + radius_mm)[on_arc].max(initial=0.0)))


def places_mm(entity: DrawnEntity) -> FloatArray:
    """Points of an entity that show where it lies: vertices, ends and middles of arcs, the quarters of circles.

    Returns:
        Shape (n, 2), one at least.
    """
    match entity:
        case DrawnCircle():
            quarters = np.array([(1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0)])
            return np.asarray(entity.centre_mm + entity.radius_mm * quarters)
        case DrawnArc():
            return _on_arc_mm(entity, np.linspace(0.0, 1.0, _PLACES_OF_AN_ARC).tolist())
        case DrawnPoint():
            return np.asarray(entity.at_mm[None])
    start, chord, bulge = _arcs(entity, entity.points_mm[:, 0] + 1j * entity.points_mm[:, 1])
    middle = start + chord * (0.5 - 0.5j * bulge)  # an arc is b/2 chords high, to the right of its chord for b > 0
    return np.concatenate([entity.points_mm, np.column_stack([middle.real, middle.imag])])


def _turned_rad(arc: DrawnArc) -> float:
    """How far an arc goes round; a full turn where both angles are one."""
    return math.radians(arc.to_deg - arc.from_deg) % FULL_TURN_RAD or FULL_TURN_RAD


def _on_arc_mm(arc: DrawnArc, shares: list[float]) -> FloatArray:
    angle_rad = math.radians(arc.from_deg) + _turned_rad(arc) * np.array(shares)
    return np.asarray(arc.centre_mm + arc.radius_mm * np.column_stack([np.cos(angle_rad), np.sin(angle_rad)]))


_Complex = np.ndarray[tuple[int], np.dtype[np.complex128]]


def _arcs(line: DrawnLine, at: _Complex) -> tuple[_Complex, _Complex, FloatArray]:
    """Start, chord and bulge of the arcs of a line."""
    bent = np.abs(line.bulge_ratio) > STRAIGHT_RATIO
    pieces = np.flatnonzero(bent if line.closed else bent[:-1])
    return at[pieces], at[(pieces + 1) % len(at)] - at[pieces], line.bulge_ratio[pieces]
