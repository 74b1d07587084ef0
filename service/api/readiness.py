"""/readyz: whether this process can serve now: its database, its store of files and its queue answer.

It answers within two seconds whatever is away, and however often it is asked: each part is asked by one thread at a
time, and what it said a moment ago is told again.
"""

import logging
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass

from flask import Blueprint, Response

from service.api.answers import json_response
from service.api.asking import open_to_all
from service.api.describing import describes
from service.api.operations import about
from service.api.problems import ProblemError
from service.background.queue import Queue, QueueAwayError
from service.parts import Parts
from service.store.faults import StoreError
from service.store.migrating import check_migrated

log = logging.getLogger("discwright")

WITHIN_S = 1.8  # s; for all parts together, so that the answer is there within two
TOLD_AGAIN_S = 1.0  # s; how old a part's word may be
RETRY_AFTER_S = 5  # s; as often as such a look is usually made
SILENT = f"did not answer within {WITHIN_S:g} s"


def readiness_routes(parts: Parts) -> Blueprint:
    """The route that tells whether the service is ready.

    Args:
        parts: Whose database, files and queue are asked.
    """
    routes = Blueprint("readiness", __name__)
    askings = {
        "database": _Asking(lambda: check_migrated(parts.store)),
        "files": _Asking(parts.files.check),
        "queue": _Asking(lambda: _ask_queue(parts.settings.queue_url)),
    }

    @routes.get("/readyz")
    @describes(about.READY)
    @open_to_all
    def tell_readiness() -> Response:
        until_s = time.monotonic() + WITHIN_S
        for asking in askings.values():
            asking.begin()  # all at once
        told = {name: asking.answer(until_s) for name, asking in askings.items()}
        away = {name: reason for name, reason in told.items() if reason is not None}
        if away:
            # The reasons may name machines and folders: they are for the log, and who may read it.
            log.warning("not ready: %s", "; ".join(f"{name}: {reason}" for name, reason in away.items()))
            raise ProblemError(
                name="not-ready",
                detail=f"this does not answer: {', '.join(away)}",
                more={"away": sorted(away)},
                headers={"Retry-After": str(RETRY_AFTER_S)},
            )
        response = json_response({"status": "ready", "parts": dict.fromkeys(told, "ok")})
        response.headers["Cache-Control"] = "no-store"
        return response

    return routes


def _ask_queue(url: str) -> None:
    queue = Queue(url)  # its own: a queue keeps a connection for each thread, and this one ends
    try:
        queue.length()
    finally:
        queue.close()


@dataclass(slots=True)
class _Word:
    """What a part said last."""

    reason: str | None
    at_s: float


class _Asking:
    """Asks one part, in a thread of its own, so that a part that hangs holds up nobody."""

    def __init__(self, ask: Callable[[], object]) -> None:
        self._ask = ask
        self._changing = threading.Condition()
        self._word: _Word | None = None
        self._is_asking = False

    def begin(self) -> None:
        """Ask, where nobody asks already and the last word is not new."""
        with self._changing:
            if self._is_asking or self._is_new():
                return
            self._is_asking = True
            self._word = None
        threading.Thread(target=self._work, name="readiness", daemon=True).start()

    def answer(self, until_s: float) -> str | None:
        """Why the part is away; None where it answers."""
        with self._changing:
            self._changing.wait_for(lambda: not self._is_asking, max(0.0, until_s - time.monotonic()))
            return SILENT if self._word is None else self._word.reason

    def _is_new(self) -> bool:
        return self._word is not None and time.monotonic() - self._word.at_s < TOLD_AGAIN_S

    def _work(self) -> None:
        try:
            self._ask()
            reason = None
        except (StoreError, QueueAwayError, OSError) as fault:
            reason = str(fault) or type(fault).__name__
        except Exception as fault:  # noqa: BLE001 -- whatever it is, the part does not work
            reason = type(fault).__name__
        with self._changing:
            self._word = _Word(reason=reason, at_s=time.monotonic())
            self._is_asking = False
            self._changing.notify_all()
