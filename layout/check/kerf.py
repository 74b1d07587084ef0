"""Checks on drawings that are compensated for the kerf already: what is cut must be wider than the beam."""

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, told_worth
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
    worst: dict[str, tuple[float, float]] = {}
    for what, width_mm, unsure_mm in _widths_mm(disc):
        if width_mm <= disc.cutter.kerf_mm + max(unsure_mm, GRAIN_MM):
            worst[what] = min((width_mm, unsure_mm), worst.get(what, (width_mm, unsure_mm)))
    findings = [_closes(disc, what, width_mm, unsure_mm) for what, (width_mm, unsure_mm) in worst.items()]
    return findings or _projections_close(disc)


def _widths_mm(disc: Disc) -> list[tuple[str, float, float]]:
    """What is cut as a closed outline, each with its least width, and how far that may be off."""
    blank, projection, fold = disc.movement.disc, disc.movement.projection, disc.cutter.fold
    worth = disc.movement.plus_minus
    widths_mm = [("centre hole", blank.centre_hole_mm, worth("/disc/centre_hole_mm"))]
    for row, one in enumerate(blank.features):
        along = one.shape == "notch" or one.length_mm < one.width_mm
        unsure_mm = worth(f"/disc/features/{row}/{'length_mm' if along else 'width_mm'}")
        widths_mm.append((f"{one.purpose} {one.shape}", one.length_mm if along else one.width_mm, unsure_mm))
    if projection.kind == "slot":
        widths_mm.append(("slot (width_mm)", projection.width_mm, worth("/projection/width_mm")))
    elif fold is not None and fold.slit == "channel":
        slit_mm = fold.slit_width_mm or 0.0
        widths_mm.append(("slit (slit_width_mm)", slit_mm, 0.0))
        if fold.relief_mm > 0 and fold.relief_width_mm is not None:
            widths_mm.append(("relief (relief_width_mm)", fold.relief_width_mm, 0.0))
            if fold.relief_width_mm > slit_mm:
                widths_mm.append(("relief (relief_mm)", fold.relief_mm, 0.0))
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
    return [_closes(disc, "cut of a projection", None, 0.0)]


def _closes(disc: Disc, what: str, width_mm: float | None, unsure_mm: float) -> Finding:
    kerf_mm = disc.cutter.kerf_mm
    if width_mm is not None and width_mm > kerf_mm + GRAIN_MM:
        return _nearly_closes(disc, what, width_mm, unsure_mm)
    wide = "has a part that is no wider" if width_mm is None else f"is {width_mm:.3f} mm wide, no more"
    worth = "" if width_mm is None else told_worth(width_mm - kerf_mm, unsure_mm, "mm", fails=True)
    return Finding(
        code=Code.KERF_CLOSES,
        level=Level.ERROR,
        message=(
            f"The {what} {wide} than the kerf of {kerf_mm:.3f} mm of {disc.cutter.id}: drawn half a kerf smaller all "
            f"round, it closes.{worth}"
        ),
        measured=width_mm,
        limit=kerf_mm,
        unit="mm",
        at=Place(),
        remedy="Widen it in the movement or cutter document, or let the shop compensate (kerf_compensated false).",
    )


def _nearly_closes(disc: Disc, what: str, width_mm: float, unsure_mm: float) -> Finding:
    kerf_mm = disc.cutter.kerf_mm
    return Finding(
        code=Code.MARGIN_UNSURE,
        level=Level.WARNING,
        message=(
            f"The {what} is {width_mm:.3f} mm wide, and the kerf of {disc.cutter.id} {kerf_mm:.3f} mm."
            f"{told_worth(width_mm - kerf_mm, unsure_mm, 'mm', fails=False)}"
        ),
        measured=width_mm,
        limit=kerf_mm,
        unit="mm",
        at=Place(),
        remedy="Measure again to be sure; what is no wider than the kerf closes.",
    )
