"""Projections in the drawing, against places worked out by hand, for both directions and both sides."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layout.cut import CutPlan, plan_cuts
from layout.cut.plan import Circles, Drawing, Entity, Outlines, Points
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, PRESS, SHIPPED, cutter_with, disc_of, movement_with
from tests.thorough import tried

ANTICLOCKWISE = movement_with({"turns": "anticlockwise"})
STAR_SIDE_LASER = cutter_with({"drawn_from": "star-side"})
SLOTS = movement_with(
    {
        "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.4},
        "projection": {"kind": "slot", "width_mm": 1.3, "length_mm": 2.2},
    }
)
SLOT_TOOL = {
    "tool": "S22",
    "title": "slot",
    "makes": "slot",
    "footprint_length_mm": 2.2,
    "footprint_width_mm": 1.3,
    "edge_ahead_mm": -1.1,
}
# Track 3 has a radius of 100 mm; the disc turns 6 degrees a second from 30 degrees, so 10 s is a quarter turn.
QUARTER_TURN = [(3, 10.0)]


def plan_of(disc: Disc) -> CutPlan:
    return plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)


def on_layer(drawing: Drawing, layer: str) -> list[Entity]:
    return [entity for entity in drawing.entities if entity.layer == layer]


def outlines(drawing: Drawing, layer: str) -> Outlines:
    [entity] = on_layer(drawing, layer)
    assert isinstance(entity, Outlines)
    return entity


def random_disc(movement: Movement, cutter: Cutter, seed: int, count: int = 40) -> Disc:
    dice = np.random.default_rng(seed)
    tracks = dice.integers(1, len(movement.tracks) + 1, count)
    times = dice.uniform(0, 0.8 * movement.revolution_s, count)
    return disc_of(movement, [(int(track), float(time)) for track, time in zip(tracks, times, strict=True)], cutter)


# Bend allowance of 0.5 mm sheet about r = 0.4 mm, DIN 6935: k = 0.65 + 0.5·lg(0.4/0.5) = 0.601545,
# BA = π/2·(0.4 + 0.601545·0.5/2) = 0.864545; blank = BA + 1.41 − 0.4 = 1.874545 mm, slit 0.42, relief 0.3,
# tab 1.2 wide. In the flat frame the tangent line is at u = 0.4, so with q measured back from it:
#   far edge of the slit  u = 0.4 − 1.874545 − 0.42 = −1.894545     relief's end  u = 0.4 + 0.3 = 0.7
#   free end of the tab   u = 0.4 − 1.874545        = −1.474545     v = ±0.6 (tab), ±1.02 (slit's outside)
FAR_U, FREE_U, RELIEF_U = -1.894545, -1.474545, 0.7
CHANNEL = [
    (FAR_U, 1.02),
    (FAR_U, -1.02),
    (RELIEF_U, -1.02),
    (RELIEF_U, -0.6),
    (FREE_U, -0.6),
    (FREE_U, 0.6),
    (RELIEF_U, 0.6),
    (RELIEF_U, 1.02),
]


@pytest.mark.parametrize(
    ("movement", "cutter", "place"),
    [
        # Clockwise: the edge that reaches the row after a quarter turn lies at +90°, at (0, 100). There the
        # radius points to +y and the disc travels to +x at that place: (u, v) -> (u, 100 + v).
        pytest.param(PLAIN, LASER, lambda u, v: (u, 100 + v), id="clockwise, label side"),
        # Anticlockwise: at −90°, at (0, −100); outwards is −y, travel is +x: (u, v) -> (u, −100 − v).
        pytest.param(ANTICLOCKWISE, LASER, lambda u, v: (u, -100 - v), id="anticlockwise, label side"),
        # From the star side y changes its sign.
        pytest.param(PLAIN, STAR_SIDE_LASER, lambda u, v: (u, -100 - v), id="clockwise, star side"),
        pytest.param(ANTICLOCKWISE, STAR_SIDE_LASER, lambda u, v: (u, 100 + v), id="anticlockwise, star side"),
    ],
)
def test_one_note_at_a_quarter_turn_is_cut_where_it_was_worked_out(movement, cutter, place) -> None:  # type: ignore[no-untyped-def]
    quarter_turn = disc_of(movement, [(3, 60 / 4 - 30 / 6)], cutter)

    slit = outlines(plan_of(quarter_turn).disc, "SLITS")

    assert slit.closed
    assert slit.bulges == pytest.approx(np.zeros(8))
    drawn = {(round(x, 5), round(y, 5)) for x, y in slit.points_mm[0].tolist()}
    expected = {(round(x, 5), round(y, 5)) for x, y in (place(u, v) for u, v in CHANNEL)}
    assert drawn == expected


def test_a_slit_is_pierced_at_its_far_side_and_not_at_the_working_edge() -> None:
    slit = outlines(plan_of(disc_of(PLAIN, QUARTER_TURN)).disc, "SLITS")

    assert slit.points_mm[0, 0, 0] == pytest.approx(FAR_U, abs=1e-6)


@pytest.mark.parametrize(
    ("turns", "cutter", "sign"),
    [("clockwise", LASER, 1), ("anticlockwise", LASER, -1), ("clockwise", STAR_SIDE_LASER, -1)],
)
def test_the_round_ends_of_a_slot_bulge_outwards_on_both_sides_and_both_ways(
    turns: str, cutter: Cutter, sign: int
) -> None:
    movement = movement_with({"turns": turns}, base=SLOTS.model_dump(mode="json", exclude_none=True))

    slot = outlines(plan_of(disc_of(movement, QUARTER_TURN, cutter)).disc, "SLOTS")

    # A semicircle has an included angle of 180°: tan(180°/4) = 1 (DXF reference, bulge); anticlockwise is positive.
    # 2.2 long, 1.3 wide: the straight sides run from 0.65 to 1.55.
    assert slot.bulges.tolist() == [sign, 0.0, sign, 0.0]
    assert not any(math.copysign(1, bulge) < 0 for bulge in slot.bulges if bulge == 0)
    y = slot.points_mm[0, :, 1]
    assert np.abs(slot.points_mm[0, :, 0]) == pytest.approx([1.55, 1.55, 0.65, 0.65])
    assert np.sort(np.abs(y)) == pytest.approx([99.35, 99.35, 100.65, 100.65])
    assert signed_area_mm2(slot) * sign > 0


def signed_area_mm2(outline: Outlines) -> float:
    x, y = outline.points_mm[0].T
    return float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y)) / 2


def test_a_press_hits_every_projection_once_at_the_strike_point() -> None:
    # Tool L12: the working edge is 0.7 ahead of the strike point, square to whose radius the tool stands. So the
    # strike point lies R = √(100² − 0.7²) from the centre and asin(0.7/100) behind the edge at the quarter turn,
    # travel to +x: at (−R · 0.7/100, R · R/100); the turn-press is drawn from the star side.
    disc = disc_of(PLAIN, QUARTER_TURN, PRESS)

    plan = plan_of(disc)

    [hits] = on_layer(plan.disc, "HITS")
    assert isinstance(hits, Points)
    assert hits.points_mm.tolist() == [pytest.approx([-0.699983, -99.9951], abs=1e-6)]
    assert plan.at_mm.tolist() == hits.points_mm.tolist()
    assert plan.tool == "L12"
    assert on_layer(plan.disc, "SLITS") == on_layer(plan.disc, "SLOTS") == []


def test_a_slot_tool_strikes_the_middle_of_the_slot() -> None:
    # The trailing end, at (0, 100), is the working edge and the slot lies ahead of it, square to the radius through
    # its middle, R = √(100² − 1.1²) from the centre: at (R · 1.1/100, R · R/100).
    disc = disc_of(SLOTS, QUARTER_TURN, cutter_with({"tools": [SLOT_TOOL], "drawn_from": "label-side"}, PRESS))

    [hits] = on_layer(plan_of(disc).disc, "HITS")

    assert isinstance(hits, Points)
    assert hits.points_mm.tolist() == [pytest.approx([1.099933, 99.9879], abs=1e-6)]


def test_on_a_laser_the_place_of_a_projection_is_the_middle_of_its_working_edge() -> None:
    plan = plan_of(disc_of(PLAIN, QUARTER_TURN, STAR_SIDE_LASER))

    assert plan.at_mm.tolist() == [pytest.approx([0.0, -100.0])]
    assert plan.tool == ""


def test_outlines_stand_in_the_order_the_plan_names() -> None:
    disc = disc_of(PLAIN, [(3, 5.0), (1, 20.0), (2, 0.0), (1, 10.0)])

    plan = plan_of(disc)

    assert sorted(plan.order.tolist()) == [0, 1, 2, 3]
    slit = outlines(plan.disc, "SLITS")
    for place, index in enumerate(plan.order):
        x, y = slit.points_mm[place].mean(axis=0)
        assert np.hypot(x, y) == pytest.approx(disc.radius_mm[index], abs=0.1)
        # The middle of a channel lies about half a millimetre behind its working edge: 0.6 degrees at 50 mm.
        apart = (math.atan2(y, x) - disc.edge_angle_rad[index] + math.pi) % (2 * math.pi) - math.pi
        assert abs(math.degrees(apart)) < 1


@pytest.mark.parametrize(
    ("movement", "cutter", "layers"),
    [
        (SHIPPED[0], LASER, ["MARKS", "SLITS", "HOLES", "RIM"]),
        # Lances are formed hits, and formed hits come last (common practice): after the holes.
        (SHIPPED[0], PRESS, ["MARKS", "HOLES", "HITS", "RIM"]),
        (SHIPPED[2], LASER, ["MARKS", "SLOTS", "HOLES", "RIM"]),
        (SHIPPED[2], PRESS, ["MARKS", "HOLES", "HITS", "RIM"]),
    ],
)
def test_marks_come_first_then_inside_before_outside_and_the_rim_last(
    movement: Movement, cutter: Cutter, layers: list[str]
) -> None:
    plan = plan_of(random_disc(movement, cutter, seed=1))

    assert list(dict.fromkeys(entity.layer for entity in plan.disc.entities)) == layers
    assert plan.disc.entities[-1].layer == plan.record.entities[-1].layer == "RIM"


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("cutter", [LASER, PRESS], ids=lambda cutter: cutter.id)
def test_only_the_record_shows_what_is_never_cut(movement: Movement, cutter: Cutter) -> None:
    disc = random_disc(movement, cutter, seed=2)

    plan = plan_of(disc)

    reading_only = {"AFTER_FORMING", "FOLDS", "TRACKS"}
    assert {entity.layer for entity in plan.disc.entities}.isdisjoint(reading_only)
    cut = {id(e) for e in plan.disc.entities if e.layer != "MARKS"}
    shown = [e for e in plan.record.entities if e.layer not in reading_only | {"MARKS"}]
    assert [e.layer for e in shown] == [e.layer for e in plan.disc.entities if id(e) in cut]
    formed = outlines(plan.record, "AFTER_FORMING")
    assert formed.closed
    assert formed.points_mm.shape == (40, len(disc.pattern.opening.points_mm), 2)
    [tracks] = on_layer(plan.record, "TRACKS")
    assert isinstance(tracks, Circles)
    assert tracks.radius_mm.tolist() == [track.radius_mm for track in movement.tracks]
    folded = disc.pattern.making == "fold"
    assert [type(entity) for entity in on_layer(plan.record, "FOLDS")] == [Outlines] * folded


def test_a_fold_line_lies_half_the_bend_allowance_behind_the_tangent_line() -> None:
    fold = outlines(plan_of(disc_of(PLAIN, QUARTER_TURN)).record, "FOLDS")

    # Tangent line at u = 0.4; half of BA = 0.864545 behind it: u = −0.032272; from v = −0.6 to 0.6.
    assert not fold.closed
    assert fold.points_mm[0, :, 0] == pytest.approx([-0.032272, -0.032272], abs=1e-6)
    assert np.sort(fold.points_mm[0, :, 1]) == pytest.approx([99.4, 100.6])


def test_an_open_slit_stays_an_open_line() -> None:
    changes = {"fold/slit": "centre-line", "fold/slit_width_mm": None}
    cutter = cutter_with(changes, LASER)

    plan = plan_of(disc_of(PLAIN, QUARTER_TURN, cutter))

    assert not outlines(plan.disc, "SLITS").closed
    assert outlines(plan.disc, "SLITS").points_mm.shape == (1, 4, 2)
    assert "open slits are cut along their middle, one kerf of 0.12 mm wide" in plan.disc.comments


def test_a_disc_without_projections_gives_the_bare_blank() -> None:
    plan = plan_of(disc_of(PLAIN, []))

    assert [entity.layer for entity in plan.disc.entities if entity.layer != "MARKS"] == ["HOLES", "RIM"]
    assert plan.order.shape == (0,)
    assert plan.at_mm.shape == (0, 2)


def test_a_laser_that_cannot_form_the_projections_cuts_none_of_them() -> None:
    plan = plan_of(disc_of(PLAIN, QUARTER_TURN, cutter_with({"fold": None}, LASER)))

    assert [entity.layer for entity in plan.disc.entities if entity.layer != "MARKS"] == ["HOLES", "RIM"]
    assert outlines(plan.record, "AFTER_FORMING").closed


def cut_numbers(drawing: Drawing) -> list[tuple[str, list[float], list[float]]]:
    """Layer, coordinates and bulges of all that is drawn but the lettering, in order."""
    numbers: list[tuple[str, list[float], list[float]]] = []
    for entity in drawing.entities:
        match entity:
            case Outlines():
                numbers.append((entity.layer, entity.points_mm.ravel().tolist(), entity.bulges.tolist()))
            case Circles():
                numbers.append((entity.layer, entity.centres_mm.ravel().tolist(), entity.radius_mm.tolist()))
            case Points():
                numbers.append((entity.layer, entity.points_mm.ravel().tolist(), []))
            case _:
                pass
    return numbers


@pytest.mark.parametrize("movement", [*SHIPPED, ANTICLOCKWISE], ids=lambda movement: movement.id + movement.turns)
def test_the_star_side_is_the_mirror_image_of_the_label_side(movement: Movement) -> None:
    disc = random_disc(movement, LASER, seed=3)

    label, star = plan_of(disc), plan_of(replace(disc, cutter=STAR_SIDE_LASER))

    assert star.at_mm.tolist() == (label.at_mm * [1, -1]).tolist()
    for ours, theirs in zip(label.record.entities, star.record.entities, strict=True):
        if isinstance(ours, Outlines):
            assert isinstance(theirs, Outlines)
            assert (ours.points_mm * [1, -1]).tolist() == theirs.points_mm.tolist()
            assert (-ours.bulges).tolist() == theirs.bulges.tolist()
        if isinstance(ours, Circles):
            assert isinstance(theirs, Circles)
            assert (ours.centres_mm * [1, -1]).tolist() == theirs.centres_mm.tolist()


@settings(max_examples=tried(15), deadline=None)
@given(seed=st.integers(0, 2**32 - 1), turn_deg=st.floats(-360, 360), movement=st.sampled_from([*SHIPPED, PLAIN]))
def test_turning_a_disc_turns_what_is_cut_of_its_projections(seed: int, turn_deg: float, movement: Movement) -> None:
    disc = random_disc(movement, LASER, seed, count=5)
    turn_rad = math.radians(turn_deg)
    turned = replace(disc, edge_angle_rad=frozen_floats(np.mod(disc.edge_angle_rad + turn_rad, 2 * math.pi)))

    before, after = plan_of(disc), plan_of(turned)

    layer = "SLITS" if disc.pattern.making == "fold" else "SLOTS"
    first, second = outlines(before.disc, layer), outlines(after.disc, layer)
    rotation = np.array([[math.cos(turn_rad), math.sin(turn_rad)], [-math.sin(turn_rad), math.cos(turn_rad)]])
    where = {int(index): place for place, index in enumerate(after.order)}
    for place, index in enumerate(before.order):
        turned_mm = first.points_mm[place] @ rotation
        assert second.points_mm[where[int(index)]] == pytest.approx(turned_mm, abs=1e-9)


@settings(max_examples=tried(10), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    movement=st.sampled_from(SHIPPED),
    cutter=st.sampled_from([LASER, PRESS, STAR_SIDE_LASER]),
)
def test_nothing_is_drawn_twice_on_a_layer_and_no_piece_has_no_length(
    seed: int, movement: Movement, cutter: Cutter
) -> None:
    plan = plan_of(random_disc(movement, cutter, seed))

    for drawing in (plan.disc, plan.record):
        seen = set()
        for entity in drawing.entities:
            for key in keys_of(entity):
                assert (entity.layer, key) not in seen
                seen.add((entity.layer, key))


def keys_of(entity: Entity) -> list[tuple[float, ...]]:
    """One key for each contour, circle, point or stroke, after a look at the length of its pieces."""
    match entity:
        case Outlines():
            pieces = np.diff(entity.points_mm, axis=1)
            if entity.closed:
                pieces = np.concatenate([pieces, entity.points_mm[:, :1] - entity.points_mm[:, -1:]], axis=1)
            assert np.hypot(pieces[..., 0], pieces[..., 1]).min() > 1e-3
            return [tuple(np.array(sorted(contour.round(6).tolist())).ravel()) for contour in entity.points_mm]
        case Circles():
            sized = np.column_stack([entity.centres_mm, entity.radius_mm])
            return [tuple(circle.round(6)) for circle in sized]
        case Points():
            return [tuple(point.round(6)) for point in entity.points_mm]
        case _:
            strokes = entity.strokes_mm
            assert all(np.hypot(*np.diff(stroke, axis=0).T).min() > 1e-3 for stroke in strokes)
            return [tuple(stroke.round(6).ravel()) for stroke in strokes]
