"""A process that answers tunes and tells what each took: `python -m tests.fuzz.answering read|walk SECONDS NAME...`.

Of its own, so that what was held before does not count, and so that what never ends can be stopped. NAME is one of
tests/fuzz/slow_tunes.py, SECONDS is what each may take of the processor's time. One line for each tune: JSON of its
name and the fault, or null.
"""

import json
import sys
from dataclasses import asdict, replace

from layout import walk
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.read import read_score
from tests.fuzz.door import fault_of
from tests.fuzz.slow_tunes import LONG_SEARCHES, SLOW_TUNES
from tests.fuzz.tune_door import DOOR


def walked(tune: bytes) -> object:
    """The whole walk with every file, on the movement of most teeth."""
    machines = shipped_movement("mossbrook-67"), shipped_cutter("fibre-laser")
    return walk.files_of(walk.lay_out(tune, *machines, read_settings("{}")), not_good="a test")


def main() -> None:
    """Answer every tune that is named."""
    how, most_cpu_s, *names = sys.argv[1:]
    door = replace(DOOR, answer=walked if how == "walk" else read_score)
    for seed in DOOR.seeds:
        door.answer(seed)  # everything is imported
    made = SLOW_TUNES | LONG_SEARCHES
    for name in names:
        fault = fault_of(door, made[name](), float(most_cpu_s))
        sys.stdout.write(json.dumps([name, fault and asdict(fault)]) + "\n")
        sys.stdout.flush()


if __name__ == "__main__":
    main()
