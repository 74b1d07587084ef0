"""A rim drawn with bridges, joined to the closed line it stands for."""

import math
from dataclasses import replace

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.bridging import gap_mm
from layout.read_back.contour import Contour
from layout.read_back.entities import CutDrawing
from layout.read_back.limits import BLANK_WITHIN_MM


def without_bridges(drawing: CutDrawing, movement: Movement, cutter: Cutter) -> CutDrawing:
    """The drawing with the rim's open lines joined across the bridges of a cutter that leaves some.

    Joined are as many lines as the cutter has bridges, each gap as long as one takes; anything else is left
    as it is, so that it is told as lines that do not close.
    """
    if cutter.bridges is None:
        return drawing
    lines = [contour for contour in drawing.contours if contour.layer == "RIM" and not contour.closed]
    if len(lines) != cutter.bridges.count or any(len(line.points_mm) == 0 for line in lines):
        return drawing
    ahead = sorted((_anticlockwise(line) for line in lines), key=_first_angle_rad)
    gaps_mm = [math.dist(a.points_mm[-1], b.points_mm[0]) for a, b in zip(ahead, [*ahead[1:], ahead[0]], strict=True)]
    if any(abs(gap - gap_mm(cutter, cutter.bridges)) > BLANK_WITHIN_MM for gap in gaps_mm):
        return drawing
    rim_mm = movement.disc.outer_diameter_mm / 2
    bulges = []
    for line, gap in zip(ahead, gaps_mm, strict=True):
        # DXF reference: bulge = tan(included angle/4), of an arc about the centre over the gap as its chord.
        across = math.tan(math.asin(min(gap / (2 * rim_mm), 1.0)) / 2)
        bulges += [*line.bulge_ratio[:-1].tolist(), across]
    joined = Contour(
        layer="RIM",
        points_mm=frozen_floats(np.concatenate([line.points_mm for line in ahead])),
        bulge_ratio=frozen_floats(bulges),
        closed=True,
    )
    others = tuple(contour for contour in drawing.contours if contour.layer != "RIM" or contour.closed)
    return replace(drawing, contours=(*others, joined))


def _anticlockwise(line: Contour) -> Contour:
    """The line so that it runs anticlockwise round the centre, by the area it sweeps."""
    x, y = line.points_mm.T
    if float((x[:-1] * y[1:] - x[1:] * y[:-1]).sum()) >= 0:
        return line
    return Contour(
        layer=line.layer,
        points_mm=frozen_floats(line.points_mm[::-1]),
        bulge_ratio=frozen_floats([*(-line.bulge_ratio[:-1][::-1]), 0.0]),
        closed=False,
    )


def _first_angle_rad(line: Contour) -> float:
    return math.atan2(line.points_mm[0, 1], line.points_mm[0, 0])
