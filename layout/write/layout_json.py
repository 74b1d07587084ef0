"""layout.json: everything about a layout, for programs. Fields may be added, never renamed."""

import json
import math
from typing import Any

from layout.check.finding import Finding, Place
from layout.documents.pitch import pitch_of
from layout.read.score import Score
from layout.version import ENGINE_VERSION
from layout.write.laid_out import LaidOut

FORMAT = "discwright-layout/1"
Record = dict[str, Any]  # JSON: what it holds is said by layout_record


def write_layout_json(laid_out: LaidOut, *, despite_findings: str | None) -> bytes:
    """The layout as UTF-8 JSON, one note, projection, note left out or finding to a line.

    Args:
        laid_out: The layout.
        despite_findings: The reason for which a disc with an error is cut all the same; None where none is.

    Raises:
        ValueError: A number of the layout is not finite: a fault of the program, never of an input.
    """
    record = layout_record(laid_out, despite_findings=despite_findings)
    lines = ",\n".join(f"{_json(name)}: {_value(value)}" for name, value in record.items())
    # JSON writes half a surrogate pair as \udXXX, which is also what this error handler writes.
    return f"{{\n{lines}\n}}\n".encode("utf-8", errors="backslashreplace")


def layout_record(laid_out: LaidOut, *, despite_findings: str | None) -> Record:
    """The layout in plain dictionaries and lists, in the order it is written.

    Angles are working edges' on the disc seen from the label side, never mirrored, in [0, 360);
    times run from the start of the music on the disc, but for the notes read, which keep the tune's
    own times and pitches. Numbers are unrounded.

    Args:
        laid_out: The layout.
        despite_findings: The reason for which a disc with an error is cut all the same; None where none is.
    """
    arrangement, movement, cutter = laid_out.arrangement, laid_out.disc.movement, laid_out.disc.cutter
    score, worth = laid_out.score, arrangement.worth
    return {
        "format": FORMAT,
        "title": laid_out.title,
        "fingerprint": laid_out.fingerprint,
        "good_to_cut": laid_out.good_to_cut,
        "despite_findings": despite_findings,
        "movement": {"id": movement.id, "revision": movement.revision},
        "cutter": {"id": cutter.id},
        "engine_version": ENGINE_VERSION,
        "read": {
            "midi_format": score.midi_format,
            "sequence": score.sequence,
            "sequence_count": score.sequence_count,
            "note_count": score.note_count,
            "percussion_count": score.percussion_count,
            "warnings": list(score.warnings),
        },
        "revolution_s": movement.revolution_s,
        "turns": movement.turns,
        "drawn_from": cutter.drawn_from,
        "transposed_semitones": arrangement.transposed_semitones,
        "speed_factor": arrangement.speed_factor,
        "from_s": arrangement.from_s,
        "worth": {"kept": worth.kept, "bound": worth.bound, "proved": worth.proved},
        "notes": _notes(score),
        "projections": _projections(laid_out),
        "left_out": [{"note": left.note, "reason": left.reason} for left in arrangement.left_out],
        "findings": [finding_record(finding) for finding in laid_out.findings],
    }


def finding_record(finding: Finding) -> Record:
    """One finding; "at" holds only what applies."""
    return {
        "code": finding.code.value,
        "level": finding.level.value,
        "message": finding.message,
        "measured": finding.measured,
        "limit": finding.limit,
        "unit": finding.unit,
        "at": _place(finding.at),
        "remedy": finding.remedy,
    }


def _place(at: Place) -> Record:
    numbers = {"radius_mm": at.radius_mm, "angle_deg": at.angle_deg, "sounds_s": at.sounds_s}
    indices = {"tracks": list(at.tracks), "projections": list(at.projections)}
    return {name: value for name, value in indices.items() if value} | {
        name: value for name, value in numbers.items() if value is not None
    }


def _notes(score: Score) -> list[Record]:
    rows = zip(
        score.onset_s.tolist(),
        score.duration_s.tolist(),
        map(pitch_of, score.pitch.tolist()),
        score.velocity.tolist(),
        score.channel.tolist(),
        strict=True,
    )
    names = ("onset_s", "duration_s", "pitch", "velocity", "channel")
    return [{"note": note} | dict(zip(names, row, strict=True)) for note, row in enumerate(rows)]


def _projections(laid_out: LaidOut) -> list[Record]:
    disc, arrangement = laid_out.disc, laid_out.arrangement
    teeth: dict[int, list[int]] = {}
    pitches: dict[int, str] = {}
    for tooth in disc.movement.teeth:
        pitches.setdefault(tooth.track, tooth.pitch)
        if tooth.usable:
            teeth.setdefault(tooth.track, []).append(tooth.tooth)
    rows = zip(
        (disc.track_index + 1).tolist(),
        disc.radius_mm.tolist(),
        disc.edge_angle_rad.tolist(),
        arrangement.asked_s.tolist(),
        laid_out.plucks.sounds_s.tolist(),
        arrangement.notes,
        strict=True,
    )
    return [
        {
            "track": track,
            "teeth": teeth.get(track, []),
            "pitch": pitches.get(track, ""),
            "radius_mm": radius_mm,
            "angle_deg": math.degrees(angle_rad),
            "asked_s": asked_s,
            "sounds_s": sounds_s,
            "notes": list(notes),
        }
        for track, radius_mm, angle_rad, asked_s, sounds_s, notes in rows
    ]


def _value(value: Any) -> str:
    if isinstance(value, list) and value:
        return "[\n" + ",\n".join(_json(entry) for entry in value) + "\n]"
    return _json(value)


def _json(value: Any) -> str:
    return json.dumps(value, ensure_ascii=False, allow_nan=False)
