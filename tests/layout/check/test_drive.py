"""Checks of start, load, winding and turn: each trips with its numbers, just holds, and needs its numbers stated."""

import copy
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from layout import walk
from layout.check import Code, Finding, Level, check
from layout.check.drive import (
    drive_carries_the_teeth,
    music_waits_for_the_speed,
    tempo_holds,
    train_gives_the_turn,
    winding_lasts,
)
from layout.documents import Cutter, Movement, Settings, shipped_movement
from layout.mechanics.arrays import frozen_floats
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, disc_of, movement_with

CHECKS = [
    music_waits_for_the_speed,
    drive_carries_the_teeth,
    winding_lasts,
    tempo_holds,
    train_gives_the_turn,
]
# 2 N/mm · 0.5 mm is 1 N at the release: 50, 60 and 100 N mm on the three tracks.
LIFTED = {
    f"teeth/{index}/{name}": value
    for index in range(3)
    for name, value in {"stiffness_n_per_mm": 2.0, "lift_mm": 0.5}.items()
}
CHORD = [(1, 10.0), (2, 10.0), (3, 20.0)]  # 110 N mm at 10 s
# A turn of 60 s: t0 = 0.3 · 0.10472 / 0.025 = 1.25664 s, and 99 % after 1.95852 · 6°/s · 1.25664 s = 14.767°.
STARTING = {
    "drive/surplus_torque_nmm": 25,
    "drive/disc_inertia_kg_m2": 0.1,
    "drive/train": [{"inertia_kg_m2": 2e-7, "ratio": 1000}],
}
NEEDS_DEG = 14.767
# E·b·h³/12 = 240 000 · 10 · 0.125 / 12 = 25 000 N mm²; over π·1000 mm 7.95775 N mm a radian, 50 a turn. Full at
# 10 turns: 500 N mm at the barrel; the disc turns 2 times a barrel turn: at 80 % 200 N mm, and 10 less every turn.
WOUND = {
    "drive/winding": {
        "spring": {
            "elastic_modulus_n_per_mm2": 240_000,
            "width_mm": 10,
            "thickness_mm": 0.5,
            "length_mm": 1000 * 3.14159265358979,
            "wound_turns": 10,
            "usable_turns": 4,
        },
        "barrel_to_disc": [2],
        "efficiency": 0.8,
        "friction_nmm": 20,
    }
}
SPRING = "drive/winding/spring"


def driven(changes: dict[str, Any]) -> Movement:
    """The plain movement with some fields changed, in that order: a part first, then fields of it."""
    return movement_with(copy.deepcopy(changes))


def found(one_check: Any, changes: dict[str, Any], plucks: list[tuple[int, float]] = CHORD) -> list[Finding]:
    """What a check finds on the plain movement with some fields changed."""
    findings: list[Finding] = one_check(disc_of(driven(changes), plucks))
    return findings


def test_music_that_begins_before_the_speed_is_reached_is_an_error() -> None:
    [finding] = found(music_waits_for_the_speed, STARTING | {"before_music_deg": 14})

    assert (finding.code, finding.level, finding.unit) == (Code.START_TOO_SHORT, Level.ERROR, "deg")
    assert finding.measured == pytest.approx(NEEDS_DEG, abs=1e-3)
    assert finding.limit == 14
    assert finding.message == (
        "From rest the disc has 99% of its speed after 14.767° (3.326 s); music may begin after 14.000°: "
        "the first notes come late and slow."
    )
    assert "before_music_deg" in finding.remedy


def test_music_that_begins_just_when_the_speed_is_reached_is_in_order() -> None:
    assert found(music_waits_for_the_speed, STARTING | {"before_music_deg": NEEDS_DEG + 0.001}) == []
    assert len(found(music_waits_for_the_speed, STARTING | {"before_music_deg": NEEDS_DEG - 0.001})) == 1


def test_a_faster_turn_alone_does_not_make_the_start_too_short() -> None:
    # At half the turn the angle is four times as great, 59°.
    assert found(music_waits_for_the_speed, STARTING | {"fastest_revolution_s": 30}) == []


@pytest.mark.parametrize(
    ("off", "unsure_deg"),
    [
        ({"drive/surplus_torque_nmm": {"value": 25, "plus_minus": 2.5}}, 0.1 * NEEDS_DEG),
        ({"drive/disc_inertia_kg_m2": {"value": 0.1, "plus_minus": 0.03}}, 0.03 / 0.3 * NEEDS_DEG),
        ({"drive/train": [{"inertia_kg_m2": {"value": 2e-7, "plus_minus": 3e-8}, "ratio": 1000}]}, 0.1 * NEEDS_DEG),
        ({"drive/train": [{"inertia_kg_m2": 2e-7, "ratio": {"value": 1000, "plus_minus": 75}}]}, 0.1 * NEEDS_DEG),
        ({"revolution_s": {"value": 60, "plus_minus": 3}}, 0.1 * NEEDS_DEG),
        ({"before_music_deg": {"value": 16, "plus_minus": 1.5}}, 1.5),
    ],
)
def test_a_start_that_holds_by_less_than_its_numbers_are_worth_is_told(off: dict[str, Any], unsure_deg: float) -> None:
    [finding] = found(music_waits_for_the_speed, STARTING | {"before_music_deg": 16} | off)

    # 16 − 14.767 = 1.233
    assert (finding.code, finding.level) == (Code.MARGIN_UNSURE, Level.WARNING)
    assert f"It holds by 1.233 deg, less than the ±{unsure_deg:.3f} deg" in finding.message


def test_a_start_whose_train_is_not_stated_is_judged_by_the_disc_alone_and_says_at_least() -> None:
    # The disc's 0.1 of 0.3 kg m²: 4.922°.
    alone = STARTING | {"drive/train": None}

    [finding] = found(music_waits_for_the_speed, alone | {"before_music_deg": 4})

    assert finding.measured == pytest.approx(NEEDS_DEG / 3, abs=1e-3)
    assert "after at least 4.922°" in finding.message
    assert found(music_waits_for_the_speed, alone | {"before_music_deg": 5}) == []


def test_a_chord_beyond_the_torque_limit_is_an_error_with_its_moment_and_tracks() -> None:
    [finding] = found(drive_carries_the_teeth, LIFTED | {"drive/torque_limit_nmm": 109.9})

    assert (finding.code, finding.level, finding.unit) == (Code.DRIVE_OVERLOADED, Level.ERROR, "N mm")
    assert (finding.measured, finding.limit) == (pytest.approx(110), 109.9)
    assert (finding.at.tracks, finding.at.projections) == ((1, 2), (0, 1))
    assert finding.at.sounds_s == pytest.approx(10)
    assert finding.message == (
        "At 10.000 s the teeth of 2 plucks load the disc with 110.000 N mm; the drive carries 109.900 N mm: "
        "the disc may slow down or stop."
    )


def test_a_chord_of_just_the_torque_limit_is_carried() -> None:
    assert found(drive_carries_the_teeth, LIFTED | {"drive/torque_limit_nmm": 110}) == []


def test_what_reading_a_drawing_back_may_shift_does_not_overload_the_drive() -> None:
    # Two releases 20 ms apart, and a limit that is the load to the last figure; then each edge a nanometre further.
    disc = disc_of(movement_with(LIFTED | {"drive/torque_limit_nmm": 50 + 58.1121}), [(1, 10.0), (3, 10.02)])
    moved = replace(disc, edge_angle_rad=frozen_floats(disc.edge_angle_rad + np.array([1e-6 / 50, -1e-6 / 100])))

    assert drive_carries_the_teeth(disc) == []
    assert drive_carries_the_teeth(moved) == []


@pytest.mark.parametrize(
    ("off", "unsure_nmm"),
    [
        ({"drive/torque_limit_nmm": {"value": 115, "plus_minus": 6}}, 6),
        ({"teeth/1/stiffness_n_per_mm": {"value": 2, "plus_minus": 0.2}}, 0.2 * 0.5 * 60),
        ({"teeth/1/lift_mm": {"value": 0.5, "plus_minus": 0.1}}, 0.1 * 2 * 60),
    ],
)
def test_a_load_that_holds_by_less_than_its_numbers_are_worth_is_told(off: dict[str, Any], unsure_nmm: float) -> None:
    [finding] = found(drive_carries_the_teeth, LIFTED | {"drive/torque_limit_nmm": 115} | off)

    assert finding.code is Code.MARGIN_UNSURE
    assert f"less than the ±{unsure_nmm:.3f} N mm" in finding.message


def test_numbers_of_teeth_that_are_not_lifted_do_not_make_a_load_unsure() -> None:
    off = {"teeth/2/stiffness_n_per_mm": {"value": 2, "plus_minus": 1}}

    assert found(drive_carries_the_teeth, LIFTED | {"drive/torque_limit_nmm": 111} | off) == []


def test_a_winding_of_less_than_a_turn_is_an_error() -> None:
    [finding] = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": 0.45})

    assert (finding.code, finding.level, finding.unit) == (Code.WINDING_TOO_SHORT, Level.ERROR, "turns")
    assert (finding.measured, finding.limit) == (pytest.approx(0.9), 1)
    assert finding.message == ("A full winding plays 0.90 turns of this disc: the disc stops before its tune is over.")
    assert "wound spring can hurt" in finding.remedy


def test_a_chord_that_takes_the_torque_shortens_the_winding() -> None:
    # 200 N mm full, 20 friction: a chord of 100 · 1.75 = 175 on track 3 leaves (200 − 195)/10 = 0.5 turns.
    [finding] = found(winding_lasts, LIFTED | WOUND | {"teeth/2/stiffness_n_per_mm": 3.5})

    assert finding.measured == pytest.approx(0.5)
    assert (
        "0.50 turns of this disc, as the spring brings 200.0 N mm to it when full, and friction and "
        "its heaviest chord take 195.0 N mm:" in finding.message
    )


def test_a_winding_of_less_than_two_turns_is_advised_against() -> None:
    [finding] = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": 0.75})

    assert (finding.code, finding.level) == (Code.WINDING_TOO_SHORT, Level.ADVICE)
    assert (finding.measured, finding.limit) == (pytest.approx(1.5), 2)
    assert "not enough for a turn that clears the star wheels and one that is heard." in finding.message


@pytest.mark.parametrize(("usable", "levels"), [(0.5, [Level.ADVICE]), (1, []), (4, [])])
def test_a_winding_of_just_its_turns_passes(usable: float, levels: list[Level]) -> None:
    findings = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": usable})

    assert [finding.level for finding in findings] == levels


@pytest.mark.parametrize("unstated", ["drive/winding/efficiency", "drive/winding/friction_nmm", "teeth/0/lift_mm"])
def test_turns_are_told_as_at_most_where_something_is_not_stated(unstated: str) -> None:
    [finding] = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": 0.45, unstated: None})

    assert finding.message.startswith("A full winding plays at most 0.90 turns of this disc")


@pytest.mark.parametrize(
    ("off", "unsure"),
    [
        ({f"{SPRING}/usable_turns": {"value": 0.51, "plus_minus": 0.051}}, 1.02 * (1 - 1 / 1.1)),
        ({"drive/winding/barrel_to_disc": [{"value": 2, "plus_minus": 0.2}]}, 1.02 * (1 - 1 / 1.1)),
    ],
)
def test_a_winding_that_holds_by_less_than_its_numbers_are_worth_is_told(off: dict[str, Any], unsure: float) -> None:
    [finding] = found(winding_lasts, LIFTED | WOUND | {f"{SPRING}/usable_turns": 0.51} | off)

    assert finding.code is Code.MARGIN_UNSURE
    assert f"It holds by 0.020 turns, less than the ±{unsure:.3f} turns" in finding.message


@pytest.mark.parametrize(
    ("name", "worth", "unsure"),
    [
        # The chord of 165 on track 3 leaves (200 − 185)/10 = 1.5 turns. One hundredth less torque: straight to nothing
        # after 20 turns still, so 20 · (1 − 185 · 1.01/200) = 1.315.
        ("elastic_modulus_n_per_mm2", {"value": 240_000, "plus_minus": 2400}, 0.185),
        ("width_mm", {"value": 10, "plus_minus": 0.1}, 0.185),
        # three times as much for the thickness: 20 · (1 − 185 · 1.03/200) = 0.945
        ("thickness_mm", {"value": 0.5, "plus_minus": 0.005}, 0.555),
        # 10/1.05 turns wound: 1000 N mm of 1/1.05, 20/1.05 · (1 − 185 · 1.05/200) = 0.548
        ("wound_turns", {"value": 10, "plus_minus": 0.5}, 0.952),
    ],
)
def test_what_the_spring_is_worth_counts_where_the_torque_ends_the_winding(
    name: str, worth: dict[str, float], unsure: float
) -> None:
    heavy = LIFTED | WOUND | {"teeth/2/stiffness_n_per_mm": 3.3, "teeth/2/lift_mm": 0.5}
    [plain] = found(winding_lasts, heavy)
    assert plain.measured == pytest.approx(1.5)

    findings = found(winding_lasts, heavy | {f"{SPRING}/{name}": worth})

    if unsure > 0.5:
        [finding] = findings
        assert finding.code is Code.MARGIN_UNSURE
        assert f"less than the ±{unsure:.3f} turns" in finding.message
    else:
        assert [finding.level for finding in findings] == [Level.ADVICE]


def test_a_disc_that_slows_in_a_turn_by_more_than_is_heard_is_warned_of() -> None:
    # Friction and the chord, 20 + 110, end the winding after seven turns. Mean load 3 · ½ · 2 · 0.25 / 2π = 0.119: the
    # seventh goes from 200 − 60 − 20.119 = 119.881 to 109.881: √ loses 4.262 %. The first loses 2.82 %, more than 2.5.
    [finding] = found(tempo_holds, LIFTED | WOUND)

    assert (finding.code, finding.level, finding.unit) == (Code.TEMPO_SAGS, Level.WARNING, "%")
    assert (finding.measured, finding.limit) == (pytest.approx(4.262, abs=1e-3), 2.5)
    assert finding.message == "In the last turn of a winding the disc slows by 4.26 %; 2.5 % is just heard."
    assert finding.remedy.startswith("Use a spring wound further from its free shape")


def test_turns_that_hold_the_tempo_are_named_in_the_remedy() -> None:
    # 30 turns wound bring 600 N mm and 10 less a turn: turn k starts at 579.881 − 10·(k − 1) and holds the tempo
    # down to 10/(1 − 0.975²) = 202.5: k = 38. 20 turns of the barrel are 40.
    longer = {f"{SPRING}/wound_turns": 30, f"{SPRING}/usable_turns": 20}

    [finding] = found(tempo_holds, LIFTED | WOUND | longer)

    assert finding.remedy.startswith("Wind again after 38 turns, which slow by less")
    assert found(tempo_holds, LIFTED | WOUND | longer | {f"{SPRING}/usable_turns": 19}) == []


def test_slowing_is_told_as_at_least_where_friction_is_not_stated() -> None:
    [finding] = found(tempo_holds, LIFTED | WOUND | {"drive/winding/friction_nmm": None})

    assert "slows by at least " in finding.message


BRAKED = WOUND | {"drive/winding/disc_to_brake": [8, 10, 25]}


@pytest.mark.parametrize("turns_per_s", [32.5, 34.5])
def test_a_brake_that_gives_another_turn_is_warned_of(turns_per_s: float) -> None:
    [finding] = found(train_gives_the_turn, BRAKED | {"drive/winding/brake_turns_per_s": turns_per_s})

    assert (finding.code, finding.level, finding.unit) == (Code.TURN_DIFFERS, Level.WARNING, "s")
    assert (finding.measured, finding.limit) == (pytest.approx(2000 / turns_per_s), 60)
    assert finding.message == (
        f"The air brake's {turns_per_s} turns a second through a train of 2000 turn the disc in "
        f"{2000 / turns_per_s:.6g} s; plain-3 states 60.000 s, and 0.150 s may lie between them."
    )


@pytest.mark.parametrize("turns_per_s", [33.26, 33.33, 33.41])  # 60.13, 60.006 and 59.86 s; 0.25 % of 60 s is 0.15
def test_a_brake_that_gives_the_turn_but_for_rounding_is_in_order(turns_per_s: float) -> None:
    assert found(train_gives_the_turn, BRAKED | {"drive/winding/brake_turns_per_s": turns_per_s}) == []


@pytest.mark.parametrize(
    "off",
    [
        {"drive/winding/brake_turns_per_s": {"value": 34.5, "plus_minus": 1.2}},  # 57.97 ± 2.02, and 0.15
        {"drive/winding/disc_to_brake": [8, {"value": 10, "plus_minus": 0.35}, 25]},
        {"revolution_s": {"value": 60, "plus_minus": 2}},
    ],
)
def test_a_turn_within_what_the_numbers_are_worth_is_in_order(off: dict[str, Any]) -> None:
    changes = BRAKED | {"drive/winding/brake_turns_per_s": 34.5}

    assert len(found(train_gives_the_turn, changes)) == 1
    assert found(train_gives_the_turn, changes | off) == []


@pytest.mark.parametrize("one_check", CHECKS, ids=lambda one_check: one_check.__name__)
@pytest.mark.parametrize(
    "movement",
    [
        PLAIN,
        movement_with({"drive": {}}),
        movement_with(LIFTED),
        movement_with(STARTING | {"drive/train": None, "drive/disc_inertia_kg_m2": None}),
    ],
    ids=["no drive", "an empty drive", "teeth alone", "torque alone"],
)
def test_what_is_not_stated_is_not_checked(one_check: Any, movement: Movement) -> None:
    assert one_check(disc_of(movement, CHORD)) == []


def test_teeth_that_are_not_stated_are_not_held_against_the_limit() -> None:
    assert found(drive_carries_the_teeth, {"drive/torque_limit_nmm": 0.1}) == []


def test_a_disc_without_projections_has_no_finding_of_the_drive() -> None:
    bad = LIFTED | STARTING | BRAKED | {"before_music_deg": 1, "drive/torque_limit_nmm": 1}

    codes = [finding.code for finding in check(disc_of(driven(bad), []))]

    assert codes == [Code.NOTHING_TO_PLAY]


def test_every_check_of_the_drive_is_made() -> None:
    bad = LIFTED | STARTING | BRAKED
    bad |= {"before_music_deg": 14, "drive/torque_limit_nmm": 100, f"{SPRING}/usable_turns": 0.75}
    bad |= {"drive/winding/brake_turns_per_s": 30}

    codes = [finding.code for finding in check(disc_of(driven(bad), CHORD))]

    assert codes == [
        Code.START_TOO_SHORT,
        Code.DRIVE_OVERLOADED,
        Code.WINDING_TOO_SHORT,
        Code.TEMPO_SAGS,
        Code.TURN_DIFFERS,
    ]


def test_a_shipped_drive_carries_five_notes_on_every_release() -> None:
    movement = shipped_movement("mossbrook-67")
    plucks = [(track, 2.0 + track // 5) for track in range(9, 68)]

    disc = disc_of(movement, plucks, PRESS)

    assert [finding for one_check in CHECKS for finding in one_check(disc)] == []


DRIVE_CODES = {
    Code.START_TOO_SHORT,
    Code.DRIVE_OVERLOADED,
    Code.WINDING_TOO_SHORT,
    Code.TEMPO_SAGS,
    Code.TURN_DIFFERS,
    Code.MARGIN_UNSURE,
}


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_demo_on_a_shipped_movement_has_no_finding_of_the_drive(movement: Movement, cutter: Cutter) -> None:
    laid_out = walk.lay_out(demo_tune(), movement, cutter, Settings())

    assert [finding for finding in laid_out.findings if finding.code in DRIVE_CODES] == []


def test_a_load_kept_while_arranging_is_kept_on_the_disc_and_one_ignored_is_found_on_its_drawing_too() -> None:
    movement = shipped_movement("mossbrook-67")
    assert movement.drive is not None
    # The demo's heaviest chord would load this disc with 206.8 N mm.
    weak = movement.model_copy(update={"drive": movement.drive.model_copy(update={"torque_limit_nmm": 195.0})})

    kept = walk.lay_out(demo_tune(), weak, LASER, Settings())
    ignored = walk.lay_out(demo_tune(), weak, LASER, Settings(load_limit="ignore"))
    drawn = walk.check_drawing(walk.files_of(ignored, not_good="a test")["disc.dxf"], weak, LASER)

    assert kept.good_to_cut
    [finding] = [finding for finding in ignored.findings if finding.code in DRIVE_CODES]
    assert (finding.code, finding.level) == (Code.DRIVE_OVERLOADED, Level.ERROR)
    assert finding.measured == pytest.approx(206.803, abs=1e-3)
    [again] = [finding for finding in drawn.findings if finding.code in DRIVE_CODES]
    assert (again.code, again.level, again.at.tracks) == (finding.code, finding.level, finding.at.tracks)
    assert again.measured == pytest.approx(finding.measured, abs=1e-3)
