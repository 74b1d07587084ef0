"""Discs to show, laid out once for all tests of their pages, and one as full as a disc gets."""

import random
from functools import cache
from typing import Any

from layout.documents import Settings, shipped_cutter, shipped_movement
from layout.file_names import CUTTING_FILES, files_for
from layout.walk import lay_out
from layout.write.layout_json import layout_record
from layout.write.report_json import report_record
from service.pages.disc_shown import ShownDisc
from tests.service.shop import TUNE

MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
LEFT_OUT, BARS = 300, 120


@cache
def laid_out(movement_id: str, cutter_id: str = "fibre-laser") -> Any:
    """The demo tune on a shipped movement; tarnlight-17 is too short for it, so that an error stands."""
    return lay_out(TUNE, shipped_movement(movement_id), shipped_cutter(cutter_id), Settings())


@cache
def shown(movement_id: str = "fernhollow-31", cutter_id: str = "fibre-laser") -> ShownDisc:
    """The same as a page shows it, without sound and rulings."""
    layout = layout_record(laid_out(movement_id, cutter_id), despite_findings=None)
    cutter = shipped_cutter(cutter_id)
    given = [name for name in files_for(cutter) if layout["good_to_cut"] or name not in CUTTING_FILES]
    return ShownDisc(
        layout=layout,
        report=report_record(laid_out(movement_id, cutter_id)),
        movement=shipped_movement(movement_id),
        cutter=cutter,
        files={name: f"/files/{name}" for name in given},
        hearing={},
    )


def crowded(count: int) -> ShownDisc:
    """A disc with so many projections at random moments, each playing a note, and more notes that are left out."""
    chance = random.Random(3)
    plain = shown("mossbrook-67")
    movement = plain.movement
    free_s = 80.0
    notes, projections = [], []
    for note in range(count + LEFT_OUT):
        track = chance.choice(movement.tracks)
        tooth = next(tooth for tooth in movement.teeth if tooth.track == track.track)
        onset_s = chance.uniform(0, free_s)
        voice = chance.choice(("highest", "inner", "lowest"))
        notes.append(
            {"note": note, "onset_s": onset_s, "duration_s": 0.3, "pitch": tooth.pitch, "velocity": 80}
            | {"channel": 0, "weight": chance.randint(800, 2000), "voice": voice, "melody": False}
        )
        if note < count:
            nudge_s = chance.choice((0.0, 0.0, 0.006))
            projections.append(
                {"track": track.track, "teeth": [tooth.tooth], "pitch": tooth.pitch, "radius_mm": track.radius_mm}
                | {"angle_deg": chance.uniform(0, 360), "asked_s": onset_s, "sounds_s": onset_s + nudge_s}
                | {"octave_semitones": 0, "notes": [note]}
            )
    left_out = [{"note": count + place, "reason": "wheel-still-stepping"} for place in range(LEFT_OUT)]
    bars = [{"bar": place + 1, "start_s": place * free_s / BARS} for place in range(BARS)]
    layout = {**plain.layout, "notes": notes, "projections": projections, "left_out": left_out, "bars": bars}
    return ShownDisc(
        layout=layout,
        report=plain.report,
        movement=movement,
        cutter=plain.cutter,
        files=plain.files,
        hearing={"disc": "/hearing.wav?of=disc", "written": "/hearing.wav?of=written"},
    )
