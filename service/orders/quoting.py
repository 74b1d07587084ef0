"""Quotes: an order's input planned for its price alone, from the cutter's stated rates."""

import json
from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime, timedelta
from decimal import Decimal
from typing import Any

from sqlalchemy import delete, exists
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.asked import AskedOrder, read_order
from service.orders.faults import NotPricedError, OrderUnknownError
from service.orders.quotes import inputs_digest, quote_row
from service.planner import AnyPlanner
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import Order, Quote


@dataclass(frozen=True, slots=True, kw_only=True)
class QuoteView:
    """A price, and what it stands on.

    Attributes:
        id: Its id.
        quantity: Copies of each disc.
        total: A decimal number as text: for all copies of all discs.
        currency: By ISO 4217.
        told: The lines for each disc, and what was not stated.
        created_at: When.
        valid_until: Till when it holds.
    """

    id: str
    quantity: int
    total: str
    currency: str
    told: dict[str, Any]
    created_at: datetime
    valid_until: datetime


AlsoQuote = Callable[[Session, QuoteView], None]  # what is written in the same transaction, such as the answer


def quote_order(
    store: Store, planner: AnyPlanner, asker: Asker, asked: AskedOrder, also: AlsoQuote, *, days: int
) -> QuoteView:
    """Work out the price of an order and keep it; of the tune itself nothing is kept but a digest.

    Setting up is counted once for each disc of a set, everything else for each copy.

    Args:
        store: The database.
        planner: The computation.
        asker: Who asks.
        asked: What would be ordered.
        also: What is written in the same transaction.
        days: How long the price holds.

    Raises:
        InputRefusedError, MidiReadError, DocumentError: As `read_order`.
        NotPricedError: The cutter states no rates, or a stated rate has no quantity.
    """
    read = read_order(store, asker, asked)
    layouts = planner.lay_out_discs(asked.tune, read.movement, read.cutter, read.settings)
    makings = [json.loads(planner.files_of(laid_out, not_good="priced")["making.json"]) for laid_out in layouts]
    discs = [
        {"good_to_cut": laid_out.good_to_cut, **_disc_told(laid_out.disc_number, making, asked.quantity)}
        for laid_out, making in zip(layouts, makings, strict=True)
    ]
    total = sum((Decimal(disc["amount"]) for disc in discs), Decimal(0))
    with store.writing() as session:
        now = store.now(session)
        quote = Quote(
            id=new_id("quote", now),
            owner_id=asker.owner_id,
            key_id=asker.key_id,
            inputs_digest=inputs_digest(read.inputs),
            quantity=asked.quantity,
            total=f"{total:f}",
            currency=makings[0]["currency"],
            told={"discs": discs},
            created_at=now,
            valid_until=now + timedelta(days=days),
        )
        session.add(quote)
        session.flush()
        view = _view(quote)
        also(session, view)
        return view


def find_quote(store: Store, asker: Asker, quote_id: str) -> QuoteView:
    """A quote of the asker's owner, or any where the shop asks.

    Raises:
        OrderUnknownError: There is none for the asker.
    """
    with store.reading() as session:
        quote = quote_row(session, asker, quote_id)
        if quote is None:
            raise OrderUnknownError(f"there is no quote {quote_id[:64]!r}")
        return _view(quote)


def _disc_told(number: int, making: dict[str, Any], quantity: int) -> dict[str, Any]:
    if making["total"] is None:
        missing = ", ".join(making["not_stated"]) or "cutter.rates"
        raise NotPricedError(f"no price can be told: not stated are {missing}")
    lines = making["price_lines"]
    once = sum((Decimal(line["amount"]) for line in lines if line["per"] == "disc"), Decimal(0))
    each = Decimal(making["total"]) - once
    return {
        "number": number,
        "lines": lines,
        "once": f"{once:f}",
        "each": f"{each:f}",
        "amount": f"{once + each * quantity:f}",
        "not_counted": making["not_counted"],
    }


def forget_quotes(store: Store, *, days: int) -> int:
    """Remove quotes that no order names and whose price has not held for some days; gives how many."""
    named = exists().where(Order.quote_id == Quote.id)
    with store.writing() as session:
        ended = Quote.valid_until <= store.now(session) - timedelta(days=days)
        return len(session.scalars(delete(Quote).where(ended, ~named).returning(Quote.id)).all())


def _view(quote: Quote) -> QuoteView:
    return QuoteView(**{name: getattr(quote, name) for name in QuoteView.__dataclass_fields__})
