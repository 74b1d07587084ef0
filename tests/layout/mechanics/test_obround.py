"""A slot with round ends fills its box to the ends and no further, whichever of its sides is the longer."""

import math

import numpy as np
import pytest

from layout.mechanics.drawn import DrawnLine, places_mm
from layout.mechanics.obround import obround_mm


@pytest.mark.parametrize(("length_mm", "width_mm"), [(6.0, 3.0), (3.0, 6.0), (2.0, 1.9)])
def test_a_slot_is_as_long_and_as_wide_as_asked(length_mm: float, width_mm: float) -> None:
    points_mm, bulges = obround_mm(length_mm, width_mm)

    outline = DrawnLine(layer="HOLES", points_mm=points_mm, bulge_ratio=bulges, closed=True)
    reached_mm = places_mm(outline)  # vertices, and the middles of both half circles

    assert np.ptp(reached_mm, axis=0) == pytest.approx([width_mm, length_mm])
    assert reached_mm.mean(axis=0) == pytest.approx([0.0, 0.0])


def test_a_slot_runs_anticlockwise_round_two_straights_and_a_circle() -> None:
    for length_mm, width_mm in ((6.0, 3.0), (3.0, 6.0)):
        points_mm, bulges = obround_mm(length_mm, width_mm)
        ends = np.roll(points_mm, -1, axis=0)
        polygon_mm2 = float(np.sum(points_mm[:, 0] * ends[:, 1] - ends[:, 0] * points_mm[:, 1])) / 2

        # Shoelace: the 3 by 3 rectangle between the ends, anticlockwise; two half circles of 1.5 mm bulge out of it.
        assert polygon_mm2 == pytest.approx(9.0)
        assert math.fsum(math.atan(bulge) * 4 for bulge in bulges) == pytest.approx(2 * math.pi)
