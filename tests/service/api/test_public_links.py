"""Where proof links lead: a request's Host is believed where it names this machine alone."""

from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace

import pytest

from service.parts import Parts
from tests.service.api.test_orders import Shop


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def link(shop: Shop, host: str) -> str:
    order_id = shop.ready()
    answer = shop.http.post(f"/v1/orders/{order_id}/proof-links", headers={**shop.web, "Host": host})
    assert answer.status_code == 201
    return str(answer.json["href"])  # type: ignore[index]  # an answer in JSON


@pytest.mark.parametrize("host", ["evil.example", "evil.example:8000", "10.0.0.1", "localhost.evil.example", "[::2]"])
def test_a_host_that_anyone_may_have_written_stands_in_no_link(shop: Shop, host: str) -> None:
    assert link(shop, host).startswith("/proof/")


@pytest.mark.parametrize("host", ["localhost:8000", "127.0.0.1:8000", "[::1]:8000", "shop.localhost"])
def test_a_link_for_this_machine_names_it(shop: Shop, host: str) -> None:
    assert link(shop, host).startswith(f"http://{host}/proof/")


@pytest.mark.parametrize("public_url", ["https://discs.example.com", "https://discs.example.com/"])
def test_where_it_is_said_how_the_service_is_reached_every_link_leads_there(parts: Parts, public_url: str) -> None:
    places = replace(parts.settings.places, public_url=public_url)
    with closing(Shop(replace(parts, settings=replace(parts.settings, places=places)))) as shop:
        for host in ("evil.example", "localhost:8000"):
            assert link(shop, host).startswith("https://discs.example.com/proof/")


def test_a_link_that_is_a_path_leads_to_the_proof(shop: Shop) -> None:
    shown = shop.http.get(link(shop, "evil.example"), follow_redirects=True)  # a program is led on to the data

    assert shown.status_code == 200
    assert shown.json["reference"] == "W-1001"  # type: ignore[index]  # an answer in JSON
