"""A worker put together: orders planned, hooks told, and what has been kept long enough let go."""

import threading
from collections.abc import Callable

from service.access.browsers import sweep_browsers
from service.background.chores import Chore
from service.background.queue import Queue
from service.background.worker import Worker, work_until_told
from service.hooks.telling import tell_hooks
from service.orders.retention import keep_retention
from service.orders.run_opening import RunOpener
from service.parts import Parts
from service.store.holds import FileKeeper, sweep_files

OPEN_S = 1.0  # s; how soon a run is begun, and how often it is looked whether more of it may wait
MINUTE_S = 60.0
HOUR_S = 3600.0
FILES_AT_A_TIME = 500  # files removed before others get a turn; what is left is removed the next time
ENDS_WITHIN_S = 1.0  # s; for the thread that tells hooks, once the worker itself has stopped


def work(parts: Parts, *, slots: int, say_started: Callable[[], None]) -> bool:
    """Work in this process until SIGTERM or SIGINT.

    Args:
        parts: Opened in this process.
        slots: How many orders are planned at a time.
        say_started: Called once signals are heeded and orders are taken.

    Returns:
        Whether it stopped with nothing in hand.
    """
    stopping = threading.Event()
    worker = Worker(parts, slots=slots, chores=chores_of(parts), stopping=stopping)
    telling = threading.Thread(target=tell_hooks, args=(parts, stopping), name="tell hooks", daemon=True)
    telling.start()
    in_time = work_until_told(worker, say_started)
    telling.join(ENDS_WITHIN_S)  # it began to stop with the worker
    return in_time


def chores_of(parts: Parts) -> tuple[Chore, ...]:
    """What every worker does now and then; of many workers each may do it, which does no harm.

    Args:
        parts: What is kept, and for how long.
    """
    store, retention = parts.store, parts.settings.retention
    keeper, queue = FileKeeper(store, parts.files), Queue(parts.settings.queue_url)
    opener = RunOpener(store, keeper, queue.send, parts.settings.limits)

    def sweep_old_browsers() -> None:
        with store.reading() as session:
            now = store.now(session)
        sweep_browsers(store, now)

    return (
        Chore(name="open runs", every_s=OPEN_S, work=opener.open_all),
        Chore(
            name="let go of what has been kept long enough",
            every_s=HOUR_S,
            work=lambda: _done(keep_retention(store, parts.files, retention)),
        ),
        Chore(name="forget browsers", every_s=HOUR_S, work=sweep_old_browsers),
        Chore(
            name="remove files that nobody holds",
            every_s=10 * MINUTE_S,
            work=lambda: _done(sweep_files(store, parts.files, most=FILES_AT_A_TIME)),
        ),
    )


def _done(_: object) -> None:
    """A chore tells nothing."""
