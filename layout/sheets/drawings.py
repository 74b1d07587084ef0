"""Whether the drawings of discs fit a sheet job: their rims, their leads, and each other."""

from collections.abc import Iterator, Mapping

from layout.documents.sheets import LIMITS, SheetJob
from layout.errors import DocumentError, Problem
from layout.mechanics.drawn import DrawnDisc

RIM_WITHIN_MM = 0.01  # mm; a fifth of a cutter's position tolerance, above any rounding of a file
_ROUNDED_MM = 1e-5  # mm; what the rounding of a file may add to a length
_FINISHED = "outlines are finished edges"  # how a head's line on the kerf begins where nothing is compensated


def check_drawings(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> None:
    """Raise where drawings cannot be placed as the job asks.

    Discs of one sheet lie side by side in one run of the machine, so all are drawn for the same sheet, from the same
    side and with the same kerf. Leads reach out of the rim into the gap: where it holds two of them, no lead
    ever meets another disc or its lead; and the margin holds one.

    Args:
        job: The job.
        drawings: By the id of the disc.

    Raises:
        DocumentError: Names every fault found.
    """
    problems = tuple(_problems(job, drawings))
    if problems:
        raise DocumentError(document="sheet job", problems=problems)


def farthest_lead_mm(drawings: Mapping[str, DrawnDisc]) -> float:
    """How far leads reach out of a rim at most; 0 without drawings."""
    return max((drawn.lead_reach_mm for drawn in drawings.values()), default=0.0)


def _problems(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> Iterator[Problem]:
    yield from _unknown(job, drawings)
    yield from _rims(job, drawings)
    yield from _unlike(drawings)
    yield from _without_kerf(job, drawings)
    yield from _leads(job, farthest_lead_mm(drawings))
    vertices = sum(each.quantity * drawings[each.id].vertex_count for each in job.discs if each.id in drawings)
    if vertices > LIMITS.drawn_vertices:
        message = (
            f"the drawings of all discs have {vertices} vertices together, {LIMITS.drawn_vertices} are allowed; make "
            "several jobs of it"
        )
        yield Problem(pointer="/discs", message=message)


def _unknown(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> Iterator[Problem]:
    ids = [each.id for each in job.discs]
    for disc_id in drawings:
        if disc_id not in ids:
            message = f"a drawing is given for {disc_id!r}, which is none of the job's discs; they are {', '.join(ids)}"
            yield Problem(pointer="/discs", message=message)


def _rims(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> Iterator[Problem]:
    for place, wanted in enumerate(job.discs):
        drawn = drawings.get(wanted.id)
        if drawn is None:
            continue
        off_mm = min(abs(rim_mm - wanted.diameter_mm) for rim_mm in (drawn.rim_diameter_mm, drawn.nominal_diameter_mm))
        if off_mm > RIM_WITHIN_MM:
            nominal = f" (compensated, {drawn.nominal_diameter_mm:.3f} nominal)" if drawn.kerf_taken_mm else ""
            message = (
                f"the rim in the drawing of {wanted.id} is {drawn.rim_diameter_mm:.3f} mm in diameter{nominal}, the "
                f"job says {wanted.diameter_mm:g}; allowed are {RIM_WITHIN_MM:g} mm between them: correct the job, or "
                "give the drawing of this disc"
            )
            yield Problem(pointer=f"/discs/{place}/diameter_mm", message=message)


def diameters_mm(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> list[float]:
    """What each disc of a job takes up: its diameter, or its rim as it is drawn where that is larger."""
    drawn_mm = [drawings[each.id].rim_diameter_mm if each.id in drawings else 0.0 for each in job.discs]
    return [
        rim_mm if rim_mm > each.diameter_mm + _ROUNDED_MM else each.diameter_mm
        for each, rim_mm in zip(job.discs, drawn_mm, strict=True)
    ]


def _unlike(drawings: Mapping[str, DrawnDisc]) -> Iterator[Problem]:
    """Where the heads of two drawings do not agree; what a head does not tell is not held against it."""
    for what in ("blank", "side", "kerf"):
        told = {disc_id: line for disc_id, drawn in drawings.items() if (line := getattr(drawn, what))}
        first = next(iter(told), "")
        for disc_id, line in told.items():
            if line != told[first]:
                message = (
                    f"the drawings of {first} and {disc_id} cannot lie on one sheet: one says {told[first]!r}, the "
                    f"other {line!r}; make a job for each"
                )
                yield Problem(pointer="/discs", message=message)


def _without_kerf(job: SheetJob, drawings: Mapping[str, DrawnDisc]) -> Iterator[Problem]:
    compensated = [disc_id for disc_id, drawn in drawings.items() if _is_compensated(drawn)]
    plain = [each.id for each in job.discs if each.id not in drawings]
    if compensated and plain:
        message = (
            f"the drawing of {compensated[0]} is compensated for the kerf, and {plain[0]} has no drawing and would be "
            "a plain circle without it; give a drawing of every disc, or make two jobs"
        )
        yield Problem(pointer="/discs", message=message)


def _is_compensated(drawn: DrawnDisc) -> bool:
    return bool(drawn.kerf) and not drawn.kerf.startswith(_FINISHED)


def _leads(job: SheetJob, reach_mm: float) -> Iterator[Problem]:
    out = f"leads in the drawings reach {reach_mm:.3f} mm out of the rim"
    if job.gap_mm < 2 * reach_mm - _ROUNDED_MM:
        message = f"{out}, and a gap of {job.gap_mm:g} mm does not hold two; make it at least {2 * reach_mm:.3f}"
        yield Problem(pointer="/gap_mm", message=message)
    margins = [("/margin_mm", job.margin_mm)] + [
        (f"/stock/{place}/margin_mm", stock.margin_mm)
        for place, stock in enumerate(job.stock)
        if stock.margin_mm is not None
    ]
    for pointer, margin_mm in margins:
        if margin_mm < reach_mm - _ROUNDED_MM:
            message = f"{out}, and a margin of {margin_mm:g} mm does not hold one; make it at least {reach_mm:.3f}"
            yield Problem(pointer=pointer, message=message)
