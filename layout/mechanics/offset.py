"""Outlines moved sideways: every straight piece and arc by the same distance, corners kept sharp, arcs kept arcs.

A straight piece keeps its direction, an arc its centre; a corner comes to lie where its two moved pieces meet. Where
two pieces run on smoothly, it moves along their common normal.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from layout.mechanics.arrays import FloatArray, frozen_floats

_SMOOTH = 1e-6  # sine of the angle between two pieces that count as one running into the other: 0.2 seconds of arc
_GRAIN_MM = 1e-6  # mm; a nanometre: what is shorter is not there
_STEPS = 8  # Newton's method doubles the good digits with each: from a tenth of a radius to the grain of a double

Complexes = NDArray[np.complex128]


def moved_outlines(
    points_mm: FloatArray, bulges: FloatArray, outwards_mm: float
) -> tuple[FloatArray, FloatArray] | None:
    """Closed outlines of one make, moved outwards, or inwards where the distance is negative.

    Args:
        points_mm: Shape (n, k, 2). Vertices of each of n outlines that differ only in place and turn; n at least 1.
        bulges: Shape (k,). DXF bulge of the piece that starts at each vertex.
        outwards_mm: How far.

    Returns:
        Points and bulges, shaped as given; None where a piece would vanish or turn over, so that nothing that
        is like the outline remains.
    """
    start = points_mm[..., 0] + 1j * points_mm[..., 1]
    end = np.roll(start, -1, axis=1)
    left_mm = -outwards_mm if _runs_anticlockwise(start[0], bulges) else outwards_mm
    centre, radius_mm = _circles(start, end, bulges)
    if (radius_mm - np.sign(bulges) * left_mm)[..., bulges != 0].min(initial=np.inf) <= _GRAIN_MM:
        return None
    moved = _corners(start, end, bulges, left_mm)
    moved_end = np.roll(moved, -1, axis=1)
    along_mm = ((moved_end - moved) * np.conj(end - start) / np.abs(end - start)).real[:, bulges == 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        grown_rad = np.angle((moved_end - centre) / (end - centre)) - np.angle((moved - centre) / (start - centre))
    angle_rad = 4 * np.arctan(bulges) + np.where(bulges == 0, 0.0, grown_rad[0])
    if along_mm.min(initial=np.inf) <= _GRAIN_MM or (angle_rad * np.sign(bulges))[bulges != 0].min(initial=np.inf) <= 0:
        return None
    points = np.stack([moved.real, moved.imag], axis=-1)
    return frozen_floats(points), frozen_floats(np.where(bulges == 0, 0.0, np.tan(angle_rad / 4)))


def _runs_anticlockwise(points: Complexes, bulges: FloatArray) -> bool:
    """Twice the area: of the polygon, and of the segment between each arc and its chord (elementary geometry)."""
    ends = np.roll(points, -1)
    angle_rad = 4 * np.arctan(bulges)
    _, radius_mm = _circles(points, ends, bulges)
    segments = np.where(bulges == 0, 0.0, radius_mm**2 * (angle_rad - np.sin(angle_rad)))
    return bool((np.conj(points) * ends).imag.sum() + segments.sum() > 0)


def _circles(start: Complexes, end: Complexes, bulges: FloatArray) -> tuple[Complexes, FloatArray]:
    """Centre and radius of each arc; a straight piece has a centre of 0 and a radius of 0.

    DXF reference: bulge b = tan(θ/4). The centre lies (1 − b²)/(4b) chords left of the chord's middle, and
    the radius is chord·(1 + b²)/(4·|b|).
    """
    arcs = bulges != 0
    safe = np.where(arcs, bulges, 1.0)
    centre = (start + end) / 2 + 1j * (end - start) * (1 - safe**2) / (4 * safe)
    radius_mm = np.abs(end - start) * (1 + safe**2) / (4 * np.abs(safe))
    return np.where(arcs, centre, 0.0), np.where(arcs, radius_mm, 0.0)


def _corners(start: Complexes, end: Complexes, bulges: FloatArray, left_mm: float) -> Complexes:
    """Where the moved pieces before and after each vertex meet: the place left_mm to the left of both."""
    centre, radius_mm = _circles(start, end, bulges)
    chord = (end - start) / np.abs(end - start)
    # The tangent at an arc's start is turned from its chord by half its angle, 2·atan(b), at its end the other way.
    half_turn = np.exp(2j * np.arctan(bulges))
    after = 1j * chord / half_turn
    before = np.roll(1j * chord * half_turn, 1, axis=1)
    smooth = np.abs((np.conj(before) * after).imag) < _SMOOTH
    there = _Pieces(start=start, centre=centre, radius_mm=radius_mm, bulge_ratio=bulges, normal=after)
    here = there.rolled(before)
    place = start + left_mm * after
    for _ in range(_STEPS):
        one_mm, one_normal = here.leftness_mm(place, left_mm)
        other_mm, other_normal = there.leftness_mm(place, left_mm)
        across = (np.conj(one_normal) * other_normal).imag
        across = np.where(smooth | (across == 0), np.inf, across)
        # The step s with s·n₁ = −e₁ and s·n₂ = −e₂, by Cramer's rule in the plane; none where all runs on smoothly.
        place = place + 1j * (one_mm * other_normal - other_mm * one_normal) / across
    return place


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Pieces:
    """The pieces before, or after, each vertex; normals point to the left at the vertex."""

    start: Complexes
    centre: Complexes
    radius_mm: FloatArray
    bulge_ratio: FloatArray
    normal: Complexes

    def rolled(self, normal: Complexes) -> "_Pieces":
        """The pieces before each vertex, from those after it."""
        return _Pieces(
            start=np.roll(self.start, 1, axis=1),
            centre=np.roll(self.centre, 1, axis=1),
            radius_mm=np.roll(self.radius_mm, 1, axis=1),
            bulge_ratio=np.roll(self.bulge_ratio, 1),
            normal=normal,
        )

    def leftness_mm(self, place: Complexes, left_mm: float) -> tuple[FloatArray, Complexes]:
        """How much farther left of each piece a place lies than wanted, and which way that grows."""
        straight_mm = ((place - self.start) * np.conj(self.normal)).real
        out = place - self.centre
        away_mm = np.maximum(np.abs(out), np.finfo(np.float64).tiny)
        turn = np.sign(self.bulge_ratio)  # the left of an anticlockwise arc is its inside
        round_mm = turn * (self.radius_mm - away_mm)
        straight = self.bulge_ratio == 0
        gone_mm = np.where(straight, straight_mm, round_mm) - left_mm
        return gone_mm, np.where(straight, self.normal, -turn * out / away_mm)
