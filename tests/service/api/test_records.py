"""The JSON files that answers hold are described in full: the models name every member there is, and no other."""

import json
from pathlib import Path
from typing import Any

import pytest
from pydantic import BaseModel

import service.demo
from layout.documents import Settings, shipped_cutter, shipped_cutter_ids, shipped_movement, shipped_movement_ids
from layout.documents.settings import read_settings
from layout.documents.sheets import read_sheet_job
from layout.sheet_walk import plan_sheets, sheet_files_of
from layout.trial_walk import trial_files
from layout.walk import files_of, lay_out_discs
from service.api.models.records import LayoutRecord
from service.api.models.report_records import MakingRecord, ReportRecord
from service.api.models.workshop_records import SheetPlanAnswer, TrialPieceAnswer
from service.api.operations.common import SMALL_TUNE

PAIRS = [(movement, cutter) for movement in shipped_movement_ids() for cutter in shipped_cutter_ids()]
DEMO_TUNE = Path(service.demo.__file__).with_name("tune.mid").read_bytes()
RECORDS: dict[str, type[BaseModel]] = {
    "layout.json": LayoutRecord,
    "report.json": ReportRecord,
    "making.json": MakingRecord,
}
STOCK = {"id": "full", "width_mm": 800, "height_mm": 300, "quantity": 2, "lot": "B 12"}
CLAMPED = {**STOCK, "id": "clamped", "clamps": [{"x_mm": 0, "y_mm": 0, "width_mm": 40, "height_mm": 30}]}
DISCS = [{"id": "ours", "diameter_mm": 237, "quantity": 9}, {"id": "great", "diameter_mm": 900, "quantity": 1}]


def assert_described(model: type[BaseModel], text: bytes) -> None:
    """See that a model takes a record, every member of it, and that nothing is there that it leaves out."""
    model.model_validate_json(text, strict=True)


def records_of(tune: bytes, movement: str, cutter: str, settings: Settings) -> list[tuple[str, bytes]]:
    layouts = lay_out_discs(tune, shipped_movement(movement), shipped_cutter(cutter), settings, None)
    return [(name, files_of(one)[name]) for one in layouts for name in RECORDS]


@pytest.mark.parametrize(("movement", "cutter"), PAIRS)
def test_every_record_of_a_layout_is_described(movement: str, cutter: str) -> None:
    for name, text in records_of(SMALL_TUNE, movement, cutter, Settings()):
        assert_described(RECORDS[name], text)


def test_records_of_a_set_at_another_speed_are_described() -> None:
    settings = read_settings(json.dumps({"discs": 2, "speed": {"mode": "fit"}, "order": "W 7"}))

    for name, text in records_of(DEMO_TUNE, "fernhollow-31", "turn-press", settings):
        assert_described(RECORDS[name], text)


@pytest.mark.parametrize(("movement", "cutter"), PAIRS)
def test_every_trial_piece_is_described(movement: str, cutter: str) -> None:
    assert_described(
        TrialPieceAnswer, trial_files(shipped_movement(movement), shipped_cutter(cutter))["trial-piece.json"]
    )


@pytest.mark.parametrize("stock", [STOCK, CLAMPED], ids=["whole", "clamped"])
def test_every_plan_of_sheets_is_described(stock: dict[str, Any]) -> None:
    job = {
        "format": "discwright-sheets/1",
        "title": "t",
        "gap_mm": 5,
        "margin_mm": 10,
        "stock": [stock],
        "discs": DISCS,
    }

    assert_described(SheetPlanAnswer, sheet_files_of(plan_sheets(read_sheet_job(json.dumps(job))))["sheets.json"])
