"""From a disc to its cut plan."""

from dataclasses import replace

from layout.cut.blank import holes, rim
from layout.cut.bridges import with_bridges
from layout.cut.kerf import as_the_beam_runs
from layout.cut.leads import with_leads
from layout.cut.marking import Marking, marking_of
from layout.cut.mirroring import mirrored, mirrored_points_mm
from layout.cut.path import cutting_order, path_of
from layout.cut.plan import CutPlan, Drawing, Entity, ToolHits
from layout.cut.projections import cut_projections, formed_projections, struck_at_mm
from layout.cut.slugs import loose_slug_count, with_held_slugs
from layout.cut.striking import struck_holes
from layout.cut.wording import Words, head_lines, inscriptions
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.hole_hits import not_struck
from layout.place.disc import Disc


def plan_cuts(
    disc: Disc,
    *,
    title: str,
    fingerprint: str,
    not_good: str | None,
    part: str = "",
    order_number: str | None = None,
) -> CutPlan:
    """The two drawings of a disc, as drawn, and the order of cutting.

    What is marked comes first, while the blank lies still; then inside before outside: projections,
    feature holes, centre hole; the rim last, since it sets the disc free. Projections follow one
    another so that the machine travels little, on a laser also so that it does not heat one place.
    A press strikes the holes that one of its tools makes, and strikes them first, so that none is struck
    beside formed metal (common practice: formed hits last). Drawings from the star side are mirrored in
    Y, but for the lettering, which reads right on the side drawn.

    Args:
        disc: The disc; one without projections gives the bare blank.
        title: The tune's title; drawn in ASCII, and shortened where it is engraved.
        fingerprint: Of all inputs.
        not_good: The reason for which a disc with error-level findings is cut all the same, else None.
        part: Which disc of a set it is, such as "disc 2 of 3"; "" for one alone.
        order_number: The shop's, as it is lettered; None for none.
    """
    order, struck = cutting_order(disc), struck_holes(disc)
    at_mm = struck_at_mm(disc, order)
    marking = marking_of(disc)
    cut, held_slug_count = _cut(disc, order)
    words = Words(
        title=title,
        fingerprint=fingerprint,
        not_good=not_good,
        is_record=False,
        part=part,
        order_number=order_number,
        held_slug_count=held_slug_count,
    )
    drawings = [
        _drawing(disc, marking, entities, replace(words, is_record=is_record))
        for is_record, entities in ((False, cut), (True, (*formed_projections(disc, order), *cut)))
    ]
    return CutPlan(
        title=title,
        fingerprint=fingerprint,
        drawn_from=disc.cutter.drawn_from,
        not_good=not_good,
        part=part,
        disc=drawings[0],
        record=drawings[1],
        order=order,
        at_mm=_points_as_drawn_mm(at_mm, marking.mirror),
        tool=disc.pattern.tool,
        path=path_of(disc, drawings[0], order, struck),
        order_number=order_number,
        hole_hits=tuple(
            ToolHits(tool=hits.tool.tool, at_mm=_points_as_drawn_mm(hits.at_mm, marking.mirror)) for hits in struck
        ),
        not_struck=not_struck(disc.movement, disc.cutter),
    )


def _points_as_drawn_mm(points_mm: FloatArray, mirror: int) -> FloatArray:
    return points_mm if mirror > 0 else mirrored_points_mm(points_mm)


def _cut(disc: Disc, order: IntArray) -> tuple[tuple[Entity, ...], int]:
    """All that is cut, and how many slugs its bridges hold."""
    projections, blank = cut_projections(disc, order), holes(disc.movement)
    inner = (*blank, *projections) if disc.cutter.kind == "punch-press" else (*projections, *blank)
    drawn = [as_the_beam_runs(entity, disc.cutter) for entity in (*inner, rim(disc.movement))]
    slugs_held = [part for entity in drawn for part in with_held_slugs(entity, disc.movement, disc.cutter)]
    held = (part for entity in slugs_held for part in with_bridges(entity, disc.cutter))
    led_in = tuple(part for entity in held for part in with_leads(entity, disc.cutter))
    return led_in, loose_slug_count(drawn) - loose_slug_count(slugs_held)


def _drawing(disc: Disc, marking: Marking, entities: tuple[Entity, ...], words: Words) -> Drawing:
    letters = marking.lettered(inscriptions(disc, words)).letters
    marks = () if marking.mark is None else (marking.mark,)
    drawn = [_as_drawn(entity, marking.mirror) for entity in (*marks, *entities)]
    return Drawing(
        entities=(*drawn[: len(marks)], *letters, *drawn[len(marks) :]),
        comments=head_lines(disc, words),
    )


def _as_drawn(entity: Entity, mirror: int) -> Entity:
    return entity if mirror > 0 else mirrored(entity)
