"""Checks of the metal left in the band of the tracks, along a ray and along a ring."""

import math

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM
from layout.mechanics.net_section import MetalLeft, metal_left
from layout.place.disc import Disc

_PER_CENT = 100.0


def metal_holds_along_rays_and_rings(disc: Disc) -> list[Finding]:
    """An error for the weakest ray, and one for the weakest ring, where they keep less than the cutter's least share.

    A cutter that states no shares is not held to any.
    """
    least = disc.cutter.net_section
    if least is None:
        return []
    left = metal_left(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad, disc.movement.disc.features)
    if left is None:
        return []
    findings = []
    band_mm = left.to_mm - left.from_mm
    if left.line_mm < least.least_line_share * band_mm - GRAIN_MM:
        findings.append(_line(disc, left, least.least_line_share))
    if left.ring_mm < least.least_ring_share * 2 * math.pi * left.ring_radius_mm - GRAIN_MM:
        findings.append(_ring(disc, left, least.least_ring_share))
    return findings


def _line(disc: Disc, left: MetalLeft, least_share: float) -> Finding:
    angle_deg = math.degrees(left.line_angle_rad)
    return Finding(
        code=Code.LINE_CUT_THROUGH,
        level=Level.ERROR,
        message=(
            f"On the line from the centre at {angle_deg:.2f}°, openings leave {left.line_mm:.3f} mm of the "
            f"{left.to_mm - left.from_mm:.3f} mm between {left.from_mm:.3f} and {left.to_mm:.3f} mm: "
            f"{_PER_CENT * left.line_share:.2f} %; {disc.cutter.id} needs {_PER_CENT * least_share:.2f} %. "
            "The disc may buckle or tear along it."
        ),
        measured=_PER_CENT * left.line_share,
        limit=_PER_CENT * least_share,
        unit="%",
        at=Place(angle_deg=angle_deg),
        remedy="Thin the chord out, spread it (writing: chords bass-first), or put some of its notes on other tracks.",
    )


def _ring(disc: Disc, left: MetalLeft, least_share: float) -> Finding:
    return Finding(
        code=Code.RING_CUT_THROUGH,
        level=Level.ERROR,
        message=(
            f"On the ring at {left.ring_radius_mm:.3f} mm, openings leave {left.ring_mm:.3f} mm of the "
            f"{2 * math.pi * left.ring_radius_mm:.3f} mm round: {_PER_CENT * left.ring_share:.2f} %; "
            f"{disc.cutter.id} needs {_PER_CENT * least_share:.2f} %. The disc may tear off or twist along it."
        ),
        measured=_PER_CENT * left.ring_share,
        limit=_PER_CENT * least_share,
        unit="%",
        at=Place(radius_mm=left.ring_radius_mm),
        remedy="Leave notes of the tracks there out, or share them with another track of the same pitch.",
    )
