"""Every request that computes waits for its turn, over HTTP; what is at hand is given meanwhile."""

import json
from collections.abc import Iterator

import pytest
from werkzeug.test import TestResponse

from service.api.computing_queue import RETRY_AFTER_S, open_computing_queue
from tests.service.api.described import World
from tests.service.api.test_hearings import app_of
from tests.service.api.test_sheets import JOB
from tests.service.conftest import parts_of
from tests.service.shop import TUNE


@pytest.fixture(scope="module")
def world(tmp_path_factory: pytest.TempPathFactory) -> Iterator[World]:
    parts = parts_of(tmp_path_factory.mktemp("turns"))
    yield app_of(parts)
    parts.store.close()


@pytest.fixture
def fingerprint(world: World) -> str:
    open_computing_queue(world.app, None)
    return str(world.given("a layout")["fingerprint"])


def asked(world: World, what: str, fingerprint: str) -> TestResponse:
    http, mine = world.http, world.headers
    match what:
        case "a new layout":
            path = "/v1/layouts?movement=mossbrook-67"
            return http.post(path, data=TUNE, content_type="audio/midi", headers=mine)
        case "a trial piece":
            return http.post("/v1/trial-pieces?movement=tarnlight-17&cutter=turn-press", headers=mine)
        case "sheets":
            return http.post("/v1/sheets", data=json.dumps(JOB), content_type="application/json", headers=mine)
        case "the first drawing":
            return http.get(f"/v1/layouts/{fingerprint}/disc.dxf", headers=mine)
        case "a sound":
            return http.get(f"/v1/layouts/{fingerprint}/hearing.wav", headers=mine)
    raise AssertionError(what)


@pytest.mark.parametrize("what", ["a new layout", "a trial piece", "sheets", "the first drawing", "a sound"])
def test_what_is_computed_is_refused_while_all_places_are_taken_and_given_after(
    world: World, fingerprint: str, what: str
) -> None:
    open_computing_queue(world.app, 0)

    refused = asked(world, what, fingerprint)

    assert (refused.status_code, refused.get_json()["type"]) == (503, "/problems/service-busy")
    assert refused.headers["Retry-After"] == str(RETRY_AFTER_S)
    open_computing_queue(world.app, 1)
    assert asked(world, what, fingerprint).status_code in (200, 201)


def test_what_is_at_hand_is_given_while_all_places_are_taken(world: World, fingerprint: str) -> None:
    open_computing_queue(world.app, 0)

    told = world.http.get(f"/v1/layouts/{fingerprint}/layout.json", headers=world.headers)
    same_again = world.given("a layout")

    assert told.status_code == 200
    assert same_again == {"fingerprint": fingerprint}
