"""Who computes in this process, or in a child of it, at a time: few, so that all others are answered meanwhile.

Where many compute, each takes as much longer, nothing is finished sooner, and in this process, one thread of which runs
at a time, who only wants a page waits for a turn among all of them, several times over. So one computes, the others in
the order in which they came, and wait where waiting costs nothing. A long search does not hold them up: once it has
computed for a second the next begins beside it. That second is the processor's: by the wall's clock a busy process
would make every computation long, let the next begin beside it, and be busier for it. Only a share of the threads may
compute or wait for it, behind locks too; who finds no place there is told to come again. Each process counts for
itself.
"""

import sys
import threading
import time
from collections import deque
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from flask import Flask, current_app

from service.api.problems import ProblemError
from service.web_turns import give_up_turn

AT_A_TIME = 1  # that compute; with two a page at hand takes twice as long in the 99th percentile, measured
LONG_S = 1.0  # s of the processor's time; after which who computes no longer counts; nearly all have ended by then
# Of a processor, that counts as computed though less is: who waits for a disk, which a sound is written to, holds the
# next up for two seconds at most.
LEAST_SHARE = 0.5
LOOK_AGAIN_S = 0.05  # s; at the least, till the next look at who computes
MOST_AT_A_TIME = 8  # with those that have computed for longer
RETRY_AFTER_S = 2  # s; in which a process computes some twenty of those that wait, 0.1 s each for a tune of 300 notes
COMPUTING_QUEUE = "discwright computing queue"


class ComputingQueue:
    """Lets those who compute begin one after the other; shared by the threads of a process."""

    def __init__(
        self, stopwatch: Callable[[], Callable[[], float]] | None = None, *, most_at_a_time: int = MOST_AT_A_TIME
    ) -> None:
        """Open it to as many as like to wait.

        Args:
            most_at_a_time: How many compute at most, with those that have computed for long.
            stopwatch: Called by who begins to compute; what it gives tells, in any thread, the seconds computed since.
        """
        self.places: int | None = None
        self._most_at_a_time = most_at_a_time
        self._stopwatch = stopwatch or own_stopwatch
        self._taken_count = 0
        self._mine = threading.local()
        self._changed = threading.Condition()
        self._waiting: deque[object] = deque()
        self._computed_s: dict[object, Callable[[], float]] = {}

    @contextmanager
    def place(self) -> Iterator[None]:
        """Hold a place in here, for whatever is waited for before computing, such as a lock.

        Who holds one may enter again, and is not refused: what was computed so far is not thrown away.

        Raises:
            ProblemError: All places are taken.
        """
        if getattr(self._mine, "has_place", False):
            yield
            return
        with self._changed:
            if self.places is not None and self._taken_count >= self.places:
                raise ProblemError(
                    name="service-busy",
                    detail=f"{self._taken_count} requests compute or wait for their turn to, and no more than "
                    f"{self.places} may",
                    headers={"Retry-After": str(RETRY_AFTER_S)},
                )
            self._taken_count += 1
        give_up_turn()
        self._mine.has_place = True
        try:
            yield
        finally:
            self._mine.has_place = False
            with self._changed:
                self._taken_count -= 1

    @contextmanager
    def admitted(self) -> Iterator[Callable[[Callable[[], float]], None]]:
        """Compute in here; entered when it is one's turn. Not to be entered again from within.

        Gives what may be called with another stopwatch, where another process computes meanwhile: one that tells, in
        any thread, the seconds that it has computed.

        Raises:
            ProblemError: All places are taken, and one is not held already.
        """
        mine = object()
        with self.place():
            with self._changed:
                self._waiting.append(mine)
                try:
                    self._wait_till_first(mine)
                finally:
                    self._waiting.remove(mine)
                    self._changed.notify_all()
                self._computed_s[mine] = self._stopwatch()

            def measure_by(computed_s: Callable[[], float]) -> None:
                with self._changed:
                    self._computed_s[mine] = computed_s

            try:
                yield measure_by
            finally:
                with self._changed:
                    del self._computed_s[mine]
                    self._changed.notify_all()

    def _wait_till_first(self, mine: object) -> None:
        while True:
            if self._waiting[0] is not mine:
                self._changed.wait()
                continue
            left_s = self._left_s()
            if left_s == 0:
                return
            self._changed.wait(None if left_s is None else max(left_s, LOOK_AGAIN_S))

    def _left_s(self) -> float | None:
        """How much those who compute must compute before the next may begin though none ends; None for never."""
        if len(self._computed_s) >= self._most_at_a_time:
            return None
        left_s = sorted(LONG_S - computed_s() for computed_s in self._computed_s.values())
        counted_s = [each_s for each_s in left_s if each_s > 0]
        return 0 if len(counted_s) < AT_A_TIME else counted_s[-AT_A_TIME]


def own_stopwatch() -> Callable[[], float]:
    """Tells what the calling thread computes from now on, in seconds; to be asked only while that thread lives.

    By the processor's time of the thread where the system tells it of another thread, as Linux does, and at least
    LEAST_SHARE of the time that passes; elsewhere by the time that passes.
    """
    begun_s = time.monotonic()
    if sys.platform != "linux":
        return lambda: time.monotonic() - begun_s
    clock = time.pthread_getcpuclockid(threading.get_ident())
    begun_cpu_s = time.clock_gettime(clock)
    return lambda: max(time.clock_gettime(clock) - begun_cpu_s, LEAST_SHARE * (time.monotonic() - begun_s))


def open_computing_queue(app: Flask, places: int | None) -> ComputingQueue:
    """The queue of an app.

    Args:
        app: The app.
        places: How many requests may compute or wait for it at a time; None for as many as like.
    """
    queue: ComputingQueue = app.extensions.setdefault(COMPUTING_QUEUE, ComputingQueue())
    queue.places = places
    return queue


def computing_queue() -> ComputingQueue:
    """The queue of the app of the request at hand."""
    queue: ComputingQueue = current_app.extensions[COMPUTING_QUEUE]
    return queue
