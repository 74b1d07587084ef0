"""The test tunes: each leads an order of a test key, planned by a real worker, to the state it promises."""

import hashlib
import io
import os
import signal
import time

import mido
import pytest

from layout.documents import shipped_cutter_ids, shipped_movement_ids
from service.access.asker import Asker
from service.background import test_deeds
from service.background.messages import PlanRequest
from service.background.worker import Worker
from service.orders.asked import AskedOrder, NamedDocument
from service.orders.states import State
from service.orders.test_tunes import REFUSAL, SLOW_S, Deed, StateTune, state_tunes
from service.parts import Parts
from tests.faults.ordering import look
from tests.service.background.test_worker import send, wait_for, wait_for_state, with_work
from tests.service.conftest import sqlite_first
from tests.service.shop import WEB_SHOP, WEB_TESTS, open_shop, placed, planned

TUNES = {tune.name: tune for tune in state_tunes()}
BY_THEMSELVES = [name for name, tune in TUNES.items() if tune.deed is Deed.NOTHING]
UNDECIDED = (State.RECEIVED, State.PLANNING)


def ordered(parts: Parts, tune: StateTune, asker: Asker = WEB_TESTS, movement: str = "fernhollow-31") -> str:
    asked = AskedOrder(
        tune=tune.content,
        movement=NamedDocument(id=movement),
        cutter=NamedDocument(id=shipped_cutter_ids()[0]),
        most_lost_share=0.05,  # as POST /v1/orders takes it where nothing is said
        release_alone=tune.needs_release_alone,
    )
    return placed(parts, asked, asker).id


@pytest.fixture
def shop(parts: Parts) -> Parts:
    open_shop(parts)
    return with_work(parts)


@sqlite_first("what a tune does to a worker; workers are tried on both")
def test_each_leads_to_its_state(shop: Parts) -> None:
    order_ids = {name: ordered(shop, tune) for name, tune in TUNES.items() if name != "slow"}
    for order_id in order_ids.values():
        send(shop, order_id)
    worker = Worker(shop, slots=1)

    worker.start()
    for order_id in order_ids.values():
        wait_for(lambda order_id=order_id: look(shop, order_id).state not in UNDECIDED, within_s=120)  # type: ignore[misc]
    worker.stop()

    seen = {name: look(shop, order_id) for name, order_id in order_ids.items()}
    assert {name: one.state for name, one in seen.items()} == {name: TUNES[name].state for name in seen}
    assert seen["attention-finding"].reason == "1 error-level finding: it is not good to cut as it is"
    assert "of the tune is lost, and 5.00% was said to be the most" in str(seen["attention-loss"].reason)
    assert seen["failed"].reason == REFUSAL
    assert str(seen["killed"].reason).startswith("planning ended 3 times without a plan")
    assert [one.plans == [] for one in seen.values()] == [one.state == "failed" for one in seen.values()]


@sqlite_first("what a tune does to a worker; workers are tried on both")
def test_the_slow_one_stays_in_planning(shop: Parts) -> None:
    order_id = ordered(shop, TUNES["slow"])
    send(shop, order_id)
    worker = Worker(shop, slots=1)

    worker.start()
    wait_for_state(shop, order_id, State.PLANNING)
    begun_s = time.monotonic()
    wait_for_state(shop, order_id, State.READY)
    worker.stop()

    assert time.monotonic() - begun_s > 4


@sqlite_first("what a tune does to a worker; workers are tried on both")
def test_with_any_other_key_they_are_tunes_like_all_others(shop: Parts) -> None:
    order_ids = [ordered(shop, tune, WEB_SHOP) for tune in TUNES.values() if tune.deed is not Deed.NOTHING]
    for order_id in order_ids:
        send(shop, order_id)
    worker = Worker(shop, slots=1)

    worker.start()
    for order_id in order_ids:
        wait_for_state(shop, order_id, State.READY)
    worker.stop()

    assert {look(shop, order_id).attempt for order_id in order_ids} == {1}


@pytest.mark.parametrize("movement", shipped_movement_ids())
@pytest.mark.parametrize("name", BY_THEMSELVES)
def test_those_that_do_it_by_themselves_do_for_every_shipped_movement(shop: Parts, name: str, movement: str) -> None:
    order_id = ordered(shop, TUNES[name], movement=movement)

    planned(shop, order_id)

    assert look(shop, order_id).state == TUNES[name].state


@pytest.mark.parametrize("name", TUNES)
def test_each_is_a_midi_file_of_its_own(name: str) -> None:
    read = mido.MidiFile(file=io.BytesIO(TUNES[name].content))  # a reader that is not ours

    assert read.tracks[0].name.startswith("Test: ")
    assert read.length == len([message for message in read if message.type == "note_on"]) * 0.5
    assert len({tune.content for tune in TUNES.values()}) == len(TUNES)


def request(name: str, *, is_test: bool) -> PlanRequest:
    digest = hashlib.sha256(TUNES[name].content).hexdigest()
    return PlanRequest(
        order_id="order_1", tune=digest, movement="", cutter="", settings="", not_good=None, is_test=is_test
    )


@pytest.mark.parametrize(
    ("name", "done", "refusal"),
    [
        ("ready", [], None),
        ("failed", [], REFUSAL),
        ("slow", [("sleep", SLOW_S)], None),
        ("killed", [("kill", os.getpid(), signal.SIGKILL)], None),
    ],
)
def test_a_child_does_what_a_tune_asks_for_where_a_test_key_ordered_it_and_else_nothing(
    monkeypatch: pytest.MonkeyPatch, name: str, done: list[tuple[object, ...]], refusal: str | None
) -> None:
    seen: list[tuple[object, ...]] = []
    monkeypatch.setattr(test_deeds.time, "sleep", lambda *given: seen.append(("sleep", *given)))
    monkeypatch.setattr(test_deeds.os, "kill", lambda *given: seen.append(("kill", *given)))

    assert test_deeds.act_out(request(name, is_test=False)) is None
    assert seen == []
    assert test_deeds.act_out(request(name, is_test=True)) == refusal
    assert seen == done
