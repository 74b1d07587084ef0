"""A shop's program, with the client alone, over real processes: order, wait, release, download, digests, events."""

import hashlib
from collections.abc import Iterator
from importlib.resources import files

import pytest

from service.client.calling import ProblemError
from service.client.client import Client, DamagedFileError
from tests.service.api.running import Running, running
from tests.service.conftest import sqlite_first

pytestmark = sqlite_first("a client, which sees no database")
DEMO = files("service.demo").joinpath("tune.mid").read_bytes()
DECIDED = frozenset({"ready", "attention", "failed"})
WITHIN_S = 120.0


@pytest.fixture(scope="module")
def service(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[Running]:
    with running(tmp_path_factory.mktemp("shop"), module_database_url, with_worker=True) as started:
        yield started


@pytest.fixture
def client(service: Running) -> Client:
    return Client(service.url, service.key)


def test_a_tune_becomes_files_that_are_what_the_plan_tells(client: Client) -> None:
    placed = client.order(DEMO, {"movement": "fernhollow-31", "quantity": 2, "reference": "W-1001"})
    planned = client.wait_for(placed["id"], DECIDED, within_s=WITHIN_S)
    assert planned["state"] == "ready"
    plan = planned["plan"]
    assert plan is not None
    kept_back = [file for file in plan["files"] if file["for_cutting"]]
    assert {file["href"] for file in kept_back} == {None}
    with pytest.raises(DamagedFileError, match="is kept back till the order is released"):
        client.download(kept_back[0])

    released = client.release_order(placed["id"], {"by": "A. Maker", "plan": str(plan["tag"])})
    assert released["plan"] is not None
    brought = {file["name"]: client.download(file) for file in released["plan"]["files"]}

    assert {"disc.dxf", "disc.svg", "layout.json"} <= brought.keys()
    for file in released["plan"]["files"]:
        assert hashlib.sha256(brought[file["name"]]).hexdigest() == file["sha256"]
        assert len(brought[file["name"]]) == file["byte_count"]
    told = [event["type"] for event in client.events() if event["order"] == placed["id"]]
    assert told == ["order.received", "order.planned", "order.ready", "order.released"]


def test_a_file_that_was_damaged_on_its_way_is_not_taken(client: Client) -> None:
    placed = client.order(DEMO, {"movement": "fernhollow-31"})
    plan = client.wait_for(placed["id"], DECIDED, within_s=WITHIN_S)["plan"]
    assert plan is not None
    preview = next(file for file in plan["files"] if file["name"] == "disc.svg")

    with pytest.raises(DamagedFileError, match=r"disc\.svg has the digest"):
        client.download({**preview, "sha256": "0" * 64})


def test_a_refusal_is_told_with_its_kind_and_the_id_of_the_request(client: Client) -> None:
    with pytest.raises(ProblemError) as caught:
        client.tell_order("order_" + "0" * 32)

    assert (caught.value.status, caught.value.kind) == (404, "order-unknown")
    assert caught.value.request_id.startswith("client-")
    assert caught.value.told["request_id"] == caught.value.request_id


def test_a_pair_of_orders_is_listed_by_reference(client: Client) -> None:
    made = client.order(DEMO, {"movement": "fernhollow-31", "reference": "W-2002"})

    found = client.list_orders({"reference": "W-2002"})["orders"]

    assert [order["id"] for order in found] == [made["id"]]
