"""What a shop's program does with the service: order, wait, release, fetch files, and read what happened."""

import hashlib
import time
from collections.abc import Iterator, Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Caller
from service.client.operations import Operations

NOT_MODIFIED = 304
WAITS_S = 20  # s; of one request, below what proxies bear
LOOKS_EVERY_S = 1.0  # s; between looks where the service grants no wait
EVENTS_AT_A_TIME = 500


class WaitedTooLongError(Exception):
    """An order did not get where it was waited for."""


class DamagedFileError(Exception):
    """A file is not the one that the plan tells of."""


class Client(Operations):
    """A client of one service, with one key."""

    def __init__(self, url: str, key: str | None = None, *, caller: Caller | None = None) -> None:
        """Note where and who.

        Args:
            url: Of the service.
            key: A key's secret; None for what is open to all.
            caller: How requests are sent; None for as usual.
        """
        super().__init__(caller or Caller(url, key))

    def order(
        self, tune: bytes, order: shapes.OrderBody, documents: Mapping[str, Any] | None = None
    ) -> shapes.OrderAnswer:
        """Place an order, once, however often the request must be sent.

        Args:
            tune: A Standard MIDI File.
            order: What is ordered.
            documents: Movement, cutter and settings of one's own, by these names; None for none.

        Raises:
            ProblemError: It is refused.
            AwayError: The service does not answer.
        """
        return self.place_order({"tune": tune, "order": cast("Mapping[str, Any]", order), **(documents or {})})

    def wait_for(self, order_id: str, states: frozenset[str], *, within_s: float) -> shapes.OrderAnswer:
        """The order once it is in one of some states.

        Raises:
            WaitedTooLongError: It is not there in time; the text says where it stands.
            ProblemError: There is no such order.
        """
        until_s = time.monotonic() + within_s
        tag: str | None = None
        order: shapes.OrderAnswer | None = None
        while True:
            left_s = max(0, min(WAITS_S, int(until_s - time.monotonic())))
            headers = {"Prefer": f"wait={left_s}"} | ({} if tag is None else {"If-None-Match": tag})
            answer = self._caller.send("GET", f"/v1/orders/{order_id}", headers=headers)
            if answer.status != NOT_MODIFIED:
                order, tag = cast("shapes.OrderAnswer", answer.json), answer.headers.get("etag")
            if order is not None and order["state"] in states:
                return order
            if time.monotonic() >= until_s:
                state = "unknown" if order is None else order["state"]
                raise WaitedTooLongError(f"the order {order_id} is {state} after {within_s:g} s")
            if "preference-applied" not in answer.headers:  # too many wait at the service: it answers at once
                time.sleep(min(LOOKS_EVERY_S, max(0.0, until_s - time.monotonic())))

    def events(self, after: int = 0) -> Iterator[shapes.EventAnswer]:
        """Every event past a number, the oldest first, up to the newest there is."""
        while True:
            page = self.list_events({"after": after, "limit": EVENTS_AT_A_TIME}).json
            yield from page["events"]
            if not page["events"]:
                return
            after = page["last"]

    def download(self, file: shapes.FileAnswer) -> bytes:
        """A file of a plan, held against the digest that the plan tells.

        Raises:
            ProblemError: It is kept back, or gone.
            DamagedFileError: What came is another file.
        """
        if file["href"] is None:
            raise DamagedFileError(f"{file['name']} is kept back till the order is released")
        body = self._caller.send("GET", file["href"]).body
        digest = hashlib.sha256(body).hexdigest()
        if digest != file["sha256"]:
            raise DamagedFileError(f"{file['name']} has the digest {digest}, and the plan tells {file['sha256']}")
        return body
