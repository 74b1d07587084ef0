"""How large n circles in a square can be before one is left out, and how long sheets take."""

import json
import math
import sys
import time
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents.sheets import read_sheet_job
from layout.sheets import SheetPlan, arrange_on_sheets
from tests.bench.opponents.table import say, say_table
from tests.outside.test_circle_packing import LARGEST_RADIUS

SIDE_MM = 1000.0
HALVINGS = 9  # of the last tenth of the radius: to a fifth of a thousandth of it
LEAST_SHARE = 0.9
JOBS: dict[str, dict[str, Any]] = {
    "1250 × 2500, discs of 237": {
        "stock": [{"id": "full", "width_mm": 1250, "height_mm": 2500}],
        "discs": [{"id": "a", "diameter_mm": 237, "quantity": 100}],
    },
    "1250 × 2500, discs of 120": {
        "stock": [{"id": "full", "width_mm": 1250, "height_mm": 2500}],
        "discs": [{"id": "a", "diameter_mm": 120, "quantity": 300}],
    },
    "1250 × 2500 with clamps, 170 and 90": {
        "stock": [
            {
                "id": "full",
                "width_mm": 1250,
                "height_mm": 2500,
                "clamps": [{"x_mm": x, "y_mm": 0, "width_mm": 100, "height_mm": 50} for x in (0, 1150)],
            }
        ],
        "discs": [
            {"id": "a", "diameter_mm": 170, "quantity": 60},
            {"id": "b", "diameter_mm": 90, "quantity": 300},
        ],
    },
    "two remnants, 237 and 120": {
        "stock": [
            {"id": "el", "outline_mm": [[0, 0], [900, 0], [900, 300], [400, 300], [400, 700], [0, 700]]},
            {"id": "wedge", "outline_mm": [[0, 0], [700, 0], [0, 600]]},
        ],
        "discs": [
            {"id": "a", "diameter_mm": 237, "quantity": 6},
            {"id": "b", "diameter_mm": 120, "quantity": 20},
        ],
    },
    "1250 × 2500, 2000 discs of 37": {
        "stock": [{"id": "full", "width_mm": 1250, "height_mm": 2500, "quantity": 2}],
        "discs": [{"id": "a", "diameter_mm": 37, "quantity": 2000}],
    },
}


def planned(**fields: Any) -> SheetPlan:
    """The plan of a job with these fields."""
    plain = {"format": "discwright-sheets/1", "title": "bench", "gap_mm": 5, "margin_mm": 10}
    return arrange_on_sheets(read_sheet_job(json.dumps(plain | fields)))


def all_fit(count: int, radius: float) -> bool:
    """Whether so many circles of a radius are all placed in the unit square."""
    stock = [{"id": "square", "width_mm": SIDE_MM, "height_mm": SIDE_MM}]
    discs = [{"id": "a", "diameter_mm": 2 * SIDE_MM * radius, "quantity": count}]
    return planned(gap_mm=0, margin_mm=0, stock=stock, discs=discs).complete


def largest_radius(count: int) -> float:
    """The largest radius of the last tenth at which all are placed, by halving; 0 where none is."""
    low, high = LEAST_SHARE * LARGEST_RADIUS[count], 1.0001 * LARGEST_RADIUS[count]
    if not all_fit(count, low):
        return 0.0
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        low, high = (middle, high) if all_fit(count, middle) else (low, middle)
    return low


def main() -> None:
    """Print the radii reached beside the best that are known, then the jobs with their times."""
    rows = []
    for count, known in LARGEST_RADIUS.items():
        start_s = time.process_time()
        found = largest_radius(count)
        took_s = time.process_time() - start_s
        rows.append(
            [str(count), f"{known:.6f}", f"{found:.6f}", f"{100 * (1 - found / known):.2f} %", f"{took_s:.1f} s"]
        )
    say("equal circles in the unit square: the largest radius at which all are placed, by halving")
    say_table(["n", "best known", "placed", "short by", f"time of {HALVINGS + 1} jobs"], rows)
    rows = []
    for name, fields in JOBS.items():
        start_s = time.process_time()
        plan = planned(**fields)
        took_s = time.process_time() - start_s
        share = sum(math.pi * float((on.radius_mm**2).sum()) for on in plan.sheets)
        share /= sum(on.piece.area_mm2 for on in plan.sheets)
        placed = " + ".join(f"{kind.placed_count} of {kind.wanted_count}" for kind in plan.kinds)
        ways = ", ".join(dict.fromkeys(on.way for on in plan.sheets))
        rows.append([name, placed, str(len(plan.sheets)), f"{100 * share:.1f} %", ways, f"{took_s:.2f} s"])
    say("jobs with gaps of 5 mm and margins of 10 mm")
    say_table(["job", "placed", "sheets", "area used", "found by", "processor time"], rows)


if __name__ == "__main__":
    main()
