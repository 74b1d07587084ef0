"""Compensated outlines: half a kerf smaller inside, half a kerf larger outside, by sums and by another library."""

import math
from dataclasses import replace

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import check
from layout.check.finding import Code, Finding
from layout.check.kerf import nothing_closes_under_the_kerf
from layout.cut import plan_cuts
from layout.cut.plan import Circles, CutPlan, Entity, Outlines
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.offset import moved_outlines
from layout.mechanics.projection import Shape
from layout.place.disc import Disc
from layout.read_back import read_back
from layout.write import write_dxf
from tests.layout.cut.test_blank import HOLE, NOTCH, SLOT, traced
from tests.layout.examples import LASER, PLAIN, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import random_disc
from tests.thorough import pairs_of, tried

KERF_MM = 0.12  # of the shipped laser
HALF_MM = KERF_MM / 2
COMPENSATED = cutter_with({"kerf_compensated": True})
STAR_SIDE = cutter_with({"kerf_compensated": True, "drawn_from": "star-side"})
ROUND_RELIEFS = cutter_with({"kerf_compensated": True, "fold/relief_ends": "round", "fold/relief_width_mm": 0.6})
OPEN_SLITS = cutter_with({"kerf_compensated": True, "fold/slit": "centre-line", "fold/slit_width_mm": None})
FEATURED = movement_with({"disc/features": [{**HOLE, "count": 3}, SLOT, {**NOTCH, "count": 2}]})
FEATURED_SHIPPED = tuple(
    movement_with({"disc/features": [SLOT, {**NOTCH, "radius_mm": movement.disc.outer_diameter_mm / 2}]}, document)
    for movement in SHIPPED
    for document in [movement.model_dump(mode="json", exclude_none=True)]
)


def plan_of(disc: Disc) -> CutPlan:
    return plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)


def cut_of(disc: Disc) -> list[Entity]:
    return [entity for entity in plan_of(disc).disc.entities if entity.layer != "MARKS"]


def polygons(entity: Entity) -> list[shapely.Polygon]:
    """The outlines of an entity; circles are left to be checked by their radii."""
    if not isinstance(entity, Outlines):
        return []
    return [
        traced(Outlines(layer=entity.layer, points_mm=points[None], bulges=entity.bulges, closed=True))
        for points in entity.points_mm
    ]


def area_mm2(disc: Disc, layer: str) -> float:
    [first, *_] = [found for entity in cut_of(disc) if entity.layer == layer for found in polygons(entity)]
    return first.area


def test_a_channel_shrinks_by_its_length_round_times_half_a_kerf_less_its_corners() -> None:
    # The channel of test_projections: outside 2·2.594545 + 2.04, inside 2·2.174545 + 1.2, ends 2·0.42 long; its area
    # is 2.594545·2.04 − 2.174545·1.2. A right-angled outline that moves in by h loses P·h and gains 4·h².
    finished_mm2 = 2.594545 * 2.04 - 2.174545 * 1.2
    around_mm = 2 * 2.594545 + 2.04 + 2 * 2.174545 + 1.2 + 2 * 0.42

    assert area_mm2(disc_of(PLAIN, [(3, 10.0)]), "SLITS") == pytest.approx(finished_mm2, abs=1e-5)
    compensated_mm2 = area_mm2(disc_of(PLAIN, [(3, 10.0)], COMPENSATED), "SLITS")
    assert compensated_mm2 == pytest.approx(finished_mm2 - around_mm * HALF_MM + 4 * HALF_MM**2, abs=1e-5)


def test_a_slot_keeps_its_middle_and_its_round_ends() -> None:
    [slot] = [entity for entity in cut_of(disc_of(movement_with({"disc/features": [SLOT]}), [], COMPENSATED))][:1]

    # 9 by 4 becomes 8.88 by 3.88 round (30, 0): straight sides at 30 ± 1.94, from −2.5 to 2.5 as before.
    assert isinstance(slot, Outlines)
    assert slot.points_mm[0] == pytest.approx(np.array([(31.94, 2.5), (28.06, 2.5), (28.06, -2.5), (31.94, -2.5)]))
    assert slot.bulges == pytest.approx([1, 0, 1, 0])


def test_holes_lose_and_the_rim_gains_a_kerf_of_diameter() -> None:
    feature, centre, rim = cut_of(disc_of(movement_with({"disc/features": [HOLE]}), [], COMPENSATED))

    assert isinstance(feature, Circles)
    assert isinstance(centre, Circles)
    assert isinstance(rim, Circles)
    assert [float(entity.radius_mm[0]) for entity in (feature, centre, rim)] == pytest.approx([2.44, 4.94, 120.06])


def test_a_notched_rim_grows_and_its_notches_shrink() -> None:
    [rim] = polygons(cut_of(disc_of(movement_with({"disc/features": [NOTCH]}), [], COMPENSATED))[-1])

    # As in test_blank, with R = 120.06, a floor at 117.06 and sides at ±3.94: the circle less
    # 2·∫ (√(R² − y²) − floor) dy from 0 to the side.
    radius_mm, floor_mm, half_mm = 120.06, 117.06, 3.94
    notch_mm2 = half_mm * math.sqrt(radius_mm**2 - half_mm**2) + radius_mm**2 * math.asin(half_mm / radius_mm)
    notch_mm2 -= 2 * half_mm * floor_mm
    assert rim.area == pytest.approx(math.pi * radius_mm**2 - notch_mm2, rel=1e-5)


@pytest.mark.parametrize("movement", [FEATURED, *FEATURED_SHIPPED], ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [COMPENSATED, STAR_SIDE, ROUND_RELIEFS], ids=["laser", "star side", "round"])
def test_outlines_are_where_another_library_puts_them(movement: Movement, cutter: Cutter) -> None:
    # shapely 2 (GEOS): buffer with mitred corners, of the outlines with their arcs traced.
    plain = cutter_with({"kerf_compensated": False}, cutter)
    pairs = zip(
        cut_of(random_disc(movement, plain, count=8)), cut_of(random_disc(movement, cutter, count=8)), strict=True
    )

    compared = 0
    for finished, drawn in pairs:
        outwards_mm = HALF_MM if finished.layer == "RIM" else -HALF_MM
        for one, other in zip(polygons(finished), polygons(drawn), strict=True):
            wanted = one.buffer(outwards_mm, join_style="mitre", mitre_limit=10)
            assert shapely.hausdorff_distance(other.exterior, wanted.exterior) < 0.002
            assert other.area == pytest.approx(wanted.area, rel=1e-4)
            compared += 1
    assert compared >= 8 + 1 + 1  # the projections, the feature slot and the rim


@pytest.mark.parametrize(
    ("movement", "cutter"),
    pairs_of(
        [FEATURED, *SHIPPED, *FEATURED_SHIPPED],
        {"laser": COMPENSATED, "star side": STAR_SIDE, "round": ROUND_RELIEFS, "open": OPEN_SLITS},
    ),
)
def test_a_compensated_drawing_reads_back_as_the_disc_it_was_drawn_from(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=100)

    reading = read_back(write_dxf(plan_of(disc).disc, cutter), movement, cutter)

    assert [finding for finding in reading.findings if finding.code is not Code.SIDE_NOT_SHOWN] == []
    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    assert reading.disc.track_index.tolist() == disc.track_index[order].tolist()
    assert reading.disc.edge_angle_rad == pytest.approx(disc.edge_angle_rad[order], abs=1e-6)


@pytest.mark.parametrize(("drawn_for", "read_for"), [(LASER, COMPENSATED), (COMPENSATED, LASER)])
def test_a_drawing_compensated_for_one_and_read_for_the_other_is_found_out(drawn_for: Cutter, read_for: Cutter) -> None:
    disc = random_disc(SHIPPED[0], drawn_for, count=10)

    reading = read_back(write_dxf(plan_of(disc).disc, drawn_for), SHIPPED[0], read_for)

    codes = [finding.code for finding in reading.findings]
    assert codes.count(Code.OUT_OF_SHAPE) == 10
    assert Code.BLANK_DIFFERS in codes


def test_an_open_slit_is_the_beams_own_line_and_stays() -> None:
    plain = cutter_with({"kerf_compensated": False}, OPEN_SLITS)

    [drawn, *_], [finished, *_] = (cut_of(disc_of(PLAIN, [(3, 10.0)], cutter)) for cutter in (OPEN_SLITS, plain))

    assert isinstance(drawn, Outlines)
    assert isinstance(finished, Outlines)
    assert drawn.points_mm.tolist() == finished.points_mm.tolist()


def kerf_findings(movement: Movement, cutter: Cutter) -> list[Finding]:
    return [finding for finding in check(disc_of(movement, [(1, 1.0)], cutter)) if finding.code is Code.KERF_CLOSES]


def test_a_channel_no_wider_than_the_kerf_closes() -> None:
    [finding] = kerf_findings(PLAIN, cutter_with({"kerf_compensated": True, "kerf_mm": 0.42}))

    assert finding.level == "error"
    assert (finding.measured, finding.limit, finding.unit) == (0.42, 0.42, "mm")
    assert finding.message == (
        "The slit (slit_width_mm) is 0.420 mm wide, no more than the kerf of 0.420 mm of fibre-laser: drawn half a "
        "kerf smaller all round, it closes."
    )
    assert "kerf_compensated false" in finding.remedy


def test_a_channel_a_little_wider_than_the_kerf_does_not_close_and_keeps_its_difference() -> None:
    cutter = cutter_with({"kerf_compensated": True, "kerf_mm": 0.40})

    assert kerf_findings(PLAIN, cutter) == []
    # What is left is 0.02 wide, and 0.02·√2 across a corner: nothing is farther than 0.01·√2 from its edges.
    outline = shapely.Polygon(cut_of(disc_of(PLAIN, [(3, 10.0)], cutter))[0].points_mm[0])  # type: ignore[union-attr]
    assert outline.is_valid
    assert outline.buffer(-0.0099).area > 0
    assert outline.buffer(-0.0142).area == 0


def test_a_kerf_that_closes_is_no_matter_where_the_shop_compensates() -> None:
    assert kerf_findings(PLAIN, cutter_with({"kerf_mm": 0.5})) == []


@pytest.mark.parametrize(
    ("movement", "cutter", "what"),
    [
        (movement_with({"disc/centre_hole_mm": 2}), {"kerf_mm": 2}, "centre hole"),
        (movement_with({"disc/features": [{**NOTCH, "length_mm": 0.4}]}), {"kerf_mm": 0.41}, "location notch"),
        (movement_with({"disc/features": [{**SLOT, "width_mm": 0.3}]}), {"kerf_mm": 0.35}, "drive slot"),
        (PLAIN, {"kerf_mm": 0.2, "fold/relief_width_mm": 0.2}, "relief (relief_width_mm)"),
        (PLAIN, {"kerf_mm": 0.3, "fold/relief_width_mm": 0.6}, "relief (relief_mm)"),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_everything_that_closes_is_named(movement: Movement, cutter: dict[str, float], what: str) -> None:
    findings = kerf_findings(movement, cutter_with({"kerf_compensated": True, **cutter}))

    assert f"The {what} is " in " ".join(finding.message for finding in findings)


@pytest.mark.parametrize(
    ("arm_mm", "ends", "message"),
    [
        (0.1, "closed", "a part that is no wider than the kerf of 0.200 mm"),
        (0.3, "closed", ""),
        (0.1, "open", ""),
    ],
)
def test_a_cut_whose_shape_closes_though_no_width_of_it_does_is_told_as_a_whole(
    arm_mm: float, ends: str, message: str
) -> None:
    # A square with two arms, as wide as is said, under a kerf of 0.2 mm. No fold that can be stated has this shape.
    cutter = cutter_with({"kerf_compensated": True, "kerf_mm": 0.2})
    corners = [(0, 0), (2, 0), (2, 2), (2 - arm_mm, 2), (2 - arm_mm, 1), (arm_mm, 1), (arm_mm, 2), (0, 2)]
    shape = Shape(
        points_mm=frozen_floats(np.array(corners, dtype=np.float64)),
        bulges=frozen_floats([0.0] * len(corners)),
        closed=ends == "closed",
    )
    disc = disc_of(PLAIN, [(1, 1.0)], cutter)

    findings = nothing_closes_under_the_kerf(replace(disc, pattern=replace(disc.pattern, cut=shape)))

    told = " ".join(finding.message for finding in findings)
    assert told.removesuffix(" of fibre-laser: drawn half a kerf smaller all round, it closes.") == (
        f"The cut of a projection has {message}" if message else ""
    )


def test_what_closes_is_drawn_as_it_is_finished() -> None:
    cutter = cutter_with({"kerf_compensated": True, "kerf_mm": 0.42})

    [drawn, *_], [finished, *_] = (cut_of(disc_of(PLAIN, [(3, 10.0)], one)) for one in (cutter, LASER))

    assert drawn.points_mm.tolist() == finished.points_mm.tolist()  # type: ignore[union-attr]


@settings(max_examples=tried(100), deadline=None)
@given(
    sides=st.integers(3, 9),
    seed=st.integers(0, 2**32 - 1),
    outwards=st.floats(-0.4, 0.4),
    pieces=st.sampled_from(["arcs", "straight"]),
    way=st.sampled_from(["forwards", "backwards"]),
)
def test_moving_out_and_in_again_gives_the_outline_back(
    sides: int, seed: int, outwards: float, pieces: str, way: str
) -> None:
    dice = np.random.default_rng(seed)
    angle = (np.arange(sides) + dice.uniform(0, 0.3, sides)) * 2 * math.pi / sides
    points = 10 * np.column_stack([np.cos(angle), np.sin(angle)])
    bulges = dice.uniform(0.02, 0.3, sides) if pieces == "arcs" else np.zeros(sides)
    if way == "backwards":
        points, bulges = points[::-1], -np.roll(bulges[::-1], -1)

    there = moved_outlines(points[None], bulges, outwards)
    assert there is not None
    back = moved_outlines(there[0], there[1], -outwards)

    assert back is not None
    assert back[0][0] == pytest.approx(points, abs=1e-9)
    assert back[1] == pytest.approx(bulges, abs=1e-9)
    # Outwards is larger, whichever way round it is drawn.
    before, after = (
        traced(Outlines(layer="HOLES", points_mm=one[None], bulges=with_bulges, closed=True)).area
        for one, with_bulges in ((points, bulges), (there[0][0], there[1]))
    )
    assert (after > before) == (outwards > 1e-4) or abs(outwards) <= 1e-4
