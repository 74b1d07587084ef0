"""Every request that computes waits for its turn, over HTTP; what is at hand is given meanwhile."""

import json
import threading
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor, as_completed
from itertools import islice
from typing import Any

import pytest
from werkzeug.test import TestResponse

from layout import walk
from layout.write.laid_out import LaidOut
from service.api import hearing_shelf
from service.api.computing_queue import RETRY_AFTER_S, open_computing_queue
from service.api.desk import LayoutDesk
from service.api.problems import ProblemError
from service.documents import Inputs
from tests.service.api.described import World
from tests.service.api.test_hearings import app_of
from tests.service.api.test_sheets import JOB
from tests.service.conftest import parts_of
from tests.service.shop import TUNE

WAIT_S = 10.0  # for what must come; far more than it takes


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


@pytest.mark.parametrize("condition", ["TAG", "W/TAG", '"other", W/TAG', "*"])
def test_who_has_a_drawing_is_told_so_though_it_is_not_there_and_nothing_may_be_computed(
    world: World, condition: str
) -> None:
    open_computing_queue(world.app, None)
    path = "/v1/layouts?movement=fernhollow-31"
    posted = world.http.post(path, data=TUNE, content_type="audio/midi", headers=world.headers).get_json()
    told = world.http.get(posted["links"]["layout.json"], headers=world.headers)
    tag = told.headers["ETag"].replace("layout.json", "disc.dxf")
    open_computing_queue(world.app, 0)

    whole, known = (
        world.http.get(posted["links"]["disc.dxf"], headers={**world.headers, **fields})
        for fields in ({}, {"If-None-Match": condition.replace("TAG", tag)})
    )

    assert (whole.status_code, known.status_code, known.headers["ETag"]) == (503, 304, tag)


def slowly(may_end: threading.Event, job: Callable[..., Any]) -> Callable[..., Any]:
    def wait_first(*asked: Any, **named: Any) -> Any:
        assert may_end.wait(WAIT_S)
        return job(*asked, **named)

    return wait_first


@pytest.mark.parametrize("what", ["the first drawing", "a sound"])
def test_who_waits_for_another_that_makes_the_same_takes_a_place_and_who_finds_none_is_refused(
    tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch, what: str
) -> None:
    parts = parts_of(tmp_path_factory.mktemp("same"))
    world = app_of(parts)
    fingerprint = world.given("a layout")["fingerprint"]
    may_end = threading.Event()
    monkeypatch.setattr(walk, "files_of", slowly(may_end, walk.files_of))
    monkeypatch.setattr(hearing_shelf, "write_hearing", slowly(may_end, hearing_shelf.write_hearing))
    open_computing_queue(world.app, 2)

    with ThreadPoolExecutor(max_workers=5) as pool:
        others = [pool.submit(asked, World(app=world.app, parts=parts), what, fingerprint) for _ in range(5)]
        try:
            refused = [done.result().status_code for done in islice(as_completed(others, WAIT_S), 3)]
        finally:
            may_end.set()
        statuses = sorted(other.result(WAIT_S).status_code for other in others)

    assert refused == [503] * 3
    assert statuses == [200, 200, 503, 503, 503]
    parts.store.close()


def test_a_search_that_time_stopped_is_not_thrown_away_where_others_take_all_places_meanwhile(
    tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch
) -> None:
    parts = parts_of(tmp_path_factory.mktemp("stopped"))
    world = app_of(parts)
    queue = open_computing_queue(world.app, 1)
    refused_meanwhile = []
    compute = LayoutDesk._compute

    def then_someone_comes(desk: LayoutDesk, inputs: Inputs) -> Any:
        computed = compute(desk, inputs)
        with ThreadPoolExecutor(max_workers=1) as pool:
            stays = pool.submit(queue.place().__enter__)  # and is not done before the answer is made
            refused_meanwhile.append(isinstance(stays.exception(WAIT_S), ProblemError))
        return computed

    monkeypatch.setattr(LayoutDesk, "_compute", then_someone_comes)
    monkeypatch.setattr(LaidOut, "stopped", "time")
    answer = asked(world, "a new layout", "")

    assert (answer.status_code, refused_meanwhile) == (201, [True])
    parts.store.close()
