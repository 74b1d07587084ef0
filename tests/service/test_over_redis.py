"""The service as it runs with its queue and its counts of requests on Redis, whichever database keeps the orders."""

import json
import re
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import pytest
import urllib3
from redis import Redis

from service.background.queue import AWAY_S, Queue
from service.client.client import Client
from tests.service.api.running import Running, running
from tests.service.conftest import postgresql_first
from tests.service.hooks.receivers import Receiver, listening
from tests.service.redis_server import RedisServer, own_redis
from tests.service.shop import TUNE

pytestmark = postgresql_first("what several machines share")
READY = frozenset({"ready"})
WITHIN_S = 120.0


@dataclass(frozen=True, slots=True, kw_only=True)
class OverRedis:
    """A service over a Redis of its own, and what it tells hooks."""

    service: Running
    redis: RedisServer
    told: Receiver

    @property
    def client(self) -> Client:
        return Client(self.service.url, self.service.key)

    def order(self) -> str:
        placed = self.client.order(TUNE, {"movement": "fernhollow-31"})
        return placed["id"]

    def waiting(self) -> int:
        """How many messages the queue holds."""
        queue = Queue(self.redis.url)
        count = queue.length()
        queue.close()
        return count

    def left(self) -> int | None:
        """How many requests that read are left, as an answer over a new connection tells; None: none are counted."""
        with urllib3.PoolManager() as pool:
            headers = {"Authorization": f"Bearer {self.service.key}", "Connection": "close"}
            answer = pool.request("GET", f"{self.service.url}/v1/keys/me", headers=headers, retries=False)
        assert answer.status == 200
        found = re.fullmatch(r'"read";r=(\d+);t=\d+', answer.headers.get("RateLimit", ""))
        return int(found[1]) if found else None

    def heard_ready(self) -> list[str]:
        """The orders that the receiver was told to be ready."""
        bodies = [json.loads(got.body) for got in self.told.got]
        return [str(body["data"]["order"]) for body in bodies if body["type"] == "order.ready"]

    @contextmanager
    def worker(self) -> Iterator[None]:
        """A worker, for as long as it is wanted."""
        command = [sys.executable, "-m", "service.commands.main", "work", "--slots", "1"]
        with self.service.log.open("a") as log:
            process = subprocess.Popen(command, env=self.service.environment, stdout=log, stderr=log)
        try:
            yield
        finally:
            process.terminate()
            assert process.wait(60) == 0


@pytest.fixture
def shop(tmp_path: Path, database_url: str | None) -> Iterator[OverRedis]:
    with own_redis(tmp_path) as redis, listening(Receiver()) as told:
        more = {
            "DISCWRIGHT_QUEUE": redis.url,
            "DISCWRIGHT_RATES": redis.url,
            "DISCWRIGHT_HOOK_NETWORKS": "127.0.0.0/8",
            "DISCWRIGHT_HOOK_HTTP": "yes",
            "DISCWRIGHT_SWEEP_S": "1",
        }
        with running(tmp_path, database_url, with_worker=False, more=more) as service:
            opened = OverRedis(service=service, redis=redis, told=told)
            opened.client.make_hook({"url": told.url, "types": ["order.ready"]})
            yield opened


def wait_for(holds: Callable[[], bool], within_s: float = WITHIN_S) -> None:
    last_s = time.monotonic() + within_s
    while not holds():
        assert time.monotonic() < last_s, "it did not come to pass in time"
        time.sleep(0.1)


def test_an_order_goes_from_web_to_worker_to_hook_and_nothing_is_lost_with_redis(shop: OverRedis) -> None:
    carried = shop.order()
    assert shop.waiting() == 1
    with shop.worker():
        shop.client.wait_for(carried, READY, within_s=WITHIN_S)
        wait_for(lambda: set(shop.heard_ready()) == {carried})
    assert shop.waiting() == 0

    lost = [shop.order() for _ in range(3)]
    assert shop.waiting() == 3
    shop.redis.kill()
    unsent = [shop.order() for _ in range(2)]
    shop.redis.start()
    assert shop.waiting() == 0
    time.sleep(AWAY_S)  # for so long the web leaves in peace a queue that was away
    late = shop.order()
    assert shop.waiting() == 1
    with shop.worker():
        for order_id in (*lost, *unsent, late):
            shop.client.wait_for(order_id, READY, within_s=WITHIN_S)
        wait_for(lambda: set(shop.heard_ready()) == {carried, *lost, *unsent, late})

    assert shop.waiting() == 0
    events = [(event["order"], event["type"]) for event in shop.client.events()]
    for order_id in (carried, *lost, *unsent, late):
        assert [kind for one, kind in events if one == order_id] == ["order.received", "order.planned", "order.ready"]


def test_requests_are_counted_together_on_redis_and_pass_while_it_is_away(shop: OverRedis) -> None:
    first = shop.left()
    assert first is not None

    counts = [shop.left() or 0 for _ in range(20)]  # of two processes: that one answered all is all but ruled out
    assert counts == [first - number for number in range(1, 21)]
    redis = Redis.from_url(shop.redis.url)
    assert any(b"/read/" in key for key in redis.scan_iter())
    redis.close()

    shop.redis.kill()
    assert [shop.left() for _ in range(10)] == [None] * 10
    shop.redis.start()
    wait_for(lambda: (shop.left() or 0) > counts[-1])  # counted again, and what was counted is gone with it
