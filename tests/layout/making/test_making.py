"""What making a disc takes, against a published example, numbers worked by hand and another library's areas."""

import math
from dataclasses import replace
from decimal import Decimal
from typing import Any

import numpy as np
import pytest
import shapely
from ezdxf.math import bulge_to_arc
from hypothesis import given
from hypothesis import strategies as st
from shapely.geometry.base import BaseGeometry

from layout.cut import plan_cuts
from layout.cut.plan import CutPath, CutPlan
from layout.documents import Cutter, Movement
from layout.documents.feature import Feature
from layout.making import Making, making_of
from layout.making.making import TimeParts
from layout.making.weighing import area_mm2, lost_mm2
from layout.mechanics.arrays import frozen_floats
from layout.mechanics.projection import Shape, pattern_of
from layout.place.disc import Disc
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, disc_of, movement_with

NOTHING = CutPath(
    cut_length_mm=0.0,
    mark_length_mm=0.0,
    rapid_length_mm=0.0,
    pierce_count=0,
    hit_count=0,
    turned_rad=0.0,
    slid_mm=0.0,
    tool_change_count=0,
)
# Published example (laserspechub.com, tools/cutting-time-calculator): 1.0 m at 3.0 m/min, 5 pierces of 0.5 s,
# 500 mm of rapid at 50 m/min: 20.0 + 2.5 + 0.6 = 23.1 s.
PUBLISHED_PATH = replace(NOTHING, cut_length_mm=1000.0, rapid_length_mm=500.0, pierce_count=5)
PUBLISHED_FEEDS = {"cut_mm_per_s": 3000 / 60, "rapid_mm_per_s": 50000 / 60, "pierce_s": 0.5}
STEEL = movement_with({"disc/density_kg_m3": 7850})  # EN 1993-1-1, 3.2.6


def plan_of(disc: Disc, path: CutPath | None) -> CutPlan:
    plan = plan_cuts(disc, title="The Long Meadow", fingerprint="0123456789abcdef", not_good=None)
    return replace(plan, path=path)


def made(path: CutPath | None, changes: dict[str, Any], movement: Movement = STEEL, base: Cutter = LASER) -> Making:
    """The making of a disc with one projection on a cutter that states these feeds and rates, and no others."""
    bare = {"feeds": None, "rates": None} | ({"fold/springback": {"opens_deg": 1.5}} if base.fold else {})
    disc = disc_of(movement, [(1, 1.0)], cutter_with(bare | changes, base))
    return making_of(disc, plan_of(disc, path))


def priced(rates: dict[str, str], path: CutPath = PUBLISHED_PATH) -> Making:
    return made(path, {"feeds": PUBLISHED_FEEDS, "rates": rates})


def test_the_time_equals_the_published_example() -> None:
    making = made(PUBLISHED_PATH, {"feeds": PUBLISHED_FEEDS})

    assert making.time_s == pytest.approx(23.1, abs=1e-9)
    parts = making.time_parts
    assert (parts.cut_s, parts.pierce_s, parts.rapid_s) == pytest.approx((20.0, 2.5, 0.6), abs=1e-9)
    assert (parts.mark_s, parts.hit_s, parts.turn_s, parts.slide_s, parts.tool_change_s) == (0, 0, 0, 0, 0)


def test_the_time_of_a_press_is_its_hits_turns_slides_and_changes_of_tool() -> None:
    path = replace(NOTHING, hit_count=40, turned_rad=2 * math.pi, slid_mm=100.0, tool_change_count=2)
    feeds = {"hit_s": 0.5, "turn_deg_per_s": 36, "slide_mm_per_s": 50, "tool_change_s": 4}

    making = made(path, {"feeds": feeds}, base=PRESS)

    # 40 * 0.5 + 360 / 36 + 100 / 50 + 2 * 4 = 20 + 10 + 2 + 8
    assert making.time_s == pytest.approx(40.0, abs=1e-9)
    assert making.hit_count == 40


def test_marking_takes_its_length_over_its_speed() -> None:
    making = made(replace(NOTHING, mark_length_mm=300.0), {"feeds": {"mark_mm_per_s": 100}})

    assert making.time_s == pytest.approx(3.0)
    assert making.mark_length_mm == 300.0


def test_a_speed_that_is_not_stated_leaves_its_part_and_the_sum_open_and_is_named() -> None:
    making = made(replace(PUBLISHED_PATH, mark_length_mm=1.0), {"feeds": {"cut_mm_per_s": 50, "pierce_s": 0.5}})

    assert making.time_s is None
    assert making.time_parts.cut_s == 20.0
    assert (making.time_parts.mark_s, making.time_parts.rapid_s) == (None, None)
    assert making.not_stated == ("cutter.feeds.mark_mm_per_s", "cutter.feeds.rapid_mm_per_s", "cutter.rates")


def test_without_feeds_every_speed_that_is_needed_is_named_and_no_other() -> None:
    making = made(PUBLISHED_PATH, {})

    feeds = [f"cutter.feeds.{feed}" for feed in ("cut_mm_per_s", "rapid_mm_per_s", "pierce_s")]
    assert making.not_stated == (*feeds, "cutter.rates")


def test_without_a_path_lengths_counts_and_time_are_not_told() -> None:
    making = made(None, {"feeds": PUBLISHED_FEEDS, "rates": {"currency": "EUR", "per_minute": "2", "setup": "5"}})

    assert (making.cut_length_mm, making.pierce_count, making.hit_count, making.time_s) == (None,) * 4
    assert making.time_parts == TimeParts()
    assert [line.name for line in making.price_lines] == ["setup"]
    assert making.total is None


def test_the_mass_of_a_blank_is_that_of_steel_sheet() -> None:
    # 300 mm of 0.8 mm steel: pi/4 * 0.3² * 0.0008 * 7850 = 0.44391 kg
    movement = movement_with({"disc/outer_diameter_mm": 300, "disc/thickness_mm": 0.8, "disc/density_kg_m3": 7850})

    assert made(NOTHING, {}, movement).blank_mass_kg == pytest.approx(0.44391, abs=5e-6)


def test_without_a_density_no_mass_is_told_and_the_field_is_named() -> None:
    making = made(NOTHING, {}, movement_with({"disc/density_kg_m3": None}))

    assert (making.blank_mass_kg, making.disc_mass_kg) == (None, None)
    assert "movement.disc.density_kg_m3" in making.not_stated


def test_a_disc_without_projections_is_its_blank_less_the_centre_hole() -> None:
    disc = disc_of(STEEL, [])

    making = making_of(disc, plan_of(disc, NOTHING))

    # pi/4 * (240² - 10²) * 0.5 = 22580.197 mm³; * 7850e-9
    assert making.disc_mass_kg == pytest.approx(22580.197 * 7850e-9, abs=1e-8)


def test_a_folded_projection_loses_its_slit_and_reliefs_and_a_lance_nothing() -> None:
    fernhollow, tarnlight = SHIPPED[0], SHIPPED[2]
    folded = pattern_of(fernhollow, LASER)

    # Two legs 0.42 wide and 1.87455 + 0.42 + 0.30 long, and 1.2 by 0.42 at the free end: 2.17942 + 0.504
    assert lost_mm2(folded, 1.2) == pytest.approx(2.68342, abs=1e-5)
    assert folded.cut is not None
    assert lost_mm2(folded, 1.2) == pytest.approx(area_mm2(folded.cut), abs=1e-9)  # what is cut round falls out
    assert lost_mm2(pattern_of(fernhollow, PRESS), 1.2) == 0.0
    # A slot 2.2 by 1.3 with round ends: pi/4 * 1.3² + 0.9 * 1.3
    assert lost_mm2(pattern_of(tarnlight, PRESS), 1.3) == pytest.approx(1.327323 + 1.17, abs=1e-6)


def test_an_open_slit_loses_its_kerf() -> None:
    cutter = cutter_with({"fold/slit": "centre-line", "fold/slit_width_mm": None, "kerf_mm": 0.2})
    pattern = pattern_of(STEEL, cutter)

    # The kerf runs along the open line, and half of one past each of its ends.
    assert pattern.cut is not None
    line_mm = float(shapely.LineString(pattern.cut.points_mm).length)
    assert lost_mm2(pattern, 1.2) == pytest.approx((line_mm + 0.2) * 0.2, abs=1e-9)


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_disc_mass_agrees_with_another_librarys_areas(movement: Movement) -> None:
    blank, rim_mm = movement.disc, movement.disc.outer_diameter_mm / 2
    steel = movement.model_copy(update={"disc": blank.model_copy(update={"density_kg_m3": 7850.0})})
    disc = disc_of(steel, [(1, 1.0), (2, 9.0)], LASER)
    gone: list[BaseGeometry] = [shapely.Point(0, 0).buffer(blank.centre_hole_mm / 2, quad_segs=2000)]
    for feature in blank.features:
        gone += [shapely.affinity.rotate(_cut_away(feature), angle, origin=(0, 0)) for angle in feature.angles_deg]
    metal = shapely.Point(0, 0).buffer(rim_mm, quad_segs=20000).difference(shapely.union_all(gone))

    making = making_of(disc, plan_of(disc, NOTHING))

    lost = 2 * lost_mm2(disc.pattern, movement.projection.width_mm)
    expected_kg = (metal.area - lost) * blank.thickness_mm * 7850e-9
    assert making.disc_mass_kg == pytest.approx(expected_kg, rel=1e-7)


def _cut_away(feature: Feature) -> BaseGeometry:
    """One feature at disc angle 0: a notch is cut to the rim and beyond, the others have round ends."""
    if feature.shape == "notch":
        floor_mm = feature.radius_mm - feature.width_mm / 2
        return shapely.box(floor_mm, -feature.length_mm / 2, floor_mm + 50, feature.length_mm / 2)
    end_mm = min(feature.width_mm, feature.length_mm) / 2
    out_mm, along_mm = feature.width_mm / 2 - end_mm, feature.length_mm / 2 - end_mm
    line = shapely.LineString([(feature.radius_mm - out_mm, -along_mm), (feature.radius_mm + out_mm, along_mm)])
    return line.buffer(end_mm, quad_segs=2000)


def test_a_hole_that_two_rows_share_is_taken_off_once() -> None:
    row = {"purpose": "drive", "shape": "hole", "radius_mm": 20, "first_at_deg": 90, "width_mm": 5, "length_mm": 5}
    again = row | {"purpose": "location", "first_at_deg": 450 - 360}

    one, two = (
        made(NOTHING, {}, movement_with({"disc/density_kg_m3": 7850, "disc/features": rows}))
        for rows in ([row], [row, again])
    )

    assert one.disc_mass_kg == two.disc_mass_kg


BULGE = st.just(0.0) | st.floats(0.01, 0.9) | st.floats(-0.9, -0.01)


@given(st.lists(BULGE, min_size=4, max_size=4))
def test_the_area_of_arcs_and_lines_agrees_with_another_librarys_arcs(bulges: list[float]) -> None:
    points = np.array([(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)])
    shape = Shape(points_mm=frozen_floats(points), bulges=frozen_floats(bulges), closed=True)
    ring: list[tuple[float, float]] = []
    for start, end, bulge in zip(points, np.roll(points, -1, axis=0), bulges, strict=True):
        ring.append((float(start[0]), float(start[1])))
        if bulge != 0:
            centre, from_rad, to_rad, radius = bulge_to_arc(start, end, bulge)
            steps = np.linspace(from_rad, from_rad + (to_rad - from_rad) % (2 * math.pi), 400)[1:-1]
            arc = [(centre.x + radius * math.cos(a), centre.y + radius * math.sin(a)) for a in steps]
            ring += arc if bulge > 0 else arc[::-1]

    # Chords of a 400th of an arc leave less than a thousandth of a square millimetre of 10 mm arcs.
    x, y = np.array(ring).T
    assert area_mm2(shape) == pytest.approx(float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y)) / 2, abs=5e-3)


def test_every_line_of_a_price_comes_from_a_stated_rate_and_the_total_is_their_sum() -> None:
    rates = {"currency": "EUR", "setup": "12.50", "per_minute": "1.80", "per_pierce": "0.015", "per_kg": "2.345"}

    making = priced(rates)

    # 23.1 s is 0.3850 min, * 1.80 = 0.693; 5 * 0.015 = 0.075, half to even 0.08;
    # pi/4 * 240² * 0.5 * 7850e-9 = 0.177562 kg, 0.1776 * 2.345 = 0.416472
    told = [(line.name, str(line.quantity), line.per, str(line.rate), str(line.amount)) for line in making.price_lines]
    assert told == [
        ("setup", "1", "disc", "12.50", "12.50"),
        ("machine time", "0.3850", "min", "1.80", "0.69"),
        ("pierces", "5", "pierce", "0.015", "0.08"),
        ("sheet", "0.1776", "kg", "2.345", "0.42"),
    ]
    assert making.total == Decimal("13.69")
    assert (making.currency, making.currency_decimals) == ("EUR", 2)
    assert making.not_stated == ()


def test_half_a_coin_is_rounded_to_the_even_coin() -> None:
    amounts = [priced({"currency": "EUR", "per_pierce": rate}).price_lines[0].amount for rate in ("0.025", "0.035")]

    assert amounts == [Decimal("0.12"), Decimal("0.18")]  # 0.125 and 0.175


@pytest.mark.parametrize(
    ("currency", "amount", "decimals"),
    # 0.3850 min * 1.80 = 0.693. ISO 4217, from memory: the yen has no smaller unit, Kuwait's dinar has thousandths.
    # XTS is the code the standard keeps for tests; it has no unit, so nothing is rounded.
    [("EUR", "0.69", 2), ("JPY", "1", 0), ("KWD", "0.693", 3), ("XTS", "0.693000", None)],
)
def test_amounts_are_rounded_to_the_smallest_unit_of_their_currency(
    currency: str, amount: str, decimals: int | None
) -> None:
    making = priced({"currency": currency, "per_minute": "1.80"})

    assert str(making.total) == amount
    assert making.currency_decimals == decimals


def test_hits_are_charged_by_the_hit() -> None:
    making = made(replace(NOTHING, hit_count=40), {"rates": {"currency": "EUR", "per_hit": "0.02"}}, base=PRESS)

    assert [(line.name, line.amount) for line in making.price_lines] == [("hits", Decimal("0.80"))]


def test_a_rate_whose_quantity_cannot_be_told_leaves_the_total_open() -> None:
    making = made(PUBLISHED_PATH, {"rates": {"currency": "EUR", "setup": "5", "per_minute": "1"}})

    assert [line.name for line in making.price_lines] == ["setup"]
    assert making.total is None
    assert "cutter.feeds.cut_mm_per_s" in making.not_stated


def test_rates_with_no_amount_and_no_rates_at_all_are_named() -> None:
    assert priced({"currency": "EUR"}).not_stated == ("cutter.rates.setup",)
    assert priced({"currency": "EUR"}).total is None
    assert made(PUBLISHED_PATH, {"feeds": PUBLISHED_FEEDS}).not_stated == ("cutter.rates",)


RATE = st.decimals("0", "999", places=4).map(str)


@given(st.sampled_from(["EUR", "JPY", "KWD"]), RATE, RATE, st.integers(0, 9999))
def test_the_total_is_the_exact_sum_and_each_line_within_half_a_coin(
    currency: str, setup: str, per_pierce: str, pierces: int
) -> None:
    rates = {"currency": currency, "setup": setup, "per_pierce": per_pierce}

    making = priced(rates, replace(NOTHING, pierce_count=pierces))

    assert making.total == sum(line.amount for line in making.price_lines)
    half_a_coin = Decimal(1).scaleb(-(making.currency_decimals or 0)) / 2
    for line in making.price_lines:
        assert abs(line.amount - line.quantity * line.rate) <= half_a_coin


def test_a_fold_is_told_with_the_angle_it_is_bent_to() -> None:
    bent_rad = made(NOTHING, {"fold/springback": {"opens_deg": 2}}).fold_to_rad

    assert bent_rad is not None
    assert math.degrees(bent_rad) == pytest.approx(92.0)


def test_a_springback_that_is_not_stated_is_named_where_something_is_folded_and_only_there() -> None:
    rigid = {"fold/springback": None}
    slots = movement_with({"disc/density_kg_m3": 7850}, SHIPPED[2].model_dump(mode="json", exclude_none=True))

    folded, slotted, lanced = made(NOTHING, rigid), made(NOTHING, rigid, slots), made(NOTHING, {}, base=PRESS)

    assert (folded.fold_to_rad, slotted.fold_to_rad, lanced.fold_to_rad) == (None, None, None)
    assert "cutter.fold.springback" in folded.not_stated
    assert "cutter.fold.springback" not in (*slotted.not_stated, *lanced.not_stated)


PRESS_IN_FULL = cutter_with({"press": {"stripping_share": 0.1}}, PRESS)
SHEARED = movement_with({"disc/density_kg_m3": 7850, "disc/shear_strength_n_per_mm2": 276})


def test_a_hit_takes_its_sheared_length_times_thickness_times_strength() -> None:
    making = made(NOTHING, {"rates": {"currency": "EUR", "setup": "1"}}, SHEARED, PRESS_IN_FULL)

    # L12 shears 2 * 2.3 + 1.6 = 6.2 mm of 0.5 mm sheet of 276 N/mm² (unipunch.com, material specifications:
    # low-carbon cold-rolled sheet): 855.6 N; the stripping takes a tenth of that.
    assert making.hit_force_n == pytest.approx(855.6)
    assert making.stripping_force_n == pytest.approx(85.56)
    assert making.press_force_n == pytest.approx(855.6 + 85.56)
    assert making.not_stated == ()


def test_what_no_figure_counts_on_a_press_is_named_and_a_laser_counts_all() -> None:
    # the plain movement's centre hole of 10 mm has no tool
    assert made(NOTHING, {}, STEEL, PRESS_IN_FULL).not_counted == (
        "centre hole 10 mm (no tool of that size)",
        "rim (left to blanking)",
        "first tool (in the press already)",
    )
    assert made(NOTHING, {"tools": []}, STEEL, PRESS_IN_FULL).not_counted == (
        "projections (no tool of that size)",
        "centre hole 10 mm (no tool of that size)",
        "rim (left to blanking)",
    )
    assert made(NOTHING, {}, STEEL).not_counted == ()


def test_every_tool_of_a_press_is_told_with_its_hits_and_their_force() -> None:
    row = {"purpose": "drive", "shape": "slot", "radius_mm": 20, "count": 2, "width_mm": 4, "length_mm": 9}
    blank = {"disc/shear_strength_n_per_mm2": 276, "disc/centre_hole_mm": 9, "disc/features": [row]}
    disc = disc_of(movement_with(blank), [(1, 1.0), (2, 2.0), (3, 3.0)], PRESS_IN_FULL)

    making = making_of(disc, plan_cuts(disc, title="Example", fingerprint="0123456789abcdef", not_good=None))

    # F = L * 0.5 mm * 276 N/mm², and a tenth for stripping: 2 * 5 + 4 pi; 9 pi; 2 * 2.3 + 1.6 mm
    forces_n = [138 * length_mm for length_mm in (10 + 4 * math.pi, 9 * math.pi, 6.2)]
    assert [(work.tool, work.hit_count) for work in making.tools] == [("O94", 2), ("R9", 1), ("L12", 3)]
    assert [work.hit_force_n for work in making.tools] == pytest.approx(forces_n)
    assert [work.press_force_n for work in making.tools] == pytest.approx([1.1 * force_n for force_n in forces_n])
    assert making.press_force_n == pytest.approx(1.1 * 138 * 9 * math.pi)
    assert (making.hit_count, making.tool_change_count) == (6, 2)
    # R9, L12 and their changes: 6 strikes of 0.3 s, two changes of 8 s
    assert making.time_parts.hit_s == pytest.approx(1.8)
    assert making.time_parts.tool_change_s == pytest.approx(16)
    assert [(line.name, line.quantity) for line in making.price_lines if line.name == "hits"] == [("hits", Decimal(6))]


def test_a_press_force_that_cannot_be_told_is_none_for_each_tool_and_the_disc() -> None:
    disc = disc_of(movement_with({"disc/centre_hole_mm": 9}), [(1, 1.0)], PRESS)

    making = making_of(disc, plan_cuts(disc, title="Example", fingerprint="0123456789abcdef", not_good=None))

    assert [(work.tool, work.hit_force_n, work.press_force_n) for work in making.tools] == [
        ("R9", None, None),
        ("L12", None, None),
    ]
    assert making.press_force_n is None
    assert "movement.disc.shear_strength_n_per_mm2" in making.not_stated


def test_a_force_that_cannot_be_told_is_named_on_a_press_and_not_missed_on_a_laser() -> None:
    soft = made(NOTHING, {}, STEEL, PRESS_IN_FULL)
    no_press = made(NOTHING, {"press": None}, SHEARED, PRESS)
    laser = made(NOTHING, {}, STEEL)

    assert (soft.hit_force_n, soft.stripping_force_n) == (None, None)
    assert soft.not_stated == ("movement.disc.shear_strength_n_per_mm2", "cutter.rates")
    assert no_press.hit_force_n == pytest.approx(855.6)
    assert (no_press.stripping_force_n, no_press.press_force_n) == (None, None)
    assert no_press.not_stated == ("cutter.press", "cutter.rates")
    assert (laser.hit_force_n, laser.not_stated) == (None, ("cutter.rates",))
