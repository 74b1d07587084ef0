"""Every number of the shipped documents, set in turn to the edge of what a double can be.

What an extreme number breaks is a sum, and the eight most crowded seconds of the tune go through every sum there is:
chords, bass, repeats too fast for a wheel, every stage and every file. The second movement with lances is
tried in what the first does not state. TESTS=thorough in the environment lays the whole tune out instead, and tries
every number of each.
"""

import json
from collections.abc import Iterator
from typing import Any

import pytest

from layout import walk
from layout.documents import Cutter, Movement, read_cutter, read_movement, read_settings
from layout.errors import DocumentError
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, PRESS, SHIPPED
from tests.thorough import THOROUGH

EXTREMES = (1e300, -1e300, 1e-300, 1e12, 0)
ASKED = read_settings("{}" if THOROUGH else '{"passage": {"from_s": 34, "to_s": 42}}')
LONGEST_LISTS = 2  # of a list's items the first two stand for all


def numbers_in(value: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """The path of every number of a document; of a list's items only the first two."""
    if isinstance(value, dict):
        for key, item in value.items():
            yield from numbers_in(item, (*path, key))
    elif isinstance(value, list):
        for place, item in enumerate(value[:LONGEST_LISTS]):
            yield from numbers_in(item, (*path, place))
    elif isinstance(value, int | float) and not isinstance(value, bool):
        yield path


def numbers_of(document: Movement | Cutter) -> list[tuple[Any, ...]]:
    """The paths of what a document states."""
    return list(numbers_in(document.model_dump(mode="json", exclude_none=True)))


def changed(document: Any, path: tuple[Any, ...], value: float) -> str:
    copy = json.loads(json.dumps(document))
    spot = copy
    for step in path[:-1]:
        spot = spot[step]
    spot[path[-1]] = value
    return json.dumps(copy)


FIRST = {"movement": set(numbers_of(SHIPPED[0])), "cutter": set(numbers_of(LASER))}
CASES = [
    (movement, cutter, of, path)
    for movement, cutter in ((SHIPPED[0], LASER), (SHIPPED[2], PRESS), (SHIPPED[1], LASER))
    for of, document in (("movement", movement), ("cutter", cutter))
    for path in numbers_of(document)
    if THOROUGH or movement is not SHIPPED[1] or path not in FIRST[of]
]


@pytest.mark.parametrize(
    ("movement", "cutter", "of", "path"), CASES, ids=lambda value: getattr(value, "id", str(value))
)
def test_an_extreme_number_is_refused_or_laid_out(movement: Any, cutter: Any, of: str, path: tuple[Any, ...]) -> None:
    for extreme in EXTREMES:
        texts = {
            "movement": json.dumps(movement.model_dump(mode="json", exclude_none=True)),
            "cutter": json.dumps(cutter.model_dump(mode="json", exclude_none=True)),
        }
        texts[of] = changed(json.loads(texts[of]), path, extreme)
        try:
            documents = read_movement(texts["movement"]), read_cutter(texts["cutter"])
        except DocumentError:
            continue
        files = walk.files_of(walk.lay_out(demo_tune(), *documents, ASKED), not_good="a test")
        assert "NaN" not in files["layout.json"].decode()
