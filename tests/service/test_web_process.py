"""What a web process does when it begins."""

import threading
from types import SimpleNamespace

import pytest
from flask import Flask

from service import web_process
from service.api.computing_queue import COMPUTING_QUEUE
from service.api.waiting_room import WAITING_ROOM


@pytest.mark.parametrize(
    ("threads", "compute", "wait"),
    [(32, 19, 8), (10, 6, 2), (1, 1, 0)],  # 0.6 and 0.25 of the threads, and always one who may compute
)
def test_so_many_of_the_threads_may_compute_and_so_many_wait(
    monkeypatch: pytest.MonkeyPatch, threads: int, compute: int, wait: int
) -> None:
    warmed: list[object] = []
    monkeypatch.setattr(web_process, "_warm", warmed.append)
    monkeypatch.setattr(web_process, "WARM_AFTER_S", 0.0)
    app = Flask("a shop")
    app.extensions[web_process.CHILDREN] = "its children"

    web_process.post_worker_init(SimpleNamespace(wsgi=app, cfg=SimpleNamespace(threads=threads), alive=True))

    assert app.extensions[COMPUTING_QUEUE].places == compute
    room = app.extensions[WAITING_ROOM]
    assert [room.enter(f"key {number}") for number in range(wait + 1)] == [True] * wait + [False]
    for thread in threading.enumerate():
        if isinstance(thread, threading.Timer):
            thread.join(10)
    assert warmed == ["its children"]
