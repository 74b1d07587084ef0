import io
import math
import re
from functools import cache
from pathlib import Path

import ezdxf.filemanagement
import numpy as np
import pytest
import shapely
from shapely import affinity

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


def drawn_hits_mm(plan: CutPlan, disc: Disc) -> FloatArray:
    """The points of HITS in disc.dxf, read by ezdxf."""
    document = ezdxf.filemanagement.read(io.StringIO(write_dxf(plan.disc, disc.cutter).decode("ascii")))
    return np.array([point.dxf.location.vec2 for point in document.modelspace().query('POINT[layer=="HITS"]')])


@every_disc
def test_a_dry_run_strikes_where_the_drawing_has_its_hits(disc: Disc) -> None:
    plan = planned(disc)

    struck = struck_mm(dry_run(write_press_program(plan, disc)))

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

    np.testing.assert_allclose(struck_mm(strikes), drawn_hits_mm(plan, disc), atol=ROUNDING_MM, rtol=0)
    assert {disc.cutter.tools[one.tool - 1].tool for one in strikes} == {plan.tool}
    assert len({round(one.actual_table_deg - one.table_deg, 9) for one in strikes}) == 1


@every_disc
def test_strikes_follow_the_plan(disc: Disc) -> None:
    plan = planned(disc)

    struck = struck_mm(dry_run(write_press_program(plan, disc)))

    np.testing.assert_allclose(struck, plan.at_mm, atol=ROUNDING_MM, rtol=0)


@every_disc
def test_the_tool_strikes_the_openings_of_the_record(disc: Disc) -> None:
    plan = planned(disc)
    program = write_press_program(plan, disc)
    [opened] = [one for one in plan.record.entities if isinstance(one, Outlines) and one.layer == "AFTER_FORMING"]
    # corners, and where round ends begin, are compared
    drawn = [shapely.MultiPoint(points) for points in opened.points_mm]

    for strike, opening in zip(dry_run(program), drawn, strict=True):
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

    # one block more than the first hit's own goes below the angle: those without a hit's number
    assert len(re.findall(r"^N\d+ G0 X\S+ C\S+$", program, flags=re.M)) > 1


def test_a_table_that_comes_from_either_side_shows_its_backlash() -> None:
    disc = disc_of(FERNHOLLOW, cutter_with({"press/turns_one_way": False}, PRESS), MANY)

    strikes = dry_run(write_press_program(planned(disc), disc), backlash_deg=0.3)

    lag_deg = np.array([one.actual_table_deg - one.table_deg for one in strikes])
    assert len(set(lag_deg.round(9))) == 2


@every_disc
def test_no_turn_of_the_table_is_longer_than_half_a_turn(disc: Disc) -> None:
    press = DryPress(strike_word="M20")

    press.run(write_press_program(planned(disc), disc))

    assert 0 < press.greatest_turn_deg <= 180


def test_a_way_back_that_is_longer_than_half_a_turn_with_its_take_up_is_made_in_two() -> None:
    # From 200 forward to 25 are 175 degrees back, and 30 to take up: 205.
    disc = disc_of(MOSSBROOK, cutter_with({"press/take_up_deg": 30}, PRESS), [(30, 200.0), (30, 25.0), (30, 20.0)])
    press = DryPress(strike_word="M20")

    strikes = press.run(write_press_program(planned(disc), disc))

    assert len(strikes) == 3
    assert 0 < press.greatest_turn_deg <= 180


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
        "(TOOL L11, LANCE, TAB 1.1 WIDE, 1.55 DEEP)",
        "(1 HITS, SEEN FROM THE STAR-SIDE)",
        "(X SLIDE, RADIUS OF THE STRIKE POINT IN MM)",
        "(C TABLE, ANGLE OF THE STRIKE POINT ON DISC.DXF IN DEGREES)",
        "(C COUNTS ON OVER WHOLE TURNS, NO MOVE ABOVE HALF A TURN)",
        "(TABLE COMES ONTO EVERY HIT WITH C FALLING)",
        "(TOOL STANDS SQUARE TO THE SLIDE, AS RECORD.DXF SHOWS ITS)",
        "(OPENINGS)",
        "(HITS ONLY, HOLES BEFORE THEM AND RIM AFTER THEM ARE NOT IN)",
        "(THIS PROGRAM)",
        "(CAUTION, FOR TRAINED PEOPLE, LOCAL RULES COME FIRST)",
        "(CAUTION, GUARDS IN PLACE, HANDS OUT, ONE PERSON AT THE)",
        "(CONTROL)",
        "(CAUTION, WEAR EYE PROTECTION, SLUGS FLY)",
        "(CAUTION, FIRST RUN IT DRY, WITHOUT A BLANK, STROKE SWITCHED)",
        "(OFF)",
        "N1 G71 G90",
        "N2 T2 M6 (TOOL L11)",
        "N3 G0 X44.9929 C359.9814",
        "N4 G0 X44.9929 C358.9814 (HIT 1)",
        "N5 M20",
        "N6 M30",
        "%",
    ]


def test_a_press_with_words_of_its_own_gets_them() -> None:
    words = {"press/strike_word": "M25", "press/change_word": "M16 T{tool}"}
    disc = disc_of(TARNLIGHT, cutter_with(words, PRESS), [(2, 45.0)])

    program = write_press_program(planned(disc), disc).decode()

    # S22 is the third tool of the document
    assert "\nN2 M16 T3 (TOOL S22)\n" in program
    assert "\nN5 M25\n" in program
    assert "M20" not in program


def test_the_table_goes_back_as_far_as_the_press_states() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press/take_up_deg": 2.5}, PRESS), [(1, 0.0)])

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


def test_where_no_tool_fits_the_program_stops_and_never_strikes_with_one() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"tools": []}, PRESS), [(1, 0.0)])
    program = write_press_program(planned(disc, not_good="trial piece"), disc)

    press = DryPress(strike_word="M20")
    with pytest.raises(Alarm, match="without a tool"):
        press.run(program)

    assert press.stops == 1
    assert b"(TOOL NONE THAT FITS)" in program


def test_a_disc_without_projections_ends_at_once() -> None:
    disc = disc_of(MOSSBROOK, PRESS, [])
    program = write_press_program(planned(disc), disc)

    assert dry_run(program) == []
    assert program.decode().splitlines()[-3:] == ["N1 G71 G90", "N2 M30", "%"]


def test_a_laser_has_no_press_program() -> None:
    with pytest.raises(ValueError, match="fibre-laser is no press"):
        write_press_program(planned(ONE_FOLD), ONE_FOLD)
    assert LASER.id == "fibre-laser"


@pytest.mark.parametrize("title", ["100% (live): part 2", "音楽", "a\nM30\n%", "x" * 300, "\\U+97F3"])
def test_no_title_breaks_the_program(title: str) -> None:
    program = write_press_program(planned(THREE_LANCES, title=title), THREE_LANCES)

    assert len(dry_run(program)) == 3
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
    assert len(dry_run(changed(program, r"^N\d+ M20\n", ""))) == 2


def test_the_dry_run_sees_another_tool(program: bytes) -> None:
    tools = [{one.tool for one in dry_run(each)} for each in (program, changed(program, "T2", "T1"))]

    assert tools == [{2}, {1}]


def test_the_dry_run_sees_a_place_that_is_off(program: bytes) -> None:
    moved = changed(program, r"X(\d+)\.(\d)(\d+ C\S+ \(HIT 2)", r"X\1.5\3")

    apart_mm = np.hypot(*(struck_mm(dry_run(program)) - struck_mm(dry_run(moved))).T)

    assert (apart_mm > 10 * ROUNDING_MM).tolist() == [False, True, False]


@pytest.mark.parametrize(
    ("pattern", "by", "alarm"),
    [
        (r"^N\d+ M30\n", "", "does not end"),
        (r"^N1 G71 G90\n", "", "without G0, millimetres and G90"),
        (r" M6", "", "without a tool"),
        (r"G0", "G1", "does not know G1"),
        (r"\(HIT 1\)", "(HIT 1", "cannot read"),
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

    assert len(dry_run(program)) == 1
    assert b"N1 G21 G90" in program
    assert b"G71" not in program
