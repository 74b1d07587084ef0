"""A slot of a worker: one thread with one child, which plans one order at a time."""

import logging
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from service.background.holding import Held, Holding
from service.background.messages import ChildAnswer, ChildSetup, Kind, PlanRequest
from service.background.planning_child import PlanningChild
from service.background.queue import Queue, QueueAwayError
from service.background.stage_times import note_stage_times
from service.background.sweeping import Sweep
from service.children.child_process import ChildEndedError, ChildTooLongError, ChildUnwantedError
from service.orders import taking
from service.orders.taking import Taken
from service.settings import WorkSettings
from service.store.faults import StoreError
from service.store.store import Store

RECEIVE_S = 1.0  # s; how long a slot waits for a message before it looks round
PAUSE_S = 1.0  # s; after something did not answer
NO_CHILD_S = 5.0  # s; after a child did not start

log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shared:
    """What the slots of a worker share.

    Attributes:
        name: Of the worker, as orders name it.
        store: The database.
        queue: Tells of new orders.
        sweep: Finds forgotten ones.
        holding: Renews the leases of orders in hand.
        work: The settings of the work.
        setup: What each child is told.
        stopping: Set when no further order shall be taken.
        hurrying: Set when orders in hand shall be handed back.
    """

    name: str
    store: Store
    queue: Queue
    sweep: Sweep
    holding: Holding
    work: WorkSettings
    setup: ChildSetup
    stopping: threading.Event
    hurrying: threading.Event


class Slot:
    """Takes orders one after another until the worker stops."""

    def __init__(self, shared: Shared) -> None:
        """Get ready; the child is started by the thread that runs."""
        self._shared = shared
        self._child: PlanningChild | None = None

    def run(self) -> None:
        """Work until the worker stops; whatever goes wrong with one order, the next is taken."""
        try:
            while not self._shared.stopping.is_set():
                try:
                    self._turn()
                except Exception:
                    log.exception("a slot went wrong; its order, if it had one, is taken again after its lease")
                    self._shared.stopping.wait(PAUSE_S)
        finally:
            self._end_child()
            self._shared.queue.close()

    def _turn(self) -> None:
        # Without a child no order is taken: a broken installation must not cost orders their attempts.
        if not self._has_child():
            self._shared.stopping.wait(NO_CHILD_S)
            return
        order_id = self._next_order()
        taken = None if order_id is None else self._take(order_id)
        if taken is None:
            return
        with self._shared.holding.hold(taken) as held:
            self._serve(held)

    def _next_order(self) -> str | None:
        shared = self._shared
        found = shared.sweep.next_found()
        if found is not None:
            return found
        # Where more orders wait that have no message, a message is waited for no longer than to the next look; one that
        # is there has its turn.
        left_s = shared.sweep.looks_again_in_s
        wait_s = RECEIVE_S if left_s is None else min(left_s, RECEIVE_S)
        try:
            received = shared.queue.receive(wait_s)
        except QueueAwayError:
            shared.stopping.wait(min(wait_s, PAUSE_S))
            received = None
        if received is None:
            shared.sweep.sweep_on()
        return received

    def _take(self, order_id: str) -> Taken | None:
        shared = self._shared
        try:
            return taking.take(
                shared.store,
                order_id,
                worker=shared.name,
                lease_s=shared.work.lease_s,
                most_attempts=shared.work.most_attempts,
            )
        except StoreError as fault:
            log.warning("an order could not be taken; the sweep will find it: %s", fault, extra={"order_id": order_id})
            shared.stopping.wait(PAUSE_S)
            return None

    def _serve(self, held: Held) -> None:
        begun_s = time.monotonic()
        taken = held.taken
        extra: dict[str, Any] = {"order_id": taken.order_id, "attempt": taken.attempt}
        answer = self._answer_for(held)
        extra["seconds"] = round(time.monotonic() - begun_s, 3)
        if answer.trace:
            log.error("planning met a fault of the program itself:\n%s", answer.trace, extra=extra)
        if held.lost.is_set():
            log.info("the order is not held any more; its plan is thrown away", extra=extra)
            return
        store = self._shared.store
        if answer.kind is Kind.PLANNED and answer.planned is not None:
            planned = answer.planned
            kept = self._insist(held, lambda: taking.publish(store, taken, planned))
            log.info("planned" if kept else "planned, but not held any more; thrown away", extra=extra)
            self._note(answer)
        elif answer.kind is Kind.REFUSED:
            self._insist(held, lambda: taking.fail(store, taken, answer.reason))
            log.info("cannot be planned: %s", answer.reason, extra=extra)
        else:
            self._insist(held, lambda: taking.hand_back(store, taken))
            log.info("handed back: %s", answer.reason, extra=extra)
            if self._shared.stopping.is_set():
                self._shared.queue.send(taken.order_id)  # others are at work; otherwise it waits for the next sweep

    def _note(self, answer: ChildAnswer) -> None:
        try:
            note_stage_times(self._shared.store, answer.took_s)
        except StoreError as fault:
            log.warning("how long planning took could not be noted: %s", fault)  # the order itself is published

    def _insist(self, held: Held, work: Callable[[], bool]) -> bool:
        """Do it as soon as the database answers: the plan is made, and nobody else can take the order meanwhile."""
        while True:
            try:
                return work()
            except StoreError as fault:
                log.warning("%s", fault, extra={"order_id": held.taken.order_id})
                if held.lost.is_set() or self._shared.hurrying.wait(PAUSE_S):
                    return False

    def _answer_for(self, held: Held) -> ChildAnswer:
        """The child's answer, or the worker's own where a child has none; a child that ends is tried again."""
        work, request = self._shared.work, _request_of(held.taken)
        how_ended = ""
        for _ in range(work.most_attempts):
            if self._child is None and not self._has_child():
                return ChildAnswer(kind=Kind.AWAY, reason="no child could be started")
            assert self._child is not None
            try:
                return self._child.plan(request, work.plan_within_s, lambda: self._is_wanted(held))
            except ChildTooLongError:
                self._child = None
                return ChildAnswer(kind=Kind.REFUSED, reason=_too_long(work.plan_within_s))
            except ChildUnwantedError:
                self._child = None
                return ChildAnswer(kind=Kind.AWAY, reason="the worker stops")
            except ChildEndedError as fault:
                self._child = None
                how_ended = str(fault)
                log.warning("planning ended: %s", fault, extra={"order_id": held.taken.order_id})
                if not self._is_wanted(held):
                    return ChildAnswer(kind=Kind.AWAY, reason="the worker stops")
        return ChildAnswer(kind=Kind.REFUSED, reason=_too_often(work.most_attempts, how_ended))

    def _is_wanted(self, held: Held) -> bool:
        return not held.lost.is_set() and not self._shared.hurrying.is_set()

    def _has_child(self) -> bool:
        """Whether there is a warm child, started now where there is none or it has grown."""
        if self._child is not None and self._child.has_grown:
            self._end_child()
        if self._child is None:
            try:
                self._child = PlanningChild(self._shared.setup, lambda: not self._shared.stopping.is_set())
            except ChildUnwantedError:
                log.debug("the worker stops before its child is warm")
            except (ChildEndedError, ChildTooLongError, OSError) as fault:
                log.error("no child could be started: %s", str(fault) or "it did not get ready in time")
        return self._child is not None

    def _end_child(self) -> None:
        if self._child is not None:
            self._child.end()
            self._child = None


def _request_of(taken: Taken) -> PlanRequest:
    return PlanRequest(
        order_id=taken.order_id,
        tune=taken.tune_digest,
        movement=taken.movement_digest,
        cutter=taken.cutter_digest,
        settings=taken.settings_digest,
        not_good=taken.not_good,
        is_test=taken.is_test,
    )


def _too_long(within_s: float) -> str:
    return (
        f"planning took longer than {within_s:g} s; shorten the tune or split it over discs, "
        "or ask the shop to raise DISCWRIGHT_PLAN_WITHIN_S"
    )


def _too_often(count: int, how_ended: str) -> str:
    return (
        f"planning ended {'once' if count == 1 else f'{count} times'} without a plan ({how_ended}); "
        "simplify the tune or the settings, and order again"
    )
