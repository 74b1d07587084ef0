"""Tells hooks what waits for them: a loop for the process of a worker.

The database is looked into once a second, and at once whenever a message has gone out. Several processes may do it
at a time: each message is taken by one of them.
"""

import logging
import threading
import time
from collections import Counter
from datetime import datetime
from http import HTTPStatus

from service.hooks.deliveries import due
from service.hooks.sending import Result, Taken, Ways, lease_of, send, take
from service.hooks.stopping import note_stopped
from service.limits import HOOK_LIMITS
from service.parts import Parts
from service.store.faults import StoreError

log = logging.getLogger("discwright")


def tell_hooks(parts: Parts, stop: threading.Event, *, ways: Ways | None = None) -> None:
    """Send what is due, until told to stop; then see what is being sent to its end for a while.

    Args:
        parts: Of this process.
        stop: Set from elsewhere.
        ways: How messages get out; None for as usual.
    """
    sender = _Sender(parts, ways or Ways())
    while not stop.is_set():
        try:
            sender.send_due()
        except StoreError as fault:
            log.warning("hooks are not told at the moment: %s", fault)
            stop.wait(HOOK_LIMITS.look_every_s)
        except Exception:
            log.exception("looking for messages to hooks failed; it is tried again")
            stop.wait(HOOK_LIMITS.look_every_s)
        sender.wait_for_change(HOOK_LIMITS.look_every_s)
    sender.finish(parts.settings.work.stop_within_s * HOOK_LIMITS.stop_percent / 100)


def deliver_due(parts: Parts, now: datetime, *, ways: Ways | None = None) -> int:
    """Send what is due at a moment, one after another.

    Args:
        parts: Of this process.
        now: The moment.
        ways: How messages get out; None for as usual.

    Returns:
        How many tries were made.
    """
    ways = ways or Ways()
    tries = 0
    while True:
        with parts.store.reading() as session:
            ids = due(session, now=now, room={}, usual=HOOK_LIMITS.per_hook_at_a_time, most=HOOK_LIMITS.at_a_time)
        if not ids:
            return tries
        for delivery_id in ids:
            with parts.store.writing() as session:
                taken = take(session, delivery_id, now=now, lease=lease_of(parts))
            if taken is not None:
                _sent(parts, taken, ways)
                tries += 1


def _sent(parts: Parts, taken: Taken, ways: Ways) -> Result:
    """Send a message; a hook that asked for none any more is noted, so that no restore turns it on again."""
    result = send(parts, taken, ways)
    if result.answer is not None and result.answer.status == HTTPStatus.GONE:
        try:
            note_stopped(parts.store, parts.files, taken.hook_id)
        except StoreError as fault:
            log.warning("it is noted with the next backup alone that hook %s is off: %s", taken.hook_id, fault)
    return result


class _Sender:
    """What one process is sending, each message in a thread of its own."""

    def __init__(self, parts: Parts, ways: Ways) -> None:
        self._parts = parts
        self._ways = ways
        self._changed = threading.Event()
        self._lock = threading.Lock()
        self._sending: Counter[str] = Counter()  # by hook
        self._late: set[str] = set()  # hooks that did not take their last message
        self._threads: set[threading.Thread] = set()

    def send_due(self) -> None:
        """Start to send what there is room for.

        Raises:
            StoreError: The database does not answer.
        """
        self._changed.clear()
        with self._lock:
            free = HOOK_LIMITS.at_a_time - self._sending.total()
            room = {hook: self._most(hook) - self._sending[hook] for hook in {*self._sending, *self._late}}
        if free <= 0:
            return
        store = self._parts.store
        with store.reading() as session:
            now = store.now(session)
            ids = due(session, now=now, room=room, usual=HOOK_LIMITS.per_hook_at_a_time, most=free)
        if not ids:
            return
        with store.writing() as session:
            lease = lease_of(self._parts)
            taken = [one for one in (take(session, found, now=now, lease=lease) for found in ids) if one is not None]
        for one in taken:
            self._start(one)

    def wait_for_change(self, most_s: float) -> None:
        """Wait until a message has gone out, or for so long."""
        self._changed.wait(most_s)

    def finish(self, within_s: float) -> None:
        """Wait for what is being sent; what takes longer ends with the process, and is sent again by another."""
        until = time.monotonic() + within_s
        with self._lock:
            threads = list(self._threads)
        for thread in threads:
            thread.join(max(0.0, until - time.monotonic()))

    def _most(self, hook_id: str) -> int:
        return HOOK_LIMITS.per_late_hook_at_a_time if hook_id in self._late else HOOK_LIMITS.per_hook_at_a_time

    def _start(self, taken: Taken) -> None:
        # A daemon: a hook that hangs must not keep the process from ending.
        thread = threading.Thread(target=self._send, args=(taken,), name=f"hook {taken.hook_id}", daemon=True)
        with self._lock:
            self._sending[taken.hook_id] += 1
            self._threads.add(thread)
        thread.start()

    def _send(self, taken: Taken) -> None:
        is_late = True
        try:
            is_late = not _sent(self._parts, taken, self._ways).is_success
        except StoreError as fault:
            log.warning("what came of %s could not be written, so it will be sent again: %s", taken.id, fault)
        except Exception:
            log.exception("sending %s failed; it will be tried again", taken.id)
        finally:
            with self._lock:
                self._sending[taken.hook_id] -= 1
                if not self._sending[taken.hook_id]:
                    del self._sending[taken.hook_id]
                (self._late.add if is_late else self._late.discard)(taken.hook_id)
                self._threads.discard(threading.current_thread())
            self._changed.set()
