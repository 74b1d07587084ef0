"""Webs to the blank's features, of which only near ones are looked at, against a plain look at all of them."""

import math
from typing import Any

import numpy as np
import pytest
import shapely

from layout.check import Code, Finding, Level
from layout.check.blank import webs_to_features_hold
from layout.mechanics.blank import feature_core_mm
from layout.mechanics.spacing import core_geometries
from layout.place.disc import Disc
from tests.layout.examples import disc_of, movement_with

MOST = 200  # findings of one check


def disc_with(row: dict[str, Any], count: int, seed: int) -> Disc:
    """Openings anywhere on a disc with a row of holes at the radius of its first track."""
    dice = np.random.default_rng(seed)
    hole = {"shape": "hole", "purpose": "drive", "length_mm": 3, "width_mm": 3, "first_at_deg": 31.0, "count": 20}
    movement = movement_with({"disc/features": [{"radius_mm": 50.0, **hole, **row}]})
    seconds = dice.uniform(3, 56, count).tolist()
    tracks = dice.integers(1, len(movement.tracks) + 1, count).tolist()
    return disc_of(movement, list(zip(tracks, seconds, strict=True)))


def webs_mm(disc: Disc) -> list[list[float]]:
    """The webs from each feature of the first row to every opening, one by one."""
    cores = core_geometries(disc.placed_mm(disc.pattern.core_points_mm))
    [row] = disc.movement.disc.features
    grown = [feature_core_mm(row, math.radians(angle_deg)) for angle_deg in row.angles_deg]
    return [
        [float(shapely.distance(core, hole)) - round_mm - disc.pattern.core_round_mm for core in cores]
        for hole, round_mm in grown
    ]


def told(findings: list[Finding]) -> list[tuple[int, float | None]]:
    """The projection and the web of each finding."""
    return [(finding.at.projections[0], finding.measured) for finding in findings]


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("shape", [{}, {"shape": "slot", "length_mm": 6}, {"shape": "slot", "width_mm": 6}])
def test_every_thin_web_to_a_hole_is_told_hole_by_hole(shape: dict[str, Any], seed: int) -> None:
    disc = disc_with(shape, 120, seed)
    plain = [
        (index, web_mm)
        for of_hole in webs_mm(disc)
        for index, web_mm in enumerate(of_hole)
        if web_mm < disc.cutter.min_web_mm
    ]

    findings = webs_to_features_hold(disc)

    assert told(findings) == plain[:MOST]
    assert len(plain) > 5
    assert {finding.level for finding in findings} == {Level.ERROR}


@pytest.mark.parametrize("seed", range(8))
def test_of_webs_that_hold_the_least_sure_one_is_told_if_its_numbers_may_be_off_by_more(seed: int) -> None:
    # 50 − 7 = 43 mm: holes of 3 mm leave some millimetres to the first track, whose openings are 2.04 mm across.
    disc = disc_with({"radius_mm": {"value": 43.0, "plus_minus": 9.0}}, 30, seed)
    nearest_mm = np.min(webs_mm(disc), axis=0)

    [finding] = webs_to_features_hold(disc)

    assert finding.code is Code.MARGIN_UNSURE
    assert told([finding]) == [(int(np.argmin(nearest_mm)), float(nearest_mm.min()))]
    assert nearest_mm.min() > disc.cutter.min_web_mm


def test_webs_that_hold_by_more_than_their_numbers_may_be_off_are_not_told() -> None:
    assert webs_to_features_hold(disc_with({"radius_mm": {"value": 43.0, "plus_minus": 0.5}}, 30, 1)) == []


def test_a_track_that_may_be_off_makes_a_wider_web_the_less_sure_one() -> None:
    # Track 1 at 50 mm leaves 43 + 1.5 … 48.98 to a hole; track 2 leaves more, but may be off by more than that.
    movement = movement_with(
        {
            "tracks/1/radius_mm": {"value": 56.0, "plus_minus": 11.0},
            "disc/features": [
                {"shape": "hole", "purpose": "drive", "length_mm": 3, "width_mm": 3, "radius_mm": 43.0, "count": 80}
            ],
        }
    )

    [finding] = webs_to_features_hold(disc_of(movement, [(1, 10.0), (2, 30.0)]))

    assert finding.at.tracks == (2,)
    # 56 − 1.02 − 43 − 1.5 = 10.48, to the hole that happens to be nearest
    assert finding.measured == pytest.approx(10.48, abs=0.05)


def test_a_track_that_may_be_off_far_from_all_holes_makes_no_other_web_unsure() -> None:
    movement = movement_with(
        {
            "tracks/1/radius_mm": {"value": 75.0, "plus_minus": 11.0},
            "disc/features": [
                {"shape": "hole", "purpose": "drive", "length_mm": 3, "width_mm": 3, "radius_mm": 43.0, "count": 80}
            ],
        }
    )

    # 4.48 mm to track 1, which is sure; 29.5 to track 2, which may be 11 less
    assert webs_to_features_hold(disc_of(movement, [(1, 10.0), (2, 30.0)])) == []


def test_a_disc_without_openings_has_no_web_to_a_hole() -> None:
    assert webs_to_features_hold(disc_with({}, 0, 1)) == []
