"""What the work sheet tells of a press: its tools, its forces, and what it does not strike."""

from dataclasses import replace

from layout.cut import plan_cuts
from layout.making import making_of
from layout.making.making import Making, ToolWork
from tests.layout.examples import PRESS, cutter_with, disc_of, movement_with
from tests.layout.write.examples import FINGERPRINT, ONE_FOLD, THREE_LANCES
from tests.layout.write.work_sheets import sheet_of, words_of


def test_a_press_is_told_its_tools_in_the_order_taken_up_and_that_the_rim_is_not_struck() -> None:
    words = words_of(sheet_of(THREE_LANCES))

    assert (
        "tools O94: long hole, 9 by 4, round ends; 6 holes R12: round, 12; 1 hole "
        "L11: lance, tab 1.1 wide, 1.55 deep; 3 projections rim not struck: the blank comes round, or is blanked last"
    ) in words
    assert "rim not struck" not in words_of(sheet_of(ONE_FOLD))


def test_of_many_tools_the_first_and_that_of_the_projections_are_told() -> None:
    sizes_mm = (2.5, 3.5, 4.5, 5.5, 6.5)
    size = {"makes": "hole", "title": "round"}
    tools = [
        size | {"tool": f"H{place}", "footprint_length_mm": size_mm, "footprint_width_mm": size_mm}
        for place, size_mm in enumerate(sizes_mm)
    ]
    rows = [
        {"purpose": "drive", "shape": "hole", "radius_mm": 12 + 4 * place, "first_at_deg": 70 * place}
        | {"width_mm": size_mm, "length_mm": size_mm}
        for place, size_mm in enumerate(sizes_mm)
    ]
    cutter = cutter_with({"tools": [PRESS.tools[0].model_dump(mode="json"), *tools]}, PRESS)
    disc = disc_of(movement_with({"disc/features": rows}), [(1, 4.0)], cutter)

    words = words_of(sheet_of(disc))

    assert "tools H0: round; 1 hole H1: round; 1 hole H2: round; 1 hole L12: lance" in words
    assert "1 projection and 2 more tools for holes: see the program's head" in words


def test_forces_of_a_press_are_told_where_they_are_known() -> None:
    tools = (
        ToolWork(tool="R12", hit_count=1, hit_force_n=6243.0, press_force_n=7491.6),
        ToolWork(tool="L11", hit_count=2, hit_force_n=2484.0, press_force_n=2980.8),
    )
    forces = Making(hit_force_n=2484.0, stripping_force_n=496.8, press_force_n=7491.6)
    struck = replace(forces, hit_count=3, tools=tools, time_s=12.04)

    words = words_of(sheet_of(THREE_LANCES, making=struck))

    assert "struck 3 times force of a hit 2.48 kN stripping 0.50 kN" in words
    assert "press force 7.49 kN, by R12 machine time 12.0 s" in words
    assert "price" not in words
    assert "struck once" in words_of(sheet_of(THREE_LANCES, making=Making(hit_count=1)))


def test_what_a_press_leaves_out_is_told_in_full_on_the_disc_with_the_most_to_tell() -> None:
    disc = THREE_LANCES
    plan = plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)

    words = words_of(sheet_of(disc, making=making_of(disc, plan)))

    assert (
        "Not counted in time and price: location notch 4 x 3 mm (part of the rim), rim (left to blanking), "
        "first tool (in the press already)."
    ) in words
