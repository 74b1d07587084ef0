"""Sounds go with the order they were made of: every plan's, whoever heard them, and what is being made meanwhile."""

from collections.abc import Iterator
from typing import Any

import pytest

from service.api import hearing_shelf
from tests.service.api.described import World
from tests.service.api.test_hearings import app_of, get, kept_in
from tests.service.conftest import parts_of
from tests.service.shop import planned


@pytest.fixture
def world(tmp_path_factory: pytest.TempPathFactory) -> Iterator[World]:
    parts = parts_of(tmp_path_factory.mktemp("hearings"))
    yield app_of(parts)
    parts.store.close()


def ready(world: World) -> str:
    return str(world.given("a ready order")["order_id"])


def planned_anew(world: World, order_id: str, title: str) -> None:
    world.post(f"/v1/orders/{order_id}/replan", json={"settings": {"title": title}})
    planned(world.parts, order_id)


def erase(world: World, order_id: str) -> int:
    world.post(f"/v1/orders/{order_id}/cancel", json={"reason": "not wanted"})
    return world.http.delete(f"/v1/orders/{order_id}", headers=world.headers).status_code


def test_an_erased_order_takes_the_sounds_of_all_its_plans_and_of_its_proofs_at_once(world: World) -> None:
    order_id = ready(world)
    proof = world.post(f"/v1/orders/{order_id}/proof-links")["href"].rpartition("/")[2]
    planned_anew(world, order_id, "Another name")
    heard = [
        f"/v1/orders/{order_id}/plans/1/files/1/hearing.wav",
        f"/v1/orders/{order_id}/plans/2/files/1/hearing.mid",
        f"/v1/proofs/{proof}/files/1/hearing.wav?of=written",
    ]
    other = ready(world)
    planned_anew(world, other, "Still there")
    given = [get(world, path).status_code for path in (*heard, f"/v1/orders/{other}/plans/2/files/1/hearing.mid")]
    before = kept_in(world.parts)

    erased = erase(world, order_id)

    assert (given, erased) == ([200] * 4, 200)
    assert (len(before), len(kept_in(world.parts))) == (4, 1)
    assert [get(world, path).status_code for path in heard] == [404] * 3
    assert len(kept_in(world.parts)) == 1


@pytest.mark.parametrize("whose", ["order", "proof"])
def test_a_sound_made_while_its_order_is_erased_is_not_given_and_not_kept(
    world: World, monkeypatch: pytest.MonkeyPatch, whose: str
) -> None:
    order_id = ready(world)
    proof = world.post(f"/v1/orders/{order_id}/proof-links")["href"].rpartition("/")[2]
    write = hearing_shelf.write_hearing

    def erased_meanwhile(*told: Any) -> None:
        write(*told)
        assert erase(world, order_id) == 200

    monkeypatch.setattr(hearing_shelf, "write_hearing", erased_meanwhile)
    base = f"/v1/orders/{order_id}/plans/1" if whose == "order" else f"/v1/proofs/{proof}"
    answer = get(world, f"{base}/files/1/hearing.mid")

    assert answer.status_code == 404
    assert kept_in(world.parts) == []
