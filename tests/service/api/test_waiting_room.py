"""Places for requests that wait: how many there are, and how many of them one key may have."""

from collections.abc import Iterator
from contextlib import ExitStack, closing

import pytest
from werkzeug.test import TestResponse

from service.api.waiting_room import WaitingRoom, open_waiting_room
from service.parts import Parts
from tests.service.api.test_orders import Shop

WAITS = {"Prefer": "wait=1"}


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def stream(shop: Shop, order_id: str, headers: dict[str, str]) -> TestResponse:
    asked = {**headers, "Accept": "text/event-stream"}
    return shop.http.get(f"/v1/orders/{order_id}/events", headers=asked, buffered=False)


def test_one_key_takes_half_of_the_places_and_leaves_the_rest_to_others() -> None:
    room = WaitingRoom(5)

    of_one = [room.enter("one") for _ in range(5)]
    of_others = [room.enter(key_id) for key_id in ("two", "two", "three")]

    assert of_one == [True, True, True, False, False]  # 5 / 2, rounded up
    assert of_others == [True, True, False]  # all are taken


def test_a_place_that_is_given_back_is_the_key_s_own_again() -> None:
    room = WaitingRoom(2)
    assert [room.enter("one"), room.enter("one"), room.enter("two"), room.enter("three")] == [True, False, True, False]

    room.leave("one")

    assert [room.enter("two"), room.enter("one")] == [False, True]


@pytest.mark.parametrize(("places", "enters"), [(0, False), (1, True), (None, True)])
def test_a_room_of_no_places_one_place_and_any_number(places: int | None, enters: bool) -> None:  # noqa: FBT001 -- as pytest gives it
    assert WaitingRoom(places).enter("one") is enters


def test_a_key_that_streams_from_everywhere_does_not_keep_another_s_order_from_waiting(shop: Shop) -> None:
    own, other = shop.placed(), shop.placed(headers=shop.other)
    open_waiting_room(shop.http.application, 4)

    with ExitStack() as streams:
        for _ in range(4):
            streams.enter_context(closing(stream(shop, own, shop.web)))
        denied = shop.http.get(f"/v1/orders/{own}", headers={**shop.web, **WAITS})
        granted = shop.http.get(f"/v1/orders/{other}", headers={**shop.other, **WAITS})

    assert "Preference-Applied" not in denied.headers
    assert granted.headers["Preference-Applied"] == "wait=1"


def test_streams_and_waits_that_have_ended_leave_their_places(shop: Shop) -> None:
    own = shop.placed()
    open_waiting_room(shop.http.application, 2)

    for _ in range(3):
        stream(shop, own, shop.web).close()
        waited = shop.http.get(f"/v1/orders/{own}", headers={**shop.web, **WAITS})

        assert waited.headers["Preference-Applied"] == "wait=1"
