"""A shop's pipeline over HTTP: orders placed and released, each once for its key, and files read all the time."""

import base64
import hashlib
import json
import queue
import random
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import partial
from typing import Any

import urllib3

from tests.faults.asking import Asking, Told
from tests.faults.ordering import tune_called

POSTERS = 3
READERS = 2
ANSWERED_WITHIN_S = 300.0
PLANNED_WITHIN_S = 900.0
LOOK_EVERY_S = 0.2
READ_EVERY_S = 0.02
RANGE_SHARE = 0.2  # of reads, for a range


@dataclass(slots=True, kw_only=True)
class Wanted:
    """One order of the stream."""

    number: int
    tune: bytes
    wait_s: float
    is_released: bool
    placed: Told | None = None
    released: Told | None = None

    @property
    def id(self) -> str:
        """Of the order, once it is placed."""
        assert self.placed is not None
        return str(self.placed.json["id"])

    @property
    def reference(self) -> str:
        """What it is called by who orders."""
        return f"F-{self.number}"

    def place(self, asking: Asking) -> Told:
        """Place it; again with the same key, if it was placed before, in a form with another boundary."""
        return asking.insist("POST", "/v1/orders", **self._form(), within_s=ANSWERED_WITHIN_S)

    def place_once(self, asking: Asking) -> Told | None:
        """Try to place it, once."""
        return asking.ask("POST", "/v1/orders", **self._form())

    def release(self, asking: Asking) -> Told:
        """Release the plan it has, likewise."""
        headers = {"Content-Type": "application/json", "Idempotency-Key": f'"release-{self.number}"'}
        body = json.dumps({"by": "M. Weber", "plan": self._plan_seen(asking)}).encode()
        return asking.insist(
            "POST", f"/v1/orders/{self.id}/release", body=body, headers=headers, within_s=ANSWERED_WITHIN_S
        )

    def _plan_seen(self, asking: Asking) -> str:
        until_s = time.monotonic() + ANSWERED_WITHIN_S
        while True:
            seen = asking.ask("GET", f"/v1/orders/{self.id}")
            if seen is not None:
                return str(seen.json["plan"]["tag"])
            if time.monotonic() > until_s:
                raise TimeoutError(f"the order {self.reference} is not told after {ANSWERED_WITHIN_S:g} s")

    def _form(self) -> Any:
        order = {
            "movement": "fernhollow-31",
            "cutter": "fibre-laser",
            "reference": self.reference,
            "most_lost_share": 1.0,
        }
        parts = {
            "order": ("order", json.dumps(order).encode(), "application/json"),
            "tune": ("tune.mid", self.tune, "audio/midi"),
        }
        body, media_type = urllib3.encode_multipart_formdata(parts)
        return {"body": body, "headers": {"Content-Type": media_type, "Idempotency-Key": f'"place-{self.number}"'}}


def wanted_orders(count: int, *, every_s: float, chance: random.Random) -> list[Wanted]:
    """Orders of one tune each, every second to be released, with the waits before each."""
    return [
        Wanted(
            number=number,
            tune=tune_called(f"Stream {number}"),
            wait_s=chance.expovariate(1 / (every_s * POSTERS)),
            is_released=number % 2 == 0,
        )
        for number in range(count)
    ]


@dataclass(slots=True, kw_only=True)
class Pipeline:
    """Threads that place, release and read until they are done.

    Attributes:
        orders: What is ordered.
        new_asking: Makes what asks, for each thread its own.
        posting: Set whenever an order is about to be sent.
        reads: How many files came whole.
    """

    orders: list[Wanted]
    new_asking: Callable[[], Asking]
    chance: random.Random
    posting: threading.Event = field(default_factory=threading.Event)
    reads: int = 0
    _over: threading.Event = field(default_factory=threading.Event)
    _threads: list[threading.Thread] = field(default_factory=list)
    _readers: list[threading.Thread] = field(default_factory=list)
    _to_place: "queue.SimpleQueue[Wanted]" = field(default_factory=queue.SimpleQueue)

    def start(self) -> None:
        """Begin."""
        for order in self.orders:
            self._to_place.put(order)
        self._threads = [self._thread(self._post_all) for _ in range(POSTERS)] + [self._thread(self._release_all)]
        chances = [random.Random(self.chance.random()) for _ in range(READERS)]
        self._readers = [self._thread(partial(self._read_all, chance)) for chance in chances]

    @property
    def placed(self) -> list[Wanted]:
        """Orders that were accepted by now."""
        return [order for order in self.orders if order.placed is not None]

    @property
    def is_done(self) -> bool:
        """Whether all are placed, and released where they shall be."""
        return not any(thread.is_alive() for thread in self._threads)

    def stop(self) -> None:
        """Wait until what reads has ended; nothing more is placed."""
        self._over.set()
        for thread in [*self._threads, *self._readers]:
            thread.join()

    def _thread(self, work: Callable[[], None]) -> threading.Thread:
        def noted() -> None:
            try:
                work()
            except Exception as fault:  # noqa: BLE001 -- told to who judges; nobody would see a thread end
                self.new_asking().answers.wrong(f"{type(fault).__name__}: {fault}")

        thread = threading.Thread(target=noted, daemon=True)
        thread.start()
        return thread

    def _post_all(self) -> None:
        asking = self.new_asking()
        while not self._over.is_set():
            try:
                order = self._to_place.get_nowait()
            except queue.Empty:
                return
            self._over.wait(order.wait_s)
            self.posting.set()
            told = order.place(asking)
            if told.status == 202:
                order.placed = told
            else:
                asking.answers.wrong(f"{order.reference}: {told.status} {told.body[:300]!r}")

    def _release_all(self) -> None:
        asking = self.new_asking()
        waiting = [order for order in self.orders if order.is_released]
        until_s = time.monotonic() + PLANNED_WITHIN_S + sum(order.wait_s for order in self.orders)
        while waiting and not self._over.is_set():
            for order in [order for order in waiting if order.placed is not None]:
                seen = asking.ask("GET", f"/v1/orders/{order.id}")
                if seen is None or seen.status != 200 or seen.json["state"] != "ready":
                    continue
                told = order.release(asking)
                if told.status == 200:
                    order.released = told
                else:
                    asking.answers.wrong(f"release of {order.reference}: {told.status} {told.body[:300]!r}")
                waiting.remove(order)
            if time.monotonic() > until_s:
                raise TimeoutError(f"not ready: {[order.reference for order in waiting]}")
            self._over.wait(LOOK_EVERY_S)

    def _read_all(self, chance: random.Random) -> None:
        asking = self.new_asking()
        known = _Known()
        while not self._over.wait(READ_EVERY_S):
            placed = self.placed
            if placed:
                self._read_one(asking, chance.choice(placed), known, chance)

    def _read_one(self, asking: Asking, order: Wanted, known: "_Known", chance: random.Random) -> None:
        seen = asking.ask("GET", f"/v1/orders/{order.id}")
        if seen is None:
            return
        if seen.status != 200:
            asking.answers.wrong(f"{order.reference} was placed, and then: {seen.status} {seen.body[:200]!r}")
            return
        plan = seen.json["plan"]
        if plan is None:
            if order.id in known.lists:
                asking.answers.wrong(f"{order.reference} had a plan, and has none")
            return
        files = {(one["disc"], one["name"]): (one["sha256"], one["byte_count"]) for one in plan["files"]}
        if known.lists.setdefault(order.id, files) != files:
            asking.answers.wrong(f"{order.reference}: the list of its files has changed")
        file = chance.choice(plan["files"])
        start = chance.randrange(file["byte_count"]) if chance.random() < RANGE_SHARE else None
        self._read_file(asking, order, _Sought(file=file, start=start), known.whole)

    def _read_file(self, asking: Asking, order: Wanted, sought: "_Sought", whole: dict[str, bytes]) -> None:
        file, start = sought.file, sought.start
        path = file["href"] or f"/v1/orders/{order.id}/plans/1/files/{file['disc']}/{file['name']}"
        told = asking.ask("GET", path, headers={} if start is None else {"Range": f"bytes={start}-"})
        if told is None:
            return
        if file["href"] is None:
            # It was kept back when its order was seen, and may have been released since by the order of this test.
            if told.status != 409 and not order.is_released:
                asking.answers.wrong(f"{path} is not released: {told.status}")
            return
        fault = _fault_of(told, sought, whole)
        if fault is None:
            self.reads += 1
        else:
            asking.answers.wrong(f"{path} of {order.reference}: {fault}")


@dataclass(slots=True, kw_only=True)
class _Known:
    """What one reader remembers: the list of files of each order, and files that came whole, by their digests."""

    lists: dict[str, Any] = field(default_factory=dict)
    whole: dict[str, bytes] = field(default_factory=dict)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Sought:
    """A file as its plan tells of it, and the byte from which on it is asked for; None for all of it."""

    file: Any
    start: int | None


def _fault_of(told: Told, sought: _Sought, whole: dict[str, bytes]) -> str | None:
    """What is wrong with a file that came."""
    sha256, start = sought.file["sha256"], sought.start or 0
    named = f"sha-256=:{base64.b64encode(bytes.fromhex(sha256)).decode()}:"
    length = sought.file["byte_count"] - start
    if told.status != (200 if sought.start is None else 206):
        return f"the status is {told.status}: {told.body[:200]!r}"
    digests = {"repr-digest": named} | ({"content-digest": named} if sought.start is None else {})
    if any(told.headers.get(field_name) != digest for field_name, digest in digests.items()):
        return f"its digests are {dict(told.headers)}, and the plan tells {named}"
    if (len(told.body), told.headers.get("content-length")) != (length, str(length)):
        return f"{len(told.body)} bytes came, {told.headers.get('content-length')} were told, {length} there are"
    if sought.start is not None:
        return "its part differs from it" if sha256 in whole and whole[sha256][start:] != told.body else None
    if hashlib.sha256(told.body).hexdigest() != sha256:
        return "what came is another file"
    whole[sha256] = told.body
    return None
