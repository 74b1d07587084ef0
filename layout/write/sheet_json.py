"""sheets.json: everything about the sheets of a job, for programs. Fields may be added, never renamed."""

from typing import Any

from layout.check.finding import Code, Level
from layout.sheets.plan import DiscKind, Piece, Sheet, SheetPlan
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines
from layout.write.numbers import rounded

FORMAT = "discwright-sheet-plan/1"
_PERCENT = 100
_DECIMALS_PERCENT, _DECIMALS_AREA = 2, 1
Record = dict[str, Any]  # JSON: what it holds is said by sheets_record


def write_sheets_json(plan: SheetPlan) -> bytes:
    """The plan as UTF-8 JSON, one sheet to a line.

    Args:
        plan: The plan.
    """
    return json_lines(sheets_record(plan))


def sheets_record(plan: SheetPlan) -> Record:
    """The plan in plain dictionaries and lists, in the order it is written.

    Discs stand in cutting order. The outline and openings of a remnant can stand in the stock of another job as
    they are. The `number` of a disc counts those of its kind over all sheets; its `label` is what is lettered beside
    it, null where nothing is or no letters find room; its `diameter_mm` is what it takes up. `drawing` is what the
    head of a disc's drawing tells, "" where it does not; null for a plain circle. Lengths are in millimetres to a
    nanometre.

    Args:
        plan: The plan.
    """
    return {
        "format": FORMAT,
        "title": plan.title,
        "fingerprint": plan.fingerprint,
        "engine_version": ENGINE_VERSION,
        "complete": plan.complete,
        "gap_mm": plan.gap_mm,
        "discs": [
            {
                "disc": kind.id,
                "diameter_mm": kind.diameter_mm,
                "wanted": kind.wanted_count,
                "placed": kind.placed_count,
                "not_placed": kind.missing_count,
                "drawing": None
                if kind.drawing is None
                else {"title": kind.drawing.title, "fingerprint": kind.drawing.fingerprint},
            }
            for kind in plan.kinds
        ],
        "sheets": [_sheet(plan, sheet, number) for number, sheet in enumerate(plan.sheets, start=1)],
        "untouched_sheets": plan.untouched_count,
        "findings": [_not_placed(plan, kind) for kind in plan.kinds if kind.missing_count],
    }


def _sheet(plan: SheetPlan, sheet: Sheet, number: int) -> Record:
    on_sheet = zip(
        sheet.kind.tolist(),
        rounded(sheet.centres_mm).tolist(),
        rounded(2 * sheet.radius_mm).tolist(),
        sheet.number.tolist(),
        sheet.labels,
        strict=True,
    )
    return {
        "sheet": number,
        "drawing": drawing_name(number),
        "stock": sheet.stock,
        "copy": sheet.copy,
        "lot": sheet.lot,
        **_piece(sheet.piece),
        "clamps_mm": rounded(sheet.clamps_mm).tolist(),
        "used_percent": round(_PERCENT * sheet.used_ratio, _DECIMALS_PERCENT),
        "found_by": sheet.way,
        "cut_from": sheet.cut_from,
        "strip_mm": sheet.strip_mm,
        "travel_mm": round(sheet.travel_mm, _DECIMALS_AREA),
        "discs": [
            {
                "disc": plan.kinds[kind].id,
                "x_mm": x_mm,
                "y_mm": y_mm,
                "diameter_mm": diameter_mm,
                "number": number_of_kind,
                "label": None if label is None else label.text,
            }
            for kind, (x_mm, y_mm), diameter_mm, number_of_kind, label in on_sheet
        ],
        "remnants": [_piece(remnant) for remnant in sheet.remnants],
    }


def drawing_name(number: int) -> str:
    """The file name of the drawing of a sheet, counted from 1."""
    return f"sheet-{number}.dxf"


def _piece(piece: Piece) -> Record:
    return {
        "outline_mm": rounded(piece.outline_mm).tolist(),
        "openings_mm": [rounded(ring).tolist() for ring in piece.openings_mm],
        "area_mm2": round(piece.area_mm2, _DECIMALS_AREA),
    }


def _not_placed(plan: SheetPlan, kind: DiscKind) -> Record:
    """What could not be placed of one kind, as every finding is written."""
    missing = f"{kind.missing_count} of {kind.wanted_count} discs {kind.id} ({kind.diameter_mm:g} mm)"
    return {
        "code": Code.DISC_NOT_PLACED.value,
        "level": Level.ERROR.value,
        "message": f"{missing} fit on no sheet; {len(plan.sheets)} sheets are used, {plan.untouched_count} are left.",
        "measured": kind.placed_count,
        "limit": kind.wanted_count,
        "unit": "",
        "at": {"disc": kind.id},
        "remedy": "Add stock that is at least as wide as the disc and twice the margin, or ask for a smaller gap or "
        "margin."
        if not kind.placed_count
        else "Add stock or raise its quantity, or ask for a smaller gap or margin.",
    }
