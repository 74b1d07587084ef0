import itertools
import math
from typing import Any

import numpy as np
import pytest
import shapely
from ezdxf.math import bulge_to_arc

from layout.cut import plan_cuts
from layout.cut.plan import Outlines
from layout.documents import Cutter, Movement
from layout.errors import DocumentError
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.lettering import strokes_mm
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from layout.trial import trial_piece
from layout.write import write_dxf
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.layout.trial.reading import Read, at_mark, of_tracks, read_dxf, read_piece, shipped_piece, size_mm

FERNHOLLOW, MOSSBROOK, TARNLIGHT = SHIPPED
GRAIN_MM = 2e-5  # what chords for arcs and six decimals leave
EVERY = [
    pytest.param(movement, cutter, id=f"{movement.id}-{cutter.id}") for movement in SHIPPED for cutter in (LASER, PRESS)
]


def too_near(read: Read, web_mm: float) -> list[float]:
    """The webs below a limit, of every pair of openings and holes."""
    cut = [*read.openings, *read.holes]
    webs = [one.distance(two) for one, two in itertools.combinations(cut, 2)]
    return sorted(web for web in webs if web < web_mm - GRAIN_MM)


def label_side_mm(points_mm: np.ndarray, cutter: Cutter) -> np.ndarray:
    return points_mm * (1, -1 if cutter.drawn_from == "star-side" else 1)


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_nothing_is_nearer_than_the_stated_web_but_the_steps_of_the_web_ladder(
    movement: Movement, cutter: Cutter
) -> None:
    piece, read = shipped_piece(movement.id, cutter.id)

    # 1.5 times the larger of the least web (0.5 on both cutters) and the sheet: 0.75 on 0.5 mm, 0.9 on 0.6 mm.
    assert piece.web_mm == pytest.approx(1.5 * movement.disc.thickness_mm)
    below = [1.0, 0.75, 0.625, 0.5, 0.375, 0.25]  # of the least web: 2, 1.5, 1.25, 1, 0.75 and 0.5 times 0.5 mm
    assert too_near(read, piece.web_mm) == pytest.approx(
        sorted(web for web in below if web < piece.web_mm), abs=GRAIN_MM
    )


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_everything_lies_inside_the_outline_which_is_closed_and_last(movement: Movement, cutter: Cutter) -> None:
    piece, read = shipped_piece(movement.id, cutter.id)

    assert read.layers[-1] == "RIM"
    assert read.layers.count("RIM") == 1
    assert read.outline.is_valid
    inside = read.outline.buffer(-cutter.min_web_mm)
    assert all(inside.contains(shape) for shape in [*read.openings, *read.holes])
    assert all(read.outline.contains(mark) for mark in read.marks)
    assert piece.not_tried == ()


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_what_is_cut_comes_in_the_order_of_a_disc(movement: Movement, cutter: Cutter) -> None:
    _, read = shipped_piece(movement.id, cutter.id)

    openings = {"SLITS", "SLOTS", "HITS"}
    order = [what for what, _ in itertools.groupby("openings" if one in openings else one for one in read.layers)]
    hits_last = cutter.kind == "punch-press"
    assert order == ["MARKS", *(["HOLES", "openings"] if hits_last else ["openings", "HOLES"]), "RIM"]


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_the_letters_touch_nothing_that_is_cut(movement: Movement, cutter: Cutter) -> None:
    _, read = shipped_piece(movement.id, cutter.id)

    cut = shapely.union_all([*read.openings, *read.holes])
    # An engraved line is 0.1 to 0.2 mm wide (common practice), so half a millimetre keeps it off an edge.
    assert min(mark.distance(cut) for mark in read.marks) >= 0.5
    words = list(read.letters.values())
    assert min(one.distance(two) for one, two in itertools.combinations(words, 2)) >= 0.7


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_each_track_has_one_projection_in_the_pattern_of_a_disc(movement: Movement, cutter: Cutter) -> None:
    _, read = shipped_piece(movement.id, cutter.id)
    pattern, turning = pattern_of(movement, cutter), turning_of(movement)
    flat_mm = np.array([[pattern.strike_u_mm, 0.0]]) if pattern.cut is None else pattern.cut.points_mm
    found = list(read.hits_mm[:, None, :]) if pattern.cut is None else read.vertices
    placed = turning.radius_mm, np.zeros(len(turning.radius_mm)), turning.direction
    at_zero = on_disc_mm(flat_mm, *placed, pattern.strike_u_mm)

    for one, expected in zip(of_tracks(found, at_zero), at_zero, strict=True):
        points = label_side_mm(one, cutter)
        ratio = (points @ [1, 1j]) / (expected @ [1, 1j])
        # One turn about the centre carries the one into the other: no mirroring, no stretching.
        assert np.abs(ratio) == pytest.approx(1.0, abs=1e-7)
        assert ratio == pytest.approx(ratio[0], abs=1e-6)


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_the_projections_pluck_one_after_the_other_and_before_the_line(movement: Movement, cutter: Cutter) -> None:
    _, read = shipped_piece(movement.id, cutter.id)
    pattern, turning = pattern_of(movement, cutter), turning_of(movement)
    flat_mm = np.array([[pattern.strike_u_mm, 0.0]]) if pattern.cut is None else pattern.cut.points_mm
    placed = turning.radius_mm, np.zeros(len(turning.radius_mm)), turning.direction
    found = list(read.hits_mm[:, None, :]) if pattern.cut is None else read.vertices
    ones = of_tracks(found, on_disc_mm(flat_mm, *placed, pattern.strike_u_mm))
    x, y = label_side_mm(np.array([one.mean(axis=0) for one in ones]), cutter).T
    # The middle of the shape stands as far before or behind the edge on every track, in mm; that angle goes.
    behind_mm = pattern.strike_u_mm if pattern.cut is None else float(pattern.cut.points_mm[:, 0].mean())
    edge_rad = np.arctan2(y, x) + turning.direction * np.arctan2(behind_mm, turning.radius_mm)
    played_rad = np.sort(np.unwrap(turning.direction * (edge_rad - turning.release_rad) % (2 * math.pi)))
    line = label_side_mm(shapely.get_coordinates(read.marks[0]), cutter)[1]
    line_rad = turning.direction * math.atan2(line[1], line[0])

    lifts_mm = {tooth.lift_mm or 0.5 for tooth in movement.teeth}
    least_rad = max(lifts_mm) / float(turning.radius_mm[-1])  # over which the outermost tooth is lifted
    assert np.diff(played_rad).min() >= least_rad - 1e-6
    # All that plays does so before the line, which is cut in half by no opening.
    after = np.unwrap(np.append(played_rad, line_rad % (2 * math.pi)))
    assert after[-1] > after[-2]


def test_the_kerf_ladder_has_slots_as_wide_as_it_says() -> None:
    piece, read = read_piece(FERNHOLLOW, LASER)

    [kerf] = [ladder for ladder in piece.ladders if ladder.name == "kerf"]
    # 0.75, 1, 1.5, 2 and 3 times the least slot of 0.4 mm.
    assert [step.nominal_mm for step in kerf.steps] == [0.3, 0.4, 0.6, 0.8, 1.2]
    for step in kerf.steps:
        assert size_mm(at_mark(read, step.mark)[0]) == pytest.approx((step.nominal_mm, 5.0), abs=GRAIN_MM)


@pytest.mark.parametrize("movement", [FERNHOLLOW, MOSSBROOK], ids=["fernhollow", "mossbrook"])
def test_tabs_are_as_wide_and_as_deep_as_the_steps_say(movement: Movement) -> None:
    piece, read = read_piece(movement, LASER)
    ladders = {ladder.name: ladder for ladder in piece.ladders}
    thickness, radius, relief, slit = movement.disc.thickness_mm, 0.4, 0.3, 0.42
    # DIN 6935: k = 0.65 + 0.5 log10(r/s); the bend takes (pi/2)(r + k s/2) of the blank.
    bend = math.pi / 2 * (radius + (0.65 + 0.5 * math.log10(radius / thickness)) * thickness / 2)
    nominal_width, nominal_depth = movement.projection.width_mm, movement.projection.depth_mm or 0.0

    for step in ladders["tab-width"].steps:
        across, along = size_mm(at_mark(read, step.mark)[0])
        assert across - 2 * slit == pytest.approx(step.nominal_mm, abs=GRAIN_MM)
        assert along == pytest.approx(relief + bend + nominal_depth - radius + slit, abs=GRAIN_MM)
    for step in ladders["depth"].steps:
        across, along = size_mm(at_mark(read, step.mark)[0])
        assert across == pytest.approx(nominal_width + 2 * slit, abs=GRAIN_MM)
        assert along - slit - relief - bend + radius == pytest.approx(step.nominal_mm, abs=GRAIN_MM)
    around = [-0.2, -0.1, 0.0, 0.1, 0.2]
    assert [step.nominal_mm for step in ladders["depth"].steps] == pytest.approx([nominal_depth + d for d in around])


def test_slots_are_as_wide_and_as_long_as_the_steps_say() -> None:
    piece, read = read_piece(TARNLIGHT, LASER)
    ladders = {ladder.name: ladder for ladder in piece.ladders}

    for step in ladders["slot-width"].steps:
        assert size_mm(at_mark(read, step.mark)[0]) == pytest.approx((step.nominal_mm, 2.2), abs=GRAIN_MM)
    for step in ladders["slot-length"].steps:
        assert size_mm(at_mark(read, step.mark)[0]) == pytest.approx((1.3, step.nominal_mm), abs=GRAIN_MM)


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_each_web_stands_under_its_own_number(movement: Movement, cutter: Cutter) -> None:
    piece, read = shipped_piece(movement.id, cutter.id)

    [web] = [ladder for ladder in piece.ladders if ladder.name == "web"]
    assert web.tool == {"fernhollow-31": "L12", "mossbrook-67": "L11", "tarnlight-17": "S22"}[movement.id] * (
        cutter.kind == "punch-press"
    )
    for step in web.steps:
        one, two = at_mark(read, step.mark, count=2)
        assert one.distance(two) == pytest.approx(step.nominal_mm, abs=GRAIN_MM)


@pytest.mark.parametrize(
    ("movement", "sizes"),
    [
        # turn-press: L12 is its first tool, L11 its second, S22 its third.
        (FERNHOLLOW, {"/tools/0/tab_width_mm": 1.2, "/tools/0/tab_depth_mm": 1.41}),
        (MOSSBROOK, {"/tools/1/tab_width_mm": 1.1, "/tools/1/tab_depth_mm": 1.55}),
        (TARNLIGHT, {"/tools/2/footprint_width_mm": 1.3, "/tools/2/footprint_length_mm": 2.2}),
    ],
    ids=[movement.id for movement in SHIPPED],
)
def test_what_a_press_tool_makes_is_measured_on_the_tracks(movement: Movement, sizes: dict[str, float]) -> None:
    piece = trial_piece(movement, PRESS)

    of_tool = [ladder for ladder in piece.ladders if ladder.tool and ladder.name != "web"]
    [tracks] = [ladder for ladder in piece.ladders if ladder.name == "tracks"]
    assert {step.field: step.nominal_mm for ladder in of_tool for step in ladder.steps} == sizes
    for ladder in of_tool:
        assert [step.mark for step in ladder.steps] == [step.mark for step in tracks.steps]
        assert "more than 0.02 mm is not taken for it" in ladder.how


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_it_is_driven_by_the_holes_of_the_disc(movement: Movement, cutter: Cutter) -> None:
    _, read = shipped_piece(movement.id, cutter.id)
    plan = plan_cuts(disc_of(movement, [], cutter), title="Holes", fingerprint="0" * 16, not_good=None)
    disc = read_dxf(write_dxf(plan.disc, cutter), movement, cutter)

    assert len(read.holes) == len(disc.holes)
    for hole in read.holes:
        nearest = min(disc.holes, key=lambda other: other.centroid.distance(hole.centroid))
        assert hole.symmetric_difference(nearest).area == pytest.approx(0.0, abs=1e-3)


def test_the_other_side_is_the_mirror_image_but_for_the_letters_which_are_turned() -> None:
    _, label = read_piece(MOSSBROOK, LASER)
    _, star = read_piece(MOSSBROOK, cutter_with({"drawn_from": "star-side"}))

    for one, two in zip(label.vertices, star.vertices, strict=True):
        assert two == pytest.approx(one * (1, -1), abs=5e-4)  # the side's name shifts all a little
    assert set(label.letters) ^ set(star.letters) == {"LABEL SIDE", "STAR SIDE"}
    for mark in ("K1", "D5", "T1", "STOP"):
        z_label = shapely.get_coordinates(label.letters[mark]) @ [1, 1j]
        z_star = shapely.get_coordinates(star.letters[mark]) @ [1, 1j]
        assert z_star / z_label == pytest.approx((z_star / z_label)[0], abs=1e-4)


def test_the_sector_keeps_off_a_notch_of_the_rim() -> None:
    _, read = read_piece(MOSSBROOK, LASER)

    # The location notch at 358 degrees is 4 mm long and 1.5 mm deep: its middle lies on the rim at 214 mm.
    notch = shapely.Point(214 * math.cos(math.radians(358)), 214 * math.sin(math.radians(358))).buffer(2.5)
    assert read.outline.distance(notch) > 0


def test_a_notch_that_no_sector_avoids_is_told() -> None:
    feature = {"purpose": "stop", "shape": "notch", "radius_mm": 120, "count": 60, "width_mm": 3, "length_mm": 4}
    movement = movement_with({"disc/features": [feature]})

    piece = trial_piece(movement, LASER)

    assert [left.what for left in piece.not_tried] == ["stop notch at 120 mm"]
    assert piece.not_tried[0].why == (
        "it lies across the sector: take out what stands there in the movement before the piece is put on"
    )


def test_a_track_at_the_rim_is_told_and_left_out() -> None:
    movement = movement_with({"tracks/2/radius_mm": 119})

    piece, read = read_piece(movement, LASER)

    assert [left.what for left in piece.not_tried] == ["track 3"]
    assert piece.not_tried[0].why == "its opening leaves less than 0.5 mm to the rim or to a hole"
    assert read.outline.buffer(-0.5).contains(shapely.union_all(read.openings))


def test_a_ladder_without_room_is_told_and_left_out() -> None:
    # Kerf slots up to 3 times 12 mm wide, on a disc of 60 mm.
    movement = movement_with(
        {
            "disc/outer_diameter_mm": 60,
            "disc/centre_hole_mm": 5,
            "tracks": [{"track": 1, "radius_mm": 15}],
            "teeth": [{"tooth": 1, "track": 1, "pitch": "C5"}],
        }
    )

    piece, read = read_piece(movement, cutter_with({"min_slot_mm": 12.0}))

    assert "kerf" not in [ladder.name for ladder in piece.ladders]
    assert ("ladder kerf", "the disc has no room for it beside the others") in [
        (left.what, left.why) for left in piece.not_tried
    ]
    assert not any(mark.startswith("K") for mark in read.letters)


def test_a_ladder_of_which_no_step_can_be_cut_is_told() -> None:
    # The widest step is 3 times 0.4 mm, no wider than this kerf.
    piece = trial_piece(FERNHOLLOW, cutter_with({"kerf_mm": 1.2}))

    assert [(left.what, left.why) for left in piece.not_tried] == [
        ("ladder kerf", "no step of it can be cut: the kerf is wider, or nothing is left of a tab beside its bend")
    ]


def test_tracks_about_the_centre_are_refused() -> None:
    tracks = [{"track": 1, "radius_mm": 2.0}, {"track": 2, "radius_mm": 5.0}]
    teeth = [{"tooth": number, "track": number, "pitch": "C5"} for number in (1, 2)]
    movement = movement_with({"disc/centre_hole_mm": 0.1, "tracks": tracks, "teeth": teeth})

    with pytest.raises(DocumentError, match="2 tracks from 2 mm on find no room on a sector of 340 degrees") as refused:
        trial_piece(movement, LASER)

    assert [(refused.value.document, problem.pointer) for problem in refused.value.problems] == [
        ("movement", "/tracks")
    ]


def test_no_ladder_stands_in_a_ring_that_must_stay_whole() -> None:
    ring = {"from_radius_mm": 104, "to_radius_mm": 116, "why": "the brake's roller runs there"}
    movement = movement_with({"keep_out": [ring]})

    piece, read = read_piece(movement, LASER)

    ladder_marks = [step.mark for ladder in piece.ladders if ladder.name != "tracks" for step in ladder.steps]
    for mark in ladder_marks:
        for opening in at_mark(read, mark):
            radius_mm = np.hypot(*shapely.get_coordinates(opening).T)
            assert radius_mm.max() <= 104 or radius_mm.min() >= 116


@pytest.mark.parametrize(
    ("movement", "cutter", "says"),
    [
        (FERNHOLLOW, cutter_with({"fold": None}), "states no fold; add fold to the cutter"),
        (movement_with({"projection/forming": "lance"}), LASER, "needs lanced projections and fibre-laser is a laser"),
        (movement_with({"projection/forming": "fold"}), PRESS, "needs folded projections and turn-press is a press"),
        (movement_with({"projection/width_mm": 1.3}), PRESS, "no tool of turn-press makes the projections of plain-3"),
    ],
)
def test_a_cutter_that_cannot_make_the_projections_is_refused(movement: Movement, cutter: Cutter, says: str) -> None:
    with pytest.raises(DocumentError, match=says) as refused:
        trial_piece(movement, cutter)

    assert refused.value.document == "cutter"


def test_open_slits_are_said_to_be_as_wide_as_the_kerf() -> None:
    fold = {"inside_radius_mm": 0.4, "fold_side": "behind", "relief_mm": 0.3, "slit": "centre-line"}
    cutter = cutter_with({"fold": fold})

    piece = trial_piece(FERNHOLLOW, cutter)

    assert "open slits are cut along their middle, one kerf of 0.12 mm wide" in piece.drawing.comments


FOLD = {"inside_radius_mm": 0.4, "fold_side": "behind", "relief_mm": 0.3, "slit": "channel", "slit_width_mm": 0.42}


@pytest.mark.parametrize(
    "changes",
    [
        {"fold": FOLD | {"relief_width_mm": 0.6}},
        {"fold": FOLD | {"relief_width_mm": 0.6, "relief_ends": "round"}},
        {"fold": FOLD | {"fold_side": "ahead"}},
        {"fold": FOLD | {"slit": "centre-line", "slit_width_mm": None}},
        {"drawing_release": "R12"},
    ],
    ids=["wide reliefs", "round reliefs", "folded ahead", "open slits", "R12"],
)
def test_other_ways_of_cutting_keep_things_apart_too(changes: dict[str, Any]) -> None:
    cutter = cutter_with(changes)

    piece, read = read_piece(FERNHOLLOW, cutter)

    assert too_near(read, piece.web_mm) == pytest.approx([0.25, 0.375, 0.5, 0.625], abs=GRAIN_MM)
    assert read.outline.buffer(-0.5).contains(shapely.union_all([*read.openings, *read.holes]))
    assert {ladder.name for ladder in piece.ladders} == {"kerf", "tab-width", "depth", "web", "tracks"}


def test_a_compensated_drawing_is_half_a_kerf_inside_the_scrap() -> None:
    _, finished = read_piece(MOSSBROOK, LASER)
    cutter = cutter_with({"kerf_compensated": True})

    piece, read = read_piece(MOSSBROOK, cutter)

    # A beam of 0.12 mm on these lines takes 0.06 mm to each side, and so leaves the finished edges.
    assert read.outline.buffer(-0.06).symmetric_difference(finished.outline).area < 0.05
    for mark in ("K1", "K5", "W3", "D1", "M6"):
        one, two = at_mark(read, mark)[0], at_mark(finished, mark)[0]
        assert size_mm(one) == pytest.approx(tuple(size - 0.12 for size in size_mm(two)), abs=GRAIN_MM)
    for hole in read.holes:
        nearest = min(finished.holes, key=lambda other: other.centroid.distance(hole.centroid))
        assert hole.buffer(0.06, quad_segs=256).symmetric_difference(nearest).area < 0.01
    assert "outlines are the beam's own lines, 0.06 mm inside the scrap; add no kerf" in piece.drawing.comments
    [kerf] = [ladder for ladder in piece.ladders if ladder.name == "kerf"]
    assert kerf.how.startswith("Cut with the beam on the lines, which allow for 0.12 mm: kerf_mm = 0.12 + the mean")


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_letters_read_right_on_the_side_drawn_with_their_tops_away_from_the_centre(
    movement: Movement, cutter: Cutter
) -> None:
    _, read = shipped_piece(movement.id, cutter.id)

    for mark in ("M1", "M6", "T1", "STOP"):
        engraved = shapely.get_coordinates(read.letters[mark]) @ [1, 1j]
        upright = np.concatenate(strokes_mm(mark, 1.8)) @ [1, 1j]  # as the disc's own lettering draws them
        turn = np.diff(engraved)[np.abs(np.diff(upright)) > 0.1] / np.diff(upright)[np.abs(np.diff(upright)) > 0.1]
        assert turn == pytest.approx(turn[0], abs=1e-4)
        assert abs(turn[0]) == pytest.approx(1.0, abs=1e-4)
        outwards = engraved.mean() / abs(engraved.mean())
        assert (turn[0] * 1j / outwards).real > 0.99


def test_the_outer_corners_are_round_and_run_smoothly_into_rim_and_sides() -> None:
    [outline] = [entity for entity in trial_piece(FERNHOLLOW, LASER).drawing.entities if entity.layer == "RIM"]
    assert isinstance(outline, Outlines)
    points, bulges = [tuple(point) for point in outline.points_mm[0]], outline.bulges.tolist()

    arcs = [
        bulge_to_arc(start, end, bulge)
        for start, end, bulge in zip(points, points[1:] + points[:1], bulges, strict=True)
        if bulge
    ]
    corners = [(centre, radius) for centre, _, _, radius in arcs if centre.magnitude > 1]
    assert [radius for _, radius in corners] == pytest.approx([3.0, 3.0])
    for centre, radius in corners:
        # A circle touches another from inside where their centres are apart by the difference of their radii.
        assert centre.magnitude == pytest.approx(118.5 - radius)
    # The straight sides point to the centre, and each stands 3 mm from its corner's middle.
    sides = [
        (start, end) for start, end, bulge in zip(points, points[1:] + points[:1], bulges, strict=True) if not bulge
    ]
    assert len(sides) == 2
    for start, end in sides:
        assert abs(start[0] * end[1] - start[1] * end[0]) < 1e-6
        line = shapely.LineString([start, end])
        assert min(line.distance(shapely.Point(centre.x, centre.y)) for centre, _ in corners) == pytest.approx(3.0)


def test_a_cutter_without_labels_leaves_the_marks_by_which_the_piece_is_measured_and_turned() -> None:
    plain, lettered = read_piece(FERNHOLLOW, LASER)
    piece, read = read_piece(FERNHOLLOW, cutter_with({"labels": False}))

    gone = {"TRIAL PIECE", "FERNHOLLOW-31 REV 1", "FIBRE-LASER", "LABEL SIDE"}
    assert set(lettered.letters) - set(read.letters) == gone
    marks = {step.mark for ladder in piece.ladders for step in ladder.steps}
    assert marks | {"STOP"} == set(read.letters)
    assert plain.ladders == piece.ladders
    assert [(left.what, left.why) for left in piece.not_tried] == [
        (
            "lettering of what the piece is",
            "the cutter states labels false; STOP and the numbers stay, by which the piece is turned and measured",
        )
    ]
