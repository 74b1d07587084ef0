"""The queue on each of its carriers: ids go through, and a carrier that is away holds nobody up."""

import shutil
import socket
import sqlite3
import subprocess
import threading
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from service.background.queue import READ_TIMEOUT_S, Queue, QueueAwayError
from tests.service.conftest import new_database

CARRIERS = ("sqlite", "postgresql", "redis")
REDIS = shutil.which("redis-server")


def free_port() -> int:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        return int(taken.getsockname()[1])


@pytest.fixture(scope="session")
def redis_url(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    if REDIS is None:
        pytest.skip("needs redis-server on the PATH")
    port, folder = free_port(), tmp_path_factory.mktemp("redis")
    options = ["--port", str(port), "--bind", "127.0.0.1", "--save", "", "--dir", str(folder)]
    server = subprocess.Popen([REDIS, *options], stdout=subprocess.DEVNULL)
    last_s = time.monotonic() + 10
    while True:
        try:
            socket.create_connection(("127.0.0.1", port), 1).close()
            break
        except OSError:
            assert time.monotonic() < last_s
            time.sleep(0.05)
    yield f"redis://127.0.0.1:{port}/0"
    server.terminate()
    server.wait()


@pytest.fixture(params=CARRIERS)
def url(request: pytest.FixtureRequest, tmp_path: Path) -> str:
    if request.param == "sqlite":
        return f"sqlite:///{tmp_path / 'deep' / 'queue.sqlite'}"
    if request.param == "postgresql":
        return new_database(request.getfixturevalue("postgresql_url"))
    return str(request.getfixturevalue("redis_url"))


@pytest.fixture
def queue(url: str) -> Iterator[Queue]:
    opened = Queue(url)
    while opened.receive(0) is not None:
        pass
    yield opened
    opened.close()


def test_ids_come_out_once_and_in_order(queue: Queue) -> None:
    sent = [queue.send(f"order_{number}") for number in range(5)]

    assert sent == [True] * 5
    assert queue.length() == 5
    assert [queue.receive(0) for _ in range(6)] == [*(f"order_{number}" for number in range(5)), None]


def test_who_does_not_wait_is_told_at_once_that_there_is_no_message(queue: Queue) -> None:
    begun_s = time.monotonic()

    assert queue.receive(0) is None
    assert time.monotonic() - begun_s < READ_TIMEOUT_S / 2


def test_another_process_finds_what_was_sent(queue: Queue, url: str) -> None:
    queue.send("order_1")

    other = Queue(url)

    assert other.receive(0) == "order_1"
    assert queue.receive(0) is None
    other.close()


def test_a_message_wakes_who_waits_for_it(queue: Queue) -> None:
    threading.Timer(0.3, lambda: queue.send("order_1")).start()
    begun_s = time.monotonic()

    found = queue.receive(0.9)

    assert found == "order_1"
    assert 0.25 < time.monotonic() - begun_s < 0.9


def test_two_who_receive_never_get_the_same(queue: Queue, url: str) -> None:
    for number in range(40):
        queue.send(f"order_{number}")
    found: list[list[str]] = [[], []]

    def receive(mine: list[str]) -> None:
        own = Queue(url)
        while (order_id := own.receive(0)) is not None:
            mine.append(order_id)
        own.close()

    threads = [threading.Thread(target=receive, args=(mine,)) for mine in found]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    assert sorted(found[0] + found[1]) == sorted(f"order_{number}" for number in range(40))


def test_a_message_is_the_id_in_plain_letters(tmp_path: Path) -> None:
    path = tmp_path / "queue.sqlite"
    queue = Queue(f"sqlite:///{path}")

    queue.send("order_1")
    queue.close()

    connection = sqlite3.connect(path)
    kept = connection.execute("SELECT data FROM task").fetchall()
    connection.close()
    assert kept == [(b"order_1",)]


@pytest.mark.parametrize("message", [b"x" * 49, "order_\N{LATIN SMALL LETTER E WITH ACUTE}".encode()])
def test_a_message_that_is_no_id_is_dropped(tmp_path: Path, message: bytes) -> None:
    path = tmp_path / "queue.sqlite"
    queue = Queue(f"sqlite:///{path}")
    queue.send("order_1")
    connection = sqlite3.connect(path)
    connection.execute("UPDATE task SET data = ?", (message,))
    connection.commit()
    connection.close()

    assert queue.receive(0) is None
    assert queue.length() == 0
    queue.close()


@pytest.mark.parametrize("scheme", ["postgresql", "redis"])
def test_sending_to_a_server_that_is_away_fails_quietly_and_is_told_in_the_log(
    scheme: str, caplog: pytest.LogCaptureFixture
) -> None:
    queue = Queue(f"{scheme}://127.0.0.1:{free_port()}/0")

    sent = queue.send("order_1")

    assert sent is False
    record = next(record for record in caplog.records if hasattr(record, "order_id"))
    assert record.order_id == "order_1"
    assert record.getMessage().startswith("the queue did not take an order; the sweep will find it: ")


def test_nobody_waits_again_for_a_queue_that_was_away_a_moment_ago(tmp_path: Path) -> None:
    path = tmp_path / "queue.sqlite"
    queue = Queue(f"sqlite:///{path}")
    queue.send("order_0")
    lock = sqlite3.connect(path, isolation_level=None)
    lock.execute("BEGIN EXCLUSIVE")
    first_s = time.monotonic()
    sent_first = queue.send("order_1")
    second_s = time.monotonic()

    sent_second = queue.send("order_2")

    assert (sent_first, sent_second) == (False, False)
    assert second_s - first_s > 1.0
    assert time.monotonic() - second_s < 0.5
    lock.execute("ROLLBACK")
    lock.close()
    queue.close()


def test_a_queue_that_comes_back_is_used_again(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("service.background.queue.AWAY_S", 0.1)
    folder = tmp_path / "deep"
    folder.write_text("in the way of the folder")
    queue = Queue(f"sqlite:///{folder / 'queue.sqlite'}")
    with pytest.raises(QueueAwayError):
        queue.receive(0)
    folder.unlink()
    time.sleep(0.2)

    sent = queue.send("order_1")

    assert sent is True
    assert queue.receive(0) == "order_1"
    queue.close()
