"""Which side a drawing shows, where the projections' outlines do not say it."""

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.movement import Movement
from layout.mechanics.arrays import BoolArray
from layout.mechanics.turning import Turning
from layout.read_back.blank import compare_blank
from layout.read_back.entities import CutDrawing
from layout.read_back.limits import CLEARLY_OUTSIDE_S
from layout.read_back.projections import Edges, Wanted, other_side, projections_of


def findings_on_the_side(
    drawing: CutDrawing, edges: Edges, differs: list[Finding], wanted: Wanted, movement: Movement
) -> list[Finding]:
    """Whether blank or music speak for the other side; advice where neither shows a side.

    The drawing is read mirrored, too. A blank that agrees on one side only shows the side, and so
    does music that lies within its part of the turn on one side only.

    Args:
        drawing: Seen from the label side.
        edges: Its working edges.
        differs: What of its blank is not as the movement has it.
        wanted: What a projection looks like.
        movement: For its blank.

    Returns:
        At most one finding; none for a drawing without projections whose blank agrees.
    """
    mirrored = drawing.mirrored()
    differs_mirrored = compare_blank(mirrored, movement, half_kerf_mm=wanted.half_kerf_mm)
    if differs and not differs_mirrored:
        evidence = "holes and rim agree with the movement only when mirrored; the drawing seems to show"
        return [other_side(evidence, wanted.cutter, differs[0].at)]
    outside = _outside_music(edges, wanted.turning)
    outside_mirrored = _outside_music(projections_of(mirrored, wanted).edges, wanted.turning)
    if outside.any() and not outside_mirrored.any():
        evidence = (
            f"{outside.sum()} of {len(outside)} plucks lie outside the music's part of the turn, and none does when "
            "mirrored; the drawing may show"
        )
        return [other_side(evidence, wanted.cutter, Place())]
    blank_shows, music_shows = bool(differs_mirrored) and not differs, outside_mirrored.any() and not outside.any()
    return [] if blank_shows or music_shows or not len(outside) else [_not_shown(wanted, movement)]


def _outside_music(edges: Edges, turning: Turning) -> BoolArray:
    sounds_s = turning.sounds_s(edges.edge_angle_rad, edges.track_index)
    return np.asarray((sounds_s < -CLEARLY_OUTSIDE_S) | (sounds_s > turning.free_turn_s + CLEARLY_OUTSIDE_S))


def _not_shown(wanted: Wanted, movement: Movement) -> Finding:
    cutter = wanted.cutter
    what = "hits" if wanted.layer == "HITS" else "these slots"
    as_drawn = cutter.drawn_from.replace("-", " ")
    clockwise = (movement.turns == "clockwise") == (cutter.drawn_from == "label-side")
    return Finding(
        code=Code.SIDE_NOT_SHOWN,
        level=Level.ADVICE,
        message=f"{what} look alike from both sides, and nothing else that is cut shows which side is drawn",
        measured=None,
        limit=None,
        unit="",
        at=Place(),
        remedy=f"compare the flag on layer {cutter.layer('MARKS').name} with the way the disc turns: seen from the "
        f"{as_drawn}, as it must be drawn, it points {'clockwise' if clockwise else 'anticlockwise'}",
    )
