"""A worker's side of its child: starts it, gives it an order, and kills it where it must."""

import contextlib
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable

from service.background.frames import BrokenFrameError, FrameReader, write_frame
from service.background.messages import (
    ChildAnswer,
    ChildSetup,
    PlanRequest,
    answer_from_json,
    as_json,
)

WARM_WITHIN_S = 120.0  # s; the imports take two on an idle machine
LOOK_EVERY_S = 0.2  # s; how soon a child is killed that shall go on no longer
ENDING_S = 2.0  # s; between the end of a child's pipe and its own
CHILD = (sys.executable, "-m", "service.background.child")
# Slots are as many as processors, so a child computes in one thread. Few arenas: each thread's own would reserve
# memory that it never uses, and count against the limit (mallopt(3)).
ALONE = {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1", "MALLOC_ARENA_MAX": "2"}


class ChildEndedError(Exception):
    """The child ended of itself or was killed by another; the text says how."""


class ChildTooLongError(Exception):
    """The child did not answer in time, and was killed."""


class ChildUnwantedError(Exception):
    """Nobody wants the answer any more; the child was killed."""


class PlanningChild:
    """A child that plans. Started and used by one thread, with whose end it ends too."""

    def __init__(self, setup: ChildSetup, is_wanted: Callable[[], bool] = lambda: True) -> None:
        """Start a child, and wait until it is warm.

        Args:
            setup: What it is told.
            is_wanted: Asked now and then; where it says no, the child is killed.

        Raises:
            ChildEndedError: It ended before.
            ChildTooLongError: It did not get ready.
            ChildUnwantedError: It was not wanted any more.
        """
        self._process = subprocess.Popen(
            CHILD, stdin=subprocess.PIPE, stdout=subprocess.PIPE, env={**os.environ, **ALONE}
        )
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        self._orders = self._process.stdin
        self._pipes = (self._process.stdin, self._process.stdout)
        self._reader = FrameReader(self._process.stdout.fileno())
        self._most_mib = setup.memory_mib / 2
        self._warm_mib = self._resident_mib = self._ask(as_json(setup), WARM_WITHIN_S, is_wanted).resident_mib

    @property
    def pid(self) -> int:
        """Of its process."""
        return self._process.pid

    @property
    def has_grown(self) -> bool:
        """Whether it holds half of what one plan may take more than when it was warm, and should be replaced."""
        return self._resident_mib - self._warm_mib > self._most_mib

    def plan(self, request: PlanRequest, within_s: float, is_wanted: Callable[[], bool]) -> ChildAnswer:
        """Plan an order. After any of the errors the child is gone.

        Args:
            request: The order.
            within_s: Seconds that it may take.
            is_wanted: Asked now and then; where it says no, the child is killed.

        Raises:
            ChildEndedError: It ended without an answer.
            ChildTooLongError: It took too long.
            ChildUnwantedError: It was not wanted any more.
        """
        answer = self._ask(as_json(request), within_s, is_wanted)
        self._resident_mib = answer.resident_mib
        return answer

    def end(self) -> None:
        """Kill it, if it lives, and let its pipes go."""
        self._process.kill()
        self._process.wait()
        for pipe in self._pipes:
            with contextlib.suppress(BrokenPipeError):
                pipe.close()

    def _ask(self, message: bytes, within_s: float, is_wanted: Callable[[], bool]) -> ChildAnswer:
        last_s = time.monotonic() + within_s
        try:
            write_frame(self._orders, message)
            while (text := self._reader.read_within(LOOK_EVERY_S)) is None:
                if not is_wanted():
                    raise ChildUnwantedError
                if time.monotonic() >= last_s:
                    raise ChildTooLongError
            return answer_from_json(text)
        except (BrokenFrameError, OSError) as fault:
            raise ChildEndedError(self._how_it_ended()) from fault
        except BaseException:
            self.end()
            raise

    def _how_it_ended(self) -> str:
        try:
            code = self._process.wait(ENDING_S)
        except subprocess.TimeoutExpired:
            code = 0  # it lives, but closed its pipe: no less gone
        self.end()
        if code >= 0:
            return f"its process ended with code {code}"
        return f"its process was ended by {signal.Signals(-code).name}"
