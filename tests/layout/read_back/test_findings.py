"""What in a drawing does not fit: each kind trips once, says where and by how much, and is left out."""

import math
from typing import Any

import numpy as np
import pytest
from ezdxf.document import Drawing as Document
from ezdxf.entities import DXFEntity, LWPolyline

from layout.check.finding import Code, Finding, Level
from layout.documents import Cutter, Movement
from layout.read_back import Reading, read_back
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import bytes_of, disc_document, random_disc

# Track 1 (50 mm) at 30 + 6·5 = 60 degrees, track 3 (100 mm) at 90 degrees; clockwise, released on the row.
TWO = disc_of(PLAIN, [(1, 5.0), (3, 10.0)])
FEATURES = movement_with(
    {
        "disc/features": [
            {"purpose": "drive", "shape": "hole", "radius_mm": 20, "first_at_deg": 90, "count": 3}
            | {"width_mm": 5, "length_mm": 5},
            {"purpose": "stop", "shape": "slot", "radius_mm": 30, "width_mm": 4, "length_mm": 9},
            {"purpose": "location", "shape": "notch", "radius_mm": 120, "width_mm": 6, "length_mm": 8},
        ]
    }
)


def cuts(document: Document, layer: str) -> list[Any]:
    return [entity for entity in document.modelspace() if entity.dxf.layer == layer]


def read(document: Document, movement: Movement = PLAIN, cutter: Cutter = LASER) -> Reading:
    return read_back(bytes_of(document), movement, cutter)


def only(reading: Reading) -> Finding:
    [finding] = reading.findings
    return finding


def slit_of_track(document: Document, track: int) -> LWPolyline:
    """The slit drawn for TWO's projection of a track; cut from the inside out."""
    slits = cuts(document, "SLITS")
    return slits[0] if track == 1 else slits[1]  # type: ignore[no-any-return]


def assert_only_track(reading: Reading, track: int) -> None:
    assert reading.disc.track_index.tolist() == [track - 1]


def test_an_outline_with_a_moved_corner_is_out_of_shape_and_left_out() -> None:
    document = disc_document(TWO)
    slit = slit_of_track(document, 3)
    points = [tuple(point) for point in slit.get_points("xyb")]
    slit.set_points([(points[0][0] - 0.2, *points[0][1:]), *points[1:]], format="xyb")

    reading = read(document)

    finding = only(reading)
    assert finding.code is Code.OUT_OF_SHAPE
    assert finding.level is Level.ERROR
    # One of eight corners moved by 0.2: a fit spreads about an eighth of it over the others, and turns a little.
    assert finding.measured == pytest.approx(0.2, abs=0.07)
    assert finding.limit == 0.02
    assert finding.unit == "mm"
    assert finding.at.radius_mm == pytest.approx(100, abs=0.1)
    assert finding.at.angle_deg == pytest.approx(90, abs=0.2)
    said = (
        f"a projection's outline is up to {finding.measured:.3f} mm out of shape; the limit is 0.02 mm; it is left out"
    )
    assert finding.message == said
    assert_only_track(reading, 1)


@pytest.mark.parametrize(("moved_mm", "trips"), [(0.015, False), (0.05, True)])
def test_a_shape_just_within_the_tolerance_passes(moved_mm: float, trips: bool) -> None:  # noqa: FBT001 - expected outcome
    document = disc_document(TWO)
    slit = slit_of_track(document, 3)
    points = [tuple(point) for point in slit.get_points("xyb")]
    slit.set_points([(points[0][0] - moved_mm, *points[0][1:]), *points[1:]], format="xyb")

    assert bool(read(document).findings) is trips


def test_a_slot_with_flattened_ends_is_out_of_shape() -> None:
    disc = disc_of(SHIPPED[2], [(5, 1.0)])
    document = disc_document(disc)
    [slot] = cuts(document, "SLOTS")
    slot.set_points([(x, y, 0.9 * bulge) for x, y, bulge in slot.get_points("xyb")], format="xyb")

    finding = only(read(document, SHIPPED[2]))

    # Bulge 1 to 0.9 over a chord of 1.3 mm: the arc is 0.1·1.3/2 = 0.065 mm lower.
    assert finding.code is Code.OUT_OF_SHAPE
    assert finding.measured == pytest.approx(0.065, abs=1e-6)


def test_a_projection_turned_on_its_place_is_out_of_square() -> None:
    document = disc_document(TWO)
    slit = slit_of_track(document, 3)
    slit.translate(0, -100, 0).rotate_z(math.radians(1.5)).translate(0, 100, 0)  # its origin lies at (0, 100)

    reading = read(document)

    finding = only(reading)
    assert finding.code is Code.OUT_OF_SHAPE
    assert finding.measured == pytest.approx(1.5, abs=1e-6)
    assert finding.unit == "deg"
    assert finding.message == (
        "a projection stands 1.50 degrees out of square to its radius; the limit is 0.2 degrees; it is left out"
    )
    assert_only_track(reading, 1)


def test_a_projection_off_its_track_is_measured_and_left_out() -> None:
    document = disc_document(TWO)
    slit_of_track(document, 3).translate(0, -0.5, 0)

    reading = read(document)

    finding = only(reading)
    assert finding.code is Code.OFF_TRACK
    assert finding.measured == pytest.approx(0.5, abs=1e-9)
    assert finding.limit == 0.02
    assert finding.at.tracks == (3,)
    assert finding.at.angle_deg == pytest.approx(90)
    assert finding.message == (
        "a projection at 99.500 mm lies 0.500 mm off track 3, the nearest; the limit is 0.02 mm; it is left out"
    )
    assert_only_track(reading, 1)


def test_a_hit_off_its_track_is_measured_and_left_out() -> None:
    disc = disc_of(SHIPPED[0], [(1, 5.0), (31, 10.0)], PRESS)
    document = disc_document(disc)
    [_, hit] = cuts(document, "HITS")
    outwards = np.array(hit.dxf.location)[:2]
    hit.translate(*(outwards / np.hypot(*outwards)), 0)

    reading = read(document, SHIPPED[0], PRESS)

    assert only(reading).code is Code.OFF_TRACK
    assert only(reading).measured == pytest.approx(1.0, abs=1e-4)
    assert_only_track(reading, 1)


def test_a_projection_drawn_twice_is_told_and_counted_once() -> None:
    document = disc_document(TWO)
    document.modelspace().add_entity(slit_of_track(document, 3).copy())

    reading = read(document)

    finding = only(reading)
    assert finding.code is Code.CUT_TWICE
    assert finding.message == "a projection of track 3 is drawn twice at 90.000 degrees; the second is left out"
    assert reading.disc.track_index.tolist() == [0, 2]


def test_twice_is_seen_across_the_zero_angle() -> None:
    document = disc_document(TWO)
    slit = slit_of_track(document, 3)
    slit.rotate_z(math.radians(-90 - 0.001))  # 0.0017 mm before angle 0
    again = slit.copy()
    again.rotate_z(math.radians(0.002))
    document.modelspace().add_entity(again)

    reading = read(document)

    assert only(reading).code is Code.CUT_TWICE
    assert reading.disc.track_index.tolist() == [0, 2]


def test_projections_side_by_side_are_not_one_drawn_twice() -> None:
    document = disc_document(TWO)
    again = slit_of_track(document, 3).copy()
    again.rotate_z(0.02 / 100)  # 0.02 mm along a radius of 100 mm
    document.modelspace().add_entity(again)

    reading = read(document)

    assert reading.findings == ()
    assert reading.disc.projection_count == 3


@pytest.mark.parametrize(
    ("add", "said"),
    [
        (
            lambda space: space.add_lwpolyline([(70, 0), (72, 0), (72, 1)], close=True, dxfattribs={"layer": "SLITS"}),
            "layer SLITS has a closed outline of 3 vertices that is no projection of this movement: on this cutter "
            "projections are on layer SLITS, each a closed outline of 8 vertices",
        ),
        (
            lambda space: space.add_line((70, 0), (72, 0), dxfattribs={"layer": "SLITS"}),
            "layer SLITS has an open line of 2 vertices that is no projection of this movement: on this cutter "
            "projections are on layer SLITS, each a closed outline of 8 vertices",
        ),
        (
            lambda space: space.add_circle((70, 0), 1, dxfattribs={"layer": "SLOTS"}),
            "layer SLOTS has a closed outline of 2 vertices that is no projection of this movement: on this cutter "
            "projections are on layer SLITS, each a closed outline of 8 vertices",
        ),
        (
            lambda space: space.add_point((70, 0), dxfattribs={"layer": "HITS"}),
            "layer HITS has a hit at (70.000, 0.000), and a laser makes none",
        ),
        (
            lambda space: space.add_circle((70, 0), 1, dxfattribs={"layer": "HOLES"}),
            "the drawing has a hole the movement does not have, around (70.000, 0.000)",
        ),
        (
            lambda space: space.add_circle((0, 0), 70, dxfattribs={"layer": "RIM"}),
            "the drawing has a second rim, around (0.000, 0.000)",
        ),
        (
            lambda space: space.add_line((70, 0), (72, 0), dxfattribs={"layer": "RIM"}),
            "layer RIM has a line that does not close, around (71.000, 0.000)",
        ),
        (
            lambda space: space.add_spline([(70, 0), (72, 1), (73, 2)], dxfattribs={"layer": "SLITS"}),
            "layer SLITS has entities (1) of type SPLINE, which cannot be read back; "
            "polylines, circles, lines and arcs are",
        ),
        (
            lambda space: space.add_circle((70, 0), 1, dxfattribs={"layer": "HITS"}),
            "layer HITS has entities (1) of type CIRCLE, which cannot be read back; points are",
        ),
        (
            lambda space: space.add_circle((70, 0), 1, dxfattribs={"layer": "RIM", "extrusion": (0, 1, 0)}),
            "layer RIM has entities (1) of type CIRCLE, which cannot be read back; "
            "polylines, circles, lines and arcs are",
        ),
    ],
)
def test_a_cut_that_is_nothing_of_this_movement_is_an_error(add: Any, said: str) -> None:
    document = disc_document(TWO)
    added: DXFEntity = add(document.modelspace())
    assert added.is_alive

    reading = read(document)

    finding = only(reading)
    assert finding.code is Code.UNKNOWN_CUT
    assert finding.level is Level.ERROR
    assert finding.message == said
    assert finding.remedy
    assert reading.disc.projection_count == 2


@pytest.mark.parametrize(
    ("add", "said"),
    [
        (
            lambda space: space.add_circle((0, 70), 1, dxfattribs={"layer": "HOLES"}),
            "the drawing has a hole the movement does not have, around (0.000, 70.000)",
        ),
        (
            lambda space: space.add_line((10, 70), (10, 72), dxfattribs={"layer": "RIM"}),
            "layer RIM has a line that does not close, around (10.000, 71.000)",
        ),
        (
            lambda space: space.add_point((0, 70), dxfattribs={"layer": "HITS"}),
            "layer HITS has a hit at (0.000, 70.000), and a laser makes none",
        ),
    ],
)
def test_a_place_in_a_message_is_where_the_file_has_it_though_it_shows_the_star_side(add: Any, said: str) -> None:
    cutter = cutter_with({"drawn_from": "star-side"})
    document = disc_document(disc_of(PLAIN, [(1, 5.0)], cutter))
    add(document.modelspace())

    finding = only(read(document, cutter=cutter))

    assert finding.message == said
    # Straight up on the star side is straight down on the label side, where angles are told.
    assert finding.at.angle_deg == pytest.approx(270, abs=10)


def test_a_projection_on_the_wrong_layer_is_not_taken_for_one() -> None:
    document = disc_document(TWO)
    slit_of_track(document, 3).dxf.layer = "SLOTS"

    reading = read(document)

    assert only(reading).code is Code.UNKNOWN_CUT
    assert only(reading).message.startswith("layer SLOTS has a closed outline of 8 vertices that is no projection")
    assert_only_track(reading, 1)


def test_a_press_drawing_with_outlines_says_that_a_press_draws_hits() -> None:
    document = disc_document(disc_of(PLAIN, [(1, 5.0)], PRESS))
    document.modelspace().add_lwpolyline([(70, 0), (72, 0), (72, 1)], close=True, dxfattribs={"layer": "SLITS"})

    [_, finding] = read(document, PLAIN, PRESS).findings  # the first is advice on the side of hits

    assert finding.code is Code.UNKNOWN_CUT
    assert "on this cutter projections are on layer HITS, each one hit" in finding.message


def test_a_layer_the_cutter_does_not_have_is_a_warning() -> None:
    document = disc_document(TWO)
    for x in (70, 80):
        document.modelspace().add_circle((x, 0), 1, dxfattribs={"layer": "Extra"})

    finding = only(read(document))

    assert finding.code is Code.UNKNOWN_CUT
    assert finding.level is Level.WARNING
    assert finding.message == (
        "layer Extra is none of this cutter's, and its entities (2) are not read; "
        "read are SLITS, SLOTS, HITS, HOLES, RIM"
    )


def without(document: Document, layer: str, place: int) -> None:
    document.modelspace().delete_entity(cuts(document, layer)[place])


def test_a_blank_with_holes_slots_and_notches_agrees_with_its_own_drawing() -> None:
    assert read(disc_document(disc_of(FEATURES, [(1, 5.0)])), FEATURES).findings == ()


@pytest.mark.parametrize(
    ("layer", "place", "name"),
    [
        # Cut from the inside out: drive holes at 90, 210, 330 degrees, the slot, the centre hole.
        ("HOLES", 1, "drive hole at 20 mm, 210 degrees"),
        ("HOLES", 3, "stop slot at 30 mm, 0 degrees"),
        ("HOLES", 4, "centre hole"),
        ("RIM", 0, "rim"),
    ],
)
def test_a_missing_part_of_the_blank_is_named(layer: str, place: int, name: str) -> None:
    document = disc_document(disc_of(FEATURES, [(1, 5.0)]))
    without(document, layer, place)

    finding = only(read(document, FEATURES))

    assert finding.code is Code.BLANK_DIFFERS
    assert finding.level is Level.ERROR
    assert finding.message == f"the drawing has no {name}"
    assert finding.measured is None


@pytest.mark.parametrize(("more_mm", "trips"), [(0.015, False), (0.03, True)])
def test_a_centre_hole_of_another_size_is_measured(more_mm: float, trips: bool) -> None:  # noqa: FBT001 - expected outcome
    document = disc_document(TWO)
    [hole] = cuts(document, "HOLES")
    hole.dxf.radius += more_mm

    findings = read(document).findings

    assert [f.code for f in findings] == [Code.BLANK_DIFFERS] * trips
    for finding in findings:
        assert finding.measured == pytest.approx(more_mm, abs=0.002)  # arcs are traced within 0.002 mm
        assert finding.limit == 0.02
        assert finding.message.startswith("the centre hole lies up to 0.0")
        assert finding.message.endswith("mm from where the movement has it; the limit is 0.02 mm")


def test_a_rim_of_another_movement_is_measured() -> None:
    document = disc_document(TWO)

    findings = read(document, movement_with({"disc/outer_diameter_mm": 241})).findings

    [finding] = findings
    assert finding.code is Code.BLANK_DIFFERS
    assert finding.measured == pytest.approx(0.5, abs=0.002)
    assert finding.message == (
        f"the rim lies up to {finding.measured:.3f} mm from where the movement has it; the limit is 0.02 mm"
    )


def test_a_rim_without_its_notch_differs_by_the_depth_of_the_notch() -> None:
    document = disc_document(TWO)

    notched = {"purpose": "stop", "shape": "notch", "radius_mm": 120, "width_mm": 6, "length_mm": 8}
    finding = only(read(document, movement_with({"disc/features": [notched]})))

    # The floor of the notch at (117, 0) lies 3 mm inside the circle of 120 mm.
    assert finding.code is Code.BLANK_DIFFERS
    assert finding.measured == pytest.approx(3.0, abs=0.005)


def test_a_hole_drawn_twice_is_told() -> None:
    document = disc_document(TWO)
    [hole] = cuts(document, "HOLES")
    document.modelspace().add_entity(hole.copy())

    finding = only(read(document))

    assert finding.code is Code.CUT_TWICE
    assert finding.message == "the centre hole is drawn twice"


def test_a_second_hole_that_reaches_as_far_to_one_side_is_not_the_first_drawn_twice() -> None:
    document = disc_document(TWO)
    [hole] = cuts(document, "HOLES")
    radius = hole.dxf.radius
    document.modelspace().add_circle((radius / 2, 0), radius / 2, dxfattribs={"layer": "HOLES"})

    finding = only(read(document))

    assert finding.code is Code.UNKNOWN_CUT
    assert finding.message.startswith("the drawing has a hole the movement does not have, around")


def test_the_wrong_movement_is_seen_from_the_cuts_alone() -> None:
    document = disc_document(random_disc(SHIPPED[0], LASER, count=30))

    reading = read(document, SHIPPED[1])

    # Mossbrook's sheet is 0.6 mm and its tab 1.1 wide: no outline of Fernhollow's fits, nor its blank.
    codes = {finding.code for finding in reading.findings}
    assert codes == {Code.OUT_OF_SHAPE, Code.BLANK_DIFFERS}
    assert reading.disc.projection_count == 0
