"""A small supervisor: keeps some processes running, passes on signals, and ends when all of them have ended.

One that dies is started again after a pause that grows while it keeps dying. Each is told to stop once for each
signal, for a terminal's Ctrl-C would reach it twice; so each is a group of its own. Should the supervisor itself be
killed, the kernel tells them (prctl(2), PR_SET_PDEATHSIG).
"""

import ctypes
import logging
import os
import select
import signal
import subprocess
import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from types import FrameType

PR_SET_PDEATHSIG = 1  # linux/prctl.h
FIRST_PAUSE_S = 0.5
LONGEST_PAUSE_S = 30.0
PAUSE_FACTOR = 2.0
STEADY_AFTER_S = 60.0  # s; one that ran so long begins anew with the first pause
LOOK_EVERY_S = 0.2
KILL_AFTER_S = 10.0  # s; beyond the time they have to stop
NO_USE = 2  # the code of a program that cannot run as it is asked to: starting it again would not help

log = logging.getLogger("discwright")


@dataclass(frozen=True, slots=True, kw_only=True)
class Program:
    """What is kept running.

    Attributes:
        name: As the log tells of it.
        command: Its command line.
        environment: What its environment has beside ours.
        handed_on: File descriptors that it gets.
    """

    name: str
    command: Sequence[str]
    environment: Mapping[str, str] = field(default_factory=dict)
    handed_on: tuple[int, ...] = ()


def supervise(programs: Sequence[Program], *, stop_within_s: float, prepare: Callable[[], None] = lambda: None) -> int:
    """Keep programs running until SIGTERM or SIGINT, then until they have ended.

    Args:
        programs: What runs.
        stop_within_s: Seconds they have to stop; one that takes much longer is killed.
        prepare: Done once the first program is started and before all others are: what may take its time while that
            one gets ready. Where it raises, the first is stopped, and it is raised on.

    Returns:
        0; 2 where one could not run at all.
    """
    # A handler only writes into a pipe: what it means is decided where nothing else is half done.
    told, telling = os.pipe()
    os.set_blocking(told, False)

    def tell(number: int, frame: FrameType | None) -> None:
        os.write(telling, b".")

    before = {number: signal.signal(number, tell) for number in (signal.SIGTERM, signal.SIGINT)}
    try:
        return _Supervisor(programs, told, stop_within_s).run(prepare)
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
        os.close(told)
        os.close(telling)


class _Kept:
    """One program, running or waiting for its next start."""

    def __init__(self, program: Program) -> None:
        self.program = program
        self.process: subprocess.Popen[bytes] | None = None
        self._begun_s = 0.0
        self._next_s = 0.0
        self._pause_s = FIRST_PAUSE_S
        self.starts = 0

    def start_when_due(self) -> None:
        if self.process is not None or time.monotonic() < self._next_s:
            return
        program = self.program
        self.process = subprocess.Popen(
            program.command,
            env={**os.environ, **program.environment},
            pass_fds=program.handed_on,
            start_new_session=True,
            preexec_fn=_end_with_parent,  # noqa: PLW1509 -- this process has one thread
        )
        self._begun_s = time.monotonic()
        self.starts += 1

    def look(self) -> int | None:
        """The code of a process that has just ended; None while it runs."""
        code = None if self.process is None else self.process.poll()
        if code is not None:
            self.process = None
            if time.monotonic() - self._begun_s >= STEADY_AFTER_S:
                self._pause_s = FIRST_PAUSE_S
        return code

    def plan_restart(self, code: int) -> None:
        log.error("%s ended %s; it is started again in %g s", self.program.name, _how(code), self._pause_s)
        self._next_s = time.monotonic() + self._pause_s
        self._pause_s = min(self._pause_s * PAUSE_FACTOR, LONGEST_PAUSE_S)

    def tell(self, number: signal.Signals) -> None:
        if self.process is not None:
            self.process.send_signal(number)


class _Supervisor:
    """The loop."""

    def __init__(self, programs: Sequence[Program], told: int, stop_within_s: float) -> None:
        self._kept = [_Kept(program) for program in programs]
        self._told = told
        self._stop_within_s = stop_within_s
        self._code = 0

    def run(self, prepare: Callable[[], None]) -> int:
        self._kept[0].start_when_due()
        try:
            prepare()
        except BaseException:
            self._stop()
            raise
        while not self._is_told():
            for kept in self._kept:
                kept.start_when_due()
                code = kept.look()
                if code == NO_USE and kept.starts == 1:
                    log.error("%s cannot run: its line above says why", kept.program.name)
                    self._code = NO_USE
                    self._stop()
                    return self._code
                if code is not None:
                    kept.plan_restart(code)
        self._stop()
        return self._code

    def _stop(self) -> None:
        self._tell(signal.SIGTERM)
        kill_at_s = time.monotonic() + self._stop_within_s + KILL_AFTER_S
        while any(kept.process is not None for kept in self._kept):
            if self._is_told():
                self._tell(signal.SIGTERM)  # once more: whoever asks again is in a hurry
            if time.monotonic() >= kill_at_s:
                log.error("what has not stopped by now is killed")
                self._tell(signal.SIGKILL)
                kill_at_s += KILL_AFTER_S
            for kept in self._kept:
                kept.look()

    def _tell(self, number: signal.Signals) -> None:
        for kept in self._kept:
            kept.tell(number)

    def _is_told(self) -> bool:
        ready, _, _ = select.select([self._told], [], [], LOOK_EVERY_S)
        return bool(ready) and bool(os.read(self._told, 1))


def _how(code: int) -> str:
    return f"with code {code}" if code >= 0 else f"by {signal.Signals(-code).name}"


def _end_with_parent() -> None:
    ctypes.CDLL(None, use_errno=True).prctl(PR_SET_PDEATHSIG, signal.SIGTERM, 0, 0, 0)
