"""The walk, composed once for the command and the service: bytes in, files out.

read → arrange → place → play → check → report → cut → write; and, from a drawing, read back → play → check.
"""

import hashlib
import json
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from layout.arrange import arrange
from layout.arrange.arrangement import Arrangement
from layout.check import check
from layout.check.finding import Finding, stands
from layout.cut import plan_cuts
from layout.cut.plan import CutPlan
from layout.documents import Cutter, Movement, Settings
from layout.limits import limits_told
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import spacing_of
from layout.mechanics.turning import turning_of
from layout.place import place
from layout.place.disc import Disc
from layout.play import play
from layout.play.plucks import Plucks
from layout.read import read_score
from layout.read.limits import LIMITS
from layout.read_back import read_back
from layout.report import report_on
from layout.version import ENGINE_VERSION
from layout.write import write_dxf, write_hits, write_layout_json, write_report, write_svg
from layout.write.laid_out import LaidOut

CUTTING_FILES = ("disc.dxf", "hits.csv")
FILES = ("disc.dxf", "record.dxf", "disc.svg", "hits.csv", "layout.json", "report.json")

LIMITS_OF_READING = limits_told(LIMITS, prefix="tune_")

_WRITERS: dict[str, Callable[[CutPlan, LaidOut], bytes]] = {
    "disc.dxf": lambda plan, laid_out: write_dxf(plan.disc, laid_out.disc.cutter),
    "record.dxf": lambda plan, laid_out: write_dxf(plan.record, laid_out.disc.cutter),
    "disc.svg": write_svg,
    "hits.csv": lambda plan, laid_out: write_hits(plan, laid_out.disc),
    "layout.json": lambda plan, laid_out: write_layout_json(laid_out, despite_findings=plan.not_good),
    "report.json": lambda _, laid_out: write_report(laid_out),
}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CheckedDrawing:
    """What a drawing would play, and what is wrong with it."""

    disc: Disc
    plucks: Plucks
    findings: tuple[Finding, ...]

    @property
    def good_to_cut(self) -> bool:
        """Whether no error-level finding stands."""
        return not stands(self.findings)


def fingerprint_of(tune: bytes, movement: Movement, cutter: Cutter, settings: Settings) -> str:
    """Sixteen hex digits that name these inputs and this engine: the id of their layout."""
    parts = {
        "engine": ENGINE_VERSION,
        "tune": hashlib.sha256(tune).hexdigest(),
        "movement": movement.model_dump(mode="json"),
        "stated": {pointer: number.model_dump(mode="json") for pointer, number in movement.stated.items()},
        "cutter": cutter.model_dump(mode="json"),
        "settings": settings.model_dump(mode="json"),
    }
    return hashlib.sha256(json.dumps(parts, sort_keys=True).encode()).hexdigest()[:16]


def lay_out(tune: bytes, movement: Movement, cutter: Cutter, settings: Settings) -> LaidOut:
    """The tune laid out on a disc for this movement and cutter, checked.

    Args:
        tune: A Standard MIDI File.
        movement: The movement the disc is for.
        cutter: The cutter that makes it.
        settings: What the maker asks for.

    Raises:
        MidiReadError: The tune cannot be read.
        RulingError: The settings' rulings contradict each other, the tune or the comb.
    """
    score = read_score(tune, sequence=settings.sequence)
    turning = turning_of(movement)
    spacing = spacing_of(movement, turning, pattern_of(movement, cutter), cutter.min_web_mm)
    arrangement = _with_weights(arrange(score, movement, settings, spacing), score.note_count)
    disc = place(arrangement, movement, cutter)
    return LaidOut(
        title=settings.title or score.title or "untitled tune",
        fingerprint=fingerprint_of(tune, movement, cutter, settings),
        score=score,
        arrangement=arrangement,
        disc=disc,
        plucks=play(disc),
        findings=check(disc, arrangement),
        report=report_on(score, arrangement, disc),
    )


def _with_weights(arrangement: Arrangement, note_count: int) -> Arrangement:
    # Only until the arranger gives the weights it works with: here all notes asked for are plain inner ones.
    if len(arrangement.note_weight) == note_count:
        return arrangement
    not_asked = ("outside-passage", "ruled-out", "past-the-turn")
    weight = np.full(note_count, 1000, dtype=np.int64)
    weight[[left.note for left in arrangement.left_out if left.reason in not_asked]] = 0
    none = np.zeros(note_count, dtype=np.bool_)
    return replace(arrangement, note_weight=weight, highest=none, lowest=none, melody=none)


def files_of(laid_out: LaidOut, *, not_good: str | None = None) -> dict[str, bytes]:
    """The files of a layout, by name; the cutting files are kept back where they must be.

    Args:
        laid_out: The layout.
        not_good: A person's reason to have the cutting files although an error-level finding
            stands; they are then marked NOT GOOD TO CUT. Ignored where none stands.
    """
    given = FILES if laid_out.good_to_cut or not_good else [name for name in FILES if name not in CUTTING_FILES]
    plan = plan_cuts(
        laid_out.disc,
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        not_good=None if laid_out.good_to_cut else not_good,
    )
    return {name: _WRITERS[name](plan, laid_out) for name in given}


def check_drawing(dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
    """What the disc of a drawing plays and what is wrong with it, from what is cut alone.

    Raises:
        DrawingReadError: The bytes are no drawing that can be read back.
    """
    reading = read_back(dxf, movement, cutter)
    return CheckedDrawing(disc=reading.disc, plucks=play(reading.disc), findings=reading.findings + check(reading.disc))
