"""The report's numbers counted again from layout.json and the documents, with no help from layout/report.

Only the transpositions tried are not in layout.json; of them the first must be the layout's own.
"""

import bisect
import json
import math
from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from itertools import chain, pairwise
from typing import Any

import numpy as np
import pytest
import shapely
from shapely import affinity

from layout import walk
from layout.arrange.arrangement import NO_NOTE
from layout.arrange.loading import greatest_load
from layout.documents import Cutter, Movement, read_settings, shipped_movement
from layout.documents.movement import StarWheel, Tooth
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.projection import Pattern
from layout.place import place
from layout.play import play
from layout.report import report_on
from layout.write import layout_record, report_record
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, PRESS, SHIPPED, cutter_with, movement_with
from tests.outside.pieces import public_domain_piece

Json = dict[str, Any]
TUNES: dict[str, Callable[[], bytes]] = {
    "demo": demo_tune,
    "chorale": lambda: public_domain_piece("bach chorale 66.6"),
    "reel": lambda: public_domain_piece("acacia reel"),
    "rag": lambda: public_domain_piece("joplin rag"),
}
WANTED = {
    "as written": {},
    "part of it, fitted": {
        "passage": {"from_s": 3.1, "to_s": 21.7},
        "speed": {"mode": "fit"},
        "rulings": [{"note": 30, "do": "leave-out"}],
    },
}
MICROSECOND_MS = 1e-3
CLASS_1_MM = 0.2  # ISO 9013 class 1, sheet up to 1 mm, sizes from 35 to 125 mm (modulusmetal.com): fernhollow's tracks
LIFTED = {"stiffness_n_per_mm": 2.0, "lift_mm": 0.5}


def laid_out_by(tune: str, wanted: str, movement: Movement) -> LaidOut:
    """The tune on the movement, made by the cutter that can make its projections."""
    cutter = PRESS if movement.id == "mossbrook-67" else LASER
    return walk.lay_out(TUNES[tune](), movement, cutter, read_settings(json.dumps(WANTED[wanted])))


def with_all_there_is_to_tell(laid_out: LaidOut) -> LaidOut:
    """The layout with nudges, octave moves, extra plucks, a lead channel, a covered note and a load made up by hand."""
    old = laid_out.arrangement
    count, notes = len(old.track_index), list(old.notes)
    # Every fifth pluck is nudged by up to 9 ms; every seventh an octave down; every eleventh is an extra
    # one of the first note, and its own notes are covered by the pluck before it.
    place_of = np.arange(count)
    nudge_s = np.where(place_of % 5 == 0, ((place_of % 19) - 9) / 1000, 0.0)
    again_of = np.where(place_of % 11 == 10, notes[0][0], NO_NOTE)
    for extra in np.flatnonzero(again_of != NO_NOTE).tolist():
        notes[extra - 1] = tuple(sorted(notes[extra - 1] + notes[extra]))
        notes[extra] = ()
    score_notes = np.arange(laid_out.score.note_count)
    asked = old.note_weight > 0
    arrangement = replace(
        old,
        planned_s=frozen_floats(old.asked_s + np.where(old.asked_s + nudge_s >= 0, nudge_s, 0.0)),
        notes=tuple(notes),
        again_of=frozen_ints(again_of),
        octave_semitones=frozen_ints(np.where(place_of % 7 == 6, -12, 0)),
        note_weight=frozen_ints(np.where(asked, 700 + 13 * (score_notes % 101), 0)),
        highest=asked & (score_notes % 3 == 0),
        lowest=asked & (score_notes % 4 == 0),
        melody=asked & (score_notes % 6 == 0),
    )
    disc_turning = laid_out.disc.turning
    load = greatest_load(laid_out.disc.movement, disc_turning, arrangement.track_index, arrangement.planned_s)
    arrangement = replace(arrangement, load=load)
    disc = place(arrangement, laid_out.disc.movement, laid_out.disc.cutter)
    report = report_on(laid_out.score, arrangement, disc)
    return replace(laid_out, arrangement=arrangement, disc=disc, plucks=play(disc), report=report)


def tally_of(layout: Json, belongs: Callable[[Json], bool]) -> Json:
    """The row of the report for the asked notes that belong to a voice."""
    asked = {note["note"]: note["weight"] for note in layout["notes"] if note["weight"] > 0 and belongs(note)}
    placed = [(note, place) for place in layout["projections"] for note in place["notes"] if note in asked]
    covered = set(chain.from_iterable(place["notes"][1:] for place in layout["projections"]))
    sizes_ms = [abs(place["sounds_s"] - place["asked_s"]) * 1000 for _, place in placed]
    nudged_ms = [size_ms for size_ms in sizes_ms if size_ms > MICROSECOND_MS]
    kept_weight = sum(asked[note] for note, _ in placed)
    return {
        "note_count": len(asked),
        "kept_count": len(placed),
        "asked_weight": sum(asked.values()),
        "kept_weight": kept_weight,
        "kept_share": kept_weight / sum(asked.values()) if asked else None,
        "octave_count": sum(place["octave_semitones"] != 0 for _, place in placed),
        "nudged_count": len(nudged_ms),
        "largest_nudge_ms": pytest.approx(max(nudged_ms, default=0.0), abs=MICROSECOND_MS),
        "mean_nudge_ms": pytest.approx(sum(nudged_ms) / max(len(nudged_ms), 1), abs=MICROSECOND_MS),
        "covered_count": sum(note in covered for note, _ in placed),
        "left_out": Counter(left["reason"] for left in layout["left_out"] if left["note"] in asked),
    }


def worst_bars_of(layout: Json) -> list[Json]:
    starts_s = [bar["start_s"] for bar in layout["bars"]]
    lost = {left["note"] for left in layout["left_out"]}
    bars: dict[int, Json] = {}
    for note in layout["notes"]:
        if note["weight"] == 0:
            continue
        number = bisect.bisect_right(starts_s, note["onset_s"] + 1e-9)  # rounding puts no note before its bar line
        empty = {"note_count": 0, "lost_count": 0, "asked_weight": 0, "lost_weight": 0}
        bar = bars.setdefault(number, {"bar": number, "start_s": starts_s[number - 1]} | empty)
        is_lost = note["note"] in lost
        bar["note_count"] += 1
        bar["asked_weight"] += note["weight"]
        bar["lost_count"] += is_lost
        bar["lost_weight"] += note["weight"] * is_lost
    worst = sorted(bars.values(), key=lambda bar: (-bar["lost_weight"], bar["bar"]))[:5]
    return [
        bar | {"lost_share": pytest.approx(bar["lost_weight"] / bar["asked_weight"])}
        for bar in worst
        if bar["lost_weight"] > 0
    ]


def engagement_of(movement: Movement) -> float | None:
    """How far a release stays from the let-go at the least depth, and the meeting at the greatest; None for slots."""
    wheel, projection = movement.star_wheel, movement.projection
    if projection.kind == "slot":
        return None
    spread_mm = projection.depth_plus_minus_mm + movement.disc.flatness_mm
    least_rad, most_rad = (
        math.acos((wheel.axis_depth_mm - projection.depth_mm + off_mm) / wheel.tip_radius_mm)
        for off_mm in (spread_mm, -spread_mm)
    )
    release, met = math.sin(math.radians(wheel.release_angle_deg)), math.sin(most_rad - 2 * math.pi / wheel.points)
    return wheel.tip_radius_mm * min(math.sin(least_rad) - release, release - met)


def assert_metal_right(net: Json, layout: Json, movement: Movement, pattern: Pattern) -> None:
    """Openings drawn with shapely where layout.json has them: no ray or ring tried leaves less than is told."""
    direction = 1 if movement.turns == "clockwise" else -1
    core = pattern.core_points_mm * [1, -direction]  # u is the travel, against the angle for a clockwise disc
    flat = shapely.Polygon(core) if len(core) > 2 else shapely.LineString(core).buffer(pattern.core_round_mm, 64)
    # A press's opening stands square to the radius through the strike point, its edge on its track at its angle.
    strike_mm = pattern.strike_u_mm
    upright = affinity.rotate(affinity.translate(flat, -strike_mm, 0), -90 * direction, origin=(0, 0))

    def standing(radius_mm: float, angle_deg: float) -> shapely.Geometry:
        out = affinity.translate(upright, math.sqrt(radius_mm**2 - strike_mm**2), 0)
        behind_deg = direction * math.degrees(math.asin(strike_mm / radius_mm))
        return affinity.rotate(out, angle_deg - behind_deg, origin=(0, 0))

    whole = shapely.union_all([standing(place["radius_mm"], place["angle_deg"]) for place in layout["projections"]])
    band_mm = np.array([net["from_mm"], net["to_mm"]])
    # the band of all tracks, whichever are used
    ends = [standing(track.radius_mm, 0) for track in (movement.tracks[0], movement.tracks[-1])]
    assert ends[0].distance(shapely.Point(0, 0)) == pytest.approx(band_mm[0], abs=1e-3)
    assert np.hypot(*shapely.get_coordinates(ends[1]).T).max() == pytest.approx(band_mm[1], abs=1e-3)

    def left_mm(angle_deg: float) -> float:
        at = math.radians(angle_deg)
        ray = shapely.LineString(band_mm[:, None] * [math.cos(at), math.sin(at)])
        return float(ray.length - ray.intersection(whole).length)

    told_mm = net["line"]["left_mm"]
    assert min(left_mm(net["line"]["angle_deg"] + step) for step in (-1e-6, 0, 1e-6)) == pytest.approx(
        told_mm, abs=3e-3
    )
    assert min(left_mm(0.73 * step) for step in range(494)) >= told_mm - 2e-3
    assert net["line"]["share"] == pytest.approx(told_mm / (band_mm[1] - band_mm[0]))

    def share(radius_mm: float) -> float:
        at = np.arange(0, 2 * math.pi, 1e-4)
        return 1 - float(np.mean(shapely.contains_xy(whole, radius_mm * np.cos(at), radius_mm * np.sin(at))))

    shapely.prepare(whole)
    ring = net["ring"]
    assert min(share(ring["radius_mm"] + step) for step in (-1e-6, 1e-6)) == pytest.approx(ring["share"], abs=2e-3)
    assert min(map(share, np.linspace(*band_mm, 25))) >= ring["share"] - 2e-3
    assert ring["left_mm"] == pytest.approx(ring["share"] * 2 * math.pi * ring["radius_mm"])


def tracks_of(layout: Json, movement: Movement, cutter: Cutter) -> list[Json]:
    """Timing: a point at radius r passes 2πr mm in a turn, and 360 degrees."""
    rows = []
    for track in movement.tracks:
        placed = [place for place in layout["projections"] if place["track"] == track.track]
        if not placed:
            continue
        mm_per_ms = 2 * math.pi * track.radius_mm / (1000 * movement.revolution_s)
        deg_per_ms = 360 / (1000 * movement.revolution_s)
        by_class_mm = CLASS_1_MM if cutter.tolerance_class == "iso-9013-1" else cutter.position_tolerance_mm
        position_ms = by_class_mm / mm_per_ms
        angle_ms = cutter.angle_tolerance_deg / deg_per_ms
        play_mm = movement.disc.centre_hole_play_mm
        play_ms = 0.0 if play_mm is None else play_mm / 2 / mm_per_ms
        largest_ms = max(abs(place["sounds_s"] - place["asked_s"]) * 1000 for place in placed)
        engagement_mm = engagement_of(movement)
        rows.append(
            {
                "track": track.track,
                "radius_mm": track.radius_mm,
                "pluck_count": len(placed),
                "position_mm": by_class_mm,
                "placed_by": cutter.tolerance_class or "position_tolerance_mm",
                "no_class_because": None,
                "position_ms": pytest.approx(position_ms),
                "angle_ms": pytest.approx(angle_ms),
                "play_ms": None if play_mm is None else pytest.approx(play_ms),
                "depth_ms": None if engagement_mm is None else 0.0,
                "together_ms": pytest.approx(position_ms + angle_ms + play_ms),
                "root_square_ms": pytest.approx(math.sqrt(position_ms**2 + angle_ms**2 + play_ms**2)),
                "engagement_mm": engagement_mm if engagement_mm is None else pytest.approx(engagement_mm),
                "largest_nudge_ms": pytest.approx(largest_ms, abs=MICROSECOND_MS),
            }
        )
    return rows


def load_at(at_s: float, layout: Json, movement: Movement) -> float:
    """Torque at a moment, N mm: a tooth lifted by u loads the disc with k·u·r·cos δ; u is q at its release."""
    torque_nmm = 0.0
    teeth_on: dict[int, list[Tooth]] = {}
    for tooth in movement.teeth:
        if tooth.usable:
            teeth_on.setdefault(tooth.track, []).append(tooth)
    for pluck in layout["projections"]:
        arm_mm = math.sqrt(pluck["radius_mm"] ** 2 - movement.gantry_offset_mm**2)  # r·cos δ, as sin δ = d/r
        travel_mm = (pluck["sounds_s"] - at_s) * 2 * math.pi * arm_mm / movement.revolution_s  # until the release
        for tooth in teeth_on.get(pluck["track"], []):
            if -1e-6 < travel_mm < tooth.lift_mm:
                torque_nmm += tooth.stiffness_n_per_mm * (tooth.lift_mm - travel_mm) * arm_mm
    return torque_nmm


def assert_load_right(load: Json, layout: Json, movement: Movement) -> None:
    """No release loads the disc more than the peak, and the peak is what is there at its moment."""
    assert load["peak_nmm"] == pytest.approx(load_at(load["at_s"], layout, movement), rel=1e-3)
    releases_s = [place["sounds_s"] for place in layout["projections"]]
    assert max(load_at(at_s, layout, movement) for at_s in releases_s) <= load["peak_nmm"] * 1.001


def assert_start_right(start: Json, movement: Movement) -> None:
    """From rest against a brake whose drag grows with ω²: with x = ω²/ω_T², dx/dangle = 2·τ·(1 − x)/(I·ω_T²)."""
    drive = movement.drive
    inertia_kg_m2 = drive.disc_inertia_kg_m2 + sum(part.inertia_kg_m2 * part.ratio**2 for part in drive.train)
    full_rad_per_s, torque_nm = 2 * math.pi / movement.revolution_s, drive.surplus_torque_nmm / 1000
    angle_rad = -math.log(1 - 0.99**2) * inertia_kg_m2 * full_rad_per_s**2 / (2 * torque_nm)
    assert start["inertia_kg_m2"] == pytest.approx(inertia_kg_m2)
    assert start["to_speed_deg"] == pytest.approx(math.degrees(angle_rad))
    fastest_deg = math.degrees(angle_rad) * (movement.revolution_s / movement.fastest_revolution_s) ** 2
    assert start["to_speed_at_fastest_deg"] == pytest.approx(fastest_deg)
    # ω = 0.99·ω_T: t = t₀·½·ln((1 + 0.99)/(1 − 0.99))
    assert start["time_constant_s"] == pytest.approx(inertia_kg_m2 * full_rad_per_s / torque_nm)
    assert start["to_speed_s"] == pytest.approx(start["time_constant_s"] * math.log(1.99 / 0.01) / 2)


def assert_torque_right(torque: Json, layout: Json, movement: Movement) -> None:
    """Peak, mean, chord and the curve over the turn: right in the middle of each of its straight stretches."""
    assert_load_right(torque, layout, movement)
    at_s, torque_nmm = torque["over_the_turn"]["at_s"], torque["over_the_turn"]["torque_nmm"]
    turn_s = movement.revolution_s
    assert (at_s[0], at_s[-1]) == (-movement.before_music_deg / 360 * turn_s, at_s[0] + turn_s)
    assert at_s == sorted(at_s)
    assert max(torque_nmm) == pytest.approx(torque["peak_nmm"])
    for left, right in pairwise(zip(at_s, torque_nmm, strict=True)):
        middle_s = (left[0] + right[0]) / 2
        near = [pluck for pluck in layout["projections"] if abs(pluck["sounds_s"] - middle_s) < 1]
        if right[0] - left[0] > 1e-4:
            told_nmm = (left[1] + right[1]) / 2
            assert told_nmm == pytest.approx(load_at(middle_s, {"projections": near}, movement), abs=0.05)
    work_nmm = sum(
        tooth.stiffness_n_per_mm * tooth.lift_mm**2 / 2
        for pluck in layout["projections"]
        for tooth in movement.teeth
        if tooth.track == pluck["track"] and tooth.usable
    )
    assert torque["mean_nmm"] == pytest.approx(work_nmm / (2 * math.pi))
    released = {pluck["track"] for pluck in layout["projections"] if abs(pluck["sounds_s"] - torque["at_s"]) < 1e-6}
    assert released <= {loaded["track"] for loaded in torque["chord"]}


def assert_winding_right(winding: Json, torque: Json, movement: Movement) -> None:
    """The spring let down from full by a thousandth of a turn of the disc at a time."""
    wound = movement.drive.winding
    spring, ratio = wound.spring, math.prod(wound.barrel_to_disc)
    stiff_nmm = spring.elastic_modulus_n_per_mm2 * spring.width_mm * spring.thickness_mm**3 / 12 / spring.length_mm

    def at_disc_nmm(turns: float) -> float:
        return stiff_nmm * 2 * math.pi * (spring.wound_turns - turns / ratio) * wound.efficiency / ratio

    needed_nmm = wound.friction_nmm + torque["peak_nmm"]
    turns = 0
    while turns / 1000 < spring.usable_turns * ratio and at_disc_nmm(turns / 1000) > needed_nmm:
        turns += 1
    assert winding["turns"] == pytest.approx(turns / 1000, abs=2e-3)
    assert (winding["full_nmm"], winding["needed_nmm"]) == (pytest.approx(at_disc_nmm(0)), pytest.approx(needed_nmm))
    assert winding["spent_nmm"] == pytest.approx(at_disc_nmm(turns / 1000), rel=1e-3)
    left = [at_disc_nmm(turn) - wound.friction_nmm - torque["mean_nmm"] for turn in range(int(winding["turns"]) + 1)]
    assert winding["last_turn_slows_share"] == pytest.approx(1 - math.sqrt(left[-1] / left[-2]))
    assert winding["last_revolution_s"] / winding["first_revolution_s"] == pytest.approx(
        1 / (1 - winding["winding_slows_share"])
    )


def assert_drive_right(drive: Json, layout: Json, movement: Movement) -> None:
    assert drive["clearing_turn"] == {"track_count": len({pluck["track"] for pluck in layout["projections"]})}
    known = [drive[part] is not None for part in ("start", "torque", "winding")]
    assert known == [movement.drive is not None] * 3  # of the shipped movements one states all, the others nothing
    if movement.drive is None:
        assert drive["not_stated"] == ["drive", "teeth.stiffness_n_per_mm", "teeth.lift_mm"]
        return
    assert drive["not_stated"] == []
    assert_start_right(drive["start"], movement)
    assert_torque_right(drive["torque"], layout, movement)
    assert_winding_right(drive["winding"], drive["torque"], movement)
    wound = movement.drive.winding
    by_train_s = math.prod(wound.disc_to_brake) / wound.brake_turns_per_s
    assert drive["revolution"] == {"stated_s": movement.revolution_s, "by_brake_and_train_s": by_train_s}


def assert_depth_right(depth: dict[str, Any] | None, movement: Movement, cutter: Cutter) -> None:
    """The band of the depth by its sums, and the two ends of the flatness that these movements are near."""
    projection, wheel = movement.projection, movement.star_wheel
    if projection.depth_mm is None:
        assert depth is None
        return
    assert depth is not None
    assert isinstance(wheel, StarWheel)
    spread_mm = projection.depth_plus_minus_mm + movement.disc.flatness_mm
    assert (depth["least_mm"], depth["most_mm"]) == pytest.approx(
        (projection.depth_mm - spread_mm, projection.depth_mm + spread_mm), abs=1e-9
    )
    half_step_mm = wheel.tip_radius_mm * math.cos(math.pi / wheel.points)
    rooms_mm = [projection.depth_mm - projection.depth_plus_minus_mm - wheel.axis_depth_mm + half_step_mm]
    if cutter.fold is not None:
        rooms_mm.append(wheel.axis_depth_mm - wheel.tip_radius_mm - cutter.fold.inside_radius_mm)
    assert depth["flatness_limit_mm"] == pytest.approx(min(rooms_mm), abs=1e-6)


def assert_counted_right(laid_out: LaidOut) -> None:
    """Every number of the report against layout.json and the documents."""
    layout = json.loads(json.dumps(layout_record(laid_out, despite_findings=None)))
    report = json.loads(json.dumps(report_record(laid_out)))
    movement, cutter = laid_out.disc.movement, laid_out.disc.cutter
    for field in ("title", "fingerprint", "good_to_cut", "movement", "cutter", "transposed_semitones", "worth"):
        assert report[field] == layout[field]
    for voice in ("highest", "lowest", "inner"):
        assert report[voice] == tally_of(layout, lambda note, voice=voice: note["voice"] == voice)
    assert report["total"] == tally_of(layout, lambda note: True)
    if any(note["melody"] != (note["voice"] == "highest") for note in layout["notes"]):
        assert report["melody"] == tally_of(layout, lambda note: note["melody"])
    else:
        assert report["melody"] is None
    not_asked = {note["note"] for note in layout["notes"] if note["weight"] == 0}
    assert report["not_asked"] == Counter(left["reason"] for left in layout["left_out"] if left["note"] in not_asked)
    assert report["worst_bars"] == worst_bars_of(layout)
    assert report["projection_count"] == len(layout["projections"])
    assert report["extra_pluck_count"] == sum("again_of" in place for place in layout["projections"])
    assert report["tracks"] == tracks_of(layout, movement, cutter)
    assert_metal_right(report["net_section"], layout, movement, laid_out.disc.pattern)
    assert_depth_right(report["depth"], movement, cutter)
    assert (report["load"] is None) == (report["no_load_because"] is not None)
    if report["load"]:
        assert_load_right(report["load"], layout, movement)
    assert_drive_right(report["drive"], layout, movement)
    for best in report["tried"][:1]:
        assert (best["semitones"], best["kept"]) == (layout["transposed_semitones"], layout["worth"]["kept"])


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
@pytest.mark.parametrize("tune", TUNES)
def test_the_report_can_be_counted_again_from_the_layout(tune: str, movement: Movement) -> None:
    laid_out = laid_out_by(tune, "as written", movement)

    assert_counted_right(laid_out)
    assert laid_out.report.total.kept_count > 20


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_report_on_part_of_a_tune_can_be_counted_again(movement: Movement) -> None:
    laid_out = laid_out_by("demo", "part of it, fitted", movement)

    assert_counted_right(laid_out)
    assert {reason for reason, _ in laid_out.report.not_asked} >= {"outside-passage"}


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_the_report_on_a_layout_with_all_there_is_to_tell_can_be_counted_again(movement: Movement) -> None:
    laid_out = with_all_there_is_to_tell(laid_out_by("demo", "as written", movement))

    assert_counted_right(laid_out)
    report = laid_out.report
    assert min(report.total.octave_count, report.total.nudged_count, report.total.covered_count) > 3
    assert report.melody is not None
    assert report.extra_pluck_count > 3


def test_the_report_on_a_loose_disc_cut_to_a_tolerance_class_can_be_counted_again() -> None:
    plain = shipped_movement("fernhollow-31").model_dump(mode="json")
    loose = movement_with({"disc/centre_hole_play_mm": 0.1}, plain)
    cutter = cutter_with({"tolerance_class": "iso-9013-1", "net_section": None})

    laid_out = walk.lay_out(TUNES["reel"](), loose, cutter, read_settings("{}"))

    assert_counted_right(laid_out)
    assert {track.error.placed_by for track in laid_out.report.tracks} == {"iso-9013-1"}


def test_a_load_counted_again_is_the_sum_over_the_teeth_in_touch() -> None:
    teeth = {f"teeth/{index}/{name}": value for index in range(3) for name, value in LIFTED.items()}
    movement = movement_with(teeth)
    places = [
        {"track": 1, "radius_mm": 50, "sounds_s": 2.0},
        {"track": 2, "radius_mm": 60, "sounds_s": 2.0},
        {"track": 3, "radius_mm": 100, "sounds_s": 2.03},
        {"track": 3, "radius_mm": 100, "sounds_s": 9.0},
    ]

    # 2 N/mm · 0.5 mm is 1 N: 50 + 60 N mm; track 3 passes 2π · 100/60 = 10.472 mm/s, so 0.03 s before its
    # release its tooth is lifted by 0.5 − 0.31416 mm: 2 · 0.18584 · 100 = 37.168 N mm
    assert load_at(2.0, {"projections": places}, movement) == pytest.approx(147.168, abs=0.001)
