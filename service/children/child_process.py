"""A child as its parent has it: started, asked one thing after another, and killed where it must be."""

import contextlib
import os
import signal
import subprocess
import time
from collections.abc import Callable, Sequence

from service.children.frames import BrokenFrameError, FrameReader, frame_of, written_on

WARM_WITHIN_S = 120.0  # s; the imports take two on an idle machine
LOOK_EVERY_S = 0.2  # s; how soon a child is killed that shall go on no longer
ENDING_S = 10.0  # s; between the end of a child's pipe and its own: on a machine that stood still, more than two
# There are as many children as processors, so each computes in one thread. Few arenas: each thread's own would reserve
# memory that it never uses, and count against the limit (mallopt(3)).
ALONE = {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1", "MALLOC_ARENA_MAX": "2"}


class ChildEndedError(Exception):
    """The child ended of itself or was killed by another; the text says how."""


class ChildTooLongError(Exception):
    """The child did not answer in time, and was killed."""


class ChildUnwantedError(Exception):
    """Nobody wants the answer any more; the child was killed."""


def always() -> bool:
    """That an answer is wanted, whatever happens."""
    return True


class ChildProcess:
    """A process that answers each message with one. Used by one thread at a time."""

    def __init__(self, command: Sequence[str]) -> None:
        """Start it.

        Args:
            command: Its command line; it reads messages from its standard input, and answers on its standard output.

        Raises:
            OSError: It could not be started.
        """
        self._process = subprocess.Popen(
            command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, env={**os.environ, **ALONE}
        )
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        self._orders = self._process.stdin.fileno()
        os.set_blocking(self._orders, False)
        self._pipes = (self._process.stdin, self._process.stdout)
        self._reader = FrameReader(self._process.stdout.fileno())

    @property
    def pid(self) -> int:
        """Of the process."""
        return self._process.pid

    @property
    def is_alive(self) -> bool:
        """Whether it has not ended."""
        return self._process.poll() is None

    def ask(self, message: bytes, within_s: float, is_wanted: Callable[[], bool] = always) -> bytes:
        """Send a message and wait for the answer. After any of the errors the child is gone.

        Args:
            message: What is sent.
            within_s: Seconds that the answer may take.
            is_wanted: Asked now and then; where it says no, the child is killed.

        Raises:
            ChildEndedError: It ended without an answer.
            ChildTooLongError: It took too long.
            ChildUnwantedError: It was not wanted any more.
        """
        last_s = time.monotonic() + within_s
        rest = frame_of(message)
        try:
            while rest := written_on(self._orders, rest, LOOK_EVERY_S):
                _see_that_it_goes_on(last_s, is_wanted)
            while (answer := self._reader.read_within(LOOK_EVERY_S)) is None:
                _see_that_it_goes_on(last_s, is_wanted)
        except BrokenFrameError as fault:
            raise ChildEndedError(self._how_it_ended()) from fault
        except BaseException:
            self.end()
            raise
        return answer

    def end(self) -> None:
        """Kill it, if it lives, and let its pipes go."""
        self._process.kill()
        self._process.wait()
        for pipe in self._pipes:
            with contextlib.suppress(BrokenPipeError):
                pipe.close()

    def _how_it_ended(self) -> str:
        try:
            code = self._process.wait(ENDING_S)
        except subprocess.TimeoutExpired:
            self.end()
            return "its process broke its pipe off and lived on"
        self.end()
        if code >= 0:
            return f"its process ended with code {code}"
        return f"its process was ended by {signal.Signals(-code).name}"


def _see_that_it_goes_on(last_s: float, is_wanted: Callable[[], bool]) -> None:
    if not is_wanted():
        raise ChildUnwantedError
    if time.monotonic() >= last_s:
        raise ChildTooLongError
