"""The picture of a disc: what is cut, how it looks after forming, and what was found."""

from layout.cut.plan import CutPlan
from layout.write.laid_out import NOT_GOOD, LaidOut
from layout.write.svg_disc import disc_area, layer_groups, working_edges
from layout.write.svg_facts import facts, legend
from layout.write.svg_findings import findings_list, ringed, shown_kinds
from layout.write.svg_header import corner_words, header, header_height_mm, is_good, level_counts
from layout.write.svg_markers import markers
from layout.write.svg_page import bytes_of, describe, new_drawing, page_for
from layout.write.svg_signs import index_flag, row_of_star_wheels, turning_arrow

_ABOVE, _BELOW, _BETWEEN = 4.0, 4.5, 2.2  # gaps in hundredths of the page's width


def write_svg(plan: CutPlan, laid_out: LaidOut) -> bytes:
    """The disc as an SVG picture in millimetres at natural size, UTF-8, the same bytes every time.

    For people to read; what is cut is disc.dxf. Coordinates are (x, −y) of the drawings, without
    a transform; every layer that occurs is a group, with the layer's name in small letters as its
    id. What lies off the disc is shown only as far as a little beyond the rim. Above the disc stand
    title and verdict, below it a legend, the findings with the numbers of their places on the disc,
    and the facts. It holds no script and refers to nothing outside itself. A disc without
    projections gives the blank alone.

    Args:
        plan: The cut plan of the layout's disc.
        laid_out: The layout.
    """
    disc = laid_out.disc
    page = page_for(disc.movement.disc.outer_diameter_mm)
    kinds = shown_kinds(laid_out.findings)
    top_mm = -page.disc_radius_mm - page.units_mm(_ABOVE) - header_height_mm(plan, laid_out, page)
    gap_mm = page.units_mm(_BETWEEN)
    legend_rows, y_mm = legend(plan, page, page.disc_radius_mm + page.units_mm(_BELOW))
    listed, y_mm = findings_list(kinds, len(laid_out.findings), page, y_mm + gap_mm / 2)
    fact_columns, y_mm = facts(plan, laid_out, page, y_mm + gap_mm)
    drawing = new_drawing(page, top_mm, y_mm + gap_mm)
    below, above = layer_groups(plan, page)
    row, row_mark = row_of_star_wheels(disc, plan, page)
    rings, badges = markers(ringed(kinds), disc, plan, page)
    on_disc = [*below, row, working_edges(plan, disc, page), *above, index_flag(plan, page), rings]
    for group in (
        header(plan, laid_out, page, top_mm),
        corner_words(plan, laid_out, page),
        *disc_area(page, on_disc),
        turning_arrow(disc, plan, page),
        row_mark,
        badges,
        legend_rows,
        listed,
        fact_columns,
    ):
        drawing.add(group)
    describe(drawing, *_described(plan, laid_out))
    return bytes_of(drawing)


def _described(plan: CutPlan, laid_out: LaidOut) -> tuple[str, str]:
    disc = laid_out.disc
    counts = level_counts(laid_out)
    part = f", {plan.part}" if plan.part else ""
    title = f"{plan.title}{part}: tune disc for {disc.movement.id}"
    description = [
        f"A round disc of {disc.movement.disc.outer_diameter_mm:g} mm with {disc.projection_count} projections "
        f"on {len(disc.movement.tracks)} tracks, drawn from the {plan.drawn_from.replace('-', ' ')}.",
        "Good to cut." if is_good(plan, laid_out) else f"{NOT_GOOD}.",
        f"Findings: {', '.join(counts) if counts else 'none'}.",
        f"{'. '.join(plan.disc.comments)}.",
    ]
    return title, " ".join(description)
