"""What a workshop does beside its discs: a trial piece before the first, and many discs on one sheet."""

import json
import zipfile
from collections.abc import Callable, Sequence
from io import BytesIO
from typing import Any

from service.demo.asking import Upload, fetch

ZIP = "application/zip"
DISCS_OF_EACH = 4
# What the demo's workshop has in its rack: an offcut that is used first, then sheets as they are bought.
STOCK = [
    {
        "id": "offcut",
        "lot": "rack 3",
        "outline_mm": [[0, 0], [620, 0], [620, 260], [300, 260], [300, 520], [0, 520]],
        "margin_mm": 8,
    },
    {
        "id": "sheet",
        "lot": "delivery 12",
        "quantity": 4,
        "width_mm": 1000,
        "height_mm": 1000,
        "clamps": [{"x_mm": 0, "y_mm": 440, "width_mm": 60, "height_mm": 120}],
    },
]


def post_trial_piece(address: str, movement_id: str, say: Callable[[str], None]) -> dict[str, bytes]:
    """The files of a trial piece for a movement, by name.

    Raises:
        DemoFailedError: The service refuses it.
    """
    say(f"trial piece for {movement_id}: to cut and measure before a blank is spent")
    # Nothing is posted but the question itself: both documents are named in the address.
    upload = Upload(body=b"", media_type="application/json", accept=ZIP)
    return _unpacked(fetch(f"{address}/v1/trial-pieces?movement={movement_id}", upload))


def post_sheets(address: str, movements: Sequence[dict[str, Any]], say: Callable[[str], None]) -> dict[str, bytes]:
    """The files of a sheet job with some discs of every movement, by name.

    Raises:
        DemoFailedError: The service refuses it.
    """
    job = {
        "format": "discwright-sheets/1",
        "title": "A week of discs",
        "gap_mm": 3,
        "margin_mm": 5,
        "stock": STOCK,
        "discs": [
            {"id": one["id"], "diameter_mm": one["disc"]["outer_diameter_mm"], "quantity": DISCS_OF_EACH}
            for one in movements
        ],
    }
    say(f"sheets: {DISCS_OF_EACH} discs for each of {len(movements)} movements, the offcut first")
    upload = Upload(body=json.dumps(job).encode(), media_type="application/json", accept=ZIP)
    return _unpacked(fetch(f"{address}/v1/sheets", upload))


def _unpacked(archive: bytes) -> dict[str, bytes]:
    with zipfile.ZipFile(BytesIO(archive)) as packed:
        return {name: packed.read(name) for name in packed.namelist()}
