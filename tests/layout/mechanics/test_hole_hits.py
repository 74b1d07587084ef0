import math
from typing import Any

import numpy as np
import pytest

from layout.documents import Movement
from layout.mechanics.hole_hits import hole_hits, hole_tool, hole_tools, not_struck
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, movement_with


def row(**more: Any) -> dict[str, Any]:
    """A row of round holes of 5 mm."""
    return {"purpose": "drive", "shape": "hole", "radius_mm": 20, "width_mm": 5, "length_mm": 5} | more


def with_rows(*rows: dict[str, Any], centre_mm: float = 9) -> Movement:
    return movement_with({"disc/features": list(rows), "disc/centre_hole_mm": centre_mm})


def struck(movement: Movement) -> list[tuple[str, int]]:
    return [(hits.tool.tool, len(hits.at_mm)) for hits in hole_hits(movement, PRESS, 1)]


@pytest.mark.parametrize(
    ("movement", "tools"),
    [
        (SHIPPED[0], [("R5", 3), ("R9", 1)]),
        (SHIPPED[1], [("O94", 6), ("R12", 1)]),
        (SHIPPED[2], [("R3", 2), ("R7", 1)]),
    ],
    ids=[movement.id for movement in SHIPPED],
)
def test_the_shipped_press_strikes_every_hole_of_a_shipped_disc(
    movement: Movement, tools: list[tuple[str, int]]
) -> None:
    notch = ("location notch 4 x 3 mm (part of the rim)",) if movement.id == "mossbrook-67" else ()

    assert struck(movement) == tools
    assert [tool.tool for tool in hole_tools(movement, PRESS)] == [name for name, _ in tools]
    assert hole_tools(movement, LASER) == ()
    assert not_struck(movement, PRESS) == (*notch, "rim (left to blanking)")


def test_a_hit_stands_in_the_middle_of_its_hole_and_knows_it() -> None:
    [drive, centre] = hole_hits(with_rows(row(first_at_deg=30, count=2)), PRESS, 1)

    at_mm = {name: at.tolist() for name, at in zip(drive.holes, drive.at_mm, strict=True)}
    half, long = 20 * math.sin(math.radians(30)), 20 * math.cos(math.radians(30))
    assert at_mm == {
        "the drive hole at 30.000°": pytest.approx([long, half]),
        "the drive hole at 210.000°": pytest.approx([-long, -half]),
    }
    assert (centre.holes, centre.at_mm.tolist()) == (("the centre hole",), [[0, 0]])


@pytest.mark.parametrize(("centre_mm", "tool"), [(9.02, "R9"), (8.98, "R9"), (9.03, None), (8.97, None)])
def test_a_tool_is_of_just_the_size_or_does_not_fit(centre_mm: float, tool: str | None) -> None:
    # tools are ground to about a hundredth; two of them at most are taken for rounding
    movement = with_rows(centre_mm=centre_mm)

    assert struck(movement) == ([] if tool is None else [(tool, 1)])
    left = () if tool else (f"centre hole {centre_mm:g} mm (no tool of that size)",)
    assert not_struck(movement, PRESS) == (*left, "rim (left to blanking)")


def test_of_two_tools_the_nearer_in_size_is_taken() -> None:
    wider = cutter_with({"tools/4/footprint_length_mm": 3.015, "tools/4/footprint_width_mm": 3.015}, PRESS)

    taken = [hole_tool(wider, length_mm=size_mm, width_mm=size_mm) for size_mm in (3.0, 3.007, 3.008, 3.03)]

    assert [tool.tool for tool in taken if tool is not None] == ["R3", "R3", "R5", "R5"]


def test_a_long_hole_needs_a_tool_that_lies_its_way() -> None:
    along = row(shape="slot", length_mm=9, width_mm=4)
    across = row(shape="slot", length_mm=4, width_mm=9)

    assert struck(with_rows(along)) == [("O94", 1), ("R9", 1)]
    assert struck(with_rows(across)) == [("R9", 1)]
    assert not_struck(with_rows(across), PRESS)[0] == "drive slot 4 x 9 mm (no tool of that size)"


def test_a_tool_for_projections_strikes_no_hole() -> None:
    # S22 is 2.2 by 1.3
    assert struck(with_rows(row(shape="slot", length_mm=2.2, width_mm=1.3))) == [("R9", 1)]


def test_a_tool_is_taken_up_once_the_innermost_row_first_and_the_centre_hole_last() -> None:
    outer, inner = row(radius_mm=40, count=3), row(radius_mm=15, width_mm=3, length_mm=3)
    again = row(radius_mm=30, purpose="stop")

    assert struck(with_rows(outer, inner, again)) == [("R3", 1), ("R5", 4), ("R9", 1)]


def test_holes_of_one_tool_follow_one_another_round_the_disc() -> None:
    [drive, _] = hole_hits(with_rows(row(count=12)), PRESS, 1)

    angles_deg = np.degrees(np.arctan2(drive.at_mm[:, 1], drive.at_mm[:, 0]))
    np.testing.assert_allclose(np.mod(np.diff(angles_deg), 360), 30)  # forward alone, eleven steps


@pytest.mark.parametrize("direction", [1, -1])
def test_the_table_goes_forward_whichever_way_the_disc_turns(direction: int) -> None:
    [drive, _] = hole_hits(with_rows(row(count=5)), PRESS, direction)

    angles_deg = np.degrees(np.arctan2(drive.at_mm[:, 1], drive.at_mm[:, 0]))
    np.testing.assert_allclose(np.mod(direction * np.diff(angles_deg), 360), 72)


def test_a_hole_that_two_rows_share_is_struck_once() -> None:
    assert struck(with_rows(row(count=2), row(purpose="location", count=4))) == [("R5", 4), ("R9", 1)]


def test_a_laser_strikes_nothing_and_leaves_nothing() -> None:
    assert hole_hits(SHIPPED[0], LASER, 1) == ()
    assert not_struck(SHIPPED[0], LASER) == ()
