"""What a document says of the worth of a number is checked, also where it is of no further use."""

import json
from collections.abc import Callable
from typing import Any

import pytest

from layout.documents import read_cutter, read_settings, shipped_text
from layout.documents.sheets import read_sheet_job
from layout.errors import DocumentError

CUTTER = json.loads(shipped_text("fibre-laser"))
JOB = {
    "format": "discwright-sheets/1",
    "title": "a job",
    "gap_mm": 5,
    "margin_mm": 10,
    "stock": [{"id": "steel", "width_mm": 500, "height_mm": 300}],
    "discs": [{"id": "small", "quantity": 2, "diameter_mm": 120}],
}
WORTH = {"value": 10.0, "plus_minus": 0.1, "basis": "measured"}


@pytest.mark.parametrize(
    ("read", "document", "field"),
    [(read_cutter, CUTTER, "kerf_mm"), (read_settings, {}, "largest_nudge_ms"), (read_sheet_job, JOB, "margin_mm")],
    ids=["cutter", "settings", "sheet job"],
)
@pytest.mark.parametrize(
    ("wrong", "pointer"),
    [({"basis": "guessed"}, "basis"), ({"plus_minus": -1}, "plus_minus"), ({"basis": {}}, "basis")],
)
def test_a_worth_that_is_none_is_told_with_its_place(
    read: Callable[[str], Any], document: dict[str, Any], field: str, wrong: dict[str, Any], pointer: str
) -> None:
    read(json.dumps({**document, field: WORTH | {"value": 0.1}}))

    with pytest.raises(DocumentError) as caught:
        read(json.dumps({**document, field: WORTH | wrong | {"value": 0.1}}))

    assert [problem.pointer for problem in caught.value.problems] == [f"/{field}/{pointer}"]
