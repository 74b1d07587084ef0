import math

import numpy as np
import pytest
import shapely
from hypothesis import given, settings

from layout.documents.sheets import SheetJob
from layout.sheets import arrange_on_sheets
from layout.sheets.plan import SheetPlan
from tests.layout.sheets.jobs import faults_of_plan, job_of, jobs, sheet
from tests.layout.sheets.test_cutting_order import (
    assert_no_disc_is_cut_after_one_of_a_later_strip,
    assert_the_travel_told_is_that_of_the_order,
)
from tests.layout.sheets.test_remnants import assert_remnants_lie_in_the_sheet_and_off_every_disc
from tests.layout.write.test_sheet_files import assert_what_the_drawings_cut_keeps_every_rule
from tests.thorough import tried

DENSEST = math.pi / math.sqrt(12)  # of equal discs in the plane: A. Thue 1910, L. Fejes Tóth 1940


def counts(plan: SheetPlan) -> list[int]:
    return [len(on.kind) for on in plan.sheets]


def assert_no_fuller_than_is_proved_possible(plan: SheetPlan) -> None:
    for on in plan.sheets:
        if len(set(on.radius_mm.tolist())) == 1:
            hull = shapely.Polygon(on.piece.outline_mm).convex_hull
            assert np.pi * (on.radius_mm**2).sum() <= DENSEST * hull.area


# One property for all laws of a plan: arranging takes its time, and so each law is held against all thirty jobs.
@settings(max_examples=tried(30), deadline=None)
@given(jobs())
def test_whatever_the_job_its_plan_keeps_every_law(job: SheetJob) -> None:
    plan = arrange_on_sheets(job)

    assert faults_of_plan(plan, job) == []  # no two discs overlap and all lie inside
    assert [kind.placed_count for kind in plan.kinds] == [
        sum(int((on.kind == place).sum()) for on in plan.sheets) for place in range(len(job.discs))
    ]
    assert all(0 <= kind.missing_count <= kind.wanted_count for kind in plan.kinds)
    assert_no_fuller_than_is_proved_possible(plan)
    assert_remnants_lie_in_the_sheet_and_off_every_disc(plan)
    assert_no_disc_is_cut_after_one_of_a_later_strip(plan)
    assert_the_travel_told_is_that_of_the_order(plan)
    assert_what_the_drawings_cut_keeps_every_rule(plan, job)


def test_discs_that_fill_a_strip_exactly_all_fit() -> None:
    plan = arrange_on_sheets(job_of([sheet(1000, 100)], [(100, 11)]))

    assert counts(plan) == [10]  # 10 × 100 mm; an eleventh has no room
    assert plan.kinds[0].missing_count == 1


def test_gaps_and_margins_count_to_the_rim() -> None:
    # two margins of 10, four discs of 100, three gaps of 5: 20 + 400 + 15 = 435
    for width_mm, fit in ((435, 4), (434.99, 3)):
        plan = arrange_on_sheets(job_of([sheet(width_mm, 120)], [(100, 9)], gap_mm=5, margin_mm=10))

        assert counts(plan) == [fit]


def test_staggered_rows_beat_square_ones() -> None:
    # Staggered rows stand √3/2 of a pitch apart: 1 + floor((1000 − 100) / 86.6) = 11 rows of 10 and 9, so
    # 6 × 10 + 5 × 9 = 105, where square rows hold 100.
    plan = arrange_on_sheets(job_of([sheet(1000, 1000)], [(100, 200)]))

    assert counts(plan)[0] >= 105


def test_what_the_width_leaves_over_moves_the_rows_together() -> None:
    # Centres in 1.3 × h pitches: two a row, every second row moved by 0.3, rows √(1 − 0.09) = 0.954 apart. Of a
    # height of 20.1 pitches 21 rows, 42 discs, where square rows have 21 rows too, but only to 20 × 0.954 = 19.08.
    plan = arrange_on_sheets(job_of([sheet(230, 100 + 1950)], [(100, 100)]))

    assert counts(plan)[0] >= 42  # square rows: floor(19.5) + 1 = 20 rows, 40 discs


def test_two_sizes_share_a_sheet() -> None:
    # Four of 100 in a square of 200 leave a hole of 100 (√2 − 1) = 41.42 in the middle.
    for small_mm, placed in ((41.4, 1), (41.5, 0)):
        plan = arrange_on_sheets(job_of([sheet(200, 200)], [(small_mm, 1), (100, 4)]))

        assert [kind.placed_count for kind in plan.kinds] == [placed, 4]


def test_a_disc_is_placed_where_rows_have_no_room_for_it() -> None:
    # Five in a square: one in each corner and one in the middle, r = (√2 − 1)/2 of the side; rows hold four.
    diameter_mm = 1000 * (math.sqrt(2) - 1)

    assert counts(arrange_on_sheets(job_of([sheet(1000, 1000)], [(diameter_mm - 0.01, 9)]))) == [5]
    assert counts(arrange_on_sheets(job_of([sheet(1000, 1000)], [(diameter_mm + 0.01, 9)]))) == [4]


def test_stock_is_used_in_the_order_of_the_job() -> None:
    remnant = {"id": "rest", "outline_mm": [[0, 0], [220, 0], [220, 110], [0, 110]], "lot": "A 7"}
    plan = arrange_on_sheets(job_of([remnant, sheet(1000, 1000, id="full", quantity=3)], [(100, 5)]))

    assert [(on.stock, on.copy, on.lot, len(on.kind)) for on in plan.sheets] == [
        ("rest", 1, "A 7", 2),
        ("full", 1, "", 3),
    ]
    assert plan.untouched_count == 2


def test_a_disc_larger_than_every_sheet_is_not_placed_and_the_others_are() -> None:
    plan = arrange_on_sheets(job_of([sheet(300, 300)], [(301, 1), (100, 1)]))

    assert [(kind.id, kind.missing_count) for kind in plan.kinds] == [("d1", 1), ("d2", 0)]
    assert not plan.complete


def test_a_sheet_that_is_all_clamp_zone_holds_nothing() -> None:
    clamp = {"x_mm": -1, "y_mm": -1, "width_mm": 400, "height_mm": 400}

    plan = arrange_on_sheets(job_of([sheet(300, 300, clamps=[clamp])], [(100, 1)]))

    assert (plan.sheets, plan.untouched_count) == ((), 1)


def test_a_clamp_zone_may_touch_a_rim_and_no_more() -> None:
    clamp = {"x_mm": 0, "y_mm": 0, "width_mm": 100, "height_mm": 100}
    for diameter_mm, placed in ((100, 1), (100.01, 0)):
        plan = arrange_on_sheets(job_of([sheet(200, 100, clamps=[clamp])], [(diameter_mm, 1)]))

        assert plan.kinds[0].placed_count == placed


def test_a_corner_given_twice_changes_nothing() -> None:
    corners = [[0, 0], [300, 0], [300, 0], [300, 200], [0, 200], [0, 200]]

    plan = arrange_on_sheets(job_of([{"outline_mm": corners}], [(100, 9)]))

    assert counts(plan) == [6]  # 3 × 2


def test_an_outline_may_be_given_either_way_round() -> None:
    corners = [[0, 0], [300, 0], [300, 200], [0, 200]]

    for ring in (corners, corners[::-1]):
        assert counts(arrange_on_sheets(job_of([{"outline_mm": ring}], [(100, 9)]))) == [6]


def test_discs_of_a_few_that_fit_lie_together_and_leave_one_piece() -> None:
    plan = arrange_on_sheets(job_of([sheet(1000, 1000)], [(100, 4)], least_remnant_mm=50))

    reach = np.ptp(plan.sheets[0].centres_mm, axis=0) + 100
    assert np.prod(reach) == pytest.approx(200 * 200)  # two by two: a smaller rectangle does not hold four in rows


def test_the_same_job_gives_the_same_plan() -> None:
    job = job_of([sheet(700, 500)], [(170, 12), (60, 9)], gap_mm=3, margin_mm=8)

    one, other = arrange_on_sheets(job), arrange_on_sheets(job)

    assert one.fingerprint == other.fingerprint
    assert (one.sheets[0].centres_mm == other.sheets[0].centres_mm).all()


def test_another_gap_gives_another_fingerprint() -> None:
    first, second = (job_of([sheet(300, 300)], [(100, 1)], gap_mm=gap_mm) for gap_mm in (1, 2))

    assert arrange_on_sheets(first).fingerprint != arrange_on_sheets(second).fingerprint
