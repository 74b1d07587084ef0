"""The least metal left: discs worked out by hand, and a slow opponent that samples rays and rings with shapely."""

import math
from dataclasses import replace

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.documents import Cutter, Movement
from layout.mechanics.cut_away import rays_of, rings_of
from layout.mechanics.most_covered import SLIVER
from layout.mechanics.net_section import LINE_GRAIN_MM, RING_GRAIN_RAD, MetalLeft, cut_away_of, metal_left
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.thorough import tried

# The press's lance L12 leaves a rectangle, 1.6 across and 2.3 along. It strikes 0.7 behind the working edge, in the
# rectangle's middle, and stands square to the radius there: at √(r² − 0.7²) from the centre, asin(0.7/r) behind.
STRIKE_MM, HALF_LENGTH_MM, HALF_MM = 0.7, 1.15, 0.8
FULL_TURN_RAD = 2 * math.pi


def left_on(disc: Disc) -> MetalLeft:
    features = disc.movement.disc.features
    left = metal_left(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad, features)
    assert left is not None
    return left


def widest_angle(radius_mm: float) -> tuple[float, float]:
    """The widest a lanced opening is on a ring, and that ring: the innermost that is cut on both short sides."""
    ring_mm = math.hypot(stands_mm(radius_mm) - HALF_MM, HALF_LENGTH_MM)
    return 2 * math.asin(HALF_LENGTH_MM / ring_mm), ring_mm


def stands_mm(radius_mm: float) -> float:
    return math.sqrt(radius_mm**2 - STRIKE_MM**2)


def corner_lean_rad(radius_mm: float) -> float:
    """From the ray through the middle of an opening to that through an outer corner."""
    return math.atan(HALF_LENGTH_MM / (stands_mm(radius_mm) + HALF_MM))


FROM_MM = stands_mm(50) - HALF_MM  # the band of all tracks, 50 to 100 mm: from the innermost long side
TO_MM = math.hypot(stands_mm(100) + HALF_MM, HALF_LENGTH_MM)  # to an outermost corner


def test_one_opening_is_cut_most_through_its_outer_far_corner() -> None:
    left = left_on(disc_of(PLAIN, [(1, 10.0)], PRESS))

    assert (left.from_mm, left.to_mm) == pytest.approx((FROM_MM, TO_MM), abs=1e-9)
    # a ray through an outer corner leans most of those that cross both long sides: 1.6 · sec of it
    lean = corner_lean_rad(50)
    assert left.line_mm == pytest.approx(TO_MM - FROM_MM - 1.6 / math.cos(lean), abs=LINE_GRAIN_MM)
    assert left.line_share == pytest.approx(1 - 1.6004 / 51.609, abs=1e-4)
    # the working edge lies at 90 degrees (30 + 6 · 10); the disc turns clockwise, so behind it is anticlockwise
    middle_rad = math.pi / 2 + math.asin(STRIKE_MM / 50)
    assert abs(left.line_angle_rad - middle_rad) == pytest.approx(lean, abs=1e-6)
    widest_rad, ring_mm = widest_angle(50.0)
    assert left.ring_share == pytest.approx(1 - widest_rad / FULL_TURN_RAD, abs=RING_GRAIN_RAD)
    assert left.ring_radius_mm == pytest.approx(ring_mm, abs=1e-6)


def test_a_ring_of_equal_openings_leaves_a_turn_less_all_of_them() -> None:
    # 60 openings on track 2 (60 mm), one a second: 60 · 2.3/59.2 is about 2.33 of the 6.28 of a turn
    left = left_on(disc_of(PLAIN, [(2, float(second)) for second in range(60)], PRESS))

    widest_rad, ring_mm = widest_angle(60.0)
    assert left.ring_share == pytest.approx(1 - 60 * widest_rad / FULL_TURN_RAD, abs=60 * RING_GRAIN_RAD)
    assert left.ring_share == pytest.approx(1 - 60 * 2.3 / 59.23 / FULL_TURN_RAD, abs=1e-3)
    assert left.ring_radius_mm == pytest.approx(ring_mm, abs=1e-6)


def test_a_row_of_openings_on_one_ray_is_cut_by_all_of_them() -> None:
    left = left_on(disc_of(PLAIN, [(1, 10.0), (2, 10.0), (3, 10.0), (1, 30.0)], PRESS))

    # The working edges lie on one ray, the middles asin(0.7/r) behind it. Of the rays in all three openings that
    # through the outermost one's corner ahead leans most from the others' middles.
    middles_rad = [math.pi / 2 + math.asin(STRIKE_MM / radius_mm) for radius_mm in (50, 60, 100)]
    ray_rad = middles_rad[2] - corner_lean_rad(100)
    cut_mm = sum(1.6 / math.cos(ray_rad - middle_rad) for middle_rad in middles_rad)
    assert left.line_mm == pytest.approx(TO_MM - FROM_MM - cut_mm, abs=LINE_GRAIN_MM)
    assert left.line_angle_rad == pytest.approx(ray_rad, abs=1e-6)
    # two openings on track 1 are the most on any ring
    assert left.ring_share == pytest.approx(1 - 2 * widest_angle(50.0)[0] / FULL_TURN_RAD, abs=2 * RING_GRAIN_RAD)


def test_openings_on_top_of_each_other_are_counted_once() -> None:
    alone = left_on(disc_of(PLAIN, [(1, 10.0)], PRESS))
    doubled = left_on(disc_of(PLAIN, [(1, 10.0), (1, 10.0), (1, 10.0)], PRESS))

    assert doubled.line_mm == pytest.approx(alone.line_mm, abs=LINE_GRAIN_MM)
    assert doubled.ring_share == pytest.approx(alone.ring_share, abs=RING_GRAIN_RAD)


def test_a_ring_cut_right_round_leaves_nothing() -> None:
    # at 50 mm an opening of 2.3 mm takes 2.6 degrees: 0.3 s apart, 1.8 degrees, they run into each other
    left = left_on(disc_of(PLAIN, [(1, 0.3 * place) for place in range(200)], PRESS))

    assert left.ring_share == 0.0


def test_openings_across_the_start_of_the_turn_are_seen_whole() -> None:
    # At 55.05 s the working edges lie 0.3 degrees past the start of the turn. The ray told, through the outer opening's
    # corner ahead, lies past it too, but in the inner opening, which begins before it.
    left = left_on(disc_of(PLAIN, [(1, 55.05), (3, 55.05)], PRESS))
    elsewhere = left_on(disc_of(PLAIN, [(1, 10.0), (3, 10.0)], PRESS))

    assert left.line_mm == pytest.approx(elsewhere.line_mm, abs=LINE_GRAIN_MM)
    assert left.ring_share == pytest.approx(elsewhere.ring_share, abs=RING_GRAIN_RAD)
    ray_rad = math.radians(0.3) + math.asin(STRIKE_MM / 100) - corner_lean_rad(100)
    assert 0 < left.line_angle_rad == pytest.approx(ray_rad, abs=1e-6)
    assert math.radians(0.3) + math.asin(STRIKE_MM / 50) - corner_lean_rad(50) < 0


def drilled(**feature: object) -> MetalLeft:
    """A chord on tracks 1 and 2 at 90 degrees, and a feature of the blank at 200."""
    row = {"purpose": "drive", "first_at_deg": 200, "count": 1} | feature
    return left_on(disc_of(movement_with({"disc/features": [row]}), [(1, 10.0), (2, 10.0)], PRESS))


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=["laser", "press"])
@pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])
@pytest.mark.parametrize("just_rad", [-0.001, 0.001])
def test_the_weakest_line_is_found_just_before_and_just_after_the_start_of_the_turn(
    cutter: Cutter, turns: str, just_rad: float
) -> None:
    # Three openings near one ray; which of its sides they lie on depends on the way the disc turns.
    disc = disc_of(movement_with({"turns": turns}), [(1, 10.0), (2, 10.3), (3, 10.5)], cutter)
    weakest = left_on(disc)

    edges_rad = (disc.edge_angle_rad - weakest.line_angle_rad + just_rad) % FULL_TURN_RAD
    turned = left_on(replace(disc, edge_angle_rad=edges_rad))

    assert turned.line_mm == pytest.approx(weakest.line_mm, abs=LINE_GRAIN_MM)
    off_rad = (turned.line_angle_rad - just_rad + math.pi) % FULL_TURN_RAD - math.pi
    assert off_rad == pytest.approx(0.0, abs=1e-4)


def test_a_hole_of_the_blank_in_the_band_is_missing_too() -> None:
    left = drilled(shape="hole", radius_mm=55, width_mm=4, length_mm=4)

    # a ray through its centre loses 4 mm, more than the chord's 3.2; a ring at √(55² − 2²) loses 2·asin(2/55)
    assert left.line_mm == pytest.approx(left.to_mm - left.from_mm - 4, abs=LINE_GRAIN_MM)
    assert left.line_angle_rad == pytest.approx(math.radians(200), abs=1e-3)
    assert left.ring_share == pytest.approx(1 - 2 * math.asin(2 / 55) / FULL_TURN_RAD, abs=RING_GRAIN_RAD)
    assert left.ring_radius_mm == pytest.approx(math.sqrt(55**2 - 2**2), abs=1e-3)


def test_of_a_hole_only_what_lies_in_the_band_counts() -> None:
    # its centre lies on the inner edge of the band: of 8 mm the outer 4 count
    left = drilled(shape="hole", radius_mm=FROM_MM, width_mm=8, length_mm=8)

    assert left.from_mm == pytest.approx(FROM_MM, abs=1e-9)
    assert left.line_mm == pytest.approx(left.to_mm - left.from_mm - 4, abs=LINE_GRAIN_MM)


def test_a_hole_that_just_reaches_into_the_band_is_missing_too() -> None:
    # Its edge lies 0.5 inside the band. It narrows outwards, so the weakest ring is the first that is cut on both short
    # sides of the opening on track 1.
    middle_mm = FROM_MM - 3.5
    left = drilled(shape="hole", radius_mm=middle_mm, width_mm=8, length_mm=8)

    opening_rad, ring_mm = widest_angle(50.0)
    hole_rad = 2 * math.acos((ring_mm**2 + middle_mm**2 - 4**2) / (2 * ring_mm * middle_mm))
    assert left.ring_share == pytest.approx(1 - (opening_rad + hole_rad) / FULL_TURN_RAD, abs=2 * RING_GRAIN_RAD)
    assert left.ring_radius_mm == pytest.approx(ring_mm, abs=1e-6)


@pytest.mark.parametrize(("width_mm", "length_mm"), [(4, 9), (9, 4)])
def test_a_slot_of_the_blank_takes_its_width_of_a_ray(width_mm: float, length_mm: float) -> None:
    left = drilled(shape="slot", radius_mm=55, width_mm=width_mm, length_mm=length_mm)

    # across the radius 9 it takes 9; along the travel its flat sides are left at 2.5 past the middle, where a ray
    # leans atan(2.5/57): 4 · sec of it, and beyond, on the round ends, less
    most_mm = 9 if width_mm == 9 else 4 / math.cos(math.atan(2.5 / 57))
    assert left.to_mm - left.from_mm - left.line_mm == pytest.approx(most_mm, abs=1.5 * LINE_GRAIN_MM)


def test_a_notch_takes_what_of_it_lies_in_the_band() -> None:
    # 20 mm long and from 80 mm outwards past the rim: a ray through its middle loses all from there to the band's end,
    # the ring through both its inner corners most of itself.
    left = drilled(shape="notch", radius_mm=105, width_mm=50, length_mm=20)

    assert left.to_mm - left.from_mm - left.line_mm == pytest.approx(TO_MM - 80, abs=LINE_GRAIN_MM)
    assert left.line_angle_rad == pytest.approx(math.radians(200), abs=1e-3)
    assert left.ring_share == pytest.approx(1 - 2 * math.atan(10 / 80) / FULL_TURN_RAD, abs=RING_GRAIN_RAD)
    assert left.ring_radius_mm == pytest.approx(math.hypot(80, 10), abs=1e-3)


def test_a_notch_that_ends_short_of_the_band_takes_nothing() -> None:
    left = drilled(shape="notch", radius_mm=120, width_mm=20, length_mm=4)
    alone = left_on(disc_of(PLAIN, [(1, 10.0), (2, 10.0)], PRESS))

    assert left == alone


def test_a_disc_without_openings_has_no_net_section() -> None:
    disc = disc_of(PLAIN, [])

    assert metal_left(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad) is None


def test_an_opening_over_the_centre_has_no_net_section() -> None:
    movement = movement_with({"tracks/0/radius_mm": 0.7, "disc/centre_hole_mm": 0.5})
    disc = disc_of(movement, [(1, 10.0), (2, 10.0)], PRESS)

    assert metal_left(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad) is None


def test_corners_in_one_place_count_as_one() -> None:
    # a relief of a billionth of a millimetre has its corners where the channel ends
    fold = {"fold/relief_mm": 0.0, "fold/slit_width_mm": 0.42}
    none = left_on(disc_of(PLAIN, [(1, 10.0)], cutter_with(fold)))
    tiny = left_on(disc_of(PLAIN, [(1, 10.0)], cutter_with(fold | {"fold/relief_mm": 1e-12})))

    assert tiny.line_mm == pytest.approx(none.line_mm, abs=LINE_GRAIN_MM)
    assert tiny.ring_share == pytest.approx(none.ring_share, abs=RING_GRAIN_RAD)


def outline(disc: Disc, place: int) -> shapely.Polygon:
    """One opening as shapely draws it; round ends in 64 steps a quarter, wrong by 0.65 · (1 − cos 0.7°) = 0.05 µm."""
    if disc.pattern.making == "slot":
        core = disc.placed_mm(disc.pattern.core_points_mm)[place]
        return shapely.LineString(core).buffer(disc.pattern.core_round_mm, quad_segs=64)
    return shapely.Polygon(disc.placed_mm(disc.pattern.opening.points_mm)[place])


def sampled_line_mm(whole: shapely.Geometry, angle_rad: float, band_mm: tuple[float, float]) -> float:
    along = np.array([math.cos(angle_rad), math.sin(angle_rad)])
    ray = shapely.LineString([band_mm[0] * along, band_mm[1] * along])
    return float(ray.length - ray.intersection(whole).length)


def sampled_ring_share(whole: shapely.Geometry, radius_mm: float, count: int) -> float:
    at = (np.arange(count) + 0.5) * FULL_TURN_RAD / count
    return 1 - float(np.mean(shapely.contains_xy(whole, radius_mm * np.cos(at), radius_mm * np.sin(at))))


TUNES = st.lists(st.tuples(st.integers(1, 8), st.floats(0, 4)), min_size=1, max_size=12)
WIDE_RELIEF = cutter_with({"fold/relief_width_mm": 0.6, "fold/fold_side": "ahead"})


@settings(max_examples=tried(40), deadline=None)
@given(
    movement=st.sampled_from(SHIPPED),
    cutter=st.sampled_from([LASER, PRESS, WIDE_RELIEF]),
    plucks=TUNES,
    rays=st.lists(st.floats(-0.2, 0.8), min_size=30, max_size=30),
)
def test_no_sampled_ray_or_ring_leaves_less_and_those_told_leave_as_much(
    movement: Movement, cutter: Cutter, plucks: list[tuple[int, float]], rays: list[float]
) -> None:
    disc = disc_of(movement, plucks, cutter)

    left = left_on(disc)

    whole = shapely.union_all([outline(disc, place) for place in range(len(plucks))])
    shapely.prepare(whole)
    corners = shapely.get_coordinates(whole)
    band_mm = (left.from_mm, left.to_mm)
    reach_mm = np.hypot(*corners.T)
    assert left.from_mm - 1e-4 <= reach_mm.min() <= reach_mm.max() <= left.to_mm + 1e-4
    # rays near every corner, and anywhere about the openings
    first_rad = float(disc.edge_angle_rad[0])
    near = np.arctan2(corners[:, 1], corners[:, 0])[::7]
    asked = [*(near - 1e-6), *(near + 1e-6), *(first_rad + ray for ray in rays)]
    assert min(sampled_line_mm(whole, angle, band_mm) for angle in asked) >= left.line_mm - 2 * LINE_GRAIN_MM
    # at the place told the cover may end, so it is met on one of the two sides
    sides = [sampled_line_mm(whole, left.line_angle_rad + step, band_mm) for step in (-1e-8, 0.0, 1e-8)]
    assert min(sides) == pytest.approx(left.line_mm, abs=2 * LINE_GRAIN_MM)
    steps = 20_000
    edge_share = 2 * len(plucks) / steps  # each edge may fall either side of a step
    rings_mm = [*np.hypot(*corners.T)[::11], *np.linspace(*band_mm, 12)]
    assert min(sampled_ring_share(whole, ring, steps) for ring in rings_mm) >= left.ring_share - edge_share
    told = [sampled_ring_share(whole, left.ring_radius_mm + step, steps) for step in (-1e-7, 1e-7)]
    assert min(told) == pytest.approx(left.ring_share, abs=edge_share)


@settings(max_examples=tried(30), deadline=None)
@given(movement=st.sampled_from(SHIPPED), cutter=st.sampled_from([LASER, PRESS]), plucks=TUNES)
def test_no_stretch_covers_more_than_it_is_said_to_at_most(
    movement: Movement, cutter: Cutter, plucks: list[tuple[int, float]]
) -> None:
    disc = disc_of(movement, plucks, cutter)
    cut_away = cut_away_of(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad, ())
    assert cut_away is not None
    for cover in (rays_of(cut_away), rings_of(cut_away)):
        stretch, most = cover.stretches()
        wide = stretch[:, 1] - stretch[:, 0] > SLIVER

        inside = cover.over(stretch[wide]).bounds(0.0)

        assert (inside <= most[wide] + 1e-9).all()
        assert most.max() > 0


@settings(max_examples=tried(30), deadline=None)
@given(movement=st.sampled_from(SHIPPED), plucks=TUNES, turn_rad=st.floats(0, 6))
def test_turning_the_disc_changes_neither_minimum(
    movement: Movement, plucks: list[tuple[int, float]], turn_rad: float
) -> None:
    disc = disc_of(movement, plucks)
    turned = replace(disc, edge_angle_rad=np.mod(disc.edge_angle_rad + turn_rad, FULL_TURN_RAD))

    before, after = left_on(disc), left_on(turned)

    assert after.line_mm == pytest.approx(before.line_mm, abs=LINE_GRAIN_MM)
    assert after.ring_share == pytest.approx(before.ring_share, abs=RING_GRAIN_RAD)


@settings(max_examples=tried(30), deadline=None)
@given(plucks=TUNES, more=st.tuples(st.integers(1, 8), st.floats(0, 4)))
def test_one_more_opening_in_the_band_never_leaves_more(
    plucks: list[tuple[int, float]], more: tuple[int, float]
) -> None:
    ends = [(1, 50.0), (8, 55.0)]  # they hold the band where it is
    before = left_on(disc_of(SHIPPED[0], [*ends, *plucks]))
    after = left_on(disc_of(SHIPPED[0], [*ends, *plucks, more]))

    assert after.line_mm <= before.line_mm + LINE_GRAIN_MM
    assert after.ring_share <= before.ring_share + RING_GRAIN_RAD
