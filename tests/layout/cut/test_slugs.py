"""Bridges hold slugs: as wide as asked for, never on an edge that works; what stays loose, and the drawing reads back.

Areas are looked at in the file itself, flattened by ezdxf or read by GDAL, as the beam would take them.
"""

import io
import math
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
import shapely
from ezdxf import path as paths
from ezdxf.filemanagement import read

from layout.check import check
from layout.check.finding import Code, Finding
from layout.cut import plan_cuts
from layout.cut.plan import CutPath, CutPlan, Outlines
from layout.documents import Cutter, Movement
from layout.mechanics.projection import pattern_of
from layout.mechanics.slugs import gaps_on_outline, slug_is_held
from layout.place.disc import Disc
from layout.read_back import read_back
from layout.write import write_dxf
from tests.layout.examples import LASER, PLAIN, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import bytes_of, disc_document, random_disc
from tests.outside.gdal_drawing import layers_of
from tests.thorough import pairs_of

KERF_MM = 0.12  # of the shipped laser
SLUGS = {"count": 2, "width_mm": 0.2, "least_slug_mm": 1.5}
TARNLIGHT = SHIPPED[2]


def held_with(slugs: dict[str, float] | None = None, **changes: object) -> Cutter:
    bridges = {"count": 4, "width_mm": 0.4, "slugs": {**SLUGS, **(slugs or {})}}
    return cutter_with({"bridges": bridges, **changes})


HELD = held_with()
CUTTERS = {
    "finished edges": HELD,
    "compensated": held_with(kerf_compensated=True),
    "led in": held_with(lead_in={"length_mm": 0.4}),
    "star side": held_with(drawn_from="star-side"),
    "one": held_with({"count": 1}),
    "three, led in, compensated, R12": held_with(
        {"count": 3}, lead_in={"length_mm": 0.4}, kerf_compensated=True, drawing_release="R12"
    ),
}
# A hole of 8 mm to locate, slots 3 x 6 mm along and across the travel, each where no other is; slots as projections.
FEATURES = [
    {"purpose": "location", "shape": "hole", "radius_mm": 30, "first_at_deg": 0, "width_mm": 8, "length_mm": 8},
    {"purpose": "drive", "shape": "hole", "radius_mm": 30, "first_at_deg": 60, "width_mm": 8, "length_mm": 8},
    {"purpose": "drive", "shape": "slot", "radius_mm": 30, "first_at_deg": 120, "width_mm": 3, "length_mm": 6},
    {"purpose": "stop", "shape": "slot", "radius_mm": 30, "first_at_deg": 180, "width_mm": 6, "length_mm": 3},
    {"purpose": "location", "shape": "slot", "radius_mm": 30, "first_at_deg": 240, "width_mm": 3, "length_mm": 6},
]
SLOTTED = {
    "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.4},
    "projection": {"kind": "slot", "width_mm": 2.0, "length_mm": 5.0},
}
FEATURED = movement_with({"disc/features": FEATURES, **SLOTTED})
MOVEMENTS = [FEATURED, movement_with({**SLOTTED, "turns": "anticlockwise"}), *SHIPPED]


def plan_of(disc: Disc) -> CutPlan:
    return plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)


def path_of(disc: Disc) -> CutPath:
    path = plan_of(disc).path
    assert path is not None
    return path


def beam_takes(disc: Disc, layers: tuple[str, ...]) -> shapely.Geometry:
    """What the beam takes away: every line of the file grown by half a kerf, by ezdxf within a tenth of a micrometre.

    Where the shop compensates, the beam's middle first lies half a kerf inside the line; here that is left out, and the
    line itself is taken for the beam's middle. It changes no bridge by more than its curve.
    """
    cutter = disc.cutter
    document = read(io.StringIO(write_dxf(plan_of(disc).disc, cutter).decode()))
    found = [entity for layer in layers for entity in document.modelspace().query(f'*[layer=="{layer}"]')]
    lines = []
    for one in found:
        points = [(p.x, p.y) for p in paths.make_path(one).flattening(1e-4)]
        lines.append(shapely.LineString(points).buffer(KERF_MM / 2, quad_segs=64))
    return shapely.union_all(lines)


def sheet_left(disc: Disc, layers: tuple[str, ...]) -> list[shapely.Polygon]:
    """The parts that a square of sheet falls into, the largest first."""
    left = shapely.box(-150, -150, 150, 150).difference(beam_takes(disc, layers))
    return sorted(shapely.get_parts(left).tolist(), key=lambda part: -part.area)


@pytest.mark.parametrize("count", [1, 2, 3])
def test_no_slug_is_loose_once_it_is_held(count: int) -> None:
    plucks = [(1, 3.0), (2, 20.0), (3, 33.0)]
    held, loose = disc_of(FEATURED, plucks, held_with({"count": count})), disc_of(FEATURED, plucks)

    # Three slots, five features, the centre hole, each a part of its own; then all one with the disc.
    assert len(sheet_left(loose, ("HOLES", "SLOTS"))) == 1 + 9
    assert len(sheet_left(held, ("HOLES", "SLOTS"))) == 1


@pytest.mark.parametrize("cutter", CUTTERS.values(), ids=CUTTERS)
def test_leads_leave_the_bridges_standing(cutter: Cutter) -> None:
    disc = disc_of(FEATURED, [(1, 3.0), (2, 20.0), (3, 33.0)], cutter)

    assert len(sheet_left(disc, ("HOLES", "SLOTS", "LEADS"))) == 1


def test_the_area_of_a_bridge_is_its_width_times_the_kerf() -> None:
    held, loose = disc_of(FEATURED, [(3, 20.0)], HELD), disc_of(FEATURED, [(3, 20.0)])

    missing_mm2 = beam_takes(loose, ("SLOTS",)).area - beam_takes(held, ("SLOTS",)).area

    # Two bridges 0.2 mm wide across a cut of 0.12 mm; the beam's round ends leave, at each of four ends, a half
    # square of kerf by half a kerf less half a circle: (0.12·0.06 − π·0.06²/2) = 0.001545 mm².
    assert missing_mm2 == pytest.approx(
        2 * 0.2 * KERF_MM + 4 * (KERF_MM * KERF_MM / 2 - math.pi * 0.06**2 / 2), rel=0.01
    )


@pytest.mark.parametrize(("movement", "cutter"), pairs_of(MOVEMENTS, CUTTERS))
def test_a_drawing_with_held_slugs_reads_back_as_the_same_disc(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=20)

    reading = read_back(write_dxf(plan_of(disc).disc, cutter), movement, cutter)

    assert [finding for finding in reading.findings if finding.code is not Code.SIDE_NOT_SHOWN] == []
    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    assert reading.disc.track_index.tolist() == disc.track_index[order].tolist()
    np.testing.assert_allclose(reading.disc.edge_angle_rad, disc.edge_angle_rad[order], atol=1e-7)


def test_gdal_reads_two_open_lines_for_every_slug_and_half_the_rest_between_them(tmp_path: Path) -> None:
    layers = layers_of(write_dxf(plan_of(disc_of(FEATURED, [(3, 20.0)], HELD)).disc, HELD), tmp_path)

    assert [line.geom_type for line in layers["HOLES"]] == ["LineString"] * 2 * 6  # five features, the centre hole
    # Of the centre hole each is half a circle of 5 mm less a gap over a chord of 0.32 mm; GDAL draws arcs by chords.
    half_mm = math.pi * 5 - 2 * 5 * math.asin(0.32 / 10)
    assert [line.length for line in layers["HOLES"][-2:]] == pytest.approx([half_mm] * 2, rel=1e-3)


def gap_middles(disc: Disc, layer: str) -> np.ndarray:
    """Shape (openings, count, 2). From one line's end to the next one's start, by the lines in their order."""
    lines = [entity for entity in plan_of(disc).disc.entities if entity.layer == layer]
    ends = np.array([[line.points_mm[0, 0], line.points_mm[0, -1]] for line in lines])  # type: ignore[union-attr]
    count = disc.cutter.bridges.slugs.count  # type: ignore[union-attr]
    by_opening = ends.reshape(-1, count, 2, 2)
    return (by_opening[:, :, 1] + np.roll(by_opening[:, :, 0], -1, axis=1)) / 2  # type: ignore[no-any-return]


@pytest.mark.parametrize("count", [1, 2, 3, 4])
@pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])
def test_no_bridge_of_a_slot_stands_on_its_trailing_end(turns: str, count: int) -> None:
    disc = disc_of(movement_with({**SLOTTED, "turns": turns}), [(3, 20.0)], held_with({"count": count}))

    # The trailing half circle lies within half a width, 1 mm, ahead of the working edge, in the travel.
    [[edge, end]] = disc.placed_mm(np.array([(0.0, 0.0), (1.0, 0.0)]))
    ahead_mm = (gap_middles(disc, "SLOTS")[0] - end) @ (end - edge)
    assert len(ahead_mm) == count
    assert ahead_mm.min() > (0.2 + KERF_MM) / 2


def test_bridges_stand_where_nothing_works() -> None:
    middles = gap_middles(disc_of(FEATURED, [], HELD), "HOLES")

    # In the order of the drawing: by radius, so as they stand in the document; the centre hole last.
    turned = {}
    for name, at_deg, found in zip(
        ["pin", "drive", "along", "across", "location", "centre"], [0, 60, 120, 180, 240, 0], middles, strict=True
    ):
        turn = math.radians(at_deg)
        out = found @ np.array([math.cos(turn), math.sin(turn)]) - (0 if name == "centre" else 30)
        along = found @ np.array([-math.sin(turn), math.cos(turn)])
        turned[name] = sorted(
            (round(float(x), 1) + 0.0, round(float(y), 1) + 0.0) for x, y in zip(out, along, strict=True)
        )
    # x out along the radius, y along the travel. Circles of 4 and 5 mm; obrounds 3 x 6, half 1.5 and 3.
    assert turned["drive"] == [(-4.0, 0.0), (4.0, 0.0)]
    assert turned["along"] == [(-1.5, 0.0), (1.5, 0.0)]
    assert turned["across"] == [(-3.0, 0.0), (3.0, 0.0)]
    assert turned["location"] == [(0.0, -3.0), (0.0, 3.0)]
    assert turned["pin"] == [(0.0, -4.0), (0.0, 4.0)]  # all round is a fit; even, at 90 and 270 degrees
    assert turned["centre"] == [(0.0, -5.0), (0.0, 5.0)]


def test_small_slugs_fall_through_and_are_left_loose() -> None:
    # A slug is the opening less a kerf on every side: 5 − 2·0.12 = 4.76 mm.
    assert slug_is_held(held_with({"least_slug_mm": 4.76}), 5.0, 2.0)
    assert not slug_is_held(held_with({"least_slug_mm": 4.77}), 5.0, 2.0)
    assert not slug_is_held(held_with({"least_slug_mm": 1.0}), 5.0, 0.24)  # the beam leaves nothing of it
    assert not slug_is_held(LASER, 5.0, 2.0)
    larger = disc_of(FEATURED, [(3, 20.0)], held_with({"least_slug_mm": 5.0}))
    assert all(entity.closed for entity in plan_of(larger).disc.entities if entity.layer == "SLOTS")  # type: ignore[union-attr]


def test_a_folded_tab_keeps_its_channel_whole() -> None:
    entities = plan_of(disc_of(PLAIN, [(3, 20.0)], held_with({"least_slug_mm": 0.1}))).disc.entities

    [slit] = [entity for entity in entities if entity.layer == "SLITS"]
    assert isinstance(slit, Outlines)
    assert slit.closed


def test_every_line_of_a_held_slot_is_pierced_and_its_bridges_are_not_cut() -> None:
    held, loose = path_of(disc_of(FEATURED, [(3, 20.0)], HELD)), path_of(disc_of(FEATURED, [(3, 20.0)]))

    # Seven slugs of two lines and four lines of the rim, for eight whole outlines.
    assert (loose.pierce_count, held.pierce_count) == (8, 7 * 2 + 4)
    # Gaps: four of 0.52 mm in the rim; in the slot, and the slots along and across, straight or on arcs of 1.5 mm;
    # on the holes arcs over a chord of 0.32 mm.
    arc_mm = {radius: 2 * radius * math.asin(0.32 / (2 * radius)) for radius in (1.5, 4.0, 5.0)}
    gaps_mm = 4 * 240 * math.asin(0.52 / 240) + 2 * (0.32 + 0.32 + 2 * arc_mm[1.5] + 2 * arc_mm[4.0] + arc_mm[5.0])
    assert loose.cut_length_mm - held.cut_length_mm == pytest.approx(gaps_mm, abs=1e-6)


def test_each_line_has_its_lead_in_the_slug() -> None:
    entities = plan_of(disc_of(FEATURED, [(3, 20.0)], CUTTERS["led in"])).disc.entities
    cut = [entity for entity in entities if entity.layer in ("SLOTS", "LEADS")][:4]

    assert [entity.layer for entity in cut] == ["LEADS", "SLOTS", "LEADS", "SLOTS"]
    slot = shapely.Polygon(disc_of(FEATURED, [(3, 20.0)]).placed_mm(np.array([(1, -1), (4, -1), (4, 1), (1, 1)]))[0])
    for lead, line in zip(cut[::2], cut[1::2], strict=True):
        assert isinstance(lead, Outlines)
        assert isinstance(line, Outlines)
        np.testing.assert_allclose(lead.points_mm[0, 1], line.points_mm[0, 0])
        assert slot.contains(shapely.Point(lead.points_mm[0, 0]))


@pytest.mark.parametrize("length_mm", [0.4, 0.9, 1.4, 1.8])
def test_no_lead_reaches_back_under_the_bridge_beside_its_line(length_mm: float) -> None:
    cutter = held_with({"count": 1}, lead_in={"length_mm": length_mm})
    entities = plan_of(disc_of(FEATURED, [(3, 20.0)], cutter)).disc.entities

    for lead, line in pairwise(entities):
        if lead.layer != "LEADS" or line.layer not in ("SLOTS", "HOLES"):
            continue
        assert isinstance(lead, Outlines)
        assert isinstance(line, Outlines)
        back = lead.points_mm[0, 0] - lead.points_mm[0, 1]
        chord = line.points_mm[0, 1] - line.points_mm[0, 0]
        half = 2 * math.atan(line.bulges[0])  # DXF reference: the chord is turned by half the arc from its tangent
        ahead = np.array(
            [
                math.cos(half) * chord[0] + math.sin(half) * chord[1],
                math.cos(half) * chord[1] - math.sin(half) * chord[0],
            ]
        )
        assert back @ ahead >= -1e-9 * np.linalg.norm(chord)


def test_the_head_says_how_many_slugs_are_held_and_by_what() -> None:
    # The slots of three projections, five holes and slots of the blank, the centre hole.
    head = plan_of(disc_of(FEATURED, [(3, 20.0), (1, 3.0), (2, 8.0)], HELD)).disc.comments
    # 8 and 10 mm less two kerfs are at least 7 mm; nothing else is.
    few = plan_of(disc_of(FEATURED, [(3, 20.0)], held_with({"count": 1, "least_slug_mm": 7.0}))).record.comments

    assert "slugs: 9 are held, each by 2 bridges of 0.2 mm; break them out by hand" in head
    assert "slugs: 3 are held, each by one bridge of 0.2 mm; break them out by hand" in few


@pytest.mark.parametrize("cutter", [LASER, held_with({"least_slug_mm": 20}), held_with({"width_mm": 9})])
def test_a_head_of_a_disc_without_held_slugs_says_nothing_of_them(cutter: Cutter) -> None:
    assert not any("slugs" in line for line in plan_of(disc_of(FEATURED, [(3, 20.0)], cutter)).disc.comments)


def slug_findings(movement: Movement, cutter: Cutter) -> list[Finding]:
    found = check(disc_of(movement, [(1, 1.0)], cutter))
    return [finding for finding in found if finding.code in (Code.BRIDGE_HAS_NO_ROOM, Code.BRIDGE_ON_FIT)]


def test_bridges_of_slugs_without_room_are_told_and_the_opening_stays_whole() -> None:
    # The free outline of a slot of 2.2 x 1.3 mm: two sides of 0.9 mm and an arc of 2.04; none has room for 1 mm.
    wide = held_with({"width_mm": 1.0, "least_slug_mm": 1.5})
    [slots, *_] = slug_findings(TARNLIGHT, wide)

    assert (slots.code, slots.level) == (Code.BRIDGE_HAS_NO_ROOM, "warning")
    assert slots.message == (
        "The slots have no room, clear of the sides that work, for 2 bridges of 1.000 mm that would hold a slug of "
        "1.960 mm. None is left, and the slug may tip up in the head's way."
    )
    assert slots.remedy == (
        "State fewer or narrower bridges.slugs in the cutter document; or stop the machine and take the slug out."
    )
    entities = plan_of(disc_of(TARNLIGHT, [(1, 1.0)], wide)).disc.entities
    assert all(entity.closed for entity in entities if entity.layer == "SLOTS")  # type: ignore[union-attr]


def test_bridges_on_a_fit_are_told_with_what_to_do() -> None:
    [location, centre] = slug_findings(FEATURED, HELD)

    assert {location.level, centre.level} == {"advice"}
    assert {location.code, centre.code} == {Code.BRIDGE_ON_FIT}
    assert location.message.startswith("The location hole has no room for 2 bridges of 0.200 mm away from where")
    assert centre.message == (
        "The centre hole has no room for 2 bridges of 0.200 mm away from where the spindle or pin fits, which is all "
        "round: they stand on the fit, and leave stubs there."
    )
    # 10 mm less two kerfs.
    assert centre.remedy == (
        "Stone the stubs flush before the fit is tried; or raise bridges.slugs.least_slug_mm above 9.760 mm, and take "
        "that slug out by hand."
    )


def test_a_cutter_that_holds_no_slugs_is_told_nothing_of_them() -> None:
    assert (
        slug_findings(FEATURED, LASER)
        == slug_findings(FEATURED, cutter_with({"bridges": {"count": 4, "width_mm": 1}}))
        == []
    )
    assert slug_findings(FEATURED, held_with({"least_slug_mm": 20})) == []


@pytest.mark.parametrize("movement", [FEATURED, TARNLIGHT], ids=lambda movement: movement.id)
def test_leads_without_room_in_held_slugs_are_told(movement: Movement) -> None:
    # A slot 2 or 1.3 mm wide, a hole of 3 mm: no lead of 2.5 mm ends clear of the other side; in 0.4 mm all do.
    told = [
        [
            finding
            for finding in check(disc_of(movement, [(1, 1.0)], held_with(lead_in={"length_mm": length})))
            if finding.code is Code.LEAD_HAS_NO_ROOM
        ]
        for length in (0.4, 8.0)
    ]

    assert told[0] == []
    assert "The cuts of the projections have no room" in told[1][0].message


def test_a_lost_line_of_a_slot_and_of_a_hole_is_found() -> None:
    for layer, codes in (("SLOTS", {Code.UNKNOWN_CUT}), ("HOLES", {Code.UNKNOWN_CUT, Code.BLANK_DIFFERS})):
        document = disc_document(disc_of(FEATURED, [(3, 20.0), (1, 3.0)], HELD))
        document.modelspace().delete_entity(document.modelspace().query(f'*[layer=="{layer}"]')[0])

        reading = read_back(bytes_of(document), FEATURED, HELD)

        assert {finding.code for finding in reading.findings} - {Code.SIDE_NOT_SHOWN} == codes
        assert reading.disc.projection_count == (1 if layer == "SLOTS" else 2)


def test_bridges_of_another_width_or_number_are_found() -> None:
    for other in ({"width_mm": 0.5}, {"count": 3}):
        drawn = write_dxf(plan_of(disc_of(FEATURED, [(3, 20.0)], held_with(other))).disc, HELD)

        reading = read_back(drawn, FEATURED, HELD)

        assert {Code.UNKNOWN_CUT, Code.BLANK_DIFFERS} <= {finding.code for finding in reading.findings}
        assert reading.disc.projection_count == 0


def test_a_bridge_moved_onto_the_working_edge_is_found() -> None:
    # A slot that turns its other end to the travel has its bridges on the trailing side: here by a disc that turns the
    # other way, whose slots lie with their working edge where these have their leading end.
    one = held_with({"count": 1})
    disc = disc_of(movement_with(SLOTTED), [(3, 20.0)], one)
    document = disc_document(disc)
    [slot] = document.modelspace().query('*[layer=="SLOTS"]')
    [[middle]] = disc.placed_mm(np.array([(2.5, 0.0)]))
    turned = [(2 * middle[0] - x, 2 * middle[1] - y, bulge) for x, y, bulge in slot.get_points("xyb")]
    slot.set_points(turned, format="xyb")

    reading = read_back(bytes_of(document), movement_with(SLOTTED), one)

    [finding] = [found for found in reading.findings if found.code is Code.OUT_OF_SHAPE]
    angle_deg = math.degrees(disc.edge_angle_rad[0])
    assert finding.level == "error"
    assert finding.message == (
        "1 of 1 slots have a bridge on their working edge, the end that pushes the star wheel's point; the first is on "
        f"track 3 at {angle_deg:.3f} degrees"
    )


def test_a_line_bent_out_of_its_slot_is_not_joined() -> None:
    document = disc_document(disc_of(FEATURED, [(3, 20.0)], HELD))
    line = document.modelspace().query('*[layer=="SLOTS"]')[0]
    points = line.get_points("xyb")
    x, y, bulge = points[0]
    line.set_points([(x + 0.1, y + 0.1, bulge), *points[1:]], format="xyb")

    reading = read_back(bytes_of(document), FEATURED, HELD)

    assert Code.UNKNOWN_CUT in {finding.code for finding in reading.findings}
    assert reading.disc.projection_count == 0


def test_a_slot_with_a_side_out_of_line_at_its_bridge_is_not_joined() -> None:
    # Both ends beside one bridge 0.03 mm out of the side: the gap itself is as it should be.
    disc = disc_of(FEATURED, [(3, 20.0)], HELD)
    document = disc_document(disc)
    first, second = document.modelspace().query('*[layer=="SLOTS"]')
    [[end, centre]] = disc.placed_mm(np.array([(0.0, 1.0), (0.0, 0.0)]))
    out = 0.03 * (end - centre)
    for line, place in ((first, -1), (second, 0)):
        points = line.get_points("xyb")
        x, y, bulge = points[place]
        points[place] = (x + out[0], y + out[1], bulge)
        line.set_points(points, format="xyb")

    reading = read_back(bytes_of(document), FEATURED, HELD)

    assert Code.UNKNOWN_CUT in {finding.code for finding in reading.findings}
    assert reading.disc.projection_count == 0


def test_lines_in_any_order_and_run_either_way_are_joined() -> None:
    disc = random_disc(FEATURED, HELD, count=12)
    document = disc_document(disc)
    space = document.modelspace()
    for place, line in enumerate(space.query('*[layer=="SLOTS"]')):
        points = line.get_points("xyb")
        if place % 3 == 0:
            bulges = [*(-bulge for _, _, bulge in reversed(points[:-1])), 0.0]
            back = [(x, y, b) for (x, y, _), b in zip(reversed(points), bulges, strict=True)]
            line.set_points(back, format="xyb")
        if place % 5 == 0:
            space.unlink_entity(line)
            space.add_entity(line)

    reading = read_back(bytes_of(document), FEATURED, HELD)

    assert [finding for finding in reading.findings if finding.code is not Code.SIDE_NOT_SHOWN] == []
    assert reading.disc.projection_count == 12


def test_the_slots_of_a_pattern_are_held_by_gaps_within_single_pieces() -> None:
    cut = pattern_of(TARNLIGHT, HELD).cut
    assert cut is not None

    gaps = gaps_on_outline(cut.points_mm, cut.bulges, "slot", HELD)

    assert gaps is not None
    # Free are side, leading arc and side, 0.9 + 2.042 + 0.9 mm: a quarter and three quarters of that, 0.96 and 2.88 mm,
    # lie just within the arc's ends, and are moved a gap's length on its line into it: 2·0.65·asin(0.32/1.3) = 0.3233.
    share = 2 * 0.65 * math.asin(0.32 / 1.3) / (math.pi * 0.65)
    assert [gap.piece for gap in gaps] == [0, 0]
    assert [(gap.from_ratio + gap.to_ratio) / 2 for gap in gaps] == pytest.approx([share, 1 - share])


def test_a_hole_that_two_rows_share_is_held_as_the_stricter_use_wants() -> None:
    shared = movement_with({"disc/features": [{**FEATURES[1], "first_at_deg": 0}, FEATURES[0]]})

    [middles, _] = gap_middles(disc_of(shared, [], HELD), "HOLES")

    assert np.abs(middles - [30, 0])[:, 0].max() < 1e-9
