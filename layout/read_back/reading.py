"""What reading a drawing back gives: the disc that would be cut, and what did not fit."""

from dataclasses import dataclass

from layout.check.finding import Finding
from layout.place.disc import Disc


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Reading:
    """A disc known from cut geometry alone.

    Attributes:
        disc: Projections in the order (track, angle).
        findings: What in the drawing is no projection, hole or rim of this movement, cut twice,
            off its track or out of shape.
    """

    disc: Disc
    findings: tuple[Finding, ...]
