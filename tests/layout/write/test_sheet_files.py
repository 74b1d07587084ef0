import csv
import io
import json

import ezdxf
import numpy as np
import pytest

from layout.documents.sheets import SheetJob
from layout.sheet_walk import plan_sheets, sheet_files_of
from layout.sheets.plan import SheetPlan
from tests.layout.sheets.jobs import discs_of_drawing, faults_of, job_of, sheet

CLAMP = {"x_mm": 0, "y_mm": 0, "width_mm": 60, "height_mm": 30}
TWO_SHEETS = job_of(
    [
        {"id": "rest", "outline_mm": [[0, 0], [220, 0], [220, 110], [0, 110]], "lot": "A 7"},
        sheet(500, 400, id="full", clamps=[CLAMP], openings_mm=[[[200, 200], [260, 200], [230, 240]]]),
    ],
    [(100, 5), (700, 2), (60.5, 3)],
    gap_mm=2,
    margin_mm=3,
    title="Spring batch",
)


def files(job: SheetJob) -> dict[str, bytes]:
    return sheet_files_of(plan_sheets(job))


def assert_what_the_drawings_cut_keeps_every_rule(plan: SheetPlan, job: SheetJob) -> None:
    """A law of every plan; test_arranging holds it against plans of any job."""
    written = sheet_files_of(plan)
    by_id = {stock.id: stock for stock in job.stock}

    for on in json.loads(written["sheets.json"])["sheets"]:
        discs = discs_of_drawing(written[on["drawing"]])
        assert len(discs) == len(on["discs"])
        assert faults_of(discs, by_id[on["stock"]], job) == []


def test_a_drawing_is_a_sound_file_with_the_sheet_on_layers_of_its_own() -> None:
    document = ezdxf.read(io.StringIO(files(TWO_SHEETS)["sheet-2.dxf"].decode("ascii")))

    assert document.audit().errors == []
    assert document.units == ezdxf.units.MM
    # the library that reads adds Defpoints
    assert {layer.dxf.name for layer in document.layers} - {"Defpoints"} == {"0", "STOCK", "CLAMPS", "RIM", "MARKS"}
    space = document.modelspace()
    outlines = [[(x, y) for x, y, *_ in line] for line in space.query('LWPOLYLINE[layer=="STOCK"]')]
    assert outlines[0] == [(0, 0), (500, 0), (500, 400), (0, 400)]
    assert set(outlines[1]) == {(200, 200), (260, 200), (230, 240)}
    [zone] = space.query('LWPOLYLINE[layer=="CLAMPS"]')
    assert [(x, y) for x, y, *_ in zone] == [(0, 0), (60, 0), (60, 30), (0, 30)]
    assert {entity.dxf.layer for entity in space if entity.dxftype() == "CIRCLE"} == {"RIM"}


def test_a_drawing_says_at_its_head_what_is_cut_and_what_never() -> None:
    head = files(TWO_SHEETS)["sheet-1.dxf"].decode("ascii").partition("SECTION")[0]

    assert "Spring batch: sheet 1 of 2, from rest, lot A 7; 2 discs; millimetres, nominal rims without kerf" in head
    assert "Cut RIM alone, in the order of the file." in head
    assert "never cut them" in head


def test_the_same_job_gives_the_same_bytes() -> None:
    assert files(TWO_SHEETS) == files(TWO_SHEETS)


def test_the_part_list_the_plan_and_the_drawings_tell_the_same_discs() -> None:
    written = files(TWO_SHEETS)
    rows = list(csv.DictReader(io.StringIO(written["parts.csv"].decode("ascii"), newline="")))
    told = json.loads(written["sheets.json"])["sheets"]

    listed = [(row["sheet"], float(row["x_mm"]), float(row["y_mm"]), float(row["diameter_mm"])) for row in rows]
    planned = [(str(on["sheet"]), d["x_mm"], d["y_mm"], d["diameter_mm"]) for on in told for d in on["discs"]]
    drawn = [
        (str(on["sheet"]), x, y, 2 * radius) for on in told for x, y, radius in discs_of_drawing(written[on["drawing"]])
    ]
    assert listed == planned == drawn
    assert [row["sequence"] for row in rows] == ["1", "2", "1", "2", "3", "4", "5", "6"]
    assert [row["number"] for row in rows if row["disc"] == "d1"] == ["1", "2", "3", "4", "5"]
    assert {(row["sheet"], row["stock"], row["lot"]) for row in rows} == {("1", "rest", "A 7"), ("2", "full", "")}


def test_the_part_list_has_the_lines_csv_wants() -> None:
    lines = files(TWO_SHEETS)["parts.csv"].split(b"\r\n")

    assert lines[0] == b"sheet,stock,lot,sequence,disc,number,x_mm,y_mm,diameter_mm"
    assert lines[-1] == b""
    assert len(lines) == 1 + 8 + 1  # header, discs, the end of the last line


def test_what_is_not_placed_is_a_finding_with_its_numbers() -> None:
    told = json.loads(files(TWO_SHEETS)["sheets.json"])

    assert not told["complete"]
    assert told["discs"][1] == {
        "disc": "d2",
        "diameter_mm": 700,
        "wanted": 2,
        "placed": 0,
        "not_placed": 2,
        "drawing": None,
    }
    [finding] = told["findings"]
    assert finding["code"] == "disc-not-placed"
    assert finding["level"] == "error"
    assert finding["message"] == "2 of 2 discs d2 (700 mm) fit on no sheet; 2 sheets are used, 0 are left."
    assert (finding["measured"], finding["limit"]) == (0, 2)
    assert finding["remedy"].startswith("Add stock that is at least as wide as the disc and twice the margin")


def test_the_share_used_is_that_of_the_discs_in_the_metal() -> None:
    told = json.loads(files(job_of([sheet(200, 100)], [(100, 2)]))["sheets.json"])

    # two discs of 100 mm in 200 × 100 mm: π/4
    assert told["sheets"][0]["used_percent"] == pytest.approx(100 * np.pi / 4, abs=0.005)
    assert told["sheets"][0]["area_mm2"] == 20_000


def test_a_job_of_which_nothing_fits_has_no_drawing() -> None:
    written = files(job_of([sheet(50, 50)], [(100, 1)]))

    assert list(written) == ["sheets.json", "parts.csv"]
    assert written["parts.csv"].count(b"\r\n") == 1
