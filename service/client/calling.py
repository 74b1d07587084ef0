"""How requests are sent: with a key, again where that may help, and each piece of work done once."""

import json
import random
import time
import uuid
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any
from urllib.parse import quote, urlencode

import urllib3

Query = Mapping[str, str | int | bool | None]
Parts = Mapping[str, bytes | Mapping[str, Any]]
Headers = Mapping[str, str]

CONNECT_WITHIN_S = 10.0
ANSWER_WITHIN_S = 90.0  # s; longer than any wait that can be asked for
FIRST_WAIT_S = 0.5  # s; where the service does not say how long to wait; doubled each time
LONGEST_WAIT_S = 30.0
JSON = "application/json"
IDEMPOTENCY_KEY = "Idempotency-Key"
SAME_AGAIN = ("GET", "HEAD", "PUT", "DELETE")  # that may be sent twice (RFC 9110 section 9.2.2)
PROBLEMS_FROM = 400  # the first status that tells a problem


class ProblemError(Exception):
    """The service refused or failed; its problem details say why (RFC 9457).

    Attributes:
        status: Of HTTP.
        kind: The last part of the problem's type, such as "order-unknown"; "" where the answer told none.
        told: All members of the problem.
        request_id: To be told to who looks after the service.
    """

    def __init__(self, status: int, told: Mapping[str, Any], request_id: str) -> None:
        """Take the problem apart."""
        self.status = status
        self.told = told
        self.kind = str(told.get("type", "")).rpartition("/")[2]
        self.request_id = request_id
        super().__init__(f"{status} {self.kind}: {told.get('detail', 'no detail was told')} ({request_id})")


class AwayError(Exception):
    """The service did not answer, however often it was asked."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """An answer that tells no problem; names of header fields in small letters."""

    status: int
    headers: Mapping[str, str]
    body: bytes

    @property
    def json(self) -> Any:
        """The body as a JSON value."""
        return json.loads(self.body)


@dataclass(frozen=True, slots=True, kw_only=True)
class Request:
    """A request, ready to be sent any number of times."""

    method: str
    url: str
    headers: dict[str, str] = field(default_factory=dict)
    body: bytes | None = None


@dataclass(frozen=True, slots=True)
class Form:
    """A body of parts, each bytes or a JSON object."""

    parts: Parts


@dataclass(frozen=True, slots=True)
class Fields:
    """A body of fields, as a page's form sends it."""

    fields: Mapping[str, str]


def once() -> dict[str, str]:
    """A new Idempotency-Key: a request with it may be sent again, and its work is done once."""
    return {IDEMPOTENCY_KEY: f'"{uuid.uuid4().hex}"'}


def place(path: str, values: Mapping[str, str | int]) -> str:
    """A path with values in the places of its parameters."""
    for name, value in values.items():
        path = path.replace(f"{{{name}}}", quote(str(value), safe=""))
    return path


class Caller:
    """Sends requests to one service with one key; safe to use from many threads."""

    def __init__(
        self,
        url: str,
        key: str | None,
        *,
        patience_s: float = 60.0,
        sleep: Callable[[float], None] = time.sleep,
    ) -> None:
        """Note where and who.

        Args:
            url: Of the service.
            key: That requests show; None for none.
            patience_s: How long a request is sent again before its failure is told.
            sleep: Waits so many seconds.
        """
        self._url = url.rstrip("/")
        self._key = key
        self._patience_s = patience_s
        self._sleep = sleep
        timeout = urllib3.Timeout(connect=CONNECT_WITHIN_S, read=ANSWER_WITHIN_S)
        self._pool = urllib3.PoolManager(timeout=timeout, retries=False)

    def json(
        self, method: str, path: str, *, query: Query | None = None, headers: Headers | None = None, body: Any = None
    ) -> Any:
        """The JSON value that a request is answered with; the rest is as for `send`."""
        return self.send(method, path, query=query, headers=headers, body=body).json

    def send(
        self, method: str, path: str, *, query: Query | None = None, headers: Headers | None = None, body: Any = None
    ) -> Answer:
        """Send a request, and send it again where that may help.

        Args:
            method: Of HTTP.
            path: From the root of the service; the address of a link will do.
            query: What is None is left out.
            headers: Further fields of its head; those of `once` let a POST be sent again.
            body: A JSON value, bytes, a Form, or Fields; None for none.

        Raises:
            ProblemError: It is refused.
            AwayError: No answer came.
        """
        url = path if path.startswith(("http:", "https:")) else self._url + path
        said = {name: _word(value) for name, value in (query or {}).items() if value is not None}
        told = {"Request-Id": f"client-{uuid.uuid4().hex}", **(headers or {})}
        if self._key is not None and url.startswith(f"{self._url}/"):
            told["Authorization"] = f"Bearer {self._key}"
        content = _content(told, body)
        address = f"{url}{'&' if '?' in url else '?'}{urlencode(said)}" if said else url
        return self._sent(Request(method=method, url=address, headers=told, body=content))

    def _sent(self, request: Request) -> Answer:
        until_s = time.monotonic() + self._patience_s
        wait_s = FIRST_WAIT_S
        may_repeat = request.method in SAME_AGAIN or IDEMPOTENCY_KEY in request.headers
        while True:
            try:
                answer = self._asked(request)
            except urllib3.exceptions.HTTPError as fault:
                if not may_repeat or time.monotonic() + wait_s > until_s:
                    raise AwayError(f"{request.method} {request.url}: {fault}") from fault
            else:
                if answer.status < PROBLEMS_FROM:
                    return answer
                problem = _problem(answer)
                is_refusal = problem.status < 500  # noqa: PLR2004 -- a refusal did no work, whatever the method
                if not problem.told.get("try_again") or not (may_repeat or is_refusal):
                    raise problem
                wait_s = _wait_told(answer, wait_s)
                if time.monotonic() + wait_s > until_s:
                    raise problem
            self._sleep(wait_s * random.uniform(1.0, 1.2))  # so that many clients do not all come at once
            wait_s = min(wait_s * 2, LONGEST_WAIT_S)

    def _asked(self, request: Request) -> Answer:
        answer = self._pool.request(
            request.method, request.url, body=request.body, headers=request.headers, redirect=False
        )
        headers = {name.lower(): value for name, value in answer.headers.items()}
        return Answer(status=answer.status, headers=headers, body=answer.data)


def _word(value: str | int) -> str:
    return ("true" if value else "false") if isinstance(value, bool) else str(value)


def _content(headers: dict[str, str], body: Any) -> bytes | None:
    """The bytes of a body; its media type goes into the head."""
    if isinstance(body, Form):
        named = {name: _part(name, part) for name, part in body.parts.items()}
        content, headers["Content-Type"] = urllib3.encode_multipart_formdata(named)
        return content
    if isinstance(body, Fields):
        headers["Content-Type"] = "application/x-www-form-urlencoded"
        return urlencode(body.fields).encode()
    if body is None or isinstance(body, bytes):
        return body
    headers.setdefault("Content-Type", JSON)
    return json.dumps(body, allow_nan=False).encode()


def _part(name: str, part: bytes | Mapping[str, Any]) -> tuple[str, bytes, str]:
    if isinstance(part, bytes):
        return (name, part, "application/octet-stream")
    return (name, json.dumps(part, allow_nan=False).encode(), JSON)


def _problem(answer: Answer) -> ProblemError:
    try:
        told = answer.json
    except ValueError:  # a proxy between, perhaps
        told = {}
    return ProblemError(
        answer.status, told if isinstance(told, dict) else {}, answer.headers.get("request-id", "no request id")
    )


def _wait_told(answer: Answer, usual_s: float) -> float:
    text = answer.headers.get("retry-after", "")
    return float(text) if text.isdigit() else usual_s


class Group:
    """What every group of operations is: methods that send by one caller."""

    def __init__(self, caller: Caller) -> None:
        """Note by what they send."""
        self._caller = caller
