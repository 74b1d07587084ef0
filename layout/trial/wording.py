"""What the measure sheet says: what to measure, how to correct, what to mind; plain ASCII."""

from layout.documents.cutter import Cutter, Fold
from layout.documents.movement import Movement
from layout.mechanics.bending import bend_allowance_mm
from layout.mechanics.projection import SIZE_AGREES_MM
from layout.version import ENGINE_VERSION

STOP = "STOP"

MEASURE = {
    "kerf": "The width of each slot, across the travel, with a feeler or a measuring glass.",
    "tab-width": "The width of each tab once it stands, with calipers.",
    "depth": "Each tab once it stands: from the sheet's star side to its free edge, with a depth gauge.",
    "slot-width": "The width of each slot, across the travel.",
    "slot-length": "The length of each slot, along the travel, over its round ends.",
    "web": "The metal between the two openings of each pair, where it is thinnest; whole, bent, burnt or torn?",
    "tracks": "With the piece on the movement: does each projection meet its star wheel in the middle?",
}


def kerf_words(cutter: Cutter) -> str:
    """How kerf and least slot come from the measured widths."""
    least = "min_slot_mm: the narrowest step that falls out clean."
    kept = f"kerf_mm = {cutter.kerf_mm:g} + the mean of (measured - nominal)"
    if cutter.kerf_compensated:
        return f"Cut with the beam on the lines, which allow for {cutter.kerf_mm:g} mm: {kept}. {least}"
    by_line = "kerf_mm = the mean of (measured - nominal)"
    return (
        f"Cut with the machine's own kerf setting of {cutter.kerf_mm:g} mm: {kept}. Cut with the beam on the lines: "
        f"{by_line}. {least}"
    )


def tab_width_words() -> str:
    """How the tab's width is chosen."""
    return (
        "A tab narrower than nominal by the same at every step is kerf: correct that first. Then width_mm = nominal "
        "of the widest step whose tab, held to a star wheel, stays clear of the wheels beside it."
    )


def depth_words(fold: Fold, thickness_mm: float) -> str:
    """How the fold's inside radius comes from the measured depths.

    A tab of blank length L = a(r) + p - r, a the bend allowance, comes out p deep. Where it comes out deeper
    by e, a(r) - r is less than reckoned by e, so r is too large by e over the slope of a(r) - r.
    """
    slope = depth_slope(fold.inside_radius_mm, thickness_mm)
    return (
        f"e = the mean of (measured - nominal); fold.inside_radius_mm = {fold.inside_radius_mm:g} - e / {slope:.3f}. "
        "At the step of nominal depth measure the angle as well: fold.springback.opens_deg = the angle folded to - "
        "the angle it stays at. The movement's depth_plus_minus_mm: the greatest |measured - nominal - e|."
    )


def depth_slope(inside_radius_mm: float, thickness_mm: float) -> float:
    """How a(r) - r grows with r, a the bend allowance of DIN 6935: mm of blank length per mm of inside radius."""
    grain_mm = inside_radius_mm * 1e-4
    more_mm = bend_allowance_mm(inside_radius_mm + grain_mm, thickness_mm)
    less_mm = bend_allowance_mm(inside_radius_mm - grain_mm, thickness_mm)
    return (more_mm - less_mm) / (2 * grain_mm) - 1


def slot_width_words() -> str:
    """How the slot's width is chosen."""
    return (
        "A slot wider than nominal by the same at every step is kerf or the tool: correct that first. Then width_mm "
        "= nominal of the narrowest step into which a point of the star wheel falls freely."
    )


def slot_length_words() -> str:
    """How the slot's length is chosen."""
    return "As for the width: length_mm = nominal of the shortest step that turns the star wheel by one whole point."


def web_words(cutter: Cutter) -> str:
    """How the least web comes from the steps."""
    spread = " position_tolerance_mm: at least the greatest |measured - nominal|." if cutter.tools else ""
    return (
        "min_web_mm = nominal of the thinnest step that is whole and flat, if every wider one is so too."
        f" Measured thinner than nominal on all steps: kerf or tool, correct that first.{spread}"
    )


def tool_words(size: str) -> str:
    """How a size of a press tool is corrected."""
    return (
        f"{size} = the mean of measured. A tool that differs from the movement's projection by more than "
        f"{SIZE_AGREES_MM:g} mm is not taken for it: grind it, or correct the movement if its star wheels turn well."
    )


def track_words() -> str:
    """How a track's radius comes from where the projection meets its wheel."""
    return (
        "Turn by hand up to the line marked STOP; each projection, one after the other, must turn its wheel by one "
        "point. radius_mm = nominal + how far the wheel's middle lies outside the projection's middle (- where inside)."
    )


def cautions(movement: Movement, cutter: Cutter) -> tuple[str, ...]:
    """What to mind, the dangers of the machine first; none of it replaces local rules."""
    laser = (
        "Laser: closed machine, beam stop and fume extraction on; never look into the light; parts are hot. "
        "Zinc-coated sheet gives off zinc fume: use bare steel, or extract it well."
    )
    press = "Press: hands out of the die space, guards closed, eyes and ears protected; isolate it to change tools."
    standing = movement.projection.kind == "standing"
    wheels = f"{'projections' if standing else 'slots'} of the ladders must not come under the star wheels"
    return (
        laser if cutter.kind == "laser" else press,
        "Edges, tabs and burrs are sharp: gloves, and take the burr off the outline before anything else.",
        "Wound spring: let it down fully before the movement is opened. Never take out comb, brake or governor while "
        "the spring is wound: the train runs away and breaks what it meets.",
        "On the movement: turn by hand, slowly, never by the spring; stop where it binds, and at the line marked "
        f"STOP: {wheels}.",
        "Local rules and trained people come first; leave what you have not been shown to those who have.",
    )


def head_lines(movement: Movement, cutter: Cutter, tool: str) -> tuple[str, ...]:
    """Comments for the drawing's head, in ASCII but for what the documents' own words hold."""
    fold = cutter.fold
    lines = [
        "TRIAL PIECE - NOT A DISC",
        f"discwright {ENGINE_VERSION}",
        f"movement: {movement.id} revision {movement.revision}",
        f"sheet: {movement.disc.material}, {movement.disc.thickness_mm:g} mm thick",
        f"cutter: {cutter.id}",
        f"drawn from the {side(cutter)}; origin at the disc centre; millimetres",
        edge_words(cutter),
    ]
    if fold is not None and fold.slit == "centre-line" and movement.projection.kind == "standing":
        lines.append(f"open slits are cut along their middle, one kerf of {cutter.kerf_mm:g} mm wide")
    if tool:
        lines.append(f"hits: one point for each, where the tool strikes; tool {tool}")
    return tuple(lines)


def edge_words(cutter: Cutter) -> str:
    """What the outlines of the drawing are."""
    if cutter.kerf_compensated:
        return f"outlines are the beam's own lines, {cutter.kerf_mm / 2:g} mm inside the scrap; add no kerf"
    return "outlines are finished edges; kerf is not added"


def title_lines(movement: Movement, cutter: Cutter) -> tuple[str, ...]:
    """What the piece itself says of what it is, the outermost line first."""
    # In capitals: small letters have tails that reach into the line below.
    lines = ("trial piece", f"{movement.id} rev {movement.revision}", cutter.id, side(cutter))
    return tuple(line.upper() for line in lines)


def side(cutter: Cutter) -> str:
    """The side the drawing shows, in words."""
    return cutter.drawn_from.replace("-", " ")
