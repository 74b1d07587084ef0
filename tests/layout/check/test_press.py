import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from layout.check import Code, Level, check
from layout.check.press import feet_stand_on_flat_metal, hits_fall_on_whole_metal, press_is_strong_enough
from layout.cut.striking import hit_order
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.hits import Hits
from layout.place.disc import Disc
from tests.layout.examples import LASER, PRESS, cutter_with, disc_of, movement_with

SHEARED_MM = 2 * 2.3 + 1.6  # tool L12: both sides along the travel and the free end
NEEDED_N = SHEARED_MM * 0.5 * 276 * 1.2  # 0.5 mm sheet at 276 N/mm², a fifth more for stripping


def struck(movement: dict[str, Any], cutter: dict[str, Any], plucks: list[tuple[int, float]] | None = None) -> Disc:
    return disc_of(movement_with(movement), plucks or [(1, 10.0)], cutter_with(cutter, PRESS))


def with_shear(n_per_mm2: float | None) -> dict[str, Any]:
    return {"disc/shear_strength_n_per_mm2": n_per_mm2}


def test_a_press_below_the_force_of_a_hit_is_too_weak() -> None:
    [finding] = press_is_strong_enough(struck(with_shear(276), {"press/capacity_n": 1000}))

    assert (finding.code, finding.level) == (Code.PRESS_TOO_WEAK, Level.ERROR)
    # (4.6 + 1.6) * 0.5 * 276 = 855.6 N; and a fifth: 1026.72 N
    assert finding.measured == pytest.approx(1026.72)
    assert (finding.limit, finding.unit) == (1000, "N")
    assert finding.message == (
        "A hit of L12 shears 6.20 mm of 0.5 mm cold-rolled steel at 276 N/mm² and takes 1027 N with stripping; "
        "turn-press has 1000 N: the press would stall or be overloaded."
    )
    assert "stronger press" in finding.remedy


def test_a_press_too_weak_for_the_tool_of_a_hole_alone_is_told_of_that_tool() -> None:
    # 9 pi = 28.27 mm; * 0.5 * 276 * 1.2 = 4682 N, and L12 needs 1027 N
    disc = struck(with_shear(276) | {"disc/centre_hole_mm": 9}, {"press/capacity_n": 4681})

    [finding] = press_is_strong_enough(disc)

    assert finding.measured == pytest.approx(9 * math.pi * 0.5 * 276 * 1.2)
    assert finding.message.startswith("A hit of R9 shears 28.27 mm of 0.5 mm cold-rolled steel at 276 N/mm²")


def test_a_press_with_the_force_of_a_hit_passes() -> None:
    assert press_is_strong_enough(struck(with_shear(276), {"press/capacity_n": NEEDED_N})) == []


def test_a_force_that_is_near_the_limit_by_less_than_its_numbers_are_worth_is_unsure() -> None:
    # 0.5 mm sheet is within 0.03 mm (EN 10131, over 0.40 to 0.60 mm): 6 % of 1026.72 N is 61.6 N
    thickness = {"value": 0.5, "plus_minus": 0.03, "basis": "assumed"}

    [finding] = press_is_strong_enough(
        struck(with_shear(276) | {"disc/thickness_mm": thickness}, {"press/capacity_n": 1050})
    )

    assert (finding.code, finding.level) == (Code.MARGIN_UNSURE, Level.WARNING)
    assert "±61.603 N" in finding.message


@pytest.mark.parametrize(
    ("movement", "cutter"),
    [(with_shear(None), {"press/capacity_n": 1}), (with_shear(276), {"press/capacity_n": None})],
    ids=["no shear strength", "no capacity"],
)
def test_a_force_that_cannot_be_told_is_not_judged(movement: dict[str, Any], cutter: dict[str, Any]) -> None:
    assert press_is_strong_enough(struck(movement, cutter)) == []


def test_a_hit_partly_over_an_earlier_one_is_an_error() -> None:
    # 1.15 mm apart along track 1 (50 mm), where a footprint is 2.3 mm long: half of it falls into the earlier
    apart_s = 60 * 1.15 / (2 * math.pi * 50)

    [finding] = hits_fall_on_whole_metal(struck({}, {}, [(1, 10.0), (1, 10.0 + apart_s)]))

    assert (finding.code, finding.level) == (Code.HIT_OVER_OPENING, Level.ERROR)
    assert finding.measured == pytest.approx(50, abs=1)
    assert finding.unit == "%"
    assert finding.at.tracks == (1, 1)
    assert "into the opening struck before it on track 1" in finding.message


def test_the_later_hit_is_the_one_that_is_told() -> None:
    apart_s = 60 * 1.15 / (2 * math.pi * 50)
    disc = struck({}, {}, [(1, 10.0), (1, 10.0 + apart_s)])

    [finding] = hits_fall_on_whole_metal(disc)

    order = hit_order(disc).tolist()
    assert finding.at.projections == (order[1], order[0])


def test_hits_that_only_touch_are_in_order() -> None:
    # tracks 1.6 mm apart, as wide as the footprint; at the edge of it areas in common are mere rounding
    disc = struck({"tracks/1/radius_mm": 51.6 + 0.02}, {}, [(1, 10.0), (2, 10.0)])

    assert hits_fall_on_whole_metal(disc) == []


def test_a_slot_struck_twice_at_one_place_meets_no_metal_and_is_not_partial() -> None:
    disc = struck({}, {}, [(1, 10.0), (1, 10.0)])
    disc = replace(disc, edge_angle_rad=frozen_floats(np.full(2, disc.edge_angle_rad[0])))

    assert hits_fall_on_whole_metal(disc) == []


def test_a_hit_over_the_edge_of_a_hole_of_the_blank_is_an_error() -> None:
    row = {"purpose": "drive", "shape": "hole", "radius_mm": 50, "first_at_deg": 0, "width_mm": 4, "length_mm": 4}
    disc = struck({"disc/features": [row]}, {}, [(1, 10.0)])
    # the middle of the hole's rim: 2 mm behind the hole's centre along the track
    at_rad = 2 / 50
    disc = replace(disc, edge_angle_rad=frozen_floats([at_rad]))

    [finding] = hits_fall_on_whole_metal(disc)

    assert finding.code is Code.HIT_OVER_OPENING
    assert 0 < (finding.measured or 0) < 100
    assert "into the drive hole at 0.000°" in finding.message


def hole_row(radius_mm: float, **more: Any) -> dict[str, Any]:
    """Holes of 5 mm, for which the press has a tool."""
    size = {"width_mm": 5, "length_mm": 5}
    return {"purpose": "drive", "shape": "hole", "radius_mm": radius_mm, "first_at_deg": 90} | size | more


def lens_mm2(one_mm: float, other_mm: float, apart_mm: float) -> float:
    """The area two circles have in common (Wolfram MathWorld, Circle-Circle Intersection, from memory)."""
    one_part = one_mm**2 * math.acos((apart_mm**2 + one_mm**2 - other_mm**2) / (2 * apart_mm * one_mm))
    other_part = other_mm**2 * math.acos((apart_mm**2 + other_mm**2 - one_mm**2) / (2 * apart_mm * other_mm))
    kite = (one_mm + other_mm - apart_mm) * (apart_mm + one_mm - other_mm)
    kite *= (apart_mm - one_mm + other_mm) * (apart_mm + one_mm + other_mm)
    return one_part + other_part - math.sqrt(kite) / 2


def test_of_two_holes_that_overlap_the_one_struck_later_is_told_once() -> None:
    rows = [hole_row(20), hole_row(20, first_at_deg=100, width_mm=3, length_mm=3)]

    [finding] = hits_fall_on_whole_metal(struck({"disc/features": rows}, {}))

    assert (finding.code, finding.level) == (Code.HIT_OVER_OPENING, Level.ERROR)
    # middles 2 * 20 * sin 5° = 3.4862 mm apart
    share = lens_mm2(1.5, 2.5, 40 * math.sin(math.radians(5))) / (math.pi * 1.5**2)
    assert finding.measured == pytest.approx(100 * share, rel=1e-3)
    assert finding.message == (
        f"The hit of the drive hole at 100.000° falls with {100 * share:.1f} % of its footprint into the drive hole at "
        "90.000°: the metal pushes the punch aside and its edge runs into the die."
    )
    assert finding.at.radius_mm == pytest.approx(20)
    assert finding.at.angle_deg == pytest.approx(100)
    assert "cut apart" in finding.remedy


def test_a_hole_struck_into_a_hole_cut_apart_is_an_error_and_two_cut_apart_are_none() -> None:
    apart = hole_row(20, first_at_deg=100, width_mm=3.5, length_mm=3.5)
    holes_off = {"disc/features": [hole_row(20, width_mm=5.5, length_mm=5.5), apart]}

    [finding] = hits_fall_on_whole_metal(struck({"disc/features": [hole_row(20), apart]}, {}))

    assert "The hit of the drive hole at 90.000° falls" in finding.message
    assert hits_fall_on_whole_metal(struck(holes_off, {})) == []


def test_a_hole_that_two_rows_share_is_struck_once_and_is_no_finding() -> None:
    rows = [hole_row(20, count=2), hole_row(20, first_at_deg=270, purpose="location")]

    assert hits_fall_on_whole_metal(struck({"disc/features": rows}, {})) == []


def test_a_foot_on_a_tab_formed_before_is_an_error() -> None:
    # tracks 2.4 mm apart; a foot 4 mm wide reaches 2.0 mm, and the neighbour's tab begins 2.4 - 0.6 = 1.8 mm away
    disc = struck(
        {"tracks/1/radius_mm": 52.4}, {"tools/0/foot": {"length_mm": 6, "width_mm": 4}}, [(1, 10.0), (2, 10.0)]
    )

    [finding] = feet_stand_on_flat_metal(disc)

    assert (finding.code, finding.level) == (Code.FOOT_ON_FORMED, Level.ERROR)
    # 2.0 - 1.8 = 0.2 of the tab's 1.2 mm, about 17 %; less or more by the bend of the track
    assert finding.measured == pytest.approx(17, abs=2)
    assert set(finding.at.tracks) == {1, 2}
    assert finding.at.projections == tuple(hit_order(disc)[::-1].tolist())
    assert "the foot of L12 (6 by 4 mm) stands on" in finding.message


def test_a_foot_that_just_stays_off_its_neighbour_passes() -> None:
    foot = {"tools/0/foot": {"length_mm": 6, "width_mm": 3.5}}

    assert feet_stand_on_flat_metal(struck({"tracks/1/radius_mm": 52.4}, foot, [(1, 10.0), (2, 10.0)])) == []


def test_a_foot_that_would_stand_on_a_tab_struck_later_is_no_finding() -> None:
    # see tests/layout/cut/test_striking.py: of these two, only the one behind must not stand first
    apart_s = 60 * 3.5 / (2 * math.pi * 50)
    foot = {"tools/0/foot": {"length_mm": 7, "width_mm": 2}}

    assert feet_stand_on_flat_metal(struck({}, foot, [(1, 10.0), (1, 10.0 + apart_s)])) == []


def test_feet_that_some_order_keeps_off_are_kept_off_by_the_order_struck_which_the_check_need_not_find(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    apart_s = 60 * 3.5 / (2 * math.pi * 50)
    foot = {"tools/0/foot": {"length_mm": 7, "width_mm": 2}}
    disc = struck({}, foot, [(1, 10.0 + apart_s * place) for place in range(6)])
    standing, hit = disc.hits.feet_on_formed().T
    place = np.argsort(disc.hits.order())
    monkeypatch.setattr(Hits, "order", None)  # whoever asks for it, fails

    findings = feet_stand_on_flat_metal(disc)

    assert len(hit) == 5  # each stands behind the next
    assert (place[hit] < place[standing]).all()
    assert findings == []


def test_without_a_foot_nothing_is_judged() -> None:
    disc = struck({"tracks/1/radius_mm": 52.4}, {"tools/0/foot": None}, [(1, 10.0), (2, 10.0)])

    assert feet_stand_on_flat_metal(disc) == []


@pytest.mark.parametrize("one_check", [press_is_strong_enough, hits_fall_on_whole_metal, feet_stand_on_flat_metal])
def test_a_laser_is_no_press(one_check: Any) -> None:
    # openings that run into each other
    assert one_check(disc_of(movement_with(with_shear(276)), [(1, 10.0), (1, 10.1)], LASER)) == []


def test_the_checks_of_a_press_are_made_with_all_others() -> None:
    apart_s = 60 * 1.15 / (2 * math.pi * 50)
    disc = struck(with_shear(276), {"press/capacity_n": 1000}, [(1, 10.0), (1, 10.0 + apart_s)])

    codes = {finding.code for finding in check(disc)}

    assert {Code.PRESS_TOO_WEAK, Code.HIT_OVER_OPENING} <= codes


def test_a_disc_without_projections_has_no_finding_of_a_press() -> None:
    disc = disc_of(movement_with(with_shear(276)), [], cutter_with({"press/capacity_n": 1}, PRESS))

    assert [finding.code for finding in check(disc)] == [Code.NOTHING_TO_PLAY]
