import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.arrange.arrangement import Arrangement, LeftOut
from layout.check import Code, Level, check
from layout.check.music import WholeTune, music_fits_the_turn, something_plays
from layout.check.repeats import dampers_recover, plucks_lie_in_the_music, rest_is_clear, star_wheels_keep_up
from layout.documents import Movement
from layout.mechanics.arrays import frozen_floats
from tests.layout.examples import PLAIN, SHIPPED, arrangement_of, disc_of, movement_with
from tests.thorough import tried

# On track 1 of the plain movement, radius 50 at 60 s a turn, the edge travels 2 pi 50 / 60 = 5.235988 mm/s,
# so the engagement arc of 3.2 mm takes 0.611155 s.
LEAST_S = 0.611155


def test_a_repeat_faster_than_the_star_wheel_is_found() -> None:
    [finding] = star_wheels_keep_up(disc_of(PLAIN, [(1, 10.0), (1, 10.5)]))

    assert finding.code is Code.REPEAT_TOO_SOON
    assert finding.level is Level.ERROR
    assert finding.measured == pytest.approx(2.617994, abs=1e-6)  # 0.5 s * 5.235988
    assert finding.limit == pytest.approx(3.2)
    assert finding.message == (
        "Two plucks on track 1 are 2.618 mm (0.500 s) apart; its star wheel needs 3.200 mm (0.611 s) to make its step: "
        "the second is lost, or the first released too early."
    )
    assert finding.at.sounds_s == pytest.approx(10.0)


def test_a_repeat_that_holds_by_less_than_the_measured_arc_is_worth_is_a_warning() -> None:
    # 0.65 s * 5.235988 = 3.4034 mm; the arc of 3.2 mm was measured to 0.3 mm
    arcs = {"tracks/0/engagement_arc_mm": {"value": 3.2, "plus_minus": 0.3}, "tracks/0/release_arc_mm": 0.0}

    [finding] = star_wheels_keep_up(disc_of(movement_with(arcs), [(1, 10.0), (1, 10.65)]))

    assert finding.code is Code.MARGIN_UNSURE
    assert "It holds by 0.203 mm, less than the ±0.300 mm" in finding.message


@pytest.mark.parametrize("later_s", [LEAST_S + 1e-5, 5.0])
def test_a_repeat_the_star_wheel_can_follow_passes(later_s: float) -> None:
    assert star_wheels_keep_up(disc_of(PLAIN, [(1, 10.0), (1, 10.0 + later_s)])) == []


def test_plucks_on_different_tracks_do_not_hinder_each_other() -> None:
    assert star_wheels_keep_up(disc_of(PLAIN, [(1, 10.0), (2, 10.0)])) == []


def test_the_last_pluck_of_a_turn_and_the_first_of_the_next_are_neighbours() -> None:
    # nearly no rest: 0.1 deg before and after the music; 60 s * 359.8 / 360 = 59.9667 s of music
    movement = movement_with({"before_music_deg": 0.1, "after_music_deg": 0.1})

    [finding] = star_wheels_keep_up(disc_of(movement, [(1, 0.0), (1, 59.9)]))

    # the turn ends 0.1 s after the last: 0.1 * 5.235988
    assert finding.measured == pytest.approx(0.5236, abs=1e-4)


def test_with_an_offset_row_the_least_angle_is_wider() -> None:
    # d = 30 on radius 50: cos delta = 0.8, so the arc needs 3.2 / (50 * 0.8) rad = 0.763944 s
    movement = movement_with({"gantry_offset_mm": 30})

    assert star_wheels_keep_up(disc_of(movement, [(1, 10.0), (1, 10.764)])) == []
    [finding] = star_wheels_keep_up(disc_of(movement, [(1, 10.0), (1, 10.763)]))
    assert "(0.764 s)" in finding.message


def test_a_repeat_before_the_damper_has_recovered_is_found_at_the_fastest_turn() -> None:
    # 1 s at 60 s a turn is 0.8 s at 48 s a turn
    movement = movement_with({"damper_recovery_s": 0.9, "fastest_revolution_s": 48})

    [finding] = dampers_recover(disc_of(movement, [(1, 10.0), (1, 11.0)]))

    assert finding.code is Code.DAMPER_NOT_RECOVERED
    assert finding.measured == pytest.approx(0.8)
    assert (
        finding.message == "Two plucks on track 1 are 0.800 s apart at the fastest turn; its damper needs 0.900 s: "
        "the tooth is met while it still sounds, and buzzes."
    )


def test_a_damper_that_has_just_recovered_passes() -> None:
    movement = movement_with({"damper_recovery_s": 0.8, "fastest_revolution_s": 48})

    assert dampers_recover(disc_of(movement, [(1, 10.0), (1, 11.0)])) == []


def test_an_undamped_tooth_needs_no_recovery() -> None:
    movement = movement_with({"damper_recovery_s": 0.9, "teeth/0/damped": False})

    assert dampers_recover(disc_of(movement, [(1, 10.0), (1, 10.7)])) == []


def test_plucks_at_the_very_ends_of_the_music_pass() -> None:
    # 60 * (360 - 60) / 360 = 50 s of music
    disc = disc_of(PLAIN, [(1, 0.0), (1, 50.0)])

    assert plucks_lie_in_the_music(disc) == []


@pytest.mark.parametrize(("sounds_s", "limit_s"), [(50.01, 50.0), (-0.01, 0.0)])
def test_a_pluck_outside_the_music_is_found(sounds_s: float, limit_s: float) -> None:
    [finding] = plucks_lie_in_the_music(disc_of(PLAIN, [(1, sounds_s)]))

    assert finding.code is Code.PLUCK_OUTSIDE_MUSIC
    assert finding.measured == pytest.approx(sounds_s)
    assert finding.limit == pytest.approx(limit_s)
    assert f"sounds at {sounds_s:.3f} s; music may sound from 0 to 50.000 s" in finding.message


@pytest.mark.parametrize(
    ("changes", "sounds_s", "clear"),
    [
        # At rest an edge that sounds t after the start stands (before + 6 t) deg short of its release. The tip may be
        # touched up to R sin acos((3.75 - 1.41 - 0.15)/3.2) = 3.2 sin 46.8 deg = 2.3333 mm either side of the row:
        # on radius 50, 2.6748 deg.
        ({"before_music_deg": 2.66}, 0.0, False),
        ({"before_music_deg": 2.69}, 0.0, True),
        # after the turn the body, 0.5 mm of standing metal, must have passed too: 2.8333 mm = 3.2483 deg
        ({"after_music_deg": 3.24, "before_music_deg": 30}, (360 - 33.24) / 6, False),
        ({"after_music_deg": 3.26, "before_music_deg": 30}, (360 - 33.26) / 6, True),
    ],
)
def test_the_rest_sector_is_judged_by_arc(changes: dict[str, float], sounds_s: float, clear: bool) -> None:  # noqa: FBT001 - a parametrised verdict
    findings = rest_is_clear(disc_of(movement_with(changes), [(1, sounds_s)]))

    assert (findings == []) is clear
    if not clear:
        assert findings[0].code is Code.REST_NOT_CLEAR
        assert findings[0].measured == pytest.approx(-0.01, abs=0.02)
        assert "At rest the working edge of a projection on track 1 stands" in findings[0].message


def test_an_inner_track_needs_a_wider_rest_than_an_outer_one() -> None:
    # 2 deg: 3.49 mm on radius 100 is clear of 2.3333 mm; 1.75 mm on radius 50 is not
    movement = movement_with({"before_music_deg": 2.0})

    findings = rest_is_clear(disc_of(movement, [(1, 0.0), (3, 0.0)]))

    assert [finding.at.tracks for finding in findings] == [(1,)]


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_rest_sectors_of_the_shipped_movements_are_wide_enough_on_every_track(movement: Movement) -> None:
    free_s = movement.revolution_s * (360 - movement.before_music_deg - movement.after_music_deg) / 360
    first = disc_of(movement, [(track.track, 0.0) for track in movement.tracks])
    last = disc_of(movement, [(track.track, free_s) for track in movement.tracks])

    assert rest_is_clear(first) == []
    assert rest_is_clear(last) == []


def test_a_tune_the_comb_cannot_play_is_an_error_that_says_why() -> None:
    left_out = (LeftOut(note=0, reason="no-such-pitch"), LeftOut(note=1, reason="ruled-out"))

    [finding] = check(disc_of(PLAIN, []), arrangement_of([], left_out))

    assert finding.code is Code.NOTHING_TO_PLAY
    assert finding.level is Level.ERROR
    assert finding.message == (
        "Nothing on this disc would sound on plain-3: every note is left out (no-such-pitch, ruled-out)."
    )


def test_a_tune_without_notes_is_an_error() -> None:
    [finding] = something_plays(arrangement_of([]), disc_of(PLAIN, []))

    assert "the tune holds no notes but percussion" in finding.message


def test_music_longer_than_the_turn_is_an_error_with_its_length() -> None:
    arrangement = arrangement_of([(1, 0.0), (1, 49.0)], (LeftOut(note=2, reason="past-the-turn"),))

    [finding] = music_fits_the_turn(arrangement, disc_of(PLAIN, [(1, 0.0), (1, 49.0)]))

    assert finding.code is Code.MUSIC_TOO_LONG
    assert finding.limit == pytest.approx(50.0)
    assert "one turn of plain-3 has 50.00 s for it, so 1 note falls past the turn." in finding.message
    # 49.0 s is the last onset the test's arrangement has; its turn has 50 s
    assert "it fits the turn at 0.980 times as written" in finding.remedy


def test_notes_past_the_turn_are_counted() -> None:
    late = (LeftOut(note=1, reason="past-the-turn"), LeftOut(note=2, reason="past-the-turn"))

    [finding] = music_fits_the_turn(arrangement_of([(1, 60.0)], late), disc_of(PLAIN, [(1, 0.0)]))

    assert "so 2 notes fall past the turn." in finding.message


@pytest.mark.parametrize("length_s", [50.001, 58.7501, 77.7777])
def test_the_factor_named_makes_the_music_fit(length_s: float) -> None:
    arrangement = arrangement_of([(1, length_s)], (LeftOut(note=1, reason="past-the-turn"),))

    [finding] = music_fits_the_turn(arrangement, disc_of(PLAIN, [(1, 0.0)]))

    named = float(finding.remedy.partition("fits the turn at ")[2].partition(" times")[0])
    assert length_s / named <= 50.0
    assert length_s / (named - 0.001) > 50.0


def too_long(length_s: float) -> Arrangement:
    return arrangement_of([(1, length_s)], (LeftOut(note=1, reason="past-the-turn"),))


def whole_tune(onset_s: list[float], disc_count: int = 1) -> WholeTune:
    return WholeTune(onset_s=frozen_floats(onset_s), from_s=onset_s[0], disc_count=disc_count)


@pytest.mark.parametrize(
    ("onset_s", "discs", "fits"),
    [
        # turns of 50 s
        ([0.0, 50.0, 50.5], "over 2 discs (settings: discs)", "the turn at 1.010 times"),  # 50.5/50
        ([0.0, 60.0, 120.0, 180.0], "over 4 discs (settings: discs)", "the turn at 3.600 times"),  # 180/50
        ([0.0, 10.0, 110.0, 120.0], "over 2 discs (settings: discs)", "the turn at 2.400 times"),  # silence between
    ],
)
def test_a_tune_too_long_names_the_fewest_discs_that_hold_it(onset_s: list[float], discs: str, fits: str) -> None:
    [finding] = music_fits_the_turn(too_long(onset_s[-1]), disc_of(PLAIN, [(1, 0.0)]), whole_tune(onset_s))

    assert finding.remedy.startswith(f"Cut the tune {discs}, or choose a passage of it (passage), or let it play")
    assert fits in finding.remedy
    assert 'speed: mode "fit", with most at' in finding.remedy


def test_discs_too_few_name_how_many_it_takes_and_the_speed_for_as_many_as_there_are() -> None:
    whole = whole_tune([0.0, 40.0, 80.0, 120.0, 180.0], disc_count=2)

    [finding] = music_fits_the_turn(too_long(100.0), disc_of(PLAIN, [(1, 0.0)]), whole)

    # 0 and 40 s, 80 and 120 s, 180 s; two turns hold 0 to 80 s and 120 to 180 s: 80/50
    assert "Cut the tune over 3 discs instead of 2 (settings: discs)" in finding.remedy
    assert "it fits 2 turns at 1.600 times as written" in finding.remedy


def test_a_tune_for_more_discs_than_there_can_be_says_so() -> None:
    whole = whole_tune([float(60 * place) for place in range(25)])

    [finding] = music_fits_the_turn(too_long(1440.0), disc_of(PLAIN, [(1, 0.0)]), whole)

    assert finding.remedy.startswith("It would take 25 discs, more than the 24 there can be; choose a passage of it")


def test_a_tune_of_which_only_the_length_is_known_names_discs_that_surely_hold_it() -> None:
    [finding] = music_fits_the_turn(too_long(100.5), disc_of(PLAIN, [(1, 0.0)]))

    # 100.5/50 = 2.01
    assert "over 3 discs" in finding.remedy


def test_music_that_fits_passes() -> None:
    disc = disc_of(PLAIN, [(1, 0.0), (1, 49.0)])

    assert music_fits_the_turn(arrangement_of([(1, 0.0), (1, 49.0)]), disc) == []
    assert math.isclose(disc.turning.free_turn_s, 50.0)


@settings(max_examples=tried(60), deadline=None)
@given(plucks=st.lists(st.tuples(st.integers(1, 3), st.floats(0, 50)), max_size=25))
def test_the_pairs_told_are_those_that_following_each_track_round_finds(plucks: list[tuple[int, float]]) -> None:
    disc = disc_of(PLAIN, plucks)
    expected = []
    for index, radius_mm in enumerate((50, 60, 100)):
        here = sorted(
            (angle, place) for place, angle in enumerate(disc.edge_angle_rad) if disc.track_index[place] == index
        )
        for (angle, one), (after, two) in zip(here, here[1:] + here[:1], strict=True):
            # the last and the first are neighbours over the turn's end; one alone has no neighbour
            apart_rad = after - angle + (2 * math.pi if (angle, one) == here[-1] else 0.0)
            if len(here) > 1 and apart_rad * radius_mm < 3.2 - 1e-6:
                expected.append((one, two))

    assert [finding.at.projections for finding in star_wheels_keep_up(disc)] == expected
