"""What the check of webs takes beside the least that shapely can do for it: one search by distance on polygons made.

The floor is a tree of the polygons, one `query(predicate="dwithin")` at the cutter's least web and `distance` of the
pairs it gives. The check makes the polygons too, weighs what the numbers are worth and words its findings; the second
ratio is that of a disc whose openings another check has made before. Processor time, turn and turn about.
"""

import sys
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from statistics import median

import shapely

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.check.webs import webs_between_openings_hold
from layout.documents import Settings, shipped_cutter
from layout.place.disc import Disc
from layout.walk import lay_out
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.table import say, say_table, told

CUTTER = shipped_cutter("fibre-laser")
SIZES = (500, 2_000, 8_000)
RUNS = 15
MOST_RATIO = 2.0


def floor(disc: Disc) -> None:
    """The bare search, on polygons that are there."""
    cores = disc.openings.cores
    apart_mm = disc.cutter.min_web_mm + 2 * disc.openings.round_mm
    one, two = shapely.STRtree(cores).query(cores, predicate="dwithin", distance=apart_mm)
    shapely.distance(cores[one], cores[two])


def took_ms(work: Callable[[Disc], object], disc: Disc) -> float:
    """Milliseconds of the processor for one run."""
    begin_s = time.process_time()
    work(disc)
    return 1000 * (time.process_time() - begin_s)


def main() -> None:
    """Print a row for each size, then the ratios beside the goal."""
    say(__doc__ or "")
    rows, ratios = [], {}
    for count in SIZES:
        disc = lay_out(large_tune(count), large_movement(count), CUTTER, Settings()).disc
        floors_ms, checks_ms, again_ms = [], [], []
        for _ in range(RUNS):
            floors_ms.append(took_ms(floor, disc))
            fresh = replace(disc)  # with nothing made yet
            checks_ms.append(took_ms(webs_between_openings_hold, fresh))
            again_ms.append(took_ms(webs_between_openings_hold, fresh))
        floor_ms, check_ms, made_ms = median(floors_ms), median(checks_ms), median(again_ms)
        ratios[count] = check_ms / floor_ms
        cells = [f"{floor_ms:.2f}", f"{check_ms:.2f}", f"{ratios[count]:.2f}", f"{made_ms / floor_ms:.2f}"]
        rows.append([str(disc.projection_count), *cells])
    say_table(["projections", "floor ms", "check ms", "ratio", "ratio, openings made before"], rows)
    for count, ratio in ratios.items():
        told(f"check of webs beside the bare search, {count} notes", ratio, MOST_RATIO, most=True)


if __name__ == "__main__":
    main()
