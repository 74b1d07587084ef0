import json
from typing import Any

import pytest

from layout.documents.sheets import LIMITS, SheetJob, read_sheet_job
from layout.errors import DocumentError

SQUARE = [[0, 0], [200, 0], [200, 200], [0, 200]]
JOB: dict[str, Any] = {
    "format": "discwright-sheets/1",
    "title": "spring batch",
    "gap_mm": 4,
    "margin_mm": {"value": 10, "plus_minus": 0.5},
    "stock": [{"id": "full", "width_mm": 1000, "height_mm": 500, "quantity": 3, "lot": "B 12/4"}],
    "discs": [{"id": "fernhollow-31", "diameter_mm": 237, "quantity": 12}],
}


def read(**changed: Any) -> SheetJob:
    return read_sheet_job(json.dumps(JOB | changed))


def faults(**changed: Any) -> list[tuple[str, str]]:
    with pytest.raises(DocumentError) as caught:
        read(**changed)
    assert caught.value.document == "sheet job"
    return [(problem.pointer, problem.message) for problem in caught.value.problems]


def stock(**fields: Any) -> list[dict[str, Any]]:
    return [{"id": "rest"} | fields]


def test_a_job_is_read() -> None:
    job = read()

    assert (job.gap_mm, job.margin_mm, job.least_remnant_mm) == (4, 10, 100)
    assert job.stock[0].shape().area == 500_000
    assert job.discs[0].quantity == 12


def test_an_outline_that_crosses_itself_is_refused_at_its_place() -> None:
    [(pointer, message)] = faults(stock=stock(outline_mm=[[0, 0], [100, 100], [100, 0], [0, 100]]))

    assert pointer == "/stock/0/outline_mm"
    assert message.startswith("the outline crosses or touches itself (Self-intersection[50 50])")
    assert message.endswith("give its corners in order, once round")


def test_an_outline_without_area_is_refused() -> None:
    [(pointer, message)] = faults(stock=stock(outline_mm=[[0, 0], [0.5, 0], [0, 0.5]]))

    assert (pointer, message) == (
        "/stock/0/outline_mm",
        "the outline holds 0.125 mm²; at least 1 mm² are needed",
    )


@pytest.mark.parametrize(
    ("fields", "said"),
    [
        ({}, "a sheet needs width_mm and height_mm, or outline_mm"),
        ({"width_mm": 9}, "a sheet needs width_mm and height_mm, or outline_mm"),
        (
            {"width_mm": 9, "outline_mm": SQUARE},
            "a sheet is given by width_mm and height_mm, or by outline_mm; leave one of them out",
        ),
    ],
)
def test_a_sheet_has_sides_or_an_outline(fields: dict[str, Any], said: str) -> None:
    assert faults(stock=stock(**fields)) == [("/stock/0", said)]


def test_openings_lie_inside_the_sheet() -> None:
    [(pointer, message)] = faults(stock=stock(outline_mm=SQUARE, openings_mm=[[[150, 150], [250, 150], [150, 190]]]))

    assert pointer == "/stock/0"
    assert message.startswith("openings_mm must lie inside the sheet and apart from each other: ")


def test_a_lot_that_a_spreadsheet_would_run_is_refused() -> None:
    [(pointer, _)] = faults(stock=stock(width_mm=9, height_mm=9, lot="=1+1"))

    assert pointer == "/stock/0/lot"


def test_too_many_corners_are_refused() -> None:
    ring = [[x, 0] for x in range(LIMITS.outline_corners)] + [[0, 100]]

    [(pointer, message)] = faults(stock=stock(outline_mm=ring))

    assert pointer == "/stock/0/outline_mm"
    assert "at most 500 items" in message


def test_too_many_corners_of_outline_and_openings_together_are_refused() -> None:
    opening = [[1 + x / 10, 50] for x in range(LIMITS.outline_corners - 4)] + [[50, 100]]

    [(pointer, message)] = faults(stock=stock(outline_mm=SQUARE, openings_mm=[opening]))

    assert pointer == "/stock/0"
    assert message == (
        "outline_mm and openings_mm have 501 corners, 500 are allowed; leave out corners that hardly turn"
    )


def test_too_many_discs_or_sheets_are_refused_with_what_is_allowed() -> None:
    assert faults(discs=[{"id": "a", "diameter_mm": 9, "quantity": 2001}]) == [
        ("/discs", "2001 discs are more than the 2000 of one job; make several jobs of it")
    ]
    assert faults(stock=stock(width_mm=9, height_mm=9, quantity=201)) == [
        ("/stock", "201 sheets are more than the 200 of one job; make several jobs of it")
    ]


def test_too_many_corners_of_all_outlines_are_refused() -> None:
    ring = [[x / 10, 0] for x in range(450)] + [[0, 100]]

    listed = [{"id": f"rest-{n}", "outline_mm": ring} for n in range(9)]

    assert faults(stock=listed) == [
        ("/stock", "the outlines have 4059 corners, 1600 are allowed; make several jobs of it")  # 9 × 451
    ]


def test_an_id_given_twice_is_refused() -> None:
    both = [{"id": "a", "diameter_mm": 9, "quantity": 1}, {"id": "a", "diameter_mm": 8, "quantity": 1}]

    assert faults(discs=both) == [("/discs", "the id 'a' is given twice; give each its own")]


def test_every_fault_is_told_with_its_place() -> None:
    discs = [{"id": "A", "diameter_mm": -1, "quantity": 0, "colour": "red"}]

    found = faults(discs=discs, gap_mm="4", stock=[])

    assert [pointer for pointer, _ in found] == [
        "/gap_mm",
        "/stock",
        "/discs/0/id",
        "/discs/0/diameter_mm",
        "/discs/0/quantity",
        "/discs/0/colour",
    ]
    assert found[0][1] == "a number is needed, got '4'"
    assert found[1][1] == "the list is empty; name one at least"


def test_a_sheet_beyond_the_largest_traded_is_refused() -> None:
    [(pointer, message)] = faults(stock=stock(width_mm=6001, height_mm=10))

    assert pointer == "/stock/0/width_mm"
    assert "less than or equal to 6000" in message


@pytest.mark.parametrize("corners", [[], [[0, 0]], [[0, 0], [9, 9]]])
def test_an_outline_of_fewer_than_three_corners_is_refused(corners: list[list[float]]) -> None:
    assert faults(stock=stock(outline_mm=corners)) == [
        ("/stock/0/outline_mm", f"an outline has at least 3 corners, got {len(corners)}")
    ]


def test_text_that_is_no_json_is_told() -> None:
    with pytest.raises(DocumentError, match=r"sheet job: .*not JSON"):
        read_sheet_job("{")


def test_a_disc_smaller_than_a_speck_is_refused() -> None:
    [(pointer, message)] = faults(discs=[{"id": "a", "diameter_mm": 0.999, "quantity": 1}])

    assert pointer == "/discs/0/diameter_mm"
    assert "greater than or equal to 1, got 0.999" in message
    assert read(discs=[{"id": "a", "diameter_mm": 1, "quantity": 1}]).discs[0].diameter_mm == 1
