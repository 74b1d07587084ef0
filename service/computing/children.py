"""The computing children of a process: one that is warm, and more while searches take long."""

import logging
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress

from service.children.child_process import WARM_WITHIN_S, ChildEndedError, ChildProcess, ChildTooLongError
from service.computing.messages import (
    Answer,
    Asked,
    ChildSetup,
    answer_from_bytes,
    asked_as_bytes,
    setup_as_bytes,
)

CHILD = (sys.executable, "-m", "service.computing.child")
MOST_CHILDREN = 3  # of a process; a long search keeps one busy, and each takes some 110 MB once it has computed
GROWN_MIB = 200.0  # MiB beyond what it had when it was warm; one that keeps more is replaced
SPARE_S = 60.0  # s; after which a child goes that has nothing to do, where there are others
# Of a processor, that a child is taken to compute though it does less: one that is stopped, swapped out or slow to
# start holds the next up for ten seconds. A child that gives way on a busy machine still has about as much.
LEAST_SHARE = 0.1
CPUCLOCK_SCHED = 2  # of clock_getcpuclockid(3), as Linux makes the number of a process's clock

log = logging.getLogger("discwright")


class NoChildError(Exception):
    """No child could be started; the text says why."""


class ComputingChild:
    """A child that computes. Used by one thread at a time."""

    def __init__(self, setup: ChildSetup) -> None:
        """Start it, and wait until it is warm.

        Raises:
            ChildEndedError: It ended before.
            ChildTooLongError: It did not get ready.
            OSError: It could not be started.
        """
        self._process = ChildProcess(CHILD)
        try:
            warm = answer_from_bytes(self._process.ask(setup_as_bytes(setup), WARM_WITHIN_S))
        except BaseException:
            self._process.end()
            raise
        self._most_mib = warm.resident_mib + GROWN_MIB
        self._is_of_use = True
        self.idle_since_s = time.monotonic()

    @property
    def pid(self) -> int:
        """Of its process."""
        return self._process.pid

    @property
    def is_of_use(self) -> bool:
        """Whether it can be asked again: it lives, answered what it was asked, and has not grown."""
        return self._is_of_use and self._process.is_alive

    def ask(self, asked: Asked, within_s: float) -> Answer:
        """Let it work. After any of the errors the child is gone.

        Raises:
            ChildEndedError: It ended without an answer.
            ChildTooLongError: It took too long.
        """
        self._is_of_use = False
        answer = answer_from_bytes(self._process.ask(asked_as_bytes(asked), within_s))
        self._is_of_use = answer.resident_mib <= self._most_mib
        return answer

    def stopwatch(self) -> Callable[[], float]:
        """Tells the seconds that the child computes from now on, in any thread.

        By the processor's time where the system tells it of another process, as Linux does, and at least LEAST_SHARE of
        the time that passes; elsewhere, and once the child is gone, by the time that passes.
        """
        at_least_s, begun_s = least_computed(), time.monotonic()
        clock = (~self.pid << 3) | CPUCLOCK_SCHED
        begun_cpu_s = _clock_s(clock)

        def computed_s() -> float:
            now_s = None if begun_cpu_s is None else _clock_s(clock)
            if now_s is None or begun_cpu_s is None:
                return time.monotonic() - begun_s
            return max(now_s - begun_cpu_s, at_least_s())

        return computed_s

    def end(self) -> None:
        """Kill it, if it lives."""
        self._process.end()


def least_computed() -> Callable[[], float]:
    """Tells, in any thread, what a child is taken to compute from now on though it may do nothing, in seconds."""
    begun_s = time.monotonic()
    return lambda: LEAST_SHARE * (time.monotonic() - begun_s)


def _clock_s(clock: int) -> float | None:
    if sys.platform != "linux":
        return None
    try:
        return time.clock_gettime(clock)
    except OSError:  # the process is gone
        return None


class Children:
    """The children of a process, lent to one thread each."""

    def __init__(self, setup: ChildSetup) -> None:
        """Have none yet.

        Args:
            setup: What each is told.
        """
        self.setup = setup
        self._changed = threading.Condition()
        self._idle: list[ComputingChild] = []  # the one that has worked last at the end
        self._count = 0
        self._is_looked_for_spare = False  # one timer at a time, however often a child is given back

    @contextmanager
    def one(self, preferred: ComputingChild | None = None) -> Iterator[ComputingChild]:
        """A child to oneself, started where none is idle and there may be another; waits where there may not.

        Args:
            preferred: The one that is given where it is idle.

        Raises:
            NoChildError: One had to be started, and could not be.
        """
        child = self._taken(preferred) or self._started()
        try:
            yield child
        finally:
            self._given_back(child)

    def warm(self) -> None:
        """Have one, so that the first who asks need not wait for it; where that fails, it is tried again then."""
        with suppress(NoChildError), self.one():
            pass

    def end(self) -> None:
        """Let go those that have nothing to do."""
        with self._changed:
            idle, self._idle = self._idle, []
            self._count -= len(idle)
        for child in idle:
            child.end()

    def _taken(self, preferred: ComputingChild | None) -> ComputingChild | None:
        with self._changed:
            self._drop_dead()
            while not self._idle and self._count >= MOST_CHILDREN:
                self._changed.wait()
                self._drop_dead()
            if self._idle:
                child = preferred if preferred in self._idle else self._idle[-1]
                assert child is not None
                self._idle.remove(child)
                return child
            self._count += 1
            return None

    def _drop_dead(self) -> None:
        """Let go of idle children that something else has ended, so that nobody's work is given to them."""
        for child in [child for child in self._idle if not child.is_of_use]:
            self._idle.remove(child)
            self._count -= 1
            child.end()

    def _started(self) -> ComputingChild:
        try:
            return ComputingChild(self.setup)
        except (ChildEndedError, ChildTooLongError, OSError) as fault:
            self._one_less()
            why = str(fault) or "it did not get ready in time"
            log.error("no computing child could be started: %s", why)
            raise NoChildError(why) from fault
        except BaseException:
            self._one_less()
            raise

    def _given_back(self, child: ComputingChild) -> None:
        if not child.is_of_use:
            try:
                child.end()
            finally:
                self._one_less()
            return
        child.idle_since_s = time.monotonic()
        with self._changed:
            self._idle.append(child)
            self._changed.notify()
            self._look_for_spare_later()

    def _look_for_spare_later(self) -> None:
        if self._count <= 1 or self._is_looked_for_spare:
            return
        looking = threading.Timer(SPARE_S, self._let_spare_go)
        looking.daemon = True
        with suppress(RuntimeError):  # no thread can be had: whoever gives a child back next tries again
            looking.start()
            self._is_looked_for_spare = True

    def _let_spare_go(self) -> None:
        with self._changed:
            self._is_looked_for_spare = False
            now_s = time.monotonic()
            spare = [child for child in self._idle if now_s - child.idle_since_s >= SPARE_S][: self._count - 1]
            self._idle = [child for child in self._idle if child not in spare]
            self._count -= len(spare)
            self._look_for_spare_later()
        for child in spare:
            child.end()

    def _one_less(self) -> None:
        with self._changed:
            self._count -= 1
            self._changed.notify()
