"""The door for movements: a document read, told again and read once more, and where it holds, a tune laid out on it."""

import json
from functools import partial

from layout import walk
from layout.documents import read_movement, read_settings, shipped_cutter, shipped_movement_ids, shipped_text
from layout.errors import DocumentError
from tests.fuzz.door import Door
from tests.fuzz.mutated_documents import mutated_document, told_again, words_of
from tests.fuzz.short_tune import SHORT_TUNE
from tests.layout.examples import PLAIN_DOCUMENT

_LASER, _PLAINLY = shipped_cutter("fibre-laser"), read_settings("{}")
_SHIPPED = tuple(shipped_text(name) for name in shipped_movement_ids())
SEEDS = (json.dumps(PLAIN_DOCUMENT).encode(), *_SHIPPED)


def answer(text: bytes) -> object:
    """The movement, and the short tune laid out on it, with every file."""
    movement = told_again(text, read_movement)
    return walk.files_of(walk.lay_out(SHORT_TUNE, movement, _LASER, _PLAINLY), not_good="a test")


DOOR = Door(
    name="movement",
    suffix=".json",
    seeds=SEEDS,
    answer=answer,
    mutate=partial(mutated_document, words=words_of(SEEDS)),
    errors=(DocumentError,),
)
