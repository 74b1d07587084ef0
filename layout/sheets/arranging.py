"""From a sheet job to discs on sheets."""

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
import shapely

from layout.documents.sheets import SheetJob, Stock
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats, frozen_ints
from layout.mechanics.drawn import DrawnDisc
from layout.sheets.cutting_order import cutting_order, held_end
from layout.sheets.drawings import check_drawings, diameters_mm, farthest_lead_mm
from layout.sheets.filling import Starts, filled
from layout.sheets.lettering import labels_beside
from layout.sheets.placing import Placed, Wanted
from layout.sheets.plan import DiscKind, Label, Sheet, SheetPlan
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
    taken_mm = diameters_mm(job, drawings)
    falling = sorted(range(len(job.discs)), key=lambda kind: -taken_mm[kind])
    wanted = np.array([each.quantity for each in job.discs])
    left, leads_mm = wanted, farthest_lead_mm(drawings)
    sheets: list[Sheet] = []
    starts = Starts()
    for stock, copy, room, known in _sheets_of(job, leads_mm):
        kinds = [kind for kind in falling if left[kind]]
        if not kinds:
            break
        radius_mm = np.array([taken_mm[kind] / 2 for kind in kinds])
        asked = _capped(room, radius_mm, left[kinds], job.gap_mm)
        key = (tuple(kinds), tuple(asked.count.tolist()))
        if key not in known:
            known[key] = filled(room, asked, starts)
        placed = known[key]
        if len(placed.size):
            kind = np.array(kinds)[placed.size]
            laid = _Laid(
                centres_mm=placed.centres_mm,
                kind=kind,
                radius_mm=radius_mm[placed.size],
                before=wanted - left,
                way=placed.way,
            )
            sheets.append(_sheet(job, stock, copy, laid, leads_mm))
            left = left - np.bincount(kind, minlength=len(left))
    return SheetPlan(
        title=job.title,
        fingerprint=sheet_fingerprint(job, drawings),
        gap_mm=job.gap_mm,
        layers=job.layers,
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


def _capped(room: Room, radius_mm: FloatArray, left: IntArray, gap_mm: float) -> Wanted:
    """What is still wanted, no more of each than the sheet has area for, so that like sheets ask alike."""
    most = np.floor(room.inside.area / (np.pi * radius_mm**2)).astype(np.int64)
    return Wanted(radius_mm=radius_mm, count=np.minimum(left, most), gap_mm=gap_mm)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Laid:
    """Discs on one sheet: their places, kinds and radii, how many of each kind lie on sheets before, and how found."""

    centres_mm: FloatArray
    kind: IntArray
    radius_mm: FloatArray
    before: IntArray
    way: str


def _sheet(job: SheetJob, stock: Stock, copy: int, laid: _Laid, leads_mm: float) -> Sheet:
    shape = stock.shape()
    clamps_mm = np.array([(c.x_mm, c.y_mm, c.x_mm + c.width_mm, c.y_mm + c.height_mm) for c in stock.clamps])
    extent: FloatArray = np.array(shape.bounds).reshape(2, 2)
    cutting = cutting_order(laid.centres_mm, laid.radius_mm, held_end(extent, clamps_mm))
    order = cutting.order
    centres_mm, kind, radius_mm = laid.centres_mm[order], laid.kind[order], laid.radius_mm[order]
    number = laid.before[kind] + _counted(kind)
    labels: tuple[Label | None, ...] = (None,) * len(kind)
    if job.labels:
        texts = [
            f"{job.discs[one].id} {count}".upper() for one, count in zip(kind.tolist(), number.tolist(), strict=True)
        ]
        zones = [shapely.box(*zone) for zone in clamps_mm.tolist()]
        labels = labels_beside(texts, centres_mm, radius_mm + leads_mm, shape.difference(shapely.union_all(zones)))
    return Sheet(
        stock=stock.id,
        copy=copy,
        lot=stock.lot,
        piece=piece_of(shapely.geometry.polygon.orient(shape)),
        clamps_mm=frozen_floats(clamps_mm.reshape(-1, 4)),
        centres_mm=frozen_floats(centres_mm),
        kind=frozen_ints(kind),
        radius_mm=frozen_floats(radius_mm),
        number=frozen_ints(number),
        labels=labels,
        used_ratio=float(np.pi * (radius_mm**2).sum() / shape.area),
        travel_mm=cutting.travel_mm,
        cut_from=cutting.begins_at,
        strip_mm=cutting.strip_mm,
        way=laid.way,
        remnants=remnants_of(shape, centres_mm, radius_mm, job.least_remnant_mm),
    )


def _counted(kind: IntArray) -> IntArray:
    """Shape (n,). The how-manieth of its kind each is, from 1."""
    return np.array([int((kind[: place + 1] == one).sum()) for place, one in enumerate(kind.tolist())], dtype=np.int64)
