"""/v1/quotes: what an order would cost, from the rates that the cutter states; an order may name its quote."""

from typing import Any

from flask import Blueprint, Request, Response, request

from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import json_bytes, json_response
from service.api.asking import needs
from service.api.computing_queue import computing_queue
from service.api.describing import describes
from service.api.once import once
from service.api.operations import quotes
from service.api.order_forms import asked_order, brought_by, order_body, refused
from service.media_types import JSON_MEDIA_TYPE
from service.moments import moment_text
from service.orders.kept_answers import Given
from service.orders.quoting import AlsoQuote, QuoteView, find_quote, quote_order
from service.parts import Parts
from service.planner import AnyPlanner


def quote_routes(planner: AnyPlanner, parts: Parts) -> Blueprint:
    """The routes of quotes.

    Args:
        planner: The computation, in turn; a quote is worked out while it is asked for.
        parts: What quotes are kept in.
    """
    routes = Blueprint("quotes", __name__, url_prefix="/v1/quotes")

    @routes.post("")
    @describes(quotes.MAKE)
    @needs(Scope.ORDER)
    def quote(asker: Asker) -> Response:
        return _quoted(planner, parts, asker, request)

    @routes.get("/<quote_id>")
    @describes(quotes.TELL)
    @needs(Scope.READ)
    def tell(asker: Asker, quote_id: str) -> Response:
        return json_response(quote_told(find_quote(parts.store, asker, quote_id)))

    return routes


def quote_told(quote: QuoteView) -> dict[str, Any]:
    """A quote as plain values."""
    return {
        "id": quote.id,
        "quantity": quote.quantity,
        "price": {"amount": quote.total, "currency": quote.currency},
        "discs": quote.told["discs"],
        "created_at": moment_text(quote.created_at),
        "valid_until": moment_text(quote.valid_until),
        "links": {"self": _address(quote), "orders": "/v1/orders"},
    }


def _quoted(planner: AnyPlanner, parts: Parts, asker: Asker, asked: Request) -> Response:
    brought = brought_by(asked, parts.settings.limits)
    body = order_body(asked, brought)
    for name in ("repeat_of", "quote"):
        if getattr(body, name) is not None:
            raise refused(f"/{name}", f"a quote is for a tune sent along; leave {name} out")
    order = asked_order(body, brought)
    days = parts.settings.work.quote_days

    def work(also: AlsoQuote) -> QuoteView:
        with computing_queue().place():
            return quote_order(parts.store, planner, asker, order, also, days=days)

    return once(parts, asked, asker, brought, work, _given)


def _given(quote: QuoteView) -> Given:
    headers = {
        "Content-Type": JSON_MEDIA_TYPE,
        "Cache-Control": "no-cache",
        "Location": _address(quote),
        "Content-Location": _address(quote),
    }
    return Given(status=201, headers=headers, body=json_bytes(quote_told(quote)))


def _address(quote: QuoteView) -> str:
    return f"/v1/quotes/{quote.id}"
