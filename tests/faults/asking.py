"""Requests to a service that is killed meanwhile: sent again until they are answered, every answer judged."""

import json
import threading
import time
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import urllib3

AWAY = (503, 507)  # what a service may say that cannot do its work now: RFC 9110 section 15.6.4, RFC 4918 section 11.5
STILL_RUNNING = 409
CONNECT_WITHIN_S = 5.0
ANSWER_WITHIN_S = 90.0
PAUSE_S = 0.2  # s; after no answer, or one that says to come later: who is more patient would find fewer faults
MOST_PAUSE_S = 2.0  # s; of what Retry-After asks for while the same request is being answered


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """An answer that came whole."""

    status: int
    headers: Mapping[str, str]
    body: bytes

    @property
    def json(self) -> Any:
        """The body as a JSON value."""
        return json.loads(self.body)


@dataclass(slots=True, kw_only=True)
class Answers:
    """What was answered to all who ask, and what was wrong with it."""

    statuses: Counter[int] = field(default_factory=Counter)
    breaks: int = 0
    repeats: int = 0
    longest_s: float = 0.0
    faults: list[str] = field(default_factory=list)
    lock: threading.Lock = field(default_factory=threading.Lock)

    def note(self, told: Told, took_s: float) -> None:
        """Count an answer."""
        with self.lock:
            self.statuses[told.status] += 1
            self.longest_s = max(self.longest_s, took_s)

    def broke(self) -> None:
        """Count a connection that broke."""
        with self.lock:
            self.breaks += 1

    def repeated(self) -> None:
        """Count a request that writes and was sent again."""
        with self.lock:
            self.repeats += 1

    def wrong(self, fault: str) -> None:
        """Note what must not be."""
        with self.lock:
            self.faults.append(fault)


class Asking:
    """Asks one service with one key."""

    def __init__(self, url: str, key: str, answers: Answers) -> None:
        """Note where, who, and where answers are counted."""
        self._url = url
        self._key = key
        self.answers = answers
        timeout = urllib3.Timeout(connect=CONNECT_WITHIN_S, read=ANSWER_WITHIN_S)
        self._pool = urllib3.PoolManager(timeout=timeout, retries=False, maxsize=1)

    def ask(
        self, method: str, path: str, *, body: bytes | None = None, headers: Mapping[str, str] | None = None
    ) -> Told | None:
        """One request; None where its connection broke, or the service says, as it should, that it is away."""
        shown = {"Authorization": f"Bearer {self._key}", **(headers or {})}
        begun_s = time.monotonic()
        try:
            answer = self._pool.request(method, self._url + path, body=body, headers=shown, redirect=False)
        except urllib3.exceptions.HTTPError:
            self.answers.broke()
            time.sleep(PAUSE_S)
            return None
        fields = {name.lower(): value for name, value in answer.headers.items()}
        told = Told(status=answer.status, headers=fields, body=answer.data)
        self.answers.note(told, time.monotonic() - begun_s)
        if self._is_away(f"{method} {path}", told):
            time.sleep(PAUSE_S)
            return None
        return told

    def insist(
        self,
        method: str,
        path: str,
        *,
        body: bytes,
        headers: Mapping[str, str],
        within_s: float,
    ) -> Told:
        """Send a request with its Idempotency-Key again and again until it is answered.

        Raises:
            TimeoutError: It is not, after that time.
        """
        until_s = time.monotonic() + within_s
        while True:
            told = self.ask(method, path, body=body, headers=headers)
            if told is not None and not _is_running_still(told):
                return told
            if time.monotonic() > until_s:
                raise TimeoutError(f"{method} {path} is not answered after {within_s:g} s")
            self.answers.repeated()
            if told is not None:
                time.sleep(min(float(told.headers["retry-after"]), MOST_PAUSE_S))

    def _is_away(self, asked: str, told: Told) -> bool:
        if told.status < 500:
            return False
        problem = told.json if told.headers.get("content-type") == "application/problem+json" else {}
        is_clear = (
            told.status in AWAY
            and told.headers.get("retry-after", "").isdigit()
            and problem.get("status") == told.status
            and problem.get("try_again") is True
        )
        if not is_clear:
            self.answers.wrong(f"{asked}: {told.status} {dict(told.headers)} {told.body[:300]!r}")
        return True


def _is_running_still(told: Told) -> bool:
    is_so = told.status == STILL_RUNNING and told.json["type"] == "/problems/still-running"
    return is_so and told.headers["retry-after"].isdigit()
