"""Deleting what others sent: a finished order becomes a tombstone without personal data.

What stays is that there was an order, when, for which movement, and how it ended. Each deletion is also written to
a log beside the database, for a backup does not know what was deleted after it: a restore deletes it again.
"""

import json
from collections.abc import Iterator
from pathlib import Path

from sqlalchemy import delete, select, update
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.events import add_event
from service.orders.faults import StateForbidsError
from service.orders.finding import order_row
from service.orders.states import FINISHED, EventType, State
from service.orders.views import OrderView, order_view
from service.store.holds import let_go
from service.store.store import Store
from service.store.tables import Delivery, Erasure, Event, Order, Plan, PlanFile, RunItem

LOG_NAME = "erased.jsonl"


def erase_order(store: Store, log: Path, asker: Asker, order_id: str) -> OrderView:
    """Delete what an order holds; one that is deleted already stays as it is.

    Args:
        store: The database.
        log: The folder of the log.
        asker: Who asks.
        order_id: Which order.

    Raises:
        OrderUnknownError: There is none for the asker.
        StateForbidsError: Something is still to come of it; cancel it first.
    """
    with store.writing() as session:
        order = order_row(session, asker, order_id)
        if State(order.state) not in FINISHED:
            raise StateForbidsError(f"the order is {order.state}; cancel it, then delete it")
        if order.erased_at is None:
            _erase(session, store, order)
        view = order_view(session, order)
    _note(log, order_id)
    return view


def erase_again(store: Store, log: Path) -> int:
    """Delete in a restored database what was deleted since its backup; gives how many orders."""
    count = 0
    for order_id in _noted(log):
        with store.writing() as session:
            order = session.get(Order, order_id)
            if order is not None and order.erased_at is None:
                _erase(session, store, order)
                count += 1
    return count


def _erase(session: Session, store: Store, order: Order) -> None:
    now = store.now(session)
    let_go(session, holder_id=order.id)
    session.execute(delete(PlanFile).where(PlanFile.order_id == order.id))
    session.execute(update(Plan).where(Plan.order_id == order.id).values(told={"title": "", "discs": []}, inputs={}))
    session.execute(update(Plan).where(Plan.order_id == order.id).values(released_by=None, release_reason=None))
    session.execute(update(Event).where(Event.order_id == order.id).values(by=None, data={}))
    of_order = select(Event.seq).where(Event.order_id == order.id)
    session.execute(delete(Delivery).where(Delivery.event_seq.in_(of_order)))
    session.execute(update(RunItem).where(RunItem.order_id == order.id).values(tune_name=""))
    order.reference = order.tune_name = order.reason = order.despite_findings = order.despite_by = None
    order.tune_digest = order.settings_digest = ""
    order.erased_at = order.updated_at = now
    order.version += 1
    session.add(Erasure(order_id=order.id, at=now))
    session.flush()
    add_event(session, order, EventType.ERASED, at=now, data={})


def _note(folder: Path, order_id: str) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    with (folder / LOG_NAME).open("a", encoding="utf-8") as log:
        log.write(json.dumps({"order": order_id}) + "\n")
        log.flush()


def _noted(folder: Path) -> Iterator[str]:
    path = folder / LOG_NAME
    if not path.exists():
        return
    for line in path.read_text(encoding="utf-8").splitlines():
        yield str(json.loads(line)["order"])
