"""Every route of the service with every kind of key: the table of who may ask for what, and that it holds."""

import json
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from io import BytesIO
from secrets import token_hex
from typing import Any

import pytest
from flask import Flask
from flask.testing import FlaskClient
from werkzeug.routing import Rule
from werkzeug.test import TestResponse

from service.access.keys import NewKey, revoke_key
from service.access.scopes import Scope
from service.access.secret_texts import new_key_secret
from service.api.asking import Access, Openness, access_of
from service.app import OPENED, create_app
from service.moments import utc_now
from service.parts import Parts
from service.settings import AccessSettings
from tests.service.api.guarded import bearing, new_key
from tests.service.conftest import parts_of
from tests.service.pricing import PricingPlanner
from tests.service.shop import TUNE, archive_of

ANY_KEY = Access(scope=None)
OPEN = Access(scope=None, openness=Openness.ALL, is_counted=False)
COUNTED = Access(scope=None, openness=Openness.ALL)
READ, ORDER, RELEASE, ADMIN = (Access(scope=Scope(word)) for word in ("read", "order", "release", "admin"))
OPEN_AND_MORE = Access(scope=Scope.READ, openness=Openness.ALL, sees_more=True)
MOVEMENTS = Access(scope=Scope.MOVEMENTS)
ORDER_OR_LOOPBACK = Access(scope=Scope.ORDER, openness=Openness.ON_LOOPBACK)
ADMIN_OR_LOOPBACK = Access(scope=Scope.ADMIN, openness=Openness.ON_LOOPBACK)
# Who may ask for what. A new route stands here too, so that whom it is for is looked at by a second pair of eyes.
TABLE: dict[str, Access] = {
    "GET /": OPEN,
    "GET /healthz": OPEN,
    "GET /openapi.json": OPEN,
    "GET /v1/schemas": OPEN,
    "GET /v1/schemas/<name>": OPEN,
    "GET /readyz": OPEN,
    "GET /metrics": ADMIN_OR_LOOPBACK,
    "GET /problems": OPEN,
    "GET /problems/<name>": OPEN,
    "GET /assets/<asked_digest>/<path:name>": OPEN,
    "GET /new": ORDER_OR_LOOPBACK,
    "GET /sign-in": OPEN,
    "GET /reference": OPEN,
    "GET /measuring": OPEN,
    "GET /movements": OPEN_AND_MORE,
    "GET /movements/<document_id>": OPEN_AND_MORE,
    "GET /movements/<document_id>/edit": MOVEMENTS,
    "GET /movements/add": MOVEMENTS,
    "GET /cutters/<document_id>/edit": MOVEMENTS,
    "GET /cutters/add": MOVEMENTS,
    "GET /cutters": OPEN_AND_MORE,
    "GET /cutters/<document_id>": OPEN_AND_MORE,
    "GET /discs/<fingerprint>": ORDER_OR_LOOPBACK,
    "GET /orders": READ,
    "GET /orders/<order_id>": READ,
    "GET /orders/<order_id>/discs/<int:disc>": READ,
    "GET /orders/<order_id>/discs/<int:disc>/work-sheet/<int:number>.png": READ,
    "GET /proof/<text>": COUNTED,
    "GET /sign-in/<secret>": COUNTED,
    "POST /sign-in": COUNTED,
    "POST /sign-out": ANY_KEY,
    "GET /v1/keys": ADMIN,
    "POST /v1/keys": ADMIN,
    "GET /v1/keys/me": ANY_KEY,
    "GET /v1/keys/<key:key_id>": ADMIN,
    "DELETE /v1/keys/<key:key_id>": ADMIN,
    "GET /v1/limits": OPEN,
    "GET /v1/movements": OPEN_AND_MORE,
    "GET /v1/movements/<document_id>": OPEN_AND_MORE,
    "PUT /v1/movements/<document_id>": MOVEMENTS,
    "POST /v1/movements/check": MOVEMENTS,
    "DELETE /v1/movements/<document_id>": MOVEMENTS,
    "GET /v1/movements/<document_id>/revisions": OPEN_AND_MORE,
    "GET /v1/cutters": OPEN_AND_MORE,
    "GET /v1/cutters/<document_id>": OPEN_AND_MORE,
    "PUT /v1/cutters/<document_id>": MOVEMENTS,
    "POST /v1/cutters/check": MOVEMENTS,
    "DELETE /v1/cutters/<document_id>": MOVEMENTS,
    "GET /v1/cutters/<document_id>/revisions": OPEN_AND_MORE,
    "POST /v1/layouts": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>/<file_name>": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>/hearing.wav": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>/hearing.mid": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>/settings.json": ORDER_OR_LOOPBACK,
    "GET /v1/layouts/<fingerprint>/tune.mid": ORDER_OR_LOOPBACK,
    "POST /v1/layouts/<fingerprint>/again": ORDER_OR_LOOPBACK,
    "POST /v1/sheets": ORDER_OR_LOOPBACK,
    "POST /v1/trial-pieces": ORDER_OR_LOOPBACK,
    "GET /v1/orders": READ,
    "POST /v1/orders": ORDER,
    "GET /v1/orders/<order_id>": READ,
    "DELETE /v1/orders/<order_id>": ORDER,
    "GET /v1/orders/<order_id>/events": READ,
    "GET /v1/orders/<order_id>/plans/<int:revision>/files/<int:disc>/<name>": READ,
    "GET /v1/orders/<order_id>/plans/<int:revision>/files/<int:disc>/hearing.wav": READ,
    "GET /v1/orders/<order_id>/plans/<int:revision>/files/<int:disc>/hearing.mid": READ,
    "POST /v1/orders/<order_id>/cancel": ORDER,
    "POST /v1/orders/<order_id>/proof-links": ORDER,
    "POST /v1/orders/<order_id>/release": RELEASE,
    "POST /v1/orders/<order_id>/replan": ORDER,
    "POST /v1/orders/<order_id>/reports": RELEASE,
    "GET /v1/proofs/<text>": COUNTED,
    "GET /v1/proofs/<text>/files/<int:disc>/<name>": COUNTED,
    "GET /v1/proofs/<text>/files/<int:disc>/hearing.wav": COUNTED,
    "GET /v1/proofs/<text>/files/<int:disc>/hearing.mid": COUNTED,
    "POST /v1/proofs/<text>/verdict": COUNTED,
    "POST /v1/quotes": ORDER,
    "GET /v1/quotes/<quote_id>": READ,
    "GET /v1/test-tunes": OPEN,
    "GET /v1/test-tunes/<name>.mid": OPEN,
    "GET /v1/runs": READ,
    "POST /v1/runs": ORDER,
    "GET /v1/runs/<run_id>": READ,
    "GET /v1/runs/<run_id>/items": READ,
    "GET /v1/runs/<run_id>/results.zip": READ,
    "GET /v1/events": READ,
    "GET /v1/event-types": OPEN,
    "GET /v1/export": ADMIN,
    "GET /v1/hooks": READ,
    "POST /v1/hooks": ORDER,
    "GET /v1/hooks/<hook_id>": READ,
    "PATCH /v1/hooks/<hook_id>": ORDER,
    "DELETE /v1/hooks/<hook_id>": ORDER,
    "GET /v1/hooks/<hook_id>/deliveries": READ,
    "POST /v1/hooks/<hook_id>/enable": ORDER,
    "POST /v1/hooks/<hook_id>/secret": ORDER,
    "POST /v1/hooks/<hook_id>/test": ORDER,
    "GET /v1/deliveries/<delivery_id>": READ,
    "POST /v1/deliveries/<delivery_id>/redeliver": ORDER,
}
# What a request must say to be looked at at all; of other routes nothing, or an empty object.
BODIES: dict[str, dict[str, Any]] = {
    "POST /v1/orders/<order_id>/release": {"by": "A. Maker", "plan": f"1-{64 * '0'}"},
    "POST /v1/orders/<order_id>/reports": {"what": "taken"},
    "PATCH /v1/hooks/<hook_id>": {"for_all_orders": True},
}
# Parts of a path that name what is the same for all who may ask, or opens something by itself.
OF_NOBODY = {
    *("asked_digest", "name", "secret", "text", "document_id", "fingerprint", "file_name"),
    *("revision", "disc", "number"),
}
# Those that name what belongs to an owner, each with an id of its form that was never made.
OWNED = {
    "key_id": "key_" + 32 * "0",
    "order_id": "order_" + 32 * "0",
    "quote_id": "quote_" + 32 * "0",
    "run_id": "run_" + 32 * "0",
    "hook_id": "hook_" + 32 * "0",
    "delivery_id": "msg_" + 32 * "0",
}
LISTS = {
    "GET /v1/keys": "key_id",
    "GET /v1/orders": "order_id",
    "GET /v1/runs": "run_id",
    "GET /v1/events": "order_id",
    "GET /v1/hooks": "hook_id",
}
# An archive tells nothing as text; what is in it is looked at where exports are tested.
LISTED = [route for route in TABLE if route.startswith("GET ") and route != "GET /v1/export"]
FAR = {"REMOTE_ADDR": "203.0.113.9"}
REFUSALS = {f"/problems/{name}" for name in ("key-missing", "key-refused", "scope-missing")}


@dataclass
class Keys:
    """A key of each kind."""

    of_scope: dict[Scope, NewKey]
    for_tests: NewKey
    revoked: NewKey
    never_made: str


@pytest.fixture(scope="module")
def shop(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[tuple[Flask, Parts]]:
    """The whole service on loopback, which counts so far that nothing is refused for coming too often."""
    folder = tmp_path_factory.mktemp("shop")
    parts = parts_of(folder, module_database_url)
    settings = replace(
        parts.settings,
        access=AccessSettings(listens_on_loopback=True, read_rate=(10**6, 60), write_rate=(10**6, 60)),
    )
    app = create_app(settings, planner=PricingPlanner())
    yield app, parts
    for opened in (*app.extensions[OPENED], parts.store):
        opened.close()


@pytest.fixture(scope="module")
def keys(shop: tuple[Flask, Parts]) -> Keys:
    _, parts = shop
    revoked = new_key(parts, *Scope)
    revoke_key(parts.store, revoked.told.id, utc_now())
    return Keys(
        of_scope={scope: new_key(parts, scope) for scope in Scope},
        for_tests=new_key(parts, *Scope, owner="Larkfield", is_test=True),
        revoked=revoked,
        never_made=new_key_secret(),
    )


def routes(app: Flask) -> Iterator[tuple[str, Rule]]:
    """Every method and path of an app, but for the methods that Flask answers by itself."""
    for rule in app.url_map.iter_rules():
        for method in sorted((rule.methods or set()) - {"HEAD", "OPTIONS"}):
            yield f"{method} {rule.rule}", rule


def guard_refuses(http: FlaskClient, route: str, headers: dict[str, str], *, far: bool = False) -> bool:
    """Whether the guard refuses a request, whatever else would be wrong with it."""
    answer = http.open(
        re.sub(r"<(?:\w+:)?(\w+)>", "1", route.partition(" ")[2]),
        method=route.partition(" ")[0],
        headers=headers,
        environ_overrides=FAR if far else {},
    )
    problem = answer.json if answer.content_type == "application/problem+json" else None
    assert answer.status_code < 500, answer.text
    return problem is not None and problem["type"] in REFUSALS


def test_every_route_declares_who_may_ask_as_the_table_says(shop: tuple[Flask, Parts]) -> None:
    app, _ = shop

    declared = {route: access_of(app.view_functions[rule.endpoint]) for route, rule in routes(app)}

    assert [route for route, access in declared.items() if access is None] == []
    assert declared == TABLE


@pytest.mark.parametrize("route", TABLE)
def test_a_route_answers_whom_the_table_says(shop: tuple[Flask, Parts], keys: Keys, route: str) -> None:
    access = TABLE[route]
    http = shop[0].test_client()
    wants_key = access.openness is not Openness.ALL
    looks_at_key = wants_key or access.sees_more

    refused = {scope.value: guard_refuses(http, route, bearing(key)) for scope, key in keys.of_scope.items()}
    without = {
        "near": guard_refuses(http, route, {}),
        "far": guard_refuses(http, route, {}, far=True),
        "revoked": guard_refuses(http, route, bearing(keys.revoked)),
        "never made": guard_refuses(http, route, bearing(keys.never_made)),
        "for tests": guard_refuses(http, route, bearing(keys.for_tests)),
    }

    assert refused == {scope.value: access.scope not in (None, scope) for scope in Scope}
    assert without == {
        "near": access.openness is Openness.NOBODY,
        "far": wants_key,
        "revoked": looks_at_key,
        "never made": looks_at_key,
        "for tests": False,
    }


def test_every_part_of_a_path_is_known_to_belong_to_an_owner_or_to_nobody(shop: tuple[Flask, Parts]) -> None:
    named = {argument for _, rule in routes(shop[0]) for argument in rule.arguments}

    assert named == OWNED.keys() | OF_NOBODY


def new_integrator(parts: Parts) -> NewKey:
    """A key of an owner that nobody else is."""
    return new_key(parts, *Scope, owner=f"Bellgrove {token_hex(8)}")


def made_by(http: FlaskClient, key: NewKey) -> dict[str, str]:
    """One of everything that belongs to an owner, by the part of a path that names it."""
    headers = bearing(key)
    form = {"tune": (BytesIO(TUNE), "a.mid"), "order": '{"movement": "fernhollow-31"}'}
    order = http.post("/v1/orders", data=form, headers=headers)
    form = {"tune": (BytesIO(TUNE), "a.mid"), "order": '{"movement": "fernhollow-31"}'}  # what was sent is closed
    quote = http.post("/v1/quotes", data=form, headers=headers)
    hook = http.post("/v1/hooks", json={"url": f"https://shop.example/{key.told.id}"}, headers=headers)
    made = {"key_id": key.told.id, "order_id": told(order)["id"], "hook_id": told(hook)["id"]}
    made["quote_id"] = told(quote)["id"]
    run = {"archive": (BytesIO(archive_of(a=TUNE)), "a.zip"), "run": '{"movements": ["fernhollow-31"]}'}
    made["run_id"] = told(http.post("/v1/runs", data=run, headers=headers))["id"]
    return {**made, "delivery_id": told(http.post(f"/v1/hooks/{made['hook_id']}/test", headers=headers))["id"]}


@pytest.mark.parametrize("route", [route for route in TABLE if any(f"<{name}>" in route for name in OWNED)])
def test_what_belongs_to_another_owner_is_as_what_never_was(shop: tuple[Flask, Parts], route: str) -> None:
    app, parts = shop
    http = app.test_client()
    theirs = made_by(http, new_integrator(parts))

    for is_test in (False, True):
        asker = bearing(new_key(parts, *Scope, owner="Larkfield", is_test=is_test))
        other, never = (ask(http, route, ids, asker) for ids in (theirs, OWNED))

        assert (other.status_code, never.status_code) == (404, 404), other.text
        assert told_without(other, theirs) == told_without(never, OWNED)


@pytest.mark.parametrize("route", [route for route in TABLE if any(f"<{name}>" in route for name in OWNED)])
def test_what_belongs_to_an_owner_is_there_for_it(shop: tuple[Flask, Parts], route: str) -> None:
    app, parts = shop
    http = app.test_client()
    own_key = new_integrator(parts)
    own = made_by(http, own_key)

    answer = ask(http, route, own, bearing(own_key))

    problem = answer.json["type"] if answer.status_code == 404 and answer.json else ""
    assert not problem.endswith(("key-unknown", "order-unknown", "hook-unknown", "delivery-unknown")), answer.text


@pytest.mark.parametrize("route", [route for route in LISTED if "<" not in route])
def test_no_list_shows_what_belongs_to_another_owner(shop: tuple[Flask, Parts], route: str) -> None:
    app, parts = shop
    http = app.test_client()
    theirs = made_by(http, new_integrator(parts))
    ours = new_integrator(parts)
    own = made_by(http, ours)

    if route in LISTS:
        assert own[LISTS[route]] in http.get(route.removeprefix("GET "), headers=bearing(ours)).text
    for key in (ours, new_key(parts, *Scope, is_test=True)):
        answer = http.get(route.removeprefix("GET "), headers=bearing(key))
        assert answer.status_code == 200
        assert [one for one in theirs.values() if one in answer.text] == []


@pytest.mark.parametrize("field", ["hook", "repeat_of"])
def test_an_order_cannot_tell_whether_what_it_names_is_another_owner_s(shop: tuple[Flask, Parts], field: str) -> None:
    app, parts = shop
    http = app.test_client()
    theirs = made_by(http, new_integrator(parts))
    asker = bearing(new_integrator(parts))
    name = {"hook": "hook_id", "repeat_of": "order_id"}[field]

    def place(ids: Mapping[str, str]) -> TestResponse:
        order = {field: ids[name]} if field == "repeat_of" else {"movement": "fernhollow-31", field: ids[name]}
        form = {"order": json.dumps(order)}
        tune = {} if field == "repeat_of" else {"tune": (BytesIO(TUNE), "a.mid")}
        return http.post("/v1/orders", data={**form, **tune}, headers=asker)

    other, never = place(theirs), place(OWNED)

    assert 400 <= other.status_code < 500, other.text
    assert told_without(other, theirs) == told_without(never, OWNED)


def ask(http: FlaskClient, route: str, ids: Mapping[str, str], headers: dict[str, str]) -> TestResponse:
    """Ask a route about ids, saying enough to be looked at."""
    method, _, path = route.partition(" ")
    for name, one in ids.items():
        path = re.sub(rf"<(?:\w+:)?{name}>", one, path)
    path = re.sub(r"<(?:\w+:)?\w+>", "1", path)
    more: dict[str, Any] = {} if method in ("GET", "DELETE") else {"json": BODIES.get(route, {})}
    return http.open(path, method=method, headers=headers, **more)


def told(answer: TestResponse) -> dict[str, Any]:
    assert answer.status_code in (201, 202), answer.text
    value: Any = answer.json
    return dict(value)


def told_without(answer: TestResponse, ids: Mapping[str, str]) -> tuple[str, dict[str, str]]:
    """An answer without what must differ: the ids asked for, the request's own id, how many requests are left."""
    differ = {"RateLimit", "Request-Id", "X-Request-Id", "Date", "Content-Length"}
    body = re.sub(r'"request_id": "[^"]*"', "", answer.text)
    for one in ids.values():
        body = body.replace(one, "ID")
    return body, {name: value for name, value in answer.headers if name not in differ}
