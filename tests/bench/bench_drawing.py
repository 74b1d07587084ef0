"""Writing both DXF drawings, beside the same drawings made entity by entity with ezdxf's own API.

Both sides start from a disc that is planned. First both files are read by ezdxf and compared: the same entities on the
same layers in the same order, each number the same to a millionth of a millimetre. Processor time, turn and turn about,
medians.
"""

import gc
import sys
import time
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from statistics import median

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.cut.plan import Drawing
from layout.documents import Cutter, Settings, shipped_cutter
from layout.walk import lay_out
from layout.write import write_dxf
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.plain_drawing import apart_mm, plain_drawing, what_is_drawn
from tests.bench.opponents.table import say, say_table, told
from tests.bench.opponents.walk_stages import planned

CUTTERS = (shipped_cutter("fibre-laser"), shipped_cutter("turn-press"))
SIZES = (300, 2_000)
RUNS = 9
JUDGED = 2_000
LEAST_TIMES = 8.0
SAME_MM = 1e-6

Writer = Callable[[Drawing, Cutter], bytes]


def took_ms(write: Writer, drawing: Drawing, cutter: Cutter) -> float:
    """Milliseconds of the processor for one file."""
    begin_s = time.process_time()
    write(drawing, cutter)
    return 1000 * (time.process_time() - begin_s)


def compared(drawing: Drawing, cutter: Cutter) -> str:
    """What both files hold, by kind and layer, and how far apart their numbers are; ends all where they differ."""
    ours, plain = what_is_drawn(write_dxf(drawing, cutter)), what_is_drawn(plain_drawing(drawing, cutter))
    apart = apart_mm(ours, plain)
    if apart > SAME_MM:
        sys.exit(f"the two files are {apart:g} mm apart: what they take is not compared")
    counts = Counter(" ".join(each.make[:2]) for each in ours)
    return f"{', '.join(f'{count} {make}' for make, count in counts.items())}; apart at most {apart:.1e} mm"


def main() -> None:
    """Print what the files hold, then a row for each drawing, then the ratios beside the goal."""
    say(__doc__ or "")
    gc.freeze()  # for both sides, as the service does once all is imported
    rows, ratios = [], {}
    for cutter in CUTTERS:
        for count in SIZES:
            plan = planned(lay_out(large_tune(count), large_movement(count), cutter, Settings()))
            for file, drawing in (("disc.dxf", plan.disc), ("record.dxf", plan.record)):
                name = f"{file}, {cutter.id}, {count} notes"
                say(f"{name}: {compared(drawing, cutter)}")
                ours_ms, plain_ms = [], []
                for _ in range(RUNS):
                    plain_ms.append(took_ms(plain_drawing, drawing, cutter))
                    ours_ms.append(took_ms(write_dxf, drawing, cutter))
                times = median(plain_ms) / median(ours_ms)
                rows.append([name, f"{median(plain_ms):.1f}", f"{median(ours_ms):.1f}", f"{times:.1f}"])
                ratios[name] = times, LEAST_TIMES if count == JUDGED else None
    say()
    say_table(["drawing", "entity by entity, ms", "ours, ms", "times faster"], rows)
    for name, (times, goal) in ratios.items():
        told(f"writing {name}: times faster than entity by entity", times, goal, most=False)


if __name__ == "__main__":
    main()
