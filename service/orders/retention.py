"""Retention: what others sent goes when its time is over, by class; every worker sees to it, and one is enough.

Tunes go first: the order can then not be planned anew, but its drawings are there. Then the drawings go, and with
them the documents they were made by: the order can then not be repeated. Messages to hooks, answers kept for an
Idempotency-Key and quotes that no order names have times of their own. Logs are written to where the operator says,
and kept as the operator keeps them.
"""

import logging
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from sqlalchemy import ColumnElement, delete, exists, or_, select
from sqlalchemy.orm import Session

from service.hooks.deliveries import forget_deliveries
from service.orders.changing import change
from service.orders.kept_answers import forget_answers
from service.orders.quoting import forget_quotes
from service.orders.run_forgetting import forget_refused
from service.orders.states import FINISHED, State
from service.settings import RetentionSettings
from service.store.files import FileStore
from service.store.holds import let_go, sweep_files
from service.store.store import Store
from service.store.tables import FileHold, Order, PlanFile, RunItem

log = logging.getLogger(__name__)

MOST_AT_A_TIME = 100  # orders of one transaction: some tens of milliseconds
MOST_FILES = 10_000  # files swept at a time; the rest an hour later


@dataclass(frozen=True, slots=True, kw_only=True)
class Forgotten:
    """How much of each class went."""

    tunes: int
    drawings: int
    deliveries: int
    answers: int
    quotes: int
    files: int


def keep_retention(store: Store, files: FileStore, times: RetentionSettings) -> Forgotten:
    """Let go of everything whose time is over, and remove the files that nobody holds any more.

    Doing it twice, or by two workers at a time, does no harm.

    Args:
        store: The database.
        files: The store of files.
        times: How long each class is kept.

    Raises:
        StoreError: It could not be done; what was done stays done.
    """
    forgotten = Forgotten(
        tunes=forget_tunes(store, days=times.tunes_days),
        drawings=forget_drawings(store, days=times.drawings_days),
        deliveries=_forget_deliveries(store, days=times.deliveries_days),
        answers=forget_answers(store),
        quotes=forget_quotes(store, days=times.answers_days),
        files=len(sweep_files(store, files, most=MOST_FILES)) + files.sweep_parts(),
    )
    log.info("retention: %s", ", ".join(f"{getattr(forgotten, name)} {name}" for name in Forgotten.__slots__))
    return forgotten


def forget_tunes(store: Store, *, days: int) -> int:
    """Let go of the tunes of orders that were finished so many days ago, with their names; gives how many orders.

    The names of tunes that a run refused go so many days after it was opened.
    """

    def forget(session: Session, order: Order) -> None:
        let_go(session, holder_id=order.id, what="tune")
        for item in session.scalars(select(RunItem).where(RunItem.order_id == order.id)):
            item.tune_name = ""

    columns = {"tune_name": None, "tune_digest": ""}
    with store.writing() as session:
        forget_refused(session, store.now(session) - timedelta(days=days))
    return _forget(store, days, Order.tune_digest != "", forget, columns)


def forget_drawings(store: Store, *, days: int) -> int:
    """Let go of everything that was made for orders finished so many days ago; gives how many orders."""

    def forget(session: Session, order: Order) -> None:
        let_go(session, holder_id=order.id)
        session.execute(delete(PlanFile).where(PlanFile.order_id == order.id))

    has_files = or_(exists().where(PlanFile.order_id == Order.id), exists().where(FileHold.holder_id == Order.id))
    return _forget(store, days, has_files, forget, {"tune_name": None, "tune_digest": ""})


def _forget(
    store: Store,
    days: int,
    has_any: ColumnElement[bool],
    forget: Callable[[Session, Order], None],
    columns: Mapping[str, Any],
) -> int:
    count = 0
    while True:
        with store.writing() as session:
            now = store.now(session)
            orders = session.scalars(_ended(now - timedelta(days=days), has_any).limit(MOST_AT_A_TIME)).all()
            for order in orders:
                kept = {**columns, "finished_at": order.finished_at}
                if change(session, order, State(order.state), at=now, columns=kept):
                    forget(session, order)
                    count += 1
        if len(orders) < MOST_AT_A_TIME:
            return count


def _ended(before: datetime, has_any: ColumnElement[bool]) -> Any:
    """Finished orders that have something to forget, those of another worker left out."""
    over = select(Order).where(Order.finished_at <= before, Order.state.in_(sorted(FINISHED)), has_any)
    return over.order_by(Order.id).with_for_update(skip_locked=True)


def _forget_deliveries(store: Store, *, days: int) -> int:
    with store.writing() as session:
        return forget_deliveries(session, store.now(session) - timedelta(days=days))
