"""The queue of those who compute: few at a time, in their order, and long ones beside them."""

import sys
import threading
import time
from collections.abc import Callable, Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from contextlib import contextmanager

import pytest
from flask import Flask

from service.api import computing_queue
from service.api.computing_queue import (
    AT_A_TIME,
    LEAST_SHARE,
    LONG_S,
    MOST_AT_A_TIME,
    RETRY_AFTER_S,
    ComputingQueue,
    open_computing_queue,
    own_stopwatch,
)
from service.api.problems import ProblemError

WAIT_S = 10.0  # for what must come; far more than it takes


class Job:
    """What computes until it is told to end."""

    def __init__(self, queue: ComputingQueue, begun: list["Job"]) -> None:
        """Nothing is computed yet."""
        self.has_begun = threading.Event()
        self._queue = queue
        self._begun = begun
        self._may_end = threading.Event()
        self.done: Future[None]

    def compute(self) -> None:
        with self._queue.admitted():
            self._begun.append(self)
            self.has_begun.set()
            self._may_end.wait(WAIT_S)

    def end(self) -> None:
        self._may_end.set()
        self.done.result(WAIT_S)


class Shop:
    """A queue, and those who compute in it."""

    def __init__(self, queue: ComputingQueue, pool: ThreadPoolExecutor) -> None:
        """Nobody has come yet."""
        self.queue = queue
        self.begun: list[Job] = []
        self.came: list[Job] = []
        self._pool = pool

    def comes(self) -> Job:
        """One more, once he computes or stands in the queue."""
        job = Job(self.queue, self.begun)
        self.came.append(job)
        counted = self._count()
        job.done = self._pool.submit(job.compute)
        until(lambda: self._count() > counted)
        return job

    def _count(self) -> int:
        return len(self.queue._waiting) + len(self.queue._computed_s)


def until(holds: Callable[[], bool]) -> None:
    ended = threading.Event()
    for _ in range(int(WAIT_S / 0.001)):
        if holds():
            return
        ended.wait(0.001)
    raise AssertionError("it did not come to hold")


def stopwatch_by(now_s: list[float]) -> Callable[[], Callable[[], float]]:
    """Stopwatches that all tell the time of a test's own clock."""

    def begin() -> Callable[[], float]:
        begun_s = now_s[0]
        return lambda: now_s[0] - begun_s

    return begin


@contextmanager
def shop(queue: ComputingQueue | None = None) -> Iterator[Shop]:
    with ThreadPoolExecutor(max_workers=3 * MOST_AT_A_TIME) as pool:
        made = Shop(queue or ComputingQueue(), pool)
        try:
            yield made
        finally:
            for job in made.came:
                job._may_end.set()


def test_no_more_than_a_few_compute_at_a_time_and_the_others_follow_in_the_order_in_which_they_came() -> None:
    with shop() as open_shop:
        jobs = [open_shop.comes() for _ in range(AT_A_TIME + 3)]
        until(lambda: len(open_shop.begun) == AT_A_TIME)
        assert not jobs[AT_A_TIME].has_begun.wait(0.05)
        for job in jobs:
            assert job.has_begun.wait(WAIT_S)
            job.end()
    assert open_shop.begun[AT_A_TIME:] == jobs[AT_A_TIME:]


def test_one_who_computes_for_long_lets_the_next_begin_beside_him() -> None:
    now_s = [0.0]
    with shop(ComputingQueue(stopwatch_by(now_s))) as open_shop:
        for _ in range(AT_A_TIME):
            open_shop.comes()
        until(lambda: len(open_shop.begun) == AT_A_TIME)
        now_s[0] = LONG_S
        assert open_shop.comes().has_begun.wait(WAIT_S)


def test_one_who_waits_begins_when_a_long_one_has_computed_for_a_second_though_nobody_ends(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(computing_queue, "LONG_S", 0.02)
    with shop() as open_shop:
        jobs = [open_shop.comes() for _ in range(AT_A_TIME + 1)]
        assert jobs[-1].has_begun.wait(WAIT_S)
        assert not any(job.done.done() for job in jobs)


@pytest.mark.skipif(sys.platform != "linux", reason="elsewhere no thread's processor time can be asked for by another")
def test_who_waits_for_the_processor_is_not_long_by_what_others_compute() -> None:
    stopwatches: list[Callable[[], float]] = []
    has_begun, may_end = threading.Event(), threading.Event()

    def wait() -> None:
        stopwatches.append(own_stopwatch())
        has_begun.set()
        may_end.wait(WAIT_S)

    with ThreadPoolExecutor(max_workers=1) as pool:
        waiting = pool.submit(wait)
        assert has_begun.wait(WAIT_S)
        begun_s = time.monotonic()
        mine = own_stopwatch()
        while mine() < 0.1:
            pass
        waited_s = stopwatches[0]()
        passed_s = time.monotonic() - begun_s
        may_end.set()
        waiting.result(WAIT_S)

    little_s = 0.05  # of its own
    assert waited_s < LEAST_SHARE * passed_s + little_s


def test_who_waits_for_something_else_is_long_in_the_end() -> None:
    begun_s = time.monotonic()
    watch = own_stopwatch()
    threading.Event().wait(0.1)
    assert watch() >= LEAST_SHARE * 0.1
    assert watch() <= time.monotonic() - begun_s


def test_never_do_more_than_the_most_compute_however_long_each_takes() -> None:
    now_s = [0.0]
    with shop(ComputingQueue(stopwatch_by(now_s))) as open_shop:
        for number in range(MOST_AT_A_TIME):
            now_s[0] = number * LONG_S
            assert open_shop.comes().has_begun.wait(WAIT_S)
        now_s[0] += 100 * LONG_S
        last = open_shop.comes()
        assert not last.has_begun.wait(0.05)
        open_shop.came[0].end()
        assert last.has_begun.wait(WAIT_S)


def test_who_finds_no_place_to_wait_is_told_how_many_there_are_and_when_to_come_again() -> None:
    with shop() as open_shop:
        open_shop.queue.places = AT_A_TIME + 1
        for _ in range(AT_A_TIME + 1):
            open_shop.comes()
        with pytest.raises(ProblemError) as refused, open_shop.queue.admitted():
            pytest.fail("nobody may compute here")
        assert refused.value.name == "service-busy"
        assert refused.value.headers == {"Retry-After": str(RETRY_AFTER_S)}
        assert refused.value.detail == "2 requests compute or wait for their turn to, and no more than 2 may"


def test_who_holds_a_place_is_not_refused_when_all_others_are_taken_meanwhile() -> None:
    with shop() as open_shop:
        open_shop.queue.places = 2
        with open_shop.queue.place():
            other = open_shop.comes()
            assert other.has_begun.wait(WAIT_S)
            other._may_end.set()
            with open_shop.queue.admitted():
                assert open_shop.queue._taken_count >= 1


def test_who_holds_a_place_counts_though_nothing_is_computed_and_gives_it_back() -> None:
    queue = ComputingQueue()
    queue.places = 1
    refused = []

    def comes() -> None:
        try:
            with queue.admitted():
                refused.append(False)
        except ProblemError:
            refused.append(True)

    with ThreadPoolExecutor(max_workers=1) as pool:
        with queue.place():
            pool.submit(comes).result(WAIT_S)
        pool.submit(comes).result(WAIT_S)

    assert refused == [True, False]


def test_a_computation_that_fails_makes_room_like_any_other() -> None:
    queue = ComputingQueue()
    queue.places = 1
    for _ in range(2):
        with pytest.raises(ValueError, match="no tune"), queue.admitted():
            raise ValueError("no tune")
    with queue.admitted():
        pass


def test_a_queue_that_is_opened_again_is_the_same_with_other_places() -> None:
    app = Flask("a shop")
    first = open_computing_queue(app, None)
    assert first.places is None
    assert open_computing_queue(app, 7) is first
    assert first.places == 7
