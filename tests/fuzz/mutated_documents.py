"""JSON documents changed where they are documents: a value, a field, an item; and now and then as bytes."""

import json
import random
from collections.abc import Callable
from typing import Any, TypeVar

from pydantic import BaseModel

DocumentT = TypeVar("DocumentT", bound=BaseModel)

_VALUES: tuple[Any, ...] = (
    *(0, 1, -1, 2, 3, 12, 127, 128, 360, 2000, 2**31, 2**53, 2**63, 10**300),
    *(0.0, -0.0, 0.001, 0.5, 1e-15, 1e-300, 1e9, 1e300, 1.0000000001, 359.999999),
    *("", "0", "C5", "C#-1", "a", "x" * 200, "\x00", "<b>", "é", "\N{MUSICAL SYMBOL G CLEF}"),
    *(None, True, False, [], {}, [[]], [0] * 40, {"value": 1}, {"value": 2.5, "plus_minus": 0.1}),
    {"value": 1, "plus_minus": 1e9, "basis": "assumed"},
)
_RAW = ("NaN", "Infinity", "1e999", "-0", "1E400", '"\\ud800"', "1" * 401, "[" * 50 + "]" * 50, '{"a":1,"a":2}')
_MOST_COPIES = 300
_MOST_CHANGED = 1e300  # a greater number does not grow
_MOST_PLACES = 5_000  # values in a document that are copied on: past it, it only shrinks


def mutated_document(text: bytes, dice: random.Random, words: tuple[str, ...] = ()) -> bytes:
    """The document with one to four changes.

    Args:
        text: A document, or what an earlier change made of one.
        dice: Decides.
        words: Names of fields and values that documents of the kind use.
    """
    try:
        value = json.loads(text)
    except (ValueError, RecursionError):
        return _bytes_changed(text, dice)
    for _ in range(dice.choice((1, 1, 1, 2, 4))):
        value = _changed(value, dice, words)
    try:
        written = json.dumps(value).encode()
    except (ValueError, RecursionError):
        return text
    if dice.random() < 0.05:
        return _bytes_changed(written, dice)
    return written


def told_again(text: bytes, read: Callable[[bytes], DocumentT]) -> DocumentT:
    """The document as it is read, seen to be the same when it is told and read once more.

    Raises:
        DocumentError: The text is none.
    """
    document = read(text)
    told = json.dumps(document.model_dump(mode="json", exclude_none=True)).encode()
    assert read(told).model_dump(mode="json") == document.model_dump(mode="json"), "told and read again, it is another"
    return document


def words_of(texts: tuple[bytes, ...]) -> tuple[str, ...]:
    """Every name and text that documents use."""
    found: set[str] = set()

    def gather(value: Any) -> None:
        if isinstance(value, dict):
            found.update(value)
            for part in value.values():
                gather(part)
        elif isinstance(value, list):
            for part in value:
                gather(part)
        elif isinstance(value, str):
            found.add(value)

    for text in texts:
        gather(json.loads(text))
    return tuple(sorted(found))


def _places(value: Any) -> list[tuple[Any, Any]]:
    """(container, key or index) of every value inside."""
    found: list[tuple[Any, Any]] = []
    waiting = [value]
    while waiting:
        one = waiting.pop()
        keys = list(one) if isinstance(one, dict) else range(len(one)) if isinstance(one, list) else ()
        for key in keys:
            found.append((one, key))
            waiting.append(one[key])
    return found


def _changed(value: Any, dice: random.Random, words: tuple[str, ...]) -> Any:
    places = _places(value)
    if not places:
        return _any(dice)
    container, key = dice.choice(places)
    grows = len(places) < _MOST_PLACES
    match dice.randrange(9):
        case 0 | 1 | 2:
            container[key] = _another(container[key], dice, words)
        case 3:
            del container[key]
        case 4 if grows:
            other, place = dice.choice(places)
            container[key] = _copied(other[place])
        case 5 if isinstance(container, list) and grows:
            copies = min(dice.choice((1, 1, 5, _MOST_COPIES)), _MOST_PLACES // (len(_places(container[key])) + 1))
            container[key:key] = [_copied(container[key]) for _ in range(copies)]
        case 5 | 6 if isinstance(container, dict):
            container[dice.choice(words) if words else "x"] = _any(dice)
        case 7 if isinstance(container, list):
            dice.shuffle(container)
        case _:
            container[key] = dice.choice(([container[key]], {"value": container[key]}, _any(dice)))
    return value


def _another(value: Any, dice: random.Random, words: tuple[str, ...]) -> Any:
    """A number near by or far off, another word, or anything."""
    is_number = isinstance(value, int | float) and not isinstance(value, bool) and abs(value) < _MOST_CHANGED
    if is_number and dice.random() < 0.75:
        factor = dice.choice((-1, 0.1, 0.5, 0.9, 1.1, 2, 10, 1000))
        changed = dice.choice((value * factor, value + 1, value - 1))
        return int(changed) if isinstance(value, int) and dice.random() < 0.8 else changed
    if isinstance(value, str) and words and dice.random() < 0.6:
        return dice.choice(words)
    return _any(dice)


def _any(dice: random.Random) -> Any:
    return _copied(dice.choice(_VALUES))  # a copy: what is put in twice is changed once


def _copied(value: Any) -> Any:
    return json.loads(json.dumps(value))


def _bytes_changed(text: bytes, dice: random.Random) -> bytes:
    at = dice.randrange(len(text) + 1)
    match dice.randrange(4):
        case 0:
            return text[:at]
        case 1:
            return text[:at] + bytes([dice.randrange(256)]) + text[at + 1 :]
        case 2:
            return text[:at] + dice.choice(_RAW).encode() + text[at:]
        case _:
            colon = text.find(b":", at)
            return text if colon < 0 else text[: colon + 1] + dice.choice(_RAW).encode() + text[colon + 2 :]
