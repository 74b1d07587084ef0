"""The walk that ends in sound: what a layout.json tells, heard on its movement, to WAV or MIDI.

It needs no tune and no planning, so that a disc kept for years is heard as it was made.
"""

import json
from typing import Any

import numpy as np

from layout.documents import Movement
from layout.documents.pitch import key_of
from layout.hear import Asked, Performance, hear
from layout.hear.hearing import Hearing
from layout.hear.performance import Of, Turn
from layout.hear.timeline import timeline_of
from layout.mechanics.arrays import FloatArray, frozen_floats, frozen_ints
from layout.mechanics.damping import damper_touch_s
from layout.mechanics.turning import turning_of
from layout.play.plucks import Plucks
from layout.write.hearing_midi import write_hearing_midi
from layout.write.wav import Bits, Output, write_wav

__all__ = ["Asked", "Bits", "Hearing", "Of", "Output", "Turn", "hearing_of", "write_hearing_midi", "write_wav"]


def hearing_of(layout_json: bytes, movement: Movement, asked: Asked) -> Hearing:
    """A layout as it sounds.

    Args:
        layout_json: The layout, as `write_layout_json` wrote it.
        movement: The movement it was laid out for.
        asked: The disc or the tune as written, and which turn.

    Raises:
        DocumentError: A turn of a winding is asked for, and the movement states no winding.
        ValueError: The layout is of another movement, or of another revision of it: a fault of the program.
    """
    layout: dict[str, Any] = json.loads(layout_json)
    if layout["movement"] != {"id": movement.id, "revision": movement.revision}:
        raise ValueError(f"a layout for {layout['movement']} cannot be heard on {movement.id} {movement.revision}")
    return hear(performance_of(layout, movement), movement, asked)


def steady_turn_of(movement: Movement) -> FloatArray:
    """How a movement turns at its stated speed, its start included: a hearing's `turning_table`, with no disc on it.

    Args:
        movement: The movement.
    """
    none = Plucks(track_index=frozen_ints(()), sounds_s=frozen_floats(()), silent_from_s=frozen_floats(()))
    return timeline_of(movement, turning_of(movement), none, "steady").table


def performance_of(layout: dict[str, Any], movement: Movement) -> Performance:
    """What a layout plays and what it was asked to play.

    Args:
        layout: Content of layout.json.
        movement: Its movement.
    """
    turning = turning_of(movement)
    projections = layout["projections"]
    track_index = frozen_ints(projection["track"] - 1 for projection in projections)
    sounds_s = frozen_floats(projection["sounds_s"] for projection in projections)
    asked = [note for note in layout["notes"] if note["weight"] > 0]
    onset_s = np.array([note["onset_s"] for note in asked], dtype=np.float64)
    return Performance(
        title=layout["title"],
        plucks=Plucks(
            track_index=track_index,
            sounds_s=sounds_s,
            silent_from_s=frozen_floats(sounds_s - damper_touch_s(movement, turning)[track_index]),
        ),
        written_key=frozen_ints(key_of(note["pitch"]) + layout["transposed_semitones"] for note in asked),
        written_s=frozen_floats((onset_s - layout["from_s"]) / layout["speed_factor"]),
    )
