"""Drawings of small discs for sheet jobs, and what a library that did not write them reads in them."""

import io
import json
from typing import Any

import ezdxf
from ezdxf.document import Drawing

from layout.cut import plan_cuts
from layout.cut.plan import CutPlan
from layout.documents import Cutter, Movement, Settings
from layout.documents.cutter import read_cutter
from layout.documents.sheets import SheetJob
from layout.sheet_walk import plan_sheets, sheet_files_of
from layout.walk import fingerprint_of
from layout.write import write_dxf
from tests.layout.examples import LASER, PLAIN, disc_of
from tests.layout.sheets.jobs import job_of

FINGERPRINT = "0123456789abcdef"
PLUCKS = [(1, 5.0), (2, 9.0), (3, 10.0), (3, 20.0)]
RIM_MM = PLAIN.disc.outer_diameter_mm  # 240
Entity = tuple[Any, ...]
_DRAWN: dict[tuple[str, tuple[tuple[str, Any], ...]], bytes] = {}


def laser(**changes: Any) -> Cutter:
    """The shipped laser with some fields changed."""
    return read_cutter(json.dumps(LASER.model_dump(mode="json") | changes))


LED_IN = laser(lead_in={"length_mm": 2}, bridges={"count": 3, "width_mm": 0.6})


def disc_dxf(cutter: Cutter = LASER, movement: Movement = PLAIN, **words: Any) -> bytes:
    """The disc.dxf of a disc with four projections, drawn once for each cutter, movement and words."""
    drawn = fingerprint_of(b"", movement, cutter, Settings()), tuple(sorted(words.items()))
    if drawn not in _DRAWN:
        _DRAWN[drawn] = write_dxf(_plan(cutter, movement, words).disc, cutter)
    return _DRAWN[drawn]


def record_dxf() -> bytes:
    """The record.dxf of the same disc."""
    return write_dxf(_plan(LASER, PLAIN, {}).record, LASER)


def _plan(cutter: Cutter, movement: Movement, words: dict[str, Any]) -> CutPlan:
    asked = {"title": "Spring dance", "fingerprint": FINGERPRINT, "not_good": None} | words
    return plan_cuts(disc_of(movement, PLUCKS, cutter), **asked)


def document_of(dxf: bytes) -> Drawing:
    return ezdxf.read(io.StringIO(dxf.decode("ascii")))


def entities_of(dxf: bytes, x_mm: float = 0.0, y_mm: float = 0.0) -> list[Entity]:
    """Layer and shape of every entity in file order, as ezdxf reads it, moved."""
    found: list[Entity] = []
    for entity in document_of(dxf).modelspace():
        layer = entity.dxf.layer
        match entity.dxftype():
            case "CIRCLE":
                centre = entity.dxf.center
                found.append((layer, "circle", [(centre.x + x_mm, centre.y + y_mm, entity.dxf.radius)]))
            case "ARC":
                centre, ends = entity.dxf.center, (entity.dxf.start_angle, entity.dxf.end_angle)
                found.append((layer, "arc", [(centre.x + x_mm, centre.y + y_mm, entity.dxf.radius), ends]))
            case "LINE":
                ends = [(at.x + x_mm, at.y + y_mm, 0.0) for at in (entity.dxf.start, entity.dxf.end)]
                found.append((layer, "open", ends))
            case "POINT":
                place = entity.dxf.location
                found.append((layer, "point", [(place.x + x_mm, place.y + y_mm, 0.0)]))
            case "LWPOLYLINE":
                vertices = [(x + x_mm, y + y_mm, bulge) for x, y, bulge in entity.get_points("xyb")]
                found.append((layer, "closed" if entity.closed else "open", vertices))
            case "POLYLINE":
                vertices = [
                    (v.dxf.location.x + x_mm, v.dxf.location.y + y_mm, v.dxf.get("bulge", 0.0)) for v in entity.vertices
                ]
                found.append((layer, "closed" if entity.is_closed else "open", vertices))
            case kind:
                raise AssertionError(kind)
    return found


def job_for(quantity: int = 3, *, stock: list[dict[str, Any]] | None = None, **more: Any) -> SheetJob:
    """A job for discs called d1, of the plain movement; two lie on a sheet."""
    plain = {"gap_mm": 6, "margin_mm": 5, "title": "Spring batch", "labels": False}
    sheets = stock or [{"width_mm": 530, "height_mm": 260, "quantity": 2}]
    return job_of(sheets, [(RIM_MM, quantity)], **plain | more)


def sheet_files(job: SheetJob, **drawings: bytes) -> dict[str, bytes]:
    return sheet_files_of(plan_sheets(job, drawings))
