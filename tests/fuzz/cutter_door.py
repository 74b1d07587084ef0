"""The door for cutters: a document read, told again and read once more, and where it holds, a tune cut with it."""

from functools import partial

from layout import walk
from layout.documents import read_cutter, read_settings, shipped_cutter_ids, shipped_movement, shipped_text
from layout.errors import DocumentError
from tests.fuzz.door import Door
from tests.fuzz.mutated_documents import mutated_document, told_again, words_of
from tests.fuzz.short_tune import SHORT_TUNE
from tests.layout.examples import PLAIN

_SLOTS, _PLAINLY = shipped_movement("tarnlight-17"), read_settings("{}")
SEEDS = tuple(shipped_text(name) for name in shipped_cutter_ids())


def answer(text: bytes) -> object:
    """The cutter, and the short tune laid out for it with every file: slots for a press, projections for a laser."""
    cutter = told_again(text, read_cutter)
    movement = PLAIN if cutter.kind == "laser" else _SLOTS
    return walk.files_of(walk.lay_out(SHORT_TUNE, movement, cutter, _PLAINLY), not_good="a test")


DOOR = Door(
    name="cutter",
    suffix=".json",
    seeds=SEEDS,
    answer=answer,
    mutate=partial(mutated_document, words=words_of(SEEDS)),
    errors=(DocumentError,),
)
