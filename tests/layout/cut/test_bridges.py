"""Bridges hold the disc: as many as asked for, as wide as asked for, clear of notches; and the drawing reads back."""

import io
import math

import numpy as np
import pytest
import shapely
from ezdxf import path as paths
from ezdxf.filemanagement import read
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import check
from layout.check.finding import Code, Finding
from layout.cut import plan_cuts
from layout.cut.plan import Circles, CutPath, Entity, Outlines
from layout.documents import Cutter, Movement
from layout.mechanics.bridging import arcs_of_rim_rad, gaps_in
from layout.place.disc import Disc
from layout.read_back import read_back
from layout.write import write_dxf
from tests.layout.cut.test_blank import HOLE, NOTCH
from tests.layout.examples import LASER, PLAIN, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import bytes_of, disc_document, random_disc
from tests.thorough import pairs_of, tried

KERF_MM = 0.12  # of the shipped laser
BRIDGES = {"count": 4, "width_mm": 0.8}
HELD = cutter_with({"bridges": BRIDGES})
CUTTERS = {
    "finished edges": HELD,
    "compensated": cutter_with({"bridges": BRIDGES, "kerf_compensated": True}),
    "led in": cutter_with({"bridges": BRIDGES, "lead_in": {"length_mm": 1.0}}),
    "star side": cutter_with({"bridges": BRIDGES, "drawn_from": "star-side"}),
    "one": cutter_with({"bridges": {"count": 1, "width_mm": 3}}),
    "many, led in, compensated": cutter_with(
        {"bridges": {"count": 24, "width_mm": 1}, "lead_in": {"length_mm": 1.0}, "kerf_compensated": True}
    ),
}
NOTCHED = movement_with({"disc/features": [{**NOTCH, "count": 3}, {**NOTCH, "first_at_deg": 20}, HOLE]})


def rim_of(disc: Disc) -> list[Entity]:
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    return [entity for entity in plan.disc.entities if entity.layer == "RIM"]


def path_of(disc: Disc) -> CutPath:
    path = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None).path
    assert path is not None
    return path


def beam_lines(disc: Disc, cutter: Cutter) -> list[shapely.LineString]:
    """The rim's lines out of the file, flattened by ezdxf within a tenth of a micrometre."""
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    document = read(io.StringIO(write_dxf(plan.disc, cutter).decode()))
    found = document.modelspace().query('*[layer=="RIM"]')
    return [shapely.LineString([(p.x, p.y) for p in paths.make_path(one).flattening(1e-4)]) for one in found]


@pytest.mark.parametrize(("movement", "cutter"), pairs_of([PLAIN, NOTCHED, *SHIPPED], CUTTERS))
def test_as_many_bridges_stand_as_wide_as_asked_for(movement: Movement, cutter: Cutter) -> None:
    assert cutter.bridges is not None

    lines = beam_lines(disc_of(movement, [], cutter), cutter)

    assert len(lines) == cutter.bridges.count
    # What the beam takes is its line grown by half a kerf, round at the ends; metal is left between line and line.
    taken = [line.buffer(KERF_MM / 2, quad_segs=64) for line in lines]
    if len(taken) == 1:
        [line] = lines
        assert math.dist(line.coords[0], line.coords[-1]) - KERF_MM == pytest.approx(cutter.bridges.width_mm, abs=1e-3)
        return
    for one, other in zip(taken, taken[1:] + taken[:1], strict=True):
        assert one.distance(other) == pytest.approx(cutter.bridges.width_mm, abs=1e-3)


@pytest.mark.parametrize("cutter", CUTTERS.values(), ids=CUTTERS)
def test_bridges_stand_clear_of_notches(cutter: Cutter) -> None:
    lines = beam_lines(disc_of(NOTCHED, [], cutter), cutter)

    # Every notch is cut whole: its floor, at 117 mm, lies inside one line, and bridges are far from its mouth.
    mirror = -1 if cutter.drawn_from == "star-side" else 1
    for angle_deg in (0, 120, 240, 20):
        angle = mirror * math.radians(angle_deg)
        floor = shapely.Point(117 * math.cos(angle), 117 * math.sin(angle))
        assert sum(line.distance(floor) < 0.1 for line in lines) == 1
        ends = [shapely.Point(end) for line in lines for end in (line.coords[0], line.coords[-1])]
        assert min(end.distance(floor) for end in ends) > 8


def test_bridges_of_a_round_rim_stand_evenly_in_cutting_order() -> None:
    lines = [entity for entity in rim_of(disc_of(PLAIN, [], HELD)) if isinstance(entity, Outlines)]

    # Gaps at 45, 135, 225, 315 degrees; their chord is 0.8 + 0.12 mm: half of it is asin(0.46/120) = 0.219636 degrees.
    starts = [math.degrees(math.atan2(*line.points_mm[0, 0, ::-1])) % 360 for line in lines]
    ends = [math.degrees(math.atan2(*line.points_mm[0, -1, ::-1])) % 360 for line in lines]
    assert starts == pytest.approx([45.219636, 135.219636, 225.219636, 315.219636], abs=1e-5)
    assert ends == pytest.approx([134.780364, 224.780364, 314.780364, 44.780364], abs=1e-5)
    assert not any(line.closed for line in lines)


def test_every_stretch_between_bridges_is_pierced_and_the_bridges_are_not_cut() -> None:
    held, whole = path_of(disc_of(PLAIN, [], HELD)), path_of(disc_of(PLAIN, []))

    assert held.pierce_count == 1 + 4  # the centre hole and four stretches
    # Each gap takes an arc of 2·asin(0.46/120)·120 mm out of the rim.
    assert whole.cut_length_mm - held.cut_length_mm == pytest.approx(4 * 2 * math.asin(0.46 / 120) * 120)


@pytest.mark.parametrize(("movement", "cutter"), pairs_of([PLAIN, NOTCHED, *SHIPPED], CUTTERS))
def test_a_drawing_with_bridges_reads_back(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=20)
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)

    reading = read_back(write_dxf(plan.disc, cutter), movement, cutter)

    assert [finding for finding in reading.findings if finding.code is not Code.SIDE_NOT_SHOWN] == []
    assert reading.disc.projection_count == 20


def test_a_bridge_that_is_lost_is_found() -> None:
    document = disc_document(disc_of(PLAIN, [(1, 1.0)], HELD))
    document.modelspace().delete_entity(document.modelspace().query('*[layer=="RIM"]')[0])

    codes = [finding.code for finding in read_back(bytes_of(document), PLAIN, HELD).findings]

    assert Code.BLANK_DIFFERS in codes
    assert codes.count(Code.UNKNOWN_CUT) == 3


def test_a_bridge_too_many_is_found() -> None:
    more = cutter_with({"bridges": {**BRIDGES, "count": 5}})

    reading = read_back(bytes_of(disc_document(disc_of(PLAIN, [(1, 1.0)], more))), PLAIN, HELD)

    assert Code.BLANK_DIFFERS in [finding.code for finding in reading.findings]


def test_bridges_of_another_width_are_found() -> None:
    wider = cutter_with({"bridges": {"count": 4, "width_mm": 1.0}})

    reading = read_back(bytes_of(disc_document(disc_of(PLAIN, [(1, 1.0)], wider))), PLAIN, HELD)

    assert Code.BLANK_DIFFERS in [finding.code for finding in reading.findings]


def test_a_rim_without_room_for_its_bridges_stays_closed() -> None:
    # 24 bridges of 20 mm are 480 of 754 mm.
    [rim] = rim_of(disc_of(PLAIN, [], cutter_with({"bridges": {"count": 24, "width_mm": 20}})))

    assert isinstance(rim, Circles)


def bridge_findings(cutter: Cutter, movement: Movement = PLAIN) -> list[Finding]:
    return [found for found in check(disc_of(movement, [(1, 1.0)], cutter)) if found.code is Code.BRIDGE_HAS_NO_ROOM]


def test_bridges_without_room_are_told() -> None:
    [finding] = bridge_findings(cutter_with({"bridges": {"count": 24, "width_mm": 20}}))

    assert finding.level == "warning"
    assert finding.message == (
        "The rim has no room for 24 bridges of 20.000 mm: they would take more than 50% of an arc between its notches. "
        "None is left, and nothing holds the disc."
    )
    assert finding.remedy == "State fewer or narrower bridges in the cutter document."


def test_bridges_that_have_room_are_no_matter() -> None:
    # Half of the rim is 376.99 mm: 24 gaps of 15.5 + 0.12 mm take a little over 24·15.62 = 374.88.
    assert bridge_findings(cutter_with({"bridges": {"count": 24, "width_mm": 15.5}})) == []
    assert bridge_findings(HELD, NOTCHED) == bridge_findings(LASER) == []


def test_bridges_are_shared_out_by_length_with_one_more_for_the_longer() -> None:
    shared = gaps_in([(0.0, 1.0), (2.0, 5.0)], count=4, width_rad=0.01)

    assert shared is not None
    assert [[round((gap.from_rad + gap.to_rad) / 2, 9) for gap in gaps] for gaps in shared] == [[0.5], [2.5, 3.5, 4.5]]


@settings(max_examples=tried(100), deadline=None)
@given(
    arcs=st.lists(st.floats(0.05, 2.0), min_size=1, max_size=6),
    count=st.integers(1, 24),
    width=st.floats(1e-4, 0.05),
)
def test_gaps_never_reach_the_ends_of_an_arc_nor_each_other(arcs: list[float], count: int, width: float) -> None:
    spans = [(3.0 * place, 3.0 * place + length) for place, length in enumerate(arcs)]

    shared = gaps_in(spans, count=count, width_rad=width)

    if shared is None:
        return
    assert sum(len(gaps) for gaps in shared) == count
    for (first, last), gaps in zip(spans, shared, strict=True):
        ends = [first, *(end for gap in gaps for end in (gap.from_rad, gap.to_rad)), last]
        assert np.diff(ends).min() > 0


def test_the_arcs_of_a_rim_lie_between_the_mouths_of_its_notches() -> None:
    # A mouth of 8 mm on a radius of 120 mm reaches asin(4/120) = 1.910213 degrees to either side.
    arcs = [
        tuple(math.degrees(end) for end in arc) for arc in arcs_of_rim_rad(movement_with({"disc/features": [NOTCH]}))
    ]

    assert arcs == [pytest.approx((1.910213, 358.089787), abs=1e-5)]
    assert arcs_of_rim_rad(PLAIN) == [(0.0, 2 * math.pi)]
