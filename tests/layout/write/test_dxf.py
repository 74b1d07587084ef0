import io
from pathlib import Path

import ezdxf
import numpy as np
import pytest
import shapely
from ezdxf.lldxf.encoding import decode_dxf_unicode

from layout.cut import plan_cuts
from layout.cut.plan import Circles, CutPlan, Drawing, Entity, Lettering, Outlines
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from layout.write import write_dxf
from tests.layout.write.examples import (
    EMPTY_DISC,
    EXAMPLE_DISCS,
    FINGERPRINT,
    LASER,
    ONE_FOLD,
    OPEN_SLITS,
    SLOTS_ON_A_PRESS,
    THREE_FOLDS,
    THREE_LANCES,
    THREE_SLOTS,
    drawn_mm,
    plan_by_hand,
)
from tests.layout.write.reading import dxf_tags, header_values, layer_names, read_dxf

every_disc = pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())


def reread(dxf: bytes) -> ezdxf.document.Drawing:
    return ezdxf.read(io.StringIO(dxf.decode("ascii")))


def planned(disc: Disc) -> CutPlan:
    return plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)


def one_drawing(*entities: Entity, comments: tuple[str, ...] = ()) -> Drawing:
    return Drawing(entities=entities, comments=comments)


def lettering(text: str) -> Lettering:
    return Lettering(layer="MARKS", text=text, strokes_mm=(np.array([(0.0, 0.0), (0.0, 2.0)]),))


def laser_with_layers(**layers: dict[str, object]) -> Cutter:
    return Cutter.model_validate(LASER.model_dump(mode="json") | {"layers": layers})


def test_gdal_reads_the_outlines_of_folds_as_they_were_planned(tmp_path: Path) -> None:
    cut = THREE_FOLDS.pattern.cut
    assert cut is not None
    expected = drawn_mm(THREE_FOLDS, cut.points_mm)

    read = [
        shape
        for layer, shape in read_dxf(write_dxf(plan_by_hand(THREE_FOLDS).disc, LASER), tmp_path)
        if layer == "SLITS"
    ]

    assert [shape.is_closed for shape in read] == [True] * 3
    # rounded to 1e-6 mm, so each coordinate is off by half of that at most
    np.testing.assert_allclose([np.array(shape.coords)[:-1] for shape in read], expected, atol=0.5001e-6, rtol=0)


def test_gdal_reads_open_slits_as_open(tmp_path: Path) -> None:
    read = [
        shape
        for layer, shape in read_dxf(write_dxf(plan_by_hand(OPEN_SLITS).disc, LASER), tmp_path)
        if layer == "SLITS"
    ]

    # the three sides of a tab: four corners
    assert [len(shape.coords) for shape in read] == [4, 4]
    assert [shape.is_closed for shape in read] == [False, False]


@pytest.mark.parametrize("disc", [THREE_SLOTS, SLOTS_ON_A_PRESS], ids=["laser", "press"])
def test_gdal_reads_the_round_ends_of_slots_as_round(disc: Disc, tmp_path: Path) -> None:
    middle_lines = shapely.linestrings(drawn_mm(disc, disc.pattern.core_points_mm))

    read = [
        shape
        for layer, shape in read_dxf(write_dxf(plan_by_hand(disc).record, disc.cutter), tmp_path)
        if layer == "AFTER_FORMING"
    ]

    for shape, middle_line in zip(read, middle_lines, strict=True):
        # every point of a slot's outline lies half a width, 1.3 / 2 = 0.65 mm, from its middle line
        apart_mm = shapely.distance(shapely.points(shape.coords), middle_line)
        assert len(apart_mm) > 1000
        np.testing.assert_allclose(apart_mm, 0.65, atol=2e-6, rtol=0)


def test_gdal_reads_hits_as_points_and_holes_and_rim_as_circles(tmp_path: Path) -> None:
    plan = plan_by_hand(THREE_LANCES)

    read = read_dxf(write_dxf(plan.disc, THREE_LANCES.cutter), tmp_path)

    hits = [shape for layer, shape in read if layer == "HITS"]
    np.testing.assert_allclose([(hit.x, hit.y) for hit in hits], plan.at_mm, atol=0.5001e-6, rtol=0)
    # mossbrook-67: centre hole 12 mm, disc 428 mm across
    for wanted, radius_mm in (("HOLES", 6.0), ("RIM", 214.0)):
        [circle] = [shape for layer, shape in read if layer == wanted]
        np.testing.assert_allclose(np.hypot(*np.array(circle.coords).T), radius_mm, atol=1e-6, rtol=0)


@every_disc
def test_entities_stand_in_the_drawings_order(disc: Disc, tmp_path: Path) -> None:
    record = planned(disc).record
    counts = {Outlines: "points_mm", Circles: "centres_mm", Lettering: "strokes_mm"}
    expected = [
        entity.layer for entity in record.entities for _ in getattr(entity, counts.get(type(entity), "points_mm"))
    ]

    read = [layer for layer, _ in read_dxf(write_dxf(record, disc.cutter), tmp_path)]

    assert read == expected
    assert len(read) > 0


@every_disc
def test_nothing_is_drawn_twice_or_without_length(disc: Disc, tmp_path: Path) -> None:
    read = read_dxf(write_dxf(planned(disc).disc, disc.cutter), tmp_path)

    seen = {(layer, shapely.normalize(shape).wkb) for layer, shape in read}
    assert len(seen) == len(read)
    assert all(shape.length > 0 for layer, shape in read if layer != "HITS")


@every_disc
@pytest.mark.parametrize("kind", ["disc", "record"])
def test_the_auditor_of_ezdxf_finds_nothing(disc: Disc, kind: str) -> None:
    document = reread(write_dxf(getattr(planned(disc), kind), disc.cutter))

    auditor = document.audit()

    assert (auditor.errors, auditor.fixes) == ([], [])


def test_the_file_is_r2010_in_millimetres() -> None:
    document = reread(write_dxf(plan_by_hand(ONE_FOLD).disc, LASER))

    # DXF reference: AC1024 is R2010; $INSUNITS 4 millimetres, $MEASUREMENT 1 metric, $LUNITS 2 decimal
    header = document.header
    assert document.dxfversion == "AC1024"
    assert (header["$INSUNITS"], header["$MEASUREMENT"], header["$LUNITS"], header["$AUNITS"]) == (4, 1, 2, 0)


def test_the_extents_are_the_rims() -> None:
    header = reread(write_dxf(plan_by_hand(ONE_FOLD).disc, LASER)).header

    # fernhollow-31: 237 mm across, 237 / 2 = 118.5
    assert header["$EXTMIN"] == (-118.5, -118.5, 0)
    assert header["$EXTMAX"] == (118.5, 118.5, 0)


def test_only_layers_that_occur_are_in_the_file() -> None:
    names = layer_names(write_dxf(plan_by_hand(ONE_FOLD).disc, LASER))

    assert names == ["0", "SLITS", "HOLES", "MARKS", "RIM"]


def test_layers_have_the_names_and_colours_the_cutter_wants(tmp_path: Path) -> None:
    cutter = laser_with_layers(SLITS={"name": "cut_2", "colour": 111}, RIM={"name": "last", "colour": 7})

    dxf = write_dxf(plan_by_hand(ONE_FOLD).disc, cutter)

    colours = {layer.dxf.name: layer.dxf.color for layer in reread(dxf).layers}
    assert (colours["cut_2"], colours["last"]) == (111, 7)
    assert colours["HOLES"] == 4  # our own colour, not mapped
    assert [layer for layer, _ in read_dxf(dxf, tmp_path)] == ["cut_2", "HOLES", "MARKS", "MARKS", "last"]


@pytest.mark.parametrize("name", ["0", "Defpoints"])
def test_a_cutter_may_use_a_layer_that_every_drawing_has(name: str, tmp_path: Path) -> None:
    cutter = laser_with_layers(SLITS={"name": name, "colour": 30})

    dxf = write_dxf(plan_by_hand(ONE_FOLD).disc, cutter)

    assert reread(dxf).layers.get(name).dxf.color == 30
    assert read_dxf(dxf, tmp_path)[0][0] == name


def test_comments_stand_before_the_first_section_and_the_file_still_reads(tmp_path: Path) -> None:
    drawing = one_drawing(lettering("A"), comments=("first", "x" * 500))

    dxf = write_dxf(drawing, LASER)

    lines = dxf.decode("ascii").splitlines()
    assert lines[:2] == ["999", "first"]
    # 500 characters in lines of 200: 200 + 200 + 100
    assert [len(lines[place]) for place in (3, 5, 7)] == [200, 200, 100]
    assert [line.strip() for line in lines[8:12]] == ["0", "SECTION", "2", "HEADER"]
    assert len(read_dxf(dxf, tmp_path)) == 1


def test_the_words_of_lettering_are_found_in_its_extended_data() -> None:
    strokes = (np.array([(0.0, 0.0), (0.0, 2.0)]), np.array([(1.0, 0.0), (1.0, 2.0)]))
    drawing = one_drawing(Lettering(layer="MARKS", text="Two strokes", strokes_mm=strokes), lettering("One"))

    lines = list(reread(write_dxf(drawing, LASER)).modelspace())

    found = [[tag.value for tag in line.get_xdata("DISCWRIGHT")] for line in lines if line.has_xdata("DISCWRIGHT")]
    assert found == [["Two strokes"], ["One"]]
    assert [line.has_xdata("DISCWRIGHT") for line in lines] == [True, False, True]


def test_lettering_without_strokes_draws_nothing() -> None:
    drawing = one_drawing(Lettering(layer="MARKS", text=" ", strokes_mm=()))

    document = reread(write_dxf(drawing, LASER))

    assert len(document.modelspace()) == 0


@pytest.mark.parametrize(
    ("text", "kept"),
    [
        ('Tom & "Jerry" <b>', 'Tom & "Jerry" <b>'),
        ("one\n  0\nLINE\r\n", "one 0 LINE"),
        ("tab\tbell\x07nul\x00end", "tab bell nul end"),
        ("Ljus över tjärnen", "Ljus över tjärnen"),
        ("\N{MUSICAL SYMBOL G CLEF} clef", "\ufffd clef"),
    ],
    ids=["markup", "line breaks", "control characters", "accents", "beyond four digits"],
)
def test_text_of_a_person_cannot_break_the_file(text: str, kept: str, tmp_path: Path) -> None:
    dxf = write_dxf(one_drawing(lettering(text), comments=(text,)), LASER)

    [line] = reread(dxf).modelspace()
    assert decode_dxf_unicode(line.get_xdata("DISCWRIGHT")[0].value) == kept
    assert len(read_dxf(dxf, tmp_path)) == 1
    assert dxf.isascii()


def test_words_are_cut_at_the_255_bytes_of_a_string_never_inside_a_character() -> None:
    dxf = write_dxf(one_drawing(lettering("é" * 100)), LASER)

    # é is written \U+00E9, seven bytes: 255 // 7 = 36 of them
    [line] = reread(dxf).modelspace()
    assert decode_dxf_unicode(line.get_xdata("DISCWRIGHT")[0].value) == "é" * 36


def test_no_stamp_of_library_time_or_chance_is_in_the_file() -> None:
    dxf = write_dxf(plan_by_hand(ONE_FOLD).disc, LASER)

    assert b"ezdxf" not in dxf.lower()
    assert ezdxf.__version__.encode() not in dxf
    header = header_values(dxf)
    # 2000-01-01 is Julian day 2451545; the DXF reference counts the fraction from midnight
    assert {header[name] for name in ("$TDCREATE", "$TDUCREATE", "$TDUPDATE", "$TDUUPDATE")} == {"2451545.0"}
    nil = "{00000000-0000-0000-0000-000000000000}"
    assert (header["$FINGERPRINTGUID"], header["$VERSIONGUID"]) == (nil, nil)
    assert header["$LASTSAVEDBY"] == "discwright"


def test_classes_stand_in_alphabetical_order_whatever_the_hash_seed() -> None:
    tags = dxf_tags(write_dxf(plan_by_hand(ONE_FOLD).disc, LASER))

    # ezdxf takes them from a set; most hash seeds give one order, some another
    names = [tags[place + 1][1] for place, tag in enumerate(tags) if tag == (0, "CLASS")]
    assert names == sorted(names)
    assert len(names) > 5


def test_coordinates_are_written_to_a_nanometre_without_negative_zeros(tmp_path: Path) -> None:
    points_mm = np.array([[(-1e-9, 0.123456789), (2.0, -0.0), (0.0, 3.0)]])
    outline = Outlines(layer="SLITS", points_mm=points_mm, bulges=frozen_floats([0.0, 0.0, 0.0]), closed=True)

    dxf = write_dxf(one_drawing(outline), LASER)

    [(_, shape)] = read_dxf(dxf, tmp_path)
    assert list(shape.coords)[:3] == [(0.0, 0.123457), (2.0, 0.0), (0.0, 3.0)]
    assert b"\n-0.0\n" not in dxf


def test_an_empty_drawing_is_a_valid_file() -> None:
    dxf = write_dxf(one_drawing(), LASER)

    document = reread(dxf)
    assert len(document.modelspace()) == 0
    assert document.audit().errors == []
    assert layer_names(dxf) == ["0"]


def test_an_empty_disc_is_still_a_blank(tmp_path: Path) -> None:
    layers = {layer for layer, _ in read_dxf(write_dxf(planned(EMPTY_DISC).disc, LASER), tmp_path)}

    assert {"HOLES", "RIM"} <= layers
    assert "SLITS" not in layers


def test_a_title_the_engraving_font_lacks_is_spelled_out_at_the_head_of_the_file() -> None:
    plan = plan_cuts(ONE_FOLD, title="音楽", fingerprint=FINGERPRINT, not_good=None)

    dxf = write_dxf(plan.disc, LASER)

    # U+97F3 and U+697D, The Unicode Standard; the notation is the DXF reference's
    assert b"999\ntitle: \\U+97F3\\U+697D\n" in dxf
    assert "音楽" not in [entity.text for entity in plan.disc.entities if isinstance(entity, Lettering)]
