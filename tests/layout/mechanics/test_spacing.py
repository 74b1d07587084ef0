import math

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import Cutter, Movement
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import Spacing, core_geometries, spacing_of, webs_mm
from layout.mechanics.turning import turning_of
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, movement_with

FERNHOLLOW, MOSSBROOK, TARNLIGHT = SHIPPED


def spacing(movement: Movement, cutter: Cutter = LASER) -> Spacing:
    return spacing_of(movement, turning_of(movement), pattern_of(movement, cutter), cutter.min_web_mm)


@pytest.mark.parametrize(
    ("movement", "inner_s", "outer_s"),
    # arc / (2 pi sqrt(r² - d²)) * T: 3.2/(2 pi 36) 66; 3.2/(2 pi 114.6) 66; 3.5/(2 pi sqrt(45² - 1.5²)) 90; ...
    [(FERNHOLLOW, 0.9337, 0.2933), (MOSSBROOK, 1.1147, 0.2387), (TARNLIGHT, 1.0186, 0.3801)],
    ids=lambda value: getattr(value, "id", ""),
)
def test_the_star_wheel_sets_the_least_repeat_of_the_shipped_movements(
    movement: Movement, inner_s: float, outer_s: float
) -> None:
    least_s = spacing(movement).least_rad * movement.revolution_s / (2 * math.pi)

    assert least_s[0] == pytest.approx(inner_s, abs=5e-5)
    assert least_s[-1] == pytest.approx(outer_s, abs=5e-5)


def test_the_damper_sets_the_repeat_where_it_is_slow() -> None:
    movement = movement_with({"damper_recovery_s": 2.0})

    # 2 s of a 60 s turn: 12 degrees on every track
    assert spacing(movement).least_rad == pytest.approx([math.radians(12)] * 3)


def test_the_damper_is_judged_at_the_fastest_turn() -> None:
    movement = movement_with({"damper_recovery_s": 2.0, "fastest_revolution_s": 48})

    # 2 s of a 48 s turn: 15 degrees, though the stated turn of 60 s would ask for 12
    assert spacing(movement).damper_rad == pytest.approx([math.radians(15)] * 3)


def test_an_undamped_tooth_has_no_damper_to_wait_for() -> None:
    movement = movement_with({"damper_recovery_s": 2.0, "teeth/0/damped": False})

    # 3.2 mm on radius 50
    assert spacing(movement).least_rad[0] == pytest.approx(3.2 / 50)


def test_the_web_sets_the_repeat_where_the_metal_must_be_wide() -> None:
    movement, cutter = movement_with(), cutter_with({"min_web_mm": 2.0})
    here = spacing(movement, cutter)
    turning, pattern = turning_of(movement), pattern_of(movement, cutter)
    first = np.column_stack([turning.radius_mm, np.zeros(3)])

    webs = webs_mm(turning, pattern, first, np.column_stack([turning.radius_mm, here.least_rad]))

    assert (here.web_rad > here.wheel_rad).all()
    assert webs == pytest.approx([2.0, 2.0, 2.0], abs=1e-9)


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_neighbouring_tracks_of_the_shipped_movements_can_sound_together(movement: Movement, cutter: Cutter) -> None:
    assert spacing(movement, cutter).between == ()


@pytest.mark.parametrize(
    ("movement", "thinnest_mm"),
    # worked out by hand when the movements were drawn up: the inner tracks, at the angle where corners pass
    [(FERNHOLLOW, 0.532), (MOSSBROOK, 0.514), (TARNLIGHT, 0.750)],
    ids=lambda value: getattr(value, "id", ""),
)
def test_the_thinnest_web_between_neighbours_at_any_angle(movement: Movement, thinnest_mm: float) -> None:
    turning, pattern = turning_of(movement), pattern_of(movement, LASER)
    inner_mm, outer_mm = turning.radius_mm[0], turning.radius_mm[1]
    angles = np.linspace(-3.5 / inner_mm, 3.5 / inner_mm, 2001)
    first = np.column_stack([np.full(2001, inner_mm), np.zeros(2001)])

    webs = webs_mm(turning, pattern, first, np.column_stack([np.full(2001, outer_mm), angles]))

    assert webs.min() == pytest.approx(thinnest_mm, abs=5e-4)


@given(
    pitch_mm=st.floats(2.1, 3.5),
    radius_mm=st.floats(20, 100),
    offset_deg=st.floats(-8, 8),
    turns=st.sampled_from(["clockwise", "anticlockwise"]),
)
def test_two_tracks_are_too_near_exactly_within_the_stated_angles(
    pitch_mm: float, radius_mm: float, offset_deg: float, turns: str
) -> None:
    tracks = [{"track": 1, "radius_mm": radius_mm}, {"track": 2, "radius_mm": radius_mm + pitch_mm}]
    teeth = [{"tooth": number, "track": number, "pitch": "C5"} for number in (1, 2)]
    movement = movement_with({"tracks": tracks, "teeth": teeth, "turns": turns})
    turning, pattern = turning_of(movement), pattern_of(movement, LASER)
    pairs = spacing(movement).between

    apart_rad = math.radians(offset_deg)
    web = webs_mm(turning, pattern, np.array([[radius_mm, 1.0]]), np.array([[radius_mm + pitch_mm, 1.0 + apart_rad]]))[
        0
    ]

    inside = any(pair.from_rad < apart_rad < pair.to_rad for pair in pairs)
    # A stretch of angle shorter than the scan's step may be passed over; its web is then within 0.5 um of the limit.
    assert inside == (web < LASER.min_web_mm) or abs(web - LASER.min_web_mm) < 5e-4


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_lines_round_openings_are_exactly_as_far_apart_as_the_openings(movement: Movement, cutter: Cutter) -> None:
    turning, pattern = turning_of(movement), pattern_of(movement, cutter)
    chance = np.random.default_rng(7)
    radius_mm = np.stack([turning.radius_mm[place : place + 2] for place in chance.integers(0, 6, 20_000)])
    angle_rad = chance.uniform(-4, 4, 20_000) / radius_mm[:, 0]
    first, second = np.column_stack([radius_mm[:, 0], 0 * angle_rad]), np.column_stack([radius_mm[:, 1], angle_rad])

    webs = webs_mm(turning, pattern, first, second)

    one, two = (
        core_geometries(on_disc_mm(pattern.core_points_mm, r_mm, a_rad, turning.direction, pattern.strike_u_mm))
        for r_mm, a_rad in (first.T, second.T)
    )
    assert (webs == shapely.distance(one, two) - 2 * pattern.core_round_mm).all()


@pytest.mark.parametrize("min_web_mm", [0.3, 0.52, 0.54, 1.2, 3.0])
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_tracks_not_looked_at_have_web_enough_at_every_angle(movement: Movement, min_web_mm: float) -> None:
    turning, pattern = turning_of(movement), pattern_of(movement, LASER)
    here = spacing_of(movement, turning, pattern, min_web_mm)
    too_near = {(pair.inner_index, pair.outer_index) for pair in here.between}
    angle_rad = np.linspace(-0.3, 0.3, 1001)

    for inner, outer in zip(range(8), range(1, 9), strict=True):
        first, second = (turning.radius_mm[[one]].repeat(1001) for one in (inner, outer))
        webs = webs_mm(turning, pattern, np.column_stack([first, 0 * angle_rad]), np.column_stack([second, angle_rad]))

        # A stretch shorter than the step may be passed over by the one or the other, within 0.5 um of the limit.
        assert ((inner, outer) in too_near) == (webs.min() < min_web_mm) or abs(webs.min() - min_web_mm) < 5e-4


def test_the_widest_web_a_cutter_may_ask_for_looks_at_six_neighbours_only() -> None:
    here = spacing(MOSSBROOK, cutter_with({"min_web_mm": 50}))

    apart = {pair.outer_index - pair.inner_index for pair in here.between}
    assert apart == {1, 2, 3, 4, 5, 6}


def test_openings_too_near_even_on_opposite_sides_are_too_near_all_round() -> None:
    # 10 mm one way and 12 the other: 22 mm apart at most, less than 50.
    movement = movement_with({"tracks/0/radius_mm": 10, "tracks/1/radius_mm": 12, "disc/centre_hole_mm": 2})

    here = spacing(movement, cutter_with({"min_web_mm": 50}))

    [pair] = here.between
    assert (pair.inner_index, pair.outer_index) == (0, 1)
    assert (pair.from_rad, pair.to_rad) == pytest.approx((-math.pi, math.pi))
    assert here.least_rad[:2].tolist() == pytest.approx([math.pi, math.pi])


def test_the_reason_of_a_repeat_is_the_first_thing_that_forbids_it() -> None:
    movement = movement_with({"damper_recovery_s": 2.0})
    here = spacing(movement, cutter_with({"min_web_mm": 12.0}))

    # on radius 50 the wheel needs 3.2 mm = 3.67 deg, the damper 12 deg, the web more than 12 mm = 13.75 deg
    assert here.reason(0, math.radians(3)) == "wheel-still-stepping"
    assert here.reason(0, math.radians(11)) == "damper-not-recovered"
    assert here.reason(0, math.radians(13)) == "web"
