"""How the projections are formed: the words beside the sketch, and the order of work."""

from collections.abc import Iterator

from layout.documents.cutter import Cutter, Fold, Tool
from layout.mechanics.projection import Pattern, fitting_tool
from layout.mechanics.slugs import held_openings
from layout.place.disc import Disc
from layout.write.work_sheet.forming_sketch import bend_to_deg, sketched
from layout.write.work_sheet.paper import BODY, STRONG, Area, Paper, headed, written

_GAP_MM = 0.5
NO_FORMING = "No forming: slots work as they are cut."


def forming_written(paper: Paper, area: Area, disc: Disc) -> Area:
    """Draws the section through one projection, writes how it is made, and gives what is left."""
    area = headed(paper, area, "Forming")
    if disc.projection_count:
        area = sketched(paper, area, disc)
    for text in how_formed(disc):
        area = written(paper, area, text, BODY).below(_GAP_MM)
    area = written(paper, area.below(1), "Order of work", STRONG)
    for number, text in enumerate(order_of_work(disc), start=1):
        area = written(paper, area, f"{number}. {text}", BODY).below(_GAP_MM)
    return area


def how_formed(disc: Disc) -> list[str]:
    """What is done to form one projection, in sentences; a cutter that cannot make it is told so."""
    pattern, cutter = disc.pattern, disc.cutter
    if not disc.projection_count:
        return ["Nothing to form: a bare blank."]
    if pattern.making == "slot":
        return list(_slots(disc))
    if pattern.making == "fold" and cutter.fold is not None:
        return list(_folds(pattern, cutter.fold, disc.movement.disc.thickness_mm))
    tool = fitting_tool(disc.movement, cutter)
    if tool is None:
        return [f"{cutter.id} states no way to make these projections: see the findings."]
    return list(_lances(tool, None if cutter.press is None else cutter.press.forms))


def _slots(disc: Disc) -> Iterator[str]:
    projection = disc.movement.projection
    yield f"{NO_FORMING} Each is {projection.length_mm:g} × {projection.width_mm:g} mm, round ends, along the travel."
    yield "The working edge is the trailing end."
    tool = fitting_tool(disc.movement, disc.cutter)
    if tool is not None:
        yield f"Tool {tool.tool}: one hit for each slot, at the middle of the slot."


def _folds(pattern: Pattern, fold: Fold, thickness_mm: float) -> Iterator[str]:
    yield "Fold every tab down to the star side on its fold line, wiped over an anvil."
    at_mm = 0.0 if pattern.fold_line_mm is None else float(pattern.fold_line_mm[0, 0])
    where = "on the working edge" if round(at_mm, 2) == 0 else f"{abs(at_mm):.2f} mm {_side(at_mm)} the working edge"
    yield (
        f"Inside radius {fold.inside_radius_mm:g} mm in {thickness_mm:g} mm sheet; fold line (middle of the bend) "
        f"{where}; flat tab {pattern.blank_length_mm:.2f} mm; the flat tab lies {fold.fold_side} its fold line."
    )
    if fold.springback is None:
        yield "Springback is not stated: find the angle to bend to on a trial piece of this sheet."
    else:
        opens_deg = fold.springback.opens_deg
        yield f"Bend to {bend_to_deg(fold):g}°: it opens by {opens_deg:g}° (as the shop measured) and rests at 90°."


def _side(at_mm: float) -> str:
    return "ahead of" if at_mm > 0 else "behind"


def _lances(tool: Tool, forms: str | None) -> Iterator[str]:
    way = {"up": " upward: the star side lies above", "down": " downward: the label side lies above"}.get(forms or "")
    stands = " to the star side." if way is None else f"{way} on the machine."
    yield f"Tool {tool.tool}: {tool.title}. One hit cuts three sides and forms the tab{stands}"
    at = "on" if tool.edge_ahead_mm == 0 else f"{abs(tool.edge_ahead_mm):g} mm {_side(tool.edge_ahead_mm)}"
    yield (
        f"Footprint {tool.footprint_length_mm:g} × {tool.footprint_width_mm:g} mm, centred on the strike point; "
        f"the working edge lies {at} the strike point, along the travel."
    )


def order_of_work(disc: Disc) -> list[str]:
    """The steps from sheet to disc, in order; deburring stands before forming wherever it can."""
    cutter = disc.cutter
    steps = ["Measure the sheet: material, thickness, flatness. Check the side and the origin on the machine."]
    if disc.pattern.making == "lance" and disc.projection_count:
        steps += [
            "Strike the holes, then the lances, the rim last.",
            "A lance cuts and forms in one hit, so its edges cannot be deburred first: keep punch and die sharp.",
            "Deburr rim and holes; take out every loose slug.",
        ]
    elif cutter.kind == "punch-press":
        steps += ["Strike the holes, then the slots, the rim last.", f"Take out every slug. Deburr {_burr(cutter)}."]
    else:
        held = "" if cutter.bridges is None else f" Break its {cutter.bridges.count} bridges and stone the stubs flush."
        slugs = f"{_held_slugs(disc)}Take out every {'loose ' if _held_slugs(disc) else ''}slug."
        steps += [f"Cut; take the disc out when it is cool.{held}", f"{slugs} Deburr {_burr(cutter)}."]
        folds = disc.pattern.making == "fold" and disc.projection_count > 0
        steps += ["Then fold, never before deburring."] if folds else []
    return [*steps, "Inspect by the list on sheet 2."]


def _held_slugs(disc: Disc) -> str:
    """What is done with slugs that bridges hold, a sentence and a space; "" for none."""
    cutter = disc.cutter
    held = [each.what for each in held_openings(disc.pattern, disc.movement, cutter) if each.gaps is not None]
    if not held or cutter.bridges is None or cutter.bridges.slugs is None:
        return ""
    count = cutter.bridges.slugs.count
    on = "one bridge" if count == 1 else f"{count} bridges"
    return f"Knock out the slugs of {', '.join(dict.fromkeys(held))}, each on {on}; stone the stubs flush. "


def _burr(cutter: Cutter) -> str:
    return "both sides" if cutter.burr_side is None else f"the {cutter.burr_side.replace('-', ' ')}, where the burr is"
