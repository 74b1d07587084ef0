"""Changes of an order's state: one guarded way, so that of two changes at a time one alone is made."""

from collections.abc import Mapping
from datetime import datetime
from typing import Any

from sqlalchemy import update
from sqlalchemy.orm import Session

from service.orders.states import FINISHED, MAY_FOLLOW, State
from service.store.tables import Order


def change(session: Session, order: Order, to: State, *, at: datetime, columns: Mapping[str, Any]) -> bool:
    """Bring an order to a state, if it still is as it was read; the row in hand is read anew.

    Args:
        session: Of a transaction that writes.
        order: As it was read.
        to: The state; it may be the one the order is in.
        at: The moment of the change.
        columns: What changes beside.

    Returns:
        Whether it was changed; False where another was first.

    Raises:
        ValueError: That state cannot follow this one: a fault of the caller, who has looked.
    """
    before = State(order.state)
    if to is not before and to not in MAY_FOLLOW[before]:
        raise ValueError(f"{to} cannot follow {before}")
    values = {
        "state": to.value,
        "version": order.version + 1,
        "updated_at": at,
        "finished_at": at if to in FINISHED else None,
        **columns,
    }
    guarded = update(Order).where(Order.id == order.id, Order.version == order.version).values(values)
    if session.execute(guarded, execution_options={"synchronize_session": False}).rowcount == 0:  # type: ignore[attr-defined]
        return False
    session.refresh(order)
    return True
