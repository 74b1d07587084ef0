"""/v1/hooks, /v1/deliveries and /v1/event-types: who is told what happens, and what came of it."""

from collections.abc import Callable
from datetime import datetime, timedelta
from typing import Any

from flask import Blueprint, Request, Response, request

from layout.errors import DocumentError, Problem
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import document_response, json_response
from service.api.asking import needs, open_to_all
from service.api.describing import describes
from service.api.hook_answers import delivery_told, hook_problems, hook_told, secret_told
from service.api.models.hooks import DeliveriesQuery, HookBody, HookPatch, SecretBody
from service.api.operations import hooks
from service.api.request_models import read_arguments, read_body
from service.hooks.deliveries import DeliveryTold, Holder, deliveries_of, find_delivery, redeliver
from service.hooks.guard import Rules, UrlError, read_url
from service.hooks.keeping import (
    HookWish,
    HookWithSecret,
    add_hook,
    ask_for_test,
    change_hook,
    delete_hook,
    enable_hook,
    find_hook,
    hooks_of,
    rotate_secret,
)
from service.hooks.stopping import note_stopped
from service.hooks.types import MEANINGS
from service.moments import utc_now
from service.parts import Parts
from service.settings import ServiceSettings

MOST_BODY_BYTES = 20_000  # bytes; the longest URL in escapes of JSON, and every type, take 13,000


def hook_routes(parts: Parts, clock: Callable[[], datetime] = utc_now) -> Blueprint:
    """The routes of hooks and their deliveries.

    Args:
        parts: Read for the database, and for what hooks may reach.
        clock: The moment, in UTC.
    """
    routes = Blueprint("hooks", __name__, url_prefix="/v1")
    _hooks(routes, parts, clock)
    _secrets_and_tests(routes, parts, clock)
    _deliveries(routes, parts, clock)

    @routes.get("/event-types")
    @describes(hooks.TYPES)
    @open_to_all
    def list_types() -> Response:
        types = [{"type": kind, "meaning": meaning} for kind, meaning in MEANINGS.items()]
        return document_response({"event_types": types}, request)

    return routes


def _hooks(routes: Blueprint, parts: Parts, clock: Callable[[], datetime]) -> None:
    store = parts.store

    @routes.get("/hooks")
    @describes(hooks.LIST)
    @needs(Scope.READ)
    def list_hooks(asker: Asker) -> Response:
        with store.reading() as session:
            told = [hook_told(hook) for hook in hooks_of(session, _holder(asker), now=clock())]
        return json_response({"hooks": told})

    @routes.post("/hooks")
    @describes(hooks.MAKE)
    @needs(Scope.ORDER)
    def make_hook(asker: Asker) -> Response:
        body = read_body(request, HookBody, document="hook", most_bytes=MOST_BODY_BYTES)
        _check_url(body.url, asker, parts.settings)
        with hook_problems(), store.writing() as session:
            made = add_hook(session, _holder(asker), _wish(body), now=clock())
        response = _with_secret(made, status=201)
        response.headers["Location"] = f"/v1/hooks/{made.hook.id}"
        return response

    @routes.get("/hooks/<hook_id>")
    @describes(hooks.TELL)
    @needs(Scope.READ)
    def tell_hook(asker: Asker, hook_id: str) -> Response:
        with hook_problems(), store.reading() as session:
            return json_response(hook_told(find_hook(session, _holder(asker), hook_id, now=clock())))

    @routes.patch("/hooks/<hook_id>")
    @describes(hooks.CHANGE)
    @needs(Scope.ORDER)
    def patch_hook(asker: Asker, hook_id: str) -> Response:
        body = read_body(request, HookPatch, document="hook", most_bytes=MOST_BODY_BYTES)
        if body.url is not None:
            _check_url(body.url, asker, parts.settings)
        changes: dict[str, Any] = {name: getattr(body, name) for name in body.model_fields_set}
        with hook_problems(), store.writing() as session:
            return json_response(hook_told(change_hook(session, _holder(asker), hook_id, changes, now=clock())))

    @routes.delete("/hooks/<hook_id>")
    @describes(hooks.DELETE)
    @needs(Scope.ORDER)
    def drop_hook(asker: Asker, hook_id: str) -> Response:
        with hook_problems(), store.writing() as session:
            delete_hook(session, _holder(asker), hook_id, now=clock())
        note_stopped(store, parts.files, hook_id)
        return Response(status=204)


def _secrets_and_tests(routes: Blueprint, parts: Parts, clock: Callable[[], datetime]) -> None:
    store = parts.store

    @routes.post("/hooks/<hook_id>/secret")
    @describes(hooks.SECRET)
    @needs(Scope.ORDER)
    def replace_secret(asker: Asker, hook_id: str) -> Response:
        body = _secret_body(request)
        valid_for = timedelta(hours=body.old_valid_hours)
        with hook_problems(), store.writing() as session:
            made = rotate_secret(session, _holder(asker), hook_id, now=clock(), old_valid_for=valid_for)
        return _with_secret(made, status=200)

    @routes.post("/hooks/<hook_id>/test")
    @describes(hooks.TEST)
    @needs(Scope.ORDER)
    def send_test(asker: Asker, hook_id: str) -> Response:
        with hook_problems(), store.writing() as session:
            return _accepted(ask_for_test(session, _holder(asker), hook_id, now=clock()))

    @routes.post("/hooks/<hook_id>/enable")
    @describes(hooks.ENABLE)
    @needs(Scope.ORDER)
    def turn_on(asker: Asker, hook_id: str) -> Response:
        with hook_problems(), store.writing() as session:
            hook = enable_hook(session, _holder(asker), hook_id, now=clock())
        note_stopped(store, parts.files, hook_id)
        return json_response(hook_told(hook))


def _deliveries(routes: Blueprint, parts: Parts, clock: Callable[[], datetime]) -> None:
    store = parts.store

    @routes.get("/hooks/<hook_id>/deliveries")
    @describes(hooks.DELIVERIES)
    @needs(Scope.READ)
    def list_deliveries(asker: Asker, hook_id: str) -> Response:
        page = read_arguments(request, DeliveriesQuery)
        with hook_problems(), store.reading() as session:
            find_hook(session, _holder(asker), hook_id, now=clock())
            found = deliveries_of(session, hook_id, state=page.state, before=page.after, most=page.limit + 1)
        response = json_response({"deliveries": [delivery_told(one) for one in found[: page.limit]]})
        if len(found) > page.limit:
            state = "" if page.state is None else f"&state={page.state}"
            query = f"after={found[page.limit - 1].id}&limit={page.limit}{state}"
            response.headers["Link"] = f'</v1/hooks/{hook_id}/deliveries?{query}>; rel="next"'  # RFC 8288
        return response

    @routes.get("/deliveries/<delivery_id>")
    @describes(hooks.DELIVERY)
    @needs(Scope.READ)
    def tell_delivery(asker: Asker, delivery_id: str) -> Response:
        with hook_problems(), store.reading() as session:
            return json_response(delivery_told(find_delivery(session, _holder(asker), delivery_id)))

    @routes.post("/deliveries/<delivery_id>/redeliver")
    @describes(hooks.REDELIVER)
    @needs(Scope.ORDER)
    def send_again(asker: Asker, delivery_id: str) -> Response:
        with hook_problems(), store.writing() as session:
            return _accepted(redeliver(session, _holder(asker), delivery_id, now=clock()))


def _holder(asker: Asker) -> Holder:
    return Holder(owner_id=asker.owner_id, is_test=asker.is_test)


def _wish(body: HookBody) -> HookWish:
    types = None if body.types is None else tuple(dict.fromkeys(body.types))
    return HookWish(url=body.url, types=types, for_all_orders=body.for_all_orders)


def _check_url(url: str, asker: Asker, settings: ServiceSettings) -> None:
    """See that a hook may have this URL. Its name is looked up at each try, and what it leads to looked at then.

    Raises:
        DocumentError: It may not.
    """
    networks = settings.hooks.networks if asker.is_shop else ()
    try:
        read_url(url, Rules(networks=networks, allow_http=settings.hooks.allow_http))
    except UrlError as fault:
        raise DocumentError(document="hook", problems=(Problem(pointer="/url", message=str(fault)),)) from fault


def _secret_body(asked: Request) -> SecretBody:
    if not asked.mimetype and not asked.content_length:
        return SecretBody()
    return read_body(asked, SecretBody, document="secret", most_bytes=MOST_BODY_BYTES)


def _with_secret(made: HookWithSecret, *, status: int) -> Response:
    response = json_response(secret_told(made), status=status)
    response.headers["Cache-Control"] = "no-store"
    return response


def _accepted(delivery: DeliveryTold) -> Response:
    response = json_response(delivery_told(delivery), status=202)
    response.headers["Location"] = f"/v1/deliveries/{delivery.id}"
    return response
