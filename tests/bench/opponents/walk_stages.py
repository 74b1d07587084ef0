"""The walk from a tune to all files, cut into its stages: each a job that can be run, timed and profiled by itself."""

from collections.abc import Callable
from dataclasses import replace

from layout.arrange import arrange
from layout.check import WholeTune, check
from layout.cut import plan_cuts
from layout.cut.labelling import marks_without_room
from layout.cut.plan import CutPlan
from layout.cut.wording import Words
from layout.documents import Cutter, Movement, Settings
from layout.making import making_of
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import spacing_of
from layout.mechanics.turning import turning_of
from layout.place import place
from layout.play import play
from layout.read import read_score
from layout.report import report_on
from layout.walk import files_of, fingerprint_of, lay_out
from layout.write import (
    write_dxf,
    write_hits,
    write_layout_json,
    write_making,
    write_press_program,
    write_report,
    write_svg,
)
from layout.write.laid_out import LaidOut
from layout.write.work_sheet import write_work_sheet

Job = Callable[[], object]

NOT_GOOD = "measured only"  # the cutting files are written, whatever the findings say
# What it takes from the tune to disc.dxf and disc.svg; the others are done besides.
TO_THE_DRAWINGS = (
    *("reading", "rules of nearness", "arranging", "placing", "playing", "all checks"),
    *("order of cuts, marks", "disc.dxf", "disc.svg"),
)


def whole_walk(tune: bytes, movement: Movement, cutter: Cutter) -> dict[str, bytes]:
    """From the tune to every file."""
    return files_of(lay_out(tune, movement, cutter, Settings()), not_good=NOT_GOOD)


def planned(laid_out: LaidOut) -> CutPlan:
    """How the disc of a layout is cut."""
    return plan_cuts(
        laid_out.disc,
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        not_good=None if laid_out.good_to_cut else NOT_GOOD,
        part=laid_out.part,
        order_number=laid_out.order_number,
    )


def our_drawings(tune: bytes, movement: Movement, cutter: Cutter) -> tuple[bytes, bytes]:
    """From the tune to disc.dxf and disc.svg: read, arranged to a proved best, and all that follows."""
    laid_out = lay_out(tune, movement, cutter, Settings())
    plan = planned(laid_out)
    return write_dxf(plan.disc, cutter), write_svg(plan, laid_out)


def stages_of(tune: bytes, movement: Movement, cutter: Cutter) -> dict[str, Job]:
    """Each stage by itself, in the order of the walk; together they are all that the walk does.

    A disc keeps its least metal once that was looked for, so checks are run on a disc that nothing was asked of yet,
    and the report, as in the walk, on one that was checked.
    """
    settings = Settings()
    laid_out = lay_out(tune, movement, cutter, settings)
    score, arrangement, disc = laid_out.score, laid_out.arrangement, laid_out.disc
    turning, pattern = turning_of(movement), pattern_of(movement, cutter)
    spacing = spacing_of(movement, turning, pattern, cutter.min_web_mm)
    whole = WholeTune(onset_s=score.onset_s, from_s=arrangement.from_s, disc_count=1)
    plan = planned(laid_out)
    making = making_of(disc, plan)
    words = Words(title=laid_out.title, fingerprint=laid_out.fingerprint, not_good=None, is_record=False)
    stages: dict[str, Job] = {
        "reading": lambda: read_score(tune, sequence=settings.sequence),
        "rules of nearness": lambda: spacing_of(
            movement, turning_of(movement), pattern_of(movement, cutter), cutter.min_web_mm
        ),
        "arranging": lambda: arrange(score, movement, settings, spacing),
        "placing": lambda: place(arrangement, movement, cutter),
        "playing": lambda: play(disc),
        "all checks": lambda: check(replace(disc), arrangement, whole),
        "report": lambda: report_on(score, arrangement, disc),
        "fingerprint": lambda: fingerprint_of(tune, movement, cutter, settings),
        "labels without room": lambda: marks_without_room(replace(disc), words),
        "order of cuts, marks": lambda: planned(laid_out),
        "making": lambda: making_of(disc, plan),
        "disc.dxf": lambda: write_dxf(plan.disc, cutter),
        "record.dxf": lambda: write_dxf(plan.record, cutter),
        "disc.svg": lambda: write_svg(plan, laid_out),
        "hits.csv": lambda: write_hits(plan, disc),
        "work-sheet.pdf": lambda: write_work_sheet(plan, laid_out, making),
        "making.json": lambda: write_making(making, laid_out.fingerprint, disc=(1, 1)),
        "layout.json": lambda: write_layout_json(laid_out, despite_findings=None),
        "report.json": lambda: write_report(laid_out),
    }
    if cutter.kind == "punch-press":
        stages["press.nc"] = lambda: write_press_program(plan, disc)
    return stages
