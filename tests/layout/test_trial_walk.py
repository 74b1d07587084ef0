"""The files of a trial piece: whole, and the same bytes on every run."""

import hashlib
import io
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from ezdxf.filemanagement import read

from layout.documents import Cutter, Movement
from layout.trial_walk import TRIAL_FILES, trial_files
from tests.layout.examples import LASER, PRESS, SHIPPED

TOP = Path(__file__).parents[2]
PROGRAM = """
import hashlib, json
from layout.documents import shipped_cutter, shipped_cutter_ids, shipped_movement, shipped_movement_ids
from layout.trial_walk import trial_files

print(json.dumps([
    hashlib.sha256(content).hexdigest()
    for movement in shipped_movement_ids()
    for cutter in shipped_cutter_ids()
    for content in trial_files(shipped_movement(movement), shipped_cutter(cutter)).values()
]))
"""
EVERY = [
    pytest.param(movement, cutter, id=f"{movement.id}-{cutter.id}") for movement in SHIPPED for cutter in (LASER, PRESS)
]


@pytest.mark.parametrize(("movement", "cutter"), EVERY)
def test_a_piece_has_a_sound_drawing_a_sheet_and_its_data(movement: Movement, cutter: Cutter) -> None:
    files = trial_files(movement, cutter)

    assert tuple(files) == TRIAL_FILES
    drawing = read(io.StringIO(files["trial-piece.dxf"].decode("ascii")))
    assert drawing.audit().errors == []
    assert (drawing.dxfversion, drawing.units) == ("AC1024", 4)  # DXF reference: R2010; 4 is millimetres
    assert files["trial-piece.dxf"].startswith(b"999\nTRIAL PIECE - NOT A DISC\n")
    assert files["measure.pdf"].startswith(b"%PDF-")
    assert json.loads(files["trial-piece.json"])["movement"]["id"] == movement.id


def test_another_process_with_another_hash_seed_and_time_zone_writes_the_same_bytes() -> None:
    ran = subprocess.run(
        [sys.executable, "-W", "ignore", "-c", PROGRAM],
        env=os.environ | {"PYTHONPATH": str(TOP), "PYTHONHASHSEED": "4", "TZ": "Pacific/Auckland", "LC_ALL": "C"},
        capture_output=True,
        check=True,
        text=True,
    )

    here = [
        hashlib.sha256(content).hexdigest()
        for movement in SHIPPED
        for cutter in (LASER, PRESS)
        for content in trial_files(movement, cutter).values()
    ]
    assert json.loads(ran.stdout) == here
    assert len(set(here)) == len(here)
