"""The door for drawings: a DXF file read back, played and checked, on one of a few machines.

The first byte of an input chooses the machine, the rest is the file.
"""

import json
import random

from layout import walk
from layout.cut import plan_cuts
from layout.documents import Cutter, Movement, read_movement, shipped_cutter, shipped_movement
from layout.errors import DrawingReadError
from layout.write import write_dxf
from tests.fuzz.door import Door
from tests.fuzz.mutated_drawings import mutated_drawing
from tests.layout.examples import PLAIN_DOCUMENT, cutter_with, disc_of

_PLAIN = read_movement(json.dumps(PLAIN_DOCUMENT))
_SLOTS = shipped_movement("tarnlight-17")
# Without labels, which are never read back and would be most of the file.
_LASER, _PRESS = (cutter_with({"labels": False}, shipped_cutter(name)) for name in ("fibre-laser", "turn-press"))
_COMPENSATED = cutter_with({"kerf_compensated": True, "drawn_from": "star-side"}, _LASER)

MACHINES: tuple[tuple[Movement, Cutter], ...] = (
    (_PLAIN, _LASER),
    (_SLOTS, _LASER),
    (_SLOTS, _PRESS),
    (_PLAIN, _COMPENSATED),
)


def _drawing(movement: Movement, cutter: Cutter, *, record: bool = False) -> bytes:
    disc = disc_of(movement, [(1, 5.0), (2, 6.0), (3, 10.0)], cutter)
    plan = plan_cuts(disc, title="tune", fingerprint="0123456789abcdef", not_good=None)
    return write_dxf(plan.record if record else plan.disc, cutter)


# Without its release a file is taken for an old one, whose entities have their layers elsewhere.
_HEAD = b"  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1024\n  9\n$INSUNITS\n 70\n4\n  0\nENDSEC\n"


def _entities_alone(dxf: bytes) -> bytes:
    """The drawing without its tables: quicker to read, so that more is tried."""
    entities = dxf.partition(b"  2\nENTITIES\n")[2].partition(b"ENDSEC\n")[0]
    return _HEAD + b"  0\nSECTION\n  2\nENTITIES\n" + entities + b"ENDSEC\n  0\nEOF\n"


_WRITTEN = [_drawing(*machine) for machine in MACHINES]
SEEDS = tuple(
    bytes([number]) + dxf
    for number, whole in enumerate(_WRITTEN)
    for dxf in (_entities_alone(whole), whole, _entities_alone(_drawing(*MACHINES[number], record=True)))
)


def answer(data: bytes) -> walk.CheckedDrawing:
    """The drawing checked for the machine that the first byte chooses."""
    return walk.check_drawing(data[1:], *MACHINES[(data[0] if data else 0) % len(MACHINES)])


def mutate(data: bytes, dice: random.Random) -> bytes:
    """The same machine with a changed drawing, or now and then another machine."""
    machine = data[:1] if dice.random() < 0.9 else bytes([dice.randrange(len(MACHINES))])
    return machine + mutated_drawing(data[1:], dice)


DOOR = Door(name="drawing", suffix=".dxf", seeds=SEEDS, answer=answer, mutate=mutate, errors=(DrawingReadError,))
