"""The whole job against the plain way of doing it by the same libraries, side by side in one process.

Ours has all its checks on, orders the cuts and letters the disc, and proves the arrangement the best; the plain way
chooses greedily and does none of that. Each side in turn; medians of processor time, with the least and the most.
"""

import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.arrange import arrange
from layout.arrange.arrangement import Arrangement
from layout.check import check
from layout.cut import plan_cuts
from layout.cut.plan import CutPlan
from layout.documents import Movement, Settings, shipped_cutter
from layout.making import making_of
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import spacing_of
from layout.mechanics.turning import turning_of
from layout.place import place
from layout.play import play
from layout.read import read_score
from layout.report import report_on
from layout.walk import files_of, lay_out
from layout.write import write_dxf, write_hits, write_svg
from layout.write.laid_out import LaidOut
from layout.write.work_sheet import write_work_sheet
from tests.bench.opponents.large_disc import large_movement, large_tune
from tests.bench.opponents.plain_way import (
    plain_chosen,
    plain_drawn,
    plain_dxf,
    plain_from_arrangement,
    plain_from_bytes,
    plain_notes,
    plain_outlines,
    plain_svg,
    plain_thin_webs,
)
from tests.bench.opponents.table import say, say_table, told

CUTTER = shipped_cutter("fibre-laser")
SIZES = (300, 2_000)
TIMES = 7
DRAWN_GOAL = {2_000: 8.0}
WHOLE_GOAL = {300: 1.5, 2_000: 2.5}

Job = Callable[[], object]


def drawn(arrangement: Arrangement, movement: Movement, laid_out: LaidOut) -> tuple[bytes, bytes]:
    """From the arrangement to both files: placed, played, checked, the cuts ordered, drawn."""
    disc = place(arrangement, movement, CUTTER)
    play(disc)
    check(disc, arrangement)
    plan = planned(laid_out)
    return write_dxf(plan.disc, CUTTER), write_svg(plan, laid_out)


def planned(laid_out: LaidOut) -> CutPlan:
    """How the disc is cut."""
    return plan_cuts(
        laid_out.disc,
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        not_good=None if laid_out.good_to_cut else "measured only",
        part=laid_out.part,
        order_number=laid_out.order_number,
    )


def from_bytes(tune: bytes, movement: Movement) -> tuple[bytes, bytes]:
    """From the tune to both files: read, arranged to a proved best, and all that follows."""
    laid_out = lay_out(tune, movement, CUTTER, Settings())
    plan = planned(laid_out)
    return write_dxf(plan.disc, CUTTER), write_svg(plan, laid_out)


def in_turn(jobs: dict[str, Job]) -> dict[str, list[float]]:
    """Milliseconds of processor time of each job, TIMES times, each in its turn; once before for nothing."""
    took_ms: dict[str, list[float]] = {name: [] for name in jobs}
    for round_number in range(TIMES + 1):
        for name, job in jobs.items():
            begun_s = time.process_time()
            job()
            if round_number:
                took_ms[name].append(1000 * (time.process_time() - begun_s))
    return took_ms


def stages(tune: bytes, movement: Movement, laid_out: LaidOut) -> dict[str, Job]:
    """Each stage of either way by itself."""
    score, turning, plan = read_score(tune, sequence=1), turning_of(movement), planned(laid_out)
    pattern = pattern_of(movement, CUTTER)
    spacing = spacing_of(movement, turning, pattern, CUTTER.min_web_mm)
    making, arrangement = making_of(laid_out.disc, plan), laid_out.arrangement
    notes = plain_notes(tune)
    outlines = plain_outlines(plain_chosen(notes, movement), movement, CUTTER)
    openings = [outline["opening"] for outline in outlines]
    return {
        "plain: notes": lambda: plain_notes(tune),
        "plain: choice": lambda: plain_chosen(notes, movement),
        "plain: outlines": lambda: plain_outlines(plain_chosen(notes, movement), movement, CUTTER),
        "plain: webs": lambda: plain_thin_webs(openings, movement, CUTTER),
        "plain: DXF": lambda: plain_dxf(outlines, movement),
        "plain: SVG": lambda: plain_svg(outlines, movement),
        "ours: reading": lambda: read_score(tune, sequence=1),
        "ours: rules of nearness": lambda: spacing_of(movement, turning, pattern, CUTTER.min_web_mm),
        "ours: arranging": lambda: arrange(score, movement, Settings(), spacing),
        "ours: placing, playing": lambda: play(place(arrangement, movement, CUTTER)),
        "ours: all checks": lambda: check(laid_out.disc, arrangement),
        "ours: order of cuts, marks": lambda: planned(laid_out),
        "ours: disc.dxf": lambda: write_dxf(plan.disc, CUTTER),
        "ours: disc.svg": lambda: write_svg(plan, laid_out),
        "besides: report": lambda: report_on(score, arrangement, laid_out.disc),
        "besides: record.dxf": lambda: write_dxf(plan.record, CUTTER),
        "besides: hits.csv": lambda: write_hits(plan, laid_out.disc),
        "besides: work sheet": lambda: write_work_sheet(plan, laid_out, making),
    }


def measure(count: int) -> None:
    """Print the tables of one size."""
    tune, movement = large_tune(count), large_movement(count)
    laid_out = lay_out(tune, movement, CUTTER, Settings())
    arrangement, worth = laid_out.arrangement, laid_out.arrangement.worth
    plain = plain_drawn(plain_chosen(plain_notes(tune), movement), movement, CUTTER)
    say(
        f"{count} notes: ours keeps {laid_out.disc.projection_count} projections, worth {worth.kept} of at most "
        f"{worth.bound}; the plain way {plain.tab_count}, {plain.thin_webs} of its webs too thin"
    )
    whole = in_turn(
        {
            "arrangement to DXF and SVG, plain": lambda: plain_from_arrangement(arrangement, movement, CUTTER),
            "arrangement to DXF and SVG, ours": lambda: drawn(arrangement, movement, laid_out),
            "bytes to DXF and SVG, plain": lambda: plain_from_bytes(tune, movement, CUTTER),
            "bytes to DXF and SVG, ours": lambda: from_bytes(tune, movement),
            "bytes to all files, ours": lambda: files_of(lay_out(tune, movement, CUTTER, Settings()), not_good="no"),
        }
    )
    middle = {name: statistics.median(took_ms) for name, took_ms in whole.items()}
    rows = [
        [name, f"{middle[name]:.1f} ms", f"{min(took_ms):.1f} ms", f"{max(took_ms):.1f} ms"]
        for name, took_ms in (whole | in_turn(stages(tune, movement, laid_out))).items()
        for middle[name] in [statistics.median(took_ms)]
    ]
    say_table(["job", "median", "least", "most"], rows)
    for job, goals in (("arrangement", DRAWN_GOAL), ("bytes", WHOLE_GOAL)):
        times = middle[f"{job} to DXF and SVG, plain"] / middle[f"{job} to DXF and SVG, ours"]
        told(
            f"{job} to DXF and SVG, {count} notes: times faster than the plain way", times, goals.get(count), most=False
        )


def main() -> None:
    """Print the tables."""
    say(__doc__ or "")
    for count in SIZES:
        measure(count)


if __name__ == "__main__":
    main()
