"""Chores: work that a worker does again and again beside planning, each in a thread of its own."""

import logging
import random
import threading
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from service.store.faults import StoreError

SPREAD = 0.2  # share by which waits differ, so that many workers do not all ask the database at once

log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True)
class Chore:
    """Something to be done again and again. Every worker does it, so doing it twice must do no harm.

    Attributes:
        name: What it is called in the log.
        every_s: Seconds between the end of one time and the next, more or less a fifth.
        work: Does it once. What it raises is logged, and it is done again at its time.
    """

    name: str
    every_s: float
    work: Callable[[], None]


def start_chores(chores: Iterable[Chore], stopping: threading.Event) -> list[threading.Thread]:
    """Start a thread for each chore; it ends, between two times, once `stopping` is set."""
    threads = [
        threading.Thread(target=_keep_doing, args=(chore, stopping), name=f"chore {chore.name}", daemon=True)
        for chore in chores
    ]
    for thread in threads:
        thread.start()
    return threads


def _keep_doing(chore: Chore, stopping: threading.Event) -> None:
    while not stopping.is_set():
        try:
            chore.work()
        except StoreError as fault:
            log.warning("the chore %r is done again in %g s: %s", chore.name, chore.every_s, fault)
        except Exception:
            log.exception("the chore %r went wrong; it is done again in %g s", chore.name, chore.every_s)
        stopping.wait(chore.every_s * random.uniform(1 - SPREAD, 1 + SPREAD))
