"""How long the best arrangement of every held piece takes, how much of it is proved, and the worst gap.

Processor time of the whole stage, a row for each way of asking and one for all together.
"""

import sys
import time
from pathlib import Path
from statistics import median
from typing import NamedTuple

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange import arrange
from layout.arrange.arrangement import Worth
from layout.documents import Movement, Settings, shipped_movement
from tests.bench.opponents.corpus import CUTTER, MOVEMENT_IDS, movement_with, score_of, settings_with
from tests.bench.opponents.table import say, say_table, told
from tests.outside.pieces import ALL_PIECE_NAMES
from tests.outside.posed import spacing_on

SOON_S = 10.0
STOPPED_AFTER_S = 10.0  # the search; so that the whole table is a matter of minutes
WEAK_NMM = 200.0  # thick chords load mossbrook-67 with up to 370 N mm where nothing limits them


class Run(NamedTuple):
    """One piece on one movement."""

    name: str
    movement_id: str
    notes: int
    took_s: float
    worth: Worth

    @property
    def in_time(self) -> bool:
        return self.worth.proved and self.took_s <= SOON_S

    @property
    def gap(self) -> float:
        return (self.worth.bound - self.worth.kept) / max(self.worth.bound, 1)


def run(name: str, movement: Movement, settings: Settings) -> Run:
    score, spacing = score_of(name), spacing_on(movement, CUTTER)
    begin_s = time.process_time()
    worth = arrange(score, movement, settings, spacing, time.perf_counter).worth
    return Run(name, movement.id, score.note_count, time.process_time() - begin_s, worth)


def row_of(title: str, runs: list[Run]) -> list[str]:
    took_s = [one.took_s for one in runs]
    return [
        title,
        str(len(runs)),
        f"{sum(one.worth.proved for one in runs) / len(runs):.1%}",
        f"{sum(one.in_time for one in runs) / len(runs):.1%}",
        f"{median(took_s):.3f} s",
        f"{np.quantile(took_s, 0.95):.2f} s",
        f"{max(took_s):.2f} s",
        f"{max(one.gap for one in runs):.2%}",
    ]


def main() -> None:
    """Print one row for each way of asking and one for all, then the two slowest of each, then the figures of all."""
    shipped = [shipped_movement(movement_id) for movement_id in MOVEMENT_IDS]
    weak = [movement_with("mossbrook-67", {"drive": {"torque_limit_nmm": WEAK_NMM}})]
    stop = {"time_limit_s": STOPPED_AFTER_S}
    ways = [
        ("as shipped, octave moves none", shipped, settings_with(**stop)),
        ("as shipped, octave moves outer", shipped, settings_with(octave_moves="outer", **stop)),
        (f"mossbrook-67 at {WEAK_NMM:g} N mm, none", weak, settings_with(**stop)),
        (f"mossbrook-67 at {WEAK_NMM:g} N mm, outer", weak, settings_with(octave_moves="outer", **stop)),
    ]
    say(f"{len(ALL_PIECE_NAMES)} public-domain pieces, fitting speed, best of 25 transpositions, load limit kept,")
    say(f"stopped after {STOPPED_AFTER_S:g} s")
    rows, slowest, everything = [], [], []
    for title, movements, settings in ways:
        runs = [run(name, movement, settings) for movement in movements for name in ALL_PIECE_NAMES]
        rows.append(row_of(title, runs))
        everything += runs
        for one in sorted(runs, key=lambda one: -one.took_s)[:2]:
            proof = "proved" if one.worth.proved else f"{one.gap:.2%} below its bound"
            slowest.append([title, one.name, one.movement_id, str(one.notes), f"{one.took_s:.2f} s", proof])
    rows.append(row_of("all of them", everything))
    say_table(["pairs", "count", "proved", f"proved in {SOON_S:g} s", "p50", "p95", "worst", "worst gap"], rows)
    say_table(["the two slowest of", "piece", "movement", "notes", "time", "worth"], slowest)
    tell(everything)


def tell(runs: list[Run]) -> None:
    """The figures of the whole corpus, for the list at the end."""
    took_s = [one.took_s for one in runs]
    of_all = f"arranging {len(runs)} pairs of piece and movement"
    told(f"{of_all}: proved, %", 100 * sum(one.worth.proved for one in runs) / len(runs), None, most=False)
    told(f"{of_all}: p50, ms", 1000 * median(took_s), None, most=True)
    told(f"{of_all}: p95, ms", 1000 * float(np.quantile(took_s, 0.95)), None, most=True)
    told(f"{of_all}: worst, ms", 1000 * max(took_s), None, most=True)


if __name__ == "__main__":
    main()
