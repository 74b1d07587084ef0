"""Bends against the shop's least radius and the direction of rolling."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import Code, Level, check
from layout.check.forming import bends_are_wide_enough, bends_lie_across_the_rolling
from layout.documents import Cutter
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with

TIGHT_LASER = cutter_with({"fold/inside_radius_mm": 0.4, "fold/least_inside_radius_mm": 0.5})


def rolled(rolled_deg: float | None, sounds_s: list[float], cutter: Cutter = LASER) -> Disc:
    """A disc that turns 6 degrees a second from 30 on: an edge that sounds at t lies at 30 + 6 t degrees."""
    movement = movement_with({"disc/rolled_along_deg": rolled_deg})
    return disc_of(movement, [(1, sounds) for sounds in sounds_s], cutter)


def test_a_fold_tighter_than_the_shop_bends_is_an_error() -> None:
    [finding] = bends_are_wide_enough(disc_of(PLAIN, [(1, 1.0)], TIGHT_LASER))

    assert (finding.code, finding.level) == (Code.BEND_TOO_TIGHT, Level.ERROR)
    assert (finding.measured, finding.limit, finding.unit) == (0.4, 0.5, "mm")
    assert finding.message == (
        "The folds have an inside radius of 0.400 mm; fibre-laser folds none below 0.500 mm: "
        "the metal cracks on the outside of the bend."
    )
    assert finding.remedy == "Fold over a rounder anvil and raise fold.inside_radius_mm of the cutter document."


@pytest.mark.parametrize("least_mm", [0.4, 0.3, None])
def test_a_fold_as_round_as_the_shop_asks_passes_and_what_is_not_stated_is_not_checked(least_mm: float | None) -> None:
    cutter = cutter_with({"fold/inside_radius_mm": 0.4, "fold/least_inside_radius_mm": least_mm})

    assert bends_are_wide_enough(disc_of(PLAIN, [(1, 1.0)], cutter)) == []


def test_slots_and_lances_are_not_folds() -> None:
    assert bends_are_wide_enough(disc_of(SHIPPED[2], [(1, 1.0)], TIGHT_LASER)) == []
    assert bends_are_wide_enough(disc_of(PLAIN, [(1, 1.0)], PRESS)) == []


def test_folds_along_the_rolling_are_one_advice_with_their_number_and_where_they_lie() -> None:
    # Edges at 30 + 6 t: 90, 119.9, 120.1, 150 and 300 degrees; rolled along 90: 0, 29.9, 30.1, 60 and 30 apart.
    disc = rolled(90, [10.0, 89.9 / 6, 90.1 / 6, 20.0, 45.0])

    [finding] = bends_lie_across_the_rolling(disc)

    assert (finding.code, finding.level) == (Code.FOLDS_ALONG_ROLLING, Level.ADVICE)
    assert finding.measured == pytest.approx(0.0, abs=1e-9)
    assert (finding.limit, finding.unit) == (30.0, "deg")
    assert finding.at.projections == (0,)
    assert finding.at.tracks == (1,)
    assert finding.at.angle_deg == pytest.approx(90.0)
    assert finding.message == (
        "2 of 5 folds lie less than 30 degrees from the direction the sheet is rolled in: those from 60 to 120 and "
        "from 240 to 300 degrees on the disc; the nearest lies 0.0 degrees from it. "
        "Bent along the rolling, metal cracks more easily."
    )
    # Edges at 90, 119.9, 120.1, 150 and 120 (300) as lines: rolled along 0 all are 30 degrees off or more.
    assert finding.remedy == (
        "Lay the blank so that it is rolled along 0 degrees (0 such bends); or try one on a scrap of the same sheet "
        "first; or use a rounder bend or a softer sheet."
    )


def test_where_no_other_way_of_laying_the_blank_is_better_none_is_told() -> None:
    # Twelve edges 15 degrees apart are the same lines whichever way the blank lies, but for those on the limit.
    disc = rolled(7.5, [t / 6 for t in range(0, 180, 15)])

    [finding] = bends_lie_across_the_rolling(disc)

    # 30 + 15 i within 30 of 7.5 or 187.5: 30, 165, 180, 195: 22.5, 22.5, 7.5, 7.5 apart; on 0 only 165, 180, 195 are
    assert finding.message.startswith("4 of 12 folds")
    assert "rolled along 0 degrees (3 such bends)" in finding.remedy
    [best] = bends_lie_across_the_rolling(rolled(0, [t / 6 for t in range(0, 180, 15)]))
    assert best.message.startswith("3 of 12 folds")
    assert best.remedy.startswith("Try one on a scrap")


def test_folds_across_the_rolling_pass() -> None:
    assert bends_lie_across_the_rolling(rolled(0, [10.0, 12.0])) == []  # edges at 90 and 102


def test_a_direction_of_rolling_that_is_not_stated_is_not_checked() -> None:
    assert bends_lie_across_the_rolling(rolled(None, [10.0])) == []


def test_lanced_tabs_are_bent_too_and_slots_are_not() -> None:
    [finding] = bends_lie_across_the_rolling(rolled(90, [10.0], PRESS))
    slots = SHIPPED[2].model_copy(update={"disc": SHIPPED[2].disc.model_copy(update={"rolled_along_deg": 90.0})})

    assert finding.message.startswith("1 of 1 lanced tabs lie")
    assert bends_lie_across_the_rolling(disc_of(slots, [(1, 8.0)])) == []


def test_a_lance_is_bent_along_the_radius_where_its_tool_strikes() -> None:
    # The frame stands square w from the edge: asin(w/50) further round, w being negative behind the edge.
    disc = rolled(90, [10.0], PRESS)
    off_deg = math.degrees(math.asin(disc.pattern.strike_u_mm / 50))

    [finding] = bends_lie_across_the_rolling(disc)

    assert abs(off_deg) > 0.5
    assert finding.measured == pytest.approx(abs(off_deg), abs=1e-9)
    # ahead of the line by as much on a disc rolled along the bend itself: the disc turns clockwise, s = 1
    [along] = bends_lie_across_the_rolling(rolled(90 - off_deg, [10.0], PRESS))
    assert along.measured == pytest.approx(0.0, abs=1e-9)


@settings(deadline=None)
@given(st.floats(-360, 360), st.floats(-360, 360), st.lists(st.floats(0, 50), min_size=1, max_size=8))
def test_turning_the_disc_and_its_rolling_together_changes_nothing(
    rolled_deg: float, turn_deg: float, sounds_s: list[float]
) -> None:
    disc = rolled(rolled_deg, sounds_s)
    lines_deg = (np.degrees(disc.edge_angle_rad) - rolled_deg) % 180
    expected = np.minimum(lines_deg, 180 - lines_deg)

    found = bends_lie_across_the_rolling(disc)

    near = expected[expected < 30 - 1e-6]
    assert bool(found) or not len(near)
    if found:
        assert found[0].measured == pytest.approx(float(expected.min()), abs=1e-6)


def test_the_checks_of_bends_are_part_of_checking_a_disc() -> None:
    movement = movement_with({"disc/rolled_along_deg": 90})

    codes = {finding.code for finding in check(disc_of(movement, [(1, 10.0)], TIGHT_LASER))}
    empty = {finding.code for finding in check(disc_of(movement, [], TIGHT_LASER))}

    assert {Code.BEND_TOO_TIGHT, Code.FOLDS_ALONG_ROLLING} <= codes
    assert empty == {Code.NOTHING_TO_PLAY}
    assert bends_lie_across_the_rolling(disc_of(movement, [])) == []
    assert math.degrees(disc_of(movement, [(1, 10.0)]).edge_angle_rad[0]) == pytest.approx(90.0)
