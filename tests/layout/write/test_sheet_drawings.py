"""Sheets with discs as they are drawn: every disc whole, moved and nothing else, read by two other libraries."""

import itertools
import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import shapely

from tests.layout.examples import PRESS
from tests.layout.sheets.drawn import (
    FINGERPRINT,
    LED_IN,
    RIM_MM,
    disc_dxf,
    document_of,
    entities_of,
    job_for,
    laser,
    sheet_files,
)
from tests.layout.sheets.jobs import job_of, sheet
from tests.layout.write.reading import dxf_tags, header_values, read_dxf
from tests.outside.gdal_drawing import layers_of

MOVED_WITHIN_MM = 2e-6  # mm; a nanometre of the place and one of the vertex
R12 = disc_dxf(laser(drawing_release="R12"))
DISCS = {"laser": disc_dxf(), "leads and bridges": disc_dxf(LED_IN), "R12": R12, "press": disc_dxf(PRESS)}
every_disc = pytest.mark.parametrize("dxf", DISCS.values(), ids=DISCS.keys())
NOT_CUT = ("STOCK", "CLAMPS")


def sheets_of(files: dict[str, bytes]) -> list[tuple[bytes, list[tuple[float, float]]]]:
    """The drawing of every sheet and where its discs lie, by sheets.json, in cutting order."""
    told = json.loads(files["sheets.json"])["sheets"]
    return [(files[each["drawing"]], [(disc["x_mm"], disc["y_mm"]) for disc in each["discs"]]) for each in told]


@every_disc
def test_every_placed_disc_is_drawn_whole_in_its_own_order_and_only_moved(dxf: bytes) -> None:
    counts = []

    for drawing, places in sheets_of(sheet_files(job_for(), d1=dxf)):
        drawn = [entity for entity in entities_of(drawing) if entity[0] not in NOT_CUT]
        expected = [entity for x_mm, y_mm in places for entity in entities_of(dxf, x_mm, y_mm)]
        assert [entity[:2] for entity in drawn] == [entity[:2] for entity in expected]
        for (*_, vertices), (*_, wanted) in zip(drawn, expected, strict=True):
            off = np.abs(np.array(vertices) - np.array(wanted))
            assert off[:, :2].max() <= MOVED_WITHIN_MM
            assert off[:, 2].max() <= 1e-11  # bulges and radii are not touched
        counts.append(len(places))

    assert counts == [2, 1]


@every_disc
def test_gdal_sees_every_placed_disc_as_it_sees_the_disc_itself(dxf: bytes, tmp_path: Path) -> None:
    alone = read_dxf(dxf, tmp_path)

    for drawing, places in sheets_of(sheet_files(job_for(), d1=dxf)):
        seen = [(layer, shape) for layer, shape in read_dxf(drawing, tmp_path) if layer not in NOT_CUT]
        assert len(seen) == len(places) * len(alone)
        for place, (x_mm, y_mm) in enumerate(places):
            of_disc = seen[place * len(alone) : (place + 1) * len(alone)]
            for (layer, shape), (layer_alone, shape_alone) in zip(of_disc, alone, strict=True):
                assert layer == layer_alone
                back = shapely.get_coordinates(shape) - (x_mm, y_mm)
                assert np.abs(back - shapely.get_coordinates(shape_alone)).max() <= MOVED_WITHIN_MM


@every_disc
def test_nothing_of_a_disc_lies_outside_its_rim_but_leads_and_no_two_discs_meet(dxf: bytes, tmp_path: Path) -> None:
    per_disc = len(read_dxf(dxf, tmp_path))
    lead_mm = 2.0 if b"LEADS" in dxf else 0.0

    for drawing, places in sheets_of(sheet_files(job_for(gap_mm=4), d1=dxf)):
        seen = [(layer, shape) for layer, shape in read_dxf(drawing, tmp_path) if layer not in NOT_CUT]
        discs = []
        for place, centre in enumerate(places):
            of_disc = seen[place * per_disc : (place + 1) * per_disc]
            for layer, shape in of_disc:
                reach_mm = np.hypot(*(shapely.get_coordinates(shape) - centre).T).max()
                assert reach_mm <= RIM_MM / 2 + (lead_mm if layer == "LEADS" else 0) + 1e-5
            discs.append(shapely.convex_hull(shapely.GeometryCollection([shape for _, shape in of_disc])))
        assert all(not one.intersects(other) for one, other in itertools.combinations(discs, 2))


def test_each_disc_is_cut_free_after_all_else_of_it_and_before_the_next() -> None:
    [(drawing, places), _] = sheets_of(sheet_files(job_for(), d1=DISCS["laser"]))

    layers = [layer for layer, *_ in entities_of(drawing) if layer not in NOT_CUT]

    order = [layer for layer, _ in itertools.groupby(layers)]
    assert order == ["MARKS", "SLITS", "HOLES", "RIM"] * len(places)


def test_a_disc_without_a_drawing_stays_a_circle_among_drawn_ones() -> None:
    job = job_of([sheet(600, 260)], [(RIM_MM, 1), (100, 2)], gap_mm=3, margin_mm=3)

    files = sheet_files(job, d1=DISCS["laser"])

    circles = [entity for entity in entities_of(files["sheet-1.dxf"]) if entity[:2] == ("RIM", "circle")]
    assert sorted(radius for *_, [(_, _, radius)] in circles) == [50, 50, RIM_MM / 2]
    head = comments_of(files["sheet-1.dxf"])
    assert "disc d2: a plain circle, nominal rim without kerf" in head


def test_the_head_tells_what_is_cut_how_and_whose_discs_they_are() -> None:
    head = comments_of(sheet_files(job_for(), d1=DISCS["laser"])["sheet-1.dxf"])

    assert "Spring batch: sheet 1 of 2, from s1; 2 discs; millimetres, discs as drawn, see below" in head
    assert (
        "Cut in the order of the file, disc by disc: each is marked, cut inside and cut free before the next." in head
    )
    assert "MARKS are marked and never cut through." in head
    assert "never cut them" in head
    assert "Cut RIM alone" not in head
    assert f"disc d1: Spring dance; fingerprint {FINGERPRINT}" in head
    for line in ("blank: cold-rolled steel, 0.5 mm thick", "drawn from the label side", "outlines are finished edges"):
        assert head.count(line) == 1
    assert "hits" not in head


def test_the_head_tells_a_press_whose_centre_its_hits_go_round() -> None:
    head = comments_of(sheet_files(job_for(), d1=DISCS["press"])["sheet-1.dxf"])

    # the plain movement's projections, 1.2 mm wide, are formed by the press's tool L12
    assert "disc d1: hits: one point for each projection, where the tool strikes; tool L12" in head
    assert "hits go round the centre of their own disc, which parts.csv tells" in head
    assert head.count("drawn from the star side") == 1


def test_the_plan_tells_the_disc_that_each_drawing_is_of() -> None:
    told = json.loads(sheet_files(job_for(), d1=DISCS["laser"])["sheets.json"])

    assert told["discs"][0]["drawing"] == {"title": "Spring dance", "fingerprint": FINGERPRINT}


def test_a_sheet_is_of_the_release_that_its_drawings_ask_for(tmp_path: Path) -> None:
    new, old = (sheet_files(job_for(), d1=DISCS[name])["sheet-1.dxf"] for name in ("laser", "R12"))

    # DXF reference, $ACADVER: AC1009 is release 12, AC1024 is AutoCAD 2010
    assert (header_values(new)["$ACADVER"], header_values(old)["$ACADVER"]) == ("AC1024", "AC1009")
    assert "unit: mm; release R12 has no header variable for it" in comments_of(old)
    assert "LWPOLYLINE" not in old.decode("ascii")
    assert set(layers_of(old, tmp_path)) == set(layers_of(new, tmp_path))


@every_disc
def test_a_sheet_is_a_sound_file_with_the_layers_of_its_discs_and_its_own(dxf: bytes) -> None:
    document = document_of(sheet_files(job_for(), d1=dxf)["sheet-1.dxf"])

    assert document.audit().errors == []
    used = {entity[0] for entity in entities_of(dxf)} | {"STOCK"}
    assert {layer.dxf.name for layer in document.layers} - {"0", "Defpoints"} == used


def test_lettering_on_a_sheet_carries_its_words_as_on_the_disc() -> None:
    def words(dxf: bytes) -> list[Any]:
        return [
            entity.get_xdata("DISCWRIGHT")[0].value
            for entity in document_of(dxf).modelspace()
            if entity.has_xdata("DISCWRIGHT")
        ]

    drawing = sheet_files(job_for(), d1=DISCS["laser"])["sheet-1.dxf"]

    assert words(drawing) == 2 * words(DISCS["laser"])
    assert "Spring dance" in words(drawing)
    assert registered(drawing) == registered(DISCS["laser"])
    assert "DISCWRIGHT" in registered(drawing)
    assert "DISCWRIGHT" not in registered(sheet_files(job_for())["sheet-1.dxf"])


@every_disc
def test_the_same_job_and_drawings_give_the_same_bytes(dxf: bytes) -> None:
    assert sheet_files(job_for(), d1=dxf) == sheet_files(job_for(), d1=dxf)


def registered(dxf: bytes) -> list[str]:
    """The applications of the file's own table; a library that reads it would add what is missing."""
    tags = dxf_tags(dxf)
    records = [place for place, tag in enumerate(tags) if tag == (0, "APPID")]
    return [next(value for code, value in tags[place:] if code == 2) for place in records]


def comments_of(dxf: bytes) -> str:
    """The comments at the head, in one line."""
    return " ".join(value for code, value in dxf_tags(dxf) if code == 999)
