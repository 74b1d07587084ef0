import socket
import ssl
import time
from collections.abc import Callable
from contextlib import ExitStack
from pathlib import Path

import pytest

from service.hooks.guard import Target
from service.hooks.posting import Answer, Message, PostError, post
from tests.service.hooks.certificates import certificate_for
from tests.service.hooks.receivers import Receiver, listening, sending_bytes

MESSAGE = Message(headers={"Content-Type": "application/json", "webhook-id": "msg_1"}, body=b'{"type":"hook.test"}')
TLS = ssl.create_default_context()


def plain(port: int, path: str = "/told") -> Target:
    return Target(scheme="http", host="shop.example", port=port, path=path)


def posted(target: Target, *, tls: ssl.SSLContext = TLS, within_s: float = 5, addresses: int = 1) -> Answer:
    return post(target, ["127.0.0.1"] * addresses, MESSAGE, tls=tls, within_s=within_s)


def test_a_message_arrives_as_it_is_and_its_status_comes_back() -> None:
    with listening(Receiver()) as receiver:
        answer = posted(plain(receiver.port, "/told?shop=7"))

    (got,) = receiver.got
    assert answer == Answer(status=204, retry_after=None)
    assert (got.path, got.body) == ("/told?shop=7", MESSAGE.body)
    assert got.headers["host"] == f"shop.example:{receiver.port}"
    assert got.headers["webhook-id"] == "msg_1"
    assert got.headers["content-type"] == "application/json"
    assert "authorization" not in got.headers
    assert "cookie" not in got.headers


def test_a_redirect_is_not_followed() -> None:
    inner = Receiver()
    with (
        listening(inner),
        listening(Receiver(answer=lambda _got: (307, {"Location": inner.url}))) as outer,
    ):
        answer = posted(plain(outer.port))

    assert answer.status == 307
    assert (len(outer.got), len(inner.got)) == (1, 0)


def test_the_proxy_of_the_environment_is_not_asked(monkeypatch: pytest.MonkeyPatch) -> None:
    with listening(Receiver()) as proxy, listening(Receiver()) as receiver:
        for name in ("http_proxy", "HTTP_PROXY", "https_proxy", "HTTPS_PROXY", "all_proxy", "ALL_PROXY"):
            monkeypatch.setenv(name, f"http://127.0.0.1:{proxy.port}")
        posted(plain(receiver.port))

    assert (len(proxy.got), len(receiver.got)) == (0, 1)


def test_what_a_hook_asks_for_comes_back() -> None:
    with listening(Receiver(answer=lambda _got: (429, {"Retry-After": "120"}))) as receiver:
        assert posted(plain(receiver.port)) == Answer(status=429, retry_after="120")


def drip_head(connection: socket.socket) -> None:
    connection.sendall(b"HTTP/1.1 200 OK\r\n")
    while True:
        connection.sendall(b"X-More: 1\r\n"[:1])
        time.sleep(0.05)


def say_nothing(connection: socket.socket) -> None:
    while connection.recv(4096):
        pass


def go_on_with_100(connection: socket.socket) -> None:
    while True:
        connection.sendall(b"HTTP/1.1 100 Continue\r\n\r\n")
        time.sleep(0.05)


@pytest.mark.parametrize("send", [drip_head, say_nothing, go_on_with_100])
def test_a_head_that_never_ends_is_cut_when_time_is_up(send: Callable[[socket.socket], None]) -> None:
    with sending_bytes(send) as port:
        started = time.monotonic()
        with pytest.raises(PostError, match=r"^no answer within 0\.5 s$"):
            posted(plain(port), within_s=0.5)

    assert time.monotonic() - started < 2


def drip_body(connection: socket.socket) -> None:
    connection.sendall(b"HTTP/1.1 200 OK\r\nContent-Length: 1000\r\n\r\n")
    while True:
        connection.sendall(b"x")
        time.sleep(0.05)


def test_a_body_that_drips_is_cut_and_the_status_holds() -> None:
    with sending_bytes(drip_body) as port:
        started = time.monotonic()
        answer = posted(plain(port), within_s=0.5)

    assert answer.status == 200
    assert time.monotonic() - started < 2


def test_of_a_huge_body_little_is_read() -> None:
    sent = []

    def flood(connection: socket.socket) -> None:
        connection.sendall(b"HTTP/1.1 200 OK\r\nContent-Length: 10000000000\r\n\r\n")
        while True:
            sent.append(connection.send(b"x" * 65_536))

    with sending_bytes(flood) as port:
        answer = posted(plain(port))

    assert answer.status == 200
    assert sum(sent) < 32 * 1024 * 1024  # what fits the buffers of the connection; of 10 GB


def test_a_body_packed_to_burst_is_not_unpacked() -> None:
    def send(connection: socket.socket) -> None:
        connection.recv(65_536)
        connection.sendall(b"HTTP/1.1 200 OK\r\nContent-Encoding: gzip\r\nContent-Length: 4\r\n\r\nnone")

    with sending_bytes(send) as port:
        assert posted(plain(port)).status == 200


@pytest.mark.parametrize(
    ("sent", "message"),
    [
        (b"", "the connection broke before an answer came"),
        (b"SSH-2.0-here\r\n", "what came back is not HTTP"),
        (b"HTTP/1.1 abc\r\n\r\n", "what came back is not HTTP"),
        (b"HTTP/1.1 200 OK\r\n" + b"X: 1\r\n" * 200 + b"\r\n", "what came back is not HTTP"),
        (b"HTTP/1.1 200 OK\r\nX: " + b"y" * 70_000 + b"\r\n\r\n", "what came back is not HTTP"),
    ],
)
def test_what_is_no_answer_is_told_without_its_words(sent: bytes, message: str) -> None:
    def send(connection: socket.socket) -> None:
        connection.recv(65_536)
        connection.sendall(sent)
        connection.shutdown(socket.SHUT_WR)
        while connection.recv(4096):
            pass

    with sending_bytes(send) as port, pytest.raises(PostError, match=f"^{message}$"):
        posted(plain(port))


def test_where_nobody_picks_up_it_is_told() -> None:
    with socket.create_server(("127.0.0.1", 0)) as server:
        port = server.getsockname()[1]

    with pytest.raises(PostError, match=r"^nobody picked up at the host's addresses$"):
        posted(plain(port), addresses=2)


def test_where_nobody_answers_the_knock_time_is_up_for_all_addresses_together() -> None:
    with socket.create_server(("127.0.0.1", 0), backlog=0) as server, ExitStack() as waiting:
        for _ in range(8):  # fill the queue of those who wait to be let in; who comes then is not answered at all
            knocking = waiting.enter_context(socket.socket())
            knocking.settimeout(0)
            knocking.connect_ex(server.getsockname())
        started = time.monotonic()
        with pytest.raises(PostError, match=r"^no answer within 1 s$"):
            posted(plain(server.getsockname()[1]), within_s=1, addresses=3)

    assert 0.9 < time.monotonic() - started < 3


def test_the_next_address_is_tried_where_nobody_picks_up_at_the_first() -> None:
    with listening(Receiver()) as receiver:
        answer = post(plain(receiver.port), ["127.0.0.9", "127.0.0.1"], MESSAGE, tls=TLS, within_s=5)

    assert answer.status == 204


def test_over_tls_the_certificate_is_held_against_the_name_though_the_address_is_connected_to(tmp_path: Path) -> None:
    server, client = certificate_for("shop.example", tmp_path)
    named: list[str] = []
    server.sni_callback = lambda _socket, name, _context: named.append(str(name))

    with listening(Receiver(), tls=server) as receiver:
        answer = posted(Target(scheme="https", host="shop.example", port=receiver.port, path="/"), tls=client)

    assert answer.status == 204
    assert named == ["shop.example"]


def test_a_certificate_of_another_name_is_refused_and_nothing_is_sent(tmp_path: Path) -> None:
    server, client = certificate_for("other.example", tmp_path)

    with (
        listening(Receiver(), tls=server) as receiver,
        pytest.raises(PostError, match=r"^the certificate is not good for this host: .*shop\.example"),
    ):
        posted(Target(scheme="https", host="shop.example", port=receiver.port, path="/"), tls=client)

    assert receiver.got == []


def test_a_certificate_of_an_unknown_authority_is_refused_and_nothing_is_sent(tmp_path: Path) -> None:
    server, _ = certificate_for("shop.example", tmp_path)

    with (
        listening(Receiver(), tls=server) as receiver,
        pytest.raises(PostError, match=r"^the certificate is not good for this host: unable to get local issuer"),
    ):
        posted(Target(scheme="https", host="shop.example", port=receiver.port, path="/"))

    assert receiver.got == []


def test_where_there_is_no_tls_it_is_told() -> None:
    def send(connection: socket.socket) -> None:
        connection.recv(65_536)
        connection.sendall(b"HTTP/1.1 400 Bad Request\r\n\r\n")

    with sending_bytes(send) as port, pytest.raises(PostError, match=r"^TLS could not be agreed on$"):
        posted(Target(scheme="https", host="shop.example", port=port, path="/"))


def test_a_handshake_that_hangs_is_cut_when_time_is_up() -> None:
    with sending_bytes(say_nothing) as port:
        started = time.monotonic()
        with pytest.raises(PostError, match=r"^no answer within 0\.5 s$"):
            posted(Target(scheme="https", host="shop.example", port=port, path="/"), within_s=0.5)

    assert time.monotonic() - started < 2
