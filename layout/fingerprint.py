"""The id of a layout, from what it is made from: known before it is laid out."""

import hashlib
import json

from layout.documents import Cutter, Movement, Settings
from layout.version import ENGINE_VERSION


def fingerprint_of(tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1) -> str:
    """Sixteen hex digits that name these inputs and this engine: the id of their layout.

    Args:
        tune: The MIDI file.
        movement: The movement.
        cutter: The cutter.
        settings: What the maker asks for.
        number: Which disc of settings.discs, from 1.
    """
    parts: dict[str, object] = {
        "engine": ENGINE_VERSION,
        "tune": hashlib.sha256(tune).hexdigest(),
        "movement": movement.model_dump(mode="json"),
        "stated": {pointer: worth.model_dump(mode="json") for pointer, worth in movement.stated.items()},
        "cutter": cutter.model_dump(mode="json"),
        "settings": settings.model_dump(mode="json"),
    }
    if settings.discs > 1:
        parts["disc_number"] = number
    return hashlib.sha256(json.dumps(parts, sort_keys=True).encode()).hexdigest()[:16]
