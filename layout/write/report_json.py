"""report.json: what a disc keeps of its tune and what that cost, for programs. Fields may be added, never renamed."""

from typing import Any

from layout.arrange.arrangement import Tried, Worth
from layout.report.report import BarLoss, PeakLoad, Tally, TrackTiming
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines
from layout.write.laid_out import LaidOut

FORMAT = "discwright-report/1"
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
    none, and `no_load_because` then says why. Nudges are told to a nanosecond, all else unrounded.

    Args:
        laid_out: The layout.
    """
    report, arrangement, movement = laid_out.report, laid_out.arrangement, laid_out.disc.movement
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
        "load": None if report.load is None else _load(report.load),
        "no_load_because": report.no_load_because,
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


def _load(load: PeakLoad) -> Record:
    return {
        "peak_nmm": load.peak_nmm,
        "limit_nmm": load.limit_nmm,
        "share_of_limit": load.share_of_limit,
        "at_s": load.at_s,
        "chord": [{"track": loaded.track, "pitch": loaded.pitch} for loaded in load.chord],
    }


def _track(track: TrackTiming) -> Record:
    return {
        "track": track.track,
        "radius_mm": track.radius_mm,
        "pluck_count": track.pluck_count,
        "position_ms": track.position_ms,
        "angle_ms": track.angle_ms,
        "together_ms": track.together_ms,
        "largest_nudge_ms": track.largest_nudge_ms,
    }
