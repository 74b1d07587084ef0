"""How the time and memory of the whole walk grow with the disc: 500 to 8,000 projections, as full on every size.

Each size is a process of its own: processor time from the tune's bytes to all files, and the most memory it took above
what importing takes. Time per n·log n is held against the least of the sizes: even growth keeps it.
"""

import json
import math
import resource
import subprocess
import sys
import time
from pathlib import Path
from statistics import median

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import Settings, shipped_cutter
from layout.walk import files_of, lay_out
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.table import say, say_table, told

SIZES = (500, 1_000, 2_000, 4_000, 8_000)
TIMES = 3
KB_PER_MB = 1024
MEMORY_GOAL_MB = 150
# Of n·log n, so that the noise of a machine is no growth.
GROWTH_GOAL = 1.15


def measure(count: int) -> None:
    """In a process of its own: projections, seconds to lay out and to draw, memory before and at its peak."""
    tune, movement, cutter = large_tune(count), large_movement(count), shipped_cutter("fibre-laser")
    files_of(lay_out(large_tune(300), large_movement(300), cutter, Settings()))  # all that is imported late
    before_kb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    laid_s, drawn_s = [], []
    for _ in range(TIMES):
        begun_s = time.process_time()
        laid_out = lay_out(tune, movement, cutter, Settings())
        laid_s.append(time.process_time() - begun_s)
        files_of(laid_out, not_good="measured only")
        drawn_s.append(time.process_time() - begun_s - laid_s[-1])
    peak_kb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    say(json.dumps([laid_out.disc.projection_count, median(laid_s), median(drawn_s), before_kb, peak_kb]))


def main() -> None:
    """Print a row for each size, the exponent of the line through them, and the memory of the largest."""
    say(__doc__ or "")
    rows, whole_s, counts, peak_mb = [], [], [], 0.0
    for size in SIZES:
        child = subprocess.run([sys.executable, __file__, str(size)], capture_output=True, text=True, check=True)
        count, laid_s, drawn_s, before_kb, peak_kb = json.loads(child.stdout)
        counts.append(count)
        whole_s.append(laid_s + drawn_s)
        peak_mb = (peak_kb - before_kb) / KB_PER_MB
        each_us = 1e6 * whole_s[-1] / (count * math.log2(count))
        rows.append([str(count), f"{laid_s:.2f} s", f"{drawn_s:.2f} s", f"{each_us:.1f} µs", f"{peak_mb:.0f} MB"])
    say_table(["projections", "laid out", "all files drawn", "per n·log n", "memory above the start"], rows)
    slope, _ = np.polyfit(np.log(counts), np.log(whole_s), 1)
    even, _ = np.polyfit(np.log(counts), np.log([count * math.log(count) for count in counts]), 1)
    say(f"time grows as projections to the power {slope:.2f}; n·log n would be {even:.2f}")
    told("growth of the walk, 500 to 8,000: exponent, of that of n·log n", slope / even, GROWTH_GOAL, most=True)
    told("memory of the walk at 8,000 above the start, MB", peak_mb, MEMORY_GOAL_MB, most=True)


if __name__ == "__main__":
    if len(sys.argv) > 1:
        measure(int(sys.argv[1]))
    else:
        main()
