"""How often each may ask: counted in windows of fixed length, for reading and for writing by themselves.

The window begins with its first request and ends so many seconds later; then everything may be asked again. So
what the header fields say is exactly what holds: so many more requests, and all of them again in so many seconds.
The price is that twice the number may come in a short time, at the end of one window and the start of the next.
"""

import ipaddress
import logging
import math
import time
from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum
from functools import lru_cache

from limits import RateLimitItem, RateLimitItemPerSecond, WindowStats
from limits.errors import StorageError
from limits.storage import RedisStorage, Storage
from limits.strategies import FixedWindowRateLimiter

from service.access.windows import WindowsInMemory
from service.settings import AccessSettings, SettingsError

log = logging.getLogger("discwright")

ANSWER_WITHIN_S = 0.25  # s; a server of counts on the same network answers within a millisecond
ASK_AGAIN_S = 5.0  # s; so that requests do not each wait for a server that is away
IPV6_NETWORK_BITS = 64  # bits; what one subscriber is given at the least (RFC 6177), so one address says little


class Kind(StrEnum):
    """What a request does; each is counted by itself. The value names the policy in the header fields."""

    READ = "read"
    WRITE = "write"


@dataclass(frozen=True, slots=True, kw_only=True)
class Count:
    """How many requests are left to one asker.

    Attributes:
        kind: Which are counted.
        most: How many the window has.
        window_s: How long it is.
        left: How many are left of it after this one.
        reset_s: After how many seconds all of them come back.
        is_over: Whether this one is too many.
    """

    kind: Kind
    most: int
    window_s: int
    left: int
    reset_s: int
    is_over: bool

    def header_fields(self) -> dict[str, str]:
        """The count as structured fields (RFC 9651) of draft-ietf-httpapi-ratelimit-headers.

        Retry-After (RFC 9110 section 10.2.3) stands beside them where this request is too many.
        """
        fields = {
            "RateLimit-Policy": f'"{self.kind}";q={self.most};w={self.window_s}',
            "RateLimit": f'"{self.kind}";r={self.left};t={self.reset_s}',
        }
        return {**fields, "Retry-After": str(self.reset_s)} if self.is_over else fields


class Rates:
    """Counts requests, in this process or, where it is asked, on a Redis server for all processes together."""

    def __init__(self, settings: AccessSettings, clock: Callable[[], float] = time.monotonic) -> None:
        """Get ready to count; nothing is asked of a server yet.

        Args:
            settings: Read for the rates, and for where requests are counted.
            clock: Seconds, for when a server that was away is asked again.

        Raises:
            SettingsError: Counting on a server is asked for, and its client is not installed or its URL is none.
        """
        self._storage = _storage(settings.rates_url)
        self._counter = FixedWindowRateLimiter(self._storage)
        self._rates = {Kind.READ: _item(settings.read_rate), Kind.WRITE: _item(settings.write_rate)}
        self._clock = clock
        self._ask_again_at_s: float | None = None  # while the server is away

    def count(self, kind: Kind, whose: str) -> Count | None:
        """Count one request.

        Args:
            kind: What it does.
            whose: The id of a key, or what `of_address` gives.

        Returns:
            None where the server that counts does not answer: requests pass then, as a shop that cannot count is
            better than one that is shut.
        """
        if self._ask_again_at_s is not None and self._clock() < self._ask_again_at_s:
            return None
        item = self._rates[kind]
        try:
            within = self._counter.hit(item, kind, whose)
            left = self._counter.get_window_stats(item, kind, whose)
        except StorageError as fault:
            self._note_away(fault)
            return None
        self._note_back()
        return _count(kind, item, left, within=within)

    def _note_away(self, fault: StorageError) -> None:
        if self._ask_again_at_s is None:
            log.warning("requests are not counted: the server of DISCWRIGHT_RATES does not answer (%s)", fault)
        self._ask_again_at_s = self._clock() + ASK_AGAIN_S

    def _note_back(self) -> None:
        if self._ask_again_at_s is not None:
            log.warning("requests are counted again")
            self._ask_again_at_s = None


@lru_cache(maxsize=1024)  # most ask more than once
def of_address(address: str | None) -> str:
    """Whose requests without a key are: an IPv4 address, or the network of an IPv6 address.

    Args:
        address: As the server tells it; None where it tells none.
    """
    try:
        found = ipaddress.ip_address(address or "")
    except ValueError:
        return "address unknown"
    if isinstance(found, ipaddress.IPv4Address):
        return f"address {found}"
    if found.ipv4_mapped is not None:
        return f"address {found.ipv4_mapped}"
    return f"address {ipaddress.ip_network((int(found), IPV6_NETWORK_BITS), strict=False).network_address}"


def _count(kind: Kind, item: RateLimitItem, left: WindowStats, *, within: bool) -> Count:
    window_s = item.get_expiry()
    return Count(
        kind=kind,
        most=item.amount,
        window_s=window_s,
        left=max(left.remaining, 0) if within else 0,
        # Rounded up, so that who waits so long does not come too early; a window that just ended is over at once.
        reset_s=min(max(math.ceil(left.reset_time - time.time()), 1), window_s),
        is_over=not within,
    )


def _item(rate: tuple[int, int]) -> RateLimitItem:
    amount, seconds = rate
    return RateLimitItemPerSecond(amount, seconds, namespace="discwright")


def _storage(url: str | None) -> Storage:
    if url is None:
        return WindowsInMemory()
    try:
        # Wanted by many machines alone, so it need not be installed on one.
        from redis import ConnectionPool  # noqa: PLC0415
        from redis.backoff import NoBackoff  # noqa: PLC0415
        from redis.retry import Retry  # noqa: PLC0415

        pool = ConnectionPool.from_url(
            url,
            socket_timeout=ANSWER_WITHIN_S,
            socket_connect_timeout=ANSWER_WITHIN_S,
            retry=Retry(NoBackoff(), retries=0),
        )
        return RedisStorage(url, connection_pool=pool, wrap_exceptions=True)
    except ImportError as fault:
        raise SettingsError("DISCWRIGHT_RATES needs the package redis; install discwright[many]") from fault
    except ValueError as fault:
        raise SettingsError("DISCWRIGHT_RATES must be a URL such as redis://host:6379/0") from fault
