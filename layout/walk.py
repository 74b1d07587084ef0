"""The walk, composed once for the command and the service: bytes in, files out.

read → arrange → place → play → check → report → cut → making → write; and, from a drawing, read back → play → check.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from layout.arrange import Clock, arrange_discs
from layout.arrange.arrangement import Arrangement
from layout.check import WholeTune, check
from layout.check.finding import Finding, stands
from layout.check.labels import labels_stand
from layout.cut import plan_cuts
from layout.cut.labelling import marks_without_room
from layout.cut.plan import CutPlan
from layout.cut.wording import Words
from layout.documents import Cutter, Movement, Settings
from layout.errors import DocumentError, Problem
from layout.file_names import files_given
from layout.fingerprint import fingerprint_of
from layout.limits import limits_told
from layout.making import Making, making_of
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import spacing_of
from layout.mechanics.turning import turning_of
from layout.place import place
from layout.place.disc import Disc
from layout.play import play
from layout.play.plucks import Plucks
from layout.read import read_score
from layout.read.limits import LIMITS
from layout.read.score import Score
from layout.read_back import read_back
from layout.report import report_on
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

_NOT_ASKED = ("outside-passage", "ruled-out")

LIMITS_OF_READING = limits_told(LIMITS, prefix="tune_")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Planned:
    """A layout with how it is cut and what that takes: what every writer chooses from."""

    laid_out: LaidOut
    plan: CutPlan
    making: Making


_WRITERS: dict[str, Callable[[_Planned], bytes]] = {
    "disc.dxf": lambda one: write_dxf(one.plan.disc, one.laid_out.disc.cutter),
    "record.dxf": lambda one: write_dxf(one.plan.record, one.laid_out.disc.cutter),
    "disc.svg": lambda one: write_svg(one.plan, one.laid_out),
    "hits.csv": lambda one: write_hits(one.plan, one.laid_out.disc),
    "press.nc": lambda one: write_press_program(one.plan, one.laid_out.disc),
    "work-sheet.pdf": lambda one: write_work_sheet(one.plan, one.laid_out, one.making),
    "making.json": lambda one: write_making(
        one.making,
        one.laid_out.fingerprint,
        disc=(one.laid_out.disc_number, one.laid_out.disc_count),
        order_number=one.laid_out.order_number,
    ),
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


def check_tune(tune: bytes, settings: Settings) -> None:
    """See that a tune can be read, without laying it out.

    Raises:
        MidiReadError: It cannot, or has no sequence of the number that the settings ask for.
    """
    read_score(tune, sequence=settings.sequence)


def lay_out(tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, clock: Clock | None = None) -> LaidOut:
    """The tune laid out on one disc for this movement and cutter, checked.

    Args:
        tune: A Standard MIDI File.
        movement: The movement the disc is for.
        cutter: The cutter that makes it.
        settings: What the maker asks for; one disc.
        clock: For settings.time_limit_s: seconds of a clock that only goes forward. Without it there is no such limit.

    Raises:
        MidiReadError: The tune cannot be read.
        RulingError: The settings' rulings contradict each other, the tune or the comb.
        DocumentError: The settings ask for several discs, or for a passage that cannot be.
    """
    if settings.discs > 1:
        message = f"{settings.discs} discs are asked for where one is made; ask for 1, or for all of them together"
        raise DocumentError(document="settings", problems=(Problem(pointer="/discs", message=message),))
    [laid_out] = lay_out_discs(tune, movement, cutter, settings, clock)
    return laid_out


def lay_out_discs(
    tune: bytes,
    movement: Movement,
    cutter: Cutter,
    settings: Settings,
    clock: Clock | None = None,
    *,
    most_s: float | None = None,
) -> tuple[LaidOut, ...]:
    """The tune laid out on settings.discs discs, in the order they are played, each checked.

    All have one transposition and one speed; a note of another disc is outside the passage of this one.

    Args:
        tune: A Standard MIDI File.
        movement: The movement the discs are for.
        cutter: The cutter that makes them.
        settings: What the maker asks for.
        clock: As for `lay_out`.
        most_s: Seconds by the clock that the search may take where the settings allow more; no part of the fingerprint.

    Raises:
        MidiReadError: The tune cannot be read.
        RulingError: The settings' rulings contradict each other, the tune or the comb.
        DocumentError: The settings ask for a passage that cannot be, or more discs than there are notes for.
    """
    score = read_score(tune, sequence=settings.sequence)
    turning = turning_of(movement)
    spacing = spacing_of(movement, turning, pattern_of(movement, cutter), cutter.min_web_mm)
    arrangements = arrange_discs(score, movement, settings, spacing, clock, most_s)
    whole = _whole_tune(score, arrangements)
    discs = [place(arrangement, movement, cutter) for arrangement in arrangements]
    laid_out = (
        LaidOut(
            title=settings.title or score.title or "untitled tune",
            fingerprint=fingerprint_of(tune, movement, cutter, settings, number),
            score=score,
            arrangement=arrangement,
            disc=disc,
            plucks=play(disc),
            findings=check(disc, arrangement, whole),
            report=report_on(score, arrangement, disc),
            disc_number=number,
            disc_count=len(discs),
            order_number=settings.order,
        )
        for number, (arrangement, disc) in enumerate(zip(arrangements, discs, strict=True), start=1)
    )
    return tuple(map(_with_missing_labels, laid_out))


def _with_missing_labels(laid_out: LaidOut) -> LaidOut:
    """The layout with a finding where a label has no place on its disc, the warning of a faulty one counted in."""
    words = Words(
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        not_good=None if laid_out.good_to_cut else "",
        is_record=False,
        part=laid_out.part,
        order_number=laid_out.order_number,
    )
    without_room = marks_without_room(laid_out.disc, words)
    missing = labels_stand(laid_out.disc, title=laid_out.title, without_room=without_room)
    return replace(laid_out, findings=(*laid_out.findings, *missing))


def _whole_tune(score: Score, arrangements: tuple[Arrangement, ...]) -> WholeTune:
    """What all discs play together: the notes that some disc is asked for."""
    never = set.intersection(
        *({left.note for left in each.left_out if left.reason in _NOT_ASKED} for each in arrangements)
    )
    asked = np.setdiff1d(np.arange(score.note_count), np.fromiter(never, dtype=np.int64))
    return WholeTune(onset_s=score.onset_s[asked], from_s=arrangements[0].from_s, disc_count=len(arrangements))


def files_of(laid_out: LaidOut, *, not_good: str | None = None) -> dict[str, bytes]:
    """The files of a layout, by name; the cutting files are kept back where they must be.

    Args:
        laid_out: The layout.
        not_good: A person's reason to have the cutting files although an error-level finding
            stands; they are then marked NOT GOOD TO CUT. Ignored where none stands.
    """
    given = files_given(laid_out.disc.cutter, cutting=bool(laid_out.good_to_cut or not_good))
    plan = plan_cuts(
        laid_out.disc,
        title=laid_out.title,
        fingerprint=laid_out.fingerprint,
        not_good=None if laid_out.good_to_cut else not_good,
        part=laid_out.part,
        order_number=laid_out.order_number,
    )
    planned = _Planned(laid_out=laid_out, plan=plan, making=making_of(laid_out.disc, plan))
    told = told_of(laid_out, not_good=not_good)
    return {name: told[name] if name in told else _WRITERS[name](planned) for name in given}


def told_of(laid_out: LaidOut, *, not_good: str | None = None) -> dict[str, bytes]:
    """layout.json and report.json of a layout, as `files_of` gives them: they need no plan of how it is cut.

    Args:
        laid_out: The layout.
        not_good: As for `files_of`; layout.json names it.
    """
    despite_findings = None if laid_out.good_to_cut else not_good
    return {
        "layout.json": write_layout_json(laid_out, despite_findings=despite_findings),
        "report.json": write_report(laid_out),
    }


def check_drawing(dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
    """What the disc of a drawing plays and what is wrong with it, from what is cut alone.

    Raises:
        DrawingReadError: The bytes are no drawing that can be read back.
    """
    reading = read_back(dxf, movement, cutter)
    return CheckedDrawing(disc=reading.disc, plucks=play(reading.disc), findings=reading.findings + check(reading.disc))
