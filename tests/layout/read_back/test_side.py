"""A drawing of the other side is told once, by whatever in it shows a side; where nothing does, that is said."""

from typing import Any

import numpy as np
import pytest
from ezdxf.document import Drawing as Document
from ezdxf.entities import LWPolyline

from layout.check.finding import Code, Finding, Level
from layout.cut import plan_cuts
from layout.cut.plan import Outlines
from layout.documents import Cutter, Movement
from layout.place.disc import Disc
from layout.read_back import Reading, read_back
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.read_back.drawings import bytes_of, disc_document, random_disc

STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})
LABEL_SIDE_PRESS = cutter_with({"drawn_from": "label-side"}, PRESS)
ROUND_SLOTS = movement_with(
    {
        "projection": {"kind": "slot", "width_mm": 2.0, "length_mm": 2.0},
        "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.5},
    }
)
# The plain movement's blank is the same from both sides; its music, with 10 degrees before and 70 after, is not.
UNEVEN = movement_with({"before_music_deg": 10, "after_music_deg": 70})


def read(disc: Disc, cutter: Cutter) -> Reading:
    """What a disc's drawing gives to somebody who takes it for another cutter's."""
    return read_back(bytes_of(disc_document(disc)), disc.movement, cutter)


def of_code(reading: Reading, code: Code) -> list[Finding]:
    return [finding for finding in reading.findings if finding.code is code]


@pytest.mark.parametrize("movement", [SHIPPED[0], SHIPPED[2]], ids=["slits", "slots"])
def test_outlines_of_the_other_side_are_told_once(movement: Movement) -> None:
    reading = read(random_disc(movement, count=20), STAR_SIDE_LASER)

    [finding] = of_code(reading, Code.OTHER_SIDE)
    assert finding.level is Level.ERROR
    assert finding.message == (
        "20 of 20 projections fit only when mirrored; the drawing seems to show the other side, not the star side"
    )
    assert finding.remedy == "choose the cutter and the movement this was drawn for, or mirror the drawing"
    assert finding.at.radius_mm is not None
    assert of_code(reading, Code.OUT_OF_SHAPE) == []
    assert reading.disc.projection_count == 0


def test_a_movement_that_turns_the_other_way_is_told_once() -> None:
    disc = random_disc(PLAIN, count=20)

    reading = read_back(bytes_of(disc_document(disc)), movement_with({"turns": "anticlockwise"}), LASER)

    assert [finding.code for finding in reading.findings] == [Code.OTHER_SIDE]


def turned_round(document: Document, count: int) -> Document:
    """The drawing with its first slits mirrored on the line from the centre through their working edges."""
    slits = [entity for entity in document.modelspace().query("LWPOLYLINE") if entity.dxf.layer == "SLITS"]
    for slit in slits[:count]:
        assert isinstance(slit, LWPolyline)
        points = np.array(slit.get_points("xyb"))
        places = points[:, 0] + 1j * points[:, 1]
        axis = np.exp(2j * np.angle(places.mean()))  # near enough: the slit's middle, not its edge
        turned = axis * np.conj(places)
        slit.set_points(np.column_stack([turned.real, turned.imag, -points[:, 2]]).tolist(), format="xyb")
    return document


def test_one_slit_the_wrong_way_is_told_of_that_slit_alone() -> None:
    disc = random_disc(SHIPPED[0], count=40)

    reading = read_back(bytes_of(turned_round(disc_document(disc), 1)), SHIPPED[0], LASER)

    assert of_code(reading, Code.OTHER_SIDE) == []
    [finding] = of_code(reading, Code.OUT_OF_SHAPE)
    assert finding.level is Level.ERROR
    assert finding.message == "a projection faces against the way the disc turns; it is left out"
    assert finding.measured == pytest.approx(180, abs=6)  # a slit of 2 mm, turned on its middle, at 36 mm or more
    assert (finding.limit, finding.unit) == (0.2, "deg")
    assert finding.at.radius_mm == pytest.approx(disc.radius_mm.min(), abs=1)
    assert "mirror" not in finding.remedy
    assert reading.disc.projection_count == 39


@pytest.mark.parametrize(("mirrored", "told"), [(20, [Code.OUT_OF_SHAPE] * 20), (21, [Code.OTHER_SIDE])])
def test_only_more_than_half_speak_for_the_other_side(mirrored: int, told: list[Code]) -> None:
    disc = disc_of(PLAIN, [(1 + place % 3, 1.0 + place) for place in range(40)])
    document = disc_document(disc)
    slits = [entity for entity in document.modelspace() if entity.dxf.layer == "SLITS"]
    for slit in slits[:mirrored]:
        slit.set_points([(x, -y, -bulge) for x, y, bulge in slit.get_points("xyb")], format="xyb")

    reading = read_back(bytes_of(document), PLAIN, LASER)

    assert [finding.code for finding in reading.findings] == told
    assert reading.disc.projection_count == 40 - mirrored


def test_hits_of_the_other_side_are_told_by_the_blank() -> None:
    disc = random_disc(SHIPPED[0], PRESS)  # three drive holes at 90, 210 and 330 degrees

    [finding] = of_code(read(disc, LABEL_SIDE_PRESS), Code.OTHER_SIDE)

    assert finding.level is Level.ERROR
    assert finding.message == (
        "holes and rim agree with the movement only when mirrored; "
        "the drawing seems to show the other side, not the label side"
    )


@pytest.mark.parametrize(
    ("movement", "cutters"),
    [
        (UNEVEN, (PRESS, LABEL_SIDE_PRESS)),
        (
            movement_with({"before_music_deg": 10, "after_music_deg": 70}, ROUND_SLOTS.model_dump(exclude_none=True)),
            (LASER, STAR_SIDE_LASER),
        ),
    ],
    ids=["hits", "round slots"],
)
def test_what_looks_alike_from_both_sides_is_told_by_the_music(
    movement: Movement, cutters: tuple[Cutter, Cutter]
) -> None:
    # Mirrored, a pluck t seconds (6 degrees each) after 10 degrees lies at 350 - 6 t; music ends at 290, so t < 10;
    # the edge of a hit or slot moves to its other side, by 2 mm or 0.4 s at most.
    disc = disc_of(movement, [(1, 0.0), (2, 0.0), (3, 5.0), (1, 9.0), (2, 11.0), (3, 30.0)], cutters[0])
    other = cutters[1].drawn_from.replace("-", " ")

    [finding] = read(disc, cutters[1]).findings

    assert finding.code is Code.OTHER_SIDE
    assert finding.level is Level.ERROR
    assert finding.message == (
        "4 of 6 plucks lie outside the music's part of the turn, and none does when mirrored; "
        f"the drawing may show the other side, not the {other}"
    )
    assert read(disc, cutters[0]).findings == ()  # the right side is shown by the same music


@pytest.mark.parametrize("turns", ["clockwise", "anticlockwise"])
@pytest.mark.parametrize(
    ("movement", "cutter", "what"),
    [
        (PLAIN, PRESS, "hits look"),
        (PLAIN, LABEL_SIDE_PRESS, "hits look"),
        (ROUND_SLOTS, LASER, "these slots look"),
        (ROUND_SLOTS, STAR_SIDE_LASER, "these slots look"),
    ],
)
def test_where_nothing_cut_shows_the_side_that_is_said(
    movement: Movement, cutter: Cutter, what: str, turns: str
) -> None:
    turning = movement_with({"turns": turns}, movement.model_dump(exclude_none=True))
    disc = disc_of(turning, [(1, 10.0), (3, 40.0)], cutter)

    reading = read(disc, cutter)

    [finding] = reading.findings
    assert finding.code is Code.SIDE_NOT_SHOWN
    assert finding.level is Level.ADVICE
    assert finding.message == (f"{what} alike from both sides, and nothing else that is cut shows which side is drawn")
    assert finding.remedy == (
        "compare the flag on layer MARKS with the way the disc turns: "
        f"seen from the {cutter.drawn_from.replace('-', ' ')}, as it must be drawn, it points {flag_of(disc)}"
    )
    assert reading.disc.projection_count == 2


def flag_of(disc: Disc) -> str:
    """Which way the flag of the real drawing points: it stands at angle 0, so down the sheet is clockwise."""
    plan: Any = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    flag = next(entity for entity in plan.disc.entities if isinstance(entity, Outlines) and entity.layer == "MARKS")
    return "clockwise" if flag.points_mm[0, -1, 1] < 0 else "anticlockwise"


def test_a_blank_that_differs_from_its_mirror_shows_the_side_of_hits() -> None:
    assert read(random_disc(SHIPPED[0], PRESS), PRESS).findings == ()


def test_plucks_outside_the_music_on_both_sides_say_nothing_of_the_side() -> None:
    disc = disc_of(PLAIN, [(1, 10.0), (2, -2.0)], PRESS)  # 12 degrees before the music, or after it when mirrored

    assert [finding.code for finding in read(disc, PRESS).findings] == [Code.SIDE_NOT_SHOWN]


def test_a_disc_without_projections_needs_no_side() -> None:
    assert read(disc_of(PLAIN, [], PRESS), PRESS).findings == ()
