"""What a laser travels between its cuts, on the demo discs, full ones and dense ones: against an order and a long run.

By track is the order by track, then by angle. 2-opt is a long run by tests/bench/opponents, once under the program's
rule of heat and once free of it: the difference is what the rule costs. On a full disc no web is thinner than the
cutter's least; on a dense one openings lie anywhere, and only the time is worth reading.
"""

import sys
import time
from pathlib import Path

import numpy as np
import shapely

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.cut.path import cutting_order, hot_pairs
from layout.documents import Settings, shipped_cutter, shipped_movement
from layout.mechanics.arrays import FloatArray, frozen_floats, frozen_ints
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import core_geometries
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc
from layout.walk import lay_out
from tests.bench.opponents.long_two_opt import long_two_opt_mm
from tests.bench.opponents.table import say, say_table

CUTTER = shipped_cutter("fibre-laser")
MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
DEMO_TUNE = (Path(__file__).resolve().parents[2] / "service" / "demo" / "tune.mid").read_bytes()
STARTS = 4
DENSE = (500, 1_000, 2_000, 4_000)
FULL = (("fernhollow-31", 200), ("fernhollow-31", 420), ("tarnlight-17", 100), ("tarnlight-17", 180))
NO_PAIRS = np.zeros((0, 2), dtype=np.int64)


def stops_mm(disc: Disc) -> FloatArray:
    """Where the cuts begin."""
    assert disc.pattern.cut is not None
    first_mm = disc.pattern.cut.points_mm[:1]
    return on_disc_mm(first_mm, disc.radius_mm, disc.edge_angle_rad, disc.turning.direction)[:, 0]


def travel_mm(stops: FloatArray) -> float:
    """From the disc centre along the stops and back."""
    there_and_back = np.concatenate([np.zeros((1, 2)), stops, np.zeros((1, 2))])
    return float(np.linalg.norm(np.diff(there_and_back, axis=0), axis=1).sum())


def row_of(name: str, disc: Disc, *, long_run: bool) -> tuple[str, ...]:
    """One line of the table."""
    begin_s = time.process_time()
    order = cutting_order(disc)
    took_s = time.process_time() - begin_s
    stops = stops_mm(disc)
    by_track_mm = travel_mm(stops[np.lexsort((disc.edge_angle_rad, disc.track_index))])
    ours_mm, pairs = travel_mm(stops[order]), hot_pairs(disc)
    cells = [name, str(disc.projection_count), str(len(pairs)), f"{by_track_mm:.0f}", f"{ours_mm:.0f}"]
    if long_run:
        runs = [long_two_opt_mm(stops, kept_apart, starts=STARTS) for kept_apart in (pairs, NO_PAIRS)]
        cells += [f"{ours_mm / runs[0]:.3f}", f"{ours_mm / runs[1]:.3f}"]
    else:
        cells += ["-", "-"]
    return (*cells, f"{took_s:.3f}")


def dense_disc(count: int) -> Disc:
    """Projections anywhere on mossbrook-67, too near each other or not: what is measured is the order."""
    movement, dice = shipped_movement("mossbrook-67"), np.random.default_rng(1)
    return Disc(
        movement=movement,
        cutter=CUTTER,
        turning=turning_of(movement),
        pattern=pattern_of(movement, CUTTER),
        track_index=frozen_ints(dice.integers(0, len(movement.tracks), count)),
        edge_angle_rad=frozen_floats(dice.uniform(0, 2 * np.pi, count)),
    )


def full_disc(name: str, count: int) -> Disc:
    """Projections anywhere on a movement, but for those that would leave too thin a web."""
    movement, dice = shipped_movement(name), np.random.default_rng(count)
    pattern, turning = pattern_of(movement, CUTTER), turning_of(movement)
    tracks = dice.integers(0, len(movement.tracks), 2 * count)
    angles = dice.uniform(0, 0.9 * 2 * np.pi, 2 * count)
    placed = on_disc_mm(pattern.core_points_mm, turning.radius_mm[tracks], angles, turning.direction)
    openings = core_geometries(placed)
    least_mm = CUTTER.min_web_mm + 2 * pattern.core_round_mm
    kept: list[int] = []
    for place, opening in enumerate(openings):
        if len(kept) < count and (not kept or shapely.distance(openings[kept], opening).min() >= least_mm):
            kept.append(place)
    return Disc(
        movement=movement,
        cutter=CUTTER,
        turning=turning,
        pattern=pattern,
        track_index=frozen_ints(tracks[kept]),
        edge_angle_rad=frozen_floats(angles[kept]),
    )


HEAD = ("disc", "cuts", "thin webs", "by track mm", "ours mm", "of 2-opt", "of 2-opt, no rule", "s")


def main() -> None:
    """Print the table."""
    say(__doc__ or "")
    demos = [(name, lay_out(DEMO_TUNE, shipped_movement(name), CUTTER, Settings()).disc) for name in MOVEMENTS]
    rows = [row_of(name, disc, long_run=True) for name, disc in demos]
    rows += [row_of(f"{name}, full", full_disc(name, count), long_run=True) for name, count in FULL]
    rows += [row_of(f"{count} anywhere", dense_disc(count), long_run=False) for count in DENSE]
    say_table(HEAD, rows)


if __name__ == "__main__":
    main()
