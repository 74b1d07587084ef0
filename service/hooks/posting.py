"""One POST to one address that was looked at, bounded in time and size."""

import http.client
import socket
import ssl
import threading
import time
from collections.abc import Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass
from types import TracebackType
from typing import Self

from urllib3.connection import HTTPConnection, HTTPSConnection
from urllib3.exceptions import ConnectTimeoutError, HTTPError, NewConnectionError

from service.hooks.guard import Target
from service.limits import HOOK_LIMITS


class PostError(Exception):
    """No answer came; the text says why, and nothing of what the other side said."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What a hook answered.

    Attributes:
        status: Of HTTP.
        retry_after: The header field of that name as it came, None where there is none.
    """

    status: int
    retry_after: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Message:
    """What is posted.

    Attributes:
        headers: Beside Host and Content-Length.
        body: The bytes.
    """

    headers: Mapping[str, str]
    body: bytes


def post(target: Target, addresses: Sequence[str], message: Message, *, tls: ssl.SSLContext, within_s: float) -> Answer:
    """Post a message and hear the answer's status. Redirects are not followed, proxies not asked.

    Args:
        target: Where to; over TLS the certificate must be good for its host.
        addresses: Of the host, checked; nothing else is connected to.
        message: What to post.
        tls: Whose certificates are believed.
        within_s: Seconds for all of it, from connecting to the end of the answer's head.

    Raises:
        PostError: No answer came in time, or none that is HTTP.
    """
    with _Deadline(within_s) as deadline:
        try:
            connection = _connected(target, addresses[: HOOK_LIMITS.addresses], tls, deadline)
            try:
                return _asked(connection, target, message, deadline)
            finally:
                connection.close()
        except (HTTPError, http.client.HTTPException, OSError, ValueError) as fault:
            raise PostError(_told(fault, deadline)) from fault


class _Deadline:
    """Cuts a connection when its time is up, however slowly the other side goes on sending."""

    def __init__(self, within_s: float) -> None:
        self.within_s = within_s
        self._ends_at = time.monotonic() + within_s
        self._lock = threading.Lock()
        self._held: list[socket.socket] = []
        self._timer = threading.Timer(within_s, self._cut)
        self._timer.daemon = True

    def __enter__(self) -> Self:
        self._timer.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._timer.cancel()
        with self._lock:
            for one in self._held:
                one.close()
            self._held.clear()

    @property
    def is_over(self) -> bool:
        """Whether the time is up."""
        return time.monotonic() >= self._ends_at

    def left_s(self) -> float:
        """Seconds that are left; never none, for no time at all means something else to a socket."""
        return max(0.001, self._ends_at - time.monotonic())

    def hold(self, connected: socket.socket) -> None:
        """Cut this one too; a second handle is kept, since TLS takes the first."""
        with self._lock:
            self._held.append(connected.dup())
        if self.is_over:
            self._cut()

    def _cut(self) -> None:
        with self._lock:
            for one in self._held:
                with suppress(OSError):  # the other side was quicker
                    one.shutdown(socket.SHUT_RDWR)


class _Plain(HTTPConnection):
    deadline: _Deadline

    def _new_conn(self) -> socket.socket:
        connected = super()._new_conn()
        self.deadline.hold(connected)
        return connected


class _Secure(HTTPSConnection):
    deadline: _Deadline

    def _new_conn(self) -> socket.socket:
        connected = super()._new_conn()
        self.deadline.hold(connected)
        return connected


def _connected(target: Target, addresses: Sequence[str], tls: ssl.SSLContext, deadline: _Deadline) -> HTTPConnection:
    """A connection to the first address that picks up."""
    fault: HTTPError | None = None
    for address in addresses:
        connection: _Plain | _Secure
        wait_s = min(HOOK_LIMITS.connect_s, deadline.left_s())
        if target.scheme == "https":
            connection = _Secure(address, target.port, timeout=wait_s, ssl_context=tls, server_hostname=target.host)
        else:
            connection = _Plain(address, target.port, timeout=wait_s)
        connection.deadline = deadline
        try:
            connection.connect()
        except (NewConnectionError, ConnectTimeoutError) as nobody:
            fault = nobody
            if deadline.is_over:
                break
            continue
        except BaseException:
            connection.close()
            raise
        return connection
    raise fault or ConnectTimeoutError("no address")


def _asked(connection: HTTPConnection, target: Target, message: Message, deadline: _Deadline) -> Answer:
    connection.timeout = deadline.within_s  # of each wait; the deadline cuts what is slower in all
    headers = {"Host": target.authority, "Connection": "close", **message.headers}
    connection.request("POST", target.path, body=message.body, headers=headers)
    # The library's own response would write the URL, which may hold a secret, into the log of a malformed head.
    response = http.client.HTTPConnection.getresponse(connection)
    if deadline.is_over:
        raise TimeoutError  # the head was cut, which reads as its end
    with suppress(http.client.HTTPException, OSError, ValueError):
        # The status was said: a body that breaks off takes nothing back.
        response.read(HOOK_LIMITS.answer_bytes)
    return Answer(status=response.status, retry_after=response.headers.get("Retry-After"))


def _told(fault: Exception, deadline: _Deadline) -> str:
    """Why no answer came: the kind of it alone, since the other side's words are not ours to keep."""
    if deadline.is_over or isinstance(fault, TimeoutError):
        return f"no answer within {deadline.within_s:g} s"
    if isinstance(fault, NewConnectionError | ConnectTimeoutError):
        return "nobody picked up at the host's addresses"
    if isinstance(fault, ssl.SSLCertVerificationError) or isinstance(fault.__cause__, ssl.SSLCertVerificationError):
        return f"the certificate is not good for this host: {_verdict(fault)}"
    if isinstance(fault, ssl.SSLError):
        return "TLS could not be agreed on"
    if isinstance(fault, http.client.HTTPException) and not isinstance(fault, http.client.RemoteDisconnected):
        return "what came back is not HTTP"
    return "the connection broke before an answer came"


def _verdict(fault: Exception) -> str:
    error = fault if isinstance(fault, ssl.SSLCertVerificationError) else fault.__cause__
    return str(getattr(error, "verify_message", "refused"))
