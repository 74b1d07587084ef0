"""Digests of every file of the demo tune on a movement with all there is: in this process, or printed by one's own."""

import hashlib
import json
import sys

from layout.documents import Settings, shipped_cutter, shipped_movement
from layout.walk import files_of, lay_out
from service.demo.compose import demo_tune

# Offset row, measured arcs, doubled pitches, a stated drive: more is reckoned for it than for the others.
MOVEMENT_ID = "mossbrook-67"
CUTTER_IDS = ("fibre-laser", "turn-press")


def sums_of_files() -> dict[str, str]:
    """SHA-256 of each file by cutter and name, the whole walk from the tune's bytes."""
    return {
        f"{cutter_id}: {name}": hashlib.sha256(content).hexdigest()
        for cutter_id in CUTTER_IDS
        for name, content in files_of(
            lay_out(demo_tune(), shipped_movement(MOVEMENT_ID), shipped_cutter(cutter_id), Settings()),
            not_good="compared only",
        ).items()
    }


if __name__ == "__main__":
    sys.stdout.write(json.dumps(sums_of_files()))
