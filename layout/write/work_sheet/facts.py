"""The sheet and the machine: material, thickness, blank, kerf, tolerances."""

from collections.abc import Iterator

from layout.cut.plan import CutPlan
from layout.documents.cutter import Cutter
from layout.documents.feature import Feature
from layout.documents.making import ToleranceClass
from layout.documents.movement import DiscBlank
from layout.place.disc import Disc
from layout.write.work_sheet.paper import Area, Paper, headed
from layout.write.work_sheet.rows import Row, rows_written

NOT_STATED = "not stated"
_NAME_MM = 23.0
_MOST_FEATURES = 4  # rows of features that are told; the drawing has them all
_MOST_TOOLS = 4  # rows of tools that are told; the program's head has them all
_CLASS_NAMES: dict[ToleranceClass, str] = {
    "iso-9013-1": "ISO 9013 class 1",
    "iso-9013-2": "ISO 9013 class 2",
    "iso-2768-f": "ISO 2768 f",
    "iso-2768-m": "ISO 2768 m",
    "iso-2768-c": "ISO 2768 c",
    "iso-2768-v": "ISO 2768 v",
}


def facts_written(paper: Paper, area: Area, plan: CutPlan, disc: Disc) -> Area:
    """Writes the facts of the blank and of the cutter, and gives what is left."""
    area = headed(paper, area, "Sheet and blank")
    area = rows_written(paper, area, list(_of_the_blank(disc.movement.disc)), name_mm=_NAME_MM)
    area = headed(paper, area.below(1.5), "Cutter")
    return rows_written(paper, area, list(_of_the_cutter(plan, disc)), name_mm=_NAME_MM)


def _of_the_blank(blank: DiscBlank) -> Iterator[Row]:
    yield "material", blank.material
    yield "thickness", f"{blank.thickness_mm:g} mm"  # never a gauge number: its millimetres depend on the coating
    yield "blank", f"Ø {blank.outer_diameter_mm:g} mm"
    play = blank.centre_hole_play_mm
    told = f"play on the spindle {NOT_STATED}" if play is None else f"{play:g} mm wider than the spindle"
    yield "centre hole", f"Ø {blank.centre_hole_mm:g} mm; {told}"
    for feature in blank.features[:_MOST_FEATURES]:
        yield f"for {feature.purpose}", _feature(feature)
    if len(blank.features) > _MOST_FEATURES:
        yield "and", f"{len(blank.features) - _MOST_FEATURES} more rows of features: see the drawing"
    rolled = blank.rolled_along_deg
    if rolled is None:
        yield "rolled along", NOT_STATED
    else:
        yield "rolled along", f"{rolled:g}° from the index mark, anticlockwise seen from the label side"


def _feature(feature: Feature) -> str:
    size = f"Ø {feature.width_mm:g}" if feature.shape == "hole" else f"{feature.length_mm:g} × {feature.width_mm:g}"
    what = feature.shape if feature.count == 1 else f"{feature.shape}s"
    return f"{feature.count} {what} {size} mm at radius {feature.radius_mm:g} mm"


def _of_the_cutter(plan: CutPlan, disc: Disc) -> Iterator[Row]:
    cutter = disc.cutter
    yield "cutter", f"{cutter.id}: {cutter.title}"
    yield "kerf", _kerf(cutter)
    yield "position", f"± {cutter.position_tolerance_mm:g} mm"
    yield "angle", f"± {cutter.angle_tolerance_deg:g}°"
    named = cutter.tolerance_class
    yield "class", NOT_STATED if named is None else _CLASS_NAMES[named]
    yield "least web", f"{cutter.min_web_mm:g} mm; narrowest slit {cutter.min_slot_mm:g} mm"
    burr = cutter.burr_side
    yield "burr", f"side {NOT_STATED}" if burr is None else f"on the {burr.replace('-', ' ')}"
    if cutter.lead_in is not None:
        yield "lead-ins", f"{cutter.lead_in.length_mm:g} mm long, pierced in the scrap"
    if cutter.bridges is not None:
        yield (
            "bridges",
            f"{cutter.bridges.count} in the rim, {cutter.bridges.width_mm:g} mm wide: break out, stone flush",
        )
        if (slugs := cutter.bridges.slugs) is not None:
            yield "", f"{slugs.count} in each slug from {slugs.least_slug_mm:g} mm up, {slugs.width_mm:g} mm wide"
    yield from _tools(plan, cutter)
    if cutter.kind == "punch-press":
        yield "rim", "not struck: the blank comes round, or is blanked last"


def _tools(plan: CutPlan, cutter: Cutter) -> Iterator[Row]:
    """The tools in the order taken up, each with what it makes."""
    titles = {tool.tool: tool.title for tool in cutter.tools}
    used = [(hits.tool, _counted(len(hits.at_mm), "hole")) for hits in plan.hole_hits]
    if plan.tool:
        used.append((plan.tool, _counted(len(plan.order), "projection")))
    told = used if len(used) <= _MOST_TOOLS else [*used[: _MOST_TOOLS - 1], used[-1]]
    for place, (tool, what) in enumerate(told):
        yield ("tools" if len(used) > 1 else "tool") if place == 0 else "", f"{tool}: {titles[tool]}; {what}"
    if len(told) < len(used):
        yield "and", f"{len(used) - len(told)} more tools for holes: see the program's head"


def _counted(count: int, what: str) -> str:
    return f"{count} {what}{'' if count == 1 else 's'}"


def _kerf(cutter: Cutter) -> str:
    if cutter.kind == "punch-press":
        return "none: a press strikes out what its tool is"
    if cutter.kerf_compensated:
        return f"{cutter.kerf_mm:g} mm, compensated in the drawing: cut on the line"
    lines = "outlines are finished edges, not compensated: set off half the kerf into the scrap"
    if cutter.fold is not None and cutter.fold.slit == "centre-line":
        lines += "; open slits are one kerf wide, cut on the line"
    return f"{cutter.kerf_mm:g} mm; {lines}"
