"""A trial piece as it is cut: order, heat, leads and bridges, read back from its file by ezdxf."""

import io
import itertools
import math
from collections.abc import Iterable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
import shapely
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.filemanagement import read
from ezdxf.math import bulge_to_arc
from ezdxf.path import make_path

from layout.cut import plan_cuts
from layout.cut.path import HOT_WEB_MM
from layout.cut.piece import plan_piece
from layout.cut.plan import Entity, Outlines, Points
from layout.documents import Cutter, Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.trial import trial_piece
from layout.trial_walk import plan_trial, trial_files
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, disc_of, movement_with

FERNHOLLOW, MOSSBROOK, TARNLIGHT = SHIPPED
IDS = [movement.id for movement in SHIPPED]
GRAIN_MM = 2e-5  # what chords for arcs and six decimals leave
HELD = cutter_with({"bridges": {"count": 5, "width_mm": 0.8}})
LED_IN = cutter_with({"lead_in": {"length_mm": 0.4}})


def drawn(movement: Movement, cutter: Cutter) -> list[tuple[str, bool, FloatArray]]:
    """Layer, whether it is closed, and places along each line of the file, in its order."""
    dxf = trial_files(movement, cutter)["trial-piece.dxf"]
    found = []
    for entity in read(io.StringIO(dxf.decode("ascii"))).modelspace():
        if entity.dxftype() != "POINT":
            along = np.array([tuple(at)[:2] for at in make_path(entity).flattening(1e-5)])
            if isinstance(entity, LWPolyline):
                along = traced_mm(entity)
            found.append((entity.dxf.layer, bool(np.allclose(along[0], along[-1])), along))
    return found


def traced_mm(line: LWPolyline) -> FloatArray:
    """Places along a polyline, arcs by their own circles: the library's paths are curves that come near them."""
    vertices = list(line.get_points("xyb"))
    pieces = itertools.pairwise([*vertices, *vertices[: int(line.closed)]])
    along = [vertices[0][:2]]
    for (x, y, bulge), (to_x, to_y, _) in pieces:
        if bulge:
            centre, from_rad, to_rad, radius_mm = bulge_to_arc((x, y), (to_x, to_y), bulge)
            turns = np.linspace(from_rad, from_rad + (to_rad - from_rad) % (2 * math.pi), 400)[
                :: 1 if bulge > 0 else -1
            ]
            around = np.column_stack([np.cos(turns), np.sin(turns)])
            along += [tuple(at) for at in ((centre.x, centre.y) + radius_mm * around)[1:]]
        else:
            along.append((to_x, to_y))
    return np.array(along)


def openings(lines: list[tuple[str, bool, FloatArray]]) -> list[FloatArray]:
    return [along for layer, _, along in lines if layer in {"SLITS", "SLOTS"}]


def travel_mm(starts: list[FloatArray]) -> float:
    """From the centre over all starts and back."""
    around = np.array([(0.0, 0.0), *starts, (0.0, 0.0)])
    return float(np.hypot(*np.diff(around, axis=0).T).sum())


def test_the_openings_of_a_piece_are_cut_on_a_shorter_way_than_ladder_by_ladder() -> None:
    ways = []
    for movement in SHIPPED:
        by_ladder = [
            points_mm[0]
            for entity in trial_piece(movement, LASER).drawing.entities
            if isinstance(entity, Outlines) and entity.layer in {"SLITS", "SLOTS"}
            for points_mm in entity.points_mm
        ]
        as_cut = [along[0] for along in openings(drawn(movement, LASER))]
        apart_mm = np.hypot(*(np.array(by_ladder)[:, None] - np.array(as_cut)).transpose(2, 0, 1))
        assert len(set(apart_mm.argmin(axis=1).tolist())) == len(by_ladder) == len(as_cut)
        assert apart_mm.min(axis=1).max() < GRAIN_MM
        ways.append((travel_mm(by_ladder), travel_mm(as_cut)))

    assert all(as_cut < by_ladder for by_ladder, as_cut in ways)
    assert sum(as_cut for _, as_cut in ways) < 0.75 * sum(by_ladder for by_ladder, _ in ways)


@pytest.mark.parametrize("movement", SHIPPED, ids=IDS)
def test_two_openings_beside_a_thin_web_are_never_cut_one_after_the_other(movement: Movement) -> None:
    cut = [shapely.Polygon(along).convex_hull for along in openings(drawn(movement, LASER))]

    thin = [pair for pair in itertools.combinations(range(len(cut)), 2) if cut[pair[0]].distance(cut[pair[1]]) < 0.999]
    assert HOT_WEB_MM == 1.0
    assert len(thin) >= 4  # of the web ladder's six pairs, those of 0.75, 0.625, 0.5, 0.375 and 0.25 mm at least
    assert all(later - earlier > 1 for earlier, later in thin)


@pytest.mark.parametrize("movement", SHIPPED, ids=IDS)
def test_a_press_strikes_in_one_order_however_the_hits_were_listed(movement: Movement) -> None:
    piece, planned = trial_piece(movement, PRESS), plan_trial(movement, PRESS)
    turned_round = tuple(
        replace(entity, points_mm=frozen_floats(entity.points_mm[::-1])) if isinstance(entity, Points) else entity
        for entity in piece.drawing.entities
    )

    again = plan_piece(replace(piece.drawing, entities=turned_round), movement, PRESS)

    assert planned.hits is not None
    [points] = [entity for entity in again.drawing.entities if isinstance(entity, Points)]
    assert points.points_mm == pytest.approx(planned.hits.at_mm)
    # The table of the shipped press comes onto its hits one way (turns_one_way): it never goes back.
    mirrored = np.array([1, -1 if PRESS.drawn_from == "star-side" else 1])
    x, y = (planned.hits.at_mm * mirrored).T
    forward = (1 if movement.turns == "clockwise" else -1) * np.arctan2(y, x)
    steps_rad = (np.diff(forward) + math.pi) % (2 * math.pi) - math.pi
    assert steps_rad.min() > -1e-9


@pytest.mark.parametrize("movement", SHIPPED, ids=IDS)
def test_a_lead_runs_through_scrap_to_where_the_cut_after_it_begins(movement: Movement) -> None:
    lines = drawn(movement, LED_IN)

    leads = [place for place, (layer, *_) in enumerate(lines) if layer == "LEADS"]
    for place in leads:
        lead, (layer, is_closed, along) = lines[place][2], lines[place + 1]
        assert np.hypot(*(lead[-1] - lead[0])) == pytest.approx(0.4, abs=GRAIN_MM)
        assert lead[-1] == pytest.approx(along[0], abs=GRAIN_MM)
        assert is_closed
        inside = shapely.Polygon(along).contains(shapely.Point(lead[0]))
        assert inside == (layer != "RIM")
    led = [lines[place + 1][0] for place in leads]
    assert led.count("RIM") == 1
    assert led.count("HOLES") == sum(layer == "HOLES" for layer, *_ in lines)
    # Slots of 0.3 mm are too narrow for a lead that keeps half a kerf of 0.12 mm off their sides, all others are not.
    without = [lines[place] for place in range(1, len(lines)) if lines[place][0] in {"SLITS", "SLOTS"}]
    assert len(led) - led.count("RIM") - led.count("HOLES") >= 0.5 * len(without)


@pytest.mark.parametrize("side", ["label-side", "star-side"])
@pytest.mark.parametrize("kerf_compensated", [False, True])
@pytest.mark.parametrize("movement", SHIPPED, ids=IDS)
def test_bridges_hold_a_piece_by_its_arcs(movement: Movement, side: str, *, kerf_compensated: bool) -> None:
    changes: dict[str, Any] = {"drawn_from": side, "kerf_compensated": kerf_compensated}
    whole = [along for layer, _, along in drawn(movement, cutter_with(changes)) if layer == "RIM"]
    held = cutter_with(changes | {"bridges": {"count": 5, "width_mm": 0.8}})

    lines = [(closed, along) for layer, closed, along in drawn(movement, held) if layer == "RIM"]

    assert len(whole) == 1
    assert [closed for closed, _ in lines] == [False] * 5
    ends = [(one[-1], other[0]) for (_, one), (_, other) in itertools.pairwise([*lines, lines[0]])]
    # The beam takes half of the kerf of 0.12 mm at either end, so the bridge left is 0.8 mm wide.
    widths_mm = [float(np.hypot(*(other - one))) for one, other in ends]
    assert widths_mm == pytest.approx([0.92] * 5, abs=2e-4)
    assert min(widths_mm) >= 0.92 - GRAIN_MM
    for one, other in ends:
        assert np.hypot(*one) == pytest.approx(np.hypot(*other), abs=GRAIN_MM)  # on an arc round the centre
    outline = shapely.Polygon(whole[0])
    assert shapely.Polygon(np.concatenate([along for _, along in lines])).symmetric_difference(outline).area < 0.02
    assert {round(float(np.hypot(*one))) for one, _ in ends} == {
        round(float(reach)) for reach in (np.hypot(*whole[0].T).max(), np.hypot(*whole[0].T).min())
    }
    assert plan_trial(movement, held).not_tried == ()


def test_each_stretch_between_bridges_is_led_in_from_outside() -> None:
    cutter = cutter_with({"bridges": {"count": 3, "width_mm": 0.8}, "lead_in": {"length_mm": 2.0}})
    [whole] = [along for layer, _, along in drawn(FERNHOLLOW, LASER) if layer == "RIM"]
    outline = shapely.Polygon(whole)

    lines = drawn(FERNHOLLOW, cutter)

    stretches = [place for place, (layer, *_) in enumerate(lines) if layer == "RIM"]
    assert len(stretches) == 3
    for place in stretches:
        layer, _, lead = lines[place - 1]
        assert layer == "LEADS"
        assert lead[-1] == pytest.approx(lines[place][2][0], abs=GRAIN_MM)
        assert outline.distance(shapely.Point(lead[0])) == pytest.approx(2.0, abs=0.01)


def test_what_falls_out_of_a_step_is_held_by_nothing() -> None:
    plain, held = openings(drawn(MOSSBROOK, LASER)), openings(drawn(MOSSBROOK, HELD))

    assert len(plain) == len(held)
    assert all(one == pytest.approx(other) for one, other in zip(plain, held, strict=True))


@pytest.mark.parametrize("side", ["label-side", "star-side"])
def test_the_slugs_of_its_holes_are_held_as_those_of_a_disc(side: str) -> None:
    slugs = {"count": 2, "width_mm": 0.4, "least_slug_mm": 3.0}
    bridges = {"count": 3, "width_mm": 0.8, "slugs": slugs}
    cutter = cutter_with({"drawn_from": side, "bridges": bridges, "lead_in": {"length_mm": 0.4}})
    plan = plan_cuts(disc_of(FERNHOLLOW, [], cutter), title="Holes", fingerprint="0" * 16, not_good=None)

    def holes_of(entities: Iterable[Entity]) -> list[FloatArray]:
        return [
            points_mm
            for entity in entities
            if isinstance(entity, Outlines) and entity.layer == "HOLES"
            for points_mm in entity.points_mm
        ]

    piece, disc = (holes_of(one.entities) for one in (plan_trial(FERNHOLLOW, cutter).drawing, plan.disc))
    assert len(piece) > 3
    assert all(one == pytest.approx(other) for one, other in zip(piece, disc, strict=True))


def test_a_piece_without_room_for_its_bridges_stays_closed_and_says_so() -> None:
    cutter = cutter_with({"bridges": {"count": 24, "width_mm": 20.0}})

    piece = plan_trial(FERNHOLLOW, cutter)

    assert [(left.what, left.why) for left in piece.not_tried] == [
        ("bridges", "its arcs have no room for them; hold the piece down, or it may tip when it is cut free")
    ]
    assert [closed for layer, closed, _ in drawn(FERNHOLLOW, cutter) if layer == "RIM"] == [True]


@pytest.mark.parametrize("release", ["R12", "R2010"])
def test_a_held_piece_is_the_same_in_either_release(release: str) -> None:
    changes = {"drawing_release": release, "bridges": {"count": 3, "width_mm": 0.8}, "lead_in": {"length_mm": 1.0}}
    document = read(io.StringIO(trial_files(TARNLIGHT, cutter_with(changes))["trial-piece.dxf"].decode("ascii")))

    assert document.audit().errors == []
    assert sum(entity.dxf.layer == "RIM" for entity in document.modelspace()) == 3


def test_a_piece_of_a_press_without_hits_has_its_holes_and_outline() -> None:
    tracks = [{"track": 1, "radius_mm": 119.5}]
    teeth = [{"tooth": 1, "track": 1, "pitch": "C5"}]
    piece = plan_trial(movement_with({"tracks": tracks, "teeth": teeth}), PRESS)

    layers = [entity.layer for entity in piece.drawing.entities]
    assert layers[-1] == "RIM"
    assert "HOLES" in layers
