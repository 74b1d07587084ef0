import math
from typing import Any

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from shapely import affinity

from layout.check import Code, Level, check
from layout.check.blank import (
    keep_outs_are_clear,
    tracks_are_on_the_disc,
    webs_to_features_hold,
    webs_to_the_centre_hole_hold,
    webs_to_the_rim_hold,
)
from layout.check.webs import webs_between_openings_hold
from layout.documents import Cutter, Movement
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.thorough import tried


def test_two_openings_too_near_leave_a_web_that_is_measured() -> None:
    # Tracks at 50 and 52.4, both at rest angle 90 deg: openings 2.04 across leave about 0.36 between them.
    movement = movement_with({"tracks/1/radius_mm": 52.4})
    disc = disc_of(movement, [(1, 10.0), (2, 10.0)])

    [finding] = webs_between_openings_hold(disc)

    assert finding.code is Code.WEB_TOO_THIN
    assert finding.level is Level.ERROR
    # 52.4 - 50 - 2.04 = 0.36, a little less since the outer opening lies straight across a curved track
    assert finding.measured == pytest.approx(0.36, abs=0.002)
    assert finding.limit == 0.5
    assert finding.at.tracks == (1, 2)
    assert (
        finding.message
        == "Openings on tracks 1 and 2 leave 0.360 mm of metal between them; fibre-laser needs 0.500 mm."
    )
    assert "Leave one of the two notes out" in finding.remedy


def test_openings_that_just_keep_the_web_pass() -> None:
    movement = movement_with({"tracks/1/radius_mm": 52.545})

    assert webs_between_openings_hold(disc_of(movement, [(1, 10.0), (2, 10.0)])) == []


def test_a_relief_that_comes_near_its_neighbour_thins_the_web() -> None:
    # Openings on one track, 3.3 mm apart: a relief runs past the tangent line, 0.4 mm ahead, towards the next opening.
    apart_s = 3.3 / (2 * math.pi * 50 / 60)
    plucks = [(1, 10.0), (1, 10.0 + apart_s)]

    def webs_mm(relief_mm: float) -> list[float]:
        cutter = cutter_with({"fold/relief_mm": relief_mm, "min_web_mm": 3})
        return [finding.measured or 0.0 for finding in webs_between_openings_hold(disc_of(PLAIN, plucks, cutter))]

    [short], [long] = webs_mm(0.1), webs_mm(0.4)
    # straight across but for the 3.8 degrees between the two, over the half width of 1.02 mm
    assert short - long == pytest.approx(0.3, abs=0.02)


def test_openings_that_run_into_each_other_are_said_to() -> None:
    [finding] = webs_between_openings_hold(disc_of(PLAIN, [(1, 10.0), (1, 10.1)]))

    assert finding.measured == 0.0
    assert "run into each other" in finding.message


def test_a_crowded_disc_lists_the_thinnest_webs_and_counts_the_rest() -> None:
    disc = disc_of(PLAIN, [(1, 10.0)] * 25)  # 25 * 24 / 2 = 300 pairs

    findings = webs_between_openings_hold(disc)

    assert len(findings) == 201
    assert "300 pairs of openings are too near" in findings[-1].message
    assert (findings[-1].measured, findings[-1].limit) == (300, 200)


def outlines(disc: Disc) -> list[shapely.Geometry]:
    """Openings drawn the slow way: the pattern turned and moved one by one, round ends in 400 steps a quarter."""
    pattern = disc.pattern
    core = pattern.core_points_mm * [1, -disc.turning.direction]
    flat = shapely.Polygon(core) if len(core) > 2 else shapely.LineString(core)
    flat = flat.buffer(pattern.core_round_mm, quad_segs=400) if pattern.core_round_mm else flat
    # In the frame, u is the travel: against the angle for a clockwise disc. Turn u to -y or +y, v to +x. A press's
    # frame stands square where the tool strikes, and puts the edge, so far ahead or behind, on its track at its angle.
    strike_mm, direction = pattern.strike_u_mm, disc.turning.direction
    made = []
    for radius_mm, angle in zip(disc.radius_mm, disc.edge_angle_rad, strict=True):
        upright = affinity.rotate(affinity.translate(flat, -strike_mm, 0), -90 * direction, origin=(0, 0))
        out = affinity.translate(upright, math.sqrt(radius_mm**2 - strike_mm**2), 0)
        behind_deg = direction * math.degrees(math.asin(strike_mm / radius_mm))
        made.append(affinity.rotate(out, math.degrees(angle) - behind_deg, origin=(0, 0)))
    return made


@settings(max_examples=tried(40), deadline=None)
@given(
    movement=st.sampled_from(SHIPPED),
    cutter=st.sampled_from([LASER, PRESS]),
    plucks=st.lists(st.tuples(st.integers(1, 6), st.floats(0, 12)), min_size=2, max_size=12),
)
def test_the_webs_found_are_those_of_outlines_compared_pair_by_pair(
    movement: Movement, cutter: Cutter, plucks: list[tuple[int, float]]
) -> None:
    disc = disc_of(movement, plucks, cutter)

    found = {finding.at.projections: finding.measured for finding in webs_between_openings_hold(disc)}

    drawn = outlines(disc)
    for one in range(len(drawn)):
        for two in range(one + 1, len(drawn)):
            web = drawn[one].distance(drawn[two])
            if web < cutter.min_web_mm - 1e-5:
                assert max(found[(one, two)], 0.0) == pytest.approx(web, abs=1e-5)
            elif web > cutter.min_web_mm + 1e-5:
                assert (one, two) not in found


@settings(max_examples=tried(30), deadline=None)
@given(
    movement=st.sampled_from(SHIPPED),
    plucks=st.lists(st.tuples(st.integers(1, 6), st.floats(0, 12)), min_size=2, max_size=12),
    turn_rad=st.floats(0, 6),
)
def test_turning_the_disc_changes_no_web(movement: Movement, plucks: list[tuple[int, float]], turn_rad: float) -> None:
    disc = disc_of(movement, plucks)
    turned = Disc(
        movement=disc.movement,
        cutter=disc.cutter,
        turning=disc.turning,
        pattern=disc.pattern,
        track_index=disc.track_index,
        edge_angle_rad=np.mod(disc.edge_angle_rad + turn_rad, 2 * math.pi),
    )

    webs = sorted(finding.measured or 0.0 for finding in webs_between_openings_hold(disc))
    turned_webs = sorted(finding.measured or 0.0 for finding in webs_between_openings_hold(turned))

    assert turned_webs == pytest.approx(webs, abs=1e-9)


@settings(max_examples=tried(30), deadline=None)
@given(
    plucks=st.lists(st.tuples(st.integers(1, 6), st.floats(0, 12)), min_size=2, max_size=10),
    more=st.tuples(st.integers(1, 6), st.floats(0, 12)),
)
def test_one_more_projection_never_mends_a_web(plucks: list[tuple[int, float]], more: tuple[int, float]) -> None:
    before = {finding.at.projections for finding in webs_between_openings_hold(disc_of(SHIPPED[0], plucks))}

    after = {finding.at.projections for finding in webs_between_openings_hold(disc_of(SHIPPED[0], [*plucks, more]))}

    assert before <= after


@pytest.mark.parametrize(
    ("changes", "code", "measured"),
    [
        # track 3: the far corner at v = 1.02, u = 0.4 - 1.8745 - 0.42: 101.4 - hypot(101.02, 1.8945) = 0.3622
        ({"disc/outer_diameter_mm": 202.8}, Code.WEB_TO_RIM, 0.362),
        # track 1 at 50: its opening begins at 48.98, the hole of 97.5 ends at 48.75
        ({"disc/centre_hole_mm": 97.5}, Code.WEB_TO_CENTRE_HOLE, 0.23),
    ],
)
def test_an_opening_too_near_an_edge_of_the_blank_is_found(
    changes: dict[str, Any], code: Code, measured: float
) -> None:
    disc = disc_of(movement_with(changes), [(1, 10.0), (3, 10.0)])

    [finding] = webs_to_the_rim_hold(disc) + webs_to_the_centre_hole_hold(disc)

    assert finding.code is code
    assert finding.measured == pytest.approx(measured, abs=0.002)
    assert finding.limit == 0.5
    assert "fibre-laser needs 0.500 mm" in finding.message


def test_openings_clear_of_rim_and_hole_pass() -> None:
    disc = disc_of(PLAIN, [(1, 10.0), (3, 10.0)])

    assert webs_to_the_rim_hold(disc) + webs_to_the_centre_hole_hold(disc) + webs_to_features_hold(disc) == []


@pytest.mark.parametrize(
    ("feature", "measured"),
    [
        # the edge on track 1 lies at 90 deg at 10 s; a hole of 4 at 46.9 ends at 48.9, the opening begins at 48.98
        ({"shape": "hole", "radius_mm": 46.9, "width_mm": 4, "length_mm": 4}, 0.08),
        ({"shape": "slot", "radius_mm": 46.9, "width_mm": 4, "length_mm": 9}, 0.08),
        ({"shape": "slot", "radius_mm": 46.4, "width_mm": 5, "length_mm": 3}, 0.08),
    ],
)
def test_an_opening_too_near_a_feature_is_found(feature: dict[str, Any], measured: float) -> None:
    movement = movement_with({"disc/features": [{"purpose": "drive", "first_at_deg": 90, "count": 2, **feature}]})

    [finding] = webs_to_features_hold(disc_of(movement, [(1, 10.0)]))

    assert finding.code is Code.WEB_TO_FEATURE
    assert finding.measured == pytest.approx(measured, abs=0.02)
    assert f"to a drive {feature['shape']}" in finding.message


def test_an_opening_too_near_a_notch_of_the_rim_is_found() -> None:
    notch = {"purpose": "location", "shape": "notch", "radius_mm": 118, "first_at_deg": 90, "width_mm": 33}
    movement = movement_with({"disc/features": [{**notch, "length_mm": 4}]})

    [finding] = webs_to_features_hold(disc_of(movement, [(3, 10.0)]))

    # the notch reaches in to 118 - 16.5 = 101.5, the opening out to 101.02
    assert finding.measured == pytest.approx(0.47, abs=0.02)


def test_an_opening_in_a_ring_that_must_stay_whole_is_found() -> None:
    movement = movement_with({"keep_out": [{"from_radius_mm": 40, "to_radius_mm": 49.2, "why": "pressed by a roller"}]})

    [finding] = keep_outs_are_clear(disc_of(movement, [(1, 10.0), (3, 10.0)]))

    assert finding.code is Code.IN_KEEP_OUT
    # the opening begins at 50 - 1.02 = 48.98: 0.22 inside the ring
    assert finding.measured == pytest.approx(-0.22, abs=1e-6)
    assert "must stay whole (pressed by a roller): they cut into it." in finding.message


def test_an_opening_at_the_edge_of_a_ring_passes() -> None:
    movement = movement_with(
        {"keep_out": [{"from_radius_mm": 40, "to_radius_mm": 48.98, "why": "pressed by a roller"}]}
    )

    assert keep_outs_are_clear(disc_of(movement, [(1, 10.0)])) == []


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (
            {"disc/outer_diameter_mm": 201},
            "on track 3 reach to 100.600 mm from the centre; the disc's rim is at 100.500",
        ),
        (
            {"disc/centre_hole_mm": 99},
            "on track 1 reach to 49.400 mm from the centre; the disc's centre hole is at 49.500",
        ),
    ],
)
def test_a_track_off_the_disc_is_found(changes: dict[str, Any], message: str) -> None:
    [finding] = tracks_are_on_the_disc(disc_of(movement_with(changes), [(1, 10.0), (3, 10.0)]))

    assert finding.code is Code.TRACK_OFF_DISC
    assert message in finding.message


def test_a_track_off_the_disc_is_not_told_a_second_time_as_a_web() -> None:
    disc = disc_of(movement_with({"disc/outer_diameter_mm": 180}), [(1, 10.0), (3, 10.0)])

    assert webs_to_the_rim_hold(disc) + webs_to_the_centre_hole_hold(disc) == []


def test_tracks_on_the_disc_pass() -> None:
    assert tracks_are_on_the_disc(disc_of(PLAIN, [(1, 10.0), (3, 10.0)])) == []


@pytest.mark.parametrize("cutter", [LASER, PRESS, cutter_with({"fold": None})], ids=["laser", "press", "no fold"])
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_a_disc_without_projections_has_one_finding(movement: Movement, cutter: Cutter) -> None:
    [finding] = check(disc_of(movement, [], cutter))

    assert finding.code is Code.NOTHING_TO_PLAY
    assert "the drawing has no projections" in finding.message
