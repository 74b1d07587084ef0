"""Drawings of release R12, which old controls still ask for: the same disc in older words."""

import io
import json
import re
from itertools import pairwise
from pathlib import Path

import ezdxf.filemanagement
import numpy as np
import pytest
import shapely

from layout.cut import plan_cuts
from layout.cut.plan import Drawing, Lettering
from layout.documents import Cutter
from layout.documents.cutter import read_cutter
from layout.place.disc import Disc
from layout.read_back import read_back
from layout.write import write_dxf
from tests.layout.write.examples import EXAMPLE_DISCS, FINGERPRINT, LASER, ONE_FOLD, THREE_SLOTS, plan_by_hand
from tests.layout.write.reading import dxf_tags, header_values, layer_names, read_dxf

every_disc = pytest.mark.parametrize("disc", EXAMPLE_DISCS.values(), ids=EXAMPLE_DISCS.keys())
ENTITIES_OF_R12 = {"POLYLINE", "VERTEX", "SEQEND", "CIRCLE", "POINT"}  # of all it has, those we draw with


def of_release(cutter: Cutter, release: str) -> Cutter:
    return read_cutter(json.dumps(cutter.model_dump(mode="json") | {"drawing_release": release}))


def r12(drawing: Drawing, cutter: Cutter) -> bytes:
    return write_dxf(drawing, of_release(cutter, "R12"))


def entities_of(dxf: bytes) -> list[str]:
    """Every entity's type in the ENTITIES section, by its tags alone."""
    tags = dxf_tags(dxf)[len(_comments(dxf)) :]
    start = tags.index((2, "ENTITIES"))
    return [value for code, value in tags[start : tags.index((0, "ENDSEC"), start)] if code == 0]


def _comments(dxf: bytes) -> list[str]:
    return [value for code, value in dxf_tags(dxf) if code == 999]


@every_disc
@pytest.mark.parametrize("kind", ["disc", "record"])
def test_gdal_sees_the_same_shapes_in_the_same_order_as_in_the_newer_release(
    disc: Disc, kind: str, tmp_path: Path
) -> None:
    drawing = getattr(plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None), kind)

    old = read_dxf(r12(drawing, disc.cutter), tmp_path)

    new = read_dxf(write_dxf(drawing, of_release(disc.cutter, "R2010")), tmp_path)
    assert [layer for layer, _ in old] == [layer for layer, _ in new]
    assert all(shapely.equals_exact(one, two, 1e-9) for (_, one), (_, two) in zip(old, new, strict=True))
    assert len(old) > 0


@every_disc
def test_reading_back_finds_the_same_disc(disc: Disc) -> None:
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)

    old = read_back(r12(plan.disc, disc.cutter), disc.movement, disc.cutter)

    new = read_back(write_dxf(plan.disc, of_release(disc.cutter, "R2010")), disc.movement, disc.cutter)
    assert old.findings == new.findings
    assert old.disc.track_index.tolist() == new.disc.track_index.tolist()
    np.testing.assert_array_equal(old.disc.edge_angle_rad, new.disc.edge_angle_rad)
    assert old.disc.projection_count == disc.projection_count


@every_disc
@pytest.mark.parametrize("kind", ["disc", "record"])
def test_the_auditor_of_ezdxf_finds_nothing(disc: Disc, kind: str) -> None:
    drawing = getattr(plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None), kind)

    document = ezdxf.filemanagement.read(io.StringIO(r12(drawing, disc.cutter).decode("ascii")))

    assert document.dxfversion == "AC1009"  # DXF reference: R11 and R12
    auditor = document.audit()
    assert (auditor.errors, auditor.fixes) == ([], [])


@every_disc
def test_nothing_is_in_the_file_that_the_release_does_not_know(disc: Disc) -> None:
    dxf = r12(plan_by_hand(disc).record, disc.cutter)

    tags = dxf_tags(dxf)
    assert set(entities_of(dxf)) <= {"SECTION", *ENTITIES_OF_R12}
    # subclass markers, owners and sections of later releases; strings end at 255 bytes
    codes = {code for code, _ in tags}
    assert not codes & {100, 102, 330, 340, 350, 360, 370, 390, 420}
    sections = {value for (code, name), (_, value) in pairwise(tags) if (code, name) == (0, "SECTION")}
    assert sections == {"HEADER", "TABLES", "BLOCKS", "ENTITIES"}
    assert max(len(value) for _, value in tags) <= 255
    assert all(re.fullmatch(r"[A-Za-z0-9_$-]{1,31}", name) for name in layer_names(dxf))
    assert dxf.isascii()


def test_the_unit_is_told_in_a_comment_since_the_header_has_no_place_for_it() -> None:
    dxf = r12(plan_by_hand(ONE_FOLD).disc, LASER)

    assert "$INSUNITS" not in header_values(dxf)
    assert "unit: mm; release R12 has no header variable for it" in _comments(dxf)
    assert header_values(dxf)["$ACADVER"] == "AC1009"


def test_the_newer_release_tells_the_unit_in_its_header_alone() -> None:
    dxf = write_dxf(plan_by_hand(ONE_FOLD).disc, LASER)

    assert header_values(dxf)["$INSUNITS"] == "4"
    assert not [comment for comment in _comments(dxf) if comment.startswith("unit: mm;")]


def test_round_ends_are_arcs_of_a_polyline_not_chords() -> None:
    tags = dxf_tags(r12(plan_by_hand(THREE_SLOTS).disc, LASER))

    # DXF reference: group 42 of a vertex is its bulge, 1 a half circle; two round ends to a slot
    bulges = [float(value) for code, value in tags[tags.index((2, "ENTITIES")) :] if code == 42 and float(value)]
    assert sorted(bulges) in ([-1.0] * 6, [1.0] * 6)


def test_lettering_carries_its_words_as_extended_data() -> None:
    strokes = (np.array([(0.0, 0.0), (0.0, 2.0)]), np.array([(1.0, 0.0), (1.0, 2.0)]))
    words = Lettering(layer="MARKS", text="Ljus över tjärnen", strokes_mm=strokes)

    dxf = r12(Drawing(entities=(words,), comments=()), LASER)

    lines = list(ezdxf.filemanagement.read(io.StringIO(dxf.decode("ascii"))).modelspace())
    assert [line.has_xdata("DISCWRIGHT") for line in lines] == [True, False]
    # R12 has no notation for letters beyond ASCII: a program that does not know the later one sees its plain signs
    assert b"\n1000\nLjus \\U+00F6ver tj\\U+00E4rnen\n" in dxf


def test_no_stamp_of_library_or_time_is_in_the_file_and_it_is_the_same_every_time() -> None:
    one, two = (r12(plan_by_hand(ONE_FOLD).disc, LASER) for _ in range(2))

    assert one == two
    assert b"ezdxf" not in one.lower()
    # 2000-01-01, see test_dxf.py
    assert {header_values(one)[name] for name in ("$TDCREATE", "$TDUPDATE")} == {"2451545.0"}


def test_writing_it_says_nothing_on_standard_error(caplog: pytest.LogCaptureFixture) -> None:
    r12(plan_by_hand(ONE_FOLD).disc, LASER)

    assert caplog.records == []


def test_an_empty_drawing_is_a_valid_file() -> None:
    dxf = r12(Drawing(entities=(), comments=()), LASER)

    document = ezdxf.filemanagement.read(io.StringIO(dxf.decode("ascii")))
    assert len(document.modelspace()) == 0
    assert document.audit().errors == []
    assert layer_names(dxf) == ["0"]
