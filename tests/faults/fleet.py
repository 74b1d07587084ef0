"""Workers as real processes, which are killed, frozen and started again; only what was started here is touched."""

import os
import random
import signal
import sqlite3
import subprocess
import sys
import threading
import time
from collections.abc import Callable, Mapping
from pathlib import Path

from service.background.queue import Queue
from service.parts import Parts
from service.store.faults import StoreError
from tests.faults.ordering import place, states, tune_called

LOST_MESSAGES = 5  # one order of so many is told to nobody, as when a web process dies after its commit


class Fleet:
    """Some workers, each started again when it ends, as whoever supervises them would."""

    def __init__(self, environment: Mapping[str, str], log: Path, *, workers: int, slots: int = 1) -> None:
        """Start them.

        Args:
            environment: The variables of the service.
            log: Where all of them write.
            workers: How many processes.
            slots: Of each.
        """
        self._environment = {**os.environ, **environment}
        self._slots = slots
        self._log = log.open("ab")
        self._lock = threading.Lock()
        self._is_over = False
        self.kills = 0
        self.starts = 0
        self._processes = [self._start() for _ in range(workers)]
        self._keeper = threading.Thread(target=self._keep_alive, daemon=True)
        self._keeper.start()

    def __enter__(self) -> "Fleet":
        return self

    def __exit__(self, *_: object) -> None:
        """Leave nobody behind where a test ends before it stopped them; one may sleep, so all are killed."""
        if self._is_over:
            return
        with self._lock:
            self._is_over = True
            for process in self._processes:
                process.kill()
        for process in self._processes:
            process.wait(30)
        self._keeper.join()
        self._log.close()

    def pids(self) -> list[int]:
        """Of the workers that live."""
        with self._lock:
            return [process.pid for process in self._processes if process.poll() is None]

    def kill_one(self, chance: random.Random) -> None:
        """End one of the workers, or the child of one, without a word."""
        pid = chance.choice(self.pids())
        children = children_of(pid)
        victim = chance.choice(children) if children and chance.random() < 1 / 4 else pid
        try:
            os.kill(victim, signal.SIGKILL)
        except ProcessLookupError:
            return
        self.kills += 1

    def stop(self) -> list[int]:
        """Tell all to stop, and give the codes they end with."""
        with self._lock:
            self._is_over = True
            for process in self._processes:
                process.terminate()
        codes = [process.wait(30) for process in self._processes]
        self._keeper.join()
        self._log.close()
        return codes

    def _keep_alive(self) -> None:
        while not self._is_over:
            with self._lock:
                for place_in_list, process in enumerate(self._processes):
                    if process.poll() is not None and not self._is_over:
                        self._processes[place_in_list] = self._start()
            time.sleep(0.05)

    def _start(self) -> "subprocess.Popen[bytes]":
        self.starts += 1
        return subprocess.Popen(
            [sys.executable, "-m", "tests.faults.work", str(self._slots)],
            env=self._environment,
            cwd=Path(__file__).parents[2],
            stdin=subprocess.DEVNULL,
            stdout=self._log,
            stderr=self._log,
        )


class Stream:
    """Orders placed one after another while workers are at work, some of their messages lost."""

    def __init__(self, parts: Parts, *, orders: int, every_s: float, chance: random.Random) -> None:
        """Begin to place orders.

        Args:
            parts: Of a shop that is open.
            orders: How many.
            every_s: Seconds between two, on the average.
            chance: Decides how long each takes to plan, and whether its message is lost.
        """
        self.tunes: dict[str, bytes] = {}
        self.refusals = 0
        self._parts = parts
        self._deeds = [f"do:sleep {chance.uniform(0.05, 0.4):.3f}; {number}" for number in range(orders)]
        self._waits_s = [chance.expovariate(1 / every_s) for _ in range(orders)]
        self._thread = threading.Thread(target=self._place_all, daemon=True)
        self._thread.start()

    def wait(self) -> None:
        """Until all are placed."""
        self._thread.join()

    def _place_all(self) -> None:
        queue = Queue(self._parts.settings.queue_url)
        for number, (deed, wait_s) in enumerate(zip(self._deeds, self._waits_s, strict=True)):
            tune = tune_called(deed)
            order_id = self._placed(tune)
            self.tunes[order_id] = tune
            if number % LOST_MESSAGES:
                queue.send(order_id)
            time.sleep(wait_s)
        queue.close()

    def _placed(self, tune: bytes) -> str:
        while True:
            try:
                return place(self._parts, tune)
            except StoreError:
                self.refusals += 1
                time.sleep(1.0)


def children_of(pid: int) -> list[int]:
    """The processes that a process has started."""
    found: list[int] = []
    for path in Path(f"/proc/{pid}/task").glob("*/children"):
        try:
            found += map(int, path.read_text().split())
        except OSError:
            continue  # the thread has ended
    return found


def wait_for(true: Callable[[], bool], *, within_s: float) -> None:
    """Wait until something is true.

    Raises:
        TimeoutError: It is not, after that time.
    """
    last_s = time.monotonic() + within_s
    while True:
        try:
            if true():
                return
        except StoreError:
            pass  # the database is away: what is wanted will be seen later
        if time.monotonic() > last_s:
            raise TimeoutError
        time.sleep(0.03)


def wait_until_none_is_open(parts: Parts, order_ids: list[str], *, within_s: float) -> None:
    """Wait until every order is planned or has failed."""
    wait_for(lambda: not {"received", "planning"} & states(parts, order_ids).keys(), within_s=within_s)


def hold_database(parts: Parts, for_s: float) -> None:
    """Keep everyone else from writing into an SQLite database for a while."""
    hold_database_of(parts.settings.places.data_directory.parent, for_s)


def hold_database_of(folder: Path, for_s: float) -> None:
    """So too, of the service whose data is in a folder."""
    lock = sqlite3.connect(folder / "data" / "discwright.sqlite", isolation_level=None, timeout=60)
    lock.execute("BEGIN IMMEDIATE")
    time.sleep(for_s)
    lock.execute("ROLLBACK")
    lock.close()
