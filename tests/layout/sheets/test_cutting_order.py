import numpy as np

from layout.sheets import arrange_on_sheets
from layout.sheets.plan import Sheet, SheetPlan
from tests.layout.sheets.jobs import job_of, sheet

AXES = {"left": (0, 1), "right": (0, -1), "bottom": (1, 1), "top": (1, -1)}


def along(on: Sheet) -> np.ndarray:
    """How far each disc lies from the end where cutting begins, in cutting order."""
    axis, sign = AXES[on.cut_from]
    from_end = sign * on.centres_mm[:, axis]
    return np.asarray(from_end - from_end.min())


def strips(on: Sheet) -> np.ndarray:
    return np.asarray(np.floor(along(on) / on.strip_mm + 1e-6))


def assert_no_disc_is_cut_after_one_of_a_later_strip(plan: SheetPlan) -> None:
    """A law of every plan; test_arranging holds it against plans of any job."""
    for on in plan.sheets:
        assert (np.diff(strips(on)) >= 0).all()


def assert_the_travel_told_is_that_of_the_order(plan: SheetPlan) -> None:
    """A law of every plan; test_arranging holds it against plans of any job."""
    for on in plan.sheets:
        steps = [np.linalg.norm(b - a) for a, b in zip(on.centres_mm[:-1], on.centres_mm[1:], strict=True)]
        assert abs(on.travel_mm - sum(steps)) < 1e-6


def test_the_strips_of_a_full_sheet_are_cut_one_after_the_other() -> None:
    clamp = {"x_mm": 0, "y_mm": 0, "width_mm": 40, "height_mm": 40}
    plan = arrange_on_sheets(job_of([sheet(1000, 800, clamps=[clamp])], [(150, 12), (60, 110)], gap_mm=4))

    found = strips(plan.sheets[0])
    assert len(plan.sheets[0].kind) > 60
    assert len(set(found.tolist())) > 3
    assert (np.diff(found) >= 0).all()


def test_cutting_begins_far_from_the_clamps() -> None:
    for x_mm, y_mm, begins in ((0, 200, "right"), (590, 200, "left"), (250, 0, "top"), (250, 590, "bottom")):
        clamp = {"x_mm": x_mm, "y_mm": y_mm, "width_mm": 10, "height_mm": 10}
        plan = arrange_on_sheets(job_of([sheet(600, 600, clamps=[clamp])], [(100, 6)]))

        assert plan.sheets[0].cut_from == begins


def test_rows_are_cut_to_and_fro_without_a_detour() -> None:
    plan = arrange_on_sheets(job_of([sheet(400, 300)], [(100, 12)]))

    # twelve centres on a square grid of 100: eleven steps of one pitch is the least there can be
    assert round(plan.sheets[0].travel_mm, 6) == 1100
