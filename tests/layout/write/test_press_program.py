import io
import math
import re
from functools import cache
from pathlib import Path

import ezdxf.filemanagement
import numpy as np
import pytest
import shapely
from ezdxf.entities.arc import Arc
from ezdxf.entities.circle import Circle
from ezdxf.entities.lwpolyline import LWPolyline
from hypothesis import given, settings
from hypothesis import strategies as st
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.cut import plan_cuts
from layout.cut.plan import CutPlan, Outlines
from layout.documents import Movement, Settings
from layout.mechanics.arrays import FloatArray
from layout.place.disc import Disc
from layout.walk import lay_out
from layout.write import write_dxf
from layout.write.press_program import write_press_program
from tests.layout.examples import cutter_with
from tests.layout.write.examples import (
    FERNHOLLOW,
    FINGERPRINT,
    LASER,
    MOSSBROOK,
    ONE_FOLD,
    PRESS,
    SLOTS_ON_A_PRESS,
    TARNLIGHT,
    THREE_LANCES,
    disc_of,
)
from tests.layout.write.press_simulator import Alarm, DryPress, Strike

DEMO_TUNE = Path(__file__).parents[3] / "service" / "demo" / "tune.mid"
# Words are written to 0.0001 mm and 0.0001°: half of both at the rim of the largest disc, 210 mm, and the drawing's own
ROUNDING_MM = 0.5e-4 + 210 * math.radians(0.5e-4) + 1e-6
# as the label side and the star side see them, clockwise and anticlockwise
LABEL_SIDE_PRESS = cutter_with({"drawn_from": "label-side"}, PRESS)
# (track, degrees), with every track from 1 to 17 and places all round
MANY = [(1 + place % 17, (place * 137.508) % 360) for place in range(60)]
DISCS = {
    "three lances": THREE_LANCES,
    "slots": SLOTS_ON_A_PRESS,
    "many lances": disc_of(FERNHOLLOW, PRESS, MANY),
    "many slots": disc_of(TARNLIGHT, PRESS, MANY),
    "a crowd": disc_of(FERNHOLLOW, PRESS, [(1 + 3 * (place % 8), place * 0.7) for place in range(40)]),
    "slots from the label side": disc_of(TARNLIGHT, LABEL_SIDE_PRESS, MANY),
    "lances from the label side": disc_of(MOSSBROOK, LABEL_SIDE_PRESS, [(1, 20.0), (33, 200.0), (67, 270.0)]),
}
every_disc = pytest.mark.parametrize("disc", DISCS.values(), ids=DISCS.keys())


ONLY_LANCES = [tool.model_dump(mode="json") for tool in PRESS.tools if tool.makes != "hole"]


@cache
def planned(disc: Disc, *, title: str = "Example", not_good: str | None = None) -> CutPlan:
    return plan_cuts(disc, title=title, fingerprint=FINGERPRINT, not_good=not_good)


def dry_run(program: bytes, *, backlash_deg: float = 0.0, strike_word: str = "M20") -> list[Strike]:
    return DryPress(strike_word=strike_word, backlash_deg=backlash_deg).run(program)


def struck_mm(strikes: list[Strike], *, actual: bool = False) -> FloatArray:
    """Shape (n, 2). Where on the blank each strike falls: the place at (slide, table angle), which is then under it."""
    angle = np.radians([one.actual_table_deg if actual else one.table_deg for one in strikes])
    slide = np.array([one.slide_mm for one in strikes])
    return np.column_stack([slide * np.cos(angle), slide * np.sin(angle)])


def apart(strikes: list[Strike], disc: Disc) -> tuple[list[Strike], list[Strike]]:
    """The strikes of tools that make holes, and those of tools that make projections."""
    on_holes = [one for one in strikes if disc.cutter.tools[one.tool - 1].makes == "hole"]
    return on_holes, [one for one in strikes if one not in on_holes]


def struck_out(strike: Strike, disc: Disc) -> shapely.Polygon:
    """What a tool with round ends takes out of the blank: it stands square to the slide, its length across."""
    tool = disc.cutter.tools[strike.tool - 1]
    end_mm = min(tool.footprint_length_mm, tool.footprint_width_mm) / 2
    out_mm, along_mm = tool.footprint_width_mm / 2 - end_mm, tool.footprint_length_mm / 2 - end_mm
    line = shapely.LineString([(strike.slide_mm - out_mm, -along_mm), (strike.slide_mm + out_mm, along_mm)])
    footprint = line.buffer(end_mm, quad_segs=200)
    assert isinstance(footprint, shapely.Polygon)
    return affinity.rotate(footprint, strike.table_deg, origin=(0, 0))


def drawn_holes(plan: CutPlan, disc: Disc) -> list[shapely.Polygon]:
    """The outlines on HOLES in disc.dxf, read by ezdxf."""
    document = ezdxf.filemanagement.read(io.StringIO(write_dxf(plan.disc, disc.cutter).decode("ascii")))
    holes: list[BaseGeometry] = []
    for one in document.modelspace().query('*[layer=="HOLES"]'):
        if isinstance(one, Circle):
            holes.append(shapely.Polygon([tuple(at.vec2) for at in one.flattening(1e-5)]))
            continue
        assert isinstance(one, LWPolyline)
        pieces = [
            shapely.LineString([tuple(at.vec2) for at in part.flattening(1e-5)])
            if isinstance(part, Arc)
            else shapely.LineString([tuple(part.dxf.start.vec2), tuple(part.dxf.end.vec2)])
            for part in one.virtual_entities()
        ]
        holes.append(shapely.unary_union([shapely.set_precision(piece, 1e-6) for piece in pieces]).convex_hull)
    return [hole for hole in holes if isinstance(hole, shapely.Polygon)]


def drawn_hits_mm(plan: CutPlan, disc: Disc) -> FloatArray:
    """The points of HITS in disc.dxf, read by ezdxf."""
    document = ezdxf.filemanagement.read(io.StringIO(write_dxf(plan.disc, disc.cutter).decode("ascii")))
    return np.array([point.dxf.location.vec2 for point in document.modelspace().query('POINT[layer=="HITS"]')])


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


def test_holes_without_a_tool_of_their_size_are_not_struck_and_named() -> None:
    cutter = cutter_with({"tools/4/footprint_length_mm": 5.03, "tools/4/footprint_width_mm": 5.03}, PRESS)
    disc = disc_of(FERNHOLLOW, cutter, [(2, 40.0)])

    program = write_press_program(planned(disc), disc)

    on_holes, _ = apart(dry_run(program), disc)
    assert [one.slide_mm for one in on_holes] == [0.0]
    assert b"(NOT IN THIS PROGRAM, 3 DRIVE HOLES 5 MM NO TOOL OF THAT SIZE)" in program
    assert b"(NOT IN THIS PROGRAM, RIM LEFT TO BLANKING)" in program


def test_the_order_number_stands_at_the_head() -> None:
    disc = disc_of(FERNHOLLOW, PRESS, [(2, 40.0)])
    heads = [
        write_press_program(
            plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None, order_number=number), disc
        )
        for number in ("A-4711/2", "a_47", None)
    ]

    assert b"(ORDER A-4711/2)\n" in heads[0]
    assert b"(ORDER A 47, SPELT AS ON DISC.DXF, NOT AS HERE)\n" in heads[1]
    assert b"ORDER" not in heads[2]


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
@settings(max_examples=40, deadline=None)
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


def test_a_program_word_by_word() -> None:
    # tool L11 strikes 0.8 mm behind the edge, square to its own radius: sqrt(45² - 0.8²) = 44.9929 mm
    disc = disc_of(MOSSBROOK, PRESS, [(1, 0.0)])

    program = write_press_program(planned(disc, title="Abendlied für Anna (2)"), disc).decode()

    assert program.splitlines() == [
        "%",
        "(DISCWRIGHT 0.1.0)",
        "(TITLE ABENDLIED FUR ANNA 2)",
        "(MOVEMENT MOSSBROOK-67 REVISION 1)",
        "(BLANK COLD-ROLLED STEEL, 0.6 MM THICK)",
        "(CUTTER TURN-PRESS)",
        "(FINGERPRINT 0123456789ABCDEF)",
        "(TOOL O94, LONG HOLE, 9 BY 4, ROUND ENDS, 6 HOLES)",
        "(TOOL R12, ROUND, 12, 1 HOLE)",
        "(TOOL L11, LANCE, TAB 1.1 WIDE, 1.55 DEEP, 1 PROJECTION)",
        "(NOT IN THIS PROGRAM, 1 LOCATION NOTCH 4 X 3 MM PART OF THE)",
        "(RIM)",
        "(NOT IN THIS PROGRAM, RIM LEFT TO BLANKING)",
        "(SEEN FROM THE STAR-SIDE)",
        "(X SLIDE, RADIUS OF THE STRIKE POINT IN MM)",
        "(C TABLE, ANGLE OF THE STRIKE POINT ON DISC.DXF IN DEGREES)",
        "(C COUNTS ON OVER WHOLE TURNS)",
        "(AFTER THE FIRST MOVE NO MOVE OF C IS HALF A TURN OR LONGER)",
        "(TABLE COMES ONTO EVERY HIT WITH C FALLING)",
        "(TOOL STANDS SQUARE TO THE SLIDE, AS RECORD.DXF SHOWS ITS)",
        "(OPENINGS)",
        "(HOLD THE BLANK CLEAR OF EVERY HIT, X 0 IS STRUCK)",
        "(CAUTION, FOR TRAINED PEOPLE, LOCAL RULES COME FIRST)",
        "(CAUTION, GUARDS IN PLACE, HANDS OUT, ONE PERSON AT THE)",
        "(CONTROL)",
        "(CAUTION, WEAR EYE PROTECTION, SLUGS FLY)",
        "(CAUTION, FIRST RUN IT DRY, WITHOUT A BLANK, STROKE SWITCHED)",
        "(OFF)",
        "N1 G71 G90",
        "N2 T9 M6 (TOOL O94)",
        "N3 G0 X28.0 C301.0",
        "N4 G0 X28.0 C300.0 (HOLE 1)",
        "N5 M20",
        "N6 G0 X28.0 C240.0 (HOLE 2)",
        "N7 M20",
        "N8 G0 X28.0 C180.0 (HOLE 3)",
        "N9 M20",
        "N10 G0 X28.0 C120.0 (HOLE 4)",
        "N11 M20",
        "N12 G0 X28.0 C60.0 (HOLE 5)",
        "N13 M20",
        "N14 G0 X28.0 C0.0 (HOLE 6)",
        "N15 M20",
        "N16 T8 M6 (TOOL R12)",
        "N17 G0 X0.0 C-1.0186 (HOLE 1)",
        "N18 M20",
        "N19 T2 M6 (TOOL L11)",
        "N20 G0 X44.9929 C-1.0186 (HIT 1)",
        "N21 M20",
        "N22 M30",
        "%",
    ]


def test_without_tools_for_holes_the_program_has_the_projections_alone() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"tools": ONLY_LANCES}, PRESS), [(1, 0.0)])

    program = write_press_program(planned(disc), disc).decode()

    assert program.splitlines()[-6:] == [
        "N2 T2 M6 (TOOL L11)",
        "N3 G0 X44.9929 C359.9814",
        "N4 G0 X44.9929 C358.9814 (HIT 1)",
        "N5 M20",
        "N6 M30",
        "%",
    ]
    assert "X 0 IS STRUCK" not in program
    assert "(NOT IN THIS PROGRAM, CENTRE HOLE 12 MM NO TOOL OF THAT SIZE)" in program


def test_a_press_with_words_of_its_own_gets_them() -> None:
    words = {"press/strike_word": "M25", "press/change_word": "M16 T{tool}", "tools": ONLY_LANCES}
    disc = disc_of(TARNLIGHT, cutter_with(words, PRESS), [(2, 45.0)])

    program = write_press_program(planned(disc), disc).decode()

    # S22 is the third tool of the document
    assert "\nN2 M16 T3 (TOOL S22)\n" in program
    assert "\nN5 M25\n" in program
    assert "M20" not in program


def test_the_table_goes_back_as_far_as_the_press_states() -> None:
    cutter = cutter_with({"press/take_up_deg": 2.5, "tools": ONLY_LANCES}, PRESS)
    disc = disc_of(MOSSBROOK, cutter, [(1, 0.0)])

    program = write_press_program(planned(disc), disc).decode()

    # C falls on this disc, so it comes from above: 358.9814 + 2.5 = 361.4814
    assert "\nN3 G0 X44.9929 C361.4814\nN4 G0 X44.9929 C358.9814 (HIT 1)\n" in program


def test_a_press_of_which_nothing_is_stated_has_the_usual_words() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press": None}, PRESS), [(1, 0.0)])

    assert write_press_program(planned(disc), disc) == write_press_program(
        planned(disc_of(MOSSBROOK, PRESS, [(1, 0.0)])), disc
    )


def test_a_disc_cut_despite_an_error_says_so_first() -> None:
    program = write_press_program(planned(THREE_LANCES, not_good="trial piece"), THREE_LANCES).decode()

    assert program.splitlines()[1] == "(NOT GOOD TO CUT, TRIAL PIECE)"


def test_a_disc_good_to_cut_does_not_say_that_it_is_not() -> None:
    assert b"NOT GOOD" not in write_press_program(planned(THREE_LANCES), THREE_LANCES)


def test_projections_that_no_tool_makes_are_not_struck_with_any() -> None:
    holes_only = [tool.model_dump(mode="json") for tool in PRESS.tools if tool.makes == "hole"]
    disc = disc_of(MOSSBROOK, cutter_with({"tools": holes_only}, PRESS), [(1, 0.0)])

    program = write_press_program(planned(disc, not_good="trial piece"), disc)

    on_holes, on_projections = apart(dry_run(program), disc)
    assert (len(on_holes), on_projections) == (7, [])
    assert b"(NOT IN THIS PROGRAM, THE PROJECTIONS, NO TOOL FITS)" in program


def test_a_bare_blank_has_its_holes_struck_and_ends_at_once_without_tools_for_them() -> None:
    with_tools, without = (
        write_press_program(planned(disc), disc)
        for disc in (disc_of(MOSSBROOK, PRESS, []), disc_of(MOSSBROOK, cutter_with({"tools": []}, PRESS), []))
    )

    assert len(dry_run(with_tools)) == 7
    assert dry_run(without) == []
    assert without.decode().splitlines()[-3:] == ["N1 G71 G90", "N2 M30", "%"]


def test_a_laser_has_no_press_program() -> None:
    with pytest.raises(ValueError, match="fibre-laser is no press"):
        write_press_program(planned(ONE_FOLD), ONE_FOLD)
    assert LASER.id == "fibre-laser"


@pytest.mark.parametrize("title", ["100% (live): part 2", "音楽", "a\nM30\n%", "x" * 300, "\\U+97F3"])
def test_no_title_breaks_the_program(title: str) -> None:
    program = write_press_program(planned(THREE_LANCES, title=title), THREE_LANCES)

    assert len(dry_run(program)) == 3 + 7  # mossbrook's six slots and centre hole
    comments = [line for line in program.decode("ascii").splitlines() if line.startswith("(")]
    assert max(len(line) for line in comments) <= 62
    # four brackets, a percent sign or a colon inside would end or misread a comment
    assert all(re.fullmatch(r"\([A-Z0-9 .,+/=-]+\)", line) for line in comments)


def test_the_same_disc_gives_the_same_bytes() -> None:
    disc = DISCS["many lances"]

    assert write_press_program(planned(disc), disc) == write_press_program(planned(disc), disc)


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


def test_a_control_that_takes_g21_for_millimetres_gets_it() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press/metric_word": "G21"}, PRESS), [(1, 0.0)])

    program = write_press_program(planned(disc), disc)

    assert len(dry_run(program)) == 1 + 7
    assert b"N1 G21 G90" in program
    assert b"G71" not in program
