"""From a sheet job to discs on sheets."""

import hashlib
import json
from collections.abc import Iterator, Mapping

import numpy as np
import shapely

from layout.documents.sheets import SheetJob, Stock
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats, frozen_ints
from layout.mechanics.drawn import DrawnDisc
from layout.sheets.cutting_order import cutting_order, held_end
from layout.sheets.drawings import check_drawings, farthest_lead_mm
from layout.sheets.filling import Starts, filled
from layout.sheets.placing import Placed, Wanted
from layout.sheets.plan import DiscKind, Sheet, SheetPlan
from layout.sheets.remnant import piece_of, remnants_of
from layout.sheets.room import Room, room_of
from layout.version import ENGINE_VERSION


def arrange_on_sheets(job: SheetJob, drawn: Mapping[str, DrawnDisc] | None = None) -> SheetPlan:
    """The discs of a job on its stock, sheet after sheet in the order in which the stock is listed.

    On each sheet as much area of discs as is found is placed, of what is still wanted; what fits on no
    sheet is told by the kinds of the plan. Every distance keeps its rule to within two nanometres.

    Args:
        job: What is wanted, and the stock.
        drawn: By the id of the disc, what is cut and marked of it; a disc without one is a plain circle.

    Raises:
        DocumentError: A drawing does not fit the job.
    """
    drawings = drawn or {}
    check_drawings(job, drawings)
    falling = sorted(range(len(job.discs)), key=lambda kind: -job.discs[kind].diameter_mm)
    left = np.array([each.quantity for each in job.discs])
    sheets: list[Sheet] = []
    starts = Starts()
    for stock, copy, room, known in _sheets_of(job, farthest_lead_mm(drawings)):
        kinds = [kind for kind in falling if left[kind]]
        if not kinds:
            break
        asked = _capped(room, job, kinds, left)
        key = (tuple(kinds), tuple(asked.count.tolist()))
        if key not in known:
            known[key] = filled(room, asked, starts)
        placed = known[key]
        if len(placed.size):
            kind = np.array(kinds)[placed.size]
            left -= np.bincount(kind, minlength=len(left))
            sheets.append(_sheet(job, stock, copy, placed, kind))
    return SheetPlan(
        title=job.title,
        fingerprint=sheet_fingerprint(job, drawings),
        gap_mm=job.gap_mm,
        kinds=tuple(
            DiscKind(
                id=each.id,
                diameter_mm=each.diameter_mm,
                wanted_count=each.quantity,
                placed_count=each.quantity - rest,
                drawing=drawings.get(each.id),
            )
            for each, rest in zip(job.discs, left.tolist(), strict=True)
        ),
        sheets=tuple(sheets),
        untouched_count=sum(stock.quantity for stock in job.stock) - len(sheets),
    )


def sheet_fingerprint(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> str:
    """Sixteen hex digits that name this job, its drawings and this engine."""
    parts: dict[str, object] = {"engine": ENGINE_VERSION, "job": job.model_dump(mode="json")}
    if drawings:
        parts["drawings"] = {disc_id: drawn.digest for disc_id, drawn in drawings.items()}
    return hashlib.sha256(json.dumps(parts, sort_keys=True).encode()).hexdigest()[:16]


_Known = dict[tuple[tuple[int, ...], tuple[int, ...]], Placed]


def _sheets_of(job: SheetJob, clamps_mm: float) -> Iterator[tuple[Stock, int, Room, _Known]]:
    """Every sheet of the stock with its room, and what is found out about sheets of its kind."""
    for stock in job.stock:
        room = room_of(stock, job.margin_mm if stock.margin_mm is None else stock.margin_mm, clamps_mm)
        known: _Known = {}
        for copy in range(1, stock.quantity + 1):
            yield stock, copy, room, known


def _capped(room: Room, job: SheetJob, kinds: list[int], left: IntArray) -> Wanted:
    """What is still wanted, no more of each than the sheet has area for, so that like sheets ask alike."""
    radius_mm = np.array([job.discs[kind].diameter_mm / 2 for kind in kinds])
    most = np.floor(room.inside.area / (np.pi * radius_mm**2)).astype(np.int64)
    return Wanted(radius_mm=radius_mm, count=np.minimum(left[kinds], most), gap_mm=job.gap_mm)


def _sheet(job: SheetJob, stock: Stock, copy: int, placed: Placed, kind: IntArray) -> Sheet:
    shape = stock.shape()
    clamps_mm = np.array([(c.x_mm, c.y_mm, c.x_mm + c.width_mm, c.y_mm + c.height_mm) for c in stock.clamps])
    radius_mm = np.array([job.discs[each].diameter_mm / 2 for each in kind])
    extent: FloatArray = np.array(shape.bounds).reshape(2, 2)
    cutting = cutting_order(placed.centres_mm, radius_mm, held_end(extent, clamps_mm))
    centres_mm, kind, radius_mm = placed.centres_mm[cutting.order], kind[cutting.order], radius_mm[cutting.order]
    return Sheet(
        stock=stock.id,
        copy=copy,
        lot=stock.lot,
        piece=piece_of(shapely.geometry.polygon.orient(shape)),
        clamps_mm=frozen_floats(clamps_mm.reshape(-1, 4)),
        centres_mm=frozen_floats(centres_mm),
        kind=frozen_ints(kind),
        radius_mm=frozen_floats(radius_mm),
        used_ratio=float(np.pi * (radius_mm**2).sum() / shape.area),
        travel_mm=cutting.travel_mm,
        cut_from=cutting.begins_at,
        strip_mm=cutting.strip_mm,
        way=placed.way,
        remnants=remnants_of(shape, centres_mm, radius_mm, job.least_remnant_mm),
    )
