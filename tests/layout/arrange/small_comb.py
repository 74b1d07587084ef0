"""A comb whose repeats are easy numbers, tunes on it, and a second opinion on what the stage gives.

One turn is 60 s and the engagement arc is π mm, so a track of radius r mm repeats after
π/r · 60/(2π) = 30/r seconds:

    track   1    2     3    4    5    6
    pitch   C4   D4    E4   E4   G4   A4 (the tooth is not usable)
    r, mm   30   40    50   60   75   100
    least   1.0  0.75  0.6  0.5  0.4  0.3 s

The music may fill 6° to 354°: 58 s.
"""

import json
import math
from collections.abc import Sequence
from itertools import combinations
from typing import Any

import numpy as np

from layout.arrange import Arrangement, arrange
from layout.documents import Movement, Settings, read_movement, read_settings
from layout.documents.cutter import Cutter
from layout.documents.pitch import key_of
from layout.documents.shipped import shipped_cutter
from layout.mechanics.arrays import frozen_floats, frozen_ints
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import Spacing, TooNear, spacing_of
from layout.mechanics.turning import Turning, turning_of
from layout.read import Score

SMALL_COMB: dict[str, Any] = {
    "format": "discwright-movement/1",
    "id": "small-comb",
    "title": "Six tracks, repeats of easy numbers",
    "turns": "clockwise",
    "revolution_s": 60,
    "fastest_revolution_s": 60,
    "before_music_deg": 6,
    "after_music_deg": 6,
    "disc": {"outer_diameter_mm": 240, "thickness_mm": 0.5, "material": "steel", "centre_hole_mm": 8},
    "star_wheel": {"engagement_arc_mm": math.pi, "release_arc_mm": 0.5, "thickness_mm": 0.4},
    "projection": {"kind": "slot", "width_mm": 1.0, "length_mm": 1.5},
    "tracks": [{"track": place, "radius_mm": r} for place, r in enumerate((30, 40, 50, 60, 75, 100), start=1)],
    "teeth": [
        {"tooth": 1, "track": 1, "pitch": "C4"},
        {"tooth": 2, "track": 2, "pitch": "D4"},
        {"tooth": 3, "track": 3, "pitch": "E4"},
        {"tooth": 4, "track": 4, "pitch": "E4"},
        {"tooth": 5, "track": 5, "pitch": "G4"},
        {"tooth": 6, "track": 6, "pitch": "A4", "usable": False},
    ],
}
# 0.6° before and after: from the last pluck to the first of the next turn 0.2 s and more.
NEARLY_NO_REST = {"before_music_deg": 0.6, "after_music_deg": 0.6}
# Tracks 1 and 2 lie 2 mm apart: 0.7 mm of metal between two slots side by side, below a web of 1 mm.
CLOSE_TRACKS = {
    "projection": {"kind": "slot", "width_mm": 1.3, "length_mm": 1.5},
    "tracks": [{"track": place, "radius_mm": r} for place, r in enumerate((30, 32, 50, 52, 75, 100), start=1)],
}
LASER = shipped_cutter("fibre-laser")

Note = tuple[Any, ...]  # onset_s, pitch name, and if not 64 and 1 velocity and channel


def comb_with(changes: dict[str, Any] | None = None) -> Movement:
    """The small comb with some top-level fields replaced."""
    return read_movement(json.dumps({**SMALL_COMB, **(changes or {})}))


def spacing_for(movement: Movement, *, cutter: Cutter = LASER, min_web_mm: float | None = None) -> Spacing:
    web_mm = cutter.min_web_mm if min_web_mm is None else min_web_mm
    return spacing_of(movement, turning_of(movement), pattern_of(movement, cutter), web_mm)


def score_of(notes: Sequence[Note], *, duration_s: float = 0.25) -> Score:
    """A tune from (onset_s, pitch name, velocity or 64, channel or 1), in any order."""
    filled = sorted((note[0], key_of(note[1]), *[*note[2:], *(64, 1)[len(note) - 2 :]]) for note in notes)
    ordered = sorted(filled, key=lambda note: (note[0], note[1], note[3]))
    bar_count = int(max((note[0] for note in ordered), default=-1) // 2) + 1
    beat_s = np.arange(4 * bar_count + 1) * 0.5  # 4/4 at 120, as where a file states nothing
    return Score(
        onset_s=frozen_floats(note[0] for note in ordered),
        duration_s=frozen_floats(duration_s for _ in ordered),
        pitch=frozen_ints(note[1] for note in ordered),
        velocity=frozen_ints(note[2] for note in ordered),
        channel=frozen_ints(note[3] for note in ordered),
        bar_s=frozen_floats(beat_s[::4]),
        beat_s=frozen_floats(beat_s),
        title="",
        midi_format=0,
        sequence=1,
        sequence_count=1,
        percussion_count=0,
        warnings=(),
    )


def asking(**fields: Any) -> Settings:
    """Settings with these fields; as written in pitch and without nudges unless they say otherwise."""
    as_written = {"transpose": {"mode": "fixed", "semitones": 0}, "largest_nudge_ms": 0}
    return read_settings(json.dumps({**as_written, **fields}))


def arranged(notes: Sequence[Note], *, movement: Movement | None = None, **fields: Any) -> Arrangement:
    """The tune arranged on the small comb with these settings."""
    on = movement or comb_with()
    return arrange(score_of(notes), on, asking(**fields), spacing_for(on))


def played(arrangement: Arrangement) -> list[tuple[float, int]]:
    """(planned_s to the millisecond, track number) of every pluck, in the order of the arrangement."""
    tracks = (arrangement.track_index + 1).tolist()
    return [(round(second, 3), track) for second, track in zip(arrangement.planned_s.tolist(), tracks, strict=True)]


def left_out(arrangement: Arrangement) -> dict[int, str]:
    return {one.note: one.reason for one in arrangement.left_out}


def turned_apart_rad(turning: Turning, first: tuple[float, int], second: tuple[float, int]) -> float:
    """From the working edge of the first (second, track from 0) to that of the second, in (−π, π]."""
    sounds_s, tracks = zip(first, second, strict=True)
    angles = turning.edge_angle_rad(np.array(sounds_s), np.array(tracks))
    apart = float(angles[1] - angles[0])
    return math.pi - (math.pi - apart) % (2 * math.pi)


def broken_rules(plucks: Sequence[tuple[float, int]], movement: Movement, spacing: Spacing) -> list[str]:
    """Every pair of plucks (second, track from 0) that `spacing` forbids, looked at one by one."""
    turning = turning_of(movement)
    between: dict[tuple[int, int], TooNear] = {(one.inner_index, one.outer_index): one for one in spacing.between}
    broken = []
    for one, two in combinations(sorted(plucks, key=lambda pluck: pluck[1]), 2):
        apart_rad = turned_apart_rad(turning, one, two)
        pair = between.get((one[1], two[1]))
        if one[1] == two[1] and abs(apart_rad) < spacing.least_rad[one[1]]:
            broken.append(f"{one} and {two} are {abs(apart_rad)} apart")
        if pair is not None and pair.from_rad < apart_rad < pair.to_rad:
            broken.append(f"{one} and {two} leave too little web")
    return broken


def plucks_of(arrangement: Arrangement) -> list[tuple[float, int]]:
    return list(zip(arrangement.planned_s.tolist(), arrangement.track_index.tolist(), strict=True))
