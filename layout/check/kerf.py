"""Checks on drawings that are compensated for the kerf already: what is cut must be wider than the beam."""

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM
from layout.mechanics.offset import moved_outlines
from layout.place.disc import Disc


def nothing_closes_under_the_kerf(disc: Disc) -> list[Finding]:
    """An error for everything that is no wider than the kerf, where the drawing is compensated for it.

    Inner outlines are drawn half a kerf smaller all round: what is not wider than a kerf has no line left
    to cut along. A notch of the rim closes the same way. Files that are not compensated leave this to the
    shop, and an open slit is cut along its middle.
    """
    if not disc.cutter.kerf_compensated:
        return []
    closing = {what: width_mm for what, width_mm in _widths_mm(disc) if width_mm <= disc.cutter.kerf_mm + GRAIN_MM}
    findings = [_closes(disc, what, width_mm) for what, width_mm in closing.items()]
    return findings or _projections_close(disc)


def _widths_mm(disc: Disc) -> list[tuple[str, float]]:
    """What is cut as a closed outline, each with its least width."""
    blank, projection, fold = disc.movement.disc, disc.movement.projection, disc.cutter.fold
    widths_mm = [("centre hole", blank.centre_hole_mm)]
    for one in blank.features:
        across_mm = one.length_mm if one.shape == "notch" else min(one.width_mm, one.length_mm)
        widths_mm.append((f"{one.purpose} {one.shape}", across_mm))
    if projection.kind == "slot":
        widths_mm.append(("slot (width_mm)", projection.width_mm))
    elif fold is not None and fold.slit == "channel":
        slit_mm = fold.slit_width_mm or 0.0
        widths_mm.append(("slit (slit_width_mm)", slit_mm))
        if fold.relief_mm > 0 and fold.relief_width_mm is not None:
            widths_mm.append(("relief (relief_width_mm)", fold.relief_width_mm))
            if fold.relief_width_mm > slit_mm:
                widths_mm.append(("relief (relief_mm)", fold.relief_mm))
    return widths_mm


def _projections_close(disc: Disc) -> list[Finding]:
    """The same for a projection's cut whose single widths are enough, but not its shape as a whole."""
    cut = disc.pattern.cut
    if (
        cut is None
        or not cut.closed
        or moved_outlines(cut.points_mm[None], cut.bulges, -disc.cutter.kerf_mm / 2) is not None
    ):
        return []
    return [_closes(disc, "cut of a projection", None)]


def _closes(disc: Disc, what: str, width_mm: float | None) -> Finding:
    kerf_mm = disc.cutter.kerf_mm
    wide = "has a part that is no wider" if width_mm is None else f"is {width_mm:.3f} mm wide, no more"
    return Finding(
        code=Code.KERF_CLOSES,
        level=Level.ERROR,
        message=(
            f"The {what} {wide} than the kerf of {kerf_mm:.3f} mm of {disc.cutter.id}: drawn half a kerf smaller all "
            "round, it closes."
        ),
        measured=width_mm,
        limit=kerf_mm,
        unit="mm",
        at=Place(),
        remedy="Widen it in the movement or cutter document, or let the shop compensate (kerf_compensated false).",
    )
