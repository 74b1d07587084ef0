"""Feature sizes against the sheet's thickness; PLAIN's sheet is 0.5 mm thick, so ratios are halved."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.check import Code, Finding, Level
from layout.check.feature_sizes import features_suit_the_sheet
from layout.check.webs import webs_between_openings_hold
from layout.documents import Cutter, Movement
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.thorough import tried

LOW = [0.002, 0.002, 0.002]  # of 0.5 mm: a micrometre, which nothing here is below


def cutter_ruling(base: Cutter = LASER, **rules: list[float]) -> Cutter:
    """A cutter with these rules alone; every other kind may be as small as it likes."""
    return cutter_with({"feature_rules": {"hole": LOW, "web": LOW, "edge": LOW, "slit": LOW} | rules}, base)


def found_on(disc: Disc) -> list[Finding]:
    return features_suit_the_sheet(disc)


def levels_of(findings: list[Finding]) -> list[Level]:
    assert {finding.code for finding in findings} <= {Code.SMALL_FOR_SHEET}
    return [finding.level for finding in findings]


def test_a_hole_small_for_its_sheet_is_told_with_its_ratio() -> None:
    row = {"purpose": "drive", "shape": "slot", "radius_mm": 20, "first_at_deg": 450 - 360, "count": 3}
    movement = movement_with({"disc/features": [row | {"width_mm": 0.6, "length_mm": 4}]})

    [finding] = found_on(disc_of(movement, [(1, 10.0)], cutter_ruling(hole=[1.0, 1.5, 2.0])))

    # 0.6 mm is 1.2 times 0.5 mm: above the first, 0.5, and below the second, 0.75
    assert (finding.level, finding.measured, finding.limit, finding.unit) == (Level.WARNING, 0.6, 0.75, "mm")
    assert (finding.at.radius_mm, finding.at.angle_deg) == (20, 90)
    assert finding.message == (
        "A drive slot is 0.600 mm, 1.20 times the sheet's 0.5 mm; fibre-laser asks for 1.5 times, 0.750 mm: "
        "it may burn, bulge or break."
    )
    assert finding.remedy.startswith("Widen it in the movement document")


@pytest.mark.parametrize(
    ("hole_mm", "level"),
    [(0.499, Level.ERROR), (0.5, Level.WARNING), (0.749, Level.WARNING), (0.75, Level.ADVICE), (0.999, Level.ADVICE)],
)
def test_a_size_is_of_the_first_level_it_is_below(hole_mm: float, level: Level) -> None:
    movement = movement_with({"disc/centre_hole_mm": hole_mm})

    findings = found_on(disc_of(movement, [(1, 10.0)], cutter_ruling(hole=[1.0, 1.5, 2.0])))

    assert levels_of(findings) == [level]


@pytest.mark.parametrize(
    ("hole_mm", "levels"),
    # 0.7, 1.0 and 1.5 times 0.5 mm are 0.35, 0.5 and 0.75.
    [(0.349, [Level.ERROR]), (0.35, [Level.WARNING]), (0.5, [Level.ADVICE]), (0.75, [])],
)
def test_a_shop_that_states_no_ratios_of_its_own_is_held_to_the_usual_three(
    hole_mm: float, levels: list[Level]
) -> None:
    movement = movement_with({"disc/centre_hole_mm": hole_mm})
    cutter = cutter_with({"feature_rules": {}})

    found = found_on(disc_of(movement, [(1, 10.0)], cutter))

    assert levels_of([finding for finding in found if "centre hole is" in finding.message]) == levels


def test_a_size_at_the_last_limit_passes() -> None:
    movement = movement_with({"disc/centre_hole_mm": 1.0})

    assert found_on(disc_of(movement, [(1, 10.0)], cutter_ruling(hole=[1.0, 1.5, 2.0]))) == []


def test_of_many_webs_the_thinnest_of_each_level_is_told_with_their_count() -> None:
    # Tracks 50, 52.4 and 54.9; openings are 2.04 across, so chords leave about 0.36 and 0.46 mm between them
    # (0.72 and 0.92 of the sheet), and the outer two a little more.
    movement = movement_with({"tracks/1/radius_mm": 52.4, "tracks/2/radius_mm": 54.9})
    chords = [(track, at) for at in (10.0, 20.0, 30.0) for track in (1, 2, 3)]

    error, warning = found_on(disc_of(movement, chords, cutter_ruling(web=[0.8, 1.0, 1.0])))

    assert (error.level, warning.level) == (Level.ERROR, Level.WARNING)
    assert error.measured == pytest.approx(0.36, abs=0.002)
    assert warning.measured == pytest.approx(0.46, abs=0.002)
    assert (error.limit, warning.limit) == pytest.approx((0.4, 0.5))
    assert (error.at.tracks, warning.at.tracks) == ((1, 2), (2, 3))
    assert error.message == (
        "The web between two openings on tracks 1 and 2 is 0.360 mm, 0.72 times the sheet's 0.5 mm; fibre-laser asks "
        "for 0.8 times, 0.400 mm: it does not hold or cannot be cut cleanly. 2 more are below that."
    )
    assert "2 more are below that." in warning.message


def test_a_web_to_a_hole_counts_as_a_web() -> None:
    # the edge on track 1 lies at 90 degrees at 10 s; a hole of 4 at 46.5 ends at 48.5, the opening begins at 48.98
    hole = {"purpose": "drive", "shape": "hole", "radius_mm": 46.5, "first_at_deg": 90, "width_mm": 4, "length_mm": 4}
    movement = movement_with({"disc/features": [hole]})

    [finding] = found_on(disc_of(movement, [(1, 10.0)], cutter_ruling(web=[0.7, 0.8, 1.0])))

    assert finding.measured == pytest.approx(0.48, abs=0.02)
    assert (finding.at.tracks, finding.at.projections) == ((1,), (0,))
    assert "an opening on track 1 and a drive hole" in finding.message


@pytest.mark.parametrize(
    ("changes", "says", "measured"),
    [
        # the far corner of track 3 lies at √(101.02² + 1.8945²) = 101.0378 mm
        ({"disc/outer_diameter_mm": 203}, "from the openings of track 3 to the rim", 101.5 - 101.0378),
        ({"disc/centre_hole_mm": 97}, "from the openings of track 1 to the centre hole", 48.98 - 48.5),
        (
            {
                "disc/features": [
                    {"purpose": "drive", "shape": "hole", "radius_mm": 8, "width_mm": 5, "length_mm": 5},
                ]
            },
            "from a drive hole to the centre hole",
            8 - 2.5 - 5,
        ),
        (
            {
                "disc/features": [
                    {"purpose": "stop", "shape": "slot", "radius_mm": 117.5, "width_mm": 4, "length_mm": 4},
                ]
            },
            "from a stop slot to the rim",
            120 - 117.5 - 2,
        ),
    ],
)
def test_metal_to_an_edge_thin_for_its_sheet_is_told(changes: dict[str, Any], says: str, measured: float) -> None:
    disc = disc_of(movement_with(changes), [(1, 10.0), (3, 10.0)], cutter_ruling(edge=[0.5, 1.02, 1.02]))

    [finding] = found_on(disc)

    assert says in finding.message
    assert finding.measured == pytest.approx(measured, abs=0.001)
    assert (finding.level, finding.limit) == (Level.WARNING, 0.51)


def test_a_notch_leaves_no_metal_to_the_rim_and_is_not_said_to() -> None:
    notch = {"purpose": "location", "shape": "notch", "radius_mm": 120, "width_mm": 4, "length_mm": 4}
    movement = movement_with({"disc/features": [notch]})

    assert found_on(disc_of(movement, [(1, 10.0)], cutter_ruling(edge=[0.7, 1.0, 1.5]))) == []


def test_channels_and_reliefs_are_slits_and_the_beam_alone_is_not() -> None:
    channel = {"fold": LASER.model_dump(mode="json")["fold"] | {"relief_width_mm": 0.3}}
    line = {"fold": channel["fold"] | {"slit": "centre-line", "slit_width_mm": None, "relief_width_mm": None}}
    rule = {"hole": LOW, "web": LOW, "edge": LOW, "slit": [0.7, 1.0, 1.5]}

    wide = found_on(disc_of(PLAIN, [(1, 10.0)], cutter_with(channel | {"feature_rules": rule})))
    narrow = found_on(disc_of(PLAIN, [(1, 10.0)], cutter_with(line | {"feature_rules": rule})))

    # 0.3 of 0.5 mm is 0.6 times; 0.42 is 0.84 times
    assert [(one.level, one.measured) for one in wide] == [(Level.ERROR, 0.3), (Level.WARNING, 0.42)]
    assert "The relief's width is 0.300 mm, 0.60 times" in wide[0].message
    assert narrow == []


def test_a_slot_is_as_wide_as_the_movement_says_and_a_lance_has_no_slit() -> None:
    asking = cutter_ruling(PRESS, slit=[1.0, 2.0, 3.0])

    [slot] = found_on(disc_of(SHIPPED[2], [(1, 10.0)], asking))

    assert (slot.level, slot.measured, slot.limit) == (Level.ADVICE, 1.3, 1.5)
    assert found_on(disc_of(PLAIN, [(1, 10.0)], asking)) == []


def test_a_cutter_that_states_no_rules_is_held_to_none() -> None:
    movement = movement_with({"disc/centre_hole_mm": 0.1, "disc/thickness_mm": 2})

    assert found_on(disc_of(movement, [(1, 10.0), (1, 10.1)], cutter_with({"feature_rules": None}))) == []


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_shipped_cutters_rules_never_forbid_what_their_hard_limits_allow_on_the_shipped_sheets(
    movement: Movement, cutter: Cutter
) -> None:
    """On 0.5 and 0.6 mm sheet the least web, 0.5 mm, is 1.0 and 0.83 times the sheet, the channel 0.84 and 0.70.

    Shops ask webs and slots of 0.7 times (the lenient: acutelaser.com.au laser cutting page) to 1.5
    times. The laser cuts a channel as two passes of a 0.12 mm kerf, so a narrow one burns nothing the kerf does
    not: its slits are asked to be 0.5, 0.6 and 0.7 times, its webs 0.7 and 0.8. On sheet above 0.71 mm
    the least web would then be too thin by the rule.
    """
    rules = cutter.feature_rules
    assert rules is not None
    thickness_mm = movement.disc.thickness_mm
    assert max(rules.web) * thickness_mm <= cutter.min_web_mm
    if cutter.fold is not None and cutter.fold.slit_width_mm is not None:
        assert max(rules.slit) * thickness_mm <= cutter.fold.slit_width_mm + 1e-9
    assert found_on(disc_of(movement, [(track.track, 4.0) for track in movement.tracks][::3], cutter)) == []


@settings(max_examples=tried(30), deadline=None)
@given(
    movement=st.sampled_from(SHIPPED),
    cutter=st.sampled_from([LASER, PRESS]),
    plucks=st.lists(st.tuples(st.integers(1, 6), st.floats(0, 12)), min_size=2, max_size=12),
)
def test_the_thinnest_web_told_is_that_of_the_web_check(
    movement: Movement, cutter: Cutter, plucks: list[tuple[int, float]]
) -> None:
    least = cutter.min_web_mm / movement.disc.thickness_mm
    asking = cutter_with({"feature_rules": {"hole": LOW, "web": [least] * 3, "edge": LOW, "slit": LOW}}, cutter)
    disc = disc_of(movement, plucks, asking)

    by_webs = [finding.measured or 0.0 for finding in webs_between_openings_hold(disc)]
    by_sheet = [finding.measured for finding in found_on(disc)]

    assert by_sheet == ([pytest.approx(np.min(by_webs), abs=1e-9)] if by_webs else [])


def test_webs_to_two_rows_of_holes_and_between_openings_are_counted_together() -> None:
    # Chords on 50 and 52.4 leave 0.36 mm, three times; two holes that end 0.48 mm short of track 1's openings.
    hole = {"purpose": "drive", "shape": "hole", "radius_mm": 46.5, "width_mm": 4, "length_mm": 4}
    rows = [hole | {"first_at_deg": 90}, hole | {"first_at_deg": 150, "purpose": "stop"}]
    movement = movement_with({"tracks/1/radius_mm": 52.4, "disc/features": rows})
    chords = [(track, at) for at in (10.0, 20.0, 30.0) for track in (1, 2)]

    [finding] = found_on(disc_of(movement, chords, cutter_ruling(web=[0.1, 0.1, 1.0])))

    assert finding.measured == pytest.approx(0.36, abs=0.002)
    assert finding.message.endswith("it asks for care. 4 more are below that.")  # 3 + 2, less the one told


def test_a_rule_beyond_any_web_costs_no_time_and_still_tells_the_thinnest() -> None:
    thick = movement_with({"disc/thickness_mm": 2000})

    findings = found_on(disc_of(thick, [(1, 10.0), (1, 11.0), (3, 20.0)], cutter_ruling(web=[20.0, 20.0, 20.0])))

    [finding] = [finding for finding in findings if finding.message.startswith("The web")]
    # two working edges of track 1 are 2 · 50 · sin 3° = 5.23 mm apart; more than 50 mm away nothing is looked for
    assert 0 < (finding.measured or 0) < 5.24
    assert "more are" not in finding.message
