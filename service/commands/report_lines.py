"""A report, told to a person: what a disc keeps of a tune, what that cost, how exactly it will sound."""

import textwrap
from collections.abc import Mapping
from typing import Any

from service.commands.output import aligned

WIDTH = 100  # characters; what the tables need, and no more than most terminals show
INDENT = "              "  # under the words that follow a label
VOICES = {"highest": "top line", "lowest": "bass", "inner": "inner", "melody": "melody", "total": "total"}
STOPPED = {
    "nodes": "the search ended at the most nodes it may try",
    "time": "the search ended at its time limit",
    "nudges": "more would be too heavy for the drive once it is nudged",
}
NOTHING = "-"
Report = Mapping[str, Any]  # content of report.json


def kept_lines(report: Report) -> list[str]:
    """Lines that say how many notes are kept, what they are worth, and why the others are not."""
    total = report["total"]
    kept = f"{total['kept_count']} of {total['note_count']} notes asked for"
    kept += f", as {report['projection_count']} projections"
    if extra := report["extra_pluck_count"]:
        kept += f", {extra} of them extra plucks"
    lines = [_labelled("kept", kept), *wrapped("worth", worth_told(report["worth"]))]
    for label, reasons in (("left out", total["left_out"]), ("not asked", report["not_asked"])):
        if reasons:
            tally = ", ".join(f"{count} {reason}" for reason, count in sorted(reasons.items()))
            lines += wrapped(label, f"{sum(reasons.values())}: {tally}")
    return lines


def report_lines(report: Report) -> list[str]:
    """Lines that tell the rest: voices, the worst bars, transpositions, load, drive, depth, metal left and timing."""
    return [
        *_voice_lines(report),
        *_bar_lines(report["worst_bars"]),
        *_tried_lines(report["tried"]),
        *_load_lines(report),
        *_drive_lines(report["drive"]),
        *_depth_lines(report["depth"]),
        *_metal_lines(report["net_section"]),
        *_timing_lines(report["tracks"]),
    ]


def worth_told(worth: Mapping[str, Any]) -> str:
    """What is kept against what could be, and how that is known, in words."""
    kept, bound = worth["kept"], worth["bound"]
    told = (
        f"{kept}, proved best: nothing searched keeps more"
        if worth["proved"]
        else f"{kept} of at most {bound} ({percent(kept, bound)})"
    )
    return told if worth["stopped"] is None else f"{told}; {STOPPED[worth['stopped']]}"


def percent(part: int, whole: int) -> str:
    """The share in tenths of a per cent; 0.0 and 100.0 only where it is none or all; "-" of nothing."""
    if whole == 0:
        return NOTHING
    tenths = round(1000 * part / whole)
    if 0 < part < whole:
        tenths = min(max(tenths, 1), 999)
    return f"{tenths // 10}.{tenths % 10} %"


def _voice_lines(report: Report) -> list[str]:
    heads = ("voice", "notes", "kept", "weight kept", "octave", "nudged", "largest", "mean", "covered", "left out")
    rows = [
        (
            name,
            str(tally["note_count"]),
            str(tally["kept_count"]),
            percent(tally["kept_weight"], tally["asked_weight"]),
            str(tally["octave_count"]),
            str(tally["nudged_count"]),
            _nudge(tally, "largest_nudge_ms"),
            _nudge(tally, "mean_nudge_ms"),
            str(tally["covered_count"]),
            str(tally["note_count"] - tally["kept_count"]),
        )
        for voice, name in VOICES.items()
        if (tally := report[voice]) is not None
    ]
    return _table([heads, *rows])


def _nudge(tally: Mapping[str, Any], which: str) -> str:
    return f"{tally[which]:.1f} ms" if tally["nudged_count"] else NOTHING


def _bar_lines(bars: list[Mapping[str, Any]]) -> list[str]:
    heads = ("worst bar", "from", "notes", "lost", "weight lost")
    rows = [
        (
            str(bar["bar"]),
            f"{bar['start_s']:.2f} s",
            str(bar["note_count"]),
            str(bar["lost_count"]),
            percent(bar["lost_weight"], bar["asked_weight"]),
        )
        for bar in bars
    ]
    return _table([heads, *rows]) if rows else []


def _tried_lines(tried: list[Mapping[str, Any]]) -> list[str]:
    heads = ("transposition", "speed", "worth")
    rows = [
        (
            f"{each['semitones']:+d}",
            f"{each['speed_factor']:.4g}",
            f"at most {each['bound']}" if each["kept"] is None else str(each["kept"]),
        )
        for each in tried
    ]
    return _table([heads, *rows]) if rows else []


def _load_lines(report: Report) -> list[str]:
    load = report["load"]
    if load is None:
        return wrapped("load", f"not known: {report['no_load_because']}")
    chord = ", ".join(f"{loaded['pitch']} (track {loaded['track']})" for loaded in load["chord"])
    limit = "the movement states no limit"
    if load["limit_nmm"] is not None:
        limit = f"{100 * load['share_of_limit']:.1f} % of the {load['limit_nmm']:.4g} N mm the drive has"
    return wrapped("load", f"at most {load['peak_nmm']:.4g} N mm, {limit}, at {load['at_s']:.3f} s: {chord}")


def _drive_lines(drive: Mapping[str, Any]) -> list[str]:
    told = []
    if start := drive["start"]:
        least = "at least " if start["at_least"] else ""
        told.append(
            f"99 % of its speed after {least}{start['to_speed_s']:.2f} s and {start['to_speed_deg']:.2f}°; "
            f"music may begin at {start['before_music_deg']:g}°"
        )
    if winding := drive["winding"]:
        most, least = ("at most ", "at least ") if winding["upper_bound"] else ("", "")
        last = f", the last {least}{100 * winding['last_turn_slows_share']:.1f} % slower at its end"
        told.append(f"{most}{winding['turns']:.2f} turns a winding{last if winding['turns'] else ''}")
    if clearing := drive["clearing_turn"]["track_count"]:
        told.append(
            f"after a change of disc let it make one turn unheard: the first note of each of {clearing} tracks may "
            "come early or not at all"
        )
    if drive["not_stated"]:
        told.append(f"not stated: {', '.join(drive['not_stated'])}")
    return wrapped("drive", "; ".join(told)) if told else []


def _depth_lines(depth: Mapping[str, Any] | None) -> list[str]:
    if depth is None:
        return []
    told = (
        f"{depth['least_mm']:.3f} to {depth['most_mm']:.3f} mm at the star wheels, {depth['depth_mm']:g} mm within "
        f"{depth['plus_minus_mm']:g} mm of forming and {depth['flatness_mm']:g} mm of flatness"
    )
    if (limit_mm := depth["flatness_limit_mm"]) is not None:
        told += (
            f"; sheets serve up to {limit_mm:.3f} mm out of flat, then {depth['ended_by']}"
            if limit_mm > 0
            else f"; not even a flat sheet serves: {depth['ended_by']}"
        )
    return wrapped("depth", told)


def _metal_lines(left: Mapping[str, Any] | None) -> list[str]:
    if left is None:
        return []
    line, ring = left["line"], left["ring"]
    told = (
        f"least left on a line {_share_told(line)} ({line['left_mm']:.1f} mm, at {line['angle_deg']:.1f}°), "
        f"on a ring {_share_told(ring)} (at {ring['radius_mm']:.1f} mm)"
    )
    return wrapped("metal", told if line["least_share"] is not None else f"{told}; the cutter states no least")


def _share_told(part: Mapping[str, Any]) -> str:
    least = "" if part["least_share"] is None else f" of at least {100 * part['least_share']:.4g} %"
    return f"{100 * part['share']:.1f} %{least}"


def _timing_lines(tracks: list[Mapping[str, Any]]) -> list[str]:
    if not tracks:
        return []
    inner, outer = tracks[0], tracks[-1]
    told = (
        f"at worst cut within {inner['together_ms']:.1f} ms either way ({inner['root_square_ms']:.1f} ms by root of "
        f"squares) on track {inner['track']} ({inner['radius_mm']:.4g} mm)"
    )
    if outer is not inner:
        told += (
            f", {outer['together_ms']:.1f} ms ({outer['root_square_ms']:.1f} ms) on track {outer['track']} "
            f"({outer['radius_mm']:.4g} mm)"
        )
    told += f"; placed by {' and '.join(sorted({track['placed_by'] for track in tracks}))}"
    if inner["play_ms"] is None:
        told += "; the centre hole's play is not stated"
    return wrapped("timing", f"{told}; report.json lists every track")


def _labelled(label: str, text: str) -> str:
    return f"  {label:<12}{text}"


def wrapped(label: str, text: str) -> list[str]:
    """Lines of a text under its label, none wider than a terminal shows."""
    return textwrap.wrap(
        text, WIDTH, initial_indent=_labelled(label, ""), subsequent_indent=INDENT, break_on_hyphens=False
    )


def _table(rows: list[tuple[str, ...]]) -> list[str]:
    """Rows under their heads, the first column to the left, numbers to the right."""
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    return [f"  {line}" for line in aligned((row[0], *_right(row[1:], widths[1:])) for row in rows)]


def _right(cells: tuple[str, ...], widths: list[int]) -> tuple[str, ...]:
    return tuple(cell.rjust(width) for cell, width in zip(cells, widths, strict=True))
