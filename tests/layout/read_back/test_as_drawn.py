"""A disc's drawing read to be placed: all of it, in its order, and nothing that is not ours."""

import contextlib
import io
from collections.abc import Callable

import ezdxf
import pytest
from ezdxf.document import Drawing
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.documents.cutter import Layer
from layout.errors import DrawingReadError
from layout.mechanics.drawn import DrawnArc, DrawnCircle, DrawnDisc, DrawnLine, DrawnPoint
from layout.read_back.as_drawn import read_as_drawn
from layout.read_back.limits import MOST_MIB
from tests.layout.examples import PRESS, movement_with
from tests.layout.sheets.drawn import (
    FINGERPRINT,
    LED_IN,
    RIM_MM,
    Entity,
    disc_dxf,
    document_of,
    entities_of,
    laser,
    record_dxf,
)
from tests.thorough import tried

GOOD = disc_dxf()
R12 = disc_dxf(laser(drawing_release="R12"))
NOTCHED = movement_with(
    {
        "disc/features": [
            {
                "purpose": "location",
                "shape": "notch",
                "radius_mm": 120,
                "length_mm": 6,
                "width_mm": 4,
                "first_at_deg": 350,
            }
        ]
    }
)


def told(drawn: DrawnDisc) -> list[Entity]:
    found: list[Entity] = []
    for each in drawn.entities:
        match each:
            case DrawnCircle():
                found.append((each.layer, "circle", [(*each.centre_mm.tolist(), each.radius_mm)]))
            case DrawnArc():
                circle = (*each.centre_mm.tolist(), each.radius_mm)
                found.append((each.layer, "arc", [circle, (each.from_deg, each.to_deg)]))
            case DrawnPoint():
                found.append((each.layer, "point", [(*each.at_mm.tolist(), 0.0)]))
            case DrawnLine():
                vertices = zip(each.points_mm.tolist(), each.bulge_ratio.tolist(), strict=True)
                kind = "closed" if each.closed else "open"
                found.append((each.layer, kind, [(x, y, bulge) for (x, y), bulge in vertices]))
    return found


def changed(change: Callable[[Drawing], object], dxf: bytes = GOOD) -> bytes:
    """The drawing with something done to its document; comments at its head are lost on the way."""
    document = document_of(dxf)
    change(document)
    stream = io.StringIO()
    document.write(stream)
    return stream.getvalue().encode("utf-8")


@pytest.mark.parametrize(
    "dxf",
    [GOOD, disc_dxf(LED_IN), disc_dxf(PRESS), disc_dxf(laser(drawing_release="R12")), disc_dxf(movement=NOTCHED)],
    ids=["laser", "leads and bridges", "press", "R12", "notch"],
)
def test_every_entity_is_read_as_another_library_reads_it_and_in_its_order(dxf: bytes) -> None:
    assert told(read_as_drawn(dxf)) == entities_of(dxf)


def exploded(document: Drawing) -> None:
    """Every polyline in its lines and arcs, as programs for old controls write them; the order stays."""
    space = document.modelspace()
    for entity in list(space):
        if entity.dxftype() in ("LWPOLYLINE", "POLYLINE"):
            for part in list(entity.virtual_entities()):  # type: ignore[attr-defined]
                part.dxf.layer = entity.dxf.layer
                space.add_entity(part)
        else:
            space.unlink_entity(entity)
            space.add_entity(entity)
    for entity in list(space):
        if entity.dxftype() in ("LWPOLYLINE", "POLYLINE"):
            space.delete_entity(entity)


@pytest.mark.parametrize("dxf", [disc_dxf(movement=NOTCHED), R12], ids=["R2010", "R12"])
def test_a_disc_in_lines_and_arcs_is_read_as_another_library_reads_it(dxf: bytes) -> None:
    taken_apart = changed(exploded, dxf)

    drawn = read_as_drawn(taken_apart)

    assert told(drawn) == entities_of(taken_apart)
    assert {kind for _, kind, _ in told(drawn)} >= ({"arc", "open"} if dxf is not R12 else {"open"})
    assert drawn.rim_diameter_mm == pytest.approx(RIM_MM, abs=5e-6)


def test_layers_of_the_cutters_own_are_read_as_ours() -> None:
    own = {"SLITS": {"name": "CUT-INNER", "colour": 1}, "RIM": {"name": "0", "colour": 7}}
    layers = {name: Layer(**layer) for name, layer in own.items()}

    assert told(read_as_drawn(disc_dxf(laser(layers=own)), layers)) == told(read_as_drawn(GOOD))


def test_the_head_tells_whose_disc_it_is_and_how_it_is_drawn() -> None:
    drawn = read_as_drawn(GOOD)

    assert (drawn.title, drawn.fingerprint, drawn.release) == ("Spring dance", FINGERPRINT, "R2010")
    assert drawn.blank == "blank: cold-rolled steel, 0.5 mm thick"
    assert drawn.side == "drawn from the label side"
    assert drawn.kerf == "outlines are finished edges; kerf is not added"
    assert read_as_drawn(disc_dxf(laser(drawing_release="R12"))).release == "R12"


def test_a_head_that_another_program_dropped_leaves_nothing_told() -> None:
    drawn = read_as_drawn(changed(lambda document: None))

    assert (drawn.title, drawn.fingerprint, drawn.blank, drawn.side, drawn.kerf) == ("", "", "", "", "")
    assert told(drawn) == entities_of(GOOD)


def test_a_fingerprint_that_is_none_is_not_told() -> None:
    dxf = GOOD.replace(b"fingerprint: " + FINGERPRINT.encode(), b"fingerprint: =HYPERLINK(1)")

    assert read_as_drawn(dxf).fingerprint == ""


@pytest.mark.parametrize(
    "dxf", [GOOD, disc_dxf(LED_IN), disc_dxf(movement=NOTCHED)], ids=["circle", "bridges", "notch"]
)
def test_a_rim_in_one_piece_or_in_several_has_its_diameter(dxf: bytes) -> None:
    assert read_as_drawn(dxf).rim_diameter_mm == pytest.approx(RIM_MM, abs=5e-6)


def test_leads_reach_out_of_the_rim_by_their_length() -> None:
    assert read_as_drawn(GOOD).lead_reach_mm == 0
    assert read_as_drawn(disc_dxf(LED_IN)).lead_reach_mm == pytest.approx(2, abs=5e-6)


def test_lettering_keeps_its_words() -> None:
    words = [each.words for each in read_as_drawn(GOOD).entities if isinstance(each, DrawnLine) and each.words]

    assert "Spring dance" in words
    assert FINGERPRINT in words


def add(layer: str, add_entity: str, *arguments: object, **attributes: object) -> Callable[[Drawing], object]:
    def change(document: Drawing) -> None:
        space = document.modelspace()
        getattr(space, add_entity)(*arguments, dxfattribs={"layer": layer} | attributes)
        entities = list(space)
        space.entity_space.entities = [entities[-1], *entities[:-1]]  # before the rim

    return change


def moved(x_mm: float, y_mm: float) -> Callable[[Drawing], object]:
    return lambda document: [entity.translate(x_mm, y_mm, 0) for entity in document.modelspace()]


def without_rim(document: Drawing) -> None:
    for entity in document.modelspace().query('*[layer=="RIM"]'):
        document.modelspace().delete_entity(entity)


def rim_first(document: Drawing) -> None:
    space = document.modelspace()
    space.entity_space.entities.sort(key=lambda entity: entity.dxf.layer != "RIM")


def lettered(document: Drawing) -> None:
    line = next(each for each in document.modelspace() if each.has_xdata("DISCWRIGHT"))
    line.set_xdata("DISCWRIGHT", [(1000, "NOT GOOD TO CUT")])


def in_inches(document: Drawing) -> None:
    document.units = ezdxf.units.IN


@pytest.mark.parametrize(
    ("dxf", "message"),
    [
        (record_dxf(), r"this is a record, for reading, never for cutting \(its head says so\); use disc.dxf"),
        (
            changed(lambda document: None, record_dxf()),
            "the disc is lettered 'RECORD - NOT FOR CUTTING'; such a disc is not cut, use another",
        ),
        (
            changed(add("TRACKS", "add_circle", (0, 0), 50.0)),
            r"a record, for reading, never for cutting \(it has entities on TRACKS\); use disc.dxf",
        ),
        (
            disc_dxf(not_good="a gift"),
            "the file itself says NOT GOOD TO CUT: a gift; lay the tune out anew without that fault",
        ),
        (changed(lettered), "the disc is lettered 'NOT GOOD TO CUT'; such a disc is not cut, use another"),
        (
            disc_dxf(laser(layers={"SLITS": {"name": "CUT-INNER", "colour": 1}})),
            "layer 'CUT-INNER' is none of SLITS, SLOTS, HITS, HOLES, RIM, LEADS, MARKS, which alone can be placed; "
            "where the cutter gives layers names of its own, state its layers in the job",
        ),
        (changed(add("0", "add_point", (0, 0))), "layer '0' is none of SLITS, "),
        (
            changed(add("SLITS", "add_ellipse", (0, 0), (50, 0), 0.5)),
            "layer SLITS has an entity of type ELLIPSE that is of another kind; placed are LWPOLYLINE, POLYLINE, "
            "CIRCLE, ARC, POINT and LINE, flat and seen from above; use disc.dxf as it was written",
        ),
        (
            changed(add("SLITS", "add_arc", (0, 0), 50, 0, 1e300)),
            r"layer SLITS has an arc from 0 to 1e\+300 degrees, allowed are angles within 720",
        ),
        (changed(add("SLITS", "add_arc", (0, 0), 50, float("nan"), 90)), "has an arc from nan to 90 degrees"),
        (changed(add("SLITS", "add_arc", (0, 0), -1, 0, 90)), "layer SLITS has a circle of radius -1 mm"),
        (
            changed(add("SLITS", "add_arc", (100, 0), 30, -10, 10)),
            "SLITS reaches 130.000 mm from the centre, outside the rim at 120.000 mm",
        ),
        (changed(add("MARKS", "add_text", "hello")), "layer MARKS has an entity of type TEXT"),
        (
            changed(add("HOLES", "add_circle", (0, 0), 5, extrusion=(0, 0, -1))),
            "type CIRCLE that is drawn on the back of the sheet or tilted",
        ),
        (changed(add("HOLES", "add_circle", (0, 0), -5.0)), "layer HOLES has a circle of radius -5 mm"),
        (
            changed(add("HOLES", "add_circle", (0, 0), 1e9)),
            "radius 1e[+]09 mm, allowed are radii above 0 and up to 2000",
        ),
        (
            changed(add("SLITS", "add_polyline3d", [(0, 0, 0), (1, 1, 1)])),
            "that is fitted to a curve, in space, or a mesh",
        ),
        (changed(add("SLITS", "add_polyline2d", []), R12), "type POLYLINE that is without vertices"),
        (
            changed(add("SLITS", "add_line", (0, 0), (2001, 0))),
            r"layer SLITS has a vertex at \(2001, 0\) with bulge 0; coordinates must be within 2000 mm of the centre; "
            "check the drawing's units and origin",
        ),
        (changed(add("SLITS", "add_line", (0, 0), (float("nan"), 0))), r"a vertex at \(nan, 0\) with bulge 0"),
        (changed(without_rim), "nothing stands on the layer RIM, so the disc has no rim"),
        (changed(rim_first), "MARKS comes after the rim, which would set the disc free before; use disc.dxf as it was"),
        (
            changed(moved(12, 0)),
            r"the rim is not centred on the origin: its middle lies near \(12.000, 0.000\), and at most 0.01 mm are "
            "allowed; move the drawing, or use disc.dxf as it was written",
        ),
        (changed(moved(0, -0.02)), r"its middle lies near \(0.000, -0.020\)"),
        (changed(moved(1, 1), disc_dxf(movement=NOTCHED)), r"its middle lies near \(1.2\d\d, 1.2\d\d\)"),
        (changed(moved(-0.1, 0), disc_dxf(LED_IN)), "the rim is not centred on the origin"),
        (
            changed(add("SLITS", "add_line", (0, 0), (0, 121))),
            "SLITS reaches 121.000 mm from the centre, outside the rim at 120.000 mm, where only LEADS may go",
        ),
        (changed(in_inches), r"drawn in inches \(\$INSUNITS 1\), allowed are millimetres"),
        (b"%PDF-1.7", "not a DXF file that can be read"),
        (b"", "the file is empty; give a DXF file"),
        (b"0" * (MOST_MIB * 2**20 + 1), "10.0 MiB, allowed are 10"),
        (GOOD.replace(b"  0\nEOF\n", b""), "the file is damaged, cuts may be missing; use disc.dxf as it was written"),
    ],
    ids=lambda value: value[:40] if isinstance(value, str) else "",
)
def test_what_is_not_plainly_a_disc_to_cut_is_refused_with_a_reason(dxf: bytes, message: str) -> None:
    with pytest.raises(DrawingReadError, match="^drawing: .*" + message):
        read_as_drawn(dxf)


@pytest.mark.parametrize(
    "dxf", [GOOD, disc_dxf(movement=NOTCHED), disc_dxf(LED_IN)], ids=["circle", "notch", "bridges"]
)
def test_a_rim_off_by_less_than_the_allowed_is_taken(dxf: bytes) -> None:
    assert read_as_drawn(changed(moved(0.003, -0.003), dxf)).rim_diameter_mm == pytest.approx(RIM_MM, abs=0.01)


@settings(max_examples=tried(150), deadline=None)
@given(st.integers(0, len(GOOD) - 1), st.binary(min_size=1, max_size=6), st.booleans())
def test_a_damaged_file_is_read_or_refused_and_nothing_else(place: int, junk: bytes, cut_off: bool) -> None:  # noqa: FBT001 - hypothesis gives it
    dxf = GOOD[:place] + junk + (b"" if cut_off else GOOD[place + len(junk) :])

    with contextlib.suppress(DrawingReadError):  # anything else fails
        read_as_drawn(dxf)
