"""Whose turn it is among the threads of a web process: few work at a time, the others wait where waiting costs nothing.

Threads of a process share one interpreter. Where twenty want it, each of the short turns that a request needs is waited
for twenty times as long, in the event loop and in the threads for health as well; nothing is answered sooner for it.

Who waits for something else than the interpreter should give its turn up. Where it does not, as in a read of the
database, it counts till LONG_S: of a database that takes w seconds for a request, a process asks for AT_A_TIME / w a
second, or AT_A_TIME / LONG_S where that is more, up to what its threads can wait for.
"""

import threading
import time
from collections import deque
from collections.abc import Callable, Iterator
from contextlib import contextmanager

AT_A_TIME = 2  # that work; with all 32 threads health takes some ten times as long under twice the load, measured
# s; after which who works no longer counts: it waits for a database, a slow client or a disk. With 0.1 s, and four at
# a time, health took 0.41 s at the 99th percentile under twice the load, once; with this, over four runs, 0.08 to 0.24.
LONG_S = 0.25

_held = threading.local()


class Turns:
    """Lets those who come begin one after the other; shared by the threads of a process."""

    def __init__(self, clock: Callable[[], float] = time.monotonic) -> None:
        """Open it.

        Args:
            clock: Seconds, only ever forward.
        """
        self._clock = clock
        self._lock = threading.Lock()
        self._waiting: deque[threading.Event] = deque()
        self._begun_s: dict[threading.Event, float] = {}

    @contextmanager
    def turn(self) -> Iterator[None]:
        """Work in here; entered when it is one's turn. Not to be entered again from within."""
        mine = threading.Event()
        with self._lock:
            self._waiting.append(mine)
            self._let_begin()
        while not mine.wait(LONG_S):  # by then all have begun anew, or are long
            with self._lock:
                self._let_begin()
        _held.turn = (self, mine)
        try:
            yield
        finally:
            give_up_turn()

    def _let_begin(self) -> None:
        now_s = self._clock()
        while self._waiting and sum(now_s - begun_s < LONG_S for begun_s in self._begun_s.values()) < AT_A_TIME:
            first = self._waiting.popleft()
            self._begun_s[first] = now_s
            first.set()

    def _end(self, mine: threading.Event) -> None:
        with self._lock:
            del self._begun_s[mine]
            self._let_begin()


def give_up_turn() -> None:
    """Let the next begin: for who is about to wait for long, or for a turn of another sort. Nothing without a turn."""
    held: tuple[Turns, threading.Event] | None = getattr(_held, "turn", None)
    if held is not None:
        _held.turn = None
        turns, mine = held
        turns._end(mine)
