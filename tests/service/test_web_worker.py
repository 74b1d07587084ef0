"""Slow clients, over real sockets, of a web process with four threads whose limits are short."""

import errno
import http.client
import json
import os
import signal
import socket
import statistics
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import ExitStack, closing, contextmanager, suppress
from pathlib import Path
from typing import Any

import pytest
from gunicorn.config import Config

from service import web_worker
from service.api.problems import PROBLEMS
from service.web_addresses import address_of
from service.web_worker import (
    COME_AGAIN_S,
    LEAVE_TO_OTHERS_S,
    SIGN_OF_LIFE_EVERY_S,
    TURN_S,
    GatheringWorker,
)
from tests.service.quick_web import LONG_BYTES, QUICK, SLOW_S

SOON_S = 1.0
START_WITHIN_S = 60.0
BUSY_S = 5.0  # s; that a busy machine may take beyond what is promised
THREADS = 4
SLOW = b"GET /slow HTTP/1.1\r\nHost: a\r\n\r\n"


class Quick:
    """The small service as it runs."""

    def __init__(self, port: int, process: "subprocess.Popen[bytes]") -> None:
        self.port = port
        self.process = process

    def connect(self) -> socket.socket:
        return socket.create_connection(("127.0.0.1", self.port), timeout=30)

    def send(self, text: bytes) -> socket.socket:
        connection = self.connect()
        connection.sendall(text)
        return connection

    def health_took_s(self) -> float:
        begun_s = time.monotonic()
        assert answered(self.send(b"GET /healthz HTTP/1.1\r\nHost: a\r\n\r\n"))[0] == 200
        return time.monotonic() - begun_s


def answered(connection: socket.socket) -> tuple[int, bytes]:
    """Status and body of the answer to what was sent."""
    with closing(connection):
        answer = http.client.HTTPResponse(connection)
        answer.begin()
        return answer.status, answer.read()


def problem(connection: socket.socket) -> dict[str, Any]:
    status, body = answered(connection)
    told: dict[str, Any] = json.loads(body)
    assert told["status"] == status
    assert told["request_id"].startswith("req_")
    return told


def come_again(connection: socket.socket) -> tuple[int, str | None, dict[str, Any]]:
    """Status, Retry-After and problem of an answer that refuses."""
    with closing(http.client.HTTPResponse(connection)) as answer:
        answer.begin()
        told: dict[str, Any] = json.loads(answer.read())
        return answer.status, answer.headers["Retry-After"], told


def post(path: str, length: int, body: bytes) -> bytes:
    return b"POST %s HTTP/1.1\r\nHost: a\r\nContent-Length: %d\r\n\r\n%s" % (path.encode(), length, body)


@contextmanager
def running(folder: Path) -> Iterator[Quick]:
    with socket.socket() as listener, (folder / "log").open("w+") as log:
        listener.bind(("127.0.0.1", 0))
        listener.listen(512)
        command = [sys.executable, "-m", "gunicorn", "--config", "python:tests.service.quick_web"]
        command += ["--bind", f"fd://{listener.fileno()}", "--threads", str(THREADS), "--graceful-timeout", "10"]
        process = subprocess.Popen(
            [*command, "tests.service.quick_web:create_app()"],
            pass_fds=(listener.fileno(),),
            stdout=log,
            stderr=log,
        )
        service = Quick(listener.getsockname()[1], process)
        try:
            answered(service.send(b"GET /healthz HTTP/1.1\r\nHost: a\r\n\r\n"))
            yield service
        finally:
            process.terminate()
            process.wait(START_WITHIN_S)
        log.seek(0)
        assert "Traceback" not in log.read()


@pytest.fixture(scope="module")
def quick(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Quick]:
    with running(tmp_path_factory.mktemp("quick")) as service:
        yield service


def test_silent_connections_and_stalled_bodies_hold_nobody_up(quick: Quick) -> None:
    with ExitStack() as kept:
        for _ in range(20):
            kept.enter_context(quick.connect())
            kept.enter_context(quick.send(post("/length", 5000, b"MThd")))
        time.sleep(0.2)

        assert quick.health_took_s() < SOON_S
        assert answered(quick.send(post("/length", 3, b"abc"))) == (200, b"3")


def test_who_stays_after_the_answer_holds_nobody_up(quick: Quick) -> None:
    with ExitStack() as kept:
        for _ in range(20):
            kept.enter_context(quick.send(b"GET /healthz HTTP/1.1\r\nHost: a\r\n\r\n"))
        time.sleep(0.2)

        assert quick.health_took_s() < SOON_S


def test_health_is_told_while_every_thread_works_and_more_wait(quick: Quick) -> None:
    with ExitStack() as kept:
        working = [kept.enter_context(quick.send(SLOW)) for _ in range(2 * THREADS)]
        time.sleep(0.2)

        assert quick.health_took_s() < SOON_S
        assert [answered(one) for one in working] == [(200, b"at last")] * (2 * THREADS)


def test_who_finds_too_many_waiting_is_told_at_once_to_come_again(quick: Quick) -> None:
    with ExitStack() as kept:
        taken = [kept.enter_context(quick.send(SLOW)) for _ in range(THREADS + QUICK.waiting_requests)]
        time.sleep(0.5)
        begun_s = time.monotonic()
        one_more = kept.enter_context(quick.send(SLOW))
        status, retry_after, told = come_again(one_more)

        assert time.monotonic() - begun_s < SOON_S
        assert (status, retry_after) == (503, str(COME_AGAIN_S))
        kind = PROBLEMS["service-busy"]
        assert (told["type"], told["title"], told["try_again"]) == (kind.type, kind.title, True)
        assert told["detail"] == "8 requests wait for a thread, and no more than 8 may"
        assert quick.health_took_s() < SOON_S
        assert [answered(one) for one in taken] == [(200, b"at last")] * len(taken)
    assert answered(quick.send(post("/length", 3, b"abc"))) == (200, b"3")


def test_while_every_thread_works_who_asks_how_it_is_waits_no_longer_than_for_another_process(quick: Quick) -> None:
    with ExitStack() as kept:
        for _ in range(THREADS):
            kept.enter_context(quick.send(SLOW))
        time.sleep(0.2)

        took_s = []
        for _ in range(5):
            time.sleep(0.02)  # till the leave of the one before is over, which would wake the loop
            took_s.append(quick.health_took_s())

    assert statistics.median(took_s) < 3 * LEAVE_TO_OTHERS_S  # and not until something else is due, 0.25 s


def test_threads_that_compute_take_short_turns(quick: Quick) -> None:
    assert answered(quick.send(b"GET /turn HTTP/1.1\r\nHost: a\r\n\r\n")) == (200, str(TURN_S).encode())


def test_a_body_that_stalls_ends_with_408_after_the_time_stated(quick: Quick) -> None:
    begun_s = time.monotonic()

    told = problem(quick.send(post("/length", 5000, b"MThd")))

    kind = PROBLEMS["request-too-slow"]
    assert (told["type"], told["status"], told["title"], told["try_again"]) == (kind.type, 408, kind.title, True)
    assert QUICK.body_s <= time.monotonic() - begun_s < QUICK.body_s + SOON_S


def test_a_body_that_trickles_below_the_least_rate_ends_with_408(quick: Quick) -> None:
    connection = quick.send(post("/length", 5000, b""))
    begun_s = time.monotonic()

    # 10 bytes each 0.1 s are 100 a second, of 1,000 that are waited for: after t seconds 100 t / 1000 s are added to 2.
    with suppress(OSError):  # whichever way the other side's leave is seen
        while time.monotonic() < begun_s + 4 * QUICK.body_s + BUSY_S:
            connection.sendall(bytes(10))
            time.sleep(0.1)
    connection.close()

    # 2 s / (1 - 0.1) till 408; then the connection stays for the time of its leave
    assert time.monotonic() - begun_s < QUICK.body_s / 0.9 + QUICK.linger_s + 2 * SOON_S


def test_a_body_that_comes_slowly_but_fast_enough_is_taken(quick: Quick) -> None:
    connection = quick.send(post("/length", 9000, b""))

    for _ in range(30):  # 300 bytes each 0.1 s are 3,000 a second, for 3 s: longer than a body without bytes may take
        connection.sendall(bytes(300))
        time.sleep(0.1)

    assert answered(connection) == (200, b"9000")


@pytest.mark.parametrize(
    "begun",
    [
        post("/length", LONG_BYTES, bytes(20_000)),
        b"POST /length HTTP/1.1\r\nHost: a\r\nTransfer-Encoding: chunked\r\n\r\n5\r\nhel",
    ],
    ids=["long", "chunked"],
)
def test_a_body_read_in_a_thread_ends_with_408_too(quick: Quick, begun: bytes) -> None:
    begun_s = time.monotonic()

    told = problem(quick.send(begun))

    assert (told["type"], told["instance"]) == ("/problems/request-too-slow", "/length")
    assert QUICK.body_s <= time.monotonic() - begun_s < QUICK.body_s + SOON_S


def test_a_refused_body_that_stalls_gets_its_refusal(quick: Quick) -> None:
    told = problem(quick.send(post("/nowhere", LONG_BYTES, bytes(20_000))))

    assert (told["status"], told["type"]) == (404, "/problems/route-unknown")


def test_long_bodies_that_stall_leave_threads_to_others(quick: Quick) -> None:
    with ExitStack() as kept:
        for _ in range(3 * THREADS):
            kept.enter_context(quick.send(post("/length", LONG_BYTES, bytes(20_000))))
        time.sleep(0.2)
        begun_s = time.monotonic()

        assert answered(quick.send(post("/length", 3, b"abc"))) == (200, b"3")
        assert time.monotonic() - begun_s < SOON_S


def test_a_long_body_is_taken_whole(quick: Quick) -> None:
    assert answered(quick.send(post("/length", LONG_BYTES, bytes(LONG_BYTES)))) == (200, b"%d" % LONG_BYTES)


def test_a_sender_who_waits_for_a_word_is_told_to_go_on(quick: Quick) -> None:
    head = b"POST /length HTTP/1.1\r\nHost: a\r\nContent-Length: 3\r\nExpect: 100-continue\r\n\r\n"
    connection = quick.send(head)

    assert connection.recv(100) == b"HTTP/1.1 100 Continue\r\n\r\n"
    connection.sendall(b"abc")
    assert answered(connection) == (200, b"3")


def test_a_head_that_does_not_come_ends_with_408_and_silence_with_nothing(quick: Quick) -> None:
    begun_s = time.monotonic()
    silent, slow = quick.connect(), quick.send(b"GET /healthz HTTP/1.1\r\nHo")

    assert problem(slow)["type"] == "/problems/request-too-slow"
    assert silent.recv(1) == b""
    silent.close()
    assert QUICK.head_s <= time.monotonic() - begun_s < QUICK.head_s + 2 * SOON_S


def test_a_head_without_end_is_refused(quick: Quick) -> None:
    told = problem(quick.send(b"GET /healthz HTTP/1.1\r\nA: " + b"b" * QUICK.head_bytes))

    assert (told["type"], told["status"]) == ("/problems/head-too-large", 431)
    assert told["detail"] == "the head of the request is longer than 8192 bytes"


def test_a_body_that_is_cut_short_is_answered_at_once(quick: Quick) -> None:
    connection = quick.send(post("/length", 5000, b"MThd"))
    begun_s = time.monotonic()
    connection.shutdown(socket.SHUT_WR)

    assert answered(connection)[0] in (200, 400)
    assert time.monotonic() - begun_s < SOON_S


def test_of_an_address_with_too_many_connections_the_oldest_is_let_go(quick: Quick) -> None:
    with ExitStack() as kept:
        begun_s = time.monotonic()
        oldest = kept.enter_context(quick.send(post("/length", 5000, b"MThd")))
        for _ in range(QUICK.connections_per_address):
            newest = kept.enter_context(quick.connect())

        assert problem(oldest)["type"] == "/problems/request-too-slow"
        assert time.monotonic() - begun_s < QUICK.body_s  # its own time was not up
        newest.sendall(post("/length", 3, b"abc"))
        assert answered(newest) == (200, b"3")


def test_who_is_let_go_before_anything_came_is_told_to_come_again(quick: Quick) -> None:
    with ExitStack() as kept:
        oldest = kept.enter_context(quick.connect())
        for _ in range(QUICK.connections_per_address):
            kept.enter_context(quick.connect())
        time.sleep(0.5)  # till all are taken

        oldest.sendall(post("/length", 3, b"abc"))  # as it was about to
        status, retry_after, told = come_again(oldest)
        assert (status, retry_after, told["type"]) == (503, str(COME_AGAIN_S), "/problems/service-busy")


def test_of_many_who_send_nothing_those_let_go_hold_no_place(quick: Quick) -> None:
    with ExitStack() as kept:
        silent = [kept.enter_context(quick.connect()) for _ in range(4 * QUICK.connections)]
        begun_s = time.monotonic()

        assert quick.health_took_s() < SOON_S
        assert silent[0].recv(1) in (b"", b"H")
        assert time.monotonic() - begun_s < QUICK.linger_s + SOON_S


def test_when_told_to_stop_it_answers_what_it_has_and_ends(tmp_path: Path) -> None:
    with ExitStack() as kept:
        quick = kept.enter_context(running(tmp_path))
        working = [kept.enter_context(quick.send(SLOW)) for _ in range(2 * THREADS)]
        silent, stalled = (kept.enter_context(quick.send(text)) for text in (b"", post("/length", 5000, b"MThd")))
        time.sleep(0.3)
        begun_s = time.monotonic()
        quick.process.send_signal(signal.SIGTERM)

        assert silent.recv(1) == b""
        assert problem(stalled)["type"] == "/problems/request-too-slow"
        assert [answered(one) for one in working] == [(200, b"at last")] * (2 * THREADS)
        quick.process.wait(10 + BUSY_S)
        assert time.monotonic() - begun_s < 2 * SLOW_S + BUSY_S  # in two rounds


@pytest.mark.parametrize(
    ("client", "address"),
    [
        (("192.0.2.1", 5000), "192.0.2.1"),
        (("::ffff:192.0.2.1", 5000, 0, 0), "192.0.2.1"),
        (("2001:db8:1:2:3::4", 5000, 0, 0), "2001:db8:1:2::/64"),
        (("fe80::1%eth0", 5000, 0, 2), "fe80::/64"),
        ("", ""),
        (("a pipe", 0), "a pipe"),
    ],
)
def test_connections_are_counted_by_address_and_by_network(client: Any, address: str) -> None:
    assert address_of(client) == address


FIELDS = 100  # as many as gunicorn takes


@pytest.mark.parametrize(
    ("text", "name"),
    [
        (b"GARBAGE\r\n\r\n", "request-malformed"),
        (b"GET / HTTP/3.7\r\n\r\n", "request-malformed"),
        (b"GET / HTTP/1.1\r\nHost: a\r\nBad Name: 1\r\n\r\n", "request-malformed"),
        (b"POST /length HTTP/1.1\r\nHost: a\r\nTransfer-Encoding: gzip\r\n\r\n", "request-malformed"),
        (b"GET /%b HTTP/1.1\r\nHost: a\r\n\r\n" % (4090 * b"a"), "address-too-long"),
        (
            b"GET / HTTP/1.1\r\nHost: a\r\n%b\r\n" % b"".join(b"X-%d: a\r\n" % i for i in range(FIELDS)),
            "head-too-large",
        ),
        (b"GET / HTTP/1.1\r\nHost: a\r\nX: %b\r\n\r\n" % (9000 * b"a"), "head-too-large"),
    ],
    ids=["no HTTP", "version", "name of a field", "coding", "long line", "many fields", "long head"],
)
def test_a_request_that_cannot_be_read_is_told_why_like_every_other_error(quick: Quick, text: bytes, name: str) -> None:
    told = problem(quick.send(text))

    kind = PROBLEMS[name]
    assert (told["type"], told["status"], told["try_again"]) == (kind.type, kind.status, False)
    assert told["detail"]


class Signs:
    """What gunicorn keeps for a worker's signs of life."""

    def __init__(self) -> None:
        self.count = 0

    def notify(self) -> None:
        self.count += 1


def test_a_loop_shows_a_sign_of_life_when_one_is_due_and_not_at_every_turn(monkeypatch: pytest.MonkeyPatch) -> None:
    worker, signs, now_s = GatheringWorker.__new__(GatheringWorker), Signs(), [100.0]
    worker.tmp, worker._sign_of_life_due_s = signs, 0.0
    monkeypatch.setattr(web_worker.time, "monotonic", lambda: now_s[0])

    for _ in range(1000):  # turns in no time
        worker.notify()
    at_once = signs.count
    now_s[0] += SIGN_OF_LIFE_EVERY_S
    worker.notify()

    assert (at_once, signs.count) == (1, 2)
    assert Config().timeout >= 10 * SIGN_OF_LIFE_EVERY_S  # s; what the service leaves as gunicorn has it


class Client:
    """The other end of a connection that breaks off, or of one that does not."""

    def __init__(self, *, is_gone: bool) -> None:
        self.is_gone = is_gone
        self.got = b""

    def sendall(self, told: bytes) -> None:
        if self.is_gone:
            raise ConnectionResetError
        self.got += told


@pytest.mark.parametrize("is_gone", [False, True])
def test_what_fails_outside_the_app_is_told_as_the_service_s_own_fault_and_logged(
    caplog: pytest.LogCaptureFixture, *, is_gone: bool
) -> None:
    worker, client = GatheringWorker.__new__(GatheringWorker), Client(is_gone=is_gone)

    worker.handle_error(None, client, None, ZeroDivisionError("geheim"))

    assert "a request failed outside the app" in caplog.messages
    assert client.got.startswith(b"" if is_gone else b"HTTP/1.1 500 ")
    assert (b"/problems/internal-error" in client.got) is not is_gone
    assert b"geheim" not in client.got


def test_an_answer_of_which_nothing_is_taken_for_too_long_is_broken_off_and_the_connection_closed(
    monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    def times_out(*_: object) -> bool:
        raise TimeoutError

    monkeypatch.setattr(web_worker.ThreadWorker, "handle_request", times_out)
    worker: Any = GatheringWorker.__new__(GatheringWorker)

    assert worker.handle_request(None, None) is False  # gunicorn is not to keep it
    assert "an answer was broken off: nothing of it was taken for too long" in caplog.messages


class Listener:
    """A socket on which taking a connection fails."""

    def __init__(self, number: int) -> None:
        self.number = number

    def accept(self) -> None:
        raise OSError(self.number, os.strerror(self.number))


def accepting() -> tuple[Any, list[str]]:
    """A process with nothing in hand, and of whom it lets go."""
    worker: Any = GatheringWorker.__new__(GatheringWorker)
    let_go: list[str] = []
    worker._let_go_of_one = let_go.append
    return worker, let_go


@pytest.mark.parametrize("number", [errno.EMFILE, errno.ENFILE])
def test_a_process_that_may_open_no_more_files_lets_go_of_who_has_been_longest_on_the_way(number: int) -> None:
    worker, let_go = accepting()

    assert worker.accept(Listener(number)) is False
    assert let_go == [""]  # of any address


@pytest.mark.parametrize("number", [errno.EAGAIN, errno.ECONNABORTED])
def test_a_connection_that_is_gone_before_it_is_taken_costs_nobody_a_place(number: int) -> None:
    worker, let_go = accepting()

    assert worker.accept(Listener(number)) is False
    assert let_go == []


def test_a_listener_that_is_broken_is_no_quiet_one() -> None:
    worker, _ = accepting()

    with pytest.raises(OSError, match="Bad file descriptor"):
        worker.accept(Listener(errno.EBADF))
