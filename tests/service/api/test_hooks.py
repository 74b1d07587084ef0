"""/v1/hooks, /v1/deliveries and /v1/event-types: hooks made, seen, changed and tried by whom they concern."""

from collections.abc import Iterator
from dataclasses import replace
from datetime import datetime
from ipaddress import ip_network
from typing import Any

import pytest
from flask import Flask
from flask.testing import FlaskClient
from sqlalchemy import select
from standardwebhooks import Webhook
from werkzeug.test import TestResponse

from service.access.rates import Rates
from service.access.scopes import Scope
from service.api.asking import guard
from service.api.failures import answer_failures
from service.api.hooks import hook_routes
from service.hooks.telling import deliver_due
from service.limits import HOOK_LIMITS
from service.moments import utc_now
from service.orders.states import EventType
from service.parts import Parts
from service.settings import HookSettings
from service.store.tables import Delivery, Hook
from tests.service.api.guarded import Clock, bearing, new_key, problem_of
from tests.service.hooks.receivers import Receiver, listening
from tests.service.hooks.rows import new_order, place, reaching_loopback, tell_of

URL = "https://shop.example/told"
NEVER_MADE = "hook_" + 32 * "0"
NEVER_SENT = "msg_" + 32 * "0"


class Caller:
    """A key, and a client that shows it."""

    def __init__(self, http: FlaskClient, parts: Parts, *scopes: Scope, owner: str | None = None, **kind: bool) -> None:
        key = new_key(parts, *scopes, owner=owner, **kind)
        self.owner_id = key.told.owner.id
        self._http = http
        self._headers = {**bearing(key), "Request-Id": "the-same"}

    def __call__(self, method: str, path: str, body: Any = None) -> TestResponse:
        more = {} if body is None else {"json": body}
        return self._http.open(path, method=method, headers=self._headers, **more)

    def made(self, **body: Any) -> dict[str, Any]:
        answer = self("POST", "/v1/hooks", {"url": URL, **body})
        assert answer.status_code == 201, answer.text
        return told(answer)


def told(answer: TestResponse) -> dict[str, Any]:
    value: Any = answer.json
    return dict(value)


def app_of(parts: Parts, clock: Clock | None = None) -> FlaskClient:
    app = Flask("hooks", static_folder=None)
    answer_failures(app, parts.settings.limits)
    now = clock or utc_now
    guard(app, parts, Rates(parts.settings.access), now)
    app.register_blueprint(hook_routes(parts, now))
    return app.test_client()


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def http(any_parts: Parts, clock: Clock) -> FlaskClient:
    return app_of(any_parts, clock)


@pytest.fixture
def bellgrove(http: FlaskClient, any_parts: Parts) -> Caller:
    return Caller(http, any_parts, Scope.READ, Scope.ORDER, owner="Bellgrove")


@pytest.fixture
def receiver() -> Iterator[Receiver]:
    with listening(Receiver()) as listens:
        yield listens


def test_a_hook_is_made_and_its_secret_shown_then_and_never_again(bellgrove: Caller) -> None:
    answer = bellgrove("POST", "/v1/hooks", {"url": URL, "types": ["order.ready"], "for_all_orders": False})

    made = told(answer)
    secret = made.pop("secret")
    assert (answer.status_code, answer.headers["Cache-Control"]) == (201, "no-store")
    assert answer.headers["Location"] == f"/v1/hooks/{made['id']}"
    assert secret.startswith("whsec_")
    assert made == {
        "id": made["id"],
        "url": URL,
        "types": ["order.ready"],
        "for_all_orders": False,
        "is_test": False,
        "created_at": "2026-12-02T10:00:00.000000Z",
        "disabled_at": None,
        "disabled_because": None,
        "quiet_until": None,
        "old_secrets_until": None,
    }
    assert told(bellgrove("GET", answer.headers["Location"])) == made
    assert told(bellgrove("GET", "/v1/hooks")) == {"hooks": [made]}


def test_a_hook_that_says_little_is_told_everything(bellgrove: Caller) -> None:
    made = bellgrove.made()

    assert (made["types"], made["for_all_orders"]) == (None, True)


@pytest.mark.parametrize(
    ("body", "pointer", "message"),
    [
        ({}, "/url", "this field is needed"),
        ({"url": ""}, "/url", "String should have at least 1 character, got ''"),
        ({"url": "http://shop.example/"}, "/url", "the URL begins with 'http'; taken is https"),
        ({"url": "https://10.1.2.3/"}, "/url", "10.1.2.3 is not a public address; only public addresses are told"),
        ({"url": "https://169.254.169.254/latest"}, "/url", "169.254.169.254 is not a public address"),
        ({"url": "https://0x7f000001/"}, "/url", "the host '0x7f000001' is neither a name such as shop.example"),
        ({"url": URL, "types": []}, "/types", "List should have at least 1 item"),
        ({"url": URL, "types": ["order.ready", "order.lost"]}, "/types/1", "Input should be 'order.received'"),
        ({"url": URL, "types": ["hook.test"]}, "/types/0", "Input should be 'order.received'"),
        ({"url": URL, "for_all_orders": "yes"}, "/for_all_orders", "true or false is needed, got 'yes'"),
        ({"url": URL, "secret": "whsec_mine"}, "/secret", "no such field; remove it or check its spelling"),
    ],
)
def test_a_hook_that_cannot_be_is_refused_with_the_place_of_each_fault(
    parts: Parts, body: Any, pointer: str, message: str
) -> None:
    caller = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)

    problem = problem_of(caller("POST", "/v1/hooks", body), "document-invalid")

    (fault,) = problem["invalid_params"]
    assert fault["pointer"] == pointer
    assert message in fault["detail"]
    assert told(caller("GET", "/v1/hooks"))["hooks"] == []


def test_a_network_of_the_shops_own_is_for_the_shop_alone(parts: Parts) -> None:
    parts = replace(parts, settings=replace(parts.settings, hooks=HookSettings(networks=(ip_network("10.1.0.0/16"),))))
    http = app_of(parts)
    shop = Caller(http, parts, Scope.ORDER)
    other = Caller(http, parts, Scope.ORDER, owner="Bellgrove")

    assert shop("POST", "/v1/hooks", {"url": "https://10.1.2.3/"}).status_code == 201
    problem_of(other("POST", "/v1/hooks", {"url": "https://10.1.2.3/"}), "document-invalid")


def test_making_a_hook_again_makes_no_two_and_tells_which_there_is(bellgrove: Caller) -> None:
    made = bellgrove.made()

    problem = problem_of(bellgrove("POST", "/v1/hooks", {"url": URL, "types": ["order.ready"]}), "hook-exists")

    assert problem["hook"] == made["id"]
    assert len(told(bellgrove("GET", "/v1/hooks"))["hooks"]) == 1


def test_there_are_as_many_hooks_as_there_may_be(parts: Parts) -> None:
    caller = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    for number in range(HOOK_LIMITS.per_owner):
        caller.made(url=f"https://shop.example/{number}")

    problem = problem_of(caller("POST", "/v1/hooks", {"url": URL}), "too-many-hooks")

    assert problem["detail"] == "there are 50 hooks; 50 are the most"


def test_a_hook_is_changed_in_what_is_named_and_in_nothing_else(bellgrove: Caller) -> None:
    made = bellgrove.made(types=["order.ready"])
    made.pop("secret")
    path = f"/v1/hooks/{made['id']}"

    for body in ({}, {"url": "https://other.example/"}, {"types": None}, {"for_all_orders": False}):
        answer = bellgrove("PATCH", path, body)
        assert answer.status_code == 200, answer.text
        made |= body
        assert told(answer) == told(bellgrove("GET", path)) == made


@pytest.mark.parametrize(
    ("body", "pointer"),
    [
        ({"url": None}, "/url"),
        ({"for_all_orders": None}, "/for_all_orders"),
        ({"url": "https://[::1]/"}, "/url"),
        ({"types": []}, "/types"),
        ({"is_test": True}, "/is_test"),
        ({"disabled_at": None}, "/disabled_at"),
    ],
)
def test_a_change_that_cannot_be_is_refused(parts: Parts, body: Any, pointer: str) -> None:
    caller = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    made = caller.made()
    made.pop("secret")

    problem = problem_of(caller("PATCH", f"/v1/hooks/{made['id']}", body), "document-invalid")

    assert [fault["pointer"] for fault in problem["invalid_params"]] == [pointer]
    assert told(caller("GET", f"/v1/hooks/{made['id']}")) == made


def test_a_hook_is_not_changed_to_the_address_of_another(bellgrove: Caller) -> None:
    one, other = bellgrove.made(), bellgrove.made(url="https://other.example/")

    problem = problem_of(bellgrove("PATCH", f"/v1/hooks/{other['id']}", {"url": URL}), "hook-exists")

    assert problem["hook"] == one["id"]
    assert bellgrove("PATCH", f"/v1/hooks/{one['id']}", {"url": URL}).status_code == 200


def test_a_deleted_hook_leaves_no_address_and_no_secret_behind(any_parts: Parts, bellgrove: Caller) -> None:
    made = bellgrove.made()
    place(any_parts, bellgrove.owner_id, hook_id=made["id"])

    answers = [bellgrove("DELETE", f"/v1/hooks/{made['id']}") for _ in range(2)]

    assert [(answer.status_code, answer.data) for answer in answers] == [(204, b"")] * 2
    problem_of(bellgrove("GET", f"/v1/hooks/{made['id']}"), "hook-unknown")
    problem_of(bellgrove("PATCH", f"/v1/hooks/{made['id']}", {}), "hook-unknown")
    assert told(bellgrove("GET", "/v1/hooks")) == {"hooks": []}
    with any_parts.store.reading() as session:
        row = session.get_one(Hook, made["id"])
        assert (row.url, row.secrets["current"]) == ("", "")
        assert session.scalars(select(Delivery.state)).all() == ["failed"]
    assert bellgrove.made()["id"] != made["id"]  # the address is free again


def test_a_new_secret_is_shown_once_and_the_old_one_holds_for_a_day(
    any_parts: Parts, bellgrove: Caller, clock: Clock
) -> None:
    made = bellgrove.made()
    path = f"/v1/hooks/{made['id']}"

    answer = bellgrove("POST", f"{path}/secret")

    rotated = told(answer)
    assert (answer.status_code, answer.headers["Cache-Control"]) == (200, "no-store")
    assert rotated["secret"].startswith("whsec_")
    assert rotated["secret"] != made["secret"]
    assert rotated["old_secrets_until"] == "2026-12-03T10:00:00.000000Z"
    assert "secret" not in told(bellgrove("GET", path))
    clock.go_on(hours=24)
    assert told(bellgrove("GET", path))["old_secrets_until"] is None


def test_how_long_the_old_secret_holds_can_be_said(bellgrove: Caller) -> None:
    path = f"/v1/hooks/{bellgrove.made()['id']}/secret"

    assert told(bellgrove("POST", path, {"old_valid_hours": 2}))["old_secrets_until"] == "2026-12-02T12:00:00.000000Z"
    assert told(bellgrove("POST", path, {}))["old_secrets_until"] == "2026-12-03T10:00:00.000000Z"
    assert told(bellgrove("POST", path, {"old_valid_hours": 0}))["old_secrets_until"] is None
    for wrong in (-1, 169, 1.5, "1"):
        problem_of(bellgrove("POST", path, {"old_valid_hours": wrong}), "document-invalid")


def test_a_test_is_sent_to_the_hook_and_what_came_of_it_is_told(parts: Parts, receiver: Receiver) -> None:
    parts = reaching_loopback(parts)
    shop = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    made = shop.made(url=receiver.url)

    answer = shop("POST", f"/v1/hooks/{made['id']}/test")

    assert answer.status_code == 202
    assert told(answer)["state"] == "waiting"
    assert told(answer)["message"] == {
        "type": "hook.test",
        "timestamp": told(answer)["created_at"],
        "data": {"hook": made["id"]},
    }
    deliver_due(parts, utc_now())
    (got,) = receiver.got
    assert Webhook(made["secret"]).verify(got.body, got.headers) == told(answer)["message"]
    sent = told(shop("GET", answer.headers["Location"]))
    assert (sent["state"], sent["tries"], sent["last_status"]) == ("delivered", 1, 204)
    assert (sent["id"], sent["event"]) == (got.headers["webhook-id"], None)


def test_a_message_that_was_delivered_is_sent_again_when_asked(parts: Parts, receiver: Receiver) -> None:
    parts = reaching_loopback(parts)
    shop = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    hook = shop.made(url=receiver.url)
    place(parts, shop.owner_id)
    deliver_due(parts, utc_now())
    (first,) = told(shop("GET", f"/v1/hooks/{hook['id']}/deliveries"))["deliveries"]

    answer = shop("POST", f"/v1/deliveries/{first['id']}/redeliver")

    assert (answer.status_code, told(answer)["state"]) == (202, "waiting")
    assert answer.headers["Location"] == f"/v1/deliveries/{first['id']}"
    deliver_due(parts, utc_now())
    assert [got.headers["webhook-id"] for got in receiver.got] == [first["id"]] * 2
    assert len({got.body for got in receiver.got}) == 1


def test_a_hook_that_is_gone_is_turned_on_again_by_its_owner(parts: Parts, receiver: Receiver) -> None:
    parts = reaching_loopback(parts)
    shop = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    path = f"/v1/hooks/{shop.made(url=receiver.url)['id']}"
    receiver.answer = lambda _got: (410, {})
    place(parts, shop.owner_id)
    deliver_due(parts, utc_now())

    off = told(shop("GET", path))
    assert off["disabled_at"] is not None
    assert off["disabled_because"] == "answered 410 Gone"
    problem = problem_of(shop("POST", f"{path}/test"), "hook-off")
    assert problem["detail"].endswith("is turned off: it answered 410 Gone")
    (failed,) = told(shop("GET", f"{path}/deliveries?state=failed"))["deliveries"]
    problem_of(shop("POST", f"/v1/deliveries/{failed['id']}/redeliver"), "hook-off")
    for _ in range(2):
        on = told(shop("POST", f"{path}/enable"))
        assert (on["disabled_at"], on["disabled_because"]) == (None, None)
    assert shop("POST", f"{path}/test").status_code == 202


def test_deliveries_are_listed_in_pages_the_newest_first(any_parts: Parts, bellgrove: Caller) -> None:
    path: str | None = f"/v1/hooks/{bellgrove.made()['id']}/deliveries?limit=3"
    with any_parts.store.writing() as session:
        order = new_order(bellgrove.owner_id)
        events = [tell_of(session, order).seq for _ in range(7)]

    pages = []
    while path is not None:
        answer = bellgrove("GET", path)
        pages.append([one["event"] for one in told(answer)["deliveries"]])
        link = answer.headers.get("Link")
        path = None if link is None else link.removeprefix("<").removesuffix('>; rel="next"')

    assert [len(page) for page in pages] == [3, 3, 1]
    assert sorted(event for page in pages for event in page) == events


@pytest.mark.parametrize("query", ["state=lost", "limit=0", "limit=201", "after=x", "page=2", "limit=1&limit=2"])
def test_a_query_that_says_nothing_is_refused(parts: Parts, query: str) -> None:
    caller = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)

    answer = caller("GET", f"/v1/hooks/{caller.made()['id']}/deliveries?{query}")

    assert problem_of(answer, "parameter-invalid")["parameter"] == query.partition("=")[0]


def every_request(hook: str, delivery: str) -> list[tuple[str, str, Any]]:
    return [
        ("GET", f"/v1/hooks/{hook}", None),
        ("PATCH", f"/v1/hooks/{hook}", {"for_all_orders": False}),
        ("DELETE", f"/v1/hooks/{hook}", None),
        ("POST", f"/v1/hooks/{hook}/test", None),
        ("POST", f"/v1/hooks/{hook}/secret", None),
        ("POST", f"/v1/hooks/{hook}/enable", None),
        ("GET", f"/v1/hooks/{hook}/deliveries", None),
        ("GET", f"/v1/deliveries/{delivery}", None),
        ("POST", f"/v1/deliveries/{delivery}/redeliver", None),
    ]


def test_another_owners_hooks_and_deliveries_are_as_if_they_never_were(
    any_parts: Parts, http: FlaskClient, bellgrove: Caller
) -> None:
    made = bellgrove.made()
    delivery = told(bellgrove("POST", f"/v1/hooks/{made['id']}/test"))["id"]
    strangers = [
        Caller(http, any_parts, *Scope, owner="Larkfield"),
        Caller(http, any_parts, *Scope),  # the shop sees everybody's orders, but their hooks are their own
        Caller(http, any_parts, *Scope, owner="Bellgrove", is_test=True),
    ]

    for stranger in strangers:
        assert told(stranger("GET", "/v1/hooks")) == {"hooks": []}
        theirs, never = every_request(made["id"], delivery), every_request(NEVER_MADE, NEVER_SENT)
        for one, other in zip(theirs, never, strict=True):
            answer, as_never = stranger(*one), stranger(*other)
            problem_of(answer, "delivery-unknown" if "deliveries/" in one[1] else "hook-unknown")
            hidden = answer.data.replace(made["id"].encode(), NEVER_MADE.encode())
            assert hidden.replace(delivery.encode(), NEVER_SENT.encode()) == as_never.data
    assert told(bellgrove("GET", f"/v1/hooks/{made['id']}"))["for_all_orders"] is True
    assert told(bellgrove("GET", f"/v1/deliveries/{delivery}"))["state"] == "waiting"


def test_hooks_are_read_with_one_scope_and_changed_with_another(
    any_parts: Parts, http: FlaskClient, bellgrove: Caller
) -> None:
    hook = bellgrove.made()["id"]
    delivery = told(bellgrove("POST", f"/v1/hooks/{hook}/test"))["id"]
    requests = [
        ("GET", "/v1/hooks", None),
        ("POST", "/v1/hooks", {"url": "https://other.example/"}),
        *every_request(hook, delivery),
    ]
    callers = {scope: Caller(http, any_parts, scope, owner="Bellgrove") for scope in Scope}

    for method, path, body in requests:
        needed = Scope.READ if method == "GET" else Scope.ORDER
        for scope, caller in callers.items():
            if scope is not needed:
                assert problem_of(caller(method, path, body), "scope-missing")["scope"] == needed
    for method, path, body in requests[:2] + requests[3:4]:
        needed = Scope.READ if method == "GET" else Scope.ORDER
        assert callers[needed](method, path, body).status_code < 300


def test_the_types_of_messages_are_told_to_all_with_what_they_mean(http: FlaskClient) -> None:
    answer = http.get("/v1/event-types")

    types = {one["type"]: one["meaning"] for one in told(answer)["event_types"]}
    assert set(types) == {*EventType, "hook.test"}
    assert all(meaning.endswith(".") for meaning in types.values())


def test_a_hook_of_a_test_key_says_so(any_parts: Parts, http: FlaskClient) -> None:
    tests = Caller(http, any_parts, Scope.ORDER, Scope.READ, owner="Bellgrove", is_test=True)

    made = tests.made()

    assert made["is_test"] is True
    assert [hook["id"] for hook in told(tests("GET", "/v1/hooks"))["hooks"]] == [made["id"]]


def test_a_hook_that_is_overrun_is_seen_to_be_quiet(parts: Parts, receiver: Receiver) -> None:
    parts = reaching_loopback(parts)
    shop = Caller(app_of(parts), parts, Scope.ORDER, Scope.READ)
    path = f"/v1/hooks/{shop.made(url=receiver.url)['id']}"
    receiver.answer = lambda _got: (429, {"Retry-After": "600"})
    place(parts, shop.owner_id)
    deliver_due(parts, utc_now())

    quiet = told(shop("GET", path))["quiet_until"]

    wait_s = (datetime.fromisoformat(quiet) - utc_now()).total_seconds()
    assert 580 < wait_s <= 600
