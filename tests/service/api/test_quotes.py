"""Quotes over HTTP: a price that can be worked again by hand, kept until its time, and named by an order."""

import json
from collections.abc import Iterator
from dataclasses import replace
from datetime import datetime, timedelta
from decimal import ROUND_HALF_EVEN, Decimal
from io import BytesIO
from typing import Any

import pytest
from flask.testing import FlaskClient
from sqlalchemy import update
from werkzeug.test import TestResponse

from layout.documents import shipped_text
from service.access.scopes import Scope
from service.api.computing_queue import open_computing_queue
from service.app import OPENED, create_app
from service.orders.quoting import forget_quotes
from service.parts import Parts
from service.settings import AccessSettings
from service.store.columns import EPOCH
from service.store.tables import Quote
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.fakes import MANY
from tests.service.pricing import PRICED, PricingPlanner
from tests.service.shop import TUNE, WALK

RATES = {"currency": "EUR", "setup": "12.50", "per_minute": "1.80", "per_pierce": "0.05"}
FEEDS = {"cut_mm_per_s": 20.0, "rapid_mm_per_s": 200.0, "pierce_s": 0.6, "mark_mm_per_s": 100.0}
CUTTER = {**json.loads(shipped_text("fibre-laser")), "id": "our-laser", "rates": RATES, "feeds": FEEDS}
ORDER = {"movement": "fernhollow-31", "quantity": 3}


class Shop:
    """A service with a key of the shop and keys of two web shops."""

    def __init__(self, parts: Parts, planner: Any) -> None:
        access = AccessSettings(read_rate=MANY, write_rate=MANY)
        self.parts = replace(parts, settings=replace(parts.settings, access=access))
        self.planner = planner
        self.http: FlaskClient = create_app(self.parts.settings, planner=planner).test_client()
        self.shop = bearing(new_key(parts, *Scope))
        self.web = bearing(new_key(parts, Scope.READ, Scope.ORDER, owner="Bellgrove"))
        self.other = bearing(new_key(parts, Scope.READ, Scope.ORDER, owner="Thornbury"))

    def post(
        self, what: str, order: dict[str, Any], *, cutter: Any = None, who: Any = None, key: str | None = None
    ) -> TestResponse:
        form: dict[str, Any] = {"tune": (BytesIO(TUNE), "a.mid"), "order": json.dumps(order)}
        if cutter is not None:
            form["cutter"] = json.dumps(cutter)
        once = {} if key is None else {"Idempotency-Key": key}
        return self.http.post(f"/v1/{what}", data=form, headers={**(who or self.web), **once})

    def quoted(self, order: dict[str, Any] = ORDER, **more: Any) -> dict[str, Any]:
        answer = self.post("quotes", order, **more)
        assert answer.status_code == 201, answer.text
        return dict(answer.json)  # type: ignore[arg-type]  # an answer in JSON

    def close(self) -> None:
        for opened in self.http.application.extensions[OPENED]:
            opened.close()


@pytest.fixture
def shop(any_parts: Parts) -> Iterator[Shop]:
    opened = Shop(any_parts, PricingPlanner())
    yield opened
    opened.close()


def test_setting_up_is_asked_once_and_the_rest_for_each_copy(shop: Shop) -> None:
    answer = shop.post("quotes", ORDER)
    told: Any = answer.json

    assert (answer.status_code, answer.headers["Location"]) == (201, f"/v1/quotes/{told['id']}")
    # 12.50 + 3 × (1.96 + 0.20) = 12.50 + 6.48
    assert told["price"] == {"amount": "18.98", "currency": "EUR"}
    [disc] = told["discs"]
    assert (disc["once"], disc["each"], disc["amount"]) == ("12.50", "2.16", "18.98")
    assert shop.http.get(answer.headers["Location"], headers=shop.web).json == told


def test_each_disc_of_a_set_is_set_up_for(shop: Shop) -> None:
    told = shop.quoted({**ORDER, "settings": {"discs": 2}})

    assert [disc["number"] for disc in told["discs"]] == [1, 2]
    assert told["price"]["amount"] == "37.96"  # 2 × 18.98


def test_a_price_holds_for_as_long_as_the_setting_says(shop: Shop) -> None:
    told = shop.quoted()

    held = datetime.fromisoformat(told["valid_until"]) - datetime.fromisoformat(told["created_at"])
    assert held == timedelta(days=shop.parts.settings.work.quote_days)


def test_the_price_of_a_real_disc_can_be_worked_again_by_hand(any_parts: Parts) -> None:
    shop = Shop(any_parts, WALK)
    told = shop.quoted(cutter=CUTTER)
    shop.close()

    [disc] = told["discs"]
    rates = {"setup": "12.50", "machine time": "1.80", "pierces": "0.05"}
    assert {line["name"]: line["rate"] for line in disc["lines"]} == rates
    amounts = {
        line["name"]: (Decimal(line["quantity"]) * Decimal(line["rate"])).quantize(Decimal("0.01"), ROUND_HALF_EVEN)
        for line in disc["lines"]
    }
    assert {line["name"]: Decimal(line["amount"]) for line in disc["lines"]} == amounts
    by_hand = amounts["setup"] + 3 * (amounts["machine time"] + amounts["pierces"])
    assert (Decimal(told["price"]["amount"]), told["price"]["currency"]) == (by_hand, "EUR")
    assert by_hand > Decimal("12.50")


def test_a_quote_waits_for_its_turn_to_be_worked_out_and_is_refused_where_no_place_is_left(shop: Shop) -> None:
    open_computing_queue(shop.http.application, 0)

    problem_of(shop.post("quotes", ORDER), "service-busy")

    open_computing_queue(shop.http.application, 1)
    assert shop.post("quotes", ORDER).status_code == 201


@pytest.mark.parametrize(
    ("missing", "named"),
    [(["cutter.rates"], "cutter.rates"), (["cutter.feeds.cut_mm_per_s"], "cutter.feeds.cut_mm_per_s")],
)
def test_a_price_that_cannot_be_told_names_what_would_tell_it(shop: Shop, missing: list[str], named: str) -> None:
    shop.planner.priced = {**PRICED, "total": None, "not_stated": missing}

    told = problem_of(shop.post("quotes", ORDER), "not-priced")

    assert told["detail"] == f"no price can be told: not stated are {named}"


def test_an_order_names_its_quote(shop: Shop) -> None:
    quote = shop.quoted(cutter=CUTTER)

    placed = shop.post("orders", {**ORDER, "quote": quote["id"]}, cutter=CUTTER)

    assert (placed.status_code, placed.json["quote"]) == (202, quote["id"])  # type: ignore[index]


@pytest.mark.parametrize(
    "changed",
    [
        {"quantity": 4},
        {"movement": "mossbrook-67"},
        {"settings": {"title": "another"}},
        {"movement": {"id": "fernhollow-31", "revision": 2}},
    ],
)
def test_a_quote_holds_for_what_was_priced_alone(shop: Shop, changed: dict[str, Any]) -> None:
    quote = shop.quoted()

    told = problem_of(shop.post("orders", {**ORDER, **changed, "quote": quote["id"]}), "document-invalid")

    assert told["invalid_params"][0]["pointer"] in ("/quote", "/movement")


def test_a_quote_whose_time_is_over_holds_no_more(shop: Shop) -> None:
    quote = shop.quoted()
    with shop.parts.store.writing() as session:
        session.execute(update(Quote).values(valid_until=EPOCH))

    told = problem_of(shop.post("orders", {**ORDER, "quote": quote["id"]}), "document-invalid")

    assert told["invalid_params"] == [
        {"pointer": "/quote", "detail": "the quote held until 1970-01-01; ask for a new one"}
    ]


def test_a_quote_of_another_owner_is_as_one_that_never_was(shop: Shop) -> None:
    quote = shop.quoted()
    never = "quote_" + 32 * "0"

    for headers in (shop.other, shop.web):
        one = never if headers is shop.web else quote["id"]
        told = problem_of(shop.http.get(f"/v1/quotes/{one}", headers=headers), "order-unknown")
        assert told["detail"] == f"there is no quote {one!r}"
    told = problem_of(shop.post("orders", {**ORDER, "quote": quote["id"]}, who=shop.other), "document-invalid")
    assert told["invalid_params"][0]["detail"] == f"there is no quote {quote['id']!r}"
    assert shop.http.get(f"/v1/quotes/{quote['id']}", headers=shop.shop).status_code == 200


def test_a_quote_asked_for_twice_with_its_key_is_one_quote(shop: Shop) -> None:
    first, second = (shop.post("quotes", ORDER, key='"q-1"') for _ in range(2))

    assert (first.status_code, first.data) == (second.status_code, second.data)
    assert shop.planner.laid_out_count == 1
    problem_of(shop.post("quotes", {**ORDER, "quantity": 4}, key='"q-1"'), "key-reused")


@pytest.mark.parametrize("field", ["repeat_of", "quote"])
def test_a_quote_is_for_a_tune_that_is_sent_along(shop: Shop, field: str) -> None:
    told = problem_of(shop.post("quotes", {**ORDER, field: "order_" + 32 * "0"}), "document-invalid")

    assert told["invalid_params"][0]["pointer"] == f"/{field}"


def test_a_quote_needs_the_scope_to_order(shop: Shop) -> None:
    reader = bearing(new_key(shop.parts, Scope.READ, owner="Bellgrove"))

    assert problem_of(shop.post("quotes", ORDER, who=reader), "scope-missing")["scope"] == "order"


def test_a_quote_that_ended_long_ago_is_removed_unless_an_order_names_it(shop: Shop) -> None:
    kept, ended, holds = shop.quoted(), shop.quoted({**ORDER, "quantity": 5}), shop.quoted({**ORDER, "quantity": 6})
    assert shop.post("orders", {**ORDER, "quote": kept["id"]}).status_code == 202
    with shop.parts.store.writing() as session:
        session.execute(update(Quote).where(Quote.id != holds["id"]).values(valid_until=EPOCH))

    removed = forget_quotes(shop.parts.store, days=30)

    assert removed == 1
    codes = [shop.http.get(f"/v1/quotes/{one['id']}", headers=shop.web).status_code for one in (kept, ended, holds)]
    assert codes == [200, 404, 200]
