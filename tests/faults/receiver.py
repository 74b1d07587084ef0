"""A receiver of hooks on loopback: takes what is genuine, counts ids, and refuses some messages the first time."""

import hashlib
import json
import random
import threading
from collections import Counter, defaultdict
from datetime import UTC, datetime
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from typing import Self

from service.demo.hook_receiver import is_genuine

REFUSED_SHARE = 0.05  # of messages, the first time they come: they must come again under the same id


class Receiver:
    """What came, by the numbers of events and by the ids of messages."""

    def __init__(self, chance: random.Random) -> None:
        """Listen on a port of its own.

        Args:
            chance: Decides what is refused at first.
        """
        self.secret = ""
        self.ids_of: dict[int, set[str]] = defaultdict(set)
        self.bodies_of: dict[str, set[str]] = defaultdict(set)
        self.kinds: dict[int, str] = {}
        self.came: Counter[str] = Counter()
        self.refused: set[str] = set()
        self.faults: list[str] = []
        self._chance = chance
        self._lock = threading.Lock()
        self._server = _Server(("127.0.0.1", 0), _handler_of(self))
        self._thread = threading.Thread(target=self._server.serve_forever, args=(0.05,), daemon=True)

    @property
    def url(self) -> str:
        """Where it listens."""
        return f"http://127.0.0.1:{self._server.server_address[1]}/told"

    def __enter__(self) -> Self:
        self._thread.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._server.shutdown()
        self._server.server_close()
        self._thread.join()

    def take(self, headers: dict[str, str], body: bytes) -> int:
        """Take a message; gives the status to answer."""
        with self._lock:
            if not is_genuine(self.secret, headers, body):
                self.faults.append(f"not genuine at {datetime.now(UTC)}: {headers} {body[:200]!r}")
                return 401
            name, told = headers["webhook-id"], json.loads(body)["data"]
            self.came[name] += 1
            self.ids_of[told["seq"]].add(name)
            self.kinds[told["seq"]] = told["type"]
            self.bodies_of[name].add(hashlib.sha256(body).hexdigest())
            if self.came[name] == 1 and self._chance.random() < REFUSED_SHARE:
                self.refused.add(name)
                return 500
            return 204


class _Server(ThreadingHTTPServer):
    request_queue_size = 128
    daemon_threads = True

    def handle_error(self, request: object, client_address: object) -> None:
        """Whoever sent it was killed meanwhile."""


def _handler_of(receiver: Receiver) -> type[BaseHTTPRequestHandler]:
    class Handler(BaseHTTPRequestHandler):
        timeout = 10

        def do_POST(self) -> None:
            length = int(self.headers["Content-Length"])
            body = self.rfile.read(length)
            if len(body) < length:
                return  # its sender was killed
            status = receiver.take({name.lower(): value for name, value in self.headers.items()}, body)
            self.send_response(status)
            self.send_header("Content-Length", "0")
            self.end_headers()

        def log_message(self, *_: object) -> None:
            """Nothing is written."""

    return Handler
