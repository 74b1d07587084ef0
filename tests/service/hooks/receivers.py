"""Receivers of hooks on loopback: one that speaks HTTP, and one that sends whatever bytes a test wants."""

import ssl
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass, field
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from socket import create_server, socket


@dataclass(frozen=True, kw_only=True)
class Got:
    """A request as it arrived."""

    method: str
    path: str
    headers: dict[str, str]
    body: bytes


@dataclass(kw_only=True)
class Receiver:
    """What a receiver got, and what it answers: status and header fields, by the request."""

    answer: Callable[[Got], tuple[int, dict[str, str]]] = lambda _got: (204, {})
    got: list[Got] = field(default_factory=list)
    port: int = 0

    @property
    def url(self) -> str:
        return f"http://127.0.0.1:{self.port}/told?shop=7"


@contextmanager
def listening(receiver: Receiver, tls: ssl.SSLContext | None = None) -> Iterator[Receiver]:
    """A receiver that listens."""

    class Handler(BaseHTTPRequestHandler):
        def do_POST(self) -> None:
            body = self.rfile.read(int(self.headers["Content-Length"]))
            headers = {name.lower(): value for name, value in self.headers.items()}
            got = Got(method="POST", path=self.path, headers=headers, body=body)
            receiver.got.append(got)
            status, fields = receiver.answer(got)
            self.send_response(status)
            for name, value in fields.items():
                self.send_header(name, value)
            self.end_headers()

        def log_message(self, format: str, *args: object) -> None:
            """Say nothing."""

    class Server(ThreadingHTTPServer):
        request_queue_size = 128  # the library's five lose connections where twenty come at once

        def handle_error(self, request: object, client_address: object) -> None:
            """Say nothing of connections that break: tests break them."""

    with Server(("127.0.0.1", 0), Handler) as server:
        if tls is not None:
            server.socket = tls.wrap_socket(server.socket, server_side=True)
        receiver.port = server.server_address[1]
        thread = threading.Thread(target=server.serve_forever, kwargs={"poll_interval": 0.01})
        thread.start()
        try:
            yield receiver
        finally:
            server.shutdown()
            thread.join()


@contextmanager
def sending_bytes(send: Callable[[socket], None]) -> Iterator[int]:
    """A server that takes connections, one at a time, and does with them what a test wants; gives its port."""
    with create_server(("127.0.0.1", 0)) as server:

        def serve() -> None:
            while True:
                try:
                    connection, _ = server.accept()
                except OSError:
                    return
                with connection, suppress(OSError):
                    send(connection)

        thread = threading.Thread(target=serve, daemon=True)
        thread.start()
        try:
            yield server.getsockname()[1]
        finally:
            with suppress(OSError):
                server.shutdown(2)
            server.close()
            thread.join(5)
