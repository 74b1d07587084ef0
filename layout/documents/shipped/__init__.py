"""The documents that come with the program: our own three movements and two cutters."""

from functools import cache
from importlib.resources import files

from layout.documents.cutter import Cutter, read_cutter
from layout.documents.movement import Movement, read_movement
from layout.errors import NotShippedError

_MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
_CUTTERS = ("fibre-laser", "turn-press")


def shipped_movement_ids() -> tuple[str, ...]:
    """The ids of the movements that ship, in alphabetical order."""
    return _MOVEMENTS


def shipped_cutter_ids() -> tuple[str, ...]:
    """The ids of the cutters that ship; the first is the default."""
    return _CUTTERS


@cache
def shipped_movement(movement_id: str) -> Movement:
    """The shipped movement of that id.

    Raises:
        NotShippedError: There is none; names the ids there are.
    """
    if movement_id not in _MOVEMENTS:
        raise NotShippedError(document="movement", document_id=movement_id, known_ids=_MOVEMENTS)
    return read_movement(shipped_text(movement_id))


@cache
def shipped_cutter(cutter_id: str) -> Cutter:
    """The shipped cutter of that id.

    Raises:
        NotShippedError: There is none; names the ids there are.
    """
    if cutter_id not in _CUTTERS:
        raise NotShippedError(document="cutter", document_id=cutter_id, known_ids=_CUTTERS)
    return read_cutter(shipped_text(cutter_id))


def shipped_text(document_id: str) -> bytes:
    """The text of a shipped movement or cutter as it was written, with what it says of the worth of its numbers.

    Raises:
        NotShippedError: There is none of that id; names the ids there are.
    """
    known = _MOVEMENTS + _CUTTERS
    if document_id not in known:
        raise NotShippedError(document="document", document_id=document_id, known_ids=known)
    return files(__package__).joinpath(f"{document_id}.json").read_bytes()
