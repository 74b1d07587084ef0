"""The example of a receiver, run as its head says, under messages of the service and of others."""

import http.client
import os
import socket
import sqlite3
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from sqlalchemy import update

from service.hooks.deliveries import Holder
from service.hooks.keeping import rotate_secret
from service.hooks.signing import new_secret, signed_headers
from service.hooks.telling import deliver_due
from service.parts import Parts
from service.store.tables import Delivery, Hook
from tests.service.hooks.rows import add_owner, make_hook, only_delivery, place, reaching_loopback

EXAMPLE = Path(__file__).parents[3] / "service" / "demo" / "hook_receiver.py"


@dataclass(frozen=True, kw_only=True)
class Example:
    """The example, running."""

    port: int
    inbox: Path

    @property
    def url(self) -> str:
        return f"http://127.0.0.1:{self.port}/"

    def kept(self) -> list[tuple[str, str]]:
        if not self.inbox.exists():
            return []
        with sqlite3.connect(self.inbox) as inbox:
            return inbox.execute("SELECT id, body FROM inbox ORDER BY rowid").fetchall()

    def post(self, headers: dict[str, str], body: bytes) -> int:
        connection = http.client.HTTPConnection("127.0.0.1", self.port, timeout=20)
        connection.request("POST", "/", body=body, headers=headers)
        status = connection.getresponse().status
        connection.close()
        return status


@pytest.fixture
def secret() -> str:
    return new_secret()


@pytest.fixture
def example(tmp_path: Path, secret: str) -> Iterator[Example]:
    with socket.create_server(("127.0.0.1", 0)) as probe:
        port = probe.getsockname()[1]
    inbox = tmp_path / "inbox.sqlite"
    command = [sys.executable, "-I", str(EXAMPLE), str(port), str(inbox)]
    environment = {**os.environ, "HOOK_SECRET": secret}
    with (tmp_path / "log").open("w") as log, subprocess.Popen(command, env=environment, stderr=log) as process:
        try:
            until = time.monotonic() + 30
            with socket.socket() as probe:
                while probe.connect_ex(("127.0.0.1", port)) != 0:
                    assert process.poll() is None
                    assert time.monotonic() < until
                    time.sleep(0.05)
            yield Example(port=port, inbox=inbox)
        finally:
            process.terminate()


def test_the_example_keeps_a_message_of_the_service_once_though_it_comes_twice(
    parts: Parts, example: Example, secret: str
) -> None:
    parts, now = reaching_loopback(parts), datetime.now(UTC)
    shop = add_owner(parts, "the shop", is_shop=True)
    hook = make_hook(parts, shop, example.url).hook
    with parts.store.writing() as session:
        session.get_one(Hook, hook.id).secrets = {"current": secret, "before": []}
    place(parts, shop)

    assert deliver_due(parts, now) == 1
    delivery = only_delivery(parts)
    assert (delivery.state, delivery.last_status) == ("delivered", 204)
    with parts.store.writing() as session:  # as where the sender was killed before it could write the answer down
        session.execute(update(Delivery).values(state="waiting", next_try_at=now, finished_at=None))
    assert deliver_due(parts, now + timedelta(seconds=2)) == 1
    assert only_delivery(parts).state == "delivered"  # what is known already is taken all the same

    assert example.kept() == [(delivery.id, delivery.body)]


def test_the_example_takes_messages_while_its_secret_is_being_replaced(
    parts: Parts, example: Example, secret: str
) -> None:
    parts, now = reaching_loopback(parts), datetime.now(UTC)
    shop = add_owner(parts, "the shop", is_shop=True)
    hook = make_hook(parts, shop, example.url).hook
    with parts.store.writing() as session:
        session.get_one(Hook, hook.id).secrets = {"current": secret, "before": []}
        holder = Holder(owner_id=shop, is_test=False)
        rotate_secret(session, holder, hook.id, now=now, old_valid_for=timedelta(hours=24))
    place(parts, shop)
    deliver_due(parts, now)

    assert len(example.kept()) == 1


def test_the_example_refuses_what_is_forged_old_changed_or_too_large(example: Example, secret: str) -> None:
    now, body = datetime.now(UTC), b'{"type":"order.ready"}'

    def headers(at: datetime = now, key: str = secret) -> dict[str, str]:
        return signed_headers("msg_1", body, at=at, valid_secrets=[key])

    assert example.post(headers(key=new_secret()), body) == 401
    assert example.post(headers(at=now - timedelta(minutes=6)), body) == 401
    assert example.post(headers(at=now + timedelta(minutes=6)), body) == 401
    assert example.post(headers() | {"webhook-id": "msg_2"}, body) == 401
    assert example.post(headers(), body.replace(b"ready", b"cut")) == 401
    assert example.post({}, body) == 401
    assert example.post(headers(), b" " * 20_001) == 413
    assert example.kept() == []
    assert example.post(headers(), body) == 204
    assert len(example.kept()) == 1
