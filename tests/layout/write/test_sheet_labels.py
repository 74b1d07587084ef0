"""Labels beside discs on a sheet, and layers of the cutter's own: read back by ezdxf, judged by shapely."""

import csv
import io
import json
import math
from typing import Any

import ezdxf
import pytest
import shapely
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.filemanagement import read
from hypothesis import given, settings

from layout.documents.sheets import SheetJob
from layout.errors import DocumentError
from layout.sheet_walk import plan_sheets, sheet_files_of
from tests.layout.sheets.drawn import LED_IN, RIM_MM, disc_dxf, entities_of, laser
from tests.layout.sheets.jobs import job_of, jobs, sheet
from tests.thorough import tried

OWN: dict[str, Any] = {
    "SLITS": {"name": "CUT-INNER", "colour": 1},
    "RIM": {"name": "CUT_LAST", "colour": 5},
    "MARKS": {"name": "ENGRAVE", "colour": 3},
    "HOLES": {"name": "0", "colour": 4},
}
CLEAR_MM = 1.0


def labels_of(dxf: bytes, layer: str = "MARKS") -> dict[str, shapely.MultiLineString]:
    """What is lettered, by its words."""
    found: dict[str, list[list[tuple[float, float]]]] = {}
    words = ""
    for entity in read(io.StringIO(dxf.decode("ascii"))).modelspace():
        if entity.dxf.layer != layer:
            words = ""
            continue
        if entity.has_xdata("DISCWRIGHT"):
            words = entity.get_xdata("DISCWRIGHT")[0].value
        assert isinstance(entity, LWPolyline)
        found.setdefault(words, []).append([(x, y) for x, y, *_ in entity])
    return {text: shapely.MultiLineString(lines) for text, lines in found.items()}


def judged(job: SheetJob) -> int:
    """How many labels stand on the sheets of a job of plain circles, all of which keep their rules."""
    files = sheet_files_of(plan_sheets(job))
    by_id, labelled = {stock.id: stock for stock in job.stock}, 0
    for on in json.loads(files["sheets.json"])["sheets"]:
        stock = by_id[on["stock"]]
        zones = [shapely.box(c.x_mm, c.y_mm, c.x_mm + c.width_mm, c.y_mm + c.height_mm) for c in stock.clamps]
        metal = stock.shape().difference(shapely.union_all(zones)).buffer(-CLEAR_MM + 1e-5)
        boxes = {text: shapely.box(*lines.bounds) for text, lines in labels_of(files[on["drawing"]]).items()}
        told = {disc["label"]: disc for disc in on["discs"] if disc["label"] is not None}
        assert set(boxes) == set(told)
        for text, box in boxes.items():
            own = told[text]
            assert text == f"{own['disc']} {own['number']}".upper()
            assert metal.contains(box)
            apart = {
                (disc["x_mm"], disc["y_mm"]): box.distance(shapely.Point(disc["x_mm"], disc["y_mm"]))
                - disc["diameter_mm"] / 2
                for disc in on["discs"]
            }
            assert min(apart.values()) >= CLEAR_MM - 1e-5
            assert min(apart, key=lambda at: apart[at]) == (own["x_mm"], own["y_mm"])
            assert len(apart) == 1 or sorted(apart.values())[1] >= min(apart.values()) + 0.5 - 1e-5  # plainly its own
            assert all(box.distance(other) >= CLEAR_MM - 1e-5 for name, other in boxes.items() if name != text)
        labelled += len(boxes)
    return labelled


@settings(max_examples=tried(10), deadline=None)
@given(jobs())
def test_labels_keep_off_everything_and_stand_nearest_to_their_own_disc(job: SheetJob) -> None:
    judged(job)


def test_every_disc_of_a_full_sheet_is_lettered_with_its_id_and_number() -> None:
    job = job_of([sheet(1000, 500, quantity=2)], [(237, 10), (60, 3)], gap_mm=3, margin_mm=5)

    assert judged(job) == 13
    files = sheet_files_of(plan_sheets(job))
    rows = list(csv.DictReader(io.StringIO(files["parts.csv"].decode("ascii"), newline="")))
    lettered = [text for number in (1, 2) for text in labels_of(files[f"sheet-{number}.dxf"])]
    assert sorted(lettered) == sorted(f"{row['disc']} {row['number']}".upper() for row in rows)
    head = files["sheet-1.dxf"].decode("ascii").partition("SECTION")[0].replace("\n999\n", " ")
    assert "Letters on MARKS beside the discs say which is which: id and number, as in parts.csv." in head


def test_a_disc_without_room_for_letters_has_none_and_the_plan_says_so() -> None:
    # Beside a disc of d in a square of d a corner leaves a square of (1 − 1/√2)·d/2: 14.6 mm at 100, 1.5 mm at 10.
    assert judged(job_of([sheet(100, 100)], [(100, 1)])) == 1
    assert judged(job_of([sheet(10, 10)], [(10, 1)])) == 0


def test_a_job_without_labels_has_no_marks() -> None:
    files = sheet_files_of(plan_sheets(job_of([sheet(300, 300)], [(100, 2)], labels=False)))

    assert "MARKS" not in {layer for layer, *_ in entities_of(files["sheet-1.dxf"])}
    assert [disc["label"] for disc in json.loads(files["sheets.json"])["sheets"][0]["discs"]] == [None, None]


def test_a_label_stands_before_its_disc_and_off_its_leads() -> None:
    job = job_of([sheet(560, 300)], [(RIM_MM, 2)], gap_mm=6, margin_mm=5)
    drawn = entities_of(sheet_files_of(plan_sheets(job, {"d1": disc_dxf(LED_IN)}))["sheet-1.dxf"])
    boxes = labels_of(sheet_files_of(plan_sheets(job, {"d1": disc_dxf(LED_IN)}))["sheet-1.dxf"])

    leads = [shapely.LineString([at[:2] for at in each]) for layer, _, each in drawn if layer == "LEADS"]
    beside = [boxes["D1 1"], boxes["D1 2"]]
    assert len(leads) >= 6
    assert min(lead.distance(letters) for lead in leads for letters in beside) >= CLEAR_MM - 1e-5
    layers = [layer for layer, *_ in drawn if layer != "STOCK"]
    assert layers[0] == "MARKS"


def test_sheets_have_the_layers_of_the_cutter_and_every_disc_on_them() -> None:
    job = job_of([sheet(560, 300)], [(RIM_MM, 2)], gap_mm=6, margin_mm=5, layers=OWN)
    plain = job_of([sheet(560, 300)], [(RIM_MM, 2)], gap_mm=6, margin_mm=5)

    mine = sheet_files_of(plan_sheets(job, {"d1": disc_dxf(laser(layers=OWN))}))["sheet-1.dxf"]
    ours = sheet_files_of(plan_sheets(plain, {"d1": disc_dxf()}))["sheet-1.dxf"]

    names = {ours: layer["name"] for ours, layer in OWN.items()}
    assert entities_of(mine) == [(names.get(layer, layer), *rest) for layer, *rest in entities_of(ours)]
    document = read(io.StringIO(mine.decode("ascii")))
    colours = {layer.dxf.name: layer.color for layer in document.layers}
    assert {layer["name"]: layer["colour"] for layer in OWN.values()}.items() <= colours.items()
    assert document.audit().errors == []
    head = mine.decode("ascii").partition("SECTION")[0].replace("\n999\n", " ")
    assert "ENGRAVE are marked and never cut through." in head


def test_plain_circles_stand_on_the_cutters_own_layer_too() -> None:
    dxf = sheet_files_of(plan_sheets(job_of([sheet(300, 300)], [(100, 2)], layers=OWN)))["sheet-1.dxf"]

    assert [layer for layer, kind, _ in entities_of(dxf) if kind == "circle"] == ["CUT_LAST", "CUT_LAST"]
    assert "Cut CUT_LAST alone, in the order of the file." in dxf.decode("ascii")


def test_a_drawing_with_layers_that_the_job_does_not_name_is_told_what_to_state() -> None:
    job = job_of([sheet(560, 300)], [(RIM_MM, 2)], gap_mm=6, margin_mm=5)

    with pytest.raises(DocumentError, match="layers names of its own, state its layers in the job"):
        plan_sheets(job, {"d1": disc_dxf(laser(layers=OWN))})


@pytest.mark.parametrize(
    ("layers", "says"),
    [
        (
            {"RIM": {"name": "Stock", "colour": 1}},
            "RIM would be the layer 'Stock', which is never cut",
        ),
        ({"RIM": {"name": "marks", "colour": 1}}, "RIM and MARKS would share the layer 'MARKS'"),
        ({"LINES": {"name": "A", "colour": 1}}, "no layer of ours is called 'LINES'; ours are SLITS, SLOTS"),
        ({"RIM": {"name": "../x", "colour": 1}}, "/layers/RIM/name"),
        ({"RIM": {"name": "A", "colour": 1e300}}, "/layers/RIM/colour"),
    ],
)
def test_layers_that_cannot_be_are_refused(layers: dict[str, Any], says: str) -> None:
    with pytest.raises(DocumentError) as refusal:
        job_of([sheet(300, 300)], [(100, 2)], layers=layers)

    assert says in str(refusal.value)


@pytest.mark.parametrize("release", ["R12", "R2010"])
def test_a_disc_in_lines_and_arcs_is_placed_entity_by_entity(release: str) -> None:
    document = read(io.StringIO(disc_dxf(laser(drawing_release=release)).decode("ascii")))
    space = document.modelspace()
    for circle in list(space.query('CIRCLE[layer=="RIM"]')):
        radius_mm = circle.dxf.radius
        space.delete_entity(circle)
        for from_deg in (0, 120, 240):
            space.add_arc((0, 0), radius_mm, from_deg, from_deg + 120, dxfattribs={"layer": "RIM"})
    stream = io.StringIO()
    document.write(stream)
    in_arcs = stream.getvalue().encode("ascii")
    job = job_of([sheet(260, 260)], [(RIM_MM, 1)], labels=False)

    files = sheet_files_of(plan_sheets(job, {"d1": in_arcs}))

    [disc] = json.loads(files["sheets.json"])["sheets"][0]["discs"]
    placed = [entity for entity in entities_of(files["sheet-1.dxf"]) if entity[0] != "STOCK"]
    wanted = entities_of(in_arcs, disc["x_mm"], disc["y_mm"])
    assert [entity[:2] for entity in placed] == [entity[:2] for entity in wanted]
    for (*_, found), (*_, expected) in zip(placed, wanted, strict=True):
        assert [tuple(at) for at in found] == [pytest.approx(tuple(at), abs=2e-6) for at in expected]
    assert [kind for layer, kind, _ in placed if layer == "RIM"] == ["arc"] * 3
    version = ezdxf.read(io.StringIO(files["sheet-1.dxf"].decode("ascii"))).dxfversion  # type: ignore[attr-defined]
    assert version == {"R12": "AC1009", "R2010": "AC1024"}[release]
    assert math.isclose(disc["diameter_mm"], RIM_MM)


@pytest.mark.parametrize(("diameter_mm", "gap_mm"), [(40, 14), (12, 9), (20, 4)])
def test_labels_among_many_discs_are_nobody_elses_and_apart(diameter_mm: float, gap_mm: float) -> None:
    job = job_of([sheet(300, 220)], [(diameter_mm, 20)], gap_mm=gap_mm, margin_mm=8)

    assert judged(job) >= 5
