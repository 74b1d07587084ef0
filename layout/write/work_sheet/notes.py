"""Beside the drawing: the side shown, the turning, the index mark, the scale bar and what making takes."""

from collections import Counter
from collections.abc import Iterator

from layout.cut.plan import Circles, CutPlan, Entity, Lettering, Outlines
from layout.making.making import Making
from layout.place.disc import Disc
from layout.write.svg_signs import turning_as_drawn
from layout.write.work_sheet.disc_drawing import disc_scale
from layout.write.work_sheet.paper import HAIR_MM, SMALL, Area, Face, Paper, Pen, headed, written
from layout.write.work_sheet.rows import ROW_GAP_MM, Row, rows_written
from layout.write.work_sheet.scale import bar_mm

_SIDE = Face(size_mm=4.0, bold=True)
_BAR_HEIGHT_MM = 1.4
_BAR_PIECES = 5
_NAME_MM = 19.0
_SECONDS_PER_MINUTE = 60
_KILO = 1000
_WHAT = {"SLITS": "slits", "SLOTS": "slots", "HITS": "hits", "HOLES": "holes", "RIM": "rim", "LEADS": "lead-ins"}
_MOST_NOT_STATED_LINES = 8
_MOST_NOT_COUNTED_LINES = 6


def notes_written(paper: Paper, area: Area, plan: CutPlan, disc: Disc, making: Making | None) -> Area:
    """Writes the notes down from the top of an area, and gives what is left."""
    area = written(paper, area, f"{plan.drawn_from.replace('-', ' ').upper()}", _SIDE)
    for line in _how_to_read(plan, disc):
        area = written(paper, area, line, SMALL).below(0.4)
    area = _bar(paper, area.below(2), disc)
    area = headed(paper, area.below(2), "What is cut")
    area = rows_written(paper, area, list(_counted(plan, disc)), name_mm=_NAME_MM)
    if making is None:
        return area
    area = headed(paper, area.below(1.5), "What making it takes")
    area = rows_written(paper, area, list(_taken(making)), name_mm=_NAME_MM)
    area = _price(paper, area, making)
    if making.not_stated:
        missing = f"Not stated, so not told: {', '.join(making.not_stated)}."
        area = written(paper, area, missing, SMALL, most_lines=_MOST_NOT_STATED_LINES)
    if making.not_counted:
        left_out = f"Not counted in time and price: {', '.join(making.not_counted)}."
        area = written(paper, area, left_out, SMALL, most_lines=_MOST_NOT_COUNTED_LINES)
    return area


def _how_to_read(plan: CutPlan, disc: Disc) -> Iterator[str]:
    mirrored = "" if plan.drawn_from == "label-side" else " (mirrored from the label side)"
    yield f"Drawn as seen from this side{mirrored}."
    yield f"Turns {turning_as_drawn(plan, disc)} seen from this side: the arrow."
    marked = any(entity.layer == "MARKS" and not isinstance(entity, Lettering) for entity in plan.disc.entities)
    if marked:
        yield "Index mark at disc angle 0, on the right; its barb points the way the disc turns."
    else:
        yield "No room for an index mark: mark the side by hand."
    struck = any(entity.layer == "HITS" for entity in plan.disc.entities)
    yield f"Thick line: rim. Thin: holes. {'Dots: hits' if struck else 'Hair lines: what is cut, and marks'}."


def _bar(paper: Paper, area: Area, disc: Disc) -> Area:
    """A bar that proves the print: black and white pieces of equal length."""
    scale = disc_scale(disc)
    real_mm = bar_mm(scale, area.width_mm - 4)
    piece_mm = scale.paper_mm(real_mm) / _BAR_PIECES
    bottom_mm = area.top_mm - SMALL.line_mm - _BAR_HEIGHT_MM
    for place in range(_BAR_PIECES):
        piece = Area(
            left_mm=area.left_mm + 1 + place * piece_mm,
            bottom_mm=bottom_mm,
            width_mm=piece_mm,
            height_mm=_BAR_HEIGHT_MM,
        )
        paper.box(piece, Pen(width_mm=HAIR_MM, fill_ratio=0.0 if place % 2 == 0 else 1.0))
    paper.text((area.left_mm + 1, bottom_mm + _BAR_HEIGHT_MM + 0.8), "0", SMALL)
    end = Face(size_mm=SMALL.size_mm, anchor="end")
    paper.text((area.left_mm + 1 + piece_mm * _BAR_PIECES, bottom_mm + _BAR_HEIGHT_MM + 0.8), f"{real_mm:g} mm", end)
    left = area.below(SMALL.line_mm + _BAR_HEIGHT_MM + 1.2)
    on_paper = f"{scale.paper_mm(real_mm):g} mm"
    proof = f"Scale {scale.told}. If the bar is not {on_paper} long on paper, the print is not to scale."
    return written(paper, left, proof, SMALL)


def _counted(plan: CutPlan, disc: Disc) -> Iterator[Row]:
    """How many outlines, circles and points each layer holds; what bridges hold is one in so many pieces."""
    slugs = None if disc.cutter.bridges is None else disc.cutter.bridges.slugs
    counts: Counter[str] = Counter()
    in_lines: Counter[str] = Counter()
    for entity in plan.disc.entities:
        is_line = isinstance(entity, Outlines) and not entity.closed and entity.layer in ("HOLES", "SLOTS")
        (in_lines if is_line else counts)[entity.layer] += _count(entity)
    for layer, what in _WHAT.items():
        held = in_lines[layer] // slugs.count if slugs is not None else 0
        if counts[layer] or held:
            more = f", tool {plan.tool}" if layer == "HITS" and plan.tool else ""
            more += f", {held} of them in {in_lines[layer]} pieces" if held else ""
            in_pieces = layer == "RIM" and counts[layer] > 1
            yield what, f"1, in {counts[layer]} pieces" if in_pieces else f"{counts[layer] + held}{more}"
    yield "projections", f"{len(plan.order)}"


def _count(entity: Entity) -> int:
    if isinstance(entity, Lettering):
        return len(entity.strokes_mm)
    return len(entity.centres_mm if isinstance(entity, Circles) else entity.points_mm)


def _taken(making: Making) -> Iterator[Row]:
    lengths = (
        ("cut", making.cut_length_mm),
        ("marked", making.mark_length_mm),
        ("between cuts", making.rapid_length_mm),
    )
    yield from ((name, f"{length_mm / _KILO:.3f} m") for name, length_mm in lengths if length_mm)
    counts = (("pierced", making.pierce_count), ("struck", making.hit_count))
    yield from ((name, "once" if count == 1 else f"{count} times") for name, count in counts if count)
    forces = (("force of a hit", making.hit_force_n), ("stripping", making.stripping_force_n))
    yield from ((name, f"{force_n / _KILO:.2f} kN") for name, force_n in forces if force_n is not None)
    if making.press_force_n is not None:
        most = max(making.tools, key=lambda work: work.press_force_n or 0.0)
        yield "press force", f"{making.press_force_n / _KILO:.2f} kN, by {most.tool}"
    if making.time_s is not None:
        yield "machine time", _minutes(making.time_s)
    masses = (("mass of blank", making.blank_mass_kg), ("mass of disc", making.disc_mass_kg))
    yield from ((name, f"{mass_kg:.4f} kg") for name, mass_kg in masses if mass_kg is not None)


def _price(paper: Paper, area: Area, making: Making) -> Area:
    """The price line by line, each with what it was worked from, and the total."""
    currency = making.currency or ""
    for line in making.price_lines:
        named = [(line.name, f"{line.amount} {currency}")]
        area = rows_written(paper, area, named, name_mm=_NAME_MM, most_lines=1, gap_mm=0.0)
        worked = area.beside(_NAME_MM, area.width_mm - _NAME_MM)
        left = written(paper, worked, f"{line.quantity} × {line.rate} per {line.per}", SMALL, most_lines=1)
        area = area.below(area.height_mm - left.height_mm + ROW_GAP_MM)
    total = [] if making.total is None else [("price", f"{making.total} {currency}")]
    return rows_written(paper, area, total, name_mm=_NAME_MM, most_lines=1)


def _minutes(time_s: float) -> str:
    tenths = round(time_s * 10)
    minutes, rest = divmod(tenths, 10 * _SECONDS_PER_MINUTE)
    return f"{minutes} min {rest / 10:.1f} s" if minutes else f"{rest / 10:.1f} s"
