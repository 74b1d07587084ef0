"""/v1/orders: orders are placed, seen, listed and deleted here; what is decided about them, in `deciding`."""

import time
from collections.abc import Callable, Mapping
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import conditional, json_response
from service.api.asking import needs
from service.api.cursors import Cursors
from service.api.describing import describes
from service.api.hearing_shelf import HearingShelf
from service.api.models.orders import MOST_WAIT_S, OrderBody, OrdersQuery
from service.api.once import once
from service.api.operations import orders
from service.api.order_answers import order_given, order_tag, order_told
from service.api.order_forms import asked_order, brought_by, order_body, refused
from service.api.preferring import wait_asked
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.api.stopping import stopping
from service.api.waiting_room import waiting_room
from service.orders.asked import AskedRepeat
from service.orders.erasing import erase_order
from service.orders.finding import Sought, find_order, layouts_of, list_orders
from service.orders.placing import place_order
from service.orders.repeating import repeat_order
from service.orders.states import State
from service.orders.views import OrderView
from service.parts import Parts
from service.store.holds import FileKeeper

UNDECIDED = (State.RECEIVED, State.PLANNING)
LOOKS_EVERY_S = 0.25  # s; how often a waiting request looks, four cheap reads a second

Send = Callable[[str], object]  # hands an order's id to the queue


def order_routes(parts: Parts, send: Send, shelf: HearingShelf) -> Blueprint:
    """The routes of orders.

    Args:
        parts: What orders are kept in.
        send: Tells the workers of an order, after it is kept.
        shelf: Keeps sounds, which go with the order.
    """
    routes = Blueprint("orders", __name__, url_prefix="/v1/orders")
    desk = _OrderDesk(parts, send)
    cursors = Cursors(parts.secret_for("cursor"))

    @routes.post("")
    @describes(orders.PLACE)
    @needs(Scope.ORDER)
    def place(asker: Asker) -> Response:
        return desk.place(asker, request)

    @routes.get("")
    @describes(orders.LIST)
    @needs(Scope.READ)
    def list_all(asker: Asker) -> Response:
        return _page(parts, cursors, asker, request)

    @routes.get("/<order_id>")
    @describes(orders.TELL)
    @needs(Scope.READ)
    def tell(asker: Asker, order_id: str) -> Response:
        order, waited = desk.found(asker, order_id, request)
        response = json_response(order_told(order))
        response.set_etag(order_tag(order))
        if waited is not None:
            response.headers["Preference-Applied"] = f"wait={waited}"  # RFC 7240
        return conditional(response, request)

    @routes.delete("/<order_id>")
    @describes(orders.ERASE)
    @needs(Scope.ORDER)
    def erase(asker: Asker, order_id: str) -> Response:
        with parts.store.reading() as session:
            layouts = layouts_of(session, asker, order_id)
        shelf.forget(layouts)  # before, so that none is left where this ends in between
        order = erase_order(parts.store, parts.files, asker, order_id)
        shelf.forget(layouts)  # and after, for what was made of it meanwhile
        return json_response(order_told(order))

    return routes


def _page(parts: Parts, cursors: Cursors, asker: Asker, asked: Request) -> Response:
    query = read_arguments(asked, OrdersQuery)
    after = None if query.after is None else cursors.read(query.after)
    sought = Sought(
        state=query.state,
        reference=query.reference,
        updated_since=query.updated_since,
        run_id=query.run,
        test=query.test,
    )
    with parts.store.reading() as session:
        orders, more = list_orders(session, asker, sought, after=after, most=query.limit)
    response = json_response({"orders": [order_told(order) for order in orders]})
    if more is not None:
        on = {**asked.args.to_dict(), "after": cursors.make(more)}
        response.headers["Link"] = f'</v1/orders?{urlencode(on)}>; rel="next"'  # RFC 8288
    return response


class _OrderDesk:
    """Where orders are placed and looked for."""

    def __init__(self, parts: Parts, send: Send) -> None:
        self._parts = parts
        self._keeper = FileKeeper(parts.store, parts.files)
        self._send = send

    def place(self, asker: Asker, asked: Request) -> Response:
        """Keep an order, and tell the workers.

        Raises:
            ProblemError, LayoutError, OrderFault: Something of it cannot be taken; nothing is ordered.
        """
        brought = brought_by(asked, self._parts.settings.limits)
        body = order_body(asked, brought)
        if body.release_alone and Scope.RELEASE not in asker.scopes:
            raise ProblemError(
                name="scope-missing",
                detail="release_alone needs the scope release, which the key shown lacks",
                more={"scope": Scope.RELEASE.value},
            )
        if body.repeat_of is not None:
            repeat = _repeat_of(body, brought)
            return once(
                self._parts,
                asked,
                asker,
                brought,
                lambda also: repeat_order(self._parts.store, asker, repeat, also),
                lambda order: order_given(order, 202),
            )
        order = asked_order(body, brought)

        def placing(also: Any) -> OrderView:
            placed = place_order(self._parts.store, self._keeper, asker, order, also)
            self._send(placed.id)
            return placed

        return once(self._parts, asked, asker, brought, placing, lambda placed: order_given(placed, 202))

    def found(self, asker: Asker, order_id: str, asked: Request) -> tuple[OrderView, int | None]:
        """An order, after a wait where the request prefers one: till it is planned, or changed from what was seen.

        Returns:
            The order, and how long a wait was granted; None where none was asked for, or too many wait already.
        """
        wait_s = wait_asked(asked, most_s=MOST_WAIT_S)
        until, is_stopping, room = time.monotonic() + (wait_s or 0), stopping(), waiting_room()
        order = self._looked_for(asker, order_id)
        if time.monotonic() >= until or not _is_worth_waiting(order, asked):
            return order, wait_s
        if not room.enter(asker.key_id):
            return order, None
        try:
            while _is_worth_waiting(order, asked) and time.monotonic() < until and not is_stopping():
                time.sleep(LOOKS_EVERY_S)
                order = self._looked_for(asker, order_id)
        finally:
            room.leave(asker.key_id)
        return order, wait_s

    def _looked_for(self, asker: Asker, order_id: str) -> OrderView:
        with self._parts.store.reading() as session:
            return find_order(session, asker, order_id)


def _is_worth_waiting(order: OrderView, asked: Request) -> bool:
    """Whether the asker knows the order as it is, or knows nothing and it is not planned yet."""
    if asked.if_none_match:
        return asked.if_none_match.contains(order_tag(order))
    return order.state in UNDECIDED


def _repeat_of(body: OrderBody, brought: Mapping[str, bytes]) -> AskedRepeat:
    said = sorted(set(brought) - {"order"}) + [
        name for name in ("movement", "cutter", "settings", "quote") if getattr(body, name)
    ]
    if said:
        raise refused("/repeat_of", f"a repeat takes everything from the order it repeats; leave {said[0]} out")
    return AskedRepeat(
        repeat_of=str(body.repeat_of),
        quantity=body.quantity,
        reference=body.reference,
        release_alone=body.release_alone,
        hook_id=body.hook,
    )
