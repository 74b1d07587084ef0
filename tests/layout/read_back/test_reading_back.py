"""A drawing gives back the disc it was drawn from, however another program saved it."""

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from ezdxf.document import Drawing as Document
from ezdxf.entities import LWPolyline
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check.finding import Code
from layout.cut import plan_cuts
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from layout.play import play
from layout.read_back import Reading, read_back
from layout.write import write_dxf
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import bytes_of, disc_document, random_disc
from tests.thorough import THOROUGH, pairs_of, tried

STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})
AHEAD_LASER = cutter_with({"fold/fold_side": "ahead"})
OPEN_LASER = cutter_with({"fold/slit": "centre-line", "fold/slit_width_mm": None})
ROUND_LASER = cutter_with({"fold/relief_ends": "round", "fold/relief_width_mm": 0.5})
ROUND_SLOTS = movement_with(
    {"projection": {"kind": "slot", "width_mm": 2.0, "length_mm": 2.0}}, SHIPPED[2].model_dump(exclude_none=True)
)
MANY = 300 if THOROUGH else 100  # projections
CUTTERS = [LASER, PRESS, STAR_SIDE_LASER, AHEAD_LASER, OPEN_LASER, ROUND_LASER]
CUTTER_NAMES = ["laser", "press", "star side", "fold ahead", "open slit", "round reliefs"]
NAMED = dict(zip(CUTTER_NAMES, CUTTERS, strict=True))


def assert_same_disc(reading: Reading, disc: Disc, *, within_rad: float = 1e-9) -> None:
    assert [finding for finding in reading.findings if finding.code is not Code.SIDE_NOT_SHOWN] == []
    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    assert reading.disc.track_index.tolist() == disc.track_index[order].tolist()
    assert reading.disc.edge_angle_rad == pytest.approx(disc.edge_angle_rad[order], abs=within_rad)


@pytest.mark.parametrize(
    ("movement", "cutter"), pairs_of([*SHIPPED, PLAIN, ROUND_SLOTS], dict(zip(CUTTER_NAMES, CUTTERS, strict=True)))
)
def test_a_drawing_gives_back_track_and_angle_of_every_projection(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=MANY)

    reading = read_back(bytes_of(disc_document(disc)), movement, cutter)

    assert_same_disc(reading, disc)
    assert reading.disc.movement is movement
    assert reading.disc.cutter is cutter


@settings(max_examples=tried(25), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    count=st.integers(0, 40),
    which=st.integers(0, 2),
    by=st.integers(0, len(CUTTERS) - 1),
    turns=st.sampled_from(["clockwise", "anticlockwise"]),
)
def test_any_disc_that_is_drawn_is_read_back(seed: int, count: int, which: int, by: int, turns: str) -> None:
    movement = movement_with({"turns": turns}, SHIPPED[which].model_dump(mode="json", exclude_none=True))
    disc = random_disc(movement, CUTTERS[by], seed, count)

    reading = read_back(bytes_of(disc_document(disc)), movement, CUTTERS[by])

    assert_same_disc(reading, disc)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
def test_the_files_this_program_writes_play_what_was_placed(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=MANY)
    order = np.lexsort((disc.edge_angle_rad, disc.track_index))

    reading = read_back(written(disc), movement, cutter)

    # The writer rounds to a micrometre or less; 1e-6 rad is 15 microseconds at a turn of 90 s.
    assert_same_disc(reading, disc, within_rad=1e-6)
    assert play(reading.disc).sounds_s == pytest.approx(play(disc).sounds_s[order], abs=1e-4)


# Sizes near the rounding of the file, where a vertex more or less would make another outline.
SLIVER_CUTTERS = {
    "slit a micrometre wide": {"fold/relief_mm": 0.0, "fold/slit_width_mm": 0.001},
    "relief a nanometre long": {"fold/relief_mm": 1e-6, "fold/relief_width_mm": 0.8, "fold/slit_width_mm": 0.1},
    "relief a nanometre long, folded ahead": {"fold/relief_mm": 1e-6, "fold/relief_width_mm": 0.8}
    | {"fold/slit_width_mm": 0.1, "fold/fold_side": "ahead", "fold/inside_radius_mm": 0.001},
    "relief a nanometre wider than the slit": {"fold/relief_width_mm": 0.420001},
}


@pytest.mark.parametrize("changes", SLIVER_CUTTERS.values(), ids=SLIVER_CUTTERS)
def test_a_cutter_with_a_sliver_of_a_slit_or_relief_reads_back(changes: dict[str, float]) -> None:
    cutter = cutter_with({**changes, "layers": {"SLITS": {"name": "Defpoints", "colour": 1}}})
    disc = random_disc(SHIPPED[0], cutter, count=MANY)

    reading = read_back(written(disc), SHIPPED[0], cutter)

    assert_same_disc(reading, disc, within_rad=1e-6)


def test_a_slot_that_is_all_but_round_reads_back() -> None:
    movement = movement_with({"projection/length_mm": 1.3000001}, SHIPPED[2].model_dump(exclude_none=True))
    disc = random_disc(movement, count=MANY)

    assert_same_disc(read_back(written(disc), movement, LASER), disc, within_rad=1e-5)


def test_a_disc_as_large_as_a_movement_may_state_reads_back() -> None:
    large = movement_with(
        {"disc/outer_diameter_mm": 2000, "tracks": [{"track": 1, "radius_mm": 50}, {"track": 2, "radius_mm": 2000}]}
        | {"teeth": [{"tooth": 1, "track": 1, "pitch": "C5"}, {"tooth": 2, "track": 2, "pitch": "E5"}]}
    )
    disc = disc_of(large, [(1, 5.0), (2, 10.0)])  # 60 degrees after the start at 30: straight up, past 2000 mm

    assert_same_disc(read_back(written(disc), large, LASER), disc, within_rad=1e-6)


def written(disc: Disc) -> bytes:
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    return write_dxf(plan.disc, disc.cutter)


def test_the_working_edge_of_a_quarter_turn_is_found_at_its_absolute_place() -> None:
    # 60 s a turn from 30 degrees on: a tooth released at 10 s has its edge at 30 + 60 = 90 degrees (a = 0, d = 0).
    disc = disc_of(PLAIN, [(3, 10.0)])

    reading = read_back(bytes_of(disc_document(disc)), PLAIN, LASER)

    assert reading.disc.track_index.tolist() == [2]
    assert reading.disc.edge_angle_rad == pytest.approx([math.pi / 2], abs=1e-12)
    assert play(reading.disc).sounds_s == pytest.approx([10.0], abs=1e-9)


def test_turning_the_drawing_turns_every_working_edge_and_is_not_turned_back() -> None:
    disc = random_disc(SHIPPED[0])
    document = disc_document(disc)
    for entity in document.modelspace().query('*[layer=="SLITS"]'):
        entity.rotate_z(math.radians(1.0))

    reading = read_back(bytes_of(document), SHIPPED[0], LASER)

    turned = replace(disc, edge_angle_rad=frozen_floats((disc.edge_angle_rad + math.radians(1.0)) % (2 * math.pi)))
    assert_same_disc(reading, turned)


def test_a_drawing_without_projections_gives_a_disc_without_projections() -> None:
    disc = disc_of(PLAIN, [])

    reading = read_back(bytes_of(disc_document(disc)), PLAIN, LASER)

    assert reading.findings == ()
    assert reading.disc.edge_angle_rad.shape == (0,)


def test_an_edge_a_hair_below_angle_zero_is_not_given_as_a_whole_turn() -> None:
    disc = replace(disc_of(PLAIN, [(1, 1.0)]), edge_angle_rad=frozen_floats([-1e-17]))

    reading = read_back(bytes_of(disc_document(disc)), PLAIN, LASER)

    [angle_rad] = reading.disc.edge_angle_rad.tolist()
    assert 0 <= angle_rad < 2 * math.pi


def test_layer_names_of_the_cutter_count_in_any_case() -> None:
    cutter = cutter_with({"layers": {"SLITS": {"name": "Inner", "colour": 1}, "RIM": {"name": "Outer", "colour": 2}}})
    disc = random_disc(SHIPPED[0], cutter)
    document = disc_document(disc)
    for entity in document.modelspace():
        entity.dxf.layer = entity.dxf.layer.upper()

    reading = read_back(bytes_of(document), SHIPPED[0], cutter)

    assert_same_disc(reading, disc)


def test_an_r12_file_with_old_polylines_and_no_unit_is_read() -> None:
    disc = random_disc(SHIPPED[2])

    dxf = bytes_of(disc_document(disc, release="R12"))

    assert b"$INSUNITS" not in dxf
    assert_same_disc(read_back(dxf, SHIPPED[2], LASER), disc)


Vertices = list[tuple[float, ...]]


def other_start(points: Vertices, closed: bool) -> tuple[Vertices, bool]:  # noqa: FBT001 - table of like functions
    first = 3 % len(points) if closed else 0
    return points[first:] + points[:first], closed


def other_way(points: Vertices, closed: bool) -> tuple[Vertices, bool]:  # noqa: FBT001 - as above
    return backwards(points), closed


def first_point_again(points: Vertices, closed: bool) -> tuple[Vertices, bool]:  # noqa: FBT001 - as above
    return ([*points, (*points[0][:2], 0.0)], False) if closed else (points, False)


def more_points(points: Vertices, closed: bool) -> tuple[Vertices, bool]:  # noqa: FBT001 - as above
    return divided(points, closed=closed), closed


def four_decimals(points: Vertices, closed: bool) -> tuple[Vertices, bool]:  # noqa: FBT001 - as above
    return [(round(x, 4), round(y, 4), round(b, 4)) for x, y, b in points], closed


def cut_lines(document: Document) -> list[LWPolyline]:
    lines = document.modelspace().query('LWPOLYLINE[layer!="MARKS"]')
    return [line for line in lines if isinstance(line, LWPolyline)]


def backwards(points: Vertices) -> Vertices:
    """The same closed outline the other way: the piece before each vertex now starts there, bent the other way."""
    return [(x, y, -points[place - 1][2]) for place, (x, y, _) in reversed(list(enumerate(points)))]


def divided(points: Vertices, *, closed: bool) -> Vertices:
    more: Vertices = []
    for place, (x, y, bulge) in enumerate(points):
        more.append((x, y, bulge))
        last = place == len(points) - 1
        if bulge == 0 and (closed or not last):
            to = points[(place + 1) % len(points)]
            more += [(x + (to[0] - x) * part, y + (to[1] - y) * part, 0.0) for part in (0.25, 0.25, 0.7)]
    return more


@pytest.mark.parametrize(
    ("change", "within_rad"),
    [(other_start, 1e-9), (other_way, 1e-9), (first_point_again, 1e-9), (more_points, 1e-6), (four_decimals, 1e-5)],
)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [LASER, OPEN_LASER], ids=["channel", "open slit"])
def test_a_drawing_saved_by_another_program_gives_the_same_disc(
    movement: Movement,
    cutter: Cutter,
    change: Callable[[Vertices, bool], tuple[Vertices, bool]],
    within_rad: float,
) -> None:
    disc = random_disc(movement, cutter)
    document = disc_document(disc)
    for line in cut_lines(document):
        points, closed = change([tuple(point) for point in line.get_points("xyb")], bool(line.closed))
        line.set_points(points, format="xyb")
        line.closed = closed

    reading = read_back(bytes_of(document), movement, cutter)

    assert_same_disc(reading, disc, within_rad=within_rad)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [LASER, OPEN_LASER], ids=["channel", "open slit"])
def test_polylines_exploded_into_lines_and_arcs_are_put_together(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter)
    document = disc_document(disc)
    for line in cut_lines(document):
        for piece in line.explode():
            assert piece.dxf.layer in ("SLITS", "SLOTS", "HOLES", "RIM")

    reading = read_back(bytes_of(document), movement, cutter)

    assert document.modelspace().query('LWPOLYLINE[layer!="MARKS"]').first is None
    assert_same_disc(reading, disc)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_polylines_on_the_back_of_the_sheet_are_turned_over(movement: Movement) -> None:
    disc = random_disc(movement)
    document = disc_document(disc)
    for line in cut_lines(document):
        line.set_points([(-x, y, -bulge) for x, y, bulge in line.get_points("xyb")], format="xyb")
        line.dxf.extrusion = (0, 0, -1)

    reading = read_back(bytes_of(document), movement, LASER)

    assert_same_disc(reading, disc)


def test_circles_and_arcs_on_the_back_of_the_sheet_are_turned_over() -> None:
    disc = random_disc(ROUND_SLOTS)
    document = disc_document(disc)
    space = document.modelspace()
    for entity in list(space.query('LWPOLYLINE[layer=="SLOTS"]')):
        [left, right] = [tuple(point) for point in entity.get_points("xy")]
        middle_x, middle_y = (left[0] + right[0]) / 2, (left[1] + right[1]) / 2
        on_back = {"layer": "SLOTS", "extrusion": (0, 0, -1)}
        space.add_arc((-middle_x, middle_y), 1.0, 20, 200, dxfattribs=on_back)
        space.add_arc((-middle_x, middle_y), 1.0, 200, 20, dxfattribs=on_back)
        space.delete_entity(entity)

    reading = read_back(bytes_of(document), ROUND_SLOTS, LASER)

    assert_same_disc(reading, disc)


def test_an_arc_of_a_whole_turn_is_a_circle() -> None:
    document = disc_document(disc_of(PLAIN, []))
    space = document.modelspace()
    [rim] = space.query('CIRCLE[layer=="RIM"]')
    space.delete_entity(rim)
    space.add_arc((0, 0), 120.0, 30, 390, dxfattribs={"layer": "RIM"})

    assert read_back(bytes_of(document), PLAIN, LASER).findings == ()


def test_windows_line_ends_make_no_difference() -> None:
    disc = random_disc(PLAIN)

    reading = read_back(bytes_of(disc_document(disc)).replace(b"\n", b"\r\n"), PLAIN, LASER)

    assert_same_disc(reading, disc)


def test_a_drawing_without_marks_reads_the_same() -> None:
    disc = random_disc(PLAIN)
    document = disc_document(disc)
    for entity in document.modelspace().query('*[layer=="MARKS"]'):
        document.modelspace().delete_entity(entity)

    assert_same_disc(read_back(bytes_of(document), PLAIN, LASER), disc)
