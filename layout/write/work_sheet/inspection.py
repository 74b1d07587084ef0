"""What to inspect before the disc is played: a list to tick, webs to measure, and the count of every track."""

import math
from collections import Counter
from collections.abc import Iterator

from layout.place.disc import Disc
from layout.write.work_sheet.paper import (
    BODY,
    HAIR_MM,
    NARROW_MM,
    SMALL,
    STRONG,
    Area,
    Face,
    Paper,
    Pen,
    headed,
    written,
)
from layout.write.work_sheet.rows import TICK_MM, tick_box, ticked_list
from layout.write.work_sheet.webs import Web, thinnest_webs

MOST_WEBS = 5
_CELLS_IN_A_ROW = 15
_CELL_HEIGHT_MM = 3.4
_CELL_FACE = Face(size_mm=2.0)
_COUNT_BOX_MM = 1.7
_WEB_COLUMNS_MM = (0.0, 20.0, 36.0, 52.0, 68.0)
_WEB_ROW_MM = 3.4
_RULED_MM = 7.5  # between lines to write on by hand


def inspection_written(paper: Paper, area: Area, disc: Disc) -> Area:
    """Writes the list to tick and the webs to measure, and gives what is left."""
    area = headed(paper, area, "Inspection: tick what was found in order")
    area = ticked_list(paper, area, list(inspected(disc)))
    webs = thinnest_webs(disc, MOST_WEBS)
    if not webs:
        return area
    limit = f"Webs to measure, least {disc.cutter.min_web_mm:g} mm; angles as drawn, anticlockwise from disc angle 0"
    area = written(paper, area.below(1), limit, SMALL, most_lines=2)
    heads = ("tracks", "radius mm", "angle °", "web mm", "found")
    area = _web_row(paper, area, heads, SMALL)
    for web in webs:
        tick_box(paper, area.left_mm + _WEB_COLUMNS_MM[-1] + 14.0, area.top_mm - TICK_MM - 0.3)
        area = _web_row(paper, area, _told(web), BODY)
    return area


def _web_row(paper: Paper, area: Area, texts: tuple[str, ...], face: Face) -> Area:
    for left_mm, text in zip(_WEB_COLUMNS_MM, texts, strict=True):
        paper.text((area.left_mm + left_mm, area.top_mm - 2.5), text, face)
    return area.below(_WEB_ROW_MM)


def _told(web: Web) -> tuple[str, ...]:
    tracks = f"{web.tracks[0]} and {web.tracks[1]}"
    return (
        tracks,
        f"{web.radius_mm:.1f}",
        f"{web.angle_deg:.1f}",
        f"{web.web_mm:.3f}" if web.web_mm > 0 else "none",
        "............",
    )


def inspected(disc: Disc) -> Iterator[str]:
    """What to look at, each in one sentence with its number and limit."""
    blank, projection = disc.movement.disc, disc.movement.projection
    yield f"{disc.projection_count} projections in all; on each track as the table below says."
    if not disc.projection_count:
        yield "A bare blank: no opening and no standing metal anywhere."
    elif disc.pattern.making == "slot":
        yield f"Slots {projection.length_mm:g} × {projection.width_mm:g} mm, the trailing end sharp and free of burr."
    else:
        yield _height(disc)
        yield _squareness(disc)
        yield "No crack along any bend, seen under a glass; working edges smooth."
    yield "No loose slug, no burr and no torn web; hold the disc against the light."
    if blank.flatness_mm > 0:
        yield f"Flatness: lying free on a plate, nowhere more than {blank.flatness_mm:g} mm off it, tabs upward."
    else:
        yield "Flatness: no limit stated; lying free on a plate, it must not rock."
    if blank.run_out_mm > 0:
        yield f"Run-out of the rim on the spindle: not above {blank.run_out_mm:g} mm."
    yield f"Centre hole Ø {blank.centre_hole_mm:g} mm slides on the spindle without force{_play(disc)}."
    drives = [feature for feature in blank.features if feature.purpose != "stop"]
    if drives:
        yield "Drive and location features take their pins freely, all at once."
    marked = disc.cutter.drawn_from.replace("-", " ").capitalize()
    yield f"{marked} up, the index mark's barb points the way the disc turns."
    yield "First turn: by hand, the spring let down, the combs watched; stop at the first resistance."


def _height(disc: Disc) -> str:
    projection = disc.movement.projection
    depth_mm, band_mm = projection.depth_mm or 0.0, projection.depth_plus_minus_mm
    if band_mm == 0:
        return f"Height from the star-side face {depth_mm:g} mm; no band is stated."
    return (
        f"Height from the star-side face {depth_mm:g} ± {band_mm:g} mm: a gauge set to {depth_mm + band_mm:.2f} mm "
        f"goes over every tip, one set to {depth_mm - band_mm:.2f} mm over none."
    )


def _squareness(disc: Disc) -> str:
    """A tab of depth p that leans by θ has its tip p·sin θ off its place."""
    depth_mm, error_mm = disc.movement.projection.depth_mm or 0.0, disc.cutter.position_tolerance_mm
    if not 0 < error_mm < depth_mm:
        return "Standing metal square to the sheet, by a small square."
    leans_deg = math.degrees(math.asin(error_mm / depth_mm))
    as_much = f"its tip is out of place by {error_mm:g} mm, the cutter's own tolerance"
    return f"Standing metal square to the sheet: at {leans_deg:.1f}° off, {as_much}."


def _play(disc: Disc) -> str:
    play_mm = disc.movement.disc.centre_hole_play_mm
    return "; play not stated" if play_mm is None else f"; play not above {play_mm:g} mm"


def count_table_height_mm(disc: Disc) -> float:
    """How high the table of counts is."""
    rows = math.ceil(len(disc.used_tracks) / _CELLS_IN_A_ROW)
    return 6.5 + max(rows, 1) * _CELL_HEIGHT_MM


def counts_written(paper: Paper, area: Area, disc: Disc) -> Area:
    """Writes how many projections each used track has, each with a box to tick, and gives what is left."""
    counts = Counter((disc.track_index + 1).tolist())
    area = headed(paper, area, f"Projections on each track used (track: count), {disc.projection_count} in all")
    if not counts:
        return written(paper, area, "None: a bare blank.", STRONG)
    wide_mm = area.width_mm / _CELLS_IN_A_ROW
    for place, track in enumerate(sorted(counts)):
        row, column = divmod(place, _CELLS_IN_A_ROW)
        left_mm, bottom_mm = area.left_mm + column * wide_mm, area.top_mm - (row + 1) * _CELL_HEIGHT_MM
        cell = Area(left_mm=left_mm, bottom_mm=bottom_mm, width_mm=wide_mm, height_mm=_CELL_HEIGHT_MM)
        paper.box(cell, Pen(width_mm=NARROW_MM, grey_ratio=0.6))
        paper.text((left_mm + 0.6, bottom_mm + 1.1), f"{track}: {counts[track]}", _CELL_FACE)
        tick_box(paper, cell.right_mm - _COUNT_BOX_MM - 0.5, bottom_mm + 0.85, _COUNT_BOX_MM)
    return area.below(math.ceil(len(counts) / _CELLS_IN_A_ROW) * _CELL_HEIGHT_MM)


def remarks_ruled(paper: Paper, area: Area) -> None:
    """Rules what is left of a page for remarks by hand; nothing where there is no room for two lines."""
    if area.height_mm < 3 * _RULED_MM:
        return
    area = headed(paper, area, "Remarks").below(1.0)
    while area.height_mm >= _RULED_MM:
        area = area.below(_RULED_MM)
        paper.line([(area.left_mm, area.top_mm), (area.right_mm, area.top_mm)], Pen(width_mm=HAIR_MM, grey_ratio=0.5))
