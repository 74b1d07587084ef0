"""The flat frame of a contour: where its working edge is, recovered from its own shape.

Nothing is known of where the contour was meant to be. The pattern is laid on it as a rigid body,
by least squares over all ways to number the vertices (J. C. Gower and G. B. Dijksterhuis,
Procrustes Problems, 2004; in the plane one complex number turns). The pattern's origin, the middle
of the working edge, then says radius and angle.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.read_back.contour import Contour

_SAME_FIT_MM = 1e-3  # mm; a slot fits both ways round, and the better fit by less than this decides nothing
_ROUND = 2  # vertices of a circle drawn as a polyline

Complexes = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Frames:
    """Frames of contours, each shape (n,).

    Attributes:
        radius_mm: Distance of the working edge's middle from the disc's centre.
        angle_rad: Its angle, in (−π, π].
        residual_mm: How far the contour lies from the pattern, at its worst vertex or arc.
        skew_rad: Angle from the direction of travel to the frame's u axis, in (−π, π].
    """

    radius_mm: FloatArray
    angle_rad: FloatArray
    residual_mm: FloatArray
    skew_rad: FloatArray


def frames_of(contours: list[Contour], pattern: Contour, direction: int) -> Frames:
    """The frames of contours with as many vertices as the pattern, open or closed like it.

    Args:
        contours: One or more.
        pattern: The pattern's cut, its points u and v.
        direction: s, +1 for a disc that turns clockwise seen from the label side, else −1.
    """
    corners = _complex(np.stack([contour.points_mm for contour in contours]))
    bulges = np.stack([contour.bulge_ratio for contour in contours])
    # u runs along the travel and v outwards: left-handed on a disc that turns anticlockwise.
    u, v = pattern.points_mm.T
    flat, flat_bulges = u + 1j * direction * v, direction * pattern.bulge_ratio
    if pattern.closed and len(flat) == _ROUND:
        return _round_frames(corners, bulges, flat, direction)
    fits = [
        _fitted(corners[:, order], order_bulges, (flat, flat_bulges), closed=pattern.closed)
        for order, order_bulges in _numberings(bulges, closed=pattern.closed)
    ]
    residual, origin, axis = (np.stack(part) for part in zip(*fits, strict=True))
    skew = np.angle(axis / _travel(origin, direction))
    also_best = residual <= residual.min(axis=0) + _SAME_FIT_MM
    best = np.where(also_best, np.abs(skew), np.inf).argmin(axis=0), np.arange(len(contours))
    return _frames(origin[best], residual[best], skew[best])


def _frames(origin: Complexes, residual: FloatArray, skew: FloatArray) -> Frames:
    return Frames(
        radius_mm=frozen_floats(np.abs(origin)),
        angle_rad=frozen_floats(np.angle(origin)),
        residual_mm=frozen_floats(residual),
        skew_rad=frozen_floats(skew),
    )


def _complex(points_mm: FloatArray) -> Complexes:
    return np.asarray(points_mm[..., 0] + 1j * points_mm[..., 1])


def _travel(origin: Complexes, direction: int) -> Complexes:
    """Unit vectors of the direction of travel at places on the disc."""
    return -1j * direction * _unit(origin)


def _unit(vectors: Complexes) -> Complexes:
    length = np.abs(vectors)
    return np.divide(vectors, length, out=np.ones_like(vectors), where=length > 0)


def _numberings(bulges: FloatArray, *, closed: bool) -> list[tuple[NDArray[np.intp], FloatArray]]:
    """Every way to number the vertices, with the bulges of the pieces in that numbering."""
    count = bulges.shape[1]
    forward = np.arange(count)
    starts = range(count) if closed else range(1)
    numberings = []
    for start in starts:
        there = np.roll(forward, -start)
        back = there[::-1]
        numberings.append((there, bulges[:, there]))
        # Backwards, the piece from one vertex to the next is the one that starts at the next, the other way.
        numberings.append((back, -bulges[:, np.roll(back, -1)]))
    return numberings


def _fitted(
    corners: Complexes, bulges: FloatArray, pattern: tuple[Complexes, FloatArray], *, closed: bool
) -> tuple[FloatArray, Complexes, Complexes]:
    """Residual, origin and u axis of the pattern laid on contours, vertex on vertex."""
    flat, flat_bulges = pattern
    middle, flat_middle = corners.mean(axis=1, keepdims=True), flat.mean()
    axis = _unit(((corners - middle) * np.conj(flat - flat_middle)).sum(axis=1))
    off = np.abs(corners - middle - axis[:, None] * (flat - flat_middle)).max(axis=1)
    chords = np.abs(np.roll(flat, -1) - flat)
    # The height of an arc over its chord is |bulge|·chord/2.
    arcs_off = np.abs(bulges - flat_bulges) * chords / 2
    pieces = len(flat) if closed else len(flat) - 1
    residual = np.maximum(off, arcs_off[:, :pieces].max(axis=1))
    return residual, middle[:, 0] - axis * flat_middle, axis


def _round_frames(corners: Complexes, bulges: FloatArray, flat: Complexes, direction: int) -> Frames:
    """Frames of circles: which way they face cannot be seen, so they are taken to lie square to the radius."""
    centre, flat_centre = corners.mean(axis=1), float(flat.mean().real)
    radius = np.abs(corners[:, 1] - corners[:, 0]) / 2
    not_round = np.abs(np.abs(bulges) - 1).max(axis=1) * radius
    residual = np.maximum(np.abs(radius - abs(flat[1] - flat[0]) / 2), not_round)
    return _frames(origins_of(centre, flat_centre, direction), residual, np.zeros(len(centre)))


def origins_of(places: Complexes, ahead_mm: float, direction: int) -> Complexes:
    """Where the working edge is, from places that lie a known way ahead of it along the travel.

    A place P lies √(r² + u²) from the centre, and atan(u/r) further along the travel than the edge:
    exact. Places nearer to the centre than u give a radius of 0.
    """
    radius = np.sqrt(np.maximum(np.abs(places) ** 2 - ahead_mm**2, 0.0))
    turn = np.exp(1j * direction * np.arctan2(ahead_mm, radius))
    return np.asarray(radius * _unit(places) * turn)


def edges_of_hits(strikes: Complexes, ahead_mm: float, direction: int) -> Complexes:
    """Where the working edge is, from strike points that lie a known way ahead of it on the tool.

    The tool stands square to the radius through the strike point P, so the edge lies √(|P|² + w²) from the
    centre, and atan(w/|P|) less far along the travel: exact.
    """
    radius = np.sqrt(np.abs(strikes) ** 2 + ahead_mm**2)
    turn = np.exp(1j * direction * np.arctan2(ahead_mm, np.abs(strikes)))
    return np.asarray(radius * _unit(strikes) * turn)
