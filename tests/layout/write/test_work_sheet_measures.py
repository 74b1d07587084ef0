"""What the work sheet measures: the drawing on paper, the bar, the sketch, the webs and the limits it tells."""

import math
from decimal import Decimal

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.documents import Cutter, Movement
from layout.making.making import Making, PriceLine
from layout.mechanics.frame import on_disc_mm
from layout.place.disc import Disc
from layout.write.work_sheet.disc_drawing import BOX_WIDTH_MM
from layout.write.work_sheet.forming_sketch import section_of
from layout.write.work_sheet.letters import printable
from layout.write.work_sheet.paper import SMALL, at_most
from layout.write.work_sheet.scale import SCALES, Scale, bar_mm, scale_for
from layout.write.work_sheet.webs import thinnest_webs
from tests.layout.write.examples import (
    EMPTY_DISC,
    FERNHOLLOW,
    LASER,
    MOSSBROOK,
    ONE_FOLD,
    OPEN_LASER,
    PRESS,
    SLOTS_ON_A_PRESS,
    TARNLIGHT,
    THREE_LANCES,
    THREE_SLOTS,
    disc_of,
)
from tests.layout.write.work_sheets import PIXELS_PER_MM, ink_of, row_of, sheet_of, words_of
from tests.thorough import tried

WIDE_LINE_MM = 0.5
PIXEL_MM = 1 / PIXELS_PER_MM
# The page's own layout: the frame from 20 mm, 3 mm inside it the disc's box, at the top of 287 - 3 mm.
BOX_LEFT_MM, BOX_TOP_MM, CENTRE_DOWN_MM = 23.0, 284.0, 63.5


def laser_with(**fold: object) -> Cutter:
    """The shipped laser with another fold; burr side and springback are not stated unless they are given."""
    document = LASER.model_dump(mode="json") | {"burr_side": None}
    return Cutter.model_validate(document | {"fold": {**document["fold"], "springback": None, **fold}})


def one_fold(**fold: object) -> Disc:
    return disc_of(FERNHOLLOW, laser_with(**fold), [(5, 90.0)])


def movement_with(**disc: object) -> Movement:
    document = FERNHOLLOW.model_dump(mode="json")
    return Movement.model_validate(document | {"disc": {**document["disc"], **disc}})


@pytest.mark.parametrize(
    ("diameter_mm", "told"),
    [(118, "1:1"), (119, "1:1"), (120, "1:2"), (237, "1:2"), (428, "1:5"), (59, "2:1"), (20, "5:1"), (2000, "1:20")],
)
def test_a_disc_is_drawn_in_the_largest_standard_scale_that_fits(diameter_mm: float, told: str) -> None:
    assert scale_for(diameter_mm, 119.0).told == told


def test_the_scales_are_those_of_the_standard() -> None:
    # ISO 5455, from memory: 50:1 20:1 10:1 5:1 2:1, 1:1, 1:2 1:5 1:10 1:20 1:50 and so on; a disc of 2 m needs 1:20.
    told = [f"{top}:{under}" for top, under in SCALES]

    assert told[:8] == ["50:1", "20:1", "10:1", "5:1", "2:1", "1:1", "1:2", "1:5"]
    assert told[8:14] == ["1:10", "1:20", "1:50", "1:100", "1:200", "1:500"]


@given(real_mm=st.floats(0.001, 2000.0))
def test_what_is_drawn_never_takes_more_room_than_there_is(real_mm: float) -> None:
    assert scale_for(real_mm, 119.0).paper_mm(real_mm) <= 119.0


@given(scale=st.sampled_from(SCALES), room_mm=st.floats(10.0, 60.0))
def test_the_bar_fits_and_is_the_longest_of_its_kind(scale: tuple[int, int], room_mm: float) -> None:
    drawn = Scale(on_paper=scale[0], in_fact=scale[1])

    real_mm = bar_mm(drawn, room_mm)

    assert drawn.paper_mm(real_mm) <= room_mm
    assert drawn.paper_mm(2.001 * real_mm) > room_mm  # 1, 2, 4, 5, 10: no step doubles more than once
    assert f"{real_mm:.0e}"[0] in "1245"


@pytest.mark.parametrize(
    ("movement", "diameter_mm", "told"), [(TARNLIGHT, 118, "1:1"), (FERNHOLLOW, 237, "1:2"), (MOSSBROOK, 428, "1:5")]
)
def test_the_rim_on_the_page_is_as_large_as_the_scale_says(movement: Movement, diameter_mm: float, told: str) -> None:
    pdf = sheet_of(disc_of(movement, LASER, []))
    top, under = map(int, told.split(":"))
    rim_mm, up_mm = diameter_mm / 2 * top / under, 10.0

    at_mm = row_of(ink_of(pdf, 0), BOX_TOP_MM - CENTRE_DOWN_MM + up_mm, BOX_LEFT_MM, BOX_LEFT_MM + BOX_WIDTH_MM)

    # A chord 10 mm above the centre, to the outer edge of a line 0.5 mm wide.
    chord_mm = 2 * math.sqrt((rim_mm + WIDE_LINE_MM / 2) ** 2 - up_mm**2)
    assert f"Scale {told}" in words_of(pdf)
    assert at_mm.max() - at_mm.min() + PIXEL_MM == pytest.approx(chord_mm, abs=2.5 * PIXEL_MM)


@pytest.mark.parametrize("movement", [TARNLIGHT, FERNHOLLOW, MOSSBROOK])
def test_the_bar_on_the_page_is_as_long_as_it_says(movement: Movement) -> None:
    pdf = sheet_of(disc_of(movement, LASER, []))
    words = words_of(pdf)
    on_paper_mm = float(words.split("If the bar is not ")[1].split(" mm")[0])
    beside = ink_of(pdf, 0)[:, round((BOX_LEFT_MM + BOX_WIDTH_MM + 3) * PIXELS_PER_MM) : round(197 * PIXELS_PER_MM)]
    upper = beside[: round(90 * PIXELS_PER_MM)]

    # The bar's rows: three black pieces of five, and so more ink than letters, but gaps of a fifth.
    rows = [np.flatnonzero(row) for row in upper if row.sum() > 100]
    bars = [row for row in rows if len(row) > np.ptp(row) / 2 and (np.diff(row) > 3 * PIXELS_PER_MM).sum() == 2]
    lengths_mm = [float(np.ptp(row) + 1) / PIXELS_PER_MM for row in bars]

    assert len(bars) > 10
    assert lengths_mm == pytest.approx([on_paper_mm + 0.13] * len(bars), abs=2 * PIXEL_MM)  # an outline of 0.13 mm


def test_a_projection_is_drawn_where_it_is_cut() -> None:
    # Track 17 of tarnlight, at 53.6 mm, its working edge straight up: a slot from there on, clockwise of it or not.
    disc = disc_of(TARNLIGHT, LASER, [(17, 90.0)])
    ink = ink_of(sheet_of(disc), 0)
    centre = (BOX_LEFT_MM + BOX_WIDTH_MM / 2, BOX_TOP_MM - CENTRE_DOWN_MM)

    at_mm = row_of(ink, centre[1] + 53.6, centre[0] - 6, centre[0] + 6) - centre[0]

    # Tarnlight turns anticlockwise: the travel at the top of the disc is to the left, and the slot is 2.2 mm long.
    assert at_mm.min() == pytest.approx(-2.2, abs=0.1)
    assert at_mm.max() == pytest.approx(0.0, abs=0.1)


def test_a_disc_drawn_from_the_star_side_is_mirrored_as_the_drawing_is() -> None:
    label, star = (disc_of(TARNLIGHT, cutter, [(17, 45.0)]) for cutter in (LASER, PRESS))
    middle_mm, up_mm = BOX_LEFT_MM + BOX_WIDTH_MM / 2, 53.6 * math.sqrt(0.5)

    def ink_near(disc: Disc) -> tuple[bool, bool]:
        """Whether there is ink where the slot is, and where it is mirrored: about 45° up, or down."""
        ink, rows = ink_of(sheet_of(disc), 0), np.arange(-1.5, 1.5, PIXEL_MM)
        near = (middle_mm + up_mm - 3, middle_mm + up_mm + 3)
        centre_mm = BOX_TOP_MM - CENTRE_DOWN_MM
        upper, lower = (
            any(len(row_of(ink, centre_mm + side * up_mm + row, *near)) for row in rows) for side in (1, -1)
        )
        return upper, lower

    assert ink_near(label) == (True, False)
    assert ink_near(star) == (False, True)
    assert "STAR SIDE Drawn as seen from this side (mirrored from the label side)." in words_of(sheet_of(star))
    assert "Turns clockwise seen from this side" in words_of(sheet_of(star))
    assert "Turns anticlockwise seen from this side" in words_of(sheet_of(label))


@pytest.mark.parametrize("side", ["behind", "ahead"])
def test_the_section_of_a_fold_is_the_fold_that_is_laid_out(side: str) -> None:
    disc = disc_of(FERNHOLLOW, laser_with(fold_side=side), [(5, 90.0)])

    section = section_of(disc)

    assert section is not None
    points = np.array(section.tab_mm)
    # Thickness 0.5, inside radius 0.4, depth 1.41: the tip lies a depth under the star-side face.
    assert points[:, 1].min() == pytest.approx(-1.41)
    tip_u = points[points[:, 1] == points[:, 1].min()][:, 0]
    assert tip_u.max() == pytest.approx(0.0)  # the working edge, the face ahead
    assert np.ptp(tip_u) == pytest.approx(0.5)
    # DIN 6935: k = 0.65 + 0.5·log10(0.4/0.5); the neutral fibre of bend and tab together is the flat tab.
    neutral_mm = math.pi / 2 * (0.4 + (0.65 + 0.5 * math.log10(0.8)) * 0.5 / 2) + 1.41 - 0.4
    assert disc.pattern.blank_length_mm == pytest.approx(neutral_mm)
    # One thickness everywhere: the outline's area is its own middle line's length times the thickness.
    straight_mm = 3.4 * 0.5 + (1.41 - 0.4)
    assert shapely.Polygon(points).area == pytest.approx(0.5 * (straight_mm + math.pi / 2 * (0.4 + 0.25)), rel=2e-3)


def test_the_section_of_a_lance_hangs_on_the_nearer_end_of_its_footprint() -> None:
    section = section_of(THREE_LANCES)

    assert section is not None
    # Tool L11: 2.5 long, its working edge 0.8 ahead of the middle: 0.45 ahead of the edge, 2.05 behind it.
    assert max(u for u, z in section.tab_mm if z < -1) == pytest.approx(0.0)
    assert section.sheet_mm[0] == pytest.approx(-2.05)
    assert section.away == -1
    assert section.tip_mm == pytest.approx(-1.55)


@pytest.mark.parametrize(
    ("forms", "told"),
    [
        (None, "forms the tab to the star side."),
        ("up", "forms the tab upward: the star side lies above on the machine."),
        ("down", "forms the tab downward: the label side lies above on the machine."),
    ],
)
def test_a_lance_is_told_with_the_way_its_press_forms(forms: str | None, told: str) -> None:
    document = PRESS.model_dump(mode="json")
    cutter = Cutter.model_validate(document | {"press": document["press"] | {"forms": forms}})

    assert told in words_of(sheet_of(disc_of(FERNHOLLOW, cutter, [(5, 90.0)])))


def test_slots_and_what_a_cutter_cannot_form_have_no_section() -> None:
    no_fold = Cutter.model_validate(LASER.model_dump() | {"fold": None})
    no_tool = Cutter.model_validate(PRESS.model_dump() | {"tools": ()})

    assert section_of(THREE_SLOTS) is None
    for cutter in (no_fold, no_tool):
        disc = disc_of(FERNHOLLOW, cutter, [(5, 90.0)])
        assert section_of(disc) is None
        assert f"{cutter.id} states no way to make these projections: see the findings." in words_of(sheet_of(disc))


def test_a_fold_is_told_with_its_angle_radius_line_and_flat() -> None:
    stated, unstated = words_of(sheet_of(one_fold(springback={"opens_deg": 3.5}))), words_of(sheet_of(one_fold()))

    assert "Bend to 93.5°: it opens by 3.5° (as the shop measured) and rests at 90°." in stated
    assert "bend to 93.5°" in stated
    assert "Springback is not stated: find the angle to bend to on a trial piece" in unstated
    assert "bend to" not in unstated.replace("angle to bend to", "")
    # k = 0.65 + 0.5·log10(0.8) = 0.6015; allowance π/2·(0.4 + 0.6015·0.25) = 0.8646; 0.4 − 0.4323 = −0.03; flat
    # 0.8646 + 1.41 − 0.4 = 1.87.
    assert "Inside radius 0.4 mm in 0.5 mm sheet; fold line (middle of the bend) 0.03 mm behind" in unstated
    assert "flat tab 1.87 mm; the flat tab lies behind its fold line" in unstated


def test_deburring_comes_before_folding_and_stays_on_the_burr_side() -> None:
    burr = Cutter.model_validate(LASER.model_dump() | {"burr_side": "star-side"})

    words, sided = words_of(sheet_of(one_fold())), words_of(sheet_of(disc_of(FERNHOLLOW, burr, [(5, 90.0)])))

    assert words.index("Deburr both sides.") < words.index("Then fold, never before deburring.")
    assert "Deburr the star side, where the burr is." in sided
    assert "burr on the star side" in sided


def test_a_press_strikes_slots_and_cuts_nothing_hot() -> None:
    struck, cut = (words_of(sheet_of(disc)) for disc in (SLOTS_ON_A_PRESS, THREE_SLOTS))

    assert "2. Strike the holes, then the slots, the rim last. 3. Take out every slug. Deburr both sides." in struck
    assert "when it is cool" not in struck
    assert "2. Cut; take the disc out when it is cool." in cut


def test_a_rim_that_bridges_hold_is_one_in_pieces() -> None:
    bridged = Cutter.model_validate(LASER.model_dump(mode="json") | {"bridges": {"count": 4, "width_mm": 0.6}})

    whole, held = (words_of(sheet_of(disc_of(FERNHOLLOW, cutter, [(5, 90.0)]))) for cutter in (LASER, bridged))

    assert "holes 4 rim 1 projections 1" in whole
    assert "holes 4 rim 1, in 4 pieces projections 1" in held


def test_the_index_mark_is_looked_for_on_the_side_that_is_marked() -> None:
    barb = "up, the index mark's barb points the way the disc turns."

    from_label, from_star = (words_of(sheet_of(disc)) for disc in (THREE_SLOTS, SLOTS_ON_A_PRESS))

    assert f"Label side {barb}" in from_label
    assert f"Star side {barb}" in from_star


def test_the_height_has_a_gauge_for_each_end_of_its_band() -> None:
    # 1.41 ± 0.08: 1.33 and 1.49. A tab of 1.41 that leans by asin(0.05/1.41) = 2.03° has its tip 0.05 mm off.
    words = words_of(sheet_of(ONE_FOLD))

    assert "1.41 ± 0.08 mm: a gauge set to 1.49 mm goes over every tip, one set to 1.33 mm over none." in words
    assert "at 2.0° off, its tip is out of place by 0.05 mm, the cutter's own tolerance." in words


def test_the_limits_of_the_blank_are_told_and_what_is_not_stated_is_named() -> None:
    bare = words_of(sheet_of(disc_of(movement_with(flatness_mm=0, run_out_mm=0), LASER, [(5, 90.0)])))
    stated = words_of(
        sheet_of(disc_of(movement_with(centre_hole_play_mm=0.05, rolled_along_deg=30), LASER, [(5, 90.0)]))
    )

    assert "Flatness: no limit stated" in bare
    assert "Run-out" not in bare
    assert "play on the spindle not stated" in bare
    assert "rolled along not stated" in bare
    assert "nowhere more than 0.12 mm off it" in stated
    assert "not above 0.08 mm" in stated
    assert "Ø 9 mm; 0.05 mm wider than the spindle" in stated
    assert "rolled along 30° from the index mark, anticlockwise seen from the label side" in stated
    assert "thickness 0.5 mm blank Ø 237 mm" in stated


def test_the_kerf_is_told_by_what_the_lines_mean() -> None:
    compensated = Cutter.model_validate(LASER.model_dump() | {"kerf_compensated": True})
    by_cutter = (
        (LASER, "0.12 mm; outlines are finished edges, not compensated: set off half the kerf into the scrap"),
        (OPEN_LASER, "set off half the kerf into the scrap; open slits are one kerf wide, cut on the line"),
        (compensated, "0.12 mm, compensated in the drawing: cut on the line"),
    )

    for cutter, said in by_cutter:
        assert said in words_of(sheet_of(disc_of(FERNHOLLOW, cutter, [(5, 90.0)])))
    assert "kerf none: a press strikes out what its tool is" in words_of(sheet_of(THREE_LANCES))


def test_two_slots_side_by_side_leave_the_web_between_their_tracks() -> None:
    # Tracks 2.1 mm apart (33.6/16), slots 1.3 mm wide: 0.8 mm of metal, its middle 1.05 mm outside track 1.
    [web] = thinnest_webs(disc_of(TARNLIGHT, LASER, [(2, 60.0), (1, 60.0)]), 5)

    assert web.tracks == (1, 2)
    assert web.web_mm == pytest.approx(0.8, abs=1e-9)
    assert web.radius_mm == pytest.approx(21.05, abs=0.1)
    assert web.angle_deg == pytest.approx(62, abs=3)  # the slots reach on from the edge, anticlockwise
    assert "1 and 2" in words_of(sheet_of(disc_of(TARNLIGHT, LASER, [(2, 60.0), (1, 60.0)])))
    assert "0.800" in words_of(sheet_of(disc_of(TARNLIGHT, LASER, [(2, 60.0), (1, 60.0)])))


def test_a_web_s_angle_is_that_of_the_drawing() -> None:
    placed = [(1, 60.0), (2, 60.0)]
    other_side = LASER.model_copy(update={"drawn_from": "star-side"})
    [label], [star] = (thinnest_webs(disc_of(TARNLIGHT, cutter, placed), 5) for cutter in (LASER, other_side))

    assert star.web_mm == pytest.approx(label.web_mm)
    assert star.angle_deg == pytest.approx(360 - label.angle_deg)


@pytest.mark.parametrize("disc", [EMPTY_DISC, ONE_FOLD])
def test_a_disc_of_fewer_than_two_openings_has_no_web_between_them(disc: Disc) -> None:
    assert thinnest_webs(disc, 5) == ()


def test_openings_far_apart_still_have_a_thinnest_web() -> None:
    webs = thinnest_webs(disc_of(MOSSBROOK, LASER, [(1, 0.0), (67, 180.0)]), 5)

    assert len(webs) == 1
    assert webs[0].web_mm > 250  # 45 + 210 mm less the openings


@settings(max_examples=tried(25), deadline=None)
@given(
    placed=st.lists(st.tuples(st.integers(1, 31), st.integers(0, 359)), min_size=2, max_size=12, unique=True),
    most=st.integers(1, 6),
)
def test_the_webs_to_measure_are_the_thinnest_of_all_pairs(placed: list[tuple[int, int]], most: int) -> None:
    disc = disc_of(FERNHOLLOW, LASER, [(track, float(angle_deg)) for track, angle_deg in placed])

    webs = thinnest_webs(disc, most)

    # Every pair of opening outlines, straight from the pattern.
    corners = on_disc_mm(disc.pattern.opening.points_mm, disc.radius_mm, disc.edge_angle_rad, disc.turning.direction)
    openings = [shapely.Polygon(points) for points in corners]
    pairs = [(i, j) for i in range(len(openings)) for j in range(i + 1, len(openings))]
    wanted = sorted(openings[i].distance(openings[j]) for i, j in pairs)[:most]
    assert [web.web_mm for web in webs] == pytest.approx(wanted, abs=2e-6)


LASER_MAKING = Making(
    cut_length_mm=12345.6,
    mark_length_mm=2222.0,
    rapid_length_mm=9876.0,
    pierce_count=364,
    hit_count=0,
    blank_mass_kg=0.17315,
    disc_mass_kg=0.17,
    time_s=1234.5,
    price_lines=(
        PriceLine(name="setup", quantity=Decimal(1), per="disc", rate=Decimal("12.50"), amount=Decimal("12.50")),
        PriceLine(
            name="machine time",
            quantity=Decimal("20.5750"),
            per="min",
            rate=Decimal("1.80"),
            amount=Decimal("37.04"),  # 20.5750 · 1.80 = 37.035, half to even
        ),
        PriceLine(name="pierces", quantity=Decimal(364), per="pierce", rate=Decimal("0.01"), amount=Decimal("3.64")),
        PriceLine(name="sheet", quantity=Decimal("0.1732"), per="kg", rate=Decimal("3.20"), amount=Decimal("0.55")),
    ),
    total=Decimal("53.73"),
    currency="EUR",
    currency_decimals=2,
)


def test_what_making_takes_is_told_in_full() -> None:
    words = words_of(sheet_of(ONE_FOLD, making=LASER_MAKING, not_good="trial"))  # the page with the least room

    for said in (
        *("cut 12.346 m", "marked 2.222 m", "between cuts 9.876 m", "pierced 364 times", "machine time 20 min 34.5 s"),
        *("mass of blank 0.1731 kg", "mass of disc 0.1700 kg", "setup 12.50 EUR 1 × 12.50 per disc"),
        *("machine time 37.04 EUR 20.5750 × 1.80 per min", "pierces 3.64 EUR 364 × 0.01 per pierce"),
        *("sheet 0.55 EUR 0.1732 × 3.20 per kg", "price 53.73 EUR"),
    ):
        assert said in words
    assert "struck" not in words
    assert "Not stated" not in words


def test_what_nobody_stated_is_named_and_nothing_is_guessed() -> None:
    unstated = Making(not_stated=("cutter.feeds.cut_mm_per_s", "cutter.rates"))

    words = words_of(sheet_of(ONE_FOLD, making=unstated))

    assert "Not stated, so not told: cutter.feeds.cut_mm_per_s, cutter.rates." in words
    assert "machine time" not in words
    assert "Not counted" not in words
    press = words_of(sheet_of(ONE_FOLD, making=Making(not_counted=("holes", "rim"))))
    assert "Not counted in time and price: holes, rim." in press
    assert "What making it takes" not in words_of(sheet_of(ONE_FOLD, making=None))


def test_where_no_line_has_room_none_is_written() -> None:
    assert at_most(0, "The disc weighs 140 g.", SMALL, 10.0) == []


def test_accents_that_stand_alone_and_signs_that_are_not_seen_leave_no_gap() -> None:
    # U+0301 alone on a blank, U+200D between two letters, U+20DD round one
    assert printable("a \u0301b c\u200dd e\u20dd") == "a b cd e"


def test_at_a_scale_where_no_bar_has_room_the_shortest_is_drawn() -> None:
    assert bar_mm(Scale(on_paper=50, in_fact=1), 0.001) == 0.0001  # 0.005 mm on paper
