"""A sheet as a DXF file: its outline to lay it down by, and the rims to cut, in cutting order."""

import numpy as np

from layout.documents.cutter import LAYER_COLOURS
from layout.mechanics.arrays import FloatArray
from layout.sheets.plan import Sheet, SheetPlan
from layout.write.dxf_document import bytes_of, new_document
from layout.write.numbers import rounded

RIM, STOCK, CLAMPS = "RIM", "STOCK", "CLAMPS"
# Colour indices (AutoCAD Color Index of the DXF reference); the last two are none of those of what is cut.
_COLOURS = {RIM: LAYER_COLOURS[RIM], STOCK: 7, CLAMPS: 252}


def write_sheet_dxf(plan: SheetPlan, number: int) -> bytes:
    """One sheet as an R2010 DXF file in millimetres, ASCII, the same bytes every time.

    The rims are circles on the layer RIM, in cutting order. The sheet with its openings stands on STOCK, zones
    kept free on CLAMPS: neither is ever cut, and the head of the file says so. Only layers that occur are there.

    Args:
        plan: The plan.
        number: Which of its sheets, from 1.
    """
    sheet = plan.sheets[number - 1]
    rings = (sheet.piece.outline_mm, *sheet.piece.openings_mm)
    zones = [_around(zone) for zone in sheet.clamps_mm]
    corners = np.concatenate([*rings, *zones])
    document = new_document(rounded(np.array([corners.min(axis=0), corners.max(axis=0)])))
    for layer in (STOCK, *([CLAMPS] if zones else []), RIM):
        document.layers.add(layer, color=_COLOURS[layer])
    space = document.modelspace()
    for layer, outlines in ((STOCK, rings), (CLAMPS, zones)):
        for outline in outlines:
            space.add_lwpolyline(rounded(outline), close=True, dxfattribs={"layer": layer})
    for centre, radius_mm in zip(rounded(sheet.centres_mm), rounded(sheet.radius_mm).tolist(), strict=True):
        space.add_circle(centre, radius_mm, dxfattribs={"layer": RIM})
    return bytes_of(document, _comments(plan, sheet, number))


def _around(zone: FloatArray) -> FloatArray:
    least_x, least_y, greatest_x, greatest_y = zone.tolist()
    return np.array([(least_x, least_y), (greatest_x, least_y), (greatest_x, greatest_y), (least_x, greatest_y)])


def _comments(plan: SheetPlan, sheet: Sheet, number: int) -> tuple[str, ...]:
    lot = f", lot {sheet.lot}" if sheet.lot else ""
    return (
        f"{plan.title}: sheet {number} of {len(plan.sheets)}, from {sheet.stock}{lot}; {len(sheet.kind)} discs; "
        "millimetres, nominal rims without kerf",
        "Cut RIM alone, in the order of the file. STOCK is the sheet's own edge and CLAMPS are zones kept free: "
        "never cut them.",
        f"Cutting begins at the {sheet.cut_from} and goes across the sheet in strips, so what is not cut yet "
        "stays in one piece. Discs that are cut free may tip: keep to the rules of the machine and the shop.",
        f"job {plan.fingerprint}",
    )
