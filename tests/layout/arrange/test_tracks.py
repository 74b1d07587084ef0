import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from layout.arrange import arrange
from layout.documents import shipped_cutter, shipped_cutter_ids, shipped_movement
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import Spacing, TooNear, webs_mm
from layout.mechanics.turning import turning_of
from tests.layout.arrange.small_comb import (
    CLOSE_TRACKS,
    LASER,
    NEARLY_NO_REST,
    arranged,
    asking,
    comb_with,
    left_out,
    played,
    plucks_of,
    score_of,
    spacing_for,
)

BOTH_WAYS = pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])


@BOTH_WAYS
def test_a_track_repeats_after_its_least_time_and_not_before(turns: str) -> None:
    # C4, r 30: 1 s. G4, r 75: 0.4 s.
    notes = [(0.0, "C4", 90), (0.999, "C4"), (2.0, "C4"), (5.0, "G4", 90), (5.4, "G4"), (5.799, "G4", 1), (5.8, "G4")]

    arrangement = arranged(notes, movement=comb_with({"turns": turns}))

    assert played(arrangement) == [(0.0, 1), (2.0, 1), (5.0, 5), (5.4, 5), (5.8, 5)]
    assert left_out(arrangement) == {1: "wheel-still-stepping", 5: "wheel-still-stepping"}


@pytest.mark.parametrize("cutter_id", shipped_cutter_ids())
def test_the_innermost_track_of_fernhollow_repeats_after_934_milliseconds(cutter_id: str) -> None:
    # 3.2 mm / 36 mm = 0.08889 rad; · 66 s / 2π = 0.93371 s
    movement = shipped_movement("fernhollow-31")
    spacing = spacing_for(movement, cutter=shipped_cutter(cutter_id))

    near = arrange(score_of([(0.0, "C4", 90), (0.9336, "C4")]), movement, asking(), spacing)
    far = arrange(score_of([(0.0, "C4", 90), (0.9338, "C4")]), movement, asking(), spacing)

    assert left_out(near) == {1: "wheel-still-stepping"}
    assert left_out(far) == {}


def test_the_reason_is_the_rule_that_the_nearest_pluck_breaks() -> None:
    # The damper asks for 2 s at the fastest turn, the wheel for 1 s.
    movement = comb_with({"damper_recovery_s": 2})

    arrangement = arranged([(0.0, "C4", 90), (1.5, "C4", 1), (5.0, "C4", 90), (5.9, "C4", 1)], movement=movement)

    assert left_out(arrangement) == {1: "damper-not-recovered", 3: "wheel-still-stepping"}


def test_of_several_tracks_the_one_with_the_nearest_pluck_gives_the_reason() -> None:
    # The dampers ask for 0.55 s. At 0.59 s the pluck on track 3 (wheel 0.6 s) is 0.59 s away, that
    # on track 4 (wheel 0.5 s) 0.52 s: nearer, and the damper's fault.
    hands = [{"note": 0, "do": "place", "track": 3}, {"note": 1, "do": "place", "track": 4}]

    arrangement = arranged(
        [(0.0, "E4"), (0.07, "E4"), (0.59, "E4")], movement=comb_with({"damper_recovery_s": 0.55}), rulings=hands
    )

    assert left_out(arrangement) == {2: "damper-not-recovered"}


def test_too_little_web_on_one_track_is_the_reason_where_wheel_and_damper_would_do() -> None:
    # A web of 9 mm and a slot of 1.5 mm: a chord of 10.5 mm at r 30 is 0.352 rad, 3.36 s; the wheel needs 1 s.
    movement = comb_with()
    spacing = spacing_for(movement, min_web_mm=9.0)

    arrangement = arrange(score_of([(0.0, "C4", 90), (2.0, "C4")]), movement, asking(), spacing)

    assert left_out(arrangement) == {1: "web"}


def test_a_disc_goes_on_turning_so_the_last_pluck_is_a_neighbour_of_the_first() -> None:
    # Last at 59.3 s: 60 − 59.3 = 0.7 s before the first of the next turn; C4 needs 1 s, D4 0.75, G4 0.4.
    notes = [(0.0, "C4", 90), (59.3, "C4"), (0.0, "D4", 1), (59.3, "D4", 90), (0.0, "G4"), (59.3, "G4")]

    arrangement = arranged(notes, movement=comb_with(NEARLY_NO_REST))

    assert played(arrangement) == [(0.0, 1), (0.0, 5), (59.3, 2), (59.3, 5)]
    assert left_out(arrangement) == {1: "wheel-still-stepping", 3: "wheel-still-stepping"}


def test_a_rest_sector_wider_than_the_repeat_keeps_the_turns_apart() -> None:
    # 12° of rest are 2 s, twice what C4 needs.
    assert left_out(arranged([(0.0, "C4"), (58.0, "C4")])) == {}


def test_a_tooth_that_needs_more_than_a_turn_to_recover_cannot_sound_at_all() -> None:
    arrangement = arranged([(0.0, "C4")], movement=comb_with({"damper_recovery_s": 61}))

    assert left_out(arrangement) == {0: "damper-not-recovered"}


def test_repeats_go_to_the_track_of_that_pitch_that_has_rested_longest() -> None:
    # E4 is on tracks 3 and 4; each could play them all, 2 s apart. The faster one begins.
    arrangement = arranged([(0.0, "E4"), (2.0, "E4"), (4.0, "E4"), (6.0, "E4")])

    assert played(arrangement) == [(0.0, 4), (2.0, 3), (4.0, 4), (6.0, 3)]


def test_the_faster_track_plays_what_the_slower_one_cannot() -> None:
    # Every 0.29 s: each track is asked every 0.58 s; track 4 may after 0.5 s, track 3 after 0.6 s only.
    notes = [(0.0, "E4"), (0.29, "E4"), (0.58, "E4"), (0.89, "E4")]

    arrangement = arranged(notes)

    assert played(arrangement) == [(0.0, 4), (0.29, 3), (0.58, 4), (0.89, 3)]


def test_a_pluck_between_two_others_is_weighed_against_both() -> None:
    # C4 repeats after 1 s. The middle one (1000 · 2 · 1.246 · 0.95 = 2367) forbids both of its
    # neighbours (2 · 1900): together they are worth more.
    arrangement = arranged([(0.0, "C4"), (0.8, "C4", 127), (1.6, "C4")])

    assert played(arrangement) == [(0.0, 1), (1.6, 1)]
    assert arrangement.worth.proved


def test_pitches_off_the_comb_and_on_unusable_teeth_are_told_apart() -> None:
    arrangement = arranged([(0.0, "C#4"), (0.0, "A4"), (0.0, "G4"), (0.0, "C9")])

    assert left_out(arrangement) == {0: "no-such-pitch", 2: "unusable-tooth", 3: "no-such-pitch"}


def test_a_pitch_with_one_usable_tooth_left_sounds_on_that_track_alone() -> None:
    teeth = [
        {"tooth": 1, "track": 3, "pitch": "E4"},
        {"tooth": 2, "track": 4, "pitch": "E4", "usable": False},
        {"tooth": 3, "track": 3, "pitch": "E4", "usable": False},
    ]

    arrangement = arranged([(0.0, "E4", 90), (0.2, "E4")], movement=comb_with({"teeth": teeth}))

    assert played(arrangement) == [(0.0, 3)]
    assert left_out(arrangement) == {1: "wheel-still-stepping"}


def test_equal_pitches_at_one_onset_are_one_pluck_and_a_hair_later_they_are_two() -> None:
    arrangement = arranged([(1.0, "E4", 64, 1), (1.0, "E4", 64, 3), (1.0, "C4"), (1.001, "E4")])

    assert arrangement.notes == ((0,), (1, 2), (3,))
    assert arrangement.key.tolist() == [60, 64, 64]


def test_plucks_stand_in_order_of_time_and_then_of_track() -> None:
    arrangement = arranged([(0.0, "G4"), (0.0, "C4"), (2.0, "D4"), (1.0, "G4")])

    assert played(arrangement) == [(0.0, 1), (0.0, 5), (1.0, 5), (2.0, 2)]


# Two tracks that come too near to each other.


@BOTH_WAYS
def test_neighbours_too_near_for_their_web_do_not_sound_together(turns: str) -> None:
    movement = comb_with({**CLOSE_TRACKS, "turns": turns})
    spacing = spacing_for(movement, min_web_mm=1.0)
    # D4 is the higher voice of the two: 2 against 1.4.
    notes = [(5.0, "C4"), (5.0, "D4"), (9.0, "C4")]

    arrangement = arrange(score_of(notes), movement, asking(), spacing)

    assert played(arrangement) == [(0.0, 2), (4.0, 1)]
    assert left_out(arrangement) == {0: "web"}


@BOTH_WAYS
@pytest.mark.parametrize(("c4_s", "d4_s", "both"), [(2.0, 3.234, False), (3.234, 2.0, True), (2.0, 2.0, True)])
def test_the_web_is_judged_where_the_edges_lie_not_when_they_sound(
    turns: str, c4_s: float, d4_s: float, *, both: bool
) -> None:
    # C4 (r 30) is released 2 mm before the row, D4 (r 32) 2 mm after it: asin(2/30) + asin(2/32)
    # = 0.1293 rad = 1.235 s. Turning either way, D4 lies beside a C4 that sounds 1.235 s earlier.
    tracks: list[dict[str, Any]] = [dict(track) for track in CLOSE_TRACKS["tracks"]]  # type: ignore[arg-type]  # JSON
    tracks[0] |= {"engagement_arc_mm": math.pi, "release_arc_mm": -2}
    tracks[1] |= {"engagement_arc_mm": math.pi, "release_arc_mm": 2}
    movement = comb_with({**CLOSE_TRACKS, "tracks": tracks, "turns": turns})

    arrangement = arrange(
        score_of([(0.0, "G4"), (c4_s, "C4", 90), (d4_s, "D4")]),
        movement,
        asking(),
        spacing_for(movement, min_web_mm=1.0),
    )

    assert sorted(left_out(arrangement).values()) == ([] if both else ["web"])


def one_sided(movement_turns: str) -> tuple[Any, Spacing]:
    """D4's edge may not lie 0 to 0.3 rad, anticlockwise, from C4's; the radii leave no release angles apart."""
    star_wheel = {"engagement_arc_mm": math.pi, "release_arc_mm": 0, "thickness_mm": 0.4}
    movement = comb_with({"turns": movement_turns, "star_wheel": star_wheel, **NEARLY_NO_REST})
    plain = spacing_for(movement)
    between = (TooNear(inner_index=0, outer_index=1, from_rad=-0.001, to_rad=0.3),)
    zeros = frozen_floats([0.0] * 6)
    return movement, Spacing(wheel_rad=plain.wheel_rad, damper_rad=zeros, web_rad=zeros, between=between)


# 0.3 rad are 2.865 s. A clockwise disc plays rising angles: D4 after C4 is forbidden.
@pytest.mark.parametrize(
    ("turns", "c4_s", "d4_s", "both"),
    [
        ("clockwise", 10.0, 12.8, False),
        ("clockwise", 10.0, 12.9, True),
        ("clockwise", 12.8, 10.0, True),
        ("anticlockwise", 12.8, 10.0, False),
        ("anticlockwise", 12.9, 10.0, True),
        ("anticlockwise", 10.0, 12.8, True),
        # Over the end of the turn: 59 s to 1 s of the next turn are 2 s.
        ("clockwise", 59.0, 1.0, False),
        ("clockwise", 1.0, 59.0, True),
        ("anticlockwise", 1.0, 59.0, False),
        ("anticlockwise", 59.0, 1.0, True),
    ],
)
def test_the_forbidden_stretch_between_two_tracks_has_a_direction(
    turns: str, c4_s: float, d4_s: float, *, both: bool
) -> None:
    movement, spacing = one_sided(turns)

    # G4 at 0 s makes the music start there.
    arrangement = arrange(score_of([(0.0, "G4"), (c4_s, "C4", 90), (d4_s, "D4")]), movement, asking(), spacing)

    assert sorted(left_out(arrangement).values()) == ([] if both else ["web"])


@pytest.mark.parametrize(("d4_s", "reason"), [(10.3, "web"), (10.1, "wheel-still-stepping")])
def test_a_nearer_opening_on_the_next_track_gives_the_reason(d4_s: float, reason: str) -> None:
    # C4 at 10.5 s is 0.3 s after the C4 at 10.2 s, and 0.2 s or 0.4 s (0.0209, 0.0419 rad) after the
    # D4. Anticlockwise a D4 0.02 to 0.3 rad before a C4 is forbidden; 0.1 s from the first C4 is not.
    movement, spacing = one_sided("anticlockwise")
    notes = [(0.0, "G4"), (10.2, "C4", 127), (10.5, "C4", 1), (d4_s, "D4", 127)]
    hands = [{"note": note, "do": "must-sound"} for note in (1, 2)]
    apart = replace(spacing, between=(replace(spacing.between[0], from_rad=0.02, to_rad=0.3),))

    arrangement = arrange(score_of(notes), movement, asking(rulings=hands), apart)

    assert left_out(arrangement) == {3: reason}


@BOTH_WAYS
def test_openings_of_a_full_disc_keep_their_web_when_measured_on_the_metal(turns: str) -> None:
    movement = comb_with({**CLOSE_TRACKS, "turns": turns, **NEARLY_NO_REST})
    pitches = ["C4", "D4", "E4", "G4"]
    notes = [(place * 0.11 + shift, pitch) for place in range(520) for shift, pitch in enumerate(pitches[place % 4 :])]

    arrangement = arrange(
        score_of([(onset, pitch) for onset, pitch in notes if onset < 59]),
        movement,
        asking(),
        spacing_for(movement, min_web_mm=1.0),
    )

    turning, plucks = turning_of(movement), plucks_of(arrangement)
    radius = turning.radius_mm[arrangement.track_index]
    angle = turning.edge_angle_rad(arrangement.planned_s, arrangement.track_index)
    places = np.column_stack([radius, angle])
    first, second = zip(*[(one, two) for one in range(len(plucks)) for two in range(one)], strict=True)
    webs = webs_mm(turning, pattern_of(movement, LASER), places[list(first)], places[list(second)])
    assert len(plucks) > 100
    assert webs.min() >= 1.0
    assert "web" in left_out(arrangement).values()
