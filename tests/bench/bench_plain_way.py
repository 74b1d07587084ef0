"""The whole job against the plain way of doing it by the same libraries, side by side in one process.

Ours has all its checks on, orders the cuts and letters the disc, and proves the arrangement the best; the plain way
chooses greedily and does none of that. Each side in turn; medians with the least and the most, in processor time, and
the median by the clock. Ratios are of processor time: another program beside this one does not count in it. "Unchecked"
is the plain way with svgwrite's own checking of attributes off, as ours has it; by default that is on.
"""

import gc
import statistics
import sys
import time
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange.arrangement import Arrangement
from layout.check import check
from layout.check.finding import Level
from layout.documents import Movement, Settings, shipped_cutter
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.place import place
from layout.place.disc import Disc
from layout.play import play
from layout.walk import lay_out
from layout.write import write_dxf, write_svg
from layout.write.laid_out import LaidOut
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.plain_way import (
    PlainTab,
    plain_chosen,
    plain_dxf,
    plain_from_arrangement,
    plain_from_bytes,
    plain_notes,
    plain_outlines,
    plain_svg,
    plain_tabs,
    plain_thin_webs,
)
from tests.bench.opponents.table import say, say_table, told
from tests.bench.opponents.walk_stages import TO_THE_DRAWINGS, Job, our_drawings, planned, stages_of, whole_walk

CUTTER = shipped_cutter("fibre-laser")
SIZES = (300, 2_000)
TIMES = 7
DRAWN_GOAL = {2_000: 8.0}
WHOLE_GOAL = {300: 1.5, 2_000: 2.5}
WAYS = {"plain": "the plain way", "unchecked": "the plain way with svgwrite's checking off"}


def drawn(arrangement: Arrangement, movement: Movement, laid_out: LaidOut) -> tuple[bytes, bytes]:
    """From the arrangement to both files: placed, played, checked, the cuts ordered, drawn."""
    disc = place(arrangement, movement, CUTTER)
    play(disc)
    check(disc, arrangement)
    plan = planned(replace(laid_out, disc=disc))
    return write_dxf(plan.disc, CUTTER), write_svg(plan, laid_out)


def in_turn(jobs: dict[str, Job]) -> dict[str, list[tuple[float, float]]]:
    """Milliseconds by the processor and the clock of each job, each in its turn, TIMES times after one for nothing."""
    took_ms: dict[str, list[tuple[float, float]]] = {name: [] for name in jobs}
    for round_number in range(TIMES + 1):
        for name, job in jobs.items():
            clock_s, begun_s = time.perf_counter(), time.process_time()
            job()
            if round_number:
                by_processor_ms = 1000 * (time.process_time() - begun_s)
                took_ms[name].append((by_processor_ms, 1000 * (time.perf_counter() - clock_s)))
    return took_ms


def stages(tune: bytes, movement: Movement) -> dict[str, Job]:
    """Each stage of either way by itself, and what ours does besides."""
    notes = plain_notes(tune)
    tabs = plain_chosen(notes, movement)
    outlines = plain_outlines(tabs, movement, CUTTER)
    openings = [outline["opening"] for outline in outlines]
    plain: dict[str, Job] = {
        "plain: notes": lambda: plain_notes(tune),
        "plain: choice": lambda: plain_chosen(notes, movement),
        "plain: outlines": lambda: plain_outlines(tabs, movement, CUTTER),
        "plain: webs": lambda: plain_thin_webs(openings, movement, CUTTER),
        "plain: DXF": lambda: plain_dxf(outlines, movement),
        "plain: SVG": lambda: plain_svg(outlines, movement),
        "plain: SVG, unchecked": lambda: plain_svg(outlines, movement, is_checked=False),
    }
    ours = stages_of(tune, movement, CUTTER)
    there = {f"ours: {name}": ours[name] for name in TO_THE_DRAWINGS}
    return plain | there | {f"besides: {name}": job for name, job in ours.items() if name not in TO_THE_DRAWINGS}


def errors_on(tabs: Sequence[PlainTab], laid_out: LaidOut) -> int:
    """How many errors our checks find on a disc with these projections."""
    disc = Disc(
        movement=laid_out.disc.movement,
        cutter=CUTTER,
        turning=laid_out.disc.turning,
        pattern=laid_out.disc.pattern,
        track_index=frozen_ints(np.array([tab.track for tab in tabs], dtype=np.int64)),
        edge_angle_rad=frozen_floats([tab.angle_rad for tab in tabs]),
    )
    return sum(finding.level == Level.ERROR for finding in check(disc))


def worth_of(tabs: Sequence[PlainTab], arrangement: Arrangement) -> int:
    """What a choice keeps by our weights: its notes stand in the order of the score's."""
    return int(sum(arrangement.note_weight[note] for tab in tabs for note in tab.notes))


def say_kept(tune: bytes, movement: Movement, laid_out: LaidOut) -> None:
    """What either way keeps, and what is wrong with it."""
    tabs, ours = plain_chosen(plain_notes(tune), movement), plain_tabs(laid_out.arrangement, movement)
    worth = laid_out.arrangement.worth
    rows = [
        [name, str(len(kept)), str(worth_of(kept, laid_out.arrangement)), str(errors_on(kept, laid_out))]
        for name, kept in (("the plain way", tabs), ("ours", ours))
    ]
    say_table([f"{laid_out.score.note_count} notes", "projections", "worth", "errors by our checks"], rows)
    say(f"ours: kept {worth.kept} of at most {worth.bound}{', proved' if worth.proved else ''}")


def measure(count: int) -> None:
    """Print the tables of one size."""
    tune, movement = large_tune(count), large_movement(count)
    laid_out = lay_out(tune, movement, CUTTER, Settings())
    arrangement = laid_out.arrangement
    say_kept(tune, movement, laid_out)
    whole = in_turn(
        {
            "arrangement to DXF and SVG, plain": lambda: plain_from_arrangement(arrangement, movement, CUTTER),
            "arrangement to DXF and SVG, unchecked": lambda: plain_from_arrangement(
                arrangement, movement, CUTTER, svg_checked=False
            ),
            "arrangement to DXF and SVG, ours": lambda: drawn(arrangement, movement, laid_out),
            "bytes to DXF and SVG, plain": lambda: plain_from_bytes(tune, movement, CUTTER),
            "bytes to DXF and SVG, unchecked": lambda: plain_from_bytes(tune, movement, CUTTER, svg_checked=False),
            "bytes to DXF and SVG, ours": lambda: our_drawings(tune, movement, CUTTER),
            "bytes to all files, ours": lambda: whole_walk(tune, movement, CUTTER),
        }
    )
    rows, middle = [], {}
    for name, took in (whole | in_turn(stages(tune, movement))).items():
        by_processor_ms, by_clock_ms = zip(*took, strict=True)
        middle[name] = statistics.median(by_processor_ms)
        figures = (middle[name], min(by_processor_ms), max(by_processor_ms), statistics.median(by_clock_ms))
        rows.append([name, *(f"{figure:.1f} ms" for figure in figures)])
    say_table(["job", "median", "least", "most", "by the clock"], rows)
    for job, goals in (("arrangement", DRAWN_GOAL), ("bytes", WHOLE_GOAL)):
        for way, goal in (("plain", goals.get(count)), ("unchecked", None)):
            times = middle[f"{job} to DXF and SVG, {way}"] / middle[f"{job} to DXF and SVG, ours"]
            told(f"{job} to DXF and SVG, {count} notes: times faster than {WAYS[way]}", times, goal, most=False)


def main() -> None:
    """Print the tables."""
    say(__doc__ or "")
    gc.freeze()  # for both sides, as the service does once all is imported
    for count in SIZES:
        measure(count)


if __name__ == "__main__":
    main()
