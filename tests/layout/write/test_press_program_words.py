"""What press.nc says, word by word, and what it never says."""

import re

import pytest

from layout.cut import plan_cuts
from layout.write.press_program import write_press_program
from tests.layout.examples import cutter_with
from tests.layout.write.examples import (
    FERNHOLLOW,
    FINGERPRINT,
    LASER,
    MOSSBROOK,
    ONE_FOLD,
    PRESS,
    TARNLIGHT,
    THREE_LANCES,
    disc_of,
)
from tests.layout.write.press_runs import DISCS, ONLY_LANCES, apart, dry_run, planned


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
        for number in ("A-4711/2", "A_47", "a47", None)
    ]

    assert b"(ORDER A-4711/2)\n" in heads[0]
    assert b"(ORDER A 47, SPELT AS ON DISC.DXF, NOT AS HERE)\n" in heads[1]
    assert b"(ORDER A47, SPELT AS ON DISC.DXF, NOT AS HERE)\n" in heads[2]
    assert b"ORDER" not in heads[3]


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
        "(NOT IN THIS PROGRAM, LOCATION NOTCH 4 X 3 MM PART OF THE RIM)",
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


@pytest.mark.parametrize(("forms", "above"), [("up", "STAR"), ("down", "LABEL"), (None, None)])
def test_a_press_that_states_how_it_forms_is_told_which_side_lies_above(forms: str | None, above: str | None) -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press/forms": forms}, PRESS), [(1, 0.0)])

    program = write_press_program(planned(disc), disc).decode()

    told = [line for line in program.splitlines() if "LIES ABOVE" in line]
    assert told == ([] if forms is None else [f"(TOOLS FORM {forms.upper()}, THE {above} SIDE LIES ABOVE)"])


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


def test_a_control_that_takes_g21_for_millimetres_gets_it() -> None:
    disc = disc_of(MOSSBROOK, cutter_with({"press/metric_word": "G21"}, PRESS), [(1, 0.0)])

    program = write_press_program(planned(disc), disc)

    assert len(dry_run(program)) == 1 + 7
    assert b"N1 G21 G90" in program
    assert b"G71" not in program
