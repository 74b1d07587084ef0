"""What a run itself tells of its tunes and its sender: it goes with the orders, or with the tunes of others."""

from datetime import datetime

from sqlalchemy import exists, select
from sqlalchemy.orm import Session

from service.orders.kept_answers import empty_answers
from service.store.tables import Order, Run, RunItem

NAME_SHOWN = 60  # characters of a tune's name in the reason of a refusal


def forget_run(session: Session, run_id: str) -> None:
    """Take from a run what its sender said, once it is open and every order of it was deleted; else leave it.

    Args:
        session: Of the transaction that deletes an order or ends the opening.
        run_id: Of the run.
    """
    run = session.get(Run, run_id)
    of_run = Order.run_id == run_id
    has_orders, has_left = session.execute(
        select(exists().where(of_run), exists().where(of_run, Order.erased_at.is_(None)))
    ).one()
    if run is None or run.opened_at is None or not has_orders or has_left:
        return
    run.reference = None
    run.asked = {**run.asked, "settings": "{}"}
    for item in session.scalars(select(RunItem).where(RunItem.run_id == run_id, RunItem.refused.is_not(None))):
        _forget_name(item)
        item.reference = None
    empty_answers(session, run_id)
    session.flush()


def forget_refused(session: Session, before: datetime) -> int:
    """Take the names of tunes from pairs that were refused, of runs opened before a moment; gives how many."""
    named = (RunItem.refused.is_not(None), RunItem.tune_name != "")
    runs = select(Run.id).where(Run.opened_at <= before)
    items = session.scalars(select(RunItem).where(*named, RunItem.run_id.in_(runs))).all()
    for item in items:
        _forget_name(item)
    return len(items)


def _forget_name(item: RunItem) -> None:
    if item.refused is not None and item.tune_name:
        item.refused = item.refused.replace(repr(item.tune_name[:NAME_SHOWN]), "the tune")
    item.tune_name = ""
