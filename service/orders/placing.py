"""Placing an order: what was sent is read and kept, and the order and its first event are one transaction."""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime

from sqlalchemy.orm import Session

from layout.documents import Cutter, Movement, Settings, read_cutter, read_movement, read_settings
from layout.read import read_score
from service.access.asker import Asker
from service.orders.events import add_event
from service.orders.faults import InputRefusedError
from service.orders.planned import OrderInputs
from service.orders.states import EventType, State
from service.orders.views import OrderView, order_view
from service.store.documents import KeptDocument, document_in_force
from service.store.holds import FileKeeper, Hold, hold
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import Order

Also = Callable[[Session, OrderView], None]  # what is written in the same transaction, such as the answer


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
    read_score(asked.tune, sequence=settings.sequence)
    return ReadOrder(
        inputs=OrderInputs(tune=asked.tune, movement=movement.text, cutter=cutter.text, settings=asked.settings),
        movement=read_movement(movement.text),
        cutter=read_cutter(cutter.text),
        settings=settings,
        movement_revision=movement.revision,
        cutter_revision=cutter.revision,
    )


def place_order(store: Store, keeper: FileKeeper, asker: Asker, asked: AskedOrder, also: Also) -> OrderView:
    """Place an order; it waits for a worker then. Send its id to the queue afterwards.

    Args:
        store: The database.
        keeper: Keeps what was sent.
        asker: Whose order it is.
        asked: What is ordered.
        also: What is written in the same transaction.

    Raises:
        InputRefusedError, MidiReadError, DocumentError: As `read_order`.
        StoreError: It could not be kept; nothing was ordered.
    """
    read = read_order(store, asker, asked)
    inputs = read.inputs
    digests = keeper.keep([inputs.tune, inputs.movement, inputs.cutter, inputs.settings])
    made: list[str] = []

    def placing(session: Session) -> OrderView:
        now = store.now(session)
        made[:] = made or [new_id("order", now)]
        order = session.get(Order, made[0])
        if order is not None:  # the connection was lost after the commit
            return order_view(session, order)
        order = _row(made[0], asker, asked, read, now)
        order.tune_digest, order.movement_digest, order.cutter_digest, order.settings_digest = digests
        session.add(order)
        session.flush()
        for digest, what in zip(digests, ("tune", "document", "document", "document"), strict=True):
            hold(session, Hold(digest=digest, owner_id=asker.owner_id, holder_id=order.id, what=what))
        data = {"reference": asked.reference, "movement": {"id": read.movement.id, "revision": read.movement_revision}}
        add_event(session, order, EventType.RECEIVED, at=now, by=asker.title, data=data)
        view = order_view(session, order)
        also(session, view)
        return view

    return store.again(placing)


def nothing_more(_session: Session, _order: OrderView) -> None:
    """For `also`, where there is nothing."""


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


def _row(order_id: str, asker: Asker, asked: AskedOrder, read: ReadOrder, now: datetime) -> Order:
    return Order(
        id=order_id,
        owner_id=asker.owner_id,
        key_id=asker.key_id,
        is_test=asker.is_test,
        state=State.RECEIVED.value,
        version=1,
        reference=asked.reference,
        quantity=asked.quantity,
        tune_name=asked.tune_name,
        movement_id=read.movement.id,
        movement_revision=read.movement_revision,
        cutter_id=read.cutter.id,
        most_lost_share=asked.most_lost_share,
        release_alone=asked.release_alone,
        quote_id=asked.quote_id,
        hook_id=asked.hook_id,
        run_id=asked.run_id,
        plan_revision=0,
        created_at=now,
        updated_at=now,
        attempt=0,
        killed=0,
    )
