"""Where bridges stand that hold a disc in its sheet: metal left in the rim's cut, on its arcs, clear of notches."""

import math
from dataclasses import dataclass
from itertools import pairwise

from layout.documents.cutter import Cutter
from layout.documents.making import Bridges, SlugBridges
from layout.documents.movement import Movement
from layout.mechanics.turning import FULL_TURN_RAD

MOST_SHARE = 0.5  # of any arc; a rim that is more metal than cut does not come out of its sheet (common practice)


@dataclass(frozen=True, slots=True, kw_only=True)
class Gap:
    """A stretch of the rim that is not cut, by the angles of its ends, anticlockwise; the second is the larger."""

    from_rad: float
    to_rad: float


def gap_mm(cutter: Cutter, bridges: Bridges | SlugBridges) -> float:
    """How long the gap in the drawn line is: the beam takes half a kerf more at either end."""
    return bridges.width_mm + cutter.kerf_mm


def gaps_in(arcs_rad: list[tuple[float, float]], *, count: int, width_rad: float) -> list[list[Gap]] | None:
    """Gaps for bridges on the arcs of a rim, or any other stretches, shared out by their lengths and even on each.

    Every bridge goes to the arc whose stretches are then longest (as seats are given by D'Hondt's
    method); the gaps of an arc stand in the middles of equal stretches of it.

    Args:
        arcs_rad: First and last angle of each arc between two notches, anticlockwise; one of a full turn
            where there are none.
        count: Bridges wanted.
        width_rad: Of a gap.

    Returns:
        The gaps of each arc; None where they would take more than MOST_SHARE of one.
    """
    lengths_rad = [last - first for first, last in arcs_rad]
    on_arc = [0] * len(arcs_rad)
    for _ in range(count if arcs_rad else 0):
        most = max(range(len(arcs_rad)), key=lambda arc: (round(lengths_rad[arc] / (on_arc[arc] + 1), 9), -arc))
        on_arc[most] += 1
    if not arcs_rad or any(n * width_rad > MOST_SHARE * long for n, long in zip(on_arc, lengths_rad, strict=True)):
        return None
    gaps = []
    for (first, _), long, n in zip(arcs_rad, lengths_rad, on_arc, strict=True):
        middles = [first + long * (place + 0.5) / n for place in range(n)]
        gaps.append([Gap(from_rad=middle - width_rad / 2, to_rad=middle + width_rad / 2) for middle in middles])
    return gaps


def arcs_of_rim_rad(movement: Movement) -> list[tuple[float, float]]:
    """First and last angle of each arc of the rim between its notches, as finished."""
    rim_mm = movement.disc.outer_diameter_mm / 2
    spans = []
    for feature in movement.disc.features:
        if feature.shape == "notch":
            floor_mm = feature.radius_mm - feature.width_mm / 2
            half_mm = min(math.sqrt(max(rim_mm**2 - floor_mm**2, 0.0)), feature.length_mm / 2)
            half_rad = math.asin(min(half_mm / rim_mm, 1.0))
            spans += [(math.radians(angle) % FULL_TURN_RAD, half_rad) for angle in feature.angles_deg]
    if not spans:
        return [(0.0, FULL_TURN_RAD)]
    spans.sort()
    around = [*spans, (spans[0][0] + FULL_TURN_RAD, spans[0][1])]
    return [(at + half, next_at - next_half) for (at, half), (next_at, next_half) in pairwise(around)]
