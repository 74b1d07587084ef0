"""A slot by itself, with a child that does as it is told: what becomes of an order where something does not answer."""

import logging
import os
import threading
from collections.abc import Callable
from dataclasses import dataclass, field, replace

import pytest

from service.background import slot
from service.background.holding import Holding
from service.background.messages import ChildAnswer, ChildSetup, Kind, PlanRequest
from service.background.queue import Queue
from service.background.slot import Shared, Slot
from service.background.sweeping import Sweep
from service.children.child_process import ChildEndedError
from service.orders import taking
from service.orders.planned import OrderInputs
from service.orders.planning import plan_order
from service.orders.states import State
from service.orders.taking import Taken
from service.parts import Parts
from service.store.faults import StoreBusyError
from service.store.store import Store
from tests.faults.ordering import look, place, tune_called
from tests.faults.planner import QuietPlanner
from tests.service.conftest import sqlite_alone
from tests.service.shop import keeper_of, open_shop

TOO_LONG_S = 30.0
REFUSED = ChildAnswer(kind=Kind.REFUSED, reason="there is no note in it")
ENDED = ChildEndedError("its process ended with code 1")
BUSY = StoreBusyError("the database does not answer")

pytestmark = sqlite_alone("what a slot does when something else does not answer; the store is asked as in other tests")

Deed = ChildAnswer | Exception | Callable[[PlanRequest], ChildAnswer]


@dataclass
class Bench:
    """A slot, what it works with, and what its children do in turn; when nothing is left to do, the worker stops.

    Attributes:
        parts: The shop.
        shared: What the slot works with.
        deeds: What planning does, for one order after the other.
        no_child: What starting a child raises; None: it starts.
        started: How many children were started.
    """

    parts: Parts
    shared: Shared
    deeds: list[Deed] = field(default_factory=list)
    no_child: Exception | None = None
    started: int = 0

    def order(self, name: str) -> str:
        """Place an order and tell of it; gives its id."""
        order_id = place(self.parts, tune_called(name))
        assert self.shared.queue.send(order_id)
        return order_id

    def run(self) -> None:
        """Let the slot work until it has nothing left to do, or for far too long."""
        too_long = threading.Timer(TOO_LONG_S, self.shared.stopping.set)
        too_long.start()
        Slot(self.shared).run()
        too_long.cancel()

    def child(self, setup: ChildSetup, is_wanted: Callable[[], bool]) -> "ScriptedChild":
        if self.no_child is not None:
            self.shared.stopping.set()
            raise self.no_child
        self.started += 1
        return ScriptedChild(self)


class ScriptedChild:
    """In place of a process."""

    has_grown = False

    def __init__(self, bench: Bench) -> None:
        self._bench = bench

    def plan(self, request: PlanRequest, within_s: float, is_wanted: Callable[[], bool]) -> ChildAnswer:
        deed = self._bench.deeds.pop(0)
        if not self._bench.deeds:
            self._bench.shared.stopping.set()  # this order is the last
        if isinstance(deed, Exception):
            raise deed
        return deed if isinstance(deed, ChildAnswer) else deed(request)

    def end(self) -> None:
        """There is none."""


@pytest.fixture
def bench(any_parts: Parts, monkeypatch: pytest.MonkeyPatch) -> Bench:
    open_shop(any_parts)
    work = replace(any_parts.settings.work, most_attempts=3)
    shared = Shared(
        name="a worker",
        store=any_parts.store,
        queue=Queue(any_parts.settings.queue_url),
        sweep=Sweep(any_parts.store, 1),
        holding=Holding(any_parts.store, work.lease_s),
        work=work,
        setup=ChildSetup(database_url="", files_url="", planner="", memory_mib=1, parent_pid=os.getpid()),
        stopping=threading.Event(),
        hurrying=threading.Event(),
    )
    made = Bench(parts=any_parts, shared=shared)
    monkeypatch.setattr(slot, "PlanningChild", made.child)
    monkeypatch.setattr(slot, "PAUSE_S", 0.0)
    return made


def test_an_order_that_breaks_the_slot_waits_for_its_lease_and_the_next_is_served(
    bench: Bench, caplog: pytest.LogCaptureFixture
) -> None:
    bench.deeds = [ZeroDivisionError("no such thing"), REFUSED]
    first, second = bench.order("Harvest"), bench.order("Sowing")

    bench.run()

    assert (look(bench.parts, first).state, look(bench.parts, second).state) == (State.PLANNING, State.FAILED)
    assert "a slot went wrong; its order, if it had one, is taken again after its lease" in caplog.messages


def test_an_order_that_the_database_does_not_give_out_is_left_to_the_sweep(
    bench: Bench, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    take, faults = taking.take, [BUSY]

    def take_later(store: Store, order_id: str, *, worker: str, lease_s: float, most_attempts: int) -> Taken | None:
        if faults:
            raise faults.pop()
        return take(store, order_id, worker=worker, lease_s=lease_s, most_attempts=most_attempts)

    monkeypatch.setattr(taking, "take", take_later)
    bench.deeds = [REFUSED]
    first, second = bench.order("Harvest"), bench.order("Sowing")

    bench.run()

    assert (look(bench.parts, first).state, look(bench.parts, second).state) == (State.RECEIVED, State.FAILED)
    assert "an order could not be taken; the sweep will find it: the database does not answer" in caplog.messages


def failing_first(monkeypatch: pytest.MonkeyPatch, times: int, meanwhile: Callable[[], None] = lambda: None) -> None:
    """Let the database refuse a verdict so many times."""
    fail, faults = taking.fail, [BUSY] * times

    def fail_later(store: Store, taken: Taken, reason: str) -> bool:
        if faults:
            meanwhile()
            raise faults.pop()
        return fail(store, taken, reason)

    monkeypatch.setattr(taking, "fail", fail_later)


def test_what_a_child_found_is_told_to_the_database_until_it_is_taken(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    failing_first(monkeypatch, times=2)
    bench.deeds = [REFUSED]  # planned once: nothing is computed again
    order_id = bench.order("Harvest")

    bench.run()

    seen = look(bench.parts, order_id)
    assert (seen.state, seen.reason) == (State.FAILED, "there is no note in it")


def test_a_worker_that_is_hurried_waits_for_no_database(bench: Bench, monkeypatch: pytest.MonkeyPatch) -> None:
    failing_first(monkeypatch, times=1000, meanwhile=bench.shared.hurrying.set)
    bench.deeds = [REFUSED]
    order_id = bench.order("Harvest")

    bench.run()

    assert look(bench.parts, order_id).state == State.PLANNING  # another takes it after its lease


def test_a_plan_is_published_though_its_times_cannot_be_noted(
    bench: Bench, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    def note(store: Store, took_s: object) -> None:
        raise BUSY

    def planned(request: PlanRequest) -> ChildAnswer:
        keeper = keeper_of(bench.parts)
        documents = {name: keeper.read(getattr(request, name)) for name in ("tune", "movement", "cutter", "settings")}
        return ChildAnswer(
            kind=Kind.PLANNED, planned=plan_order(OrderInputs(**documents, not_good=None), QuietPlanner(), keeper)
        )

    monkeypatch.setattr(slot, "note_stage_times", note)
    bench.deeds = [planned]
    order_id = bench.order("Harvest")

    bench.run()

    assert look(bench.parts, order_id).state == State.READY
    assert "how long planning took could not be noted: the database does not answer" in caplog.messages


def test_an_order_whose_child_ends_every_time_fails_after_so_many_tries(bench: Bench) -> None:
    bench.deeds = [ENDED, ENDED, ENDED]
    order_id = bench.order("Harvest")

    bench.run()

    seen = look(bench.parts, order_id)
    assert seen.state == State.FAILED
    assert seen.reason == (
        "planning ended 3 times without a plan (its process ended with code 1); "
        "simplify the tune or the settings, and order again"
    )
    assert (bench.started, bench.deeds) == (3, [])  # each try has a child of its own


def test_an_order_goes_back_where_its_child_ended_and_no_other_starts(
    bench: Bench, caplog: pytest.LogCaptureFixture
) -> None:
    caplog.set_level(logging.INFO)

    def end(request: PlanRequest) -> ChildAnswer:
        bench.no_child = OSError("no memory for another process")
        raise ENDED

    bench.deeds = [end, REFUSED]
    order_id = bench.order("Harvest")

    bench.run()

    seen = look(bench.parts, order_id)
    assert (seen.state, seen.attempt) == (State.RECEIVED, 1)
    assert "no child could be started: no memory for another process" in caplog.messages
    assert "handed back: no child could be started" in caplog.messages


def test_a_child_that_ends_while_the_worker_is_hurried_is_not_tried_again(bench: Bench) -> None:
    def end(request: PlanRequest) -> ChildAnswer:
        bench.shared.hurrying.set()
        raise ENDED

    bench.deeds = [end]
    order_id = bench.order("Harvest")

    bench.run()

    assert (look(bench.parts, order_id).state, bench.started) == (State.RECEIVED, 1)
    assert bench.shared.queue.length() == 1  # others are told of it


def test_a_child_that_has_grown_is_replaced_before_the_next_order(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    def grow(request: PlanRequest) -> ChildAnswer:
        monkeypatch.setattr(ScriptedChild, "has_grown", True)
        return REFUSED

    bench.deeds = [grow, REFUSED]
    order_ids = [bench.order("Harvest"), bench.order("Sowing")]

    bench.run()

    assert bench.started == 2
    assert {look(bench.parts, order_id).state for order_id in order_ids} == {State.FAILED}
