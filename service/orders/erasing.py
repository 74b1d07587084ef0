"""Deleting what others sent: a finished order becomes a tombstone without personal data.

What stays is that there was an order, when, for which movement, and how it ended. Each deletion is also noted beside
the files, for a backup of the database does not know what was deleted after it: a restore deletes it again.
"""

from collections.abc import Iterable
from datetime import datetime

from sqlalchemy import delete, exists, select, update
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.changing import change
from service.orders.events import add_event
from service.orders.faults import ChangedMeanwhileError, OrderFault, StateForbidsError
from service.orders.finding import find_order, order_row
from service.orders.kept_answers import empty_answers
from service.orders.run_archives import trim_archive
from service.orders.run_forgetting import forget_run
from service.orders.states import FINISHED, EventType, State
from service.orders.views import OrderView, order_view
from service.store.files import FileStore
from service.store.holds import let_go
from service.store.store import Store
from service.store.tables import Delivery, Erasure, Event, Order, Plan, PlanFile, Quote, RunItem


def erase_order(store: Store, files: FileStore, asker: Asker, order_id: str) -> OrderView:
    """Delete what an order holds; one that is deleted already stays as it is.

    It is noted first and then deleted, so that whatever happens in between, no deletion is without its note. The
    archive of its run, where that is still being opened, loses its tune too.

    Args:
        store: The database.
        files: Gets the note. The order's own files are swept away once nobody holds them.
        asker: Who asks.
        order_id: Which order.

    Raises:
        OrderUnknownError: There is none for the asker.
        StateForbidsError: Something is still to come of it; cancel it first.
        ChangedMeanwhileError: It was changed at the same moment.
        StoreError: It could not be done.
    """
    with store.reading() as session:
        seen = find_order(session, asker, order_id)
    _check_finished(seen.state)
    if seen.erased_at is None:
        seen = _erased(store, files, asker, order_id)
    if seen.run_id is not None:
        trim_archive(store, files, seen.run_id)  # also where it is asked again, for the first time may have ended here
    return seen


def _erased(store: Store, files: FileStore, asker: Asker, order_id: str) -> OrderView:
    files.note(order_id)
    try:
        with store.writing() as session:
            order = order_row(session, asker, order_id, to_decide=True)
            _check_finished(order.state)
            if order.erased_at is None:
                _erase(session, order, State(order.state), store.now(session))
            return order_view(session, order)
    except OrderFault:
        files.forget_note(order_id)  # nothing was deleted, and a restore must not do so
        raise


def erase_again(store: Store, noted: Iterable[str]) -> int:
    """Delete in a restored database what was deleted since its backup; what was not finished then is cancelled.

    Args:
        store: The database.
        noted: The ids of the orders that were deleted.

    Returns:
        How many were deleted again.
    """
    count = 0
    for order_id in noted:
        with store.writing() as session:
            order = session.get(Order, order_id)
            if order is not None and order.erased_at is None:
                state = State(order.state)
                _erase(session, order, state if state in FINISHED else State.CANCELLED, store.now(session))
                count += 1
    return count


def _check_finished(state: str) -> None:
    if State(state) not in FINISHED:
        raise StateForbidsError(f"the order is {state}; cancel it, then delete it")


def _erase(session: Session, order: Order, to: State, now: datetime) -> None:
    quote_id = order.quote_id
    cleared = dict.fromkeys(("reference", "tune_name", "reason", "despite_findings", "despite_by", "quote_id"))
    held = {"taken_by": None, "lease_until": None}
    kept = {"tune_digest": "", "settings_digest": "", "finished_at": order.finished_at or now, "erased_at": now}
    if not change(session, order, to, at=now, columns={**cleared, **held, **kept}):
        raise ChangedMeanwhileError("the order was changed at the same moment; read it again")
    let_go(session, holder_id=order.id)
    session.execute(delete(PlanFile).where(PlanFile.order_id == order.id))
    told_nothing = {"told": {"title": "", "discs": []}, "inputs": {}, "released_by": None, "release_reason": None}
    session.execute(update(Plan).where(Plan.order_id == order.id).values(told_nothing))
    session.execute(update(Event).where(Event.order_id == order.id).values(by=None, data={}))
    of_order = select(Event.seq).where(Event.order_id == order.id)
    session.execute(delete(Delivery).where(Delivery.event_seq.in_(of_order)))
    session.execute(update(RunItem).where(RunItem.order_id == order.id).values(tune_name="", reference=None))
    if order.run_id is not None:
        forget_run(session, order.run_id)
    named = exists().where(Order.quote_id == Quote.id)
    session.execute(delete(Quote).where(Quote.id == quote_id, ~named))
    if quote_id is not None and session.get(Quote, quote_id) is None:
        empty_answers(session, quote_id)
    empty_answers(session, order.id)
    session.add(Erasure(order_id=order.id, at=now))
    session.flush()
    add_event(session, order, EventType.ERASED, at=now, data={})
