"""Marks: the index mark shows a wrong side, and lettering stands only where there is room."""

from collections.abc import Sequence

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.cut import CutPlan, plan_cuts
from layout.cut.plan import Circles, Drawing, Lettering, Outlines
from layout.documents import Cutter, Movement
from layout.mechanics.lettering import strokes_mm
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.thorough import tried

STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})
FINGERPRINT = "0123456789abcdef"
BURR = "BURR ON STAR SIDE"  # where the shipped laser leaves it
# Two tracks right beside the centre hole and right at the rim leave no band free; between them is metal.
CROWDED = {
    "disc/outer_diameter_mm": 104,
    "disc/centre_hole_mm": 12,
    "tracks": [{"track": 1, "radius_mm": 8}, {"track": 2, "radius_mm": 50}],
    "teeth": [{"tooth": 1, "track": 1, "pitch": "C5"}, {"tooth": 2, "track": 2, "pitch": "E5"}],
    "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.4},
}


def plan_of(
    disc: Disc, title: str = "The Long Meadow", not_good: str | None = None, order_number: str | None = None
) -> CutPlan:
    return plan_cuts(disc, title=title, fingerprint=FINGERPRINT, not_good=not_good, order_number=order_number)


def lettering_of(drawing: Drawing) -> list[Lettering]:
    return [entity for entity in drawing.entities if isinstance(entity, Lettering)]


def texts(drawing: Drawing) -> list[str]:
    return [entity.text for entity in lettering_of(drawing)]


def index_mark(drawing: Drawing) -> Outlines:
    [mark] = [e for e in drawing.entities if isinstance(e, Outlines) and e.layer == "MARKS"]
    return mark


@pytest.mark.parametrize(
    ("turns", "cutter", "side"),
    [
        # A clockwise disc carries its +X point towards −y; from the star side that is +y; and the other way round.
        ("clockwise", LASER, -1),
        ("anticlockwise", LASER, 1),
        ("clockwise", STAR_SIDE_LASER, 1),
        ("anticlockwise", STAR_SIDE_LASER, -1),
    ],
)
def test_the_barb_of_the_index_mark_points_the_way_the_disc_turns(turns: str, cutter: Cutter, side: int) -> None:
    mark = index_mark(plan_of(disc_of(movement_with({"turns": turns}), [], cutter)).disc)

    # Track 3 is at 100 mm and the rim at 120, so the mark has its full 6 mm, in the middle between the
    # farthest point of an opening, √(101.02² + 1.894545²) = 101.037764, and the rim: at x = 110.518882.
    assert not mark.closed
    expected = np.array([(107.518882, 0), (113.518882, 0), (110.518882, side * 3)])
    assert mark.points_mm[0] == pytest.approx(expected, abs=1e-6)


def test_an_index_mark_that_finds_no_room_outside_stands_inside_the_innermost_track() -> None:
    narrow = movement_with({"disc/outer_diameter_mm": 203})  # 0.46 mm left outside the openings of track 3

    mark = index_mark(plan_of(disc_of(narrow, [])).disc)

    assert 5 < mark.points_mm[0, :, 0].min() < mark.points_mm[0, :, 0].max() < 48.98
    assert mark.points_mm[0, :2, 1].tolist() == [0.0, 0.0]


def test_an_index_mark_keeps_clear_of_a_notch_at_its_own_angle() -> None:
    notch = {"purpose": "location", "shape": "notch", "radius_mm": 120, "width_mm": 30, "length_mm": 8}

    mark = index_mark(plan_of(disc_of(movement_with({"disc/features": [notch]}), [])).disc)

    assert mark.points_mm[0, :, 0].max() < 48.98


def length_mm(mark: Outlines) -> float:
    return float(np.hypot(*(mark.points_mm[0, 1] - mark.points_mm[0, 0])))


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_index_mark_is_large_enough_to_be_seen_in_a_picture_of_the_whole_disc(
    movement: Movement, cutter: Cutter
) -> None:
    mark = index_mark(plan_of(disc_of(movement, [(1, 1.0)], cutter)).disc)

    # 1.5 % of the diameter is 6 pixels of 400; under 2 mm it is missed on the disc itself
    assert length_mm(mark) >= max(0.015 * movement.disc.outer_diameter_mm, 2.0)


def test_the_index_mark_is_smaller_where_there_is_no_room_for_a_larger_one() -> None:
    # From the hole to the openings of track 1 are 48.98 - 46 = 2.98 mm, less 0.5 on either side: 1.98.
    narrow = movement_with({"disc/outer_diameter_mm": 203, "disc/centre_hole_mm": 92})

    assert length_mm(index_mark(plan_of(disc_of(narrow, [])).disc)) == pytest.approx(1.5)


@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
def test_a_small_disc_with_a_long_title_and_a_warning_still_says_all(cutter: Cutter) -> None:
    side = "STAR SIDE" if cutter is PRESS else "LABEL SIDE"

    plan = plan_of(disc_of(SHIPPED[2], [(1, 1.0)], cutter), title="The Ballad of the Miller " * 4, not_good="trial")

    expected = {"NOT GOOD TO CUT", side, "tarnlight-17 rev 1", FINGERPRINT, "The Ballad of the Miller The..."}
    expected |= {BURR} if cutter is LASER else set()
    assert set(texts(plan.disc)) == expected
    assert set(texts(plan.record)) == expected | {"RECORD - NOT FOR CUTTING"}


@pytest.mark.parametrize("movement", SHIPPED[:2], ids=lambda movement: movement.id)
def test_lines_stand_apart_rather_than_small(movement: Movement) -> None:
    plan = plan_of(disc_of(movement, [(1, 1.0)]), title="The Ballad of the Miller", order_number="2026/118-B")

    # ISO 3098 starts technical lettering at 1.8 mm; every line here has a capital or a figure, which is as tall.
    heights_mm = [np.ptp(np.concatenate(line.strokes_mm)[:, 1]) for line in lettering_of(plan.disc)]
    assert len(heights_mm) == 6
    assert min(heights_mm) >= 1.8 - 1e-9


def test_a_title_is_shortened_further_before_anything_else_is_left_out() -> None:
    # Inside there is no room, and outside the openings, which reach to 50.87 mm, only a band up to the rim.
    movement = movement_with(CROWDED | {"disc/outer_diameter_mm": 109})

    plan = plan_of(disc_of(movement, [(1, 1.0)]), title="The Ballad of the Miller and his Sons")

    assert set(texts(plan.disc)) == {"LABEL SIDE", "plain-3 rev 1", BURR, FINGERPRINT, "The Ballad of..."}


def test_letters_along_the_rim_are_turned_but_never_mirrored() -> None:
    hidden = [{"from_radius_mm": 0, "to_radius_mm": 20, "why": "clamp"}]
    tarnlight = Movement.model_validate(SHIPPED[2].model_dump() | {"keep_out": hidden})

    plan = plan_of(disc_of(tarnlight, [], STAR_SIDE_LASER), title="LLLLLLLLLLLL", not_good="a trial piece")

    # L is drawn down, then to the right: (0, -1) x (1, 0) = +1, as long as it is only turned.
    assert len(lettering_of(plan.record)) == 7
    [line] = [line for line in lettering_of(plan.record) if line.text.startswith("L")]
    tall, bar = (stroke[-1] - stroke[0] for stroke in line.strokes_mm[:2])
    assert tall[0] * bar[1] - tall[1] * bar[0] > 0
    assert abs(tall[0]) > 0.1  # so it is one that is turned
    outwards = line.strokes_mm[0][0]
    assert np.dot(-tall, outwards) * outwards[1] > 0  # tops to the rim above the centre, to the centre below it


def test_lettering_says_title_movement_side_and_fingerprint() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)]))

    assert texts(plan.disc) == ["The Long Meadow", "plain-3 rev 1", "LABEL SIDE", BURR, FINGERPRINT]
    assert texts(plan.record) == ["RECORD - NOT FOR CUTTING", *texts(plan.disc)]


def test_the_order_number_stands_under_the_sides_and_in_the_head() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)]), order_number="2026/118-B")

    assert texts(plan.disc) == ["The Long Meadow", "plain-3 rev 1", "LABEL SIDE", BURR, "ORDER 2026/118-B", FINGERPRINT]
    tops = [max(stroke[:, 1].max() for stroke in line.strokes_mm) for line in lettering_of(plan.disc)]
    assert tops == sorted(tops, reverse=True)  # read from the top
    assert plan.disc.comments[1:3] == ("title: The Long Meadow", "order: 2026/118-B")
    assert plan.record.comments[2:4] == plan.disc.comments[1:3]


def test_an_order_number_is_whole_or_missing_never_shortened() -> None:
    # Only a band of 3.63 mm up to the rim is free, of which a line of 1.2 mm keeps 0.5 mm clear on both sides.
    movement = movement_with(CROWDED | {"disc/outer_diameter_mm": 109})
    number = "2026-0000118/B-" + "7" * 25

    band = texts(plan_of(disc_of(movement, [(1, 1.0)]), title=" ", order_number=number).disc)
    room = texts(plan_of(disc_of(PLAIN, []), order_number=number).disc)

    assert not any("2026" in text and number not in text for text in band)
    assert f"ORDER {number}" in room


@pytest.mark.parametrize("burr_side", ["label-side", "star-side"])
def test_the_burr_side_is_lettered_and_stands_in_the_head(burr_side: str) -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)], cutter_with({"burr_side": burr_side})))

    side = burr_side.replace("-", " ")
    assert f"BURR ON {side.upper()}" in texts(plan.disc)
    assert f"burr: on the {side}" in plan.disc.comments


def test_a_burr_side_that_is_not_stated_is_not_told() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)], cutter_with({"burr_side": None})))

    assert not any("burr" in line.lower() for line in (*texts(plan.record), *plan.record.comments))


def test_a_cutter_without_labels_letters_its_warnings_and_the_index_mark_alone() -> None:
    disc = disc_of(PLAIN, [(1, 1.0)], cutter_with({"labels": False}))

    good, faulty = plan_of(disc, order_number="118"), plan_of(disc, not_good="a trial piece")

    assert texts(good.disc) == []
    assert texts(good.record) == ["RECORD - NOT FOR CUTTING"]
    assert texts(faulty.disc) == ["NOT GOOD TO CUT"]
    assert texts(faulty.record) == ["RECORD - NOT FOR CUTTING", "NOT GOOD TO CUT"]
    assert index_mark(good.disc).points_mm == pytest.approx(index_mark(plan_of(disc_of(PLAIN, [])).disc).points_mm)
    assert "order: 118" in good.disc.comments


def test_the_head_says_how_far_a_fold_is_bent() -> None:
    folds = "folds: to the star side, to stand at 90 degrees; bend to {} degrees, for they open again"

    soft, stiff = (
        plan_of(disc_of(PLAIN, [], cutter_with({"fold/springback": {"opens_deg": opens}}))).disc for opens in (1.5, 2)
    )
    unknown = plan_of(disc_of(PLAIN, [], cutter_with({"fold/springback": None}))).disc
    slots = plan_of(disc_of(SHIPPED[2], [])).disc

    assert folds.format("91.5") in soft.comments
    assert folds.format("92") in stiff.comments
    assert not any(line.startswith("folds") for line in (*unknown.comments, *slots.comments))


def test_head_and_label_say_whether_the_kerf_is_added_so_that_nobody_adds_it_twice() -> None:
    added = "outlines are the beam's path, compensated for a kerf of 0.12 mm already; add none"
    finished = "outlines are finished edges; kerf is not added"

    plain, compensated = (
        plan_of(disc_of(PLAIN, [(1, 1.0)], cutter_with({"kerf_compensated": done}))) for done in (False, True)
    )

    for drawing in (plain.disc, plain.record):
        assert finished in drawing.comments
        assert added not in drawing.comments
        assert not any("KERF" in text for text in texts(drawing))
    for drawing in (compensated.disc, compensated.record):
        assert added in drawing.comments
        assert finished not in drawing.comments
        assert "KERF COMPENSATED 0.12" in texts(drawing)


def test_the_head_tells_of_open_slits_only_where_there_are_any() -> None:
    cutter = cutter_with({"fold/slit": "centre-line", "fold/slit_width_mm": None})

    folds, slots = (plan_of(disc_of(movement, [], cutter)).disc.comments for movement in (PLAIN, SHIPPED[2]))

    assert any("one kerf of 0.12 mm wide" in line for line in folds)
    assert not any("one kerf of" in line for line in slots)


def test_lettering_warns_first_that_a_disc_is_not_good_to_cut() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)], STAR_SIDE_LASER), not_good="a trial piece")

    assert texts(plan.disc) == ["NOT GOOD TO CUT", "The Long Meadow", "plain-3 rev 1", "STAR SIDE", BURR, FINGERPRINT]
    assert texts(plan.record)[:2] == ["RECORD - NOT FOR CUTTING", "NOT GOOD TO CUT"]


def test_a_warning_stands_among_the_openings_when_there_is_no_room_elsewhere() -> None:
    disc = disc_of(movement_with(CROWDED), [(1, 1.0), (2, 2.0), (2, 30.0)])

    plan = plan_of(disc, not_good="a trial piece")

    assert texts(plan.disc) == ["NOT GOOD TO CUT"]
    assert texts(plan.record) == ["RECORD - NOT FOR CUTTING", "NOT GOOD TO CUT"]
    assert strokes_of(plan.disc).distance(openings_of(plan)) >= 0.5 - 1e-6


def test_a_disc_without_room_has_no_lettering() -> None:
    plan = plan_of(disc_of(movement_with(CROWDED), [(1, 1.0)]))

    assert texts(plan.disc) == []


def test_lettering_and_mark_keep_out_of_places_that_a_clamp_hides() -> None:
    clamped = movement_with({"keep_out": [{"from_radius_mm": 0, "to_radius_mm": 49, "why": "clamp"}]})

    plan = plan_of(disc_of(clamped, []), not_good="a trial piece")

    # Nothing is left inside track 1; between track 3 and the rim there is room for a line or two.
    assert texts(plan.disc)[0] == "NOT GOOD TO CUT"
    assert not strokes_of(plan.disc).intersects(shapely.Point(0, 0).buffer(49))


def test_where_a_clamp_hides_all_room_there_is_still_all_that_must_be_said() -> None:
    clamped = movement_with({"keep_out": [{"from_radius_mm": 0, "to_radius_mm": 120, "why": "clamp"}]})

    plan = plan_of(disc_of(clamped, []), not_good="a trial piece")
    good = plan_of(disc_of(clamped, []))

    assert texts(plan.disc) == ["NOT GOOD TO CUT", *texts(good.disc)]
    assert texts(good.disc) == ["The Long Meadow", "plain-3 rev 1", "LABEL SIDE", BURR, FINGERPRINT]
    assert index_mark(plan.disc).points_mm[0, :, 0].max() < 48.98


def test_letters_read_right_on_the_side_drawn() -> None:
    from_label, from_star = (
        plan_of(disc_of(PLAIN, [], cutter), title="FL").disc for cutter in (LASER, STAR_SIDE_LASER)
    )

    # The strokes of F and L: the tall stroke of each stands left of its bars, on either side of the disc.
    for drawing in (from_label, from_star):
        [line] = [line for line in lettering_of(drawing) if line.text == "FL"]
        tall = [stroke[:, 0].max() for stroke in line.strokes_mm if np.ptp(stroke[:, 0]) < 1e-9]
        bars = [stroke[:, 0].max() for stroke in line.strokes_mm if np.ptp(stroke[:, 1]) < 1e-9]
        tops = [stroke[:, 1].max() for stroke in line.strokes_mm]
        assert len(tall) == 2
        assert all(x < max(bars) for x in tall)
        assert line.strokes_mm[0][0, 1] == max(tops)  # F starts at its top left, the library's own order


def test_a_letter_is_as_tall_as_asked_and_stands_on_its_line() -> None:
    strokes = strokes_mm("H", 2.1)

    # Simplex Roman H (Hershey 1967, glyph 508): 14 units wide, 21 tall; here 0.1 mm a unit.
    points = np.concatenate(strokes)
    assert points.min(axis=0) == pytest.approx([-0.7, 0.0])
    assert points.max(axis=0) == pytest.approx([0.7, 2.1])


def test_every_printable_letter_but_the_blank_has_strokes_without_still_points() -> None:
    for letter in map(chr, range(ord("!"), ord("~") + 1)):
        strokes = strokes_mm(letter, 2.0)

        assert strokes, letter
        assert all(len(stroke) >= 2 and (np.diff(stroke, axis=0) != 0).any(axis=1).all() for stroke in strokes), letter


def test_a_title_is_engraved_in_plain_letters_and_shortened() -> None:
    title = "Žluťoučký kůň — 音楽\n über den Wiesen, eine sehr lange Weise"

    plan = plan_of(disc_of(PLAIN, []), title=title)

    # No like of the two ideographs in ASCII: twice "?"; 32 characters at most.
    assert texts(plan.disc)[0] == "Zlutoucky kun - ?? uber den W..."
    assert plan.title == title
    assert "title: Zlutoucky kun - ?? uber den Wiesen, eine sehr lange Weise" in plan.disc.comments


@pytest.mark.parametrize("title", ["Пчёлы летят", "音楽", "🎵 🎶 ?"])
def test_a_title_without_letters_the_font_knows_is_left_off_the_disc_but_not_out_of_the_file(title: str) -> None:
    plan = plan_of(disc_of(PLAIN, []), title=title)

    assert texts(plan.disc) == ["plain-3 rev 1", "LABEL SIDE", BURR, FINGERPRINT]
    assert f"title: {title}" in plan.disc.comments


def test_a_title_of_blanks_is_left_out() -> None:
    plan = plan_of(disc_of(PLAIN, []), title=" \t ")

    assert texts(plan.disc) == ["plain-3 rev 1", "LABEL SIDE", BURR, FINGERPRINT]


def test_comments_say_what_the_drawing_is() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)], PRESS))

    assert plan.disc.comments == (
        "discwright 0.1.0",
        "title: The Long Meadow",
        "movement: plain-3 revision 1",
        "blank: cold-rolled steel, 0.5 mm thick",
        "cutter: turn-press",
        "fingerprint: 0123456789abcdef",
        "drawn from the star side; origin at the disc centre; millimetres",
        "outlines are finished edges; kerf is not added",
        "hits: one point for each projection, where the tool strikes; tool L12",
        "index mark: at disc angle 0; its barb points the way the disc turns",
    )
    assert plan.record.comments == ("RECORD - NOT FOR CUTTING", *plan.disc.comments)


def test_a_disc_of_a_set_says_which_it_is_under_its_title_and_in_the_head() -> None:
    disc = disc_of(PLAIN, [(1, 1.0)])

    plan = plan_cuts(disc, title="The Long Meadow", fingerprint=FINGERPRINT, not_good=None, part="disc 2 of 3")
    alone = plan_cuts(disc, title="The Long Meadow", fingerprint=FINGERPRINT, not_good=None)

    lines = ["The Long Meadow", "DISC 2 OF 3", "plain-3 rev 1", "LABEL SIDE", BURR, FINGERPRINT]
    assert sorted(texts(plan.disc)) == sorted(lines)
    assert texts(alone.disc) == [line for line in lines if line != "DISC 2 OF 3"]
    assert plan.disc.comments[1:3] == ("title: The Long Meadow", "disc 2 of 3")
    assert plan.record.comments[2:4] == ("title: The Long Meadow", "disc 2 of 3")
    assert plan.part == "disc 2 of 3"


def test_comments_warn_first_and_stay_short_plain_single_lines() -> None:
    plan = plan_of(disc_of(PLAIN, []), not_good="pièce d'essai\r\n0\nEOF\n" + "x" * 500)

    assert plan.disc.comments[0].startswith("NOT GOOD TO CUT: piece d'essai 0 EOF xxx")
    assert plan.record.comments[1] == plan.disc.comments[0]
    for line in (*plan.disc.comments, *plan.record.comments):
        assert line.isascii()
        assert line.isprintable()
        assert len(line) <= 250  # DXF reference: under the 255 of old releases


def test_a_press_without_a_fitting_tool_says_so() -> None:
    plan = plan_of(disc_of(PLAIN, [(1, 1.0)], cutter_with({"tools": []}, PRESS)))

    said = "hits: one point for each projection, where the tool strikes; this press has no tool that fits"
    assert said in plan.disc.comments
    assert plan.tool == ""


def strokes_of(drawing: Drawing) -> shapely.Geometry:
    strokes = [stroke for line in lettering_of(drawing) for stroke in line.strokes_mm]
    return shapely.union_all([*shapely.linestrings(index_mark(drawing).points_mm), *map(shapely.LineString, strokes)])


def openings_of(plan: CutPlan) -> shapely.Geometry:
    """What is no metal after forming, from the record alone; round ends as the polygon of their corners."""
    shapes: list[shapely.Geometry] = []
    for entity in plan.record.entities:
        if entity.layer in ("AFTER_FORMING", "HOLES"):
            if isinstance(entity, Circles):
                shapes += circles(entity.centres_mm, entity.radius_mm)
            elif isinstance(entity, Outlines):
                shapes += list(shapely.polygons(entity.points_mm))
    return shapely.union_all(shapes)


def circles(centres_mm: Sequence[Sequence[float]], radius_mm: Sequence[float]) -> list[shapely.Geometry]:
    return [shapely.Point(c).buffer(r, quad_segs=64) for c, r in zip(centres_mm, radius_mm, strict=True)]


@settings(max_examples=tried(20), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    which=st.integers(0, 2),
    cutter=st.sampled_from([LASER, PRESS, STAR_SIDE_LASER]),
    not_good=st.sampled_from([None, "trial"]),
)
def test_marks_are_clear_of_openings_holes_tracks_and_keep_outs(
    seed: int, which: int, cutter: Cutter, not_good: str | None
) -> None:
    movement = SHIPPED[which]
    dice = np.random.default_rng(seed)
    plucks = [(int(dice.integers(1, len(movement.tracks) + 1)), float(dice.uniform(0, 30))) for _ in range(60)]

    plan = plan_of(disc_of(movement, plucks, cutter), not_good=not_good, order_number="2026/118-B")

    for drawing in (plan.disc, plan.record):
        marks = strokes_of(drawing)
        assert marks.distance(openings_of(plan)) >= 0.5 - 0.02  # 0.02: circles as polygons
        assert_clear_of_rings(marks, movement)
        said = texts(drawing)
        assert said[0] == ("NOT GOOD TO CUT" if not_good and drawing is plan.disc else said[0])
        assert sorted(said) == sorted(set(said))
        assert {FINGERPRINT, "The Long Meadow", f"{movement.id} rev 1", "ORDER 2026/118-B"} <= set(said)
        assert f"{'STAR' if cutter.drawn_from == 'star-side' else 'LABEL'} SIDE" in said


def assert_clear_of_rings(marks: shapely.Geometry, movement: Movement) -> None:
    reach = np.hypot(*shapely.get_coordinates(marks).T)
    half_mm = movement.projection.width_mm / 2
    first_mm, last_mm = movement.tracks[0].radius_mm - half_mm, movement.tracks[-1].radius_mm + half_mm
    assert not ((reach > first_mm - 0.5) & (reach < last_mm + 0.5)).any()
    for ring in movement.keep_out:
        assert not ((reach > ring.from_radius_mm) & (reach < ring.to_radius_mm)).any()
    assert reach.max() < movement.disc.outer_diameter_mm / 2 - 0.5
