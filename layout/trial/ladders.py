"""Which ladders a movement and a cutter need, and their steps."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.projection import Pattern, fitting_tool, pattern_of
from layout.trial import wording
from layout.trial.piece import Ladder, Step
from layout.trial.rungs import Row, Rung, letters_of, opening_of, rung_of

# Times the cutter's least slot: one step below it, to see where it ends. Our own choice.
KERF_FACTORS = (0.75, 1.0, 1.5, 2.0, 3.0)
KERF_SLOT_MM = 5.0  # mm long; a feeler blade or a gauge pin finds its way in (common practice)
# Times the cutter's least web, from comfortable to too thin. Our own choice.
WEB_FACTORS = (2.0, 1.5, 1.25, 1.0, 0.75, 0.5)
# Either side of nominal. Calipers tell 0.02 mm (common practice), so a tenth is seen, and two tenths are a
# depth's whole band on the shipped movements; on small sizes less, so that the least step stays a tab.
STEP_MM = 0.1
STEP_SHARE = 0.125  # of the nominal
AROUND = (-2, -1, 0, 1, 2)

Size = Literal["width_mm", "depth_mm", "length_mm"]


def rows_of(movement: Movement, cutter: Cutter) -> tuple[Row, ...]:
    """The rows of the piece, the outermost first: its ladders, what it is, and what its line says.

    The longest ladders stand outermost, where a small sector holds most. A ladder of which no step can be
    cut has no rungs. Where the cutter wants no labels, it is not lettered with what it is; STOP and the numbers of
    the steps stay, since the piece is turned up to the one and measured by the others.

    A laser that folds gets kerf, tab width, depth and web; one that cuts slots kerf, slot width, slot length
    and web; a press the web of the tool that makes this movement's projections, since its tool sets
    everything else.
    """
    lines = (*(wording.title_lines(movement, cutter) if cutter.labels else ()), wording.STOP)
    said = tuple(Row(ladder=None, rungs=(letters_of(line),)) for line in lines)
    web = _web(movement, cutter)
    if cutter.kind == "punch-press":
        return (web, *said)
    if movement.projection.kind == "slot":
        words = (wording.slot_width_words(), wording.slot_length_words())
        sizes = [
            _sized(movement, cutter, _Sized(name="slot-width", size="width_mm", how=words[0])),
            _sized(movement, cutter, _Sized(name="slot-length", size="length_mm", how=words[1])),
        ]
    else:
        depth = "" if cutter.fold is None else wording.depth_words(cutter.fold, movement.disc.thickness_mm)
        sizes = [
            _sized(movement, cutter, _Sized(name="tab-width", size="width_mm", how=wording.tab_width_words())),
            _sized(
                movement,
                cutter,
                _Sized(name="depth", size="depth_mm", how=depth, corrects=("cutter", "/fold/inside_radius_mm")),
            ),
        ]
    return (web, _kerf(cutter), *sizes, *said)


def track_ladder(movement: Movement, tracks: Iterable[int]) -> Ladder:
    """What to look at on tracks, by their place from 0."""
    steps = (
        Step(
            mark=f"T{index + 1}",
            nominal_mm=movement.tracks[index].radius_mm,
            document="movement",
            field=f"/tracks/{index}/radius_mm",
        )
        for index in tracks
    )
    return Ladder(name="tracks", steps=tuple(steps), measure=wording.MEASURE["tracks"], how=wording.track_words())


def tool_ladders(movement: Movement, cutter: Cutter, tracks: Iterable[int]) -> tuple[Ladder, ...]:
    """What to measure of the tool's own work on tracks, by their place from 0; none on a laser."""
    tool = fitting_tool(movement, cutter)
    if tool is None:
        return ()
    lance = {"tab-width": ("tab_width_mm", tool.tab_width_mm), "depth": ("tab_depth_mm", tool.tab_depth_mm)}
    slot = {
        "slot-width": ("footprint_width_mm", tool.footprint_width_mm),
        "slot-length": ("footprint_length_mm", tool.footprint_length_mm),
    }
    marks, place = [f"T{index + 1}" for index in tracks], cutter.tools.index(tool)
    return tuple(
        Ladder(
            name=name,
            steps=tuple(
                Step(mark=mark, nominal_mm=size_mm, document="cutter", field=f"/tools/{place}/{size}") for mark in marks
            ),
            measure=wording.MEASURE[name],
            how=wording.tool_words(size),
            tool=tool.tool,
        )
        for name, (size, size_mm) in (lance if tool.makes == "lance" else slot).items()
        if size_mm is not None
    )


def _kerf(cutter: Cutter) -> Row:
    widths_mm = [round(factor * cutter.min_slot_mm, 6) for factor in KERF_FACTORS]
    widths_mm = [width for width in widths_mm if width > cutter.kerf_mm]  # no slot is narrower than its own cut
    length_mm = max(KERF_SLOT_MM, 2 * max(widths_mm, default=0.0))
    return _row(
        Ladder(
            name="kerf",
            steps=_steps("K", widths_mm, "cutter", "/kerf_mm"),
            measure=wording.MEASURE["kerf"],
            how=wording.kerf_words(cutter),
        ),
        lambda width_mm, mark: opening_of(length_mm, width_mm, mark),
    )


def _web(movement: Movement, cutter: Cutter) -> Row:
    pattern = pattern_of(movement, cutter)
    ladder = Ladder(
        name="web",
        steps=_steps("M", [factor * cutter.min_web_mm for factor in WEB_FACTORS], "cutter", "/min_web_mm"),
        measure=wording.MEASURE["web"],
        how=wording.web_words(cutter),
        tool=pattern.tool,
    )
    return _row(ladder, lambda web_mm, mark: replace(_whole_opening(pattern, mark), web_mm=web_mm))


def _whole_opening(pattern: Pattern, mark: str) -> Rung:
    if pattern.making != "fold":
        return rung_of(pattern, mark)
    # An opening as large as a folded one, but cut out whole: its web is then seen without any folding.
    length_mm, width_mm = np.ptp(pattern.core_points_mm, axis=0).tolist()
    return opening_of(length_mm, width_mm, mark)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Sized:
    """A ladder that steps a size of the projection, and the value it corrects where that is not the size itself."""

    name: str
    size: Size
    how: str
    corrects: tuple[Literal["movement", "cutter"], str] | None = None


def _sized(movement: Movement, cutter: Cutter, sized: _Sized) -> Row:
    projection, size = movement.projection, sized.size
    nominal_mm: float = getattr(projection, size) or 0.0
    step_mm = min(STEP_MM, STEP_SHARE * nominal_mm)
    sizes_mm = [nominal_mm + place * step_mm for place in AROUND]

    def made(size_mm: float) -> Pattern:
        # model_copy checks nothing: a slot's length below its width is left out below instead.
        return pattern_of(
            movement.model_copy(update={"projection": projection.model_copy(update={size: size_mm})}), cutter
        )

    sizes_mm = [size_mm for size_mm in sizes_mm if _is_whole(movement, size, size_mm, made(size_mm))]
    ladder = Ladder(
        name=sized.name,
        steps=_steps(size[0].upper(), sizes_mm, *(sized.corrects or ("movement", f"/projection/{size}"))),
        measure=wording.MEASURE[sized.name],
        how=sized.how,
    )
    return _row(ladder, lambda size_mm, mark: rung_of(made(size_mm), mark))


def _is_whole(movement: Movement, size: Size, size_mm: float, pattern: Pattern) -> bool:
    """Whether a step is still a slot, or a tab with something left of it beside the bend."""
    projection = movement.projection
    if projection.kind == "standing":
        return pattern.blank_length_mm > 0
    length_mm, width_mm = projection.length_mm or 0.0, projection.width_mm
    return size_mm <= length_mm if size == "width_mm" else size_mm >= width_mm


def _steps(
    letter: str, nominal_mm: Iterable[float], document: Literal["movement", "cutter"], field: str
) -> tuple[Step, ...]:
    return tuple(
        Step(mark=f"{letter}{number}", nominal_mm=round(size_mm, 6), document=document, field=field)
        for number, size_mm in enumerate(nominal_mm, start=1)
    )


def _row(ladder: Ladder, made: Callable[[float, str], Rung]) -> Row:
    return Row(ladder=ladder, rungs=tuple(made(step.nominal_mm, step.mark) for step in ladder.steps))
