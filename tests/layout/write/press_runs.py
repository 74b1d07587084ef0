"""Discs for a press, and what a dry run of their programs strikes, beside what their drawings have."""

import io
import math
from functools import cache

import ezdxf.filemanagement
import numpy as np
import pytest
import shapely
from ezdxf.entities.arc import Arc
from ezdxf.entities.circle import Circle
from ezdxf.entities.lwpolyline import LWPolyline
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.cut import plan_cuts
from layout.cut.plan import CutPlan
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from layout.write import write_dxf
from tests.layout.examples import cutter_with
from tests.layout.write.examples import (
    FERNHOLLOW,
    FINGERPRINT,
    MOSSBROOK,
    PRESS,
    SLOTS_ON_A_PRESS,
    TARNLIGHT,
    THREE_LANCES,
    disc_of,
)
from tests.layout.write.press_simulator import DryPress, Strike

# Words are written to 0.0001 mm and 0.0001°: half of both at the rim of the largest disc, 210 mm, and the drawing's own
ROUNDING_MM = 0.5e-4 + 210 * math.radians(0.5e-4) + 1e-6
# as the label side and the star side see them, clockwise and anticlockwise
LABEL_SIDE_PRESS = cutter_with({"drawn_from": "label-side"}, PRESS)
# (track, degrees), with every track from 1 to 17 and places all round
MANY = [(1 + place % 17, (place * 137.508) % 360) for place in range(60)]
DISCS = {
    "three lances": THREE_LANCES,
    "slots": SLOTS_ON_A_PRESS,
    "many lances": disc_of(FERNHOLLOW, PRESS, MANY),
    "many slots": disc_of(TARNLIGHT, PRESS, MANY),
    "a crowd": disc_of(FERNHOLLOW, PRESS, [(1 + 3 * (place % 8), place * 0.7) for place in range(40)]),
    "slots from the label side": disc_of(TARNLIGHT, LABEL_SIDE_PRESS, MANY),
    "lances from the label side": disc_of(MOSSBROOK, LABEL_SIDE_PRESS, [(1, 20.0), (33, 200.0), (67, 270.0)]),
}
every_disc = pytest.mark.parametrize("disc", DISCS.values(), ids=DISCS.keys())


ONLY_LANCES = [tool.model_dump(mode="json") for tool in PRESS.tools if tool.makes != "hole"]


@cache
def planned(disc: Disc, *, title: str = "Example", not_good: str | None = None) -> CutPlan:
    return plan_cuts(disc, title=title, fingerprint=FINGERPRINT, not_good=not_good)


def dry_run(program: bytes, *, backlash_deg: float = 0.0, strike_word: str = "M20") -> list[Strike]:
    return DryPress(strike_word=strike_word, backlash_deg=backlash_deg).run(program)


def struck_mm(strikes: list[Strike], *, actual: bool = False) -> FloatArray:
    """Shape (n, 2). Where on the blank each strike falls: the place at (slide, table angle), which is then under it."""
    angle = np.radians([one.actual_table_deg if actual else one.table_deg for one in strikes])
    slide = np.array([one.slide_mm for one in strikes])
    return np.column_stack([slide * np.cos(angle), slide * np.sin(angle)])


def apart(strikes: list[Strike], disc: Disc) -> tuple[list[Strike], list[Strike]]:
    """The strikes of tools that make holes, and those of tools that make projections."""
    on_holes = [one for one in strikes if disc.cutter.tools[one.tool - 1].makes == "hole"]
    return on_holes, [one for one in strikes if one not in on_holes]


def struck_out(strike: Strike, disc: Disc) -> shapely.Polygon:
    """What a tool with round ends takes out of the blank: it stands square to the slide, its length across."""
    tool = disc.cutter.tools[strike.tool - 1]
    end_mm = min(tool.footprint_length_mm, tool.footprint_width_mm) / 2
    out_mm, along_mm = tool.footprint_width_mm / 2 - end_mm, tool.footprint_length_mm / 2 - end_mm
    line = shapely.LineString([(strike.slide_mm - out_mm, -along_mm), (strike.slide_mm + out_mm, along_mm)])
    footprint = line.buffer(end_mm, quad_segs=200)
    assert isinstance(footprint, shapely.Polygon)
    return affinity.rotate(footprint, strike.table_deg, origin=(0, 0))


def drawn_holes(plan: CutPlan, disc: Disc) -> list[shapely.Polygon]:
    """The outlines on HOLES in disc.dxf, read by ezdxf."""
    document = ezdxf.filemanagement.read(io.StringIO(write_dxf(plan.disc, disc.cutter).decode("ascii")))
    holes: list[BaseGeometry] = []
    for one in document.modelspace().query('*[layer=="HOLES"]'):
        if isinstance(one, Circle):
            holes.append(shapely.Polygon([tuple(at.vec2) for at in one.flattening(1e-5)]))
            continue
        assert isinstance(one, LWPolyline)
        pieces = [
            shapely.LineString([tuple(at.vec2) for at in part.flattening(1e-5)])
            if isinstance(part, Arc)
            else shapely.LineString([tuple(part.dxf.start.vec2), tuple(part.dxf.end.vec2)])
            for part in one.virtual_entities()
        ]
        holes.append(shapely.unary_union([shapely.set_precision(piece, 1e-6) for piece in pieces]).convex_hull)
    return [hole for hole in holes if isinstance(hole, shapely.Polygon)]


def drawn_hits_mm(plan: CutPlan, disc: Disc) -> FloatArray:
    """The points of HITS in disc.dxf, read by ezdxf."""
    document = ezdxf.filemanagement.read(io.StringIO(write_dxf(plan.disc, disc.cutter).decode("ascii")))
    return np.array([point.dxf.location.vec2 for point in document.modelspace().query('POINT[layer=="HITS"]')])
