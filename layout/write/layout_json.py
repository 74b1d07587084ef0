"""layout.json: everything about a layout, for programs. Fields may be added, never renamed."""

import math
from collections.abc import Iterator
from typing import Any

import numpy as np

from layout.arrange.arrangement import NO_NOTE, Arrangement
from layout.check.finding import finding_told
from layout.documents.pitch import pitch_of
from layout.read.score import Score
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines
from layout.write.laid_out import LaidOut
from layout.write.report_json import worth_record

FORMAT = "discwright-layout/1"
Record = dict[str, Any]  # JSON: what it holds is said by layout_record


def write_layout_json(laid_out: LaidOut, *, despite_findings: str | None) -> bytes:
    """The layout as UTF-8 JSON, one bar, note, projection, note left out or finding to a line.

    Args:
        laid_out: The layout.
        despite_findings: The reason for which a disc with an error is cut all the same; None where none is.

    Raises:
        ValueError: A number of the layout is not finite: a fault of the program, never of an input.
    """
    return json_lines(_fields(laid_out, despite_findings=despite_findings))


def layout_record(laid_out: LaidOut, *, despite_findings: str | None) -> Record:
    """The layout in plain dictionaries and lists, in the order it is written.

    Angles are working edges' on the disc seen from the label side, never mirrored, in [0, 360);
    times run from the start of the music on the disc, but for the bars and notes read, which keep the tune's
    own times and pitches. A bar starts at its start_s; the last one starts past the last onset. A note not
    asked for has weight 0 and no voice. Only an extra pluck has `again_of`. Numbers are unrounded.

    Args:
        laid_out: The layout.
        despite_findings: The reason for which a disc with an error is cut all the same; None where none is.
    """
    fields = _fields(laid_out, despite_findings=despite_findings)
    return {name: list(value) if isinstance(value, Iterator) else value for name, value in fields.items()}


def _fields(laid_out: LaidOut, *, despite_findings: str | None) -> Record:
    """The record, in which lists as long as the tune are iterators."""
    arrangement, movement, cutter = laid_out.arrangement, laid_out.disc.movement, laid_out.disc.cutter
    score = laid_out.score
    return {
        "format": FORMAT,
        "title": laid_out.title,
        "fingerprint": laid_out.fingerprint,
        "disc": {"number": laid_out.disc_number, "of": laid_out.disc_count},
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
        "worth": worth_record(arrangement.worth),
        "bars": [{"bar": place + 1, "start_s": start_s} for place, start_s in enumerate(score.bar_s.tolist())],
        "notes": _notes(score, arrangement),
        "projections": _projections(laid_out),
        "left_out": [{"note": left.note, "reason": left.reason} for left in arrangement.left_out],
        "findings": [finding_told(finding) for finding in laid_out.findings],
    }


def _notes(score: Score, arrangement: Arrangement) -> Iterator[Record]:
    rows = zip(
        score.onset_s.tolist(),
        score.duration_s.tolist(),
        map(pitch_of, score.pitch.tolist()),
        score.velocity.tolist(),
        score.channel.tolist(),
        arrangement.note_weight.tolist(),
        _voices(arrangement),
        arrangement.melody.tolist(),
        strict=True,
    )
    names = ("onset_s", "duration_s", "pitch", "velocity", "channel", "weight", "voice", "melody")
    return ({"note": note} | dict(zip(names, row, strict=True)) for note, row in enumerate(rows))


def _voices(arrangement: Arrangement) -> list[str | None]:
    """The voice of each note asked for, the top line's where it is the lowest too; None for the others."""
    asked = arrangement.note_weight > 0
    conditions = [~asked, arrangement.highest, arrangement.lowest]
    places = np.select(conditions, [0, 1, 2], default=3)
    return [(None, "highest", "lowest", "inner")[place] for place in places.tolist()]


def _projections(laid_out: LaidOut) -> Iterator[Record]:
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
        arrangement.octave_semitones.tolist(),
        arrangement.notes,
        arrangement.again_of.tolist(),
        strict=True,
    )
    return (
        {
            "track": track,
            "teeth": teeth.get(track, []),
            "pitch": pitches.get(track, ""),
            "radius_mm": radius_mm,
            "angle_deg": math.degrees(angle_rad),
            "asked_s": asked_s,
            "sounds_s": sounds_s,
            "octave_semitones": octave_semitones,
            "notes": list(notes),
        }
        | ({} if again_of == NO_NOTE else {"again_of": again_of})
        for track, radius_mm, angle_rad, asked_s, sounds_s, octave_semitones, notes, again_of in rows
    )
