"""Checks that the cutter can make the movement's projections at all."""

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM
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
    """Channels and slots must not be narrower than the cutter's least slot."""
    cutter, projection = disc.cutter, disc.movement.projection
    if projection.kind == "slot":
        what, width_mm = "slot", projection.width_mm
    elif cutter.fold is not None and cutter.fold.slit_width_mm is not None:
        what, width_mm = "slit", cutter.fold.slit_width_mm
    else:
        return []
    if width_mm >= cutter.min_slot_mm - GRAIN_MM:
        return []
    return [
        Finding(
            code=Code.SLIT_TOO_NARROW,
            level=Level.ERROR,
            message=f"The {what} is {width_mm:.3f} mm wide; {cutter.id} cuts none below {cutter.min_slot_mm:.3f} mm.",
            measured=width_mm,
            limit=cutter.min_slot_mm,
            unit="mm",
            at=Place(),
            remedy="Widen the slit (slit_width_mm) or slot (width_mm), or choose a cutter that cuts finer.",
        )
    ]
