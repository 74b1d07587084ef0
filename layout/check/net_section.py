"""Checks of the metal left in the band of the tracks, along a ray and along a ring."""

import math
from dataclasses import replace

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, told_worth
from layout.mechanics.net_section import MetalLeft
from layout.place.disc import Disc

_PER_CENT = 100.0
_TORN = {
    Code.LINE_CUT_THROUGH: " The disc may buckle or tear along it.",
    Code.RING_CUT_THROUGH: " The disc may tear off or twist along it.",
}


def metal_holds_along_rays_and_rings(disc: Disc) -> list[Finding]:
    """An error for the weakest ray, and one for the weakest ring, where they keep less than the cutter's least share.

    A cutter that states no shares is not held to any.
    """
    least = disc.cutter.net_section
    if least is None:
        return []
    left = disc.metal_left
    if left is None:
        return []
    findings = []
    band_mm = left.to_mm - left.from_mm
    line_off, ring_off = _line_unsure_percent(disc, left), _ring_unsure_percent(disc, left)
    if left.line_mm < least.least_line_share * band_mm - GRAIN_MM:
        findings.append(_worth_told(_line(disc, left, least.least_line_share), line_off))
    elif _PER_CENT * (left.line_share - least.least_line_share) < line_off:
        findings.append(_unsure(_line(disc, left, least.least_line_share), line_off))
    if left.ring_mm < least.least_ring_share * 2 * math.pi * left.ring_radius_mm - GRAIN_MM:
        findings.append(_worth_told(_ring(disc, left, least.least_ring_share), ring_off))
    elif _PER_CENT * (left.ring_share - least.least_ring_share) < ring_off:
        findings.append(_unsure(_ring(disc, left, least.least_ring_share), ring_off))
    return findings


def _line_unsure_percent(disc: Disc, left: MetalLeft) -> float:
    """How far the share along a line may be off: what is cut by the share of the width, the band by its ends.

    With m of b left, the share is m/b. Openings as wide as a share w off take (b − m)·w more or less; an end of
    the band that lies e further out or in adds metal, and the share moves by (1 − m/b)·e/b.
    """
    movement, band_mm = disc.movement, left.to_mm - left.from_mm
    width_share = movement.plus_minus("/projection/width_mm") / movement.projection.width_mm
    last = len(movement.tracks) - 1
    ends_mm = movement.plus_minus("/tracks/0/radius_mm") + movement.plus_minus(f"/tracks/{last}/radius_mm")
    return _PER_CENT * (1 - left.line_share) * (width_share + ends_mm / band_mm)


def _ring_unsure_percent(disc: Disc, left: MetalLeft) -> float:
    """How far the share along a ring may be off: what is cut by the share of an opening's length along the travel."""
    movement, projection = disc.movement, disc.movement.projection
    length_mm, pointer = projection.depth_mm, "/projection/depth_mm"
    if projection.kind == "slot":
        length_mm, pointer = projection.length_mm, "/projection/length_mm"
    if not length_mm:
        return 0.0
    return _PER_CENT * (1 - left.ring_share) * movement.plus_minus(pointer) / length_mm


def _worth_told(finding: Finding, unsure_percent: float) -> Finding:
    worth = told_worth((finding.measured or 0.0) - (finding.limit or 0.0), unsure_percent, "%", fails=True)
    return replace(finding, message=finding.message + worth)


def _unsure(finding: Finding, unsure_percent: float) -> Finding:
    """The same finding where it holds, but by less than its numbers are worth."""
    margin_percent = (finding.measured or 0.0) - (finding.limit or 0.0)
    says = finding.message.removesuffix(_TORN[finding.code])
    return replace(
        finding,
        code=Code.MARGIN_UNSURE,
        level=Level.WARNING,
        message=says + told_worth(margin_percent, unsure_percent, "%", fails=False),
        remedy=f"Measure again to be sure; if it then fails: {finding.remedy}",
    )


def _line(disc: Disc, left: MetalLeft, least_share: float) -> Finding:
    angle_deg = math.degrees(left.line_angle_rad)
    return Finding(
        code=Code.LINE_CUT_THROUGH,
        level=Level.ERROR,
        message=(
            f"On the line from the centre at {angle_deg:.2f}°, openings leave {left.line_mm:.3f} mm of the "
            f"{left.to_mm - left.from_mm:.3f} mm between {left.from_mm:.3f} and {left.to_mm:.3f} mm: "
            f"{_PER_CENT * left.line_share:.2f} %; {disc.cutter.id} needs {_PER_CENT * least_share:.2f} %."
            + _TORN[Code.LINE_CUT_THROUGH]
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
            f"{disc.cutter.id} needs {_PER_CENT * least_share:.2f} %." + _TORN[Code.RING_CUT_THROUGH]
        ),
        measured=_PER_CENT * left.ring_share,
        limit=_PER_CENT * least_share,
        unit="%",
        at=Place(radius_mm=left.ring_radius_mm),
        remedy="Leave notes of the tracks there out, or share them with another track of the same pitch.",
    )
