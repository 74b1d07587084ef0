"""Leads are pierced in the scrap, run straight to where a cut begins, and touch nothing that is to stay."""

import math
from itertools import pairwise

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import check
from layout.check.finding import Code, Finding
from layout.cut import plan_cuts
from layout.cut.plan import Circles, CutPlan, Entity, Outlines
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import FloatArray
from layout.mechanics.lead import pierced_inside_mm
from layout.place.disc import Disc
from layout.read_back import read_back
from layout.write import write_dxf
from tests.layout.cut.test_blank import HOLE, NOTCH, SLOT, traced
from tests.layout.examples import LASER, PLAIN, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import random_disc
from tests.thorough import tried

HALF_KERF_MM = 0.06  # of the shipped laser
LED_IN = cutter_with({"lead_in": {"length_mm": 1.0}})
CUTTERS = {
    "finished edges": LED_IN,
    "compensated": cutter_with({"lead_in": {"length_mm": 1.0}, "kerf_compensated": True}),
    "star side": cutter_with({"lead_in": {"length_mm": 1.0}, "drawn_from": "star-side"}),
    "round reliefs": cutter_with(
        {"lead_in": {"length_mm": 0.7}, "fold/relief_ends": "round", "fold/relief_width_mm": 0.6}
    ),
}
FEATURED = movement_with({"disc/features": [{**HOLE, "count": 3}, SLOT, {**NOTCH, "count": 2}]})
ANTICLOCKWISE = movement_with({"turns": "anticlockwise"})


def plan_of(disc: Disc) -> CutPlan:
    return plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)


def cut_of(disc: Disc) -> list[Entity]:
    return [entity for entity in plan_of(disc).disc.entities if entity.layer != "MARKS"]


def led_in(disc: Disc) -> list[tuple[shapely.LineString, Entity]]:
    """Every lead with the one contour after it, as it is led in to."""
    cut, found = cut_of(disc), []
    for lead, contour in pairwise(cut):
        if lead.layer == "LEADS":
            assert isinstance(lead, Outlines)
            assert lead.points_mm.shape == (1, 2, 2)
            assert not lead.closed
            found.append((shapely.LineString(lead.points_mm[0]), contour))
    return found


def polygon_of(contour: Entity) -> shapely.Polygon:
    if isinstance(contour, Circles):
        return shapely.Point(contour.centres_mm[0]).buffer(float(contour.radius_mm[0]), quad_segs=256)
    assert isinstance(contour, Outlines)
    assert contour.closed
    return traced(contour)


def begun_mm(contour: Entity) -> FloatArray:
    if isinstance(contour, Circles):  # begun at its +X side
        return np.asarray(contour.centres_mm[0] + np.array([contour.radius_mm[0], 0.0]))
    assert isinstance(contour, Outlines)
    return np.asarray(contour.points_mm[0, 0])


@pytest.mark.parametrize("movement", [FEATURED, ANTICLOCKWISE, *SHIPPED], ids=lambda one: f"{one.id} {one.turns}")
@pytest.mark.parametrize("cutter", CUTTERS.values(), ids=CUTTERS)
def test_leads_run_through_scrap_to_where_the_cut_begins(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, count=12)
    assert cutter.lead_in is not None
    clear_mm = 0.0 if cutter.kerf_compensated else HALF_KERF_MM

    found = led_in(disc)

    holes = sum(feature.count for feature in movement.disc.features if feature.shape != "notch")
    assert len(found) == 12 + holes + 1 + 1  # projections, feature holes, centre hole, rim
    for lead, contour in found:
        pierced, reached = (np.array(end) for end in lead.coords)
        scrap = polygon_of(contour)
        assert lead.length == pytest.approx(cutter.lead_in.length_mm)
        assert reached == pytest.approx(begun_mm(contour), abs=1e-9)
        assert scrap.contains(shapely.Point(pierced)) == (contour.layer != "RIM")
        assert scrap.exterior.distance(shapely.Point(pierced)) >= clear_mm - 1e-4
        inside = lead.intersection(scrap).length
        assert inside == pytest.approx(0.0 if contour.layer == "RIM" else lead.length, abs=2e-3)


def test_a_lead_never_comes_near_the_tab() -> None:
    disc = disc_of(PLAIN, [(3, 10.0)], LED_IN)

    [(lead, _)] = [pair for pair in led_in(disc) if pair[1].layer == "SLITS"]

    # The tab of test_projections, at (0, 100) with u to +x: from u = −1.474545 to 0.4 and ±0.6 across.
    tab = shapely.box(-1.474545, 99.4, 0.7, 100.6)
    assert tab.distance(lead) >= HALF_KERF_MM


def test_a_channel_is_led_in_along_its_far_slit() -> None:
    [(lead, _)] = [pair for pair in led_in(disc_of(PLAIN, [(3, 10.0)], LED_IN)) if pair[1].layer == "SLITS"]

    # The far slit is 0.42 wide, from u = −1.894545 to −1.474545: pierced near its middle, u = −1.68, 1 mm on.
    pierced = np.array(lead.coords[0])
    assert pierced[0] == pytest.approx(-1.684545, abs=0.02)
    assert abs(pierced[1] - 100) == pytest.approx(1.02 - math.sqrt(1 - 0.21**2), abs=0.02)


def test_a_rim_with_notches_is_begun_in_the_middle_of_its_longest_arc() -> None:
    # Notches at 0 and 180 degrees leave two equal arcs, each in two pieces; their middles lie 45 degrees off an axis.
    notched = movement_with({"disc/features": [{**NOTCH, "count": 2}]})

    [(lead, rim)] = [pair for pair in led_in(disc_of(notched, [], LED_IN)) if pair[1].layer == "RIM"]

    (from_x, from_y), (to_x, to_y) = lead.coords
    assert math.hypot(to_x, to_y) == pytest.approx(120.0)
    assert math.hypot(from_x, from_y) == pytest.approx(121.0)
    assert math.degrees(math.atan2(to_y, to_x)) % 90 == pytest.approx(45, abs=1.0)
    plain = next(entity for entity in cut_of(disc_of(notched, [])) if entity.layer == "RIM")
    assert shapely.hausdorff_distance(polygon_of(rim), polygon_of(plain)) < 1e-2  # traced in other steps
    assert polygon_of(rim).area == pytest.approx(polygon_of(plain).area, rel=1e-5)


def test_without_a_lead_in_nothing_stands_on_leads() -> None:
    assert led_in(disc_of(PLAIN, [(3, 10.0)])) == []


def test_leads_change_nothing_but_the_order_within_what_is_cut() -> None:
    disc, plain = (random_disc(SHIPPED[0], cutter, count=12) for cutter in (LED_IN, LASER))

    [slits] = [entity for entity in cut_of(plain) if entity.layer == "SLITS"]
    led = [contour for _, contour in led_in(disc) if contour.layer == "SLITS"]

    assert isinstance(slits, Outlines)
    assert [contour.points_mm[0].tolist() for contour in led] == slits.points_mm.tolist()  # type: ignore[union-attr]


def test_an_open_slit_has_no_lead() -> None:
    changes = {"fold/slit": "centre-line", "fold/slit_width_mm": None, "lead_in": {"length_mm": 1.0}}

    layers = [contour.layer for _, contour in led_in(disc_of(PLAIN, [(3, 10.0)], cutter_with(changes)))]

    assert layers == ["HOLES", "RIM"]


@pytest.mark.parametrize("cutter", CUTTERS.values(), ids=CUTTERS)
def test_a_drawing_with_leads_reads_back(cutter: Cutter) -> None:
    disc = random_disc(FEATURED, cutter, count=30)

    reading = read_back(write_dxf(plan_of(disc).disc, cutter), FEATURED, cutter)

    assert reading.findings == ()
    order = np.lexsort((disc.edge_angle_rad, disc.track_index))
    assert reading.disc.edge_angle_rad == pytest.approx(disc.edge_angle_rad[order], abs=1e-6)


def test_a_lead_is_cut_but_not_pierced_twice() -> None:
    with_leads, without = (plan_of(disc_of(PLAIN, [(3, 10.0)], cutter)).path for cutter in (LED_IN, LASER))

    assert with_leads is not None
    assert without is not None
    assert with_leads.pierce_count == without.pierce_count == 3
    assert with_leads.cut_length_mm - without.cut_length_mm == pytest.approx(3 * 1.0)  # slit, centre hole, rim


def lead_findings(movement: Movement, cutter: Cutter) -> list[Finding]:
    return [found for found in check(disc_of(movement, [(1, 1.0)], cutter)) if found.code is Code.LEAD_HAS_NO_ROOM]


def test_leads_that_have_room_are_no_matter() -> None:
    assert [finding for cutter in CUTTERS.values() for finding in lead_findings(FEATURED, cutter)] == []


def test_a_cut_without_room_for_a_lead_goes_without_and_is_told() -> None:
    long = cutter_with({"lead_in": {"length_mm": 3.5}})

    [finding] = lead_findings(PLAIN, long)

    assert finding.level == "warning"
    assert finding.limit == 3.5
    assert finding.message == (
        "The cuts of the projections have no room inside for a lead of 3.500 mm with the kerf of 0.120 mm of "
        "fibre-laser, and no lead is drawn: the beam pierces on the line."
    )
    assert [contour.layer for _, contour in led_in(disc_of(PLAIN, [(1, 1.0)], long))] == ["HOLES", "RIM"]


def test_each_hole_without_room_is_named_once() -> None:
    long = cutter_with({"lead_in": {"length_mm": 9.95}})  # the centre hole is 10 mm wide, less half a kerf: 9.94

    messages = " ".join(finding.message for finding in lead_findings(FEATURED, long))

    for what in ("The cuts of the projections have", "The centre hole has", "The drive hole has", "The drive slot has"):
        assert messages.count(what) == 1
    barely = cutter_with({"lead_in": {"length_mm": 9.93}})
    assert "centre hole" not in " ".join(finding.message for finding in lead_findings(FEATURED, barely))


@settings(max_examples=tried(60), deadline=None)
@given(width=st.floats(0.5, 4), height=st.floats(0.5, 4), length=st.floats(0.05, 6), clear=st.floats(0, 0.5))
def test_into_a_rectangle_a_lead_is_found_where_there_is_room(
    width: float, height: float, length: float, clear: float
) -> None:
    corners = np.array([(0, 0), (width, 0), (width, height), (0, height)])

    found = pierced_inside_mm(corners, np.zeros(4), length_mm=length, clear_mm=clear)

    if found is None:
        # Along the diagonal, the clearest way out of a corner of a square, two degrees off at most.
        inside = min(width, height) - clear
        assert length / math.sqrt(2) < clear * 1.1 or length / math.sqrt(2) > inside * 0.95 or clear > inside
        return
    assert math.dist(found, (0, 0)) == pytest.approx(length)
    x, y = found
    assert min(x, y, width - x, height - y) >= clear - 1e-9
