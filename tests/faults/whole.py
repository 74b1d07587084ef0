"""The whole service under faults: a pipeline over HTTP while processes are killed and the database is taken away."""

import json
import random
import time
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import partial
from pathlib import Path

from sqlalchemy import func, select

from service.access.first_start import first_start
from service.moments import utc_now
from service.parts import Parts
from service.store.faults import StoreError
from service.store.tables import Delivery, Order
from tests.faults.asking import Answers, Asking
from tests.faults.fleet import wait_for
from tests.faults.judging import files_judged, hooks_judged, orders_judged, sent_again
from tests.faults.pipeline import Pipeline, Wanted, wanted_orders
from tests.faults.receiver import Receiver
from tests.faults.served import Kind, Served
from tests.service.conftest import environment_of, parts_of

# Short leases, so that what was lost is taken up within the patience of a test.
HASTE = {
    "DISCWRIGHT_LEASE_S": "3",
    "DISCWRIGHT_SWEEP_S": "1",
    "DISCWRIGHT_ATTEMPTS": "20",  # a stream of kills may hit one order many times by mere chance
    "DISCWRIGHT_STOP_WITHIN_S": "5",
    "DISCWRIGHT_HOOK_TIMEOUT_S": "2",
    "DISCWRIGHT_HOOK_NETWORKS": "127.0.0.0/8",
    "DISCWRIGHT_HOOK_HTTP": "yes",
    "DISCWRIGHT_READ_RATE": "1000000/60",
    "DISCWRIGHT_WRITE_RATE": "1000000/60",
}
ALL_WITHIN_S = 1800.0
TOLD_WITHIN_S = 500.0  # s; a try that was killed waits for its lease of a minute, and then perhaps five minutes
VICTIM_WITHIN_S = 60.0
AIM_WITHIN_S = 3.0  # s; how long a kill waits for something in hand
PLANNING_S = 0.5  # s; the most between seeing an order in hand and the kill
POSTING_S = 0.03  # s; so between the begin of a request and the kill

Between = Mapping[int, Callable[[], None]]  # what is done before the kill of a number


@dataclass(frozen=True, slots=True, kw_only=True)
class Ordeal:
    """What the service must bear.

    Attributes:
        orders: How many are placed.
        every_s: Seconds between two, on the average.
        workers: `discwright work` beside the worker of `discwright serve`.
        kills: How many of each kind of process.
        seed: Decides what is killed when.
    """

    orders: int
    every_s: float
    workers: int
    kills: Mapping[Kind, int]
    seed: int


@dataclass(slots=True, kw_only=True)
class Outcome:
    """What came of it.

    Attributes:
        faults: What must not be; empty where all is right.
        figures: What is printed.
        kills: How many processes of each kind were killed.
    """

    faults: list[str] = field(default_factory=list)
    figures: list[str] = field(default_factory=list)
    kills: Mapping[Kind, int] = field(default_factory=dict)


def bear(folder: Path, ordeal: Ordeal, *, database_url: str | None = None, between: Between | None = None) -> Outcome:
    """Let a new service bear an ordeal, and judge it.

    Args:
        folder: An empty one.
        ordeal: What it must bear.
        database_url: None for SQLite.
        between: What is done beside the kills, by the number of the kill before which it is done.
    """
    begun_s = time.monotonic()
    parts = parts_of(folder, database_url)
    key = first_start(parts.store, utc_now())
    assert key is not None
    answers = Answers()
    with Receiver(random.Random(ordeal.seed)) as receiver:
        served = Served(folder, {**environment_of(folder, database_url), **HASTE}, workers=ordeal.workers)
        trial = _Trial(
            parts=parts,
            served=served,
            receiver=receiver,
            new_asking=lambda: Asking(served.url, key.secret, answers),
            answers=answers,
        )
        try:
            trial.run(ordeal, between or {})
        finally:
            codes = served.stop()
    outcome = trial.judged(folder, codes)
    outcome.figures.append(f"{time.monotonic() - begun_s:.0f} s: {'WRONG' if outcome.faults else 'all right'}")
    parts.store.close()
    return outcome


@dataclass(slots=True, kw_only=True)
class _Trial:
    """One run of an ordeal."""

    parts: Parts
    served: Served
    receiver: Receiver
    new_asking: Callable[[], Asking]
    answers: Answers
    faults: list[str] = field(default_factory=list)
    orders: list[Wanted] = field(default_factory=list)
    reads: int = 0
    in_hand: int = 0

    def run(self, ordeal: Ordeal, between: Between) -> None:
        """Place, release and read while processes are killed, until everything has come to its end."""
        parts, chance, asking = self.parts, random.Random(ordeal.seed), self.new_asking()
        self.receiver.secret = make_hook(asking, self.receiver.url)
        self.orders = wanted_orders(ordeal.orders, every_s=ordeal.every_s, chance=chance)
        pipeline = Pipeline(orders=self.orders, new_asking=self.new_asking, chance=chance)
        pipeline.start()
        try:
            self.in_hand = _Killer(parts, self.served, pipeline, chance).kill_all(ordeal, between)
            wait_for(lambda: pipeline.is_done, within_s=ALL_WITHIN_S)
            wait_for(lambda: not open_orders(parts), within_s=ALL_WITHIN_S)
            wait_for(lambda: not untold(parts), within_s=TOLD_WITHIN_S)
        except TimeoutError:
            self.faults.append(f"it does not come to its end: {open_orders(parts)} open, {untold(parts)} untold")
        finally:
            pipeline.stop()
        self.reads = pipeline.reads
        self.faults += sent_again(asking, pipeline.placed)

    def judged(self, folder: Path, codes: list[int]) -> Outcome:
        """What came of it, once all processes have ended."""
        answers, served, told = self.answers, self.served, self.receiver
        faults = [*self.faults, *answers.faults, *told.faults, *files_judged(folder)]
        faults += orders_judged(self.parts, self.orders, folder) + hooks_judged(self.parts, told)
        if any(codes) or served.left_behind:
            faults.append(f"it ended with {codes}, and {served.left_behind} had to be killed")
        attempts = _attempts(self.parts)
        kills = ", ".join(f"{served.kills[kind]} {kind}" for kind in Kind if served.kills[kind])
        statuses = ", ".join(f"{count} of {status}" for status, count in sorted(answers.statuses.items()))
        figures = [
            f"orders: {attempts.total()} kept, {len(self.orders)} asked for, "
            f"{sum(order.released is not None for order in self.orders)} released; "
            f"{sum(number * count for number, count in attempts.items())} attempts, {max(attempts)} at most of one",
            f"killed: {kills}; {self.in_hand} workers had an order in hand; {served.starts} starts from here",
            f"answers: {statuses}; {answers.breaks} connections broke, {answers.repeats} writes were sent again, "
            f"the longest answer took {answers.longest_s:.1f} s",
            f"files: {self.reads} came right, whole or in part, while processes were killed",
            f"hooks: {len(told.ids_of)} events told by {told.came.total()} messages; {len(told.refused)} were refused "
            f"at first; {sum(count > 1 for count in told.came.values())} came more than once",
        ]
        return Outcome(faults=faults, figures=figures, kills=served.kills)


def make_hook(asking: Asking, url: str) -> str:
    """A hook for all orders; gives its secret."""
    body = json.dumps({"url": url}).encode()
    told = asking.ask("POST", "/v1/hooks", body=body, headers={"Content-Type": "application/json"})
    assert told is not None
    assert told.status == 201, told.body
    return str(told.json["secret"])


class _Killer:
    """Kills what the ordeal asks for, at moments that chance decides."""

    def __init__(self, parts: Parts, served: Served, pipeline: Pipeline, chance: random.Random) -> None:
        self._parts = parts
        self._served = served
        self._pipeline = pipeline
        self._chance = chance

    def kill_all(self, ordeal: Ordeal, between: Between) -> int:
        """Kill them all; gives how many workers had an order in hand."""
        kinds = [kind for kind, count in ordeal.kills.items() for _ in range(count)]
        self._chance.shuffle(kinds)
        in_hand = 0
        for number, kind in enumerate(kinds):
            due = number * ordeal.orders // len(kinds)  # so many orders are placed before this kill
            wait_for(partial(self._is_due, due), within_s=ALL_WITHIN_S)
            if number in between:
                between[number]()
            in_hand += self._kill(kind)
        return in_hand

    def _is_due(self, due: int) -> bool:
        return len(self._pipeline.placed) >= due or self._pipeline.is_done

    def _kill(self, kind: Kind) -> bool:
        """Kill one; whether it was a worker with an order in hand."""
        while True:
            wait_for(lambda: bool(self._served.pids(kind)), within_s=VICTIM_WITHIN_S)
            busy = self._aim(kind)
            living = self._served.pids(kind)
            victims = [pid for pid in living if pid in busy] or living
            if victims and self._served.kill(pid := self._chance.choice(victims), kind):
                return kind is Kind.WORKER and pid in busy

    def _aim(self, kind: Kind) -> set[int]:
        """Wait for a moment of that kind of process; gives the workers that have an order in hand."""
        until_s = time.monotonic() + AIM_WITHIN_S
        if kind in (Kind.WORKER, Kind.CHILD):
            busy: set[int] = set()
            while not busy and time.monotonic() < until_s:
                busy = self._busy()
                time.sleep(0.01)
            time.sleep(self._chance.uniform(0.0, PLANNING_S))
            return self._busy() & set(self._served.pids(Kind.WORKER))
        self._pipeline.posting.clear()
        self._pipeline.posting.wait(AIM_WITHIN_S)
        time.sleep(self._chance.uniform(0.0, POSTING_S))
        return set()

    def _busy(self) -> set[int]:
        try:
            with self._parts.store.reading() as session:
                names = session.scalars(select(Order.taken_by).where(Order.state == "planning"))
                return {int(name.split(":")[1]) for name in names if name}
        except StoreError:
            return set()


def open_orders(parts: Parts) -> list[str]:
    """Orders that are not planned yet, and have not failed."""
    with parts.store.reading() as session:
        return list(session.scalars(select(Order.id).where(Order.state.in_(("received", "planning")))))


def untold(parts: Parts) -> int:
    """How many messages have not reached their hook."""
    with parts.store.reading() as session:
        return session.scalars(select(func.count()).select_from(Delivery).where(Delivery.state != "delivered")).one()


def _attempts(parts: Parts) -> Counter[int]:
    with parts.store.reading() as session:
        return Counter(session.scalars(select(Order.attempt)))
