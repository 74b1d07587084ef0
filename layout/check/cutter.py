"""Checks that the cutter can make the movement's projections at all."""

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM
from layout.documents.cutter import Cutter
from layout.mechanics.projection import fitting_tool
from layout.place.disc import Disc


def cutter_can_form(disc: Disc) -> list[Finding]:
    """A laser folds and cannot lance; a press lances and cannot fold."""
    movement, cutter = disc.movement, disc.cutter
    forming, is_laser = movement.projection.forming, cutter.kind == "laser"
    if is_laser and forming == "lance":
        return [_cannot(Code.CANNOT_FORM, f"{movement.id} needs lanced projections; {cutter.id} is a laser.")]
    if is_laser and movement.projection.kind == "standing" and cutter.fold is None:
        return [_cannot(Code.CANNOT_FORM, f"{cutter.id} states no fold, and {movement.id} needs standing metal.")]
    if not is_laser and forming == "fold":
        return [_cannot(Code.CANNOT_FORM, f"{movement.id} needs folded projections; {cutter.id} is a punch press.")]
    return []


def press_has_the_tool(disc: Disc) -> list[Finding]:
    """A press needs a tool of the projection's size."""
    if disc.cutter.kind == "laser" or fitting_tool(disc.movement, disc.cutter) is not None:
        return []
    return [_cannot(Code.NO_TOOL, f"{disc.cutter.id} has no tool for {_wanted(disc)}; it has {_tools(disc)}.")]


def _wanted(disc: Disc) -> str:
    projection = disc.movement.projection
    if projection.kind == "slot":
        return f"a slot {projection.length_mm:g} by {projection.width_mm:g} mm"
    return f"a lanced tab {projection.width_mm:g} mm wide and {projection.depth_mm:g} mm deep"


def _tools(disc: Disc) -> str:
    return ", ".join(f"{tool.tool} ({tool.title})" for tool in disc.cutter.tools) or "none"


def _cannot(code: Code, message: str) -> Finding:
    return Finding(
        code=code,
        level=Level.ERROR,
        message=message,
        measured=None,
        limit=None,
        unit="",
        at=Place(),
        remedy="Choose another cutter, or complete the cutter document (fold, tools).",
    )


def slits_are_wide_enough(disc: Disc) -> list[Finding]:
    """Channels, their reliefs, and slots must not be narrower than the cutter's least slot."""
    cutter, projection, fold = disc.cutter, disc.movement.projection, disc.cutter.fold
    widths_mm: list[tuple[str, float | None]] = []
    if projection.kind == "slot":
        widths_mm = [("slot (width_mm)", projection.width_mm)]
    elif fold is not None and fold.slit == "channel":
        relief_mm = fold.relief_width_mm if fold.relief_mm > 0 else None
        widths_mm = [("slit (slit_width_mm)", fold.slit_width_mm), ("relief (relief_width_mm)", relief_mm)]
    return [
        _too_small(Code.SLIT_TOO_NARROW, what, width_mm, cutter)
        for what, width_mm in widths_mm
        if width_mm is not None and width_mm < cutter.min_slot_mm - GRAIN_MM
    ]


def holes_are_large_enough(disc: Disc) -> list[Finding]:
    """The centre hole and the blank's features must not be smaller than the cutter's least slot."""
    blank, cutter = disc.movement.disc, disc.cutter
    sizes_mm = [("centre hole", blank.centre_hole_mm)]
    sizes_mm += [(f"{one.purpose} {one.shape}", min(one.width_mm, one.length_mm)) for one in blank.features]
    return [
        _too_small(Code.HOLE_TOO_SMALL, what, size_mm, cutter)
        for what, size_mm in sizes_mm
        if size_mm < cutter.min_slot_mm - GRAIN_MM
    ]


def _too_small(code: Code, what: str, size_mm: float, cutter: Cutter) -> Finding:
    return Finding(
        code=code,
        level=Level.ERROR,
        message=f"The {what} is {size_mm:.3f} mm wide; {cutter.id} cuts none below {cutter.min_slot_mm:.3f} mm.",
        measured=size_mm,
        limit=cutter.min_slot_mm,
        unit="mm",
        at=Place(),
        remedy="Widen it in the movement or cutter document, or choose a cutter that cuts finer.",
    )
