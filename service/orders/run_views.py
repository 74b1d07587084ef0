"""Runs as they are shown: how far each is, and what became of its pairs."""

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import Select, func, select, tuple_
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.faults import OrderUnknownError
from service.orders.finding import Place
from service.orders.states import State
from service.store.tables import Order, Run, RunItem

WAITS = "waits"  # of a pair that is no order yet
REFUSED = "refused"


@dataclass(frozen=True, slots=True, kw_only=True)
class RunView:
    """A run, and how far it is.

    Attributes:
        id: Its id.
        reference: The sender's own.
        order_count: How many pairs were asked for.
        counts: How many of them are in which state; "waits" before they are orders, "refused" where they cannot be.
        created_at: When it was asked for.
        is_finished: Whether no pair waits and no order is received or planning.
    """

    id: str
    reference: str | None
    order_count: int
    counts: Mapping[str, int]
    created_at: datetime
    is_finished: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class ItemView:
    """A pair of a run, and what became of it."""

    number: int
    tune: str
    movement_id: str
    order_id: str | None
    state: str
    reason: str | None


def find_run(session: Session, asker: Asker, run_id: str) -> RunView:
    """A run that exists for an asker.

    Raises:
        OrderUnknownError: There is none, or it is another's.
    """
    return run_view(session, _row(session, asker, run_id))


def items_of(session: Session, asker: Asker, run_id: str, *, after: int, most: int) -> tuple[ItemView, ...]:
    """Pairs of a run past a number, in the order asked.

    Raises:
        OrderUnknownError: There is no such run for the asker.
    """
    run = _row(session, asker, run_id)
    rows = (
        select(RunItem, Order.state, Order.reason)
        .outerjoin(Order, Order.id == RunItem.order_id)
        .where(RunItem.run_id == run.id, RunItem.number > after)
        .order_by(RunItem.number)
        .limit(most)
    )
    return tuple(
        ItemView(
            number=item.number,
            tune=item.tune_name,
            movement_id=item.movement_id,
            order_id=item.order_id,
            state=state or (REFUSED if item.refused is not None else WAITS),
            reason=item.refused if item.refused is not None else reason,
        )
        for item, state, reason in session.execute(rows)
    )


def list_runs(
    session: Session, asker: Asker, *, after: Place | None, most: int, test: bool
) -> tuple[tuple[RunView, ...], Place | None]:
    """A page of runs, the newest first.

    Args:
        session: A transaction.
        asker: Whose runs are shown.
        after: Where the page begins; None for the first.
        most: How many at most.
        test: Whether runs of keys for tests are sought, and not the others.

    Returns:
        The runs, and where the next page begins; None where this was the last.
    """
    rows = _seen_by(asker, select(Run)).where(Run.is_test == (test or asker.is_test))
    if after is not None:
        rows = rows.where(tuple_(Run.created_at, Run.id) < (after.updated_at, after.order_id))
    found = list(session.scalars(rows.order_by(Run.created_at.desc(), Run.id.desc()).limit(most + 1)))
    page = found[:most]
    more = Place(updated_at=page[-1].created_at, order_id=page[-1].id) if len(found) > most else None
    return tuple(run_view(session, run) for run in page), more


def run_view(session: Session, run: Run) -> RunView:
    """A run as it is shown."""
    by_state = (
        select(Order.state, RunItem.refused.is_not(None), func.count())
        .select_from(RunItem)
        .outerjoin(Order, Order.id == RunItem.order_id)
        .where(RunItem.run_id == run.id)
        .group_by(Order.state, RunItem.refused.is_not(None))
    )
    counts: Counter[str] = Counter()
    for state, is_refused, count in session.execute(by_state):
        counts[state or (REFUSED if is_refused else WAITS)] += count
    return RunView(
        id=run.id,
        reference=run.reference,
        order_count=run.order_count,
        counts=dict(sorted(counts.items())),
        created_at=run.created_at,
        is_finished=not any(counts[state] for state in (WAITS, State.RECEIVED, State.PLANNING)),
    )


def _row(session: Session, asker: Asker, run_id: str) -> Run:
    run = session.scalars(_seen_by(asker, select(Run)).where(Run.id == run_id)).one_or_none()
    if run is None:
        raise OrderUnknownError(f"there is no run {run_id[:64]!r}")
    return run


def _seen_by(asker: Asker, rows: Select[Run]) -> Select[Run]:
    if asker.is_test:
        rows = rows.where(Run.is_test)
    return rows if asker.sees_all_owners else rows.where(Run.owner_id == asker.owner_id)
