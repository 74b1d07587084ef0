"""Small movements, cutters and discs that the tests share; every number is chosen to work by hand."""

import copy
import json
from typing import Any

import numpy as np

from layout.arrange.arrangement import NO_NOTE, Arrangement, LeftOut, Worth
from layout.documents import Cutter, Movement, read_movement, shipped_cutter, shipped_movement
from layout.documents.cutter import read_cutter
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.projection import pattern_of
from layout.mechanics.turning import turning_of
from layout.place.disc import Disc

LASER = shipped_cutter("fibre-laser")
PRESS = shipped_cutter("turn-press")

# One turn is 60 s: 6 degrees a second. The star's 6 points give an engagement arc of 2 * 3.2 * sin 30° = 3.2 mm.
PLAIN_DOCUMENT: dict[str, Any] = {
    "format": "discwright-movement/1",
    "id": "plain-3",
    "title": "Three tracks, easy numbers",
    "turns": "clockwise",
    "revolution_s": 60,
    "fastest_revolution_s": 60,
    "before_music_deg": 30,
    "after_music_deg": 30,
    "disc": {
        "outer_diameter_mm": 240,
        "thickness_mm": 0.5,
        "material": "cold-rolled steel",
        "centre_hole_mm": 10,
        "flatness_mm": 0.1,
        "run_out_mm": 0.05,
    },
    "star_wheel": {
        "points": 6,
        "tip_radius_mm": 3.2,
        "root_radius_mm": 1.5,
        "axis_depth_mm": 3.75,
        "thickness_mm": 0.5,
        "release_angle_deg": 0,
    },
    "projection": {"kind": "standing", "width_mm": 1.2, "depth_mm": 1.41, "depth_plus_minus_mm": 0.05},
    "damper_arc_mm": 1.0,
    "damper_recovery_s": 0.1,
    "tracks": [{"track": 1, "radius_mm": 50}, {"track": 2, "radius_mm": 60}, {"track": 3, "radius_mm": 100}],
    "teeth": [
        {"tooth": 1, "track": 1, "pitch": "C5"},
        {"tooth": 2, "track": 2, "pitch": "E5"},
        {"tooth": 3, "track": 3, "pitch": "G5"},
    ],
}


def document_with(changes: dict[str, Any], base: dict[str, Any] = PLAIN_DOCUMENT) -> dict[str, Any]:
    """A copy of a document with fields set by their path: {"disc/flatness_mm": 0.2}; None removes one."""
    changed = copy.deepcopy(base)
    for path, value in changes.items():
        *parents, name = path.split("/")
        spot: Any = changed
        for parent in parents:
            spot = spot[int(parent)] if isinstance(spot, list) else spot.setdefault(parent, {})
        if isinstance(spot, list):
            spot[int(name)] = value
        elif value is None:
            spot.pop(name, None)
        else:
            spot[name] = value
    return changed


def movement_with(changes: dict[str, Any] | None = None, base: dict[str, Any] = PLAIN_DOCUMENT) -> Movement:
    """The plain movement with some fields changed."""
    return read_movement(json.dumps(document_with(changes or {}, base)))


def cutter_with(changes: dict[str, Any], base: Cutter = LASER) -> Cutter:
    """A shipped cutter with some fields changed."""
    return read_cutter(json.dumps(document_with(changes, base.model_dump(mode="json"))))


PLAIN = movement_with()
SHIPPED = tuple(shipped_movement(name) for name in ("fernhollow-31", "mossbrook-67", "tarnlight-17"))


def disc_of(movement: Movement, plucks: list[tuple[int, float]], cutter: Cutter = LASER) -> Disc:
    """A disc with a working edge for every (track number, sounds_s)."""
    turning = turning_of(movement)
    track_index = frozen_ints(track - 1 for track, _ in plucks)
    sounds_s = frozen_floats(sounds for _, sounds in plucks)
    return Disc(
        movement=movement,
        cutter=cutter,
        turning=turning,
        pattern=pattern_of(movement, cutter),
        track_index=track_index,
        edge_angle_rad=frozen_floats(turning.edge_angle_rad(sounds_s, track_index)),
    )


def arrangement_of(plucks: list[tuple[int, float]], left_out: tuple[LeftOut, ...] = ()) -> Arrangement:
    """An arrangement with a pluck for every (track number, asked_s), note i in pluck i."""
    asked_s = frozen_floats(asked for _, asked in plucks)
    notes = len(plucks) + len(left_out)
    return Arrangement(
        track_index=frozen_ints(track - 1 for track, _ in plucks),
        key=frozen_ints(60 for _ in plucks),
        asked_s=asked_s,
        planned_s=asked_s,
        notes=tuple((index,) for index in range(len(plucks))),
        again_of=frozen_ints(NO_NOTE for _ in plucks),
        octave_semitones=frozen_ints(0 for _ in plucks),
        left_out=left_out,
        transposed_semitones=0,
        speed_factor=1.0,
        from_s=0.0,
        length_s=float(np.max(asked_s, initial=0.0)),
        worth=Worth(kept=len(plucks) * 1000, bound=len(plucks) * 1000, proved=True),
        note_weight=frozen_ints([1000] * notes),
        highest=np.zeros(notes, dtype=np.bool_),
        lowest=np.zeros(notes, dtype=np.bool_),
        melody=np.zeros(notes, dtype=np.bool_),
        tried=(),
        transpositions=(),
        load=None,
    )
