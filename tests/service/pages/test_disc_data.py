"""What the page of a disc brings for its scripts: enough to draw it, no finer than a screen, true to layout.json."""

import math
from dataclasses import replace

import numpy as np
import pytest

from layout.documents.pitch import key_of
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from service.pages.disc_data import DECIMALS, disc_data, steady_turning
from tests.layout.examples import movement_with
from tests.service.pages.discs_shown import MOVEMENTS, shown

CUTTERS = ("fibre-laser", "turn-press")


@pytest.mark.parametrize("cutter", CUTTERS)
@pytest.mark.parametrize("movement", MOVEMENTS)
def test_where_an_edge_lies_follows_from_its_moment_as_the_scripts_reckon_it(movement: str, cutter: str) -> None:
    """α = s·(before + 360·t/T) + release: what js/disc/placing.js does for notes that have no projection."""
    data = disc_data(shown(movement, cutter))
    facts = data["movement"]

    off_deg = [
        facts["direction"] * (facts["before_music_deg"] + 360 * one["sounds_s"] / facts["revolution_s"])
        + facts["tracks"][one["track"] - 1]["release_deg"]
        - one["angle_deg"]
        for one in data["layout"]["projections"]
    ]

    # Rounded: half of 0.001°, half of 0.0001 s of a turn of 40 s and more (0.00045°), half of 0.0001°.
    assert max(abs((off + 180) % 360 - 180) for off in off_deg) < 0.0011


@pytest.mark.parametrize("movement", MOVEMENTS)
def test_every_number_stays_within_half_of_its_last_digit_of_layout_json(movement: str) -> None:
    disc = shown(movement)
    layout = disc_data(disc)["layout"]

    for part in ("projections", "notes", "bars"):
        for told, whole in zip(layout[part], disc.layout[part], strict=True):
            for name, value in told.items():
                assert name not in DECIMALS or value == round(value, DECIMALS[name]), (part, name)
                most = 0.5000001 * 10 ** -DECIMALS[name] if name in DECIMALS else 0
                assert value == whole[name] or abs(value - whole[name]) <= most, (part, name)


def test_a_whole_layout_json_can_stand_in_place_of_the_layout_the_page_brings() -> None:
    disc = shown("tarnlight-17")
    layout = disc_data(disc)["layout"]

    assert set(layout) <= set(disc.layout)
    assert layout["findings"], "the demo tune is too long for this movement"
    for part in ("projections", "notes", "bars", "left_out", "findings"):
        assert all(set(told) <= set(whole) for told, whole in zip(layout[part], disc.layout[part], strict=True))


@pytest.mark.parametrize("cutter", CUTTERS)
def test_the_pattern_is_the_opening_that_this_cutter_makes(cutter: str) -> None:
    disc = shown("mossbrook-67", cutter)
    pattern = pattern_of(disc.movement, disc.cutter)

    told = disc_data(disc)["movement"]["pattern"]

    np.testing.assert_allclose(told["points_mm"], pattern.opening.points_mm, atol=0.00005)
    assert len(told["bulges"]) == len(told["points_mm"])
    assert told["square_at_mm"] == pattern.strike_u_mm
    assert (told["fold_mm"] is None) == (cutter == "turn-press")


def test_a_track_tells_its_teeth_that_can_be_used_and_the_key_of_its_pitch() -> None:
    disc = shown("mossbrook-67")  # two combs in the bass: track 1 has teeth 1 and 68, six cents apart
    tracks = disc_data(disc)["movement"]["tracks"]

    assert tracks[0]["teeth"] == [
        {"tooth": 1, "cents": 0.0, "damped": True},
        {"tooth": 68, "cents": 6.0, "damped": True},
    ]
    assert [track["key"] for track in tracks] == [key_of(track["pitch"]) for track in tracks]


def test_a_track_without_teeth_has_no_pitch_and_an_unusable_tooth_is_not_told() -> None:
    bare = movement_with({"teeth/2/track": 1, "teeth/2/pitch": "C5", "teeth/1/usable": False})

    tracks = disc_data(replace(shown(), movement=bare))["movement"]["tracks"]

    assert (tracks[2]["pitch"], tracks[2]["key"], tracks[2]["teeth"]) == (None, None, [])
    assert (tracks[1]["pitch"], tracks[1]["teeth"]) == ("E5", [])


def test_the_radius_of_release_is_the_one_discs_are_placed_by() -> None:
    disc = shown("fernhollow-31")
    turning = turning_of(disc.movement)

    tracks = disc_data(disc)["movement"]["tracks"]

    for track, release_rad in zip(tracks, turning.release_rad.tolist(), strict=True):
        assert track["release_deg"] == pytest.approx(math.degrees(release_rad), abs=0.00005)


def test_a_disc_stands_as_it_plays_once_it_has_started() -> None:
    """Without a drive it is at its speed at once; else it comes late by t0·ln 2 (layout.mechanics.starting)."""
    plain, driven = shown("fernhollow-31"), shown("mossbrook-67")

    for disc in (plain, driven):
        start = disc.report["drive"]["start"]
        late_s = 0.0 if start is None else start["time_constant_s"] * math.log(2)
        table = steady_turning(disc.movement)
        assert table[0] == (0.0, 0.0)
        assert table[-1] == pytest.approx((disc.movement.revolution_s + late_s, 360.0))
        assert disc_data(disc)["turning"][-1] == [round(table[-1][0], 4), 360.0]
    assert driven.report["drive"]["start"] is not None


def test_a_table_of_its_own_wins_over_that_of_a_steady_turn() -> None:
    data = disc_data(replace(shown(), turning_table=((0.0, 0.0), (99.0, 360.0))))

    assert data["turning"] == [[0.0, 0.0], [99.0, 360.0]]
