import pytest
import shapely

from layout.sheets import arrange_on_sheets
from layout.sheets.plan import Piece, SheetPlan
from tests.layout.sheets.jobs import job_of, sheet


def polygon(piece: Piece) -> shapely.Polygon:
    return shapely.Polygon(piece.outline_mm, piece.openings_mm)


def assert_remnants_lie_in_the_sheet_and_off_every_disc(plan: SheetPlan) -> None:
    """A law of every plan; test_arranging holds it against plans of any job."""
    for on in plan.sheets:
        whole = polygon(on.piece)
        for remnant in map(polygon, on.remnants):
            assert remnant.is_valid
            assert whole.buffer(1e-6).contains(remnant)
            for centre, radius_mm in zip(on.centres_mm, on.radius_mm.tolist(), strict=True):
                assert remnant.distance(shapely.Point(centre)) >= radius_mm


def test_a_remnant_can_be_stock_again() -> None:
    first = arrange_on_sheets(job_of([sheet(1000, 500)], [(100, 20)])).sheets[0].remnants[0]
    again = {"outline_mm": first.outline_mm.tolist(), "openings_mm": [ring.tolist() for ring in first.openings_mm]}

    plan = arrange_on_sheets(job_of([again], [(200, 2)]))

    assert plan.complete


def test_one_disc_in_a_corner_leaves_the_sheet_less_the_disc() -> None:
    # 300 × 300 less a disc of 100 is 82,146 mm². What is lost beside it is narrower than 20 mm, or within half a
    # millimetre of an edge: a few hundred mm² along 1200 mm of edge and 314 mm of rim.
    [remnant] = arrange_on_sheets(job_of([sheet(300, 300)], [(100, 1)], least_remnant_mm=20)).sheets[0].remnants

    assert remnant.area_mm2 == pytest.approx(82_146, rel=0.03)
    assert remnant.area_mm2 < 82_146
    assert remnant.area_mm2 == pytest.approx(polygon(remnant).area)


def test_what_is_narrower_than_asked_is_scrap() -> None:
    job = [sheet(300, 100)], [(100, 2)]

    kept = arrange_on_sheets(job_of(*job, least_remnant_mm=90)).sheets[0].remnants
    scrap = arrange_on_sheets(job_of(*job, least_remnant_mm=120)).sheets[0].remnants

    assert len(kept) == 1
    assert scrap == ()


def test_a_remnant_whose_outline_starts_beside_a_disc_stays_off_it() -> None:
    # Found by the law of every plan: simplifying moved the first corner of this outline 0.7 mm, 0.03 mm into a disc.
    clamp = {"x_mm": 98, "y_mm": 241, "width_mm": 1, "height_mm": 66}
    discs = [(50.6875, 11), (291.5, 1)]

    plan = arrange_on_sheets(job_of([sheet(348, 558, clamps=[clamp])], discs, gap_mm=1, margin_mm=1))

    assert plan.sheets[0].remnants
    assert_remnants_lie_in_the_sheet_and_off_every_disc(plan)


def test_a_disc_out_of_the_middle_leaves_an_opening() -> None:
    clamps = [
        {"x_mm": 0, "y_mm": 0, "width_mm": 600, "height_mm": 250},
        {"x_mm": 0, "y_mm": 350, "width_mm": 600, "height_mm": 250},
        {"x_mm": 0, "y_mm": 0, "width_mm": 250, "height_mm": 600},
        {"x_mm": 350, "y_mm": 0, "width_mm": 250, "height_mm": 600},
    ]
    [remnant] = arrange_on_sheets(job_of([sheet(600, 600, clamps=clamps)], [(100, 1)])).sheets[0].remnants

    assert len(remnant.openings_mm) == 1
