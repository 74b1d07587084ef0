"""Files that are no drawings of a disc: a clear error, never anything else."""

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from layout.check.finding import Code, Level
from layout.errors import DrawingReadError
from layout.read_back import Reading, read_back
from layout.read_back.limits import MOST_MIB
from tests.layout.examples import LASER, PLAIN, disc_of
from tests.layout.read_back.drawings import bytes_of, disc_document
from tests.thorough import tried

GOOD = bytes_of(disc_document(disc_of(PLAIN, [(1, 5.0), (3, 10.0)])))


def read(dxf: bytes) -> Reading:
    return read_back(dxf, PLAIN, LASER)


@pytest.mark.parametrize(
    ("dxf", "message"),
    [
        (b"", "drawing: the file is empty; give a DXF file"),
        (b" \n\n ", "drawing: the file is empty; give a DXF file"),
        (b"AutoCAD Binary DXF\r\n\x1a\x00rest", "drawing: a binary DXF file is not read; save it as an ASCII DXF file"),
        (b"<svg xmlns='http://www.w3.org/2000/svg'/>", r"that can be read \(it has no ENTITIES section\)"),
        (b"  0\nSECTION\n  2\nENTITIES\n 90\n", r"that can be read \(it is damaged, nothing is left\)"),
        (b"%PDF-1.7 \xff\xfe", "drawing: not a DXF file that can be read"),
        (b"MThd\x00\x00\x00\x06\x00\x01", "drawing: not a DXF file that can be read"),
        (b"0" * (MOST_MIB * 2**20 + 1), "drawing: 10.0 MiB, allowed are 10; leave out all that is not cut"),
    ],
)
def test_bytes_that_are_no_dxf_file_are_refused_with_a_reason(dxf: bytes, message: str) -> None:
    with pytest.raises(DrawingReadError, match=message):
        read(dxf)


@pytest.mark.parametrize(
    ("code", "name"),
    [(1, "inches"), (5, "centimeters"), (6, "meters"), (77, "an unknown unit"), (-1, "an unknown unit")],
)
def test_a_unit_other_than_millimetres_is_refused_by_name(code: int, name: str) -> None:
    dxf = GOOD.replace(b"$INSUNITS\n 70\n4\n", b"$INSUNITS\n 70\n%d\n" % code)
    assert dxf != GOOD

    with pytest.raises(
        DrawingReadError, match=rf"drawn in {name} \(\$INSUNITS {code}\), allowed are millimetres \(4\); convert it"
    ):
        read(dxf)


def test_a_drawing_without_a_unit_is_taken_as_millimetres() -> None:
    dxf = GOOD.replace(b"$INSUNITS\n 70\n4\n", b"$INSUNITS\n 70\n0\n")
    assert dxf != GOOD

    assert read(dxf).findings == ()


def test_the_shortest_drawing_there_is_has_no_header_and_is_taken_as_millimetres() -> None:
    # DXF reference: a file of nothing but entities is complete; the plain blank has a hole of 10 and a rim of 240 mm.
    circles = [(5, "HOLES"), (120, "RIM")]
    entities = "".join(f"0\nCIRCLE\n8\n{layer}\n10\n0.0\n20\n0.0\n40\n{radius}.0\n" for radius, layer in circles)

    assert read(f"0\nSECTION\n2\nENTITIES\n{entities}0\nENDSEC\n0\nEOF\n".encode()).findings == ()


@pytest.mark.parametrize("value", ["1e300", "-20000", "nan", "inf"])
def test_a_coordinate_far_off_or_no_number_is_refused(value: str) -> None:
    document = disc_document(disc_of(PLAIN, [(1, 5.0)]))
    document.modelspace().add_circle((1234.5678, 0), 5, dxfattribs={"layer": "HOLES"})
    dxf = bytes_of(document).replace(b"1234.5678", value.encode())

    with pytest.raises(DrawingReadError, match="drawing: layer HOLES has a vertex at"):
        read(dxf)


def test_more_cuts_than_a_disc_can_have_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("layout.read_back.entities.MOST_CUTS", 3)

    with pytest.raises(DrawingReadError, match=r"drawing: more than 3 cuts; is this the drawing of one disc\?"):
        read(GOOD)


def test_a_blank_drawn_too_finely_is_refused() -> None:
    document = disc_document(disc_of(PLAIN, []))
    for place in range(1000):
        document.modelspace().add_circle((place / 1000, 0), 1900, dxfattribs={"layer": "HOLES"})

    # A chord of a circle of 1900 mm may lie 0.002 mm inside: 2·acos(1 − 0.002/1900) = 0.0029019 rad, 1083 for half
    # a circle; 1000 circles take 2166000 points, and the centre hole of 5 mm 2·ceil(π/0.0565712) = 112.
    with pytest.raises(DrawingReadError, match="layer HOLES takes 2166112 points to compare, allowed are 1000000"):
        read(bytes_of(document))


def test_a_contour_with_too_many_vertices_is_not_compared(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("layout.read_back.entities.MOST_VERTICES", 7)

    said = [finding.message for finding in read(GOOD).findings]

    assert said == [
        "layer SLITS has entities (2) of type LWPOLYLINE, which cannot be read back; "
        "polylines, circles, lines and arcs are"
    ]


def test_a_file_that_lost_its_end_is_mended_and_says_so() -> None:
    reading = read(GOOD.replace(b"  0\nEOF\n", b""))

    [damaged] = reading.findings
    assert damaged.code is Code.UNKNOWN_CUT
    assert damaged.level is Level.WARNING
    assert damaged.message == "the file is damaged and was read as far as it goes; cuts may be missing"
    assert reading.disc.projection_count == 2


def test_a_file_cut_short_among_its_entities_is_refused() -> None:
    short = GOOD[: GOOD.rindex(b"RIM")]

    with pytest.raises(DrawingReadError, match="it is damaged, nothing is left"):
        read(short)


def answer(dxf: bytes) -> Reading | DrawingReadError:
    try:
        return read(dxf)
    except DrawingReadError as error:
        return error


@settings(max_examples=tried(60), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    changes=st.integers(1, 40),
    how=st.sampled_from(["byte", "digits", "line away", "line again", "lines swapped"]),
)
@example(seed=0, changes=1, how="byte")
def test_a_mutated_file_gives_a_reading_or_a_drawing_error(seed: int, changes: int, how: str) -> None:
    answered = answer(mutated(seed, changes, how))

    if isinstance(answered, DrawingReadError):
        assert str(answered).startswith("drawing: ")
    else:
        angle_rad = answered.disc.edge_angle_rad
        assert ((angle_rad >= 0) & (angle_rad < 2 * np.pi)).all()
        assert answered.disc.track_index.shape == angle_rad.shape


def mutated(seed: int, changes: int, how: str) -> bytes:
    dice = np.random.default_rng(seed)
    if how in ("byte", "digits"):
        data = bytearray(GOOD)
        # The drawing itself stands near the end, after the tables.
        for place in dice.integers(len(data) * (how == "digits") // 2, len(data), changes):
            data[place] = dice.integers(48, 58) if how == "digits" else dice.integers(256)
        return bytes(data)
    lines = GOOD.split(b"\n")
    for place in dice.integers(len(lines) // 2, len(lines) - 2, changes):
        if how == "line away":
            lines[place : place + 1] = []
        elif how == "line again":
            lines.insert(int(place), lines[place])
        else:
            lines[place], lines[place + 1] = lines[place + 1], lines[place]
    return b"\n".join(lines)


@settings(max_examples=tried(50), deadline=None)
@given(st.binary(max_size=300))
def test_any_bytes_give_a_reading_or_a_drawing_error(dxf: bytes) -> None:
    answered = answer(dxf)

    assert isinstance(answered, Reading | DrawingReadError)


def test_lines_that_join_to_a_contour_with_too_many_vertices_are_not_compared(monkeypatch: pytest.MonkeyPatch) -> None:
    document = disc_document(disc_of(PLAIN, [(1, 5.0), (3, 10.0)]))
    for line in list(document.modelspace().query('LWPOLYLINE[layer=="SLITS"]')):
        line.explode()
    monkeypatch.setattr("layout.read_back.entities.MOST_VERTICES", 7)

    said = [finding.message for finding in read(bytes_of(document)).findings]

    assert said == [
        "layer SLITS has entities (2) of type chain of lines, which cannot be read back; "
        "polylines, circles, lines and arcs are"
    ]
