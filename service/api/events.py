"""/v1/events and the events of one order: as a list to ask on after, or as a stream (Server-Sent Events)."""

import json
import time
from collections.abc import Callable, Iterator, Sequence

from flask import Blueprint, Request, Response, request

from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import json_response
from service.api.asking import needs
from service.api.describing import describes
from service.api.models.orders import EventsQuery
from service.api.operations import orders
from service.api.order_answers import event_told, events_told
from service.api.request_models import read_arguments
from service.api.stopping import stopping
from service.api.waiting_room import waiting_room
from service.media_types import JSON_MEDIA_TYPE
from service.orders.finding import events_after, events_of, find_order
from service.orders.views import EventView
from service.parts import Parts

STREAM = "text/event-stream"
LOOKS_EVERY_S = 0.5  # s; how often a stream looks for events
BREATHES_EVERY_S = 15  # s; a line without meaning, so that no proxy thinks the stream is dead
STREAMS_FOR_S = 300  # s; then the client connects anew, and a stopping service need not wait for ever
MOST_DIGITS = 18  # digits of a number of an event
RETRY_MS = 2000  # ms; after which a client connects anew

More = Callable[[int], Sequence[EventView]]  # the events past a number


def event_routes(parts: Parts) -> Blueprint:
    """The routes of events."""
    routes = Blueprint("events", __name__, url_prefix="/v1")

    @routes.get("/events")
    @describes(orders.EVENTS)
    @needs(Scope.READ)
    def of_all(asker: Asker) -> Response:
        query = read_arguments(request, EventsQuery)

        def more(after: int) -> Sequence[EventView]:
            with parts.store.reading() as session:
                return events_after(session, asker, after=after, most=query.limit, test=query.test)

        return _answer(request, asker, query.after, more)

    @routes.get("/orders/<order_id>/events")
    @describes(orders.ORDER_EVENTS)
    @needs(Scope.READ)
    def of_one(asker: Asker, order_id: str) -> Response:
        query = read_arguments(request, EventsQuery)
        with parts.store.reading() as session:
            find_order(session, asker, order_id)

        def more(after: int) -> Sequence[EventView]:
            with parts.store.reading() as session:
                return events_of(session, asker, order_id, after=after, most=query.limit)

        return _answer(request, asker, query.after, more)

    return routes


def _answer(asked: Request, asker: Asker, after: int, more: More) -> Response:
    wanted = asked.accept_mimetypes.best_match((JSON_MEDIA_TYPE, STREAM), default=JSON_MEDIA_TYPE)
    if wanted == JSON_MEDIA_TYPE:
        return json_response(events_told(more(after), after))
    last = asked.headers.get("Last-Event-ID", "")
    begin = int(last) if last.isascii() and last.isdigit() and len(last) <= MOST_DIGITS else after
    room, is_over = waiting_room(), stopping()
    if room.enter(asker.key_id):
        response = Response(_stream(begin, more, is_over), content_type=f"{STREAM}; charset=utf-8")
        response.call_on_close(lambda: room.leave(asker.key_id))
    else:  # what there is; the client comes again after RETRY_MS
        response = Response(_stream(begin, more, lambda: True), content_type=f"{STREAM}; charset=utf-8")
    response.headers["Cache-Control"] = "no-store"
    response.headers["X-Accel-Buffering"] = "no"  # a proxy that buffers would hold events back
    return response


def _stream(after: int, more: More, is_stopping: Callable[[], bool]) -> Iterator[bytes]:
    """Events as they come, each under its number, so that a client that connects anew goes on from there."""
    begun = breathed = time.monotonic()
    yield f"retry: {RETRY_MS}\n\n".encode()
    while True:
        events = more(after)
        for event in events:
            after = event.seq
            yield f"id: {event.seq}\nevent: {event.type}\ndata: {json.dumps(event_told(event))}\n\n".encode()
        now = time.monotonic()
        if now - begun >= STREAMS_FOR_S or is_stopping():
            return
        if events:
            breathed = now
            continue
        if now - breathed >= BREATHES_EVERY_S:
            breathed = now
            yield b": still here\n\n"
        time.sleep(LOOKS_EVERY_S)
