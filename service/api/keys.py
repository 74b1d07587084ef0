"""/v1/keys: the keys of an owner, or of all owners where the shop asks."""

from collections.abc import Callable
from datetime import datetime

from flask import Blueprint, Response, request
from flask.sansio.blueprints import BlueprintSetupState
from werkzeug.routing import BaseConverter

from layout.errors import DocumentError, Problem
from service.access.asker import Asker
from service.access.keys import KeyAsked, KeyTold, NewKey, key_of_id, list_keys, make_key
from service.access.owners import OwnerTold, hold_access, owner_titled
from service.access.revoking import revoke_for_good
from service.access.scopes import Scope, in_order
from service.access.telling import key_told
from service.api.answers import json_response
from service.api.asking import browser_or_none, needs, needs_any_key
from service.api.describing import describes
from service.api.models.keys import KeyBody, KeysQuery
from service.api.operations import keys
from service.api.problems import ProblemError
from service.api.request_models import read_arguments, read_body
from service.moments import utc_now
from service.parts import Parts

MOST_BODY_BYTES = 10_000  # bytes; the longest titles in escapes of JSON, and every scope, take 5,000


class _IdOfKey(BaseConverter):
    """An id of a key in a path. "me" is none: it can be read, and whoever would revoke it is told so (405)."""

    regex = "(?!me$)[^/]+"


def _know_ids(setup: BlueprintSetupState) -> None:
    setup.app.url_map.converters["key"] = _IdOfKey


def key_routes(parts: Parts, clock: Callable[[], datetime] = utc_now) -> Blueprint:
    """The routes of keys.

    Args:
        parts: Read for the database.
        clock: The moment, in UTC.
    """
    routes = Blueprint("keys", __name__, url_prefix="/v1/keys")
    routes.record(_know_ids)
    store = parts.store

    @routes.get("")
    @describes(keys.LIST)
    @needs(Scope.ADMIN)
    def list_all(asker: Asker) -> Response:
        page = read_arguments(request, KeysQuery)
        found = list_keys(store, owner_id=_seen_by(asker), after=page.after or "", most=page.limit + 1)
        response = json_response({"keys": [key_told(key) for key in found[: page.limit]]})
        if len(found) > page.limit:
            response.headers["Link"] = _next_page(found[page.limit - 1].id, page.limit)
        return response

    @routes.post("")
    @describes(keys.MAKE)
    @needs(Scope.ADMIN)
    def make(asker: Asker) -> Response:
        body = read_body(request, KeyBody, document="key", most_bytes=MOST_BODY_BYTES)
        made = _made(parts, asker, body, clock())
        response = json_response({**key_told(made.told), "secret": made.secret}, status=201)
        response.headers.update({"Location": f"/v1/keys/{made.told.id}", "Cache-Control": "no-store"})
        return response

    @routes.get("/me")
    @describes(keys.OWN)
    @needs_any_key
    def tell_own(asker: Asker) -> Response:
        browser = browser_or_none()
        own = _found(key_of_id(store, asker.key_id), asker.key_id)
        return json_response({**key_told(own), "csrf_token": browser.csrf_token if browser else None})

    @routes.get("/<key:key_id>")
    @describes(keys.TELL)
    @needs(Scope.ADMIN)
    def tell(asker: Asker, key_id: str) -> Response:
        key = key_of_id(store, key_id)
        is_seen = key is not None and _seen_by(asker) in (None, key.owner.id)
        return json_response(key_told(_found(key if is_seen else None, key_id)))

    @routes.delete("/<key:key_id>")
    @describes(keys.REVOKE)
    @needs(Scope.ADMIN)
    def revoke(asker: Asker, key_id: str) -> Response:
        _found(revoke_for_good(store, parts.files, key_id, clock(), owner_id=_seen_by(asker)), key_id)
        return Response(status=204)

    return routes


def _made(parts: Parts, asker: Asker, body: KeyBody, now: datetime) -> NewKey:
    """The key asked for: it may no more than the one that asks, so that no key can raise itself.

    Raises:
        ProblemError: It would have a scope that the key asking lacks.
        DocumentError: It would belong to another owner, or reach the shop, and the key asking may not have that.
    """
    more = in_order(frozenset(body.scopes) - asker.scopes)
    if more:
        raise ProblemError(
            name="scope-missing",
            detail=f"a key gives no more than it has; the key shown lacks {', '.join(more)}",
            more={"scope": more[0]},
        )
    if body.owner is not None and not asker.sees_all_owners:
        raise _refused("/owner", "the shop's own keys alone make keys for others; leave it out")
    if asker.is_test and not body.is_test:
        raise _refused("/is_test", "a key for tests makes keys for tests alone; it must be true")
    asked = KeyAsked(title=body.title, scopes=frozenset(body.scopes), is_test=body.is_test)
    with parts.store.writing() as session:
        hold_access(session)
        if body.owner is None:
            owner = OwnerTold(id=asker.owner_id, title="", is_shop=asker.is_shop)
        else:
            owner = owner_titled(session, body.owner, now)
        return make_key(session, owner, asked, now)


def _refused(pointer: str, message: str) -> DocumentError:
    return DocumentError(document="key", problems=(Problem(pointer=pointer, message=message),))


def _next_page(last_id: str, limit: int) -> str:
    return f'</v1/keys?after={last_id}&limit={limit}>; rel="next"'  # RFC 8288


def _seen_by(asker: Asker) -> str | None:
    """Whose keys exist for an asker; None for everybody's."""
    return None if asker.sees_all_owners else asker.owner_id


def _found(key: KeyTold | None, key_id: str) -> KeyTold:
    if key is None:
        raise ProblemError(name="key-unknown", detail=f"there is no key {key_id[:60]!r}")
    return key
