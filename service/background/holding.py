"""Leases: the orders that a worker has in hand are renewed by a thread that computes nothing."""

import logging
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field

from service.orders.taking import Taken, renew
from service.store.faults import StoreError
from service.store.store import Store

RENEWALS = 3  # tries within one lease, so that two may fail

log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Held:
    """An order in hand.

    Attributes:
        taken: The order.
        lost: Set where it is not this worker's any more: cancelled, or another has it.
    """

    taken: Taken
    lost: threading.Event = field(default_factory=threading.Event)


class Holding:
    """All orders that a worker has in hand."""

    def __init__(self, store: Store, lease_s: float) -> None:
        """Begin with none.

        Args:
            store: The database.
            lease_s: Seconds that each renewal holds.
        """
        self._store = store
        self._lease_s = lease_s
        self._changing = threading.Lock()
        self._held: list[Held] = []

    @property
    def every_s(self) -> float:
        """Seconds between renewals."""
        return self._lease_s / RENEWALS

    @contextmanager
    def hold(self, taken: Taken) -> Iterator[Held]:
        """Renew an order's lease until the end of the block."""
        held = Held(taken=taken)
        with self._changing:
            self._held.append(held)
        try:
            yield held
        finally:
            with self._changing:
                self._held.remove(held)

    def renew_all(self) -> None:
        """Renew every lease once.

        A database that does not answer costs nothing yet: nobody else can take the orders either.
        """
        with self._changing:
            held_now = list(self._held)
        for held in held_now:
            if held.lost.is_set():
                continue
            extra = {"order_id": held.taken.order_id, "attempt": held.taken.attempt}
            try:
                is_held = renew(self._store, held.taken, self._lease_s)
            except StoreError as fault:
                log.warning("a lease could not be renewed: %s", fault, extra=extra)
                return
            # One that was published while this was asked is not held either, and nobody looks any more.
            if not is_held:
                held.lost.set()
