"""What /metrics tells, read back by the parser of Prometheus' own library, and to whom."""

from collections.abc import Callable, Iterator
from dataclasses import replace
from datetime import timedelta
from typing import Any

import pytest
from flask.testing import FlaskClient
from prometheus_client.parser import text_string_to_metric_families
from sqlalchemy import update

from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.background.stage_times import note_stage_times
from service.parts import Parts
from service.settings import AccessSettings
from service.store.tables import Order
from tests.service.api.guarded import bearing, new_key
from tests.service.fakes import FakePlanner
from tests.service.shop import open_shop, placed

FAR = {"REMOTE_ADDR": "203.0.113.9"}
Start = Callable[..., FlaskClient]
Samples = dict[tuple[str, frozenset[tuple[str, str]]], float]


@pytest.fixture
def started() -> Iterator[Start]:
    """Starts services, and closes what they opened."""
    apps = []

    def start(parts: Parts, **access: Any) -> FlaskClient:
        wanted: Any = {"listens_on_loopback": True, **access}
        settings = replace(parts.settings, access=AccessSettings(**wanted))
        apps.append(create_app(settings, planner=FakePlanner()))
        return apps[-1].test_client()

    yield start
    for app in apps:
        for opened in app.extensions[OPENED]:
            opened.close()


def samples(client: FlaskClient) -> Samples:
    answer = client.get("/metrics")
    assert answer.status_code == 200, answer.text
    return {
        (one.name, frozenset(one.labels.items())): one.value
        for family in text_string_to_metric_families(answer.text)
        for one in family.samples
    }


def value(read: Samples, name: str, **labels: str) -> float | None:
    return read.get((name, frozenset(labels.items())))


def test_orders_are_counted_by_state_and_the_oldest_is_told(any_parts: Parts, started: Start) -> None:
    open_shop(any_parts)
    for _ in range(3):
        order_id = placed(any_parts).id
    with any_parts.store.writing() as session:
        long_ago = any_parts.store.now(session) - timedelta(seconds=90)
        session.execute(update(Order).where(Order.id == order_id).values(updated_at=long_ago))

    read = samples(started(any_parts))

    assert value(read, "discwright_orders", state="received") == 3
    assert value(read, "discwright_orders", state="failed") == 0
    oldest_s = value(read, "discwright_oldest_waiting_order_seconds")
    assert oldest_s is not None
    assert 90 <= oldest_s < 150
    assert value(read, "discwright_queue_up") == 1
    assert value(read, "discwright_hook_messages", state="failed") == 0


def test_planning_times_add_up_over_workers(any_parts: Parts, started: Start) -> None:
    note_stage_times(any_parts.store, {"files": 0.2, "keeping": 0.01})
    note_stage_times(any_parts.store, {"files": 2.0})
    note_stage_times(any_parts.store, {"files": 400.0})

    read = samples(started(any_parts))

    name = "discwright_planning_seconds"
    # 0.2 s is at most 0.25; 2.0 at most 2.5; 400 longer than the longest class of 300
    assert value(read, f"{name}_bucket", stage="files", le="0.1") == 0
    assert value(read, f"{name}_bucket", stage="files", le="0.25") == 1
    assert value(read, f"{name}_bucket", stage="files", le="2.5") == 2
    assert value(read, f"{name}_bucket", stage="files", le="300") == 2
    assert value(read, f"{name}_bucket", stage="files", le="+Inf") == 3
    assert value(read, f"{name}_sum", stage="files") == pytest.approx(402.2)
    assert value(read, f"{name}_count", stage="keeping") == 1


def test_requests_are_counted_by_route_and_not_by_address(parts: Parts, started: Start) -> None:
    client = started(parts)
    for path in ("/v1/proofs/a-secret-token", "/v1/proofs/another", "/nothing/here", "/v1/limits"):
        client.get(path)
    client.open("/v1/limits", method="INVENTED")

    read = samples(client)
    text = client.get("/metrics").text

    name = "discwright_requests_total"
    assert value(read, name, method="GET", route="/v1/proofs/<text>", status="404") == 2
    assert value(read, name, method="GET", route="none", status="404") == 1
    assert value(read, name, method="GET", route="/v1/limits", status="200") == 1
    assert value(read, name, method="other", route="none", status="405") == 1
    assert value(read, "discwright_request_seconds_count", method="GET", route="/v1/limits") == 1
    assert "a-secret-token" not in text


@pytest.mark.parametrize("open_layouts", [None, True])
def test_who_asks_from_elsewhere_needs_a_key_with_admin(parts: Parts, open_layouts: Any, started: Start) -> None:
    client = started(parts, open_layouts=open_layouts)
    admin, reader = (new_key(parts, scope) for scope in (Scope.ADMIN, Scope.READ))

    without = client.get("/metrics", environ_overrides=FAR)

    assert without.status_code == 401
    assert without.json["type"] == "/problems/key-missing"
    assert without.headers["WWW-Authenticate"].startswith("Bearer ")
    assert client.get("/metrics", environ_overrides=FAR, headers=bearing(reader)).status_code == 403
    assert client.get("/metrics", environ_overrides=FAR, headers=bearing(admin)).status_code == 200


def test_on_loopback_a_service_that_listens_elsewhere_too_needs_a_key(parts: Parts, started: Start) -> None:
    client = started(parts, listens_on_loopback=False, open_layouts=True)

    assert client.get("/metrics").status_code == 401


def test_a_queue_that_is_away_is_told_and_all_else_is_counted(any_parts: Parts, started: Start) -> None:
    places = replace(any_parts.settings.places, queue_url="redis://127.0.0.1:1/0")  # nothing listens on port 1
    away = replace(any_parts, settings=replace(any_parts.settings, places=places))

    read = samples(started(away))

    assert value(read, "discwright_queue_up") == 0
    assert value(read, "discwright_queue_length") is None
    assert value(read, "discwright_orders", state="received") == 0
