"""What an order names beside its tune: a quote whose price holds, a hook that is told."""

import hashlib
from datetime import datetime

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.asked import AskedOrder
from service.orders.faults import InputRefusedError
from service.orders.planned import OrderInputs
from service.store.tables import Hook, Quote


def check_quote(session: Session, asker: Asker, asked: AskedOrder, inputs: OrderInputs, now: datetime) -> None:
    """See that the quote an order names holds for it.

    Raises:
        InputRefusedError: There is none of that id, it is for something else, or its time is over.
    """
    if asked.quote_id is None:
        return
    quote = quote_row(session, asker, asked.quote_id)
    if quote is None:
        raise InputRefusedError("/quote", f"there is no quote {asked.quote_id[:64]!r}")
    if (quote.inputs_digest, quote.quantity) != (inputs_digest(inputs), asked.quantity):
        raise InputRefusedError("/quote", "the quote is for another tune, movement, cutter, settings or quantity")
    if quote.valid_until < now:
        raise InputRefusedError("/quote", f"the quote held until {quote.valid_until:%Y-%m-%d}; ask for a new one")


def inputs_digest(inputs: OrderInputs) -> str:
    """Names what is priced: the digests of tune, movement, cutter and settings."""
    parts = (inputs.tune, inputs.movement, inputs.cutter, inputs.settings)
    return hashlib.sha256("".join(hashlib.sha256(part).hexdigest() for part in parts).encode()).hexdigest()


def check_hook(session: Session, asker: Asker, hook_id: str | None) -> None:
    """See that the hook an order names is the owner's own and in force.

    Raises:
        InputRefusedError: It is not.
    """
    if hook_id is None:
        return
    hook = session.get(Hook, hook_id)
    if hook is None or hook.owner_id != asker.owner_id or hook.deleted_at is not None or hook.is_test != asker.is_test:
        raise InputRefusedError("/hook", f"there is no hook {hook_id[:64]!r}; POST /v1/hooks makes one")


def quote_row(session: Session, asker: Asker, quote_id: str) -> Quote | None:
    """The row of a quote that exists for an asker; None where there is none."""
    rows = select(Quote).where(Quote.id == quote_id)
    if not asker.sees_all_owners:
        rows = rows.where(Quote.owner_id == asker.owner_id)
    return session.scalars(rows).one_or_none()
