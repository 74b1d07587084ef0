"""What a disc's page brings for its scripts: layout.json and the movement as they draw it, as fine as a screen."""

import math
from collections.abc import Iterable, Mapping
from typing import Any

from layout.documents import Cutter, Movement
from layout.documents.movement import StarWheel
from layout.documents.pitch import key_of
from layout.mechanics.blank import features_once
from layout.mechanics.projection import Pattern, pattern_of
from layout.mechanics.turning import turning_of
from service.pages.disc_shown import Record, ShownDisc

# A screen shows a disc at some 30 pixels a millimetre at most, and tells time to a millisecond: each number keeps one
# digit more than that. What is drawn is never cut.
DECIMALS = {"radius_mm": 3, "angle_deg": 3, "sounds_s": 4, "asked_s": 4, "onset_s": 3, "start_s": 3}
OF_A_NOTE = ("onset_s", "pitch", "weight", "voice")
OF_A_PROJECTION = ("track", "angle_deg", "asked_s", "sounds_s", "octave_semitones", "notes", "again_of")
OF_A_FINDING = ("code", "level", "at")
OF_A_LAYOUT = (
    "title",
    "disc",
    "fingerprint",
    "good_to_cut",
    "revolution_s",
    "turns",
    "transposed_semitones",
    "speed_factor",
    "from_s",
    "worth",
    "bars",
    "left_out",
)
FINE_MM = 4  # decimals of a millimetre of the pattern, which is drawn many times as large


def disc_data(shown: ShownDisc) -> dict[str, Any]:
    """What the scripts of a disc's page know.

    `layout` has the fields of layout.json under their names, less those no script shows, rounded, so
    that a whole layout.json can stand in its place.

    Args:
        shown: The disc.
    """
    layout = shown.layout
    return {
        "movement": movement_data(shown.movement, shown.cutter),
        "layout": {
            **{name: layout[name] for name in OF_A_LAYOUT},
            "bars": _fewer(layout["bars"], ("bar", "start_s")),
            "notes": _fewer(layout["notes"], OF_A_NOTE),
            "projections": _fewer(layout["projections"], OF_A_PROJECTION),
            "findings": [_finding(finding) for finding in layout["findings"]],
        },
        "hearing": dict(shown.hearing),
        "turning": [
            [round(time_s, 4), round(turned_deg, 3)]
            for time_s, turned_deg in shown.turning_table or steady_turning(shown.movement)
        ],
        "rulings_at": shown.rulings_at,
    }


def steady_turning(movement: Movement) -> tuple[tuple[float, float], ...]:
    """Where the disc stands as its sound goes by that is made unless another turn is asked for: (seconds, degrees).

    From the moment it begins to move: its start, then its stated speed.

    Args:
        movement: The movement.
    """
    from layout.hearing_walk import steady_turn_of  # noqa: PLC0415 -- all of the sound comes with it

    return tuple((time_s, math.degrees(turned_rad)) for time_s, turned_rad in steady_turn_of(movement).tolist())


def movement_data(movement: Movement, cutter: Cutter) -> dict[str, Any]:
    """What is drawn of a movement, and of the pattern this cutter gives its projections."""
    disc = movement.disc
    return {
        "id": movement.id,
        "direction": turning_of(movement).direction,
        "revolution_s": movement.revolution_s,
        "before_music_deg": movement.before_music_deg,
        "after_music_deg": movement.after_music_deg,
        "row_mm": movement.gantry_offset_mm,
        "rim_mm": disc.outer_diameter_mm / 2,
        "hole_mm": disc.centre_hole_mm / 2,
        "features": [
            {
                "shape": feature.shape,
                "purpose": feature.purpose,
                "radius_mm": feature.radius_mm,
                "angle_deg": round(angle_deg, 3),
                "width_mm": feature.width_mm,
                "length_mm": feature.length_mm,
            }
            for feature, angle_deg in features_once(disc)
        ],
        "keep_out": [[ring.from_radius_mm, ring.to_radius_mm] for ring in movement.keep_out],
        "wheel": _wheel(movement),
        "tracks": _tracks(movement),
        "pattern": _pattern(pattern_of(movement, cutter), movement),
    }


def _wheel(movement: Movement) -> dict[str, float]:
    """How a star wheel looks from above: how thick, and how far it reaches along the travel."""
    wheel = movement.star_wheel
    reach_mm = wheel.tip_radius_mm if isinstance(wheel, StarWheel) else movement.arcs_mm(0)[0]
    return {"thickness_mm": wheel.thickness_mm, "reach_mm": reach_mm}


def _tracks(movement: Movement) -> list[dict[str, Any]]:
    turning = turning_of(movement)
    told = []
    for place, track in enumerate(movement.tracks):
        teeth = [tooth for tooth in movement.teeth if tooth.track == track.track]
        told.append(
            {
                "radius_mm": track.radius_mm,
                "release_deg": round(math.degrees(turning.release_rad[place]), 4),
                "engagement_mm": round(float(turning.engagement_arc_mm[place]), 3),
                "pitch": teeth[0].pitch if teeth else None,
                "key": key_of(teeth[0].pitch) if teeth else None,
                "teeth": [
                    {"tooth": tooth.tooth, "cents": tooth.cents, "damped": tooth.damped}
                    for tooth in teeth
                    if tooth.usable
                ],
            }
        )
    return told


def _pattern(pattern: Pattern, movement: Movement) -> dict[str, Any]:
    opening = pattern.opening
    fold = pattern.fold_line_mm
    return {
        "points_mm": [[round(u, FINE_MM), round(v, FINE_MM)] for u, v in opening.points_mm.tolist()],
        "bulges": [round(bulge, 6) for bulge in opening.bulges.tolist()],
        "square_at_mm": pattern.strike_u_mm,
        "width_mm": movement.projection.width_mm,
        "fold_mm": None if fold is None else [[round(u, FINE_MM), round(v, FINE_MM)] for u, v in fold.tolist()],
        "making": pattern.making,
    }


def _fewer(rows: Iterable[Record], names: tuple[str, ...]) -> list[dict[str, Any]]:
    return [{name: _rounded(name, row[name]) for name in names if name in row} for row in rows]


def _finding(finding: Record) -> dict[str, Any]:
    told = {name: finding[name] for name in OF_A_FINDING}
    at: Mapping[str, Any] = told["at"]
    return {**told, "at": {name: _rounded(name, value) for name, value in at.items()}}


def _rounded(name: str, value: Any) -> Any:
    return round(value, DECIMALS[name]) if name in DECIMALS and value is not None else value
