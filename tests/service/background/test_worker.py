"""A worker in this process, with real children: orders are planned, fail, are thrown away or handed back."""

import subprocess
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from sqlalchemy import update

from layout import walk
from service.background import holding, sweeping
from service.background.chores import Chore, start_chores
from service.background.holding import Holding
from service.background.queue import Queue
from service.background.sweeping import LEAST_S, OFFERS_OF_A_SLOT, Sweep
from service.background.worker import Worker
from service.orders import taking
from service.orders.states import State
from service.parts import Parts
from service.store.faults import StoreBusyError
from service.store.tables import Order
from tests.faults.ordering import PlansHere, assert_planned_once, look, place, states, tune_called
from tests.service.shop import TUNE, open_shop

PLANNER = "tests.faults.planner"
WITHIN_S = 120.0


@contextmanager
def at_work(parts: Parts, **changes: int) -> Iterator[Worker]:
    worker = Worker(with_work(parts, **changes), slots=1, planner=PLANNER)
    worker.start()
    try:
        yield worker
    finally:
        worker.stop()


def with_work(parts: Parts, **changes: int) -> Parts:
    usual = replace(parts.settings.work, sweep_s=1, stop_within_s=4)
    work = replace(usual, **changes)  # type: ignore[arg-type]
    return replace(parts, settings=replace(parts.settings, work=work))


def send(parts: Parts, order_id: str) -> None:
    queue = Queue(parts.settings.queue_url)
    assert queue.send(order_id)
    queue.close()


def wait_for(true: Callable[[], bool], within_s: float = WITHIN_S) -> None:
    last_s = time.monotonic() + within_s
    while not true():
        assert time.monotonic() < last_s, "waited in vain"
        time.sleep(0.02)


def wait_for_state(parts: Parts, order_id: str, *wanted: State) -> None:
    wait_for(lambda: look(parts, order_id).state in wanted)


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def test_an_order_is_planned_once_though_its_message_comes_twice(shop: Parts, tmp_path: Path) -> None:
    tune = tune_called("Harvest")
    order_id = place(shop, tune)
    send(shop, order_id)
    send(shop, order_id)
    last_id = place(shop, tune_called("Sowing"))
    send(shop, last_id)

    with at_work(shop):
        wait_for_state(shop, last_id, State.READY)

    assert_planned_once(shop, order_id, PlansHere(tmp_path).of(tune))
    assert look(shop, order_id).attempt == 1


def test_the_real_computation_in_a_child_gives_the_files_that_it_gives_here(shop: Parts, tmp_path: Path) -> None:
    order_id = place(shop, TUNE)
    send(shop, order_id)
    worker = Worker(with_work(shop), slots=1)

    worker.start()
    wait_for_state(shop, order_id, State.READY)
    worker.stop()

    assert_planned_once(shop, order_id, PlansHere(tmp_path, walk).of(TUNE))


def test_an_order_whose_message_is_lost_is_found_by_the_sweep(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 0)
    order_ids = [place(shop, tune_called(f"Tune {number}")) for number in range(20)]  # more than are offered at a time

    with at_work(shop):
        for order_id in order_ids:
            wait_for_state(shop, order_id, State.READY)

    assert {look(shop, order_id).attempt for order_id in order_ids} == {1}


def test_orders_whose_messages_are_lost_are_planned_without_waiting_for_one_between(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 0)
    # Twenty: two looks find as many as they may, the third what is left. Each longer than the least time between looks.
    order_ids = [place(shop, tune_called(f"do:sleep 0.02; {number}")) for number in range(20)]
    waited_s: dict[int, set[float]] = {}  # for a message, by how many orders were still to be taken
    receive = Queue.receive

    def watched(queue: Queue, within_s: float) -> str | None:
        waited_s.setdefault(states(shop, order_ids)["received"], set()).add(within_s)
        return receive(queue, within_s)

    monkeypatch.setattr(Queue, "receive", watched)

    with at_work(shop, sweep_s=3600):
        wait_for(lambda: states(shop, order_ids)["ready"] == 20)

    assert {left: waits for left, waits in waited_s.items() if 0 < left < 20} == {12: {0.0}, 4: {0.0}}


def test_a_message_has_its_turn_among_orders_whose_messages_are_lost(shop: Parts) -> None:
    lost_ids = [place(shop, tune_called(f"do:sleep 0.02; {number}")) for number in range(40)]
    with shop.store.writing() as session:
        long_ago = shop.store.now(session) - timedelta(seconds=taking.WAITS_TOO_LONG_S)
        session.execute(update(Order).where(Order.id.in_(lost_ids)).values(updated_at=long_ago))
    last_id = place(shop, tune_called("Harvest"))
    send(shop, last_id)

    with at_work(shop, sweep_s=3600):
        wait_for_state(shop, last_id, State.READY)
        left = states(shop, lost_ids)["received"]

    assert left > 0


def test_orders_are_planned_while_the_queue_is_away(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 0)
    places = replace(shop.settings.places, queue_url="redis://127.0.0.1:1/0")  # nothing listens on port 1
    away = replace(shop, settings=replace(shop.settings, places=places))
    order_id = place(shop, tune_called("Harvest"))

    with at_work(away):
        wait_for_state(shop, order_id, State.READY)


def test_a_signal_that_comes_to_another_thread_or_at_a_bad_moment_is_heeded() -> None:
    # A handler in Python runs between two steps of the main thread, which takes none while it waits.
    lines = (
        "import signal, threading, time; from service.background.worker import work_until_told\n"
        "class Idle:\n"
        "    def start(self): pass\n"
        "    def stop(self, hurry): return True\n"
        "def tell():\n"
        "    time.sleep(0.5)\n"
        "    signal.pthread_kill(threading.get_ident(), signal.SIGTERM)\n"
        "print(work_until_told(Idle(), threading.Thread(target=tell).start))\n"
    )

    ended = subprocess.run([sys.executable, "-c", lines], capture_output=True, text=True, timeout=20, check=True)

    assert ended.stdout == "True\n"


def test_an_order_whose_worker_has_gone_is_taken_over(shop: Parts) -> None:
    order_id = place(shop, tune_called("Harvest"))
    gone = taking.take(shop.store, order_id, worker="gone", lease_s=0.5, most_attempts=3)

    with at_work(shop):
        wait_for_state(shop, order_id, State.READY)

    assert gone is not None
    assert (look(shop, order_id).attempt, look(shop, order_id).events.count("order.planned")) == (2, 1)


def test_a_lease_is_renewed_for_as_long_as_planning_takes(shop: Parts) -> None:
    order_id = place(shop, tune_called("do:sleep 5;"))
    send(shop, order_id)

    with at_work(shop, lease_s=2), at_work(shop, lease_s=2):
        wait_for_state(shop, order_id, State.READY)

    assert look(shop, order_id).attempt == 1


@pytest.mark.parametrize(
    ("deed", "reason"),
    [
        (
            "spin",
            "planning took longer than 2 s; shorten the tune or split it over discs, "
            "or ask the shop to raise DISCWRIGHT_PLAN_WITHIN_S",
        ),
        (
            "fill",
            "planning needs more than 300 MiB of memory; shorten the tune or split it over discs, "
            "or ask the shop to raise DISCWRIGHT_PLAN_MEMORY_MIB",
        ),
        (
            "exit 9",
            "planning ended 2 times without a plan (its process ended with code 9); "
            "simplify the tune or the settings, and order again",
        ),
        (
            "divide",
            "planning met a fault of the program itself (ZeroDivisionError), logged under this order's id; "
            "tell the shop, and order again when it is mended",
        ),
    ],
)
def test_an_order_that_cannot_be_planned_fails_with_the_reason_and_the_next_is_planned(
    shop: Parts, deed: str, reason: str
) -> None:
    bad_id, good_id = place(shop, tune_called(f"do:{deed};")), place(shop, tune_called("Harvest"))
    for order_id in (bad_id, good_id):
        send(shop, order_id)

    # Only what goes on for ever is met by the limit of time: filling memory takes a slow machine seconds.
    within_s = 2 if deed == "spin" else 60
    with at_work(shop, plan_within_s=within_s, plan_memory_mib=300, most_attempts=2):
        wait_for_state(shop, good_id, State.READY)

    bad = look(shop, bad_id)
    assert (bad.state, bad.reason) == ("failed", reason)
    assert bad.events == ["order.received", "order.failed"]
    assert bad.plans == []


def test_an_order_that_is_not_held_any_more_is_planned_no_further(shop: Parts) -> None:
    order_id = place(shop, tune_called("do:spin;"))
    next_id = place(shop, tune_called("Harvest"))
    send(shop, order_id)
    send(shop, next_id)

    with at_work(shop, lease_s=2):
        wait_for_state(shop, order_id, State.PLANNING)
        with shop.store.writing() as session:
            session.execute(update(Order).where(Order.id == order_id).values(state=State.CANCELLED.value))
        wait_for_state(shop, next_id, State.READY)

    assert look(shop, order_id).state == State.CANCELLED


def test_a_worker_that_stops_finishes_what_is_nearly_done(shop: Parts) -> None:
    order_id = place(shop, tune_called("do:sleep 1;"))
    send(shop, order_id)

    with at_work(shop) as worker:
        wait_for_state(shop, order_id, State.PLANNING)
        in_time = worker.stop()

    assert in_time
    assert look(shop, order_id).state == State.READY


def test_a_worker_that_stops_hands_back_what_takes_too_long_and_tells_the_queue(shop: Parts) -> None:
    order_id = place(shop, tune_called("do:spin;"))
    send(shop, order_id)
    begun_s = 0.0

    with at_work(shop, stop_within_s=3) as worker:
        wait_for_state(shop, order_id, State.PLANNING)
        begun_s = time.monotonic()
        in_time = worker.stop()
        took_s = time.monotonic() - begun_s

    seen = look(shop, order_id)
    assert in_time
    assert took_s < 3.0
    assert (seen.state, seen.killed) == ("received", 0)
    queue = Queue(shop.settings.queue_url)
    assert queue.receive(0) == order_id
    queue.close()


def test_a_worker_that_is_hurried_hands_back_at_once(shop: Parts) -> None:
    order_id = place(shop, tune_called("do:spin;"))
    send(shop, order_id)
    hurry = threading.Event()
    hurry.set()

    with at_work(shop, stop_within_s=60) as worker:
        wait_for_state(shop, order_id, State.PLANNING)
        begun_s = time.monotonic()
        worker.stop(hurry=hurry)
        took_s = time.monotonic() - begun_s

    assert took_s < 5.0
    assert look(shop, order_id).state == "received"


def test_a_worker_whose_children_do_not_start_takes_no_order(shop: Parts) -> None:
    order_id = place(shop, tune_called("Harvest"))
    send(shop, order_id)
    worker = Worker(with_work(shop), slots=1, planner="tests.faults.no_planner")

    worker.start()
    time.sleep(4.0)  # a child takes a second to start, and to fail
    worker.stop()

    assert (look(shop, order_id).state, look(shop, order_id).attempt) == ("received", 0)


def test_a_store_of_files_that_is_away_costs_an_order_no_attempt(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 2)
    order_id = place(shop, tune_called("Harvest"))
    folder = shop.settings.places.data_directory / "files"
    shards = [shard for shard in folder.iterdir() if shard.is_dir()]
    for shard in shards:
        shard.rename(folder / f"away-{shard.name}")
        shard.write_text("in the way")  # opening a file below a file fails, but not as one that is lost
    send(shop, order_id)

    with at_work(shop):
        wait_for(lambda: look(shop, order_id).attempt > 0)
        wait_for_state(shop, order_id, State.RECEIVED)
        for shard in shards:
            shard.unlink()
            (folder / f"away-{shard.name}").rename(shard)
        wait_for_state(shop, order_id, State.READY)

    assert look(shop, order_id).killed == 0


def test_a_worker_does_its_chores_though_one_goes_wrong(shop: Parts, caplog: pytest.LogCaptureFixture) -> None:
    done: list[str] = []

    def go_wrong() -> None:
        raise ZeroDivisionError("of the test")

    chores = [
        Chore(name="first", every_s=0.05, work=go_wrong),
        Chore(name="second", every_s=0.05, work=lambda: done.append("second")),
    ]
    worker = Worker(with_work(shop), slots=1, planner=PLANNER, chores=chores)

    worker.start()
    wait_for(lambda: len(done) > 2)
    worker.stop()

    told = [record.getMessage() for record in caplog.records if record.levelname == "ERROR"]
    assert told.count("the chore 'first' went wrong; it is done again in 0.05 s") > 1


def test_a_second_signal_hurries_a_worker_that_stops() -> None:
    lines = (
        "import os, signal, threading; from service.background.worker import work_until_told\n"
        "class Slow:\n"
        "    def start(self): pass\n"
        "    def stop(self, hurry):\n"
        "        calm = hurry.is_set()\n"
        "        os.kill(os.getpid(), signal.SIGTERM)\n"
        "        return (calm, hurry.wait(10))\n"
        "print(work_until_told(Slow(), lambda: os.kill(os.getpid(), signal.SIGTERM)))\n"
    )

    ended = subprocess.run([sys.executable, "-c", lines], capture_output=True, text=True, timeout=30, check=True)

    assert ended.stdout == "(False, True)\n"


def test_what_the_sweep_found_and_gave_out_is_looked_for_again_after_a_pause_and_not_sooner(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 0)
    placed = {place(shop, tune_called(f"Tune {number}")) for number in range(OFFERS_OF_A_SLOT + 1)}
    now_s = [0.0]
    monkeypatch.setattr(sweeping.time, "monotonic", lambda: now_s[0])
    sweep = Sweep(shop.store, 1)

    sweep.sweep()
    first = [sweep.next_found() for _ in range(OFFERS_OF_A_SLOT)]
    sweep.sweep_on()
    too_soon = sweep.next_found()
    for order_id in first:
        assert order_id is not None
        assert taking.take(shop.store, order_id, worker="a worker", lease_s=60, most_attempts=3) is not None
    now_s[0] += LEAST_S
    sweep.sweep_on()

    assert too_soon is None
    assert {*first, sweep.next_found()} == placed
    place(shop, tune_called("One that comes late"))
    now_s[0] += LEAST_S
    sweep.sweep_on()
    assert sweep.next_found() is None  # the last look found fewer than it may: what comes now has a message


def test_where_others_took_what_a_full_look_found_no_message_is_waited_for_longer_than_to_the_next_look(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(taking, "WAITS_TOO_LONG_S", 0)
    for number in range(OFFERS_OF_A_SLOT):
        place(shop, tune_called(f"Tune {number}"))
    now_s = [0.0]
    monkeypatch.setattr(sweeping.time, "monotonic", lambda: now_s[0])
    sweep = Sweep(shop.store, 1)

    before = sweep.looks_again_in_s
    sweep.sweep()
    found = sweep.looks_again_in_s
    while sweep.next_found() is not None:
        now_s[0] += LEAST_S / 16  # eight that others have taken: half of the time

    assert (before, found) == (None, None)
    assert sweep.looks_again_in_s == pytest.approx(LEAST_S / 2)
    now_s[0] += LEAST_S
    assert sweep.looks_again_in_s == 0


def test_an_order_that_is_lost_is_not_renewed_and_others_are(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    renewed: list[str] = []
    monkeypatch.setattr(holding, "renew", lambda _store, held, _lease_s: renewed.append(held.order_id) is None)
    order_ids = [place(shop, tune_called(name)) for name in ("Harvest", "Sowing")]
    lost, kept = (
        taking.take(shop.store, order_id, worker="a worker", lease_s=60, most_attempts=3) for order_id in order_ids
    )
    assert lost is not None
    assert kept is not None
    held = Holding(shop.store, lease_s=60)

    with held.hold(lost) as first, held.hold(kept):
        first.lost.set()
        held.renew_all()

    assert renewed == [kept.order_id]


def test_a_chore_that_finds_no_database_is_done_again(shop: Parts, caplog: pytest.LogCaptureFixture) -> None:
    done, again = [], threading.Event()

    def sweep() -> None:
        done.append(1)
        if len(done) == 1:
            raise StoreBusyError("the database does not answer")
        again.set()

    stopping = threading.Event()
    [thread] = start_chores([Chore(name="tidy", every_s=0.01, work=sweep)], stopping)
    assert again.wait(20)
    stopping.set()
    thread.join(20)

    assert "the chore 'tidy' is done again in 0.01 s: the database does not answer" in caplog.messages
