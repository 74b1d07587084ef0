"""Random movements, cutters and tunes for hypothesis: sound documents of every sort, good and bad to cut.

Sizes are drawn about those of shops; which of them give a disc that can be cut is for the program to say.
"""

import io
import json
from typing import Any

import mido
from hypothesis import strategies as st

from layout.documents import Cutter, Movement, read_cutter, read_movement, shipped_cutter

_NAMES = ("C", "C#", "D", "D#", "E", "F", "F#", "G", "G#", "A", "A#", "B")
_WHEEL = {"points": 6, "tip_radius_mm": 3.2, "root_radius_mm": 1.5, "axis_depth_mm": 3.75}
_LOWEST, _HIGHEST = 58, 80  # MIDI keys of tunes; combs begin at 60
_GAPS = (0, 0, 20, 60, 120, 240, 480, 900)  # ticks of 1/480 of half a second


def numbers(least: float, most: float, step: float) -> st.SearchStrategy[float]:
    """Numbers as a person writes them: whole steps."""
    return st.integers(0, round((most - least) / step)).map(lambda steps: round(least + steps * step, 6))


@st.composite
def movements(draw: st.DrawFn) -> Movement:
    """A movement of 3 to 16 tracks, with projections or slots, turning either way, its row on the axis or off it."""
    is_slot = draw(st.booleans())
    count = draw(st.integers(3, 16))
    first_mm, pitch_mm = draw(numbers(24, 60, 0.5)), draw(numbers(2.0, 4.0, 0.1))
    last_mm = round(first_mm + pitch_mm * (count - 1), 6)
    document = {
        "format": "discwright-movement/1",
        "id": "drawn-by-lot",
        "title": "Drawn by lot",
        "turns": draw(st.sampled_from(["clockwise", "anticlockwise"])),
        "revolution_s": (turn_s := draw(numbers(20, 90, 1))),
        "fastest_revolution_s": round(turn_s * draw(numbers(0.8, 1, 0.05)), 6),
        "before_music_deg": draw(numbers(10, 40, 1)),
        "after_music_deg": draw(numbers(8, 30, 1)),
        "gantry_offset_mm": draw(numbers(-3, 3, 0.5)),
        "disc": {
            "outer_diameter_mm": round(2 * (last_mm + draw(numbers(1, 8, 0.5))), 6),
            "thickness_mm": 0.5,
            "material": "cold-rolled steel",
            "centre_hole_mm": draw(numbers(5, 12, 0.5)),
            "flatness_mm": draw(numbers(0.02, 0.12, 0.02)),
            "run_out_mm": draw(numbers(0, 0.08, 0.02)),
            "features": draw(_features()),
        },
        "keep_out": draw(st.sampled_from([[], [{"from_radius_mm": 0, "to_radius_mm": 14, "why": "clamped"}]])),
        "damper_arc_mm": draw(numbers(0.5, 2, 0.1)),
        "damper_recovery_s": draw(numbers(0.05, 0.3, 0.05)),
        "tracks": {"first_radius_mm": first_mm, "last_radius_mm": last_mm, "count": count},
        "teeth": draw(_teeth(count)),
        **draw(_slot() if is_slot else _standing()),
    }
    return read_movement(json.dumps(document))


@st.composite
def _standing(draw: st.DrawFn) -> dict[str, Any]:
    thickness_mm = draw(numbers(0.4, 0.7, 0.1))
    computed = {**_WHEEL, "thickness_mm": thickness_mm, "release_angle_deg": draw(numbers(0, 20, 2))}
    measured = {
        "engagement_arc_mm": draw(numbers(2.5, 4, 0.1)),
        "release_arc_mm": draw(numbers(-0.5, 1.5, 0.1)),
        "thickness_mm": thickness_mm,
    }
    return {
        "star_wheel": draw(st.sampled_from([computed, measured])),
        "projection": {"kind": "standing", "width_mm": 1.2, "depth_mm": 1.41, "depth_plus_minus_mm": 0.05},
    }


@st.composite
def _slot(draw: st.DrawFn) -> dict[str, Any]:
    return {
        "star_wheel": {
            "engagement_arc_mm": draw(numbers(2.5, 4, 0.1)),
            "release_arc_mm": draw(numbers(-0.5, 1.5, 0.1)),
            "thickness_mm": draw(numbers(0.3, 0.6, 0.1)),
        },
        "projection": {"kind": "slot", "width_mm": 1.3, "length_mm": 2.2},
    }


@st.composite
def _features(draw: st.DrawFn) -> list[dict[str, Any]]:
    if draw(st.booleans()):
        return []
    size_mm = draw(st.sampled_from([3, 5]))
    return [
        {
            "purpose": "drive",
            "shape": "hole",
            "radius_mm": draw(numbers(12, 20, 1)),
            "first_at_deg": draw(numbers(0, 90, 15)),
            "count": draw(st.integers(1, 3)),
            "width_mm": size_mm,
            "length_mm": size_mm,
        }
    ]


@st.composite
def _teeth(draw: st.DrawFn, count: int) -> list[dict[str, Any]]:
    """A tooth for each track, pitches rising, some of them on several teeth."""
    steps = draw(st.lists(st.sampled_from([0, 0, 1, 2, 2, 3]), min_size=count, max_size=count))
    keys = [60 + sum(steps[: place + 1]) for place in range(count)]
    return [
        {"tooth": place + 1, "track": place + 1, "pitch": f"{_NAMES[key % 12]}{key // 12 - 1}"}
        for place, key in enumerate(keys)
    ]


@st.composite
def cutters(draw: st.DrawFn) -> Cutter:
    """The shipped laser or press, drawn from either side, with its limits and ways of folding drawn."""
    document = shipped_cutter(draw(st.sampled_from(["fibre-laser", "turn-press"]))).model_dump(mode="json")
    document["drawn_from"] = draw(st.sampled_from(["label-side", "star-side"]))
    document["min_web_mm"] = draw(numbers(0.3, 1.2, 0.1))
    if document["kind"] == "laser":
        document["fold"]["fold_side"] = draw(st.sampled_from(["behind", "ahead"]))
        document["kerf_compensated"] = draw(st.booleans())
        if draw(st.booleans()):
            document["fold"] |= {"slit": "centre-line", "slit_width_mm": None}
    return read_cutter(json.dumps(document))


@st.composite
def tunes(draw: st.DrawFn) -> bytes:
    """One to ninety notes by a die: chords, repeats, runs and rests, within a comb's compass and about it."""
    count, dice = draw(st.integers(1, 90)), draw(st.randoms(use_true_random=False))
    track = mido.MidiTrack()
    for _ in range(count):
        gap, key = dice.choice(_GAPS), dice.randint(_LOWEST, _HIGHEST)
        track.append(mido.Message("note_on", note=key, velocity=dice.randint(1, 127), time=gap))
        track.append(mido.Message("note_off", note=key, velocity=0, time=30))
    written = io.BytesIO()
    mido.MidiFile(ticks_per_beat=480, tracks=[track]).save(file=written)
    return written.getvalue()
