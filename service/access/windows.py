"""Counts of requests in this process, in windows of fixed length.

The library's own storage in memory starts a thread every few milliseconds to look for windows that have ended. Here
the next request after a while does so in passing.
"""

import threading
import time
from collections.abc import Callable

from limits.storage import Storage

SWEEP_EVERY_S = 1.0  # s; windows that have ended are kept so long at the most while requests come


class WindowsInMemory(Storage):
    """How many requests came in each window that has not ended; any number of threads may count at a time."""

    STORAGE_SCHEME = None  # found by no URL

    def __init__(self, clock: Callable[[], float] = time.time) -> None:
        """Nothing is counted yet.

        Args:
            clock: Seconds since 1970, as the library tells ends of windows.
        """
        super().__init__()
        self._clock = clock
        self._lock = threading.Lock()
        self._windows: dict[str, tuple[int, float]] = {}  # how many came, and when the window ends
        self._sweep_at_s = 0.0

    @property
    def base_exceptions(self) -> type[Exception]:
        """What the library turns into faults of a storage: nothing here fails."""
        return ValueError

    def incr(self, key: str, expiry: float, amount: int = 1) -> int:
        """Count so many more.

        Args:
            key: Of which window.
            expiry: Seconds from now to its end, where these are its first.
            amount: How many.

        Returns:
            How many came in this window with these.
        """
        with self._lock:
            now_s = self._clock()
            self._sweep(now_s)
            came, ends_at_s = self._open(key, now_s) or (0, now_s + expiry)
            self._windows[key] = came + amount, ends_at_s
            return came + amount

    def get(self, key: str) -> int:
        """How many came; 0 where no window is open."""
        with self._lock:
            came, _ = self._open(key, self._clock()) or (0, 0.0)
            return came

    def get_expiry(self, key: str) -> float:
        """When the window ends, in seconds since 1970; now where none is open."""
        with self._lock:
            now_s = self._clock()
            _, ends_at_s = self._open(key, now_s) or (0, now_s)
            return ends_at_s

    def check(self) -> bool:
        """Whether it can count."""
        return True

    def reset(self) -> int:
        """Forget everything; how many windows there were."""
        with self._lock:
            count = len(self._windows)
            self._windows.clear()
            return count

    def clear(self, key: str) -> None:
        """Forget one window."""
        with self._lock:
            self._windows.pop(key, None)

    def _open(self, key: str, now_s: float) -> tuple[int, float] | None:
        window = self._windows.get(key)
        return window if window is not None and now_s < window[1] else None

    def _sweep(self, now_s: float) -> None:
        if self._sweep_at_s - SWEEP_EVERY_S <= now_s < self._sweep_at_s:  # a clock set back sweeps at once
            return
        self._sweep_at_s = now_s + SWEEP_EVERY_S
        self._windows = {key: window for key, window in self._windows.items() if now_s < window[1]}
