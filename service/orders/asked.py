"""What is ordered, as it was asked for and as it was read."""

from dataclasses import dataclass

from sqlalchemy.orm import Session

from layout.documents import Cutter, Movement, Settings, read_cutter, read_movement, read_settings
from service.access.asker import Asker
from service.computation import check_tune
from service.orders.faults import InputRefusedError
from service.orders.planned import OrderInputs
from service.store.documents import KeptDocument, document_in_force
from service.store.store import Store


@dataclass(frozen=True, slots=True, kw_only=True)
class NamedDocument:
    """A movement or cutter that is kept, by its id; revision None means the newest."""

    id: str
    revision: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class AskedOrder:
    """What is ordered.

    Attributes:
        tune: The MIDI file.
        tune_name: What its file was called, as the sender said.
        movement: One that is kept, or the text of one.
        cutter: So.
        settings: The settings document's text.
        quantity: How many copies of each disc.
        reference: The sender's own, such as its order number.
        most_lost_share: More of the tune's weight lost than this needs a person, 0 to 1.
        release_alone: Whether it is released without a person where nothing stands.
        quote_id: The quote whose price holds.
        hook_id: A hook that is told of this order.
        run_id: The run it is part of.
    """

    tune: bytes
    tune_name: str | None = None
    movement: NamedDocument | bytes
    cutter: NamedDocument | bytes
    settings: bytes = b"{}"
    quantity: int = 1
    reference: str | None = None
    most_lost_share: float = 0.0
    release_alone: bool = False
    quote_id: str | None = None
    hook_id: str | None = None
    run_id: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class AskedRepeat:
    """A released order whose files are ordered again.

    Attributes:
        repeat_of: The order.
        quantity: How many copies of each disc.
        reference: The sender's own.
        release_alone: Whether it is released without a person.
        hook_id: A hook that is told of this order.
    """

    repeat_of: str
    quantity: int = 1
    reference: str | None = None
    release_alone: bool = False
    hook_id: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadOrder:
    """What was ordered, read: every document valid, the tune a MIDI file."""

    inputs: OrderInputs
    movement: Movement
    cutter: Cutter
    settings: Settings
    movement_revision: int
    cutter_revision: int


def read_order(store: Store, asker: Asker, asked: AskedOrder) -> ReadOrder:
    """Read what was ordered, so that what can be seen to be wrong is refused at once.

    Raises:
        InputRefusedError: A movement or cutter is named that does not exist for the asker.
        MidiReadError: The tune cannot be read.
        DocumentError: A document is not valid.
    """
    with store.reading() as session:
        movement = _document(session, asker, "movement", asked.movement)
        cutter = _document(session, asker, "cutter", asked.cutter)
    settings = read_settings(asked.settings)
    check_tune(asked.tune, settings)
    return ReadOrder(
        inputs=OrderInputs(tune=asked.tune, movement=movement.text, cutter=cutter.text, settings=asked.settings),
        movement=read_movement(movement.text),
        cutter=read_cutter(cutter.text),
        settings=settings,
        movement_revision=movement.revision,
        cutter_revision=cutter.revision,
    )


def _document(session: Session, asker: Asker, kind: str, asked: NamedDocument | bytes) -> KeptDocument:
    if isinstance(asked, bytes):
        read = read_movement(asked) if kind == "movement" else read_cutter(asked)
        number = read.revision if isinstance(read, Movement) else 1
        return KeptDocument(kind=kind, id=read.id, revision=number, text=asked, owner_id=asker.owner_id)
    found = document_in_force(session, asker.owner_id, kind, asked.id, revision=asked.revision)
    if found is None:
        of = "" if asked.revision is None else f" of revision {asked.revision}"
        raise InputRefusedError(
            f"/{kind}", f"there is no {kind} {asked.id!r}{of}; GET /v1/{kind}s lists those there are"
        )
    return found
