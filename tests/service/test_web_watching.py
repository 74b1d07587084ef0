"""Which connections a web process looks at for more of their request."""

import selectors
import socket
import time
from collections import Counter, deque
from contextlib import ExitStack
from typing import Any

import pytest
from gunicorn.config import Config

from service.web_worker import GatheringWorker

SOON_S = 1.0


def test_the_loop_looks_for_more_of_a_request_only_where_there_is_more_to_come(monkeypatch: pytest.MonkeyPatch) -> None:
    worker: Any = GatheringWorker.__new__(GatheringWorker)  # a process's; what it does here needs no more of one
    worker.cfg, worker.nr_conns, worker._busy, worker.worker_connections = Config(), 0, 0, 10
    worker._gathering, worker._of_address, worker._waiting_to_read = {}, Counter(), deque()
    worker.poller = selectors.DefaultSelector()
    whole: list[Any] = []
    monkeypatch.setattr(worker, "enqueue_req", whole.append)
    watched: list[int] = []  # connections, after each step

    with ExitStack() as opened:
        listener = opened.enter_context(socket.create_server(("127.0.0.1", 0)))

        def connected(text: bytes) -> socket.socket:
            sender = opened.enter_context(socket.create_connection(listener.getsockname()))
            sender.sendall(text)
            time.sleep(0.05)  # until it is there
            assert worker.accept(listener)
            watched.append(len(worker.poller.get_map()))
            return sender

        connected(b"GET / HTTP/1.1\r\nHost: a\r\n\r\n")
        connected(b"").sendall(b"GET / HTTP/1.1\r\nHost: b\r\n\r\n")
        for key, _ in worker.poller.select(SOON_S):
            key.data(key.fileobj)
        watched.append(len(worker.poller.get_map()))

    assert watched == [0, 1, 0]
    assert [b"Host: a" in one.gathering.arrived for one in whole] == [True, False]
    assert len(whole) == 2
    for connection in whole:
        connection.close()
