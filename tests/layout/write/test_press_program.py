"""The strikes of press.nc, run dry, beside what the drawings have."""

import re
from pathlib import Path

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from shapely import affinity

from layout.cut.plan import Outlines
from layout.documents import Movement, Settings
from layout.making import making_of
from layout.place.disc import Disc
from layout.walk import lay_out
from layout.write.press_program import write_press_program
from tests.layout.examples import cutter_with
from tests.layout.write.examples import FERNHOLLOW, MOSSBROOK, PRESS, TARNLIGHT, THREE_LANCES, disc_of
from tests.layout.write.press_runs import (
    DISCS,
    MANY,
    ONLY_LANCES,
    ROUNDING_MM,
    apart,
    drawn_hits_mm,
    drawn_holes,
    dry_run,
    every_disc,
    planned,
    struck_mm,
    struck_out,
)
from tests.layout.write.press_simulator import Alarm, DryPress
from tests.thorough import tried

DEMO_TUNE = Path(__file__).parents[3] / "service" / "demo" / "tune.mid"


@every_disc
def test_a_dry_run_strikes_where_the_drawing_has_its_hits(disc: Disc) -> None:
    plan = planned(disc)

    _, on_projections = apart(dry_run(write_press_program(plan, disc)), disc)

    struck = struck_mm(on_projections)
    drawn = drawn_hits_mm(plan, disc)
    assert len(struck) == len(drawn) == disc.projection_count
    apart_mm = np.hypot(*(struck[:, None, :] - drawn[None, :, :]).transpose(2, 0, 1))
    assert sorted(apart_mm.argmin(axis=1).tolist()) == list(range(len(drawn)))
    assert apart_mm.min(axis=1).max() < ROUNDING_MM


@pytest.mark.parametrize("movement", [FERNHOLLOW, MOSSBROOK, TARNLIGHT], ids=lambda movement: movement.id)
def test_the_program_of_the_demo_tune_strikes_the_hits_of_its_drawing(movement: Movement) -> None:
    disc = lay_out(DEMO_TUNE.read_bytes(), movement, PRESS, Settings()).disc
    plan = planned(disc)

    strikes = dry_run(write_press_program(plan, disc), backlash_deg=0.1)
    on_holes, on_projections = apart(strikes, disc)

    np.testing.assert_allclose(struck_mm(on_projections), drawn_hits_mm(plan, disc), atol=ROUNDING_MM, rtol=0)
    assert {disc.cutter.tools[one.tool - 1].tool for one in on_projections} == {plan.tool}
    assert strikes == on_holes + on_projections  # formed hits last
    assert len({round(one.actual_table_deg - one.table_deg, 9) for one in strikes}) == 1


@pytest.mark.parametrize(
    ("movement", "tools"),
    [(FERNHOLLOW, ["R5"] * 3 + ["R9"]), (MOSSBROOK, ["O94"] * 6 + ["R12"]), (TARNLIGHT, ["R3"] * 2 + ["R7"])],
    ids=lambda value: getattr(value, "id", ""),
)
def test_the_program_strikes_the_holes_of_the_drawing_tool_by_tool(movement: Movement, tools: list[str]) -> None:
    disc = disc_of(movement, PRESS, [(2, 40.0), (9, 120.0)])
    plan = planned(disc)

    on_holes, _ = apart(dry_run(write_press_program(plan, disc)), disc)

    assert [disc.cutter.tools[one.tool - 1].tool for one in on_holes] == tools
    drawn = drawn_holes(plan, disc)
    struck = [struck_out(one, disc) for one in on_holes]
    assert len(drawn) == len(struck)
    # a hole struck 0.001 mm aside of the drawn one leaves twice 0.001 times its width
    assert max(min(one.symmetric_difference(other).area for other in struck) for one in drawn) < 0.005
    assert shapely.union_all(drawn).symmetric_difference(shapely.union_all(struck)).area < 0.02


@pytest.mark.parametrize("name", ["a crowd", "many slots", "lances from the label side"])
def test_the_time_told_is_that_of_the_dry_run(name: str) -> None:
    disc = DISCS[name]
    plan = planned(disc)
    press = DryPress(strike_word="M20")

    press.run(write_press_program(plan, disc))

    parts = making_of(disc, plan).time_parts
    # the shipped press: 0.3 s a hit, 90 degrees and 150 mm a second, 8 s a change, the first tool in it already
    assert parts.hit_s == pytest.approx(0.3 * len(press.strikes))
    assert parts.tool_change_s == 8 * (press.tools_taken_up - 1) > 0
    assert parts.turn_s == pytest.approx(press.turned_deg / 90, abs=1e-3)
    assert parts.slide_s == pytest.approx(press.slid_mm / 150, abs=1e-3)


@every_disc
def test_strikes_follow_the_plan(disc: Disc) -> None:
    plan = planned(disc)

    strikes = dry_run(write_press_program(plan, disc))

    struck = struck_mm(strikes[-disc.projection_count :])
    np.testing.assert_allclose(struck, plan.at_mm, atol=ROUNDING_MM, rtol=0)


@every_disc
def test_the_tool_strikes_the_openings_of_the_record(disc: Disc) -> None:
    plan = planned(disc)
    program = write_press_program(plan, disc)
    [opened] = [one for one in plan.record.entities if isinstance(one, Outlines) and one.layer == "AFTER_FORMING"]
    # corners, and where round ends begin, are compared
    drawn = [shapely.MultiPoint(points) for points in opened.points_mm]

    _, on_projections = apart(dry_run(program), disc)
    for strike, opening in zip(on_projections, drawn, strict=True):
        tool = disc.cutter.tools[strike.tool - 1]
        half_length, half_width = tool.footprint_length_mm / 2, tool.footprint_width_mm / 2
        ends = half_length if tool.makes == "lance" else half_length - half_width  # where round ends begin
        # across the slide is the y axis of the table turned to 0
        corners = shapely.MultiPoint(
            [(strike.slide_mm + x, y) for x in (-half_width, half_width) for y in (-ends, ends)]
        )
        footprint = affinity.rotate(corners, strike.table_deg, origin=(0, 0))
        assert shapely.hausdorff_distance(footprint, opening) < 2 * ROUNDING_MM


@pytest.mark.parametrize("name", ["many lances", "slots from the label side", "a crowd"])
def test_backlash_moves_every_hit_alike(name: str) -> None:
    plan = planned(DISCS[name])

    strikes = dry_run(write_press_program(plan, DISCS[name]), backlash_deg=0.3)

    lag_deg = np.array([one.actual_table_deg - one.table_deg for one in strikes])
    assert len(set(lag_deg.round(9))) == 1


def test_a_crowd_of_hits_has_the_table_go_back_and_come_on_again() -> None:
    program = write_press_program(planned(DISCS["a crowd"]), DISCS["a crowd"]).decode()

    # those without a hit's number go below the angle
    formed = program[program.index("(TOOL L12)") :]
    assert len(re.findall(r"^N\d+ G0 X\S+ C\S+$", formed, flags=re.M)) > 1


def test_a_table_that_comes_from_either_side_shows_its_backlash() -> None:
    disc = disc_of(FERNHOLLOW, cutter_with({"press/turns_one_way": False}, PRESS), MANY)

    strikes = dry_run(write_press_program(planned(disc), disc), backlash_deg=0.3)

    lag_deg = np.array([one.actual_table_deg - one.table_deg for one in strikes])
    assert len(set(lag_deg.round(9))) == 2


@every_disc
def test_every_turn_of_the_table_is_less_than_half_a_turn(disc: Disc) -> None:
    press = DryPress(strike_word="M20")

    press.run(write_press_program(planned(disc), disc))

    assert 0 < press.greatest_turn_deg < 180


def test_a_way_back_that_is_longer_than_half_a_turn_with_its_take_up_is_made_in_two() -> None:
    # From 200 forward to 25 are 175 degrees back, and 30 to take up: 205.
    cutter = cutter_with({"press/take_up_deg": 30, "tools": ONLY_LANCES}, PRESS)
    disc = disc_of(MOSSBROOK, cutter, [(30, 200.0), (30, 25.0), (30, 20.0)])
    press = DryPress(strike_word="M20")

    strikes = press.run(write_press_program(planned(disc), disc))

    assert len(strikes) == 3
    assert 0 < press.greatest_turn_deg < 180


@given(
    st.lists(st.tuples(st.integers(1, 67), st.floats(0, 359.99)), min_size=1, max_size=8),
    st.sampled_from([0.001, 1, 29.9, 30]),
)
@settings(max_examples=tried(40), deadline=None)
def test_with_any_take_up_every_turn_is_less_than_half_and_each_hit_is_come_onto_from_one_side(
    placed: list[tuple[int, float]], take_up_deg: float
) -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press/take_up_deg": take_up_deg}, PRESS), placed)
    press = DryPress(strike_word="M20", backlash_deg=0.0005)

    strikes = press.run(write_press_program(planned(disc), disc))

    assert press.greatest_turn_deg < 180
    assert len({round(one.actual_table_deg - one.table_deg, 9) for one in strikes}) == 1


def test_two_holes_that_face_each_other_are_gone_to_by_a_move_in_two() -> None:
    # 180 degrees: a control that takes the shortest way could go either way
    disc = disc_of(TARNLIGHT, PRESS, [])

    program = write_press_program(planned(disc), disc).decode()

    turns_deg = [float(angle) for angle in re.findall(r"^N.* C(\S+)", program, flags=re.M)]
    assert np.abs(np.diff(turns_deg)).tolist() == [1.0, 90.0, 90.0, 0.0]


def test_the_centre_hole_turns_nothing() -> None:
    disc = disc_of(TARNLIGHT, PRESS, [(2, 45.0)])

    strikes = dry_run(write_press_program(planned(disc), disc))

    assert [one.slide_mm for one in strikes][:3] == [11.0, 11.0, 0.0]
    assert strikes[2].table_deg == strikes[3].table_deg  # the first slot's


# What the dry run must see, so that the tests above can fail.


def changed(program: bytes, pattern: str, by: str) -> bytes:
    text, count = re.subn(pattern, by, program.decode(), count=1, flags=re.M)
    assert count == 1
    return text.encode()


@pytest.fixture
def program() -> bytes:
    return write_press_program(planned(THREE_LANCES), THREE_LANCES)


def test_the_dry_run_sees_a_missing_strike(program: bytes) -> None:
    assert len(dry_run(changed(program, r"^N\d+ M20\n", ""))) == 9


def test_the_dry_run_sees_another_tool(program: bytes) -> None:
    tools = [{one.tool for one in dry_run(each)} for each in (program, changed(program, "T2", "T1"))]

    assert tools == [{9, 8, 2}, {9, 8, 1}]


def test_the_dry_run_sees_a_place_that_is_off(program: bytes) -> None:
    moved = changed(program, r"X(\d+)\.(\d)(\d+ C\S+ \(HIT 2)", r"X\1.5\3")

    apart_mm = np.hypot(*(struck_mm(dry_run(program)) - struck_mm(dry_run(moved))).T)

    assert (apart_mm > 10 * ROUNDING_MM).tolist() == [False] * 7 + [False, True, False]


@pytest.mark.parametrize(
    ("pattern", "by", "alarm"),
    [
        (r"^N\d+ M30\n", "", "does not end"),
        (r"^N1 G71 G90\n", "", "without G0, millimetres and G90"),
        (r" M6", "", "without a tool"),
        (r"G0", "G1", "does not know G1"),
        (r"\(HIT 1\)", "(HIT 1", "cannot read"),
        (r"\(HOLE 3\)", "(HOLE 3", "cannot read"),
        (r"^N4 ", "N2 ", "no rising N"),
        (r"^%\n\Z", "", "between two lines"),
        (r"X(\d+)\.\d+", r"X\1", "does not know X"),
    ],
)
def test_the_dry_run_stops_at_what_is_no_program(program: bytes, pattern: str, by: str, alarm: str) -> None:
    with pytest.raises(Alarm, match=alarm):
        dry_run(changed(program, pattern, by))
