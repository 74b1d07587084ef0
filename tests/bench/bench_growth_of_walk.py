"""How time and memory of the whole walk, from the tune to every file, grow with the projections.

Each size in a process of its own. Times are processor time, the median of RUNS after one run for nothing. What would
grow as n·log n has the ratio of logarithms 1 in the row "against n·log n"; the exponent is the slope of the line
through all sizes in logarithms. A line through all says little of its end: the last doubling stands beside it.
"""

import json
import math
import subprocess
import sys
import time
import tracemalloc
from collections.abc import Sequence
from pathlib import Path
from statistics import median

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import shipped_cutter
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.table import say, say_table, told
from tests.bench.opponents.walk_stages import Job, stages_of, whole_walk

CUTTER_ID = "fibre-laser"
SIZES = (500, 1_000, 2_000, 4_000, 8_000)
RUNS = 3
MOST_MB = 150.0  # of the whole process, at the largest size
MB = 1024 * 1024
KB_PER_MB = 1024


def peak_mb() -> float:
    """The most memory this process had at once: of itself alone, where ru_maxrss begins with that of its parent."""
    lines = Path("/proc/self/status").read_text(encoding="ascii").splitlines()
    return int(next(line for line in lines if line.startswith("VmHWM:")).split()[1]) / KB_PER_MB


def median_ms(job: Job) -> float:
    """Processor time of a job in milliseconds."""
    took_ms = []
    for _ in range(RUNS + 1):
        begun_s = time.process_time()
        job()
        took_ms.append(1000 * (time.process_time() - begun_s))
    return median(took_ms[1:])


def time_walk(count: int) -> dict[str, float]:
    """In a process of its own: milliseconds of the walk, and of each of its stages."""
    tune, movement, cutter = large_tune(count), large_movement(count), shipped_cutter(CUTTER_ID)
    whole_ms = median_ms(lambda: whole_walk(tune, movement, cutter))
    stages_ms = {name: median_ms(job) for name, job in stages_of(tune, movement, cutter).items()}
    return {"the whole walk": whole_ms, "all stages together": sum(stages_ms.values()), **stages_ms}


def weigh_walk(count: int) -> dict[str, float]:
    """In a process of its own: its memory when all is imported, and at most; one walk, its files kept."""
    before_mb = peak_mb()
    tune, movement, cutter = large_tune(count), large_movement(count), shipped_cutter(CUTTER_ID)
    files = whole_walk(tune, movement, cutter)
    return {
        "imported": before_mb,
        "peak of the process": peak_mb(),
        "files": sum(map(len, files.values())) / MB,
    }


def trace_walk(count: int) -> dict[str, float]:
    """In a process of its own: what Python and numpy had allocated at most, from the tune to the files."""
    tune, movement, cutter = large_tune(count), large_movement(count), shipped_cutter(CUTTER_ID)
    tracemalloc.start()
    whole_walk(tune, movement, cutter)
    return {"peak traced": tracemalloc.get_traced_memory()[1] / MB}


MEASURES = {"time": time_walk, "weigh": weigh_walk, "trace": trace_walk}


def measured_aside(measure: str, count: int) -> dict[str, float]:
    """What a measure gives in a new process."""
    command = [sys.executable, __file__, measure, str(count)]
    child = subprocess.run(command, capture_output=True, text=True, check=True)
    figures: dict[str, float] = json.loads(child.stdout)
    return figures


def exponent(sizes: Sequence[int], figures: Sequence[float]) -> float:
    """The power of the size by which figures grow: the slope of the line through them in logarithms."""
    return float(np.polyfit(np.log(sizes), np.log(figures), 1)[0])


def against_n_log_n(sizes: Sequence[int], figures: Sequence[float]) -> float:
    """The exponent of figures as a part of that which n·log n has over the same sizes: 1 where they grow alike."""
    return exponent(sizes, figures) / exponent(sizes, [count * math.log(count) for count in sizes])


def say_times() -> None:
    """A row for each stage, a column for each size."""
    by_size = [measured_aside("time", count) for count in SIZES]
    rows = []
    for name in by_size[0]:
        took_ms = [figures[name] for figures in by_size]
        rows.append(
            [
                name,
                *(f"{each:.1f}" for each in took_ms),
                f"{exponent(SIZES, took_ms):.2f}",
                f"{against_n_log_n(SIZES, took_ms):.2f}",
                f"{against_n_log_n(SIZES[-2:], took_ms[-2:]):.2f}",
            ]
        )
    sizes = [f"{count} notes" for count in SIZES]
    say_table(["milliseconds", *sizes, "exponent", "against n·log n", "last doubling"], rows)
    whole_ms = [figures["the whole walk"] for figures in by_size]
    say(f"n·log n itself: {exponent(SIZES, [count * math.log(count) for count in SIZES]):.2f}")
    told("growth of the whole walk, 500 to 8,000: n·log n is 1", against_n_log_n(SIZES, whole_ms), 1.0, most=True)
    last = against_n_log_n(SIZES[-2:], whole_ms[-2:])
    told("growth of the whole walk, 4,000 to 8,000: n·log n is 1", last, 1.0, most=True)


def say_memory() -> None:
    """A row for each size; the largest beside its goal."""
    rows, peak = [], 0.0
    for count in SIZES:
        figures = measured_aside("weigh", count) | measured_aside("trace", count)
        peak = figures["peak of the process"]
        rows.append(
            [
                str(count),
                f"{figures['imported']:.0f} MB",
                f"{peak:.0f} MB",
                f"{peak - figures['imported']:.0f} MB",
                f"{figures['peak traced']:.0f} MB",
                f"{figures['files']:.1f} MB",
            ]
        )
    say_table(["notes", "all imported", "peak of the process", "more than that", "of it traced", "files"], rows)
    told(f"memory of the process at its peak, {SIZES[-1]} notes, MB", peak, MOST_MB, most=True)


def main() -> None:
    """Print the tables."""
    say(__doc__ or "")
    say_times()
    say_memory()


if __name__ == "__main__":
    if len(sys.argv) > 1:
        say(json.dumps(MEASURES[sys.argv[1]](int(sys.argv[2]))))
    else:
        main()
