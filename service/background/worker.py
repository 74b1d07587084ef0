"""A worker: slots that plan, a thread that renews leases, a sweep, and chores; stopped without losing anything."""

import logging
import os
import secrets
import select
import signal
import socket
import threading
import time
from collections.abc import Callable, Sequence
from types import FrameType

from service.background.chores import Chore, start_chores
from service.background.holding import Holding
from service.background.messages import ChildSetup
from service.background.queue import Queue
from service.background.slot import Shared, Slot
from service.background.sweeping import Sweep
from service.parts import Parts

PLANNER = "layout.walk"
NAME_CHARACTERS = 60  # of the host's name: enough to find it
FINISH_SHARE = 0.7  # of the time to stop: orders in hand may end by themselves; the rest is for handing back

log = logging.getLogger(__name__)


class Worker:
    """A worker of this process."""

    def __init__(
        self,
        parts: Parts,
        *,
        slots: int,
        chores: Sequence[Chore] = (),
        planner: str = PLANNER,
        stopping: threading.Event | None = None,
    ) -> None:
        """Get ready; nothing is started yet.

        Args:
            parts: The store, the files and the settings, opened in this process.
            slots: How many orders are planned at a time.
            chores: What is done beside.
            planner: The module of the computation, by its import path.
            stopping: Set once the worker stops, for what else shall stop then; None for one of its own.
        """
        work = parts.settings.work
        self._within_s = float(work.stop_within_s)
        self._finished = threading.Event()
        self._chores = chores
        self._shared = Shared(
            name=f"{socket.gethostname()[:NAME_CHARACTERS]}:{os.getpid()}:{secrets.token_hex(4)}",
            store=parts.store,
            queue=Queue(parts.settings.queue_url),
            sweep=Sweep(parts.store, slots),
            holding=Holding(parts.store, work.lease_s),
            work=work,
            setup=ChildSetup(
                database_url=parts.settings.database_url,
                files_url=parts.settings.files_url,
                planner=planner,
                memory_mib=work.plan_memory_mib,
                parent_pid=os.getpid(),
            ),
            stopping=stopping or threading.Event(),
            hurrying=threading.Event(),
        )
        self._slots = [
            threading.Thread(target=Slot(self._shared).run, name=f"slot {number}", daemon=True)
            for number in range(1, slots + 1)
        ]

    def start(self) -> None:
        """Begin to take orders."""
        shared = self._shared
        log.info("the worker %s starts with %d slots", shared.name, len(self._slots))
        holding = Chore(name="renew leases", every_s=shared.holding.every_s, work=shared.holding.renew_all)
        sweep = Chore(name="sweep", every_s=shared.work.sweep_s, work=shared.sweep.sweep)
        start_chores([holding], self._finished)  # to the end: orders in hand are held until they are out of it
        start_chores([sweep, *self._chores], shared.stopping)
        for slot in self._slots:
            slot.start()

    def stop(self, *, hurry: threading.Event | None = None) -> bool:
        """Take no further order, finish those in hand or hand them back.

        Args:
            hurry: Where it is set meanwhile, they are handed back at once.

        Returns:
            Whether all were out of hand in time. What was not is taken by another after its lease.
        """
        shared, begun_s = self._shared, time.monotonic()
        shared.stopping.set()
        while self._is_at_work and time.monotonic() < begun_s + FINISH_SHARE * self._within_s:
            if hurry is not None and hurry.is_set():
                break
            time.sleep(0.02)
        shared.hurrying.set()
        for slot in self._slots:
            slot.join(max(0.0, begun_s + self._within_s - time.monotonic()))
        in_time = not self._is_at_work
        self._finished.set()
        log.info("the worker %s has stopped%s", shared.name, "" if in_time else " with orders in hand")
        return in_time

    @property
    def _is_at_work(self) -> bool:
        return any(slot.is_alive() for slot in self._slots)


def work_until_told(worker: Worker, say_started: Callable[[], None] = lambda: None) -> bool:
    """Run a worker in this process until SIGTERM or SIGINT; a second one hands its orders back at once.

    Args:
        worker: Not started yet.
        say_started: Called once signals are heeded and orders are taken.

    Returns:
        Whether it stopped with nothing in hand.
    """
    # The interpreter writes into the pipe the moment a signal comes. A handler of our own would run between two steps
    # of this thread: never, where the signal comes to another thread or just before this one begins to wait.
    told, telling = os.pipe()
    os.set_blocking(telling, False)
    signal.set_wakeup_fd(telling, warn_on_full_buffer=False)
    for number in (signal.SIGTERM, signal.SIGINT):
        signal.signal(number, _is_told_by_the_pipe)
    worker.start()
    say_started()
    os.read(told, 1)
    hurry = threading.Event()
    threading.Thread(target=_hurry_when_told, args=(told, hurry), daemon=True).start()
    return worker.stop(hurry=hurry)


def _is_told_by_the_pipe(number: int, frame: FrameType | None) -> None:
    """Keep a signal from ending the process."""


def _hurry_when_told(told: int, hurry: threading.Event) -> None:
    select.select([told], [], [])
    hurry.set()
