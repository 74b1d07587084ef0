"""The door for settings: a document read, and where it holds, a short tune laid out by it."""

import json
from functools import partial
from typing import Any

from layout import walk
from layout.documents import read_settings, shipped_cutter
from layout.errors import DocumentError, MidiReadError
from tests.fuzz.door import Door
from tests.fuzz.mutated_documents import mutated_document, words_of
from tests.fuzz.short_tune import SHORT_TUNE
from tests.layout.examples import PLAIN

_LASER = shipped_cutter("fibre-laser")
_WRITING = {
    "pluck_again_s": 0.4,
    "ornaments": "over-doubled-teeth",
    "chords": "bass-first",
    "two_teeth_from_velocity": 90,
    "ringing_tooth_cost": 0.2,
    "ringing_bass_cost": 0.2,
}
_ASKED: tuple[dict[str, Any], ...] = (
    {},
    {
        "format": "discwright-settings/1",
        "title": "A short tune",
        "order": "A-17",
        "passage": {"from_s": 0, "to_s": 2},
        "speed": {"mode": "fit", "least": 0.5, "most": 2},
        "transpose": {"mode": "best", "range": 5},
        "octave_moves": "all",
        "largest_nudge_ms": 20,
        "channels": {"leave_out": [10], "lead": 1},
        "discs": 2,
        "time_limit_s": 1,
        "writing": _WRITING,
    },
    {
        "passage": {"from_bar": 1, "to_bar": 2},
        "speed": {"mode": "factor", "factor": 1.5},
        "transpose": {"mode": "fixed", "semitones": 0},
        "octave_moves": "outer",
        "rulings": [
            {"note": 0, "do": "leave-out"},
            {"note": 1, "do": "must-sound"},
            {"note": 2, "do": "place", "track": 3},
        ],
        "sequence": 1,
        "discs": 1,
    },
)
SEEDS = tuple(json.dumps(asked).encode() for asked in _ASKED)


def answer(text: bytes) -> object:
    """The discs laid out as the settings ask, with every file."""
    settings = read_settings(text)
    discs = walk.lay_out_discs(SHORT_TUNE, PLAIN, _LASER, settings)
    return [walk.files_of(disc, not_good="a test") for disc in discs]


DOOR = Door(
    name="settings",
    suffix=".json",
    seeds=SEEDS,
    answer=answer,
    mutate=partial(mutated_document, words=words_of(SEEDS)),
    errors=(DocumentError, MidiReadError),
)
