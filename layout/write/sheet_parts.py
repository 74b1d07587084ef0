"""parts.csv: every disc of a sheet job, sheet by sheet in cutting order."""

import csv
import io

from layout.sheets.plan import SheetPlan
from layout.write.numbers import number as plain

COLUMNS = ("sheet", "stock", "lot", "sequence", "disc", "number", "x_mm", "y_mm", "diameter_mm")


def write_parts(plan: SheetPlan) -> bytes:
    r"""The part list as CSV (RFC 4180: a header line, lines end in \r\n), ASCII.

    `sequence` is the place in the cutting order of the sheet, `number` counts the discs of one kind over all
    sheets, both from 1. Coordinates are those of the sheet's drawing. A plan without discs gives the
    header alone.

    Args:
        plan: The plan.
    """
    text = io.StringIO(newline="")
    rows = csv.writer(text, lineterminator="\r\n")
    rows.writerow(COLUMNS)
    for place, sheet in enumerate(plan.sheets, start=1):
        on_sheet = zip(
            sheet.kind.tolist(),
            sheet.centres_mm.tolist(),
            sheet.radius_mm.tolist(),
            sheet.number.tolist(),
            strict=True,
        )
        for sequence, (kind, (x_mm, y_mm), radius_mm, count) in enumerate(on_sheet, start=1):
            where = (plain(x_mm), plain(y_mm), plain(2 * radius_mm))
            rows.writerow([place, sheet.stock, sheet.lot, sequence, plan.kinds[kind].id, count, *where])
    return text.getvalue().encode("ascii")
