"""A small service behind the guard: one route for each way of declaring who may ask."""

from datetime import UTC, datetime, timedelta
from typing import Any

from flask import Flask, Response, request
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from service.access.asker import Asker
from service.access.keys import KeyAsked, NewKey, make_key
from service.access.owners import hold_access, owner_titled, the_shop
from service.access.rates import Rates
from service.access.scopes import Scope
from service.api.asking import (
    asker_or_none,
    guard,
    needs,
    needs_any_key,
    open_but_counted,
    open_on_loopback,
    open_to_all,
)
from service.api.failures import answer_failures
from service.api.keys import key_routes
from service.api.problems import PROBLEMS
from service.api.sign_in import sign_in_routes
from service.parts import Parts

NOW = datetime(2026, 12, 2, 10, 0, tzinfo=UTC)
METHODS = ["GET", "POST", "DELETE"]
# What a browser says of a write that another site's page makes.
CROSS_SITE = [
    {"Sec-Fetch-Site": "cross-site"},
    {"Sec-Fetch-Site": "same-site"},
    {"Origin": "https://elsewhere.example"},
    {"Origin": "null"},
    {"Origin": "http://localhost:8001"},
    {"Sec-Fetch-Site": "same-origin", "Origin": "https://elsewhere.example"},
]


class Clock:
    """A clock that a test sets."""

    def __init__(self) -> None:
        self.now = NOW

    def __call__(self) -> datetime:
        return self.now

    def go_on(self, **how_long: float) -> None:
        self.now += timedelta(**how_long)


def guarded_app(parts: Parts, clock: Clock | None = None) -> Flask:
    """An app with a route /SCOPE for each scope, /any, /loopback, /open, /counted and /undeclared."""
    clock = clock or Clock()
    app = Flask("guarded", static_folder=None)
    answer_failures(app, parts.settings.limits)
    guard(app, parts, Rates(parts.settings.access), clock)
    app.register_blueprint(key_routes(parts, clock))
    app.register_blueprint(sign_in_routes(parts, clock))

    def tell(asker: Asker | None) -> dict[str, Any]:
        return {"asker": asker.key_id if asker else None, "read": len(request.get_data())}

    def route(path: str, view: Any) -> None:
        app.add_url_rule(path, endpoint=path, view_func=view, methods=METHODS)

    for scope in Scope:
        route(f"/{scope}", needs(scope)(tell))
    route("/any", needs_any_key(tell))
    route("/loopback", open_on_loopback(Scope.ORDER)(lambda: tell(asker_or_none())))
    route("/open", open_to_all(lambda: tell(asker_or_none())))
    route("/counted", open_but_counted(lambda: tell(asker_or_none())))
    route("/undeclared", lambda: Response("secret"))
    return app


def new_key(parts: Parts, *scopes: Scope, owner: str | None = None, is_test: bool = False) -> NewKey:
    """A key of the shop, or of an owner by title."""
    asked = KeyAsked(title="a key", scopes=frozenset(scopes), is_test=is_test)
    with parts.store.writing() as session:
        hold_access(session)
        whose = the_shop(session, NOW) if owner is None else owner_titled(session, owner, NOW)
        return make_key(session, whose, asked, NOW)


def bearing(key: NewKey | str) -> dict[str, str]:
    """The header fields that show a key."""
    return {"Authorization": f"Bearer {key if isinstance(key, str) else key.secret}"}


def signed_in(http: FlaskClient, key: NewKey) -> str:
    """Sign a client in as a key; gives the token of its writes."""
    assert http.post("/sign-in", data={"key": key.secret}).status_code == 303
    token = http.get("/v1/keys/me").json["csrf_token"]  # type: ignore[index]  # an answer in JSON
    assert isinstance(token, str)
    return token


def problem_of(answer: TestResponse, name: str) -> dict[str, Any]:
    """The problem of a kind that an answer must tell."""
    assert answer.content_type == "application/problem+json"
    told: Any = answer.json
    assert (told["type"], answer.status_code) == (f"/problems/{name}", PROBLEMS[name].status)
    return dict(told)
