"""How many times faster than it plays a disc of 1,000 plucks is made into sound, on one core, in how much memory."""

import io
import os
import sys
import time
import tracemalloc
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import Movement
from layout.documents.shipped import shipped_movement, shipped_movement_ids
from layout.hear import Asked, Performance, hear
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.damping import damper_touch_s
from layout.mechanics.turning import turning_of
from layout.play.plucks import Plucks
from layout.write.wav import write_wav
from tests.bench.opponents.table import say, say_table

PLUCKS = 1000
GOAL = 50  # times real time


class _Nowhere(io.RawIOBase):
    """A file that keeps nothing, so that memory is the mixer's alone."""

    def writable(self) -> bool:
        return True

    def write(self, content: object) -> int:
        return len(content)  # type: ignore[arg-type]  # bytes


def crowded(movement: Movement, pluck_count: int) -> Performance:
    """Plucks by chance over the whole turn and comb, the same each time."""
    turning, chance = turning_of(movement), np.random.default_rng(7)
    track_index = frozen_ints(chance.integers(0, len(movement.tracks), pluck_count))
    sounds_s = frozen_floats(np.sort(chance.uniform(0, turning.free_turn_s, pluck_count)))
    touched_s = damper_touch_s(movement, turning)[track_index]
    plucks = Plucks(track_index=track_index, sounds_s=sounds_s, silent_from_s=frozen_floats(sounds_s - touched_s))
    return Performance(
        title="crowded",
        plucks=plucks,
        written_key=frozen_ints(chance.integers(36, 100, pluck_count)),
        written_s=sounds_s,
    )


def main() -> None:
    threads = os.environ.get("OPENBLAS_NUM_THREADS", "as many as there are cores")
    say(f"{PLUCKS} plucks, 24 bits, both passes; processor time of one process; threads of the matrices: {threads}")
    rows = []
    for movement in map(shipped_movement, shipped_movement_ids()):
        performance = crowded(movement, PLUCKS)
        for asked in (Asked(), Asked(of="written")):
            begun = time.process_time()
            hearing = hear(performance, movement, asked)
            write_wav(hearing, _Nowhere(), bits=24)
            times = hearing.length_s / (time.process_time() - begun)
            tracemalloc.start()
            write_wav(hearing, _Nowhere(), bits=24)
            peak_mib = tracemalloc.get_traced_memory()[1] / 2**20
            tracemalloc.stop()
            told = "met" if times >= GOAL else "MISSED"
            rows.append((movement.id, asked.of, f"{hearing.length_s:.1f}", f"{times:.0f}", told, f"{peak_mib:.1f}"))
    say_table(("movement", "heard", "sound s", "times real time", f"goal of {GOAL}", "peak MiB"), rows)


if __name__ == "__main__":
    main()
