"""/v1/orders: orders are placed, seen, listed and deleted here; what is decided about them, in `deciding`."""

import time
from collections.abc import Callable, Mapping
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.documents import shipped_cutter_ids
from layout.documents.reading import Json
from layout.errors import DocumentError, Problem
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import json_bytes, json_response
from service.api.asking import needs
from service.api.cursors import Cursors
from service.api.describing import describes
from service.api.models.orders import MOST_WAIT_S, DocumentName, OrderBody, OrdersQuery
from service.api.multipart import parts_of
from service.api.once import once
from service.api.operations import orders
from service.api.order_answers import order_given, order_tag, order_told
from service.api.posted import FORM_MEDIA_TYPE, body_of
from service.api.preferring import wait_asked
from service.api.problems import ProblemError
from service.api.request_models import read_arguments, read_text
from service.orders.asked import AskedOrder, AskedRepeat, NamedDocument
from service.orders.erasing import erase_order
from service.orders.finding import Sought, find_order, list_orders
from service.orders.placing import place_order
from service.orders.repeating import repeat_order
from service.orders.states import State
from service.orders.views import OrderView
from service.parts import Parts
from service.store.holds import FileKeeper

PARTS = ("tune", "order", "movement", "cutter", "settings")
UNDECIDED = (State.RECEIVED, State.PLANNING)
LOOKS_EVERY_S = 0.25  # s; how often a waiting request looks, four cheap reads a second

Send = Callable[[str], object]  # hands an order's id to the queue


def order_routes(parts: Parts, send: Send) -> Blueprint:
    """The routes of orders.

    Args:
        parts: What orders are kept in.
        send: Tells the workers of an order, after it is kept.
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
        response.make_conditional(request)
        return response

    @routes.delete("/<order_id>")
    @describes(orders.ERASE)
    @needs(Scope.ORDER)
    def erase(asker: Asker, order_id: str) -> Response:
        order = erase_order(parts.store, parts.settings.places.data_directory, asker, order_id)
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
        brought = self._brought(asked)
        body = _order_body(asked, brought)
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
        order = _asked_order(body, brought)

        def placing(also: Any) -> OrderView:
            placed = place_order(self._parts.store, self._keeper, asker, order, also)
            self._send(placed.id)
            return placed

        return once(self._parts, asked, asker, brought, placing, lambda placed: order_given(placed, 202))

    def _brought(self, asked: Request) -> dict[str, bytes]:
        limits = self._parts.settings.limits
        if asked.mimetype != FORM_MEDIA_TYPE:
            raise ProblemError(
                name="media-type-unsupported",
                detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; "
                f"send {FORM_MEDIA_TYPE} with the parts tune and order",
                more={"allowed_types": [FORM_MEDIA_TYPE]},
                headers={"Accept-Post": FORM_MEDIA_TYPE},
            )
        return parts_of(
            body_of(asked, limits.upload_bytes),
            boundary=asked.mimetype_params.get("boundary"),
            known=PARTS,
            most_parts=limits.form_parts,
        )

    def found(self, asker: Asker, order_id: str, asked: Request) -> tuple[OrderView, int | None]:
        """An order, after a wait where the request prefers one: till it is planned, or changed from what was seen.

        Returns:
            The order, and how long a wait was granted; None where none was asked for.
        """
        wait_s = wait_asked(asked, most_s=MOST_WAIT_S)
        until = time.monotonic() + (wait_s or 0)
        while True:
            with self._parts.store.reading() as session:
                order = find_order(session, asker, order_id)
            seen = asked.if_none_match.contains(order_tag(order))
            is_worth_waiting = seen or (not asked.if_none_match and order.state in UNDECIDED)
            if not is_worth_waiting or time.monotonic() >= until:
                return order, wait_s
            time.sleep(LOOKS_EVERY_S)


def _order_body(asked: Request, brought: Mapping[str, bytes]) -> OrderBody:
    return read_text(
        asked,
        OrderBody,
        brought.get("order", b""),
        document="order",
        plain="a plain value is needed; a document with the worth of its numbers goes along as a part of its own",
    )


def _repeat_of(body: OrderBody, brought: Mapping[str, bytes]) -> AskedRepeat:
    said = sorted(set(brought) - {"order"}) + [
        name for name in ("movement", "cutter", "settings", "quote") if getattr(body, name)
    ]
    if said:
        raise _refused("/repeat_of", f"a repeat takes everything from the order it repeats; leave {said[0]} out")
    return AskedRepeat(
        repeat_of=str(body.repeat_of),
        quantity=body.quantity,
        reference=body.reference,
        release_alone=body.release_alone,
        hook_id=body.hook,
    )


def _asked_order(body: OrderBody, brought: Mapping[str, bytes]) -> AskedOrder:
    if not brought.get("tune"):
        raise ProblemError(name="tune-missing", detail="the request brings no tune: the part tune is missing or empty")
    movement = _source("movement", body.movement, brought)
    if movement is None:
        raise _refused("/movement", "no movement is named; name one, or send it as the part movement")
    settings = brought.get("settings")
    if settings is not None and body.settings:
        raise _refused("/settings", "settings are given twice, here and as a part; give them once")
    return AskedOrder(
        tune=brought["tune"],
        tune_name=body.tune_name,
        movement=movement,
        cutter=_source("cutter", body.cutter, brought) or NamedDocument(id=shipped_cutter_ids()[0]),
        settings=_settings_text(body.settings) if settings is None else settings,
        quantity=body.quantity,
        reference=body.reference,
        most_lost_share=body.most_lost_share,
        release_alone=body.release_alone,
        quote_id=body.quote,
        hook_id=body.hook,
    )


def _settings_text(settings: Json) -> bytes:
    return json_bytes(settings)


def _source(kind: str, named: DocumentName | str | None, brought: Mapping[str, bytes]) -> NamedDocument | bytes | None:
    if kind in brought and named is not None:
        raise _refused(f"/{kind}", f"a {kind} is given twice, here and as a part; give it once")
    if kind in brought:
        return brought[kind]
    if isinstance(named, str):
        return NamedDocument(id=named)
    return None if named is None else NamedDocument(id=named.id, revision=named.revision)


def _refused(pointer: str, message: str) -> DocumentError:
    return DocumentError(document="order", problems=(Problem(pointer=pointer, message=message),))
