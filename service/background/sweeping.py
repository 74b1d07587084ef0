"""The sweep: finds orders whose message was lost, or whose worker has gone, and offers them to this worker's slots."""

import logging
import threading
import time
from collections import deque

from service.orders.taking import waiting
from service.store.store import Store

OFFERS_OF_A_SLOT = 8  # orders found at a time for each slot: few, for other workers find the same ones
# s; between two looks, however much there is to find. No slot plans eight orders sooner: who looks again before has
# found what others took, and shall not do nothing but look.
LEAST_S = 0.05

log = logging.getLogger(__name__)


class Sweep:
    """Orders that wait, found in the database itself: whatever becomes of the queue, they are planned."""

    def __init__(self, store: Store, slot_count: int) -> None:
        """Begin with nothing found.

        Args:
            store: The database.
            slot_count: How many slots are offered what is found.
        """
        self._store = store
        self._most = OFFERS_OF_A_SLOT * slot_count
        self._sweeping = threading.Lock()
        self._found: deque[str] = deque()
        self._is_full = False
        self._swept_at_s = -LEAST_S

    def sweep(self) -> None:
        """Look for orders that wait too long, once.

        Raises:
            StoreBusyError: The database does not answer.
        """
        with self._sweeping:
            self._look()

    @property
    def looks_again_in_s(self) -> float | None:
        """Seconds to the next look where the last found as much as it may, and all of that is taken; else None.

        So it is after a queue was lost, until all its orders are found.
        """
        if not self._is_full or self._found:
            return None
        return max(0.0, LEAST_S - (time.monotonic() - self._swept_at_s))

    def sweep_on(self) -> None:
        """Look again where it is time to; who comes while another slot looks has what that one finds."""
        if self.looks_again_in_s == 0:
            with self._sweeping:
                if self.looks_again_in_s == 0:
                    self._look()

    def next_found(self) -> str | None:
        """An order to take, None where there is none; each is offered to one slot."""
        try:
            return self._found.popleft()
        except IndexError:
            return None

    def _look(self) -> None:
        ids = waiting(self._store, most=self._most)
        self._swept_at_s = time.monotonic()
        self._is_full = len(ids) == self._most
        self._found = deque(ids)
        if ids:
            log.debug("the sweep found %d orders that wait, or whose worker has gone", len(ids))
