"""report.json: what a disc keeps of its tune and what that cost, for programs. Fields may be added, never renamed."""

import math
from typing import Any

from layout.arrange.arrangement import Transposed, Tried, Worth
from layout.documents.making import NetSection
from layout.documents.movement import Movement
from layout.mechanics.depth import DepthBand
from layout.mechanics.net_section import MetalLeft
from layout.mechanics.starting import Starting
from layout.mechanics.torque import TurnTorque
from layout.mechanics.winding import WindingRun
from layout.report.report import BarLoss, Driving, Loaded, PeakLoad, Tally, TrackTiming
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines
from layout.write.laid_out import LaidOut
from layout.write.numbers import DECIMALS_DEG, DECIMALS_MM, rounded

FORMAT = "discwright-report/1"
CURVE_DECIMALS = 6  # of a second and of a newton millimetre: finer than any plot
DECIMALS_SHARE = 9  # of a share: under a nanometre of any disc

Record = dict[str, Any]  # JSON: what it holds is said by report_record


def write_report(laid_out: LaidOut) -> bytes:
    """The report as UTF-8 JSON, one bar, track or transposition to a line.

    Args:
        laid_out: The layout; faulty ones have a report too.

    Raises:
        ValueError: A number of the report is not finite: a fault of the program, never of an input.
    """
    return json_lines(report_record(laid_out))


def report_record(laid_out: LaidOut) -> Record:
    """The report in plain dictionaries and lists, in the order it is written.

    What each number means stands at layout.report.report. A share is null where there is nothing to
    share, `melody` where no lead channel sets it apart from the top line, `load` where there is
    none, and `no_load_because` then says why. Nudges are told to a nanosecond, the torque over the turn to
    a microsecond and as finely, all else unrounded. In `drive` what is not known is null, and `not_stated`
    names the fields of the movement it would need. `net_section` is null where there are no openings; a least
    share is null where the cutter states none. `depth` is null for slots, and its limit for measured
    arcs. Parts of a track's timing are null where they are not stated.

    Args:
        laid_out: The layout.
    """
    report, arrangement, movement = laid_out.report, laid_out.arrangement, laid_out.disc.movement
    left = report.metal_left
    return {
        "format": FORMAT,
        "title": laid_out.title,
        "fingerprint": laid_out.fingerprint,
        "disc": {"number": laid_out.disc_number, "of": laid_out.disc_count},
        "good_to_cut": laid_out.good_to_cut,
        "movement": {"id": movement.id, "revision": movement.revision},
        "cutter": {"id": laid_out.disc.cutter.id},
        "engine_version": ENGINE_VERSION,
        "transposed_semitones": arrangement.transposed_semitones,
        "speed_factor": arrangement.speed_factor,
        "from_s": arrangement.from_s,
        "worth": worth_record(report.worth),
        "projection_count": report.projection_count,
        "extra_pluck_count": report.extra_pluck_count,
        "total": _tally(report.total),
        "highest": _tally(report.highest),
        "lowest": _tally(report.lowest),
        "inner": _tally(report.inner),
        "melody": None if report.melody is None else _tally(report.melody),
        "not_asked": dict(report.not_asked),
        "worst_bars": [_bar(bar) for bar in report.worst_bars],
        "tried": [_tried(tried) for tried in report.tried],
        "transpositions": [_transposed(one) for one in report.transpositions],
        "load": None if report.load is None else _load(report.load),
        "no_load_because": report.no_load_because,
        "drive": _drive(report.drive, movement),
        "net_section": None if left is None else _net_section(left, laid_out.disc.cutter.net_section),
        "depth": None if report.depth is None else _depth(report.depth),
        "tracks": [_track(track) for track in report.tracks],
    }


def worth_record(worth: Worth) -> Record:
    """The worth, as every JSON file tells it."""
    return {"kept": worth.kept, "bound": worth.bound, "proved": worth.proved, "stopped": worth.stopped}


def _tally(tally: Tally) -> Record:
    return {
        "note_count": tally.note_count,
        "kept_count": tally.kept_count,
        "asked_weight": tally.asked_weight,
        "kept_weight": tally.kept_weight,
        "kept_share": tally.kept_share,
        "octave_count": tally.octave_count,
        "nudged_count": tally.nudged_count,
        "largest_nudge_ms": tally.largest_nudge_ms,
        "mean_nudge_ms": tally.mean_nudge_ms,
        "covered_count": tally.covered_count,
        "left_out": dict(tally.left_out),
    }


def _bar(bar: BarLoss) -> Record:
    return {
        "bar": bar.bar,
        "start_s": bar.start_s,
        "note_count": bar.note_count,
        "lost_count": bar.lost_count,
        "asked_weight": bar.asked_weight,
        "lost_weight": bar.lost_weight,
        "lost_share": bar.lost_share,
    }


def _tried(tried: Tried) -> Record:
    return {
        "semitones": tried.semitones,
        "speed_factor": tried.speed_factor,
        "kept": tried.kept,
        "bound": tried.bound,
    }


def _transposed(one: Transposed) -> Record:
    return {"semitones": one.semitones, "kept": one.kept, "bound": one.bound}


def _load(load: PeakLoad) -> Record:
    return {
        "peak_nmm": load.peak_nmm,
        "limit_nmm": load.limit_nmm,
        "share_of_limit": load.share_of_limit,
        "at_s": load.at_s,
        "chord": _chord(load.chord),
    }


def _chord(chord: tuple[Loaded, ...]) -> list[Record]:
    return [{"track": loaded.track, "pitch": loaded.pitch} for loaded in chord]


def _drive(drive: Driving, movement: Movement) -> Record:
    limit_nmm = movement.drive.torque_limit_nmm if movement.drive is not None else None
    return {
        "start": None if drive.starting is None else _start(drive.starting, drive.starting_fastest, movement),
        "torque": None if drive.torque is None else _torque(drive.torque, drive.peak_chord, limit_nmm),
        "winding": None if drive.winding is None else _winding(drive.winding, upper_bound=drive.upper_bound),
        "revolution": {"stated_s": movement.revolution_s, "by_brake_and_train_s": drive.braked_revolution_s},
        "clearing_turn": {"track_count": drive.clearing_count},
        "not_stated": list(drive.not_stated),
    }


def _start(starting: Starting, fastest: Starting | None, movement: Movement) -> Record:
    return {
        "inertia_kg_m2": starting.inertia_kg_m2,
        "time_constant_s": starting.time_constant_s,
        "to_speed_s": starting.to_speed_s,
        "to_speed_deg": math.degrees(starting.to_speed_rad),
        "to_speed_at_fastest_deg": None if fastest is None else math.degrees(fastest.to_speed_rad),
        "before_music_deg": movement.before_music_deg,
        "at_least": starting.at_least,
    }


def _torque(torque: TurnTorque, chord: tuple[Loaded, ...], limit_nmm: float | None) -> Record:
    return {
        "peak_nmm": torque.peak_nmm,
        "limit_nmm": limit_nmm,
        "at_s": torque.peak_at_s,
        "chord": _chord(chord),
        "mean_nmm": torque.mean_nmm,
        "over_the_turn": {
            "at_s": rounded(torque.at_s, CURVE_DECIMALS).tolist(),
            "torque_nmm": rounded(torque.torque_nmm, CURVE_DECIMALS).tolist(),
        },
    }


def _winding(run: WindingRun, *, upper_bound: bool) -> Record:
    return {
        "full_nmm": run.full_nmm,
        "spent_nmm": run.spent_nmm,
        "needed_nmm": run.needed_nmm,
        "turns": run.turn_count,
        "ended_by": run.ended_by,
        "upper_bound": upper_bound,
        "last_turn_slows_share": run.last_turn_slows_ratio,
        "winding_slows_share": run.winding_slows_ratio,
        "first_revolution_s": run.first_revolution_s,
        "last_revolution_s": run.last_revolution_s,
    }


def _depth(depth: DepthBand) -> Record:
    return {
        "depth_mm": depth.depth_mm,
        "plus_minus_mm": depth.plus_minus_mm,
        "flatness_mm": depth.flatness_mm,
        "least_mm": round(depth.least_mm, DECIMALS_MM),
        "most_mm": round(depth.most_mm, DECIMALS_MM),
        "flatness_limit_mm": None if depth.flatness_limit_mm is None else round(depth.flatness_limit_mm, DECIMALS_MM),
        "ended_by": depth.ended_by,
    }


def _track(track: TrackTiming) -> Record:
    error = track.error
    return {
        "track": track.track,
        "radius_mm": track.radius_mm,
        "pluck_count": track.pluck_count,
        "position_mm": error.position_mm,
        "placed_by": error.placed_by,
        "no_class_because": error.class_outside,
        "position_ms": error.position_ms,
        "angle_ms": error.angle_ms,
        "play_ms": error.play_ms,
        "depth_ms": error.depth_ms,
        "together_ms": error.together_ms,
        "root_square_ms": error.root_square_ms,
        "engagement_mm": error.engagement_mm,
        "largest_nudge_ms": track.largest_nudge_ms,
    }


def _net_section(left: MetalLeft, least: NetSection | None) -> Record:
    # Found by halving, within a micrometre: the digits past a nanometre are the processor's own.
    return {
        "from_mm": round(left.from_mm, DECIMALS_MM),
        "to_mm": round(left.to_mm, DECIMALS_MM),
        "line": {
            "left_mm": round(left.line_mm, DECIMALS_MM),
            "share": round(left.line_share, DECIMALS_SHARE),
            "angle_deg": round(math.degrees(left.line_angle_rad), DECIMALS_DEG),
            "least_share": None if least is None else least.least_line_share,
        },
        "ring": {
            "left_mm": round(left.ring_mm, DECIMALS_MM),
            "share": round(left.ring_share, DECIMALS_SHARE),
            "radius_mm": round(left.ring_radius_mm, DECIMALS_MM),
            "least_share": None if least is None else least.least_ring_share,
        },
    }
