"""Sheet jobs for tests, and a judge of plans that shares no code with what made them."""

import io
import itertools
import json
import math
from typing import Any

import ezdxf
import shapely
from hypothesis import strategies as st

from layout.documents.sheets import SheetJob, Stock, read_sheet_job
from layout.sheets.plan import SheetPlan

WITHIN_MM = 4e-6  # mm; a nanometre of the stage, and what rounding two places to a nanometre may take
Disc = tuple[float, float, float]  # x, y, radius


def job_of(stock: list[dict[str, Any]], discs: list[tuple[float, int]], **more: Any) -> SheetJob:
    """A job without gap and margin unless they are given; discs are diameters and quantities, called d1, d2, …"""
    wanted = [{"id": f"d{n}", "diameter_mm": d, "quantity": count} for n, (d, count) in enumerate(discs, start=1)]
    listed = [{"id": f"s{n}"} | each for n, each in enumerate(stock, start=1)]
    plain = {"format": "discwright-sheets/1", "title": "trial", "gap_mm": 0, "margin_mm": 0}
    return read_sheet_job(json.dumps(plain | {"stock": listed, "discs": wanted} | more))


def sheet(width_mm: float, height_mm: float, **more: Any) -> dict[str, Any]:
    return {"width_mm": width_mm, "height_mm": height_mm} | more


def discs_of_plan(plan: SheetPlan, number: int) -> list[Disc]:
    on = plan.sheets[number - 1]
    return [(x, y, r) for (x, y), r in zip(on.centres_mm.tolist(), on.radius_mm.tolist(), strict=True)]


def discs_of_drawing(dxf: bytes) -> list[Disc]:
    document = ezdxf.read(io.StringIO(dxf.decode("ascii")))
    circles = document.modelspace().query('CIRCLE[layer=="RIM"]')
    return [(c.dxf.center.x, c.dxf.center.y, c.dxf.radius) for c in circles]


def faults_of(discs: list[Disc], stock: Stock, job: SheetJob) -> list[str]:
    """What is wrong with discs on a sheet: written from the document alone, geometry by shapely."""
    margin_mm = job.margin_mm if stock.margin_mm is None else stock.margin_mm
    metal = stock.shape()
    zones = [shapely.box(c.x_mm, c.y_mm, c.x_mm + c.width_mm, c.y_mm + c.height_mm) for c in stock.clamps]
    faults = []
    for place, (x, y, radius_mm) in enumerate(discs):
        centre = shapely.Point(x, y)
        if not metal.contains(centre):
            faults.append(f"disc {place} lies outside")
        if metal.boundary.distance(centre) < radius_mm + margin_mm - WITHIN_MM:
            faults.append(f"disc {place} is too near to the edge")
        if any(zone.distance(centre) < radius_mm - WITHIN_MM for zone in zones):
            faults.append(f"disc {place} is in a clamp zone")
    for (one, (x, y, r)), (other, (u, v, q)) in itertools.combinations(enumerate(discs), 2):
        if shapely.Point(x, y).distance(shapely.Point(u, v)) < r + q + job.gap_mm - WITHIN_MM:
            faults.append(f"discs {one} and {other} are too near to each other")
    return faults


def faults_of_plan(plan: SheetPlan, job: SheetJob) -> list[str]:
    by_id = {stock.id: stock for stock in job.stock}
    return [
        f"sheet {number}: {fault}"
        for number, on in enumerate(plan.sheets, start=1)
        for fault in faults_of(discs_of_plan(plan, number), by_id[on.stock], job)
    ]


_lengths = st.floats(50, 600).map(lambda value: round(value, 3))


@st.composite
def _outlines(draw: st.DrawFn) -> list[tuple[float, float]]:
    """A rectangle with a corner cut out, or a star about a point: convex and not, never crossing itself."""
    if draw(st.booleans()):
        width, height = draw(_lengths), draw(_lengths)
        x, y = draw(st.floats(0.2, 0.8)) * width, draw(st.floats(0.2, 0.8)) * height
        return [(0, 0), (width, 0), (width, y), (x, y), (x, height), (0, height)]
    reaches = draw(st.lists(st.floats(60, 300), min_size=3, max_size=12))
    turns = [2 * math.pi * n / len(reaches) for n in range(len(reaches))]
    return [(r * math.cos(turn), r * math.sin(turn)) for r, turn in zip(reaches, turns, strict=True)]


@st.composite
def jobs(draw: st.DrawFn) -> SheetJob:
    """Up to three sizes on a rectangle, a remnant with or without an opening, with clamp zones anywhere."""
    clamp = st.fixed_dictionaries(
        {
            "x_mm": st.floats(-50, 400),
            "y_mm": st.floats(-50, 400),
            "width_mm": st.floats(1, 150),
            "height_mm": st.floats(1, 150),
        }
    )
    shape: dict[str, Any]
    if draw(st.booleans()):
        width, height = draw(_lengths), draw(_lengths)
        x, y = width * draw(st.floats(0.1, 0.5)), height * draw(st.floats(0.1, 0.5))
        opening = [(x, y), (x + width * 0.3, y), (x + width * 0.2, y + height * 0.3)]
        shape = sheet(width, height, openings_mm=[opening] if draw(st.booleans()) else [])
    else:
        shape = {"outline_mm": draw(_outlines())}
    shape["clamps"] = draw(st.lists(clamp, max_size=3))
    shape["quantity"] = draw(st.integers(1, 2))
    sizes = draw(st.lists(st.tuples(st.floats(25, 320), st.integers(1, 12)), min_size=1, max_size=3))
    return job_of([shape], sizes, gap_mm=draw(st.floats(0, 12)), margin_mm=draw(st.floats(0, 25)))
