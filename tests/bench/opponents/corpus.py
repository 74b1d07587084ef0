"""The pieces and movements that the timings run on, and how they are set up."""

import json
from functools import cache
from typing import Any

from layout.documents import Movement, Settings, read_movement, read_settings, shipped_cutter, shipped_movement
from layout.read import Score, read_score
from tests.outside.pieces import public_domain_piece

MOVEMENT_IDS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
CUTTER = shipped_cutter("fibre-laser")
FIT = {"mode": "fit", "least": 0.25, "most": 8}  # the whole piece on the disc, however fast


@cache
def score_of(name: str) -> Score:
    return read_score(public_domain_piece(name), sequence=1)


def movement_with(movement_id: str, changes: dict[str, Any]) -> Movement:
    """A shipped movement with top-level fields changed, or merged where both are objects."""
    document = shipped_movement(movement_id).model_dump(mode="json")
    for name, value in changes.items():
        document[name] = {**document[name], **value} if isinstance(value, dict) else value
    return read_movement(json.dumps(document))


def settings_with(**changes: Any) -> Settings:
    """Fitting speed, and what is stated."""
    return read_settings(json.dumps({"speed": FIT, **changes}))
